"""Which prefix a match takes, and which parts of a pattern a match ever uses.

A state is the ordered list of the engine's threads after a prefix of the text, the preferred first, each kept
once at its best place. What stands behind a thread that has reached the end without obligations can never win
and is cut. A thread that has reached the end with obligations stays as *pending*: should they come true, the
match ended back there, so it vetoes everything behind it.

`spans` is the automaton of the marked texts { w # u : on the text w u the match ends after w }; two programs
whose automata agree take equal spans with `match`. Taken after every kind of character to the left, and once
more with the empty match forbidden (what finditer, sub and split do after an empty match), agreement is
sufficient for equal outcomes of search, finditer, sub and split without groups; it is not necessary.

`used_positions` goes back from all winning threads to the positions through which they came.

Limits: `states`, `work`.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from patlint.limits import LimitReached
from patlint.machine.alphabet import Alphabet
from patlint.machine.determinise import subset_table
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.nfa import FREE, Nfa, Thread
from patlint.machine.obligations import ALL, NONE
from patlint.syntax.charset import CharSet

MARKER = 0x110000
"""Stands for the end of the match in marked texts; no character has this code."""

Threads = tuple[Thread, ...]


def _ordered(nfa: Nfa, moves: Iterable[tuple[Thread, int]], cut: bool) -> tuple[Threads, tuple[int, ...]]:
    """Threads in order without those that a better equal one makes pointless, and where each came from."""
    best: dict[int, list[frozenset[int]]] = {}
    kept: list[Thread] = []
    origins: list[int] = []
    for thread, origin in moves:
        position, duty = thread
        before = best.setdefault(position, [])
        if any(other <= duty for other in before):
            continue
        before.append(duty)
        kept.append(thread)
        origins.append(origin)
        if cut and position >= nfa.accept and not duty:
            break
    return tuple(kept), tuple(origins)


def _steps(nfa: Nfa, threads: Threads, minterm: int, stays: bool) -> Iterator[tuple[Thread, int]]:
    context = nfa.contexts[minterm]
    readers = nfa.readers[minterm]
    pending = nfa.accept + 1
    for index, (position, duty) in enumerate(threads):
        if position >= nfa.accept:
            if stays:
                rest = nfa.obligations.step(duty, minterm)
                if rest is not None:
                    yield (pending, rest), index
        elif readers >> position & 1:
            rest = nfa.obligations.step(duty, minterm)
            if rest is not None:
                for after, more in nfa.after(position, context):
                    yield (after, rest | more), index


def _start(nfa: Nfa, context: int, not_empty: bool, cut: bool) -> Threads:
    threads = nfa.initial(context)
    if not_empty:
        threads = tuple(thread for thread in threads if thread[0] != nfa.accept)
    return _ordered(nfa, ((thread, 0) for thread in threads), cut)[0]


def spans(nfa: Nfa, context: int, not_empty: bool = False) -> Dfa:
    """The minimal automaton of the marked texts, the match beginning in `context`."""
    width = len(nfa.alphabet)
    first = ("before", _start(nfa, context, not_empty, True))
    number: dict[object, int] = {first: 0}
    order: list[tuple[str, object]] = [first]
    table: list[tuple[int, ...]] = []
    work = 0

    def index_of(state: tuple[str, object]) -> int:
        index = number.get(state)
        if index is None:
            if len(order) >= nfa.limits.states:
                raise LimitReached("states", nfa.limits.states)
            index = number[state] = len(order)
            order.append(state)
        return index

    dead = ("before", ())
    accepting: list[bool] = []
    for kind, content in order:
        row: list[int] = []
        work += width
        if kind == "before":
            threads: Threads = content  # type: ignore[assignment]
            for minterm in range(width):
                work += len(threads)
                after, _ = _ordered(nfa, _steps(nfa, threads, minterm, True), True)
                if all(position > nfa.accept for position, _ in after):
                    after = ()  # only vetoes are left, and nothing to veto
                row.append(index_of(("before", after)))
            duties = tuple(_ends_here(nfa, threads))
            row.append(index_of(("after", duties)) if duties else index_of(dead))
            accepting.append(False)
        else:
            held: tuple[frozenset[int], ...] = content  # type: ignore[assignment]
            for minterm in range(width):
                stepped = (nfa.obligations.step(duty, minterm) for duty in held)
                left = tuple(dict.fromkeys(duty for duty in stepped if duty is not None))
                if FREE in left:
                    left = (FREE,)
                row.append(index_of(("after", left)) if left else index_of(dead))
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


def _ends_here(nfa: Nfa, threads: Threads) -> Iterator[frozenset[int]]:
    """For each thread that has just reached the end, what the rest must be for the match to end here."""
    for index, (position, duty) in enumerate(threads):
        if position != nfa.accept:
            continue
        veto = _veto(nfa, threads[:index])
        if veto == ALL:
            yield duty
        elif veto != NONE:
            yield duty | {veto}


def _veto(nfa: Nfa, better: Threads) -> int:
    """The obligation that none of the threads `better` matches on the rest of the text."""
    if not better:
        return ALL
    # A pending thread matches as one at the end does: by its obligations alone.
    threads = tuple((min(position, nfa.accept), duty) for position, duty in better)
    table, accepting = subset_table(nfa, "match", threads)
    matched = nfa.obligations.intern(table, accepting)[0]
    return nfa.obligations.complement(matched)


def used_positions(nfa: Nfa, mode: str, not_empty: bool) -> set[int]:
    """The positions that the winning thread of some text reads; too many in doubt, never too few.

    `mode` "match" stands for search too: every kind of character may stand to the left then. `not_empty`
    asks for what is used where the empty match is forbidden as well.
    """
    cut = mode != "fullmatch"
    contexts = nfa.all_contexts() if mode == "search" else (nfa.start_context,)
    number: dict[Threads, int] = {}
    order: list[Threads] = []

    def index_of(threads: Threads) -> int:
        index = number.get(threads)
        if index is None:
            if len(order) >= nfa.limits.states:
                raise LimitReached("states", nfa.limits.states)
            index = number[threads] = len(order)
            order.append(threads)
        return index

    for context in contexts:
        index_of(_start(nfa, context, False, cut))
        if not_empty:
            index_of(_start(nfa, context, True, cut))
    sources: dict[tuple[int, int], list[tuple[int, int]]] = {}
    work = 0
    for state, threads in enumerate(order):
        for minterm in range(len(nfa.alphabet)):
            work += 1 + len(threads)
            moves = ((t, o) for t, o in _steps(nfa, threads, minterm, False))
            after, origins = _ordered(nfa, moves, cut)
            target = index_of(after)
            for place, origin in enumerate(origins):
                sources.setdefault((target, place), []).append((state, origin))
        if work > nfa.limits.work:
            raise LimitReached("work", nfa.limits.work)
    waiting = [
        (state, place)
        for state, threads in enumerate(order)
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
                used.add(order[source[0]][source[1]][0])
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
        if position == nfa.accept or not nfa.reads[position]:
            continue
        for after, _ in nfa.after(position, nfa.contexts[_some_minterm(nfa, position)]):
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
    for minterm in minterms:
        threads, origins = _ordered(nfa, _steps(nfa, threads, minterm, False), cut)
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
