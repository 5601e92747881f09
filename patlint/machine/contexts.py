"""Contexts: what may be asked of the text before a place, as small integers.

A context is whether the text begins here, whether the character before is a line feed or a word character (bits),
and for each look-behind its *tracker*: the threads of its body, begun at every place so far. Trackers stand inner
ones first, and a tracker sees only those before it; a context may know fewer of them, or none (`plain`), and then
a look-behind that it does not know is taken to hold.

Limit: `states` contexts.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, TypeAlias

from patlint.limits import LimitReached
from patlint.machine.determinise import Bound, Masks, split, weakest
from patlint.machine.obligations import FREE, Conjunction

if TYPE_CHECKING:
    from patlint.machine.nfa import Nfa

AT_START = 1
AFTER_NEWLINE = 2
AFTER_WORD = 4  # shifted by the index of the set of word characters

Tracker: TypeAlias = tuple[int, Bound, frozenset[Conjunction]]
"""The threads under way in a look-behind's body (as in `determinise`), and the obligations of those that have just
ended."""


class Contexts:
    """The contexts of one program; `parts[context]` are its bits and trackers.

    `plain[minterm]` is the context after a character, without trackers, and `plain_start` that of the text's start;
    `start` has all trackers. `Nfa` makes one of these when its positions are numbered.
    """

    def __init__(self, nfa: Nfa) -> None:
        self.nfa = nfa
        self.parts: list[tuple[int, tuple[Tracker, ...]]] = []
        self._numbers: dict[tuple[int, tuple[Tracker, ...]], int] = {}
        self._next: dict[tuple[int, int], int] = {}
        self._begins: dict[tuple[int, int], tuple[int, Masks]] = {}
        self._splits: dict[tuple[int, int, int], tuple[int, Masks]] = {}
        self.bits = [self.bits_after(minterm) for minterm in range(len(nfa.alphabet))]
        self.plain = [self.intern(bits, ()) for bits in self.bits]
        self.plain_start = self.intern(AT_START if nfa.asks_start else 0, ())

    def bits_after(self, minterm: int) -> int:
        bits = AFTER_NEWLINE if self.nfa.asks_newline and self.nfa.newline >> minterm & 1 else 0
        for index, mask in enumerate(self.nfa.word_masks):
            if mask >> minterm & 1:
                bits |= AFTER_WORD << index
        return bits

    def intern(self, bits: int, trackers: tuple[Tracker, ...]) -> int:
        key = (bits, trackers)
        found = self._numbers.get(key)
        if found is None:
            if len(self.parts) > self.nfa.limits.states + len(self.bits):
                raise LimitReached("states", self.nfa.limits.states)
            found = self._numbers[key] = len(self.parts)
            self.parts.append(key)
        return found

    def next(self, context: int, minterm: int) -> int:
        """The context after reading a character in `context`."""
        if not self.nfa.trackers:
            return self.plain[minterm]
        key = (context, minterm)
        found = self._next.get(key)
        if found is None:
            found = self.with_trackers(self.bits[minterm], self.parts[context][1], minterm)
            self._next[key] = found
        return found

    def with_trackers(self, bits: int, before: tuple[Tracker, ...] | None, minterm: int) -> int:
        trackers: tuple[Tracker, ...] = ()
        end_bit = 1 << self.nfa.accept
        just_free = frozenset((FREE,))
        # A context that knows fewer trackers (inside one of them) goes on knowing only those.
        known = self.nfa.trackers if before is None else self.nfa.trackers[: len(before)]
        for index, body in enumerate(known):
            context = self.intern(bits, trackers)
            key = (body, context)
            begin = self._begins.get(key)
            if begin is None:
                begin = self._begins[key] = split(self.nfa.closure(body, context))
            free, groups = begin[0], dict(begin[1])
            if before is not None:
                free |= self._tracked(before[index], minterm, context, groups)
            ended = frozenset(duty for duty, mask in groups.items() if mask & end_bit)
            under_way = {duty: mask & ~end_bit for duty, mask in groups.items()}
            trackers += ((free & ~end_bit, weakest(free, under_way), just_free if free & end_bit else ended),)
        return self.intern(bits, trackers)

    def _tracked(self, tracker: Tracker, minterm: int, context: int, groups: dict[Conjunction, int]) -> int:
        """Step the threads of a tracker into `groups`; the positions without obligations are returned."""
        free, bound, _ = tracker
        readers = self.nfa.readers[minterm]
        bits = 0
        moved = [(FREE, free & readers)]
        for duty, mask in bound:
            rest = self.nfa.obligations.step(duty, minterm)
            if rest is not None:
                moved.append((rest, mask & readers))
        for rest, waiting in moved:
            more = (waiting & self.nfa.up) << 1 | (waiting & self.nfa.down) >> 1
            waiting &= ~(self.nfa.up | self.nfa.down)
            while waiting:
                low = waiting & -waiting
                waiting ^= low
                self.nfa.charge(1)
                key = (low.bit_length() - 1, context, minterm)
                found = self._splits.get(key)
                if found is None:
                    found = self._splits[key] = split(self.nfa.after(key[0], minterm, context))
                more |= found[0]
                for duty, mask in found[1]:
                    both = rest | duty
                    groups[both] = groups.get(both, 0) | mask
            if rest:
                groups[rest] = groups.get(rest, 0) | more
            else:
                bits |= more
        return bits

    def all(self) -> tuple[int, ...]:
        """All contexts that some text leads to, the start's first. Raises LimitReached("states")."""
        found = {self.nfa.start_context: None}
        order = [self.nfa.start_context]
        for context in order:
            for minterm in range(len(self.nfa.alphabet)):
                after = self.next(context, minterm)
                if after not in found:
                    found[after] = None
                    order.append(after)
        return tuple(order)
