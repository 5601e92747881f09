"""The graph of what the engine can walk: threads as nodes, characters as edges, equal ways counted.

A node is a thread of the program (a position and its obligations). An edge says that the engine, reading a
character of `mask`, can go from one thread to another in `ways` ways (more than one where there are several
paths that read nothing; counted up to 2). The guard of loops whose body can be empty is respected. The bodies
of look-ahead and atomic groups are walked too: what stands in them costs steps whether or not it is kept, so
the graph has all that the engine may walk, and perhaps more; a claim made on it is to be confirmed.

With `scan`, node SCAN stands for the search that begins afresh at every place: it reads any character, stays,
and enters the program.

Limits: `product` nodes; closures of more than 4,096 equal paths are cut there (they count as many anyway).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TypeAlias

from patlint.limits import LimitReached
from patlint.machine import program as p
from patlint.machine.nfa import Nfa
from patlint.machine.obligations import ALL, FREE, NONE, Conjunction, Thread

STATE_COST = 3
"""A state on the way to a character takes about as long as three edges."""
SCAN = 0
"""The node of the search itself, where there is one."""


Close: TypeAlias = Callable[[int, int], dict[Thread, int]]
"""The threads that are reached from an instruction in a context without reading, and in how many ways."""


@dataclass(frozen=True, slots=True)
class Edge:
    target: int
    mask: int
    ways: int


@dataclass(frozen=True, slots=True)
class Walks:
    """`edges[node]`; `positions[node]` is the position a node stands at (-1 for SCAN), `spans[node]` the part
    of the pattern that it reads (None for SCAN).

    `entry` are the nodes at the text's start. `components[node]` numbers the strongly connected component
    of a node, `cyclic` holds the components that have a cycle.
    """

    edges: tuple[tuple[Edge, ...], ...]
    positions: tuple[int, ...]
    spans: tuple[tuple[int, int] | None, ...]
    entry: tuple[int, ...]
    scan: bool
    components: tuple[int, ...]
    cyclic: frozenset[int]


def walks(nfa: Nfa, scan: bool) -> Walks:
    """The graph of the program of `nfa`. Raises LimitReached("product")."""
    return _graph(nfa, scan, False)


def cut_walks(nfa: Nfa, scan: bool) -> Walks:
    """The graph of what is left where atomic groups and possessive repeats cut. Raises LimitReached.

    The bodies of look-around and atomic groups are not in it, so it stands beside `walks`: it has the pumps that
    no cut spoils.
    """
    return _graph(nfa, scan, True)


def _graph(nfa: Nfa, scan: bool, cut: bool) -> Walks:
    limit = nfa.limits.product
    number: dict[Thread, int] = {}
    order: list[Thread | None] = [None] if scan else []

    def node(thread: Thread) -> int:
        index = number.get(thread)
        if index is None:
            if len(order) >= limit:
                raise LimitReached("product", limit)
            index = number[thread] = len(order)
            order.append(thread)
        return index

    closures: dict[tuple[int, int], dict[Thread, int]] = {}
    work = 0

    def close(pc: int, context: int) -> dict[Thread, int]:
        nonlocal work
        key = (pc, context)
        if key not in closures:
            closures[key], states = _paths(nfa, pc, context, cut)
            work += STATE_COST * states
        return closures[key]

    by_context: dict[int, int] = {}
    for minterm, context in enumerate(nfa.contexts):
        by_context[context] = by_context.get(context, 0) | 1 << minterm
    entry = [node(thread) for thread in close(nfa.program.start, nfa.plain_start)]
    edges: list[tuple[Edge, ...]] = []
    for thread in order:
        out: dict[tuple[int, int], int] = {}
        if thread is None:
            for context, minterms in by_context.items():
                out[SCAN, minterms] = 1
                for target, ways in close(nfa.program.start, context).items():
                    out[node(target), minterms] = ways
        else:
            for target, mask, ways in _after(nfa, close, thread, by_context, cut):
                key = (node(target), mask)
                out[key] = min(out.get(key, 0) + ways, 2)
        merged: dict[tuple[int, int], int] = {}
        for (end, mask), ways in out.items():
            merged[end, ways] = merged.get((end, ways), 0) | mask
        edges.append(tuple(Edge(end, mask, ways) for (end, ways), mask in merged.items()))
        work += len(merged)
        if work > nfa.limits.work:
            raise LimitReached("work", nfa.limits.work)
    spans = tuple(None if t is None else nfa.program.spans[nfa.pc_of[t[0]]] for t in order)
    if scan:
        entry.append(SCAN)
    components, cyclic = _components(edges)
    positions = tuple(-1 if t is None else t[0] for t in order)
    return Walks(tuple(edges), positions, spans, tuple(entry), scan, tuple(components), cyclic)


def _after(
    nfa: Nfa, close: Close, thread: Thread, by_context: dict[int, int], cut: bool
) -> Iterator[tuple[Thread, int, int]]:
    """What a thread goes on to, with the minterms that it reads and the ways there."""
    position, duty = thread
    if cut and isinstance(nfa.program.code[nfa.pc_of[position]], p.Atomic):
        for minterm, context in enumerate(nfa.contexts):
            rest = nfa.obligations.step(duty, minterm) if nfa.reads[position] >> minterm & 1 else None
            if rest is not None:
                for (target, more), ways in _under_way(nfa, close, position, minterm, context):
                    yield (target, rest | more), 1 << minterm, ways
        return
    for context, minterms in by_context.items():
        for mask, rest in _after_duty(nfa, duty, nfa.reads[position] & minterms):
            for (target, more), ways in _follow(nfa, close, position, context, cut).items():
                yield (target, rest | more), mask, ways


def _under_way(
    nfa: Nfa, close: Close, position: int, minterm: int, context: int
) -> Iterator[tuple[Thread, int]]:
    """The same for an atomic group under way."""
    for duty, goes_on in nfa.atomic_after(position, minterm, context):
        if goes_on is not None:
            yield (goes_on, FREE), 1
        else:
            op = nfa.program.code[nfa.pc_of[position]]
            assert isinstance(op, p.Atomic)
            for (target, more), ways in close(op.next, context).items():
                yield (target, more | duty), ways


def _after_duty(nfa: Nfa, duty: Conjunction, reads: int) -> list[tuple[int, Conjunction]]:
    """The readable minterms with what is left of the obligations after each, grouped."""
    if not duty:
        return [(reads, FREE)] if reads else []
    groups: dict[Conjunction, int] = {}
    while reads:
        low = reads & -reads
        reads ^= low
        rest = nfa.obligations.step(duty, low.bit_length() - 1)
        if rest is not None:
            groups[rest] = groups.get(rest, 0) | low
    return [(mask, rest) for rest, mask in groups.items()]


def _follow(nfa: Nfa, close: Close, position: int, context: int, cut: bool) -> dict[Thread, int]:
    pc = nfa.pc_of[position]
    op = nfa.program.code[pc]
    if isinstance(op, p.Run):
        count = position - nfa.first[pc] + 1
        out: dict[Thread, int] = {}
        if op.maximum is None:
            out[(position if count >= op.minimum else position + 1), FREE] = 1
        elif count < op.maximum:
            out[position + 1, FREE] = 1
        if count >= op.minimum:
            stops = nfa.stopping(pc) if cut and out else FREE
            for (target, more), ways in close(op.next, context).items():
                out[target, more | stops] = out.get((target, more | stops), 0) + ways
        return out
    assert isinstance(op, p.Char | p.Back)
    out = dict(close(op.next, context))
    if isinstance(op, p.Back):
        out[position, FREE] = out.get((position, FREE), 0) + 1
    return out


State: TypeAlias = tuple[int, frozenset[int], Conjunction]
"""A place on the way to the next character: an instruction, the loops whose iteration began here, obligations."""


def _paths(nfa: Nfa, entry: int, context: int, cut: bool) -> tuple[dict[Thread, int], int]:
    """The threads reached from `entry` without reading, with the number of ways (2: two or more); how many states
    were gone through.

    The guards of loops see to it that no state comes back, so ways are added up in topological order.
    """
    start: State = (entry, FREE, FREE)
    following: dict[State, tuple[list[Thread], list[State]]] = {}
    order: list[State] = []
    stack: list[tuple[State, bool]] = [(start, False)]
    while stack:
        state, done = stack.pop()
        if done:
            order.append(state)
        elif state not in following:
            if len(following) > nfa.limits.work:
                raise LimitReached("work", nfa.limits.work)
            following[state] = threads, states = _ahead(nfa, state, context, cut)
            stack.append((state, True))
            stack += [(each, False) for each in states if each not in following]
    count = {start: 1}
    ways: dict[Thread, int] = {}
    for state in reversed(order):
        here = count[state]
        threads, states = following[state]
        for thread in threads:
            ways[thread] = min(ways.get(thread, 0) + here, 2)
        for each in states:
            count[each] = min(count.get(each, 0) + here, 2)
    return ways, len(order)


def _ahead(nfa: Nfa, state: State, context: int, cut: bool) -> tuple[list[Thread], list[State]]:
    """The threads and the states that one instruction leads to, once for each way."""
    pc, marks, duty = state
    op = nfa.program.code[pc]
    match op:
        case p.Char():
            return [(nfa.first[pc], duty)], []
        case p.Back():
            return [(nfa.first[pc], duty)], [(op.next, marks, duty)]
        case p.Run():
            stops = nfa.stopping(pc) if cut and op.minimum == 0 and op.maximum != 0 else FREE
            return (
                [(nfa.first[pc], duty)] if op.maximum != 0 else [],
                [(op.next, marks, duty | stops)] if op.minimum == 0 else [],
            )
        case p.Fork():
            return [], [(op.first, marks, duty), (op.second, marks, duty)]
        case p.Save():
            return [], [(op.next, marks, duty)]
        case p.Enter():
            return [], [(op.next, marks - {op.loop}, duty)]
        case p.Iterate():
            left: State = (op.exit, marks - {op.loop}, duty)
            return [], [left] if op.loop in marks else [(op.body, marks | {op.loop}, duty), left]
        case p.Accept():
            ends = nfa.leads if cut else nfa.atomic_ends
            return [], [(ends[pc], marks, duty)] if pc in ends else []
        case p.Assert():
            asked = nfa.asked(pc, op, context)
            return [], [(op.next, marks, _with(duty, asked))] if asked != NONE else []
        case p.Look():
            asked = nfa.look(pc, op, context)
            states = [(op.next, marks, _with(duty, asked))] if asked != NONE else []
            return [], [(op.body, marks, duty), *states] if op.ahead and not cut else states
        case p.Atomic():
            if not cut or op.end in nfa.leads:
                return [], [(op.body, marks, duty)]
            ends_of = nfa.atomic_at(pc, op, context)
            return (
                [(goes_on, duty) for _, goes_on in ends_of if goes_on is not None],
                [(op.next, marks, duty | more) for more, goes_on in ends_of if goes_on is None],
            )
        case p.Test():
            return [], [(op.yes, marks, duty), (op.no, marks, duty)]
        case _:
            return [], []


def _with(duty: Conjunction, asked: int) -> Conjunction:
    return duty if asked == ALL else duty | {asked}


def _components(edges: list[tuple[Edge, ...]]) -> tuple[list[int], frozenset[int]]:
    """Strongly connected components (Tarjan 1972), without recursion, and those that have a cycle."""
    count = len(edges)
    index = [-1] * count
    low = [0] * count
    component = [-1] * count
    cyclic = set()
    path: list[int] = []
    counter = components = 0
    for root in range(count):
        if index[root] >= 0:
            continue
        work = [(root, 0)]
        while work:
            node, begin = work.pop()
            if index[node] < 0:
                index[node] = low[node] = counter
                counter += 1
                path.append(node)
            for place in range(begin, len(edges[node])):
                target = edges[node][place].target
                if index[target] < 0:
                    work.append((node, place + 1))
                    work.append((target, 0))
                    break
                if component[target] < 0:
                    low[node] = min(low[node], low[target])
            else:
                if low[node] == index[node]:
                    size = 0
                    while True:
                        member = path.pop()
                        component[member] = components
                        size += 1
                        if member == node:
                            break
                    if size > 1 or any(edge.target == node for edge in edges[node]):
                        cyclic.add(components)
                    components += 1
                if work:
                    parent = work[-1][0]
                    low[parent] = min(low[parent], low[node])
    return component, frozenset(cyclic)
