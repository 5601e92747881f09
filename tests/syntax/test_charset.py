"""Sets of code points against Python's own sets, and the laws that hold of any sets."""

from __future__ import annotations

import itertools

from hypothesis import given
from hypothesis import strategies as st

from patlint.syntax.charset import ALL_CODES, EMPTY, CharSet

TOP = 0x10FFFF


def small_sets(size: int) -> list[frozenset[int]]:
    """All sets of codes below `size`, moved so that both ends of the universe are among them."""
    codes = [*range(size // 2), *range(TOP + 1 - (size - size // 2), TOP + 1)]
    return [frozenset(c for n, c in enumerate(codes) if bits >> n & 1) for bits in range(1 << size)]


def test_all_small_sets() -> None:
    pairs = 0
    sets = [(members, CharSet.of_codes(members)) for members in small_sets(6)]
    for (a, ours_a), (b, ours_b) in itertools.product(sets, sets):
        assert set(ours_a | ours_b) == a | b
        assert set(ours_a & ours_b) == a & b
        assert set(ours_a - ours_b) == a - b
        assert (ours_a <= ours_b) == (a <= b)
        assert ours_a.isdisjoint(ours_b) == a.isdisjoint(b)
        assert (ours_a == ours_b) == (a == b)
        pairs += 1
    assert pairs == 64 * 64


def test_one_spelling() -> None:
    """However a set comes about, its bounds are the same: strictly rising, never touching."""
    for members, ours in ((m, CharSet.of_codes(m)) for m in small_sets(8)):
        by_union = EMPTY
        for code in members:
            by_union = by_union | CharSet.of_range(code, code)
        by_difference = ALL_CODES - (ALL_CODES - ours)
        for other in (by_union, by_difference, CharSet.of_ranges(reversed(list(ours.ranges())))):
            assert other.bounds == ours.bounds and hash(other) == hash(ours)
        assert list(ours.bounds) == sorted(set(ours.bounds)) and len(ours.bounds) % 2 == 0
        assert (ours.size(), bool(ours), list(ours)) == (len(members), bool(members), sorted(members))


CODES = st.integers(0, TOP)
SETS = st.lists(st.tuples(CODES, st.integers(0, 5000)), max_size=8).map(
    lambda ranges: CharSet.of_ranges((low, min(TOP, low + more)) for low, more in ranges)
)


@given(SETS, SETS, SETS)
def test_laws(a: CharSet, b: CharSet, c: CharSet) -> None:
    def others(x: CharSet) -> CharSet:
        return ALL_CODES - x

    assert others(a | b) == others(a) & others(b)
    assert a & (b | c) == (a & b) | (a & c)
    assert a - b == a & others(b)
    assert a | b == b | a and a & b == b & a
    assert (a - b).isdisjoint(b) and (a - b) | (a & b) == a
    assert a & b <= a <= a | b


@given(SETS, CODES)
def test_membership(a: CharSet, code: int) -> None:
    assert (code in a) == any(low <= code <= high for low, high in a.ranges())


def test_repr_is_readable() -> None:
    assert repr(CharSet.of_chars("abc") | CharSet.of_chars("\n\u20ac")) == r"CharSet('[\x0aa-c\u20ac]')"
