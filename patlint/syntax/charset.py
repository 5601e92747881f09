"""Sets of code points (or of bytes), canonical by construction.

A set is the strictly rising tuple of the places where membership changes: `(97, 123)` is `[a-z]`,
`(0, 10, 11, 0x110000)` everything but the line feed. Two equal sets have equal tuples, so equality and
hashing are the plain ones. Boolean operations cost one merge of the two tuples.

>>> CharSet.of_range(97, 122) - CharSet.of_chars("aeiou")
CharSet('[b-df-hj-np-tv-z]')
>>> 0x62 in CharSet.of_chars("abc")
True
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator
from typing import Final


class CharSet:
    """An immutable set of integers 0..0x10FFFF; `bounds` is the tuple described above."""

    __slots__ = ("bounds", "_hash")

    bounds: tuple[int, ...]

    def __init__(self, bounds: tuple[int, ...]) -> None:
        """`bounds` must rise strictly and be of even length; use the `of_` functions for anything else."""
        self.bounds = bounds
        self._hash = hash(bounds)

    @staticmethod
    def of_ranges(ranges: Iterable[tuple[int, int]]) -> CharSet:
        """From inclusive ranges in any order, overlapping or not."""
        bounds: list[int] = []
        for low, high in sorted(ranges):
            if bounds and low <= bounds[-1]:
                bounds[-1] = max(bounds[-1], high + 1)
            else:
                bounds += (low, high + 1)
        return CharSet(tuple(bounds))

    @staticmethod
    def of_range(low: int, high: int) -> CharSet:
        return CharSet((low, high + 1))

    @staticmethod
    def of_codes(codes: Iterable[int]) -> CharSet:
        return CharSet.of_ranges((code, code) for code in codes)

    @staticmethod
    def of_chars(text: str) -> CharSet:
        return CharSet.of_codes(map(ord, text))

    def __eq__(self, other: object) -> bool:
        return isinstance(other, CharSet) and self._hash == other._hash and self.bounds == other.bounds

    def __hash__(self) -> int:
        return self._hash

    def __bool__(self) -> bool:
        return bool(self.bounds)

    def __contains__(self, code: int) -> bool:
        return bisect_right(self.bounds, code) & 1 == 1

    def __or__(self, other: CharSet) -> CharSet:
        if not other.bounds or self is other:
            return self
        if not self.bounds:
            return other
        return _merge(self.bounds, other.bounds, 0b1110)

    def __and__(self, other: CharSet) -> CharSet:
        if not self.bounds or self is other:
            return self
        if not other.bounds:
            return other
        return _merge(self.bounds, other.bounds, 0b1000)

    def __sub__(self, other: CharSet) -> CharSet:
        if not self.bounds or not other.bounds:
            return self
        return _merge(self.bounds, other.bounds, 0b0010)

    def __le__(self, other: CharSet) -> bool:
        return not self - other

    def isdisjoint(self, other: CharSet) -> bool:
        return not self & other

    def ranges(self) -> Iterator[tuple[int, int]]:
        """Inclusive ranges, rising, not touching each other."""
        bounds = self.bounds
        for index in range(0, len(bounds), 2):
            yield bounds[index], bounds[index + 1] - 1

    def __iter__(self) -> Iterator[int]:
        for low, high in self.ranges():
            yield from range(low, high + 1)

    def size(self) -> int:
        """The number of members."""
        return sum(self.bounds[1::2]) - sum(self.bounds[::2])

    def __repr__(self) -> str:
        parts = []
        for low, high in self.ranges():
            first, last = _show(low), _show(high)
            parts.append(first if low == high else first + last if high == low + 1 else f"{first}-{last}")
        return f"CharSet('[{''.join(parts)}]')"


def _show(code: int) -> str:
    return chr(code) if 32 < code < 127 else f"\\x{code:02x}" if code < 256 else f"\\u{code:04x}"


def _merge(a: tuple[int, ...], b: tuple[int, ...], table: int) -> CharSet:
    """Bit `in_b * 2 + in_a` of `table` says whether a point belongs to the result."""
    bounds: list[int] = []
    i = j = inside = 0
    len_a, len_b = len(a), len(b)
    end = 0x110002  # beyond every bound, that of the marker in marked texts too
    while i < len_a or j < len_b:
        next_a = a[i] if i < len_a else end
        next_b = b[j] if j < len_b else end
        place = next_a if next_a < next_b else next_b
        if next_a == place and i < len_a:
            i += 1
        if next_b == place and j < len_b:
            j += 1
        now = table >> ((j & 1) * 2 + (i & 1)) & 1
        if now != inside:
            bounds.append(place)
            inside = now
    return CharSet(tuple(bounds))


EMPTY: Final = CharSet(())
ALL_CODES: Final = CharSet((0, 0x110000))
ALL_BYTES: Final = CharSet((0, 0x100))
NEWLINE: Final = CharSet((10, 11))
