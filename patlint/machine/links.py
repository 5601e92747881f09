r"""Polynomial ambiguity: components of the graph of walks that compete for one text, and chains of them.

A *link* is a pair of components with nodes p, q and a text v on which p leads to p and to q, and q to q (the
criterion IDA). On v ** n the engine can go from p to q at any of n places, and walks on from each: a link alone
stands for the square of the text's length, a chain of k links for its power k + 1.

- Links that share a component, one after the other, mostly have a text in common (`a*a*a*b`): `depths`.
- Others need a text each, `v ** n` one after the other: `a*a*xb*b*y` takes cubic time on a ** n x b ** n. The
  degree is that of a longest chain whose texts may differ: `chains`.

Sources: Weber and Seidl, On the degree of ambiguity of finite automata, 1991 (criterion IDA; the degree as the
longest chain); Allauzen, Mohri and Rastogi, General algorithms for testing the ambiguity of finite automata, 2008
(the walk over triples). Limit: `product` triples.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TypeAlias

from patlint.limits import LimitReached
from patlint.machine.walks import Walks

Masks: TypeAlias = tuple[int, ...]
"""A text: for each character the minterms of which one will do, as a mask."""
Seen: TypeAlias = dict[tuple[int, ...], tuple[tuple[int, ...], int] | None]
Link: TypeAlias = tuple[int, int]
Way: TypeAlias = tuple[int, int, Masks]
"""Two nodes p, q and the text on which p leads to p and to q, and q to q."""
Links: TypeAlias = dict[Link, list[Way]]
WAYS = 3
"""Ways that are kept of each link: what follows may take the text of one, but not that of another."""
CHAINS = 3
"""Chains of one length that are told."""


def chain_from(first: Link, links: Links, depth: dict[Link, int]) -> list[Link]:
    """A longest chain of links that begins with `first`."""
    chain = [first]
    while True:
        further = [link for link in links if link[0] == chain[-1][1] and depth[link] == depth[first]]
        if not further:
            return chain
        chain.append(min(further, key=lambda link: len(links[link][0][2])))


def spell(seen: Seen, end: tuple[int, ...]) -> Masks:
    """The text that a search through a graph has read on its way to `end`."""
    masks = []
    step = seen[end]
    while step is not None:
        masks.append(step[1])
        step = seen[step[0]]
    return tuple(reversed(masks))


def path(graph: Walks, start: int, end: int, inside: set[int] | None, allowed: int = -1) -> Masks | None:
    """A shortest text from one node to another, empty where they are the same."""
    seen: Seen = {(start,): None}
    order = [start]
    for node in order:
        if node == end:
            return spell(seen, (end,))
        for edge in graph.edges[node]:
            mask = edge.mask & allowed
            if mask and (inside is None or edge.target in inside) and (edge.target,) not in seen:
                seen[edge.target,] = ((node,), mask)
                order.append(edge.target)
    return None


def links_of(graph: Walks, members: dict[int, list[int]], reach: dict[int, list[int]], limit: int) -> Links:
    """Pairs of components that compete for one text: for each some pairs of nodes with the text, short ones first.

    Raises LimitReached.
    """
    links: Links = {}
    budget = limit
    for first, first_nodes in members.items():
        for second in reach[first]:
            second_nodes = set(members[second])
            ways: list[Way] = []
            for p, q in ((p, q) for p in first_nodes for q in members[second]):
                found, spent = triple(graph, p, q, set(first_nodes), second_nodes, budget)
                budget -= spent
                if budget <= 0:
                    raise LimitReached("product", limit)
                if found is not None and all(found != way[2] for way in ways):
                    ways.append((p, q, found))
                    if len(ways) >= WAYS:
                        break
            if ways:
                links[first, second] = sorted(ways, key=lambda way: len(way[2]))
    return links


def reachable(graph: Walks, members: dict[int, list[int]]) -> dict[int, list[int]]:
    """For each cyclic component the other ones that can be reached from it."""
    out: dict[int, list[int]] = {}
    for component, nodes in members.items():
        seen = set(nodes)
        order = list(nodes)
        for node in order:
            for edge in graph.edges[node]:
                if edge.target not in seen:
                    seen.add(edge.target)
                    order.append(edge.target)
        found = dict.fromkeys(graph.components[node] for node in order)
        out[component] = [c for c in found if c != component and c in members]
    return out


def triple(
    graph: Walks,
    p: int,
    q: int,
    first: set[int],
    second: set[int],
    limit: int,
    middle: set[int] | None = None,
) -> tuple[Masks | None, int]:
    """A text v with p-v->p, p-v->q and q-v->q, and how many triples were visited."""
    start, end = (p, p, q), (p, q, q)
    seen: Seen = {start: None}
    order = [start]
    for a, b, c in order:
        for edge_a in graph.edges[a]:
            if edge_a.target not in first:
                continue
            for edge_c in graph.edges[c]:
                mask = edge_a.mask & edge_c.mask
                if not mask or edge_c.target not in second:
                    continue
                for edge_b in graph.edges[b]:
                    common = mask & edge_b.mask
                    if not common or (middle is not None and edge_b.target not in middle):
                        continue
                    target = (edge_a.target, edge_b.target, edge_c.target)
                    if target in seen:
                        continue
                    seen[target] = ((a, b, c), common)
                    if target == end:
                        return spell(seen, end), len(seen)
                    order.append(target)
                    if len(seen) > limit:
                        return None, len(seen)
    return None, len(seen)


def depths(links: Links) -> dict[Link, int]:
    """For each link the power that the longest chain through it stands for: two for a link alone."""
    after: dict[int, int] = {}
    before: dict[int, int] = {}
    follow: dict[int, list[int]] = {}
    lead: dict[int, list[int]] = {}
    for first, second in links:
        follow.setdefault(first, []).append(second)
        lead.setdefault(second, []).append(first)

    def longest(component: int, table: dict[int, list[int]], known: dict[int, int]) -> int:
        stack = [component]
        while stack:
            top = stack[-1]
            missing = [c for c in table.get(top, ()) if c not in known]
            if missing:
                stack += missing
                continue
            known[top] = max((known[c] + 1 for c in table.get(top, ())), default=0)
            stack.pop()
        return known[component]

    return {
        (first, second): longest(first, lead, before) + longest(second, follow, after) + 2
        for first, second in links
    }


def chains(links: Links, reach: dict[int, list[int]]) -> Iterator[tuple[Link, ...]]:
    """Chains of two links and more, the longest first; from one to the next the text may be another."""
    best: dict[int, int] = {}
    for first in _last_ones_first(reach):
        best[first] = max((best[c] + ((first, c) in links) for c in reach[first]), default=0)

    def longest(begin: int) -> tuple[Link, ...]:
        chain: list[Link] = []
        while best[begin]:
            way_on = [c for c in reach[begin] if best[c] + ((begin, c) in links) == best[begin]]
            # A link at once where there is one, with the shortest text.
            linked = [c for c in way_on if (begin, c) in links]
            if linked:
                to = min(linked, key=lambda c: len(links[begin, c][0][2]))
                chain.append((begin, to))
            else:
                to = way_on[0]
            begin = to
        return tuple(chain)

    told: dict[tuple[Link, ...], None] = {}
    for size in range(max(best.values(), default=0), 1, -1):
        found = 0
        for begin in best:
            chain = longest(begin)[:size] if best[begin] >= size else ()
            if chain and chain not in told and found < CHAINS:
                told[chain] = None
                found += 1
                yield chain


def _last_ones_first(reach: dict[int, list[int]]) -> list[int]:
    """Each component behind all that it reaches: that one reaches fewer."""
    return sorted(reach, key=lambda component: len(reach[component]))
