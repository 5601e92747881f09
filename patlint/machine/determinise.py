"""Subset construction: from a program's positions to the minimal automaton of its language in a mode.

- fullmatch: the thread at the program's end counts only where the text ends.
- match: from the program's end on every text will do; a thread that has got there with obligations stays until
  they are decided.
- search: as match, and a fresh start at each place.

A state is a set of threads: a bit mask of positions without obligations, and for each conjunction of obligations
a bit mask of the positions under it. Of a position's conjunctions only the weakest are kept, so that a set of
threads has one spelling. Which threads read a character decides the next state, so that states and minterms
that let the same threads go on share one step.

Cost: states times minterms, and the threads of each step that is not shared. Limits: `states`, `work`.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal, TypeAlias

from patlint.limits import LimitReached
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.obligations import FREE, Conjunction, Thread

if TYPE_CHECKING:
    from patlint.machine.nfa import Nfa

Mode: TypeAlias = Literal["match", "fullmatch", "search"]
Masks: TypeAlias = tuple[tuple[Conjunction, int], ...]
"""Positions, as a bit mask, under each conjunction that is not free."""
Bound: TypeAlias = frozenset[tuple[Conjunction, int]]
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
    staying = end_bit if stays else 0
    afresh: dict[int, tuple[int, Masks]] | None = {} if mode == "search" else None
    follow: dict[tuple[int, int, int], tuple[int, Masks]] = {}
    tracked = bool(nfa.trackers)
    atomic = bool(nfa.atomic_ends)
    readers_of = nfa.readers
    up, down = nfa.up, nfa.down
    chained = up | down
    limits = nfa.limits
    obligations = nfa.obligations
    width = len(nfa.alphabet)
    ended: tuple[int, Masks] = (end_bit, ())
    work = 0

    def successor(firing: int, moved: dict[Conjunction, int], minterm: int, context: int) -> State:
        """The state once the positions `firing` and those in `moved`, under their duties, have read."""
        nonlocal work
        bits, groups = 0, {}
        if afresh is not None:
            begin = afresh.get(context)
            if begin is None:
                begin = afresh[context] = split(nfa.initial(context))
            bits, groups = begin[0], dict(begin[1])
        for rest, waiting in ((FREE, firing), *moved.items()):
            if waiting & chained:
                more = (waiting & up) << 1 | (waiting & down) >> 1
                waiting &= ~chained
                if rest:
                    groups[rest] = groups.get(rest, 0) | more
                else:
                    bits |= more
            while waiting:
                low = waiting & -waiting
                waiting ^= low
                work += 1
                if low == end_bit:  # decided by this character: only its obligations were waiting
                    found = ended
                else:
                    position = low.bit_length() - 1
                    key = (position, context, minterm if position > nfa.pending else -1)
                    known_after = follow.get(key)
                    if known_after is None:
                        known_after = follow[key] = split(nfa.after(position, minterm, context))
                    found = known_after
                more, more_groups = found
                if rest:
                    groups[rest] = groups.get(rest, 0) | more
                else:
                    bits |= more
                for duty, mask in more_groups:
                    both = rest | duty
                    groups[both] = groups.get(both, 0) | mask
        return state_of(bits, groups, context)

    def state_of(bits: int, groups: dict[Conjunction, int], context: int) -> State:
        if stays and bits & end_bit:
            return top
        bound = weakest(bits, groups) if groups else NO_BOUND
        return bits, bound, context if tracked and (bits or bound or afresh is not None) else 0

    top: State = (end_bit, NO_BOUND, 0)
    bits, masks = split(start)
    first = state_of(bits, dict(masks), context)
    number: dict[State, int] = {first: 0}
    order = [first]
    table: list[tuple[int, ...]] = []
    known: dict[object, int] = {}
    nothing: dict[Conjunction, int] = {}
    for state in order:
        if stays and state == top:
            table.append((number[top],) * width)
            continue
        free, bound, before = state
        row = []
        for minterm in range(width):
            readers = readers_of[minterm]
            context = nfa.next_context(before, minterm) if tracked else nfa.contexts[minterm]
            firing = free & readers
            moved = nothing
            if bound:
                moved = {}
                for duty, mask in bound:
                    mask &= readers | staying
                    if mask:
                        rest = obligations.step(duty, minterm)
                        if rest is None:
                            continue
                        if rest:
                            moved[rest] = moved.get(rest, 0) | mask
                        else:
                            firing |= mask
            key: object
            if atomic or moved:
                key = (firing, context, minterm if atomic else -1, frozenset(moved.items()))
            else:
                key = (firing, context)
            index = known.get(key)
            if index is None:
                target = successor(firing, moved, minterm, context)
                index = number.get(target)
                if index is None:
                    if len(order) >= limits.states:
                        raise LimitReached("states", limits.states)
                    index = number[target] = len(order)
                    order.append(target)
                known[key] = index
            row.append(index)
        work += width * (1 + len(bound))
        if work > limits.work:
            raise LimitReached("work", limits.work)
        table.append(tuple(row))
    accepting = [
        bool(free & end_bit) or any(mask & end_bit and obligations.holds_at_end(duty) for duty, mask in bound)
        for free, bound, _ in order
    ]
    return table, accepting


def split(threads: tuple[Thread, ...]) -> tuple[int, Masks]:
    """The threads without obligations as a bit mask, and the others as one for each conjunction."""
    bits = 0
    groups: dict[Conjunction, int] = {}
    for position, duty in threads:
        if duty:
            groups[duty] = groups.get(duty, 0) | 1 << position
        else:
            bits |= 1 << position
    return bits, tuple(groups.items())


def weakest(bits: int, groups: dict[Conjunction, int]) -> Bound:
    """Canonical: without the conjunctions of a position that holds under fewer obligations as well."""
    kept = []
    for duty, mask in groups.items():
        mask &= ~bits
        if len(groups) > 1 and len(duty) > 1:
            for other, stronger in groups.items():
                if other < duty:
                    mask &= ~stronger
        if mask:
            kept.append((duty, mask))
    return frozenset(kept)
