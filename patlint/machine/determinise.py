"""Subset construction: from a program's positions to the minimal automaton of its language in a mode.

- fullmatch: the thread at the program's end counts only where the text ends.
- match: from the program's end on every text will do; a thread that has got there with obligations stays until
  they are decided.
- search: as match, and a fresh start at each place.

A state is a set of threads: a bit mask of positions without obligations, and a set of (position, conjunction)
with them, of which only the weakest of each position are kept.

Cost: states times minterms times the threads that read each. Limits: `states`, `work`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal, TypeAlias

from patlint.limits import LimitReached
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.obligations import FREE, Conjunction, Thread

if TYPE_CHECKING:
    from patlint.machine.nfa import Nfa

Mode: TypeAlias = Literal["match", "fullmatch", "search"]
Bound: TypeAlias = frozenset[Thread]
State: TypeAlias = tuple[int, Bound, int]
NO_BOUND: Bound = frozenset()


def language(nfa: Nfa, mode: Mode) -> Dfa:
    """The minimal automaton of the texts on which the program matches in `mode`."""
    table, accepting = subset_table(nfa, mode, nfa.initial(nfa.start_context), nfa.start_context)
    return minimal(nfa.alphabet, table, accepting)


def subset_table(
    nfa: Nfa, mode: Mode, start: tuple[Thread, ...], context: int
) -> tuple[list[tuple[int, ...]], list[bool]]:
    """The complete, not yet minimal automaton from the threads `start` in `context`; state 0 is the first."""
    end_bit = 1 << nfa.accept
    stays = mode != "fullmatch"
    top: State = (end_bit, NO_BOUND, 0)
    afresh: dict[int, tuple[int, tuple[Thread, ...]]] | None = {} if mode == "search" else None
    follow: dict[tuple[int, int, int], tuple[int, tuple[Thread, ...]]] = {}
    tracked = bool(nfa.trackers)

    def after(position: int, minterm: int, context: int) -> tuple[int, tuple[Thread, ...]]:
        key = (position, context, minterm if position > nfa.pending else -1)
        found = follow.get(key)
        if found is None:
            found = follow[key] = split(nfa.after(position, minterm, context))
        return found

    def state_of(bits: int, pairs: list[Thread] | tuple[Thread, ...], context: int) -> State:
        free, bound = _weakest(bits, pairs, end_bit, stays)
        if stays and free == end_bit and not bound:
            return top
        return free, bound, context if tracked and (free or bound or afresh is not None) else 0

    first = state_of(*split(start), context)
    number: dict[State, int] = {first: 0}
    order = [first]
    table: list[tuple[int, ...]] = []
    work = 0
    limits = nfa.limits
    obligations = nfa.obligations
    width = len(nfa.alphabet)
    for state in order:
        if stays and state == top:
            table.append((number[top],) * width)
            continue
        free, bound, before = state
        row = []
        for minterm in range(width):
            readers = nfa.readers[minterm]
            context = nfa.next_context(before, minterm) if tracked else nfa.contexts[minterm]
            bits: int
            pairs: list[Thread]
            if afresh is not None:
                begin = afresh.get(context)
                if begin is None:
                    begin = afresh[context] = split(nfa.initial(context))
                bits, pairs = begin[0], list(begin[1])
            else:
                bits, pairs = 0, []
            firing = free & readers
            while firing:
                low = firing & -firing
                firing ^= low
                work += 1
                more, more_pairs = after(low.bit_length() - 1, minterm, context)
                bits |= more
                pairs += more_pairs
            for position, duty in bound:
                if position == nfa.accept:
                    if stays:
                        rest = obligations.step(duty, minterm)
                        if rest is not None:
                            pairs.append((position, rest))
                elif readers >> position & 1:
                    work += 1
                    rest = obligations.step(duty, minterm)
                    if rest is not None:
                        more, more_pairs = after(position, minterm, context)
                        if rest:
                            _join(pairs, rest, more, more_pairs)
                        else:
                            bits |= more
                            pairs += more_pairs
            target = state_of(bits, pairs, context)
            index = number.get(target)
            if index is None:
                if len(order) >= limits.states:
                    raise LimitReached("states", limits.states)
                index = number[target] = len(order)
                order.append(target)
            row.append(index)
        work += width
        if work > limits.work:
            raise LimitReached("work", limits.work)
        table.append(tuple(row))
    accepting = [
        bool(free & end_bit)
        or any(position == nfa.accept and obligations.holds_at_end(duty) for position, duty in bound)
        for free, bound, _ in order
    ]
    return table, accepting


def split(threads: tuple[Thread, ...]) -> tuple[int, tuple[Thread, ...]]:
    """The threads without obligations as a bit mask, and the others."""
    bits = 0
    pairs = []
    for thread in threads:
        if thread[1]:
            pairs.append(thread)
        else:
            bits |= 1 << thread[0]
    return bits, tuple(pairs)


def _join(pairs: list[Thread], rest: Conjunction, bits: int, more: tuple[Thread, ...]) -> None:
    """Add to `pairs` the threads `bits` and `more` under the further obligations `rest`."""
    while bits:
        low = bits & -bits
        bits ^= low
        pairs.append((low.bit_length() - 1, rest))
    pairs.extend((position, rest | duty) for position, duty in more)


def _weakest(
    bits: int, pairs: list[Thread] | tuple[Thread, ...], end_bit: int, stays: bool
) -> tuple[int, Bound]:
    """Canonical: only the weakest conjunctions of a position; an end without obligations absorbs all."""
    if not pairs:
        return (end_bit, NO_BOUND) if stays and bits & end_bit else (bits, NO_BOUND)
    by_position: dict[int, list[Conjunction]] = {}
    for position, duty in pairs:
        if duty == FREE:
            bits |= 1 << position
        elif not bits >> position & 1:
            by_position.setdefault(position, []).append(duty)
    if stays and bits & end_bit:
        return end_bit, NO_BOUND
    kept = []
    for position, duties in by_position.items():
        if bits >> position & 1:
            continue
        for duty in duties:
            if len(duties) == 1 or not any(other < duty for other in duties):
                kept.append((position, duty))
    return bits, frozenset(kept)
