"""Ambiguity: how the number of ways through a pattern grows, decided on the graph of walks.

- exponential: a node with two different cycles on one text. Pairs of nodes are walked from every place where
  one node can go two ways inside its component; where a pair meets again on one node, that node has two
  cycles on one text.
- polynomial: nodes p, q with p-v->p, p-v->q and q-v->q on one text v, in different components. The engine
  then walks in the order of the square of the text; a chain of such pairs adds a power for each link.

The search that begins afresh at every place is a node of the graph like any other (`walks.SCAN`).

`suspects` gives what the graph shows, the worst first; whether the engine walks it depends on what follows, so
each is only a suspicion until `slow_text` has confirmed it by running the matcher.

Sources: Weber and Seidl, On the degree of ambiguity of finite automata, 1991 (criteria EDA and IDA);
Allauzen, Mohri and Rastogi, General algorithms for testing the ambiguity of finite automata, 2008.
Limit: `product` nodes of each walk over pairs and triples.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from patlint.limits import LimitReached
from patlint.machine.alphabet import representative
from patlint.machine.nfa import Nfa
from patlint.machine.walks import SCAN, Walks

Codes = tuple[int, ...]
Masks = tuple[int, ...]
Span = tuple[int, int]


@dataclass(frozen=True, slots=True)
class Suspect:
    """`prefix` leads to the cycle on `pump`; `degree` is 0 for exponential, else the expected power of steps.

    `pump` has for each character the minterms of which one will do, as a mask. `nodes` are the nodes of the
    graph between which the engine can choose, `parts` their spans. `by_restart` tells that one of them is the
    search itself, beginning afresh.
    """

    prefix: Codes
    pump: Masks
    degree: int
    nodes: tuple[int, ...]
    parts: tuple[Span, ...]
    by_restart: bool = False


EXPONENTIAL = 0


class Letters:
    """The most readable character of a set of minterms; one of `prefer` where it may be."""

    def __init__(self, nfa: Nfa) -> None:
        self.letters = [representative(chars) for chars in nfa.alphabet.classes]
        self.best: dict[int, int] = {}

    def __call__(self, mask: int, prefer: int = 0) -> int:
        mask = mask & prefer or mask
        found = self.best.get(mask)
        if found is None:
            codes = [code for minterm, code in enumerate(self.letters) if mask >> minterm & 1]
            found = self.best[mask] = min(codes, key=_rank)
        return found


def _rank(code: int) -> tuple[int, int]:
    kind = 0 if 97 <= code <= 122 else 1 if 48 <= code <= 57 else 2 if 33 <= code <= 126 else 3
    return (kind, code) if code >= 32 else (4, code)


def suspects(nfa: Nfa, graph: Walks) -> Iterator[Suspect]:
    """What the graph shows, exponential before high powers before low ones. Raises LimitReached."""
    prefixes = _prefixes(graph, Letters(nfa))
    members: dict[int, list[int]] = {}
    for node, component in enumerate(graph.components):
        if component in graph.cyclic and node in prefixes:
            members.setdefault(component, []).append(node)
    ambiguous: list[list[int]] = []
    for nodes in members.values():
        found = _two_cycles(graph, nodes, nfa.limits.product)
        if found:
            ambiguous.append(nodes)
        for node, pump, others in found:
            yield Suspect(prefixes[node], pump, EXPONENTIAL, (node,), _parts(graph, node, *others))
    if len(members) < 2 and not ambiguous:
        return
    links = _links(graph, members, nfa.limits.product)
    if not links:
        for nodes in ambiguous:
            yield from _within(graph, nodes, prefixes, nfa.limits.product)
        return
    depth = _depths(links)
    ranked = sorted(links, key=lambda link: (-depth[link], len(links[link][0][2])))
    scan = graph.components[SCAN] if graph.scan else -1

    def suspect(link: Link, way: Way) -> Suspect:
        p, q, pump = way
        return Suspect(prefixes[p], pump, depth[link], (p, q), _parts(graph, p, q), link[0] == scan)

    yield suspect(ranked[0], links[ranked[0]][0])
    if depth[ranked[0]] > 2:
        worst = [link for link in ranked if depth[link] == depth[ranked[0]]]
        chain = max((_chain(link, links, depth) for link in worst), key=len)
        if len(chain) > 1:
            yield _joined(chain, links, depth, graph, prefixes, scan)
    for link in ranked[1:]:
        yield suspect(link, links[link][0])
    for link in ranked:
        for way in links[link][1:]:
            yield suspect(link, way)
    for nodes in ambiguous:
        yield from _within(graph, nodes, prefixes, nfa.limits.product)


def _within(graph: Walks, nodes: list[int], prefixes: dict[int, Codes], limit: int) -> Iterator[Suspect]:
    """Repeats inside a loop that compete within one iteration.

    The loop as a whole has two cycles on one text, but what follows may take every such text; an iteration that
    fails is still walked with each boundary between the two.
    """
    alone = [node for node in nodes if any(edge.target == node for edge in graph.edges[node])]
    inside = set(nodes)
    given = 0
    for p, q in ((p, q) for p in alone for q in alone if p != q):
        pump, spent = _triple(graph, p, q, {p}, {q}, limit, inside)
        limit -= spent
        if pump is not None:
            yield Suspect(prefixes[p], pump, min(len(alone), 3), (p, q), _parts(graph, p, q))
            given += 1
        if limit <= 0 or given >= WAYS:
            return


def _chain(first: Link, links: dict[Link, list[Way]], depth: dict[Link, int]) -> list[Link]:
    """A longest chain of links that begins with `first`."""
    chain = [first]
    while True:
        further = [link for link in links if link[0] == chain[-1][1] and depth[link] == depth[first]]
        if not further:
            return chain
        chain.append(min(further, key=lambda link: len(links[link][0][2])))


def _joined(
    chain: list[Link],
    links: dict[Link, list[Way]],
    depth: dict[Link, int],
    graph: Walks,
    prefixes: dict[int, Codes],
    scan: int,
) -> Suspect:
    """One suspicion for a whole chain, whose pump has the pumps of all links one after the other.

    Not always a text on which all components go round, but mostly; it is to be confirmed anyway.
    """
    begin, end = links[chain[0]][0][0], links[chain[-1]][0][1]
    nodes = [node for link in chain for node in links[link][0][:2]]
    pump: Masks = ()
    for link in chain:
        pump += links[link][0][2]
    return Suspect(
        prefixes[begin], pump, depth[chain[0]], (begin, end), _parts(graph, *nodes), chain[0][0] == scan
    )


def _prefixes(graph: Walks, letter: Letters) -> dict[int, Codes]:
    """A shortest text from the start to each node."""
    out: dict[int, Codes] = {node: () for node in graph.entry}
    order = list(out)
    for node in order:
        for edge in graph.edges[node]:
            if edge.target not in out:
                out[edge.target] = (*out[node], letter(edge.mask))
                order.append(edge.target)
    return out


def _spell(seen: dict[tuple[int, ...], tuple[tuple[int, ...], int] | None], end: tuple[int, ...]) -> Masks:
    masks = []
    step = seen[end]
    while step is not None:
        masks.append(step[1])
        step = seen[step[0]]
    return tuple(reversed(masks))


def _two_cycles(graph: Walks, nodes: list[int], limit: int) -> list[tuple[int, Masks, tuple[int, ...]]]:
    """Nodes of one component that have two cycles on one text, the text, and the nodes that compete; a few."""
    inside = set(nodes)
    all_found: list[tuple[int, Masks, tuple[int, ...]]] = []
    divergences: list[tuple[int, tuple[int, int], int]] = []
    for node in nodes:
        edges = [edge for edge in graph.edges[node] if edge.target in inside]
        for place, edge in enumerate(edges):
            if edge.ways > 1:
                divergences.append((node, (edge.target, edge.target), edge.mask))
            for other in edges[place + 1 :]:
                if edge.mask & other.mask and edge.target != other.target:
                    divergences.append((node, (edge.target, other.target), edge.mask & other.mask))
    seen: dict[tuple[int, ...], tuple[tuple[int, ...], int] | None] = {}
    origins: dict[tuple[int, ...], dict[int, int]] = {}
    order: list[tuple[int, int]] = []
    for node, pair, mask in divergences:
        if pair[0] == pair[1]:
            back = _path(graph, pair[0], node, inside)
            if back is not None:
                pump = (mask, *back)
                all_found.append((node, pump, (pair[0],)))
        else:
            if pair not in seen:
                seen[pair] = None
                order.append(pair)
            origins.setdefault(pair, {})[node] = mask
    if len(all_found) > WAYS:
        return _few(all_found)
    more = min(len(nodes), 64)
    for pair in order:
        if all_found:
            more -= 1  # a meeting is known: look a little further for one with a shorter pump
            if more < 0:
                break
        for edge in graph.edges[pair[0]]:
            if edge.target not in inside:
                continue
            for other in graph.edges[pair[1]]:
                mask = edge.mask & other.mask
                if not mask or other.target not in inside:
                    continue
                target = (edge.target, other.target)
                if target in seen:
                    continue
                if len(seen) >= limit:
                    raise LimitReached("product", limit)
                seen[target] = (pair, mask)
                if target[0] != target[1]:
                    order.append(target)
                    continue
                first: tuple[int, ...] = pair
                step = seen[first]
                while step is not None:
                    first = step[0]
                    step = seen[first]
                begin = origins[first]
                node = target[0] if target[0] in begin else next(iter(begin))
                back = _path(graph, target[0], node, inside)
                assert back is not None
                pump = (begin[node], *_spell(seen, target), *back)
                all_found.append((node, pump, first))
    return _few(all_found)


def _few(found: list[tuple[int, Masks, tuple[int, ...]]]) -> list[tuple[int, Masks, tuple[int, ...]]]:
    """The shortest with different texts."""
    kept: dict[Masks, tuple[int, Masks, tuple[int, ...]]] = {}
    for row in sorted(found, key=lambda row: len(row[1])):
        kept.setdefault(row[1], row)
    return list(kept.values())[:WAYS]


def _path(graph: Walks, start: int, end: int, inside: set[int]) -> Masks | None:
    """A shortest text from one node to another, empty where they are the same."""
    seen: dict[tuple[int, ...], tuple[tuple[int, ...], int] | None] = {(start,): None}
    order = [start]
    for node in order:
        if node == end:
            return _spell(seen, (end,))
        for edge in graph.edges[node]:
            if edge.target in inside and (edge.target,) not in seen:
                seen[edge.target,] = ((node,), edge.mask)
                order.append(edge.target)
    return None


def _parts(graph: Walks, *nodes: int) -> tuple[Span, ...]:
    spans = dict.fromkeys(graph.spans[node] for node in nodes)
    return tuple(sorted(span for span in spans if span is not None))


Link = tuple[int, int]
Way = tuple[int, int, Masks]
"""Two nodes p, q and the text on which p leads to p and to q, and q to q."""
WAYS = 3
"""Ways that are kept of each link: what follows may take the text of one, but not that of another."""


def _links(graph: Walks, members: dict[int, list[int]], limit: int) -> dict[Link, list[Way]]:
    """Pairs of components that compete for one text: for each some pairs of nodes with the text, short ones first.

    Raises LimitReached.
    """
    reach = _reachable(graph, members)
    links: dict[Link, list[Way]] = {}
    budget = limit
    for first, first_nodes in members.items():
        for second in reach[first]:
            second_nodes = set(members[second])
            ways: list[Way] = []
            for p, q in ((p, q) for p in first_nodes for q in members[second]):
                found, spent = _triple(graph, p, q, set(first_nodes), second_nodes, budget)
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


def _reachable(graph: Walks, members: dict[int, list[int]]) -> dict[int, list[int]]:
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


def _triple(
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
    seen: dict[tuple[int, ...], tuple[tuple[int, ...], int] | None] = {start: None}
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
                        return _spell(seen, end), len(seen)
                    order.append(target)
                    if len(seen) > limit:
                        return None, len(seen)
    return None, len(seen)


def _depths(links: dict[Link, list[Way]]) -> dict[Link, int]:
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
