"""Which prefix a match takes, and which parts of a pattern a match ever uses.

A state is the ordered list of the engine's threads after a prefix of the text (`ordered`), with the context.

`spans` is the automaton of the marked texts { w # u : on the text w u the match ends after w }; two programs
whose automata agree take equal spans with `match`. Taken in every context, and once more with the empty match
forbidden (what finditer, sub and split do after an empty match), agreement is sufficient for equal outcomes of
search, finditer, sub and split without groups; it is not necessary.

`used_positions` goes back from all winning threads to the positions through which they came.

Limits: `states`, `work`.
"""

from __future__ import annotations

from collections.abc import Iterable

from patlint.limits import LimitReached
from patlint.machine.alphabet import Alphabet
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.nfa import Nfa
from patlint.machine.obligations import FREE
from patlint.machine.ordered import Threads, ends_here, prune, steps
from patlint.syntax.charset import CharSet

ORDERED_COST = 4
"""A thread of an ordered list takes about as long as four of the subset construction, for which `work` is made."""
MARKER = 0x110000
"""Stands for the end of the match in marked texts; no character has this code."""


def _start(nfa: Nfa, context: int, not_empty: bool, cut: bool) -> Threads:
    threads = nfa.initial(context)
    if not_empty:
        threads = tuple(thread for thread in threads if thread[0] != nfa.accept)
    return prune(nfa, ((thread, 0) for thread in threads), cut)[0]


def spans(nfa: Nfa, context: int, not_empty: bool = False) -> Dfa:
    """The minimal automaton of the marked texts, the match beginning in `context`."""
    width = len(nfa.alphabet)
    first = ("before", _start(nfa, context, not_empty, True), context)
    number: dict[object, int] = {first: 0}
    order: list[tuple[str, object, int]] = [first]
    table: list[tuple[int, ...]] = []
    work = 0

    def index_of(state: tuple[str, object, int]) -> int:
        index = number.get(state)
        if index is None:
            if len(order) >= nfa.limits.states:
                raise LimitReached("states", nfa.limits.states)
            index = number[state] = len(order)
            order.append(state)
        return index

    dead = ("before", (), 0)
    accepting: list[bool] = []
    for kind, content, before in order:
        row: list[int] = []
        work += width
        if kind == "before":
            threads: Threads = content  # type: ignore[assignment]
            for minterm in range(width):
                work += len(threads)
                context = nfa.next_context(before, minterm)
                after, _ = prune(nfa, steps(nfa, threads, minterm, context, True), True)
                if all(position == nfa.pending for position, _ in after):
                    row.append(index_of(dead))  # only vetoes are left, and nothing to veto
                else:
                    row.append(index_of(("before", after, context if nfa.trackers else 0)))
            duties = tuple(ends_here(nfa, threads, before))
            row.append(index_of(("after", duties, 0)) if duties else index_of(dead))
            accepting.append(False)
        else:
            held: tuple[frozenset[int], ...] = content  # type: ignore[assignment]
            for minterm in range(width):
                stepped = (nfa.obligations.step(duty, minterm) for duty in held)
                left = tuple(dict.fromkeys(duty for duty in stepped if duty is not None))
                if FREE in left:
                    left = (FREE,)
                row.append(index_of(("after", left, 0)) if left else index_of(dead))
            row.append(index_of(dead))
            accepting.append(any(nfa.obligations.holds_at_end(duty) for duty in held))
        if work > nfa.limits.work:
            raise LimitReached("work", nfa.limits.work)
        table.append(tuple(row))
    alphabet = Alphabet(
        (*nfa.alphabet.classes, CharSet((MARKER, MARKER + 1))),
        (*nfa.alphabet.cuts, MARKER),
        (*nfa.alphabet.owners, width),
    )
    return minimal(alphabet, table, accepting)


