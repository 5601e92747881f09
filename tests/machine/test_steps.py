"""The number of steps grows as the time of `re` does, on the texts of `corpus.cost`."""

from __future__ import annotations

import math
import random
import sys

import pytest

from patlint.machine.counting import Counter, countable
from tests.corpus.cost import BOUNDS, ROWS, Base, Row
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker
from tests.machine.support import matcher_of

TURNS = 15_000
BOUNDED = ("", "a{0,3}", "[ab]{1,4}?", "(?:a{0,2}b?){2,5}", ".{2,5}", ".{0,4}?b", "a{0,3}a{0,3}b")


def steps_at(row: Row, n: int) -> int | None:
    prefix, pump, suffix = row.text
    text = prefix + pump * n + suffix
    if row.manner == "scan":
        _, steps, _, finished = MATCHERS[row.pattern].scan(text, TURNS)
        return steps if finished else None
    outcome = MATCHERS[row.pattern].run(text, row.manner, TURNS)
    return outcome.steps if outcome.finished else None


class _Matchers(dict):  # type: ignore[type-arg]
    def __missing__(self, pattern: str):  # type: ignore[no-untyped-def]
        self[pattern] = matcher_of(pattern)
        return self[pattern]


MATCHERS = _Matchers()


def measured(row: Row) -> int | Base:
    """The degree that doubling n shows; where the turns run out before n = 32, the factor for each pump."""
    counts: list[int] = []
    for n in (8, 16, 32, 64, 128, 256, 512):
        steps = steps_at(row, n)
        if steps is None:
            break
        counts.append(steps)
    if len(counts) > 2:
        early, late = math.log2(counts[-2] / counts[-3]), math.log2(counts[-1] / counts[-2])
        return round(2 * late - early)  # lower powers still hold it down or up, by half as much each time
    counts = []
    while (steps := steps_at(row, len(counts) + 1)) is not None:
        counts.append(steps)
    span = min(6, len(counts) // 2)
    return Base((counts[-1] / counts[-1 - span]) ** (1 / span))


@pytest.mark.parametrize("section", sorted({row.section for row in ROWS}))
def test_growth_with_the_text(section: int) -> None:
    ran = 0
    wrong = []
    for row in ROWS:
        if row.section != section:
            continue
        found = measured(row)
        ran += 1
        if isinstance(found, Base) and isinstance(row.growth, Base):
            fits = abs(found.factor / row.growth.factor - 1) < 0.08
        else:
            fits = found == row.growth
        if not fits:
            wrong.append((row, found))
    assert not wrong
    assert ran >= {1: 20, 2: 45, 3: 25, 4: 15, 5: 40, 6: 20, 8: 30}[section]


def test_counted_steps_are_those_that_are_walked() -> None:
    """The counter reckons each place once; the matcher walks them all."""
    maker = Maker(41, frozenset({"ahead", "behind", "atomic", "flags"}))
    choose = random.Random(42)
    compared = 0
    for _ in range(350):
        pattern = maker.pattern(3) + choose.choice(BOUNDED) + maker.pattern(3)
        if compiled(pattern) is None:
            continue
        matcher = matcher_of(pattern)
        if not countable(matcher.program):
            continue
        counter = Counter(matcher.program)
        text = "".join(choose.choice("aab!\n") for _ in range(choose.randint(0, 14)))
        for manner in ("match", "fullmatch", "search", "scan"):
            if manner == "scan":
                _, steps, _, finished = matcher.scan(text, TURNS)
            else:
                outcome = matcher.run(text, manner, TURNS)
                steps, finished = outcome.steps, outcome.finished
            if finished:
                compared += 1
                assert counter.steps(text, manner, 1_000_000)[0] == steps, (pattern, text, manner)
    assert compared > (900 if sys.version_info < (3, 11) else 1_000)  # no atomic groups before 3.11


def test_both_sides_of_the_limit_on_turns_of_the_counter() -> None:
    counter = Counter(matcher_of("(a+)+$").program)
    text = "a" * 60 + "!"
    steps, left = counter.steps(text, "match", 1_000)
    assert steps is not None and steps > 2**60 and 0 < left < 1_000
    assert counter.steps(text, "match", 1_000 - left) == (steps, 0)
    assert counter.steps(text, "match", 999 - left) == (None, 0)


def bounded_steps(pattern: str, manner: str, text: str, size: int) -> int:
    """Steps with K = `size`; `text` is `a*200!` for 200 times a and a suffix, `a*4K` for 4 * K times."""
    letter, rest = text.split("*")
    count = 4 * size if rest == "4K" else int(rest.rstrip("!"))
    outcome = matcher_of(pattern.replace("K", str(size))).run(
        letter * count + ("!" if text.endswith("!") else ""), manner
    )
    return outcome.steps


@pytest.mark.parametrize(
    ("pattern", "manner", "text", "sizes", "growth"), BOUNDS, ids=lambda value: str(value)
)
def test_growth_with_the_bound(
    pattern: str, manner: str, text: str, sizes: tuple[int, ...], growth: int | Base | str
) -> None:
    counts = [bounded_steps(pattern, manner, text, size) for size in sizes]
    factors = [
        (b / a) ** (1 / (m - n)) for a, b, n, m in zip(counts, counts[1:], sizes, sizes[1:], strict=False)
    ]
    if isinstance(growth, Base):
        assert abs(factors[-1] / growth.factor - 1) < 0.1
    elif growth == "faster":
        assert factors[-1] > 2 and all(b > a for a, b in zip(factors, factors[1:], strict=False))
    else:
        slope = math.log(counts[-1] / counts[-2]) / math.log(sizes[-1] / sizes[-2])
        assert round(slope) == growth


@pytest.mark.parametrize("pattern", ["(?:a*){K}b", "(?:a+){K}b"])
@pytest.mark.parametrize("power", [1, 2, 3])
def test_a_bound_that_is_the_power_of_the_text(pattern: str, power: int) -> None:
    """Section 7: n ** K."""
    row = Row(7, pattern.replace("K", str(power)), "match", ("", "a", ""), power)
    assert measured(row) == power
