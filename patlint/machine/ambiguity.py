"""Ambiguity: how the number of ways through a pattern grows, decided on the graph of walks.

- exponential: a node with two different cycles on one text. Pairs of nodes are walked from every place where
  one node can go two ways inside its component; where a pair meets again on one node, that node has two
  cycles on one text.
- polynomial: pairs of components that compete for one text, and chains of them (`links`): the engine walks in
  the order of the square of the text, each further pair of a chain adds a power.

The search that begins afresh at every place is a node of the graph like any other (`walks.SCAN`).

`suspects` gives what the graph shows, the worst first; whether the engine walks it depends on what follows, so
each is only a suspicion until `slow_text` has confirmed it by running the matcher.

Sources: Weber and Seidl, On the degree of ambiguity of finite automata, 1991 (criterion EDA);
Allauzen, Mohri and Rastogi, General algorithms for testing the ambiguity of finite automata, 2008.
Limit: `product` nodes of each walk over pairs and triples.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from functools import reduce
from itertools import pairwise
from math import lcm
from operator import and_, or_
from typing import TypeAlias

from patlint.limits import LimitReached
from patlint.machine.alphabet import representative
from patlint.machine.links import (
    WAYS,
    Link,
    Links,
    Masks,
    Seen,
    Way,
    chain_from,
    chains,
    depths,
    links_of,
    path,
    reachable,
    spell,
    triple,
)
from patlint.machine.nfa import Nfa
from patlint.machine.walks import SCAN, Walks

Codes: TypeAlias = tuple[int, ...]
Span: TypeAlias = tuple[int, int]
FURTHER = 128
"""Pairs that are walked from once two cycles on one text are known."""
LONGEST = 12
"""Characters of the longest pump that is made to fit several links."""


@dataclass(frozen=True, slots=True)
class Suspect:
    """`prefix` leads to the cycle on `pump`; `degree` is 0 for exponential, else the expected power of steps.

    Both have for each character the minterms of which one will do, as a mask. `positions` are those between which
    the engine can choose, `parts` the spans of what competes, `loops` what one of them can take again and again,
    `idle` what the first of them can, so that it may stand before the pumps.
    `by_restart` tells that one of them is the search itself, beginning afresh (it has no position). `more` are
    further pumps, each with the text before it: the ways part on each of them, and `positions` are those of the last.
    """

    prefix: Masks
    pump: Masks
    degree: int
    positions: frozenset[int]
    parts: tuple[Span, ...]
    loops: int = 0
    idle: int = 0
    by_restart: bool = False
    more: tuple[tuple[Masks, Masks], ...] = ()


EXPONENTIAL = 0
MANY_MINTERMS = 12
"""Sets of like characters up to which pumps are sought that do without one of them."""
Cycles: TypeAlias = tuple[int, Masks, tuple[int, ...]]
"""A node that has two cycles on one text, the text, and the nodes that compete."""


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
    """What the graph shows: exponential before high powers before low ones, then those of several pumps.

    Raises LimitReached.
    """
    prefixes = Prefixes(graph)
    members: dict[int, list[int]] = {}
    for node, component in enumerate(graph.components):
        if component in graph.cyclic and node in prefixes:
            members.setdefault(component, []).append(node)
    ambiguous: list[list[int]] = []
    for nodes in members.values():
        found = _two_cycles(graph, nodes, nfa.limits.product)
        if found:
            ambiguous.append(nodes)
            found = _others(graph, nodes, nfa.limits.product, found, len(nfa.alphabet))
        for node, pump, others in found:
            yield _suspect(graph, prefixes, (node,), pump, EXPONENTIAL, (node, *others))
    reach = reachable(graph, members)
    links = links_of(graph, members, reach, nfa.limits.product) if len(members) > 1 else {}
    if links:
        yield from _linked(graph, links, prefixes)
    for nodes in ambiguous:
        yield from _within(graph, nodes, prefixes, nfa.limits.product)
    for chain in chains(links, reach):
        yield _several(chain, links, graph, prefixes)


def _linked(graph: Walks, links: Links, prefixes: Prefixes) -> Iterator[Suspect]:
    """Suspicions of one pump: for each link some, and one for a longest chain as a whole."""
    depth = depths(links)
    ranked = sorted(links, key=lambda link: (-depth[link], len(links[link][0][2])))

    def suspect(link: Link, way: Way) -> Suspect:
        p, q, pump = way
        return _suspect(graph, prefixes, (p, q), pump, depth[link], (p, q))

    yield suspect(ranked[0], links[ranked[0]][0])
    if depth[ranked[0]] > 2:
        worst = [link for link in ranked if depth[link] == depth[ranked[0]]]
        chain = max((chain_from(link, links, depth) for link in worst), key=len)
        if len(chain) > 1:
            yield _joined(chain, links, depth, graph, prefixes)
    for link in ranked[1:]:
        yield suspect(link, links[link][0])
    for link in ranked:
        for way in links[link][1:]:
            yield suspect(link, way)


def _suspect(
    graph: Walks,
    prefixes: Prefixes,
    nodes: tuple[int, ...],
    pump: Masks,
    degree: int,
    competing: Iterable[int],
) -> Suspect:
    """A suspicion of the ways between `nodes`, the first of which the prefix leads to."""
    afresh = graph.scan and nodes[0] == SCAN
    alone = [
        reduce(or_, (edge.mask for edge in graph.edges[node] if edge.target == node), 0) for node in nodes
    ]
    loops = reduce(or_, alone[afresh:], 0)
    positions = frozenset(graph.positions[node] for node in nodes) - {-1}
    return Suspect(
        prefixes[nodes[0]], pump, degree, positions, _parts(graph, *competing), loops, alone[0], afresh
    )


def _within(graph: Walks, nodes: list[int], prefixes: Prefixes, limit: int) -> Iterator[Suspect]:
    """Repeats inside a loop that compete within one iteration.

    The loop as a whole has two cycles on one text, but what follows may take every such text; an iteration that
    fails is still walked with each boundary between the two.
    """
    alone = [node for node in nodes if any(edge.target == node for edge in graph.edges[node])]
    inside = set(nodes)
    given = 0
    for p, q in ((p, q) for p in alone for q in alone if p != q):
        pump, spent = triple(graph, p, q, {p}, {q}, limit, inside)
        limit -= spent
        if pump is not None:
            yield _suspect(graph, prefixes, (p, q), pump, min(len(alone), 3), (p, q))
            given += 1
        if limit <= 0 or given >= WAYS:
            return


def _joined(
    chain: list[Link], links: Links, depth: dict[Link, int], graph: Walks, prefixes: Prefixes
) -> Suspect:
    """One suspicion for a whole chain, with a pump that all links can take.

    Where their pumps have nothing in common it is one after the other: not always a text on which all components
    go round, but mostly; it is to be confirmed anyway.
    """
    begin, end = links[chain[0]][0][0], links[chain[-1]][0][1]
    nodes = [node for link in chain for node in links[link][0][:2]]
    pumps = [links[link][0][2] for link in chain]
    size = lcm(*map(len, pumps))
    pump = tuple(reduce(and_, (each[at % len(each)] for each in pumps)) for at in range(min(size, LONGEST)))
    if size > LONGEST or not all(pump):
        pump = sum(pumps, ())
    return _suspect(graph, prefixes, (begin, end), pump, depth[chain[0]], nodes)


def _several(chain: tuple[Link, ...], links: Links, graph: Walks, prefixes: Prefixes) -> Suspect:
    """A suspicion for a chain whose links have a pump each."""
    ways = [links[link][0] for link in chain]
    more: list[tuple[Masks, Masks]] = []
    for (_, end, _), (begin, _, pump) in pairwise(ways):
        between = path(graph, end, begin, None)
        assert between is not None
        more.append((between, pump))
    (first, _, pump), (p, q, _) = ways[0], ways[-1]
    last = _suspect(graph, prefixes, (p, q), pump, len(chain) + 1, (node for way in ways for node in way[:2]))
    afresh = graph.scan and first == SCAN
    return replace(last, prefix=prefixes[first], by_restart=afresh, more=tuple(more))


class Prefixes:
    """A shortest text from the start to each node, put together when it is asked for."""

    def __init__(self, graph: Walks) -> None:
        self._from: dict[int, tuple[int, int] | None] = dict.fromkeys(graph.entry)
        order = list(self._from)
        for node in order:
            for edge in graph.edges[node]:
                if edge.target not in self._from:
                    self._from[edge.target] = node, edge.mask
                    order.append(edge.target)

    def __contains__(self, node: int) -> bool:
        return node in self._from

    def __getitem__(self, node: int) -> Masks:
        masks = []
        step = self._from[node]
        while step is not None:
            masks.append(step[1])
            step = self._from[step[0]]
        return tuple(reversed(masks))


def _others(graph: Walks, nodes: list[int], limit: int, found: list[Cycles], minterms: int) -> list[Cycles]:
    """With pumps added that do without a character which those found all have: what follows may take that one."""
    out = list(found)
    for minterm in range(minterms if minterms <= MANY_MINTERMS else 0):
        bit = 1 << minterm
        if all(bit in pump for _, pump, _ in out):
            out += _two_cycles(graph, nodes, limit, ~bit)[:1]
    return out


def _two_cycles(graph: Walks, nodes: list[int], limit: int, allowed: int = -1) -> list[Cycles]:
    """Nodes of one component that have two cycles on one text, the text, and the nodes that compete; a few.

    `allowed`: minterms of which the text may be.
    """
    inside = set(nodes)
    all_found: list[Cycles] = []
    divergences: list[tuple[int, tuple[int, int], int]] = []
    for node in nodes:
        edges = [edge for edge in graph.edges[node] if edge.target in inside and edge.mask & allowed]
        for place, edge in enumerate(edges):
            if edge.ways > 1:
                divergences.append((node, (edge.target, edge.target), edge.mask & allowed))
            for other in edges[place + 1 :]:
                common = edge.mask & other.mask & allowed
                if common and edge.target != other.target:
                    divergences.append((node, (edge.target, other.target), common))
    seen: Seen = {}
    origins: dict[tuple[int, ...], dict[int, int]] = {}
    order: list[tuple[int, int]] = []
    for node, pair, mask in divergences:
        if pair[0] == pair[1]:
            back = path(graph, pair[0], node, inside, allowed)
            if back is not None:
                pump = (mask, *back)
                all_found.append((node, pump, (pair[0],)))
        else:
            if pair not in seen:
                seen[pair] = None
                order.append(pair)
            begins = origins.setdefault(pair, {})
            begins[node] = begins.get(node, 0) | mask
    if len(all_found) > WAYS:
        return _few(all_found)
    more = max(len(nodes), FURTHER)
    for pair in order:
        if all_found:
            more -= 1  # a meeting is known: look a little further for one with a shorter pump, or another
            if more < 0:
                break
        for edge in graph.edges[pair[0]]:
            if edge.target not in inside:
                continue
            for other in graph.edges[pair[1]]:
                mask = edge.mask & other.mask & allowed
                if not mask or other.target not in inside:
                    continue
                target = (edge.target, other.target)
                if target[0] != target[1]:
                    if target not in seen:
                        if len(seen) >= limit:
                            raise LimitReached("product", limit)
                        seen[target] = (pair, mask)
                        order.append(target)
                    continue
                first: tuple[int, ...] = pair
                step = seen[first]
                while step is not None:
                    first = step[0]
                    step = seen[first]
                begin = origins[first]
                node = target[0] if target[0] in begin else next(iter(begin))
                back = path(graph, target[0], node, inside, allowed)
                if back is None:
                    continue
                pump = (begin[node], *spell(seen, pair), mask, *back)
                all_found.append((node, pump, first))
    return _few(all_found)


def _few(found: list[Cycles]) -> list[Cycles]:
    """The shortest with different texts: what follows may take the characters of one and not those of another."""
    kept: dict[Masks, Cycles] = {}
    sets: dict[frozenset[int], Masks] = {}
    for row in sorted(found, key=lambda row: len(row[1])):
        kept.setdefault(row[1], row)
        sets.setdefault(frozenset(row[1]), row[1])
    first = [kept.pop(pump) for pump in list(sets.values())[:WAYS]]
    return [*first, *list(kept.values())[:WAYS]]


def _parts(graph: Walks, *nodes: int) -> tuple[Span, ...]:
    spans = dict.fromkeys(graph.spans[node] for node in nodes)
    return tuple(sorted(span for span in spans if span is not None))
