"""Obligations: what must be true of the rest of a text.

An obligation is a state of a minimal automaton over the program's minterms, told by a small integer: the
rest of the text must be in that state's language. Equal languages have equal integers. ALL asks nothing, NONE
cannot be met. Obligations are stepped with each character that is read (`step`) and judged at the end of the
text (`holds_at_end`).

Interning costs a minimisation of the new states; those from which at most LARGEST states are reached are compared
by their spelling, larger ones by minimising them together with all known ones where one of those begins alike.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TypeAlias

from patlint.machine.minimise import equivalence

Conjunction: TypeAlias = frozenset[int]
"""Obligations that must all be met."""
Thread: TypeAlias = tuple[int, Conjunction]
"""A position of the program and the obligations under which it was reached."""

Key: TypeAlias = tuple[tuple[tuple[int, ...], bool], ...]
"""A minimal automaton spelled out in breadth-first order: equal for equal languages."""

ALL = 0
NONE = 1
FREE: Conjunction = frozenset()
LARGEST = 24


def key_of(table: Sequence[tuple[int, ...]], ends: Sequence[bool], start: int) -> tuple[Key, bool]:
    """The spelling of a state of a minimal automaton, and whether it is whole.

    It is cut off where more than LARGEST states are reached; equal languages have equal beginnings too.
    """
    number = {start: 0}
    order = [start]
    rows: list[tuple[tuple[int, ...], bool]] = []
    for state in order:
        row = []
        for target in table[state]:
            index = number.get(target)
            if index is None:
                if len(order) >= LARGEST:
                    return tuple(rows), False
                index = number[target] = len(order)
                order.append(target)
            row.append(index)
        rows.append((tuple(row), ends[state]))
    return tuple(rows), True


class Obligations:
    """The obligations of one program; `table[i][minterm]` is the obligation after reading a character."""

    def __init__(self, width: int, charge: Callable[[int], None]) -> None:
        """`charge` is told the cells that each step reckons with, and may raise LimitReached."""
        self.width = width
        self.charge = charge
        self.table: list[tuple[int, ...]] = [(ALL,) * width, (NONE,) * width]
        self.at_end: list[bool] = [True, False]
        self._keys: dict[Key, int] = {(((0,) * width, True),): ALL, (((0,) * width, False),): NONE}
        self._beginnings: set[Key] = set()
        """The cut spellings of the obligations that have no whole one."""
        self._complements: dict[int, int] = {ALL: NONE, NONE: ALL}
        self._simple: dict[tuple[int, bool, bool], int] = {}
        self._unions: dict[frozenset[Conjunction], int] = {}
        self._steps: dict[tuple[Conjunction, int], Conjunction | None] = {}

    def intern(self, table: list[tuple[int, ...]], accepting: list[bool]) -> list[int]:
        """The obligation of each state of a complete automaton."""
        classes = equivalence(table, [int(end) for end in accepting])
        first: dict[int, int] = {}
        for state, number in enumerate(classes):
            first.setdefault(number, state)
        states = list(first.values())
        place = {number: index for index, number in enumerate(first)}
        rows = [tuple(place[classes[target]] for target in table[state]) for state in states]
        ends = [accepting[state] for state in states]
        found = self._intern_minimal(rows, ends)
        return [found[place[number]] for number in classes]

    def _intern_minimal(self, rows: list[tuple[int, ...]], ends: list[bool]) -> list[int]:
        keys = [key_of(rows, ends, state) for state in range(len(rows))]
        known = len(self.table)
        if any(not whole and key in self._beginnings for key, whole in keys):
            out = self._compared(rows, ends)
        else:
            self.charge(len(rows))
            out = []
            fresh = known
            for key, whole in keys:
                same = self._keys.get(key) if whole else None
                if same is None:
                    same = fresh
                    fresh += 1
                out.append(same)
        for state, obligation in enumerate(out):
            if obligation >= known:
                self.table.append(tuple(out[target] for target in rows[state]))
                self.at_end.append(ends[state])
                key, whole = keys[state]
                if whole:
                    self._keys[key] = obligation
                else:
                    self._beginnings.add(key)
        return out

    def _compared(self, rows: list[tuple[int, ...]], ends: list[bool]) -> list[int]:
        """The obligations of states too large to be compared by their spelling: minimised with all known ones."""
        known = len(self.table)
        self.charge(known + len(rows))
        joined = self.table + [tuple(target + known for target in row) for row in rows]
        classes = equivalence(joined, [int(end) for end in self.at_end + ends])
        number = {classes[state]: state for state in range(known)}
        out = []
        for state in range(known, len(joined)):
            out.append(number.setdefault(classes[state], len(number)))
        return out

    def next_in(self, mask: int, or_end: bool) -> int:
        """The rest begins with a character of the minterms in `mask`; with `or_end` it may be empty too."""
        key = (mask, or_end, False)
        if key not in self._simple:
            row = tuple(1 if mask >> minterm & 1 else 2 for minterm in range(self.width))
            table = [row, (1,) * self.width, (2,) * self.width]
            self._simple[key] = self.intern(table, [or_end, True, False])[0]
        return self._simple[key]

    def final(self, newline: int) -> int:
        """The rest is empty or one line feed (`newline`: its minterm as a mask)."""
        key = (newline, True, True)
        if key not in self._simple:
            row = tuple(1 if newline >> minterm & 1 else 2 for minterm in range(self.width))
            table = [row, (2,) * self.width, (2,) * self.width]
            self._simple[key] = self.intern(table, [True, True, False])[0]
        return self._simple[key]

    def union(self, duties: frozenset[Conjunction]) -> int:
        """The obligation that at least one of several conjunctions is met."""
        if FREE in duties:
            return ALL
        if not duties:
            return NONE
        found = self._unions.get(duties)
        if found is None:
            order = [duties]
            index = {duties: 0}
            table: list[tuple[int, ...]] = []
            for state in order:
                row = []
                self.charge(len(state) + 1)
                for minterm in range(self.width):
                    stepped = (self.step(duty, minterm) for duty in state)
                    after = frozenset(duty for duty in stepped if duty is not None)
                    if FREE in after:
                        after = frozenset((FREE,))
                    if after not in index:
                        index[after] = len(order)
                        order.append(after)
                    row.append(index[after])
                table.append(tuple(row))
            ends = [any(map(self.holds_at_end, state)) for state in order]
            found = self._unions[duties] = self.intern(table, ends)[0]
        return found

    def complement(self, obligation: int) -> int:
        found = self._complements.get(obligation)
        if found is None:
            order = [obligation]
            index = {obligation: 0}
            for state in order:
                for target in self.table[state]:
                    if target not in index:
                        index[target] = len(order)
                        order.append(target)
            table = [tuple(index[target] for target in self.table[state]) for state in order]
            others = self._intern_minimal(table, [not self.at_end[state] for state in order])
            for state, other in zip(order, others, strict=True):
                self._complements[state] = other
                self._complements[other] = state
            found = others[0]
        return found

    def step(self, duty: Conjunction, minterm: int) -> Conjunction | None:
        """A conjunction of obligations after a character; None where it cannot be met any more."""
        key = (duty, minterm)
        if key not in self._steps:
            after = {self.table[obligation][minterm] for obligation in duty}
            after.discard(ALL)
            dead = NONE in after or any(self._complements.get(one) in after for one in after)
            self._steps[key] = None if dead else frozenset(after)
        return self._steps[key]

    def holds_at_end(self, duty: Conjunction) -> bool:
        return all(self.at_end[obligation] for obligation in duty)
