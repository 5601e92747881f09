"""Laws of minterms, on random sets of characters."""

from __future__ import annotations

import random

from patlint.machine.alphabet import common, minterms, representative, universe
from patlint.syntax.charset import ALL_BYTES, ALL_CODES, CharSet


def random_set(choose: random.Random, top: int) -> CharSet:
    ranges = []
    for _ in range(choose.randint(0, 4)):
        low = choose.randrange(top)
        ranges.append((low, min(top - 1, low + choose.choice((0, 1, 3, 20)))))
    return CharSet.of_ranges(ranges)


def test_minterms_cut_the_alphabet_as_the_sets_do() -> None:
    choose = random.Random(60)
    made = 0
    for _ in range(300):
        sets = tuple(random_set(choose, 40) for _ in range(choose.randint(0, 5)))
        for whole, top in ((CharSet((0, 40)), 40), (ALL_BYTES, 256), (ALL_CODES, 300)):
            alphabet, masks = minterms(sets, whole)
            twin: dict[tuple[bool, ...], list[int]] = {}
            for code in range(top):
                twin.setdefault(tuple(code in chars for chars in sets), []).append(code)
            # One class for each combination of memberships, numbered by smallest member.
            assert [chars.bounds[0] for chars in alphabet.classes] == [codes[0] for codes in twin.values()]
            for number, (inside, codes) in enumerate(twin.items()):
                assert {alphabet.classify(code) for code in codes} == {number}
                assert tuple(bool(mask >> number & 1) for mask in masks) == inside
            assert sum(chars.size() for chars in alphabet.classes) == whole.size()
            for i, first in enumerate(alphabet.classes):
                assert first and all(first.isdisjoint(other) for other in alphabet.classes[i + 1 :])
            made += 1
    assert made == 900


def test_common_alphabet_refines_both_and_is_the_coarsest() -> None:
    choose = random.Random(61)
    for _ in range(200):
        one = tuple(random_set(choose, 40) for _ in range(2))
        other = tuple(random_set(choose, 40) for _ in range(2))
        a, b = minterms(one, ALL_CODES)[0], minterms(other, ALL_CODES)[0]
        both, of_a, of_b = common(a, b)
        for code in (*range(45), 0x10FFFF):
            number = both.classify(code)
            assert (of_a[number], of_b[number]) == (a.classify(code), b.classify(code))
        assert len(set(zip(of_a, of_b, strict=True))) == len(both)
        assert common(a, a) == (a, tuple(range(len(a))), tuple(range(len(a))))


def test_representatives_are_members_and_readable_where_they_can_be() -> None:
    choose = random.Random(62)
    for _ in range(300):
        chars = random_set(choose, 300)
        if not chars:
            continue
        code = representative(chars)
        assert code in chars
        if any(0x61 <= each <= 0x7A for each in chars):
            assert 0x61 <= code <= 0x7A
    assert universe(True) == ALL_BYTES and universe(False) == ALL_CODES