def used_positions(nfa: Nfa, mode: str, not_empty: bool) -> set[int]:
    """The positions that the winning thread of some text reads; too many in doubt, never too few.

    `mode` "match" stands for search too: every kind of character may stand to the left then. `not_empty`
    asks for what is used where the empty match is forbidden as well.
    """
    cut = mode != "fullmatch"
    contexts = nfa.all_contexts() if mode == "search" else (nfa.start_context,)
    number: dict[tuple[Threads, int], int] = {}
    order: list[tuple[Threads, int]] = []

    def index_of(threads: Threads, context: int) -> int:
        key = (threads, context if nfa.trackers else 0)
        index = number.get(key)
        if index is None:
            if len(order) >= nfa.limits.states:
                raise LimitReached("states", nfa.limits.states)
            index = number[key] = len(order)
            order.append((threads, context))
        return index

    for context in contexts:
        index_of(_start(nfa, context, False, cut), context)
        if not_empty:
            index_of(_start(nfa, context, True, cut), context)
    sources: dict[tuple[int, int], list[tuple[int, int]]] = {}
    work = 0
    for state, (threads, before) in enumerate(order):
        for minterm in range(len(nfa.alphabet)):
            work += ORDERED_COST * (1 + len(threads))
            context = nfa.next_context(before, minterm)
            after, origins = prune(nfa, steps(nfa, threads, minterm, context, False), cut)
            target = index_of(after, context)
            for place, origin in enumerate(origins):
                sources.setdefault((target, place), []).append((state, origin))
        if work > nfa.limits.work:
            raise LimitReached("work", nfa.limits.work)
    waiting = [
        (state, place)
        for state, (threads, _) in enumerate(order)
        for place, (position, _) in enumerate(threads)
        if position == nfa.accept
    ]
    winners = set(waiting)
    used: set[int] = set()
    while waiting:
        for source in sources.get(waiting.pop(), ()):
            if source not in winners:
                winners.add(source)
                waiting.append(source)
                used.add(order[source[0]][0][source[1]][0])
    return used


def shown_used(nfa: Nfa, mode: str, wanted: Iterable[int]) -> set[int]:
    """Positions that a match reads, shown by one text for each of `wanted`: quick, and not all.

    For each position a shortest way through it is spelled and run; what its winning thread reads is used.
    """
    back, onward = _ways(nfa)
    start = _start(nfa, nfa.start_context, False, mode != "fullmatch")
    used: set[int] = set()
    for position in wanted:
        if position in used or position not in back or position not in onward:
            continue
        way = [position]
        while (before := back[way[-1]]) is not None:
            way.append(before)
        way.reverse()
        while (after := onward[way[-1]]) is not None:
            way.append(after)
        used |= _winner(nfa, mode != "fullmatch", start, [_some_minterm(nfa, each) for each in way])
    return used


def _some_minterm(nfa: Nfa, position: int) -> int:
    mask = nfa.reads[position]
    return (mask & -mask).bit_length() - 1


def _ways(nfa: Nfa) -> tuple[dict[int, int | None], dict[int, int | None]]:
    """For each position the one before it on a shortest way from the start, and the next one to the end.

    Obligations and contexts are not heeded: a text may turn out to lead elsewhere, and then shows less.
    """
    back: dict[int, int | None] = {position: None for position, _ in nfa.initial(nfa.start_context)}
    sources: dict[int, list[int]] = {}
    order = list(back)
    for position in order:
        if not nfa.reads[position]:
            continue
        minterm = _some_minterm(nfa, position)
        for after, _ in nfa.after(position, minterm, nfa.next_context(nfa.start_context, minterm)):
            sources.setdefault(after, []).append(position)
            if after not in back:
                back[after] = position
                order.append(after)
    onward: dict[int, int | None] = {}
    layer = [nfa.accept]
    for target in layer:
        for source in sources.get(target, ()):
            if source not in onward:
                onward[source] = None if target == nfa.accept else target
                layer.append(source)
    return back, onward


def _winner(nfa: Nfa, cut: bool, threads: Threads, minterms: list[int]) -> set[int]:
    """The positions that the winning thread reads on a text given by minterms; nothing where that is not sure."""
    layers: list[tuple[Threads, tuple[int, ...]]] = [(threads, ())]
    context = nfa.start_context
    for minterm in minterms:
        context = nfa.next_context(context, minterm)
        threads, origins = prune(nfa, steps(nfa, threads, minterm, context, False), cut)
        if not threads:
            break
        layers.append((threads, origins))
    if not cut and len(layers) <= len(minterms):
        return set()
    last = len(layers) - 1
    for index in range(last, -1, -1) if cut else (last,):
        for place, (position, duty) in enumerate(layers[index][0]):
            if position != nfa.accept:
                continue
            if duty and not (index == last == len(minterms) and nfa.obligations.holds_at_end(duty)):
                return set()
            used = set()
            while index:
                threads, origins = layers[index]
                place = origins[place]
                index -= 1
                used.add(layers[index][0][place][0])
            return used
    return set()
