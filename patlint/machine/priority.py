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

from collections.abc import Iterable, Iterator

from patlint.limits import LimitReached
from patlint.machine.alphabet import Alphabet
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.nfa import Nfa
from patlint.machine.obligations import FREE, Conjunction, Thread
from patlint.machine.ordered import Threads, ends_here, movers, prune, steps
from patlint.syntax.charset import CharSet

ORDERED_COST = 2
"""A thread put into an ordered list takes about as long as two of the subset construction, for which `work` is made."""
MARKER = 0x110000
"""Stands for the end of the match in marked texts; no character has this code."""


class _Counted:
    """Passes on what is iterated over and counts it in `number`."""

    def __init__(self) -> None:
        self.number = 0

    def __call__(self, moves: Iterable[tuple[Thread, int]]) -> Iterator[tuple[Thread, int]]:
        for move in moves:
            self.number += 1
            yield move


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
    counted = _Counted()
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
            for minterm, among in enumerate(movers(nfa, threads, True)):
                context = nfa.next_context(before, minterm)
                after, _ = prune(nfa, counted(steps(nfa, threads, minterm, context, True, among)), True)
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
        if work + ORDERED_COST * counted.number > nfa.limits.work:
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
    counted = _Counted()
    for state, (threads, before) in enumerate(order):
        for minterm, among in enumerate(movers(nfa, threads, False)):
            counted.number += 1
            context = nfa.next_context(before, minterm)
            after, origins = prune(nfa, counted(steps(nfa, threads, minterm, context, False, among)), cut)
            target = index_of(after, context)
            for place, origin in enumerate(origins):
                sources.setdefault((target, place), []).append((state, origin))
        if ORDERED_COST * counted.number > nfa.limits.work:
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

    For each position a shortest way through it is spelled and run; what its winning thread reads is used. Texts
    that begin alike share their steps. Stops where these come to `work`.
    """
    back, onward = _ways(nfa)
    runs = _Runs(nfa, mode != "fullmatch")
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
        used |= runs.winner([_some_minterm(nfa, each) for each in way])
        if runs.is_spent():
            break
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


class _Runs:
    """Texts run one after the other from the start; what was stepped once is remembered."""

    def __init__(self, nfa: Nfa, cut: bool) -> None:
        self.nfa, self.cut, self.counted = nfa, cut, _Counted()
        self.lists: list[tuple[Threads, int]] = []
        """The threads and the context of each state."""
        self.ends: list[list[tuple[int, Conjunction]]] = []
        """Where in a state's list the threads at the end stand, with their obligations."""
        self._numbers: dict[tuple[Threads, int], int] = {}
        self._moves: dict[tuple[int, int], tuple[int, tuple[int, ...]]] = {}
        self.start = self._number(_start(nfa, nfa.start_context, False, cut), nfa.start_context)

    def is_spent(self) -> bool:
        return ORDERED_COST * self.counted.number > self.nfa.limits.work

    def _number(self, threads: Threads, context: int) -> int:
        key = (threads, context)
        number = self._numbers.get(key)
        if number is None:
            number = self._numbers[key] = len(self.lists)
            self.lists.append(key)
            accept = self.nfa.accept
            ends = [(place, duty) for place, (position, duty) in enumerate(threads) if position == accept]
            self.ends.append(ends)
        return number

    def _move(self, state: int, minterm: int) -> tuple[int, tuple[int, ...]]:
        """The next state, and where in the list before each of its threads came from."""
        found = self._moves.get((state, minterm))
        if found is None:
            threads, before = self.lists[state]
            self.counted.number += 1 + len(threads) // 4
            context = self.nfa.next_context(before, minterm)
            moves = self.counted(steps(self.nfa, threads, minterm, context, False))
            after, origins = prune(self.nfa, moves, self.cut)
            found = self._moves[state, minterm] = self._number(after, context), origins
        return found

    def winner(self, minterms: list[int]) -> set[int]:
        """The positions that the winning thread reads on a text; nothing where that is not sure."""
        layers: list[tuple[int, tuple[int, ...]]] = [(self.start, ())]
        for minterm in minterms:
            if self.is_spent():
                return set()
            state, origins = self._move(layers[-1][0], minterm)
            if not self.lists[state][0]:
                break
            layers.append((state, origins))
        if not self.cut and len(layers) <= len(minterms):
            return set()
        last = len(layers) - 1
        for index in range(last, -1, -1) if self.cut else (last,):
            for place, duty in self.ends[layers[index][0]]:
                if duty and not (index == last == len(minterms) and self.nfa.obligations.holds_at_end(duty)):
                    return set()
                used = set()
                while index:
                    place = layers[index][1][place]
                    index -= 1
                    used.add(self.lists[layers[index][0]][0][place][0])
                return used
        return set()
