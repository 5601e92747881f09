r"""Ambiguity's way out: what is found, that it is quicker, and that it does the same on `re`."""

from __future__ import annotations

import random
import re
import sys
import warnings
from collections import Counter

import pytest

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Ambiguity, Manner, ambiguity_of
from patlint.rewrite.proof import Keeps
from patlint.rewrite.quicker import WayOut, degree, quicker
from patlint.syntax.parser import PatternError, parse
from tests.rewrite.oracle import LOOKED_AT, TEXTS, random_pattern

OLD, NEW = (3, 10), (3, 12)


def asked(
    pattern: str,
    manner: Manner,
    keeps: Keeps,
    target: tuple[int, int],
    limits: Limits = DEFAULT_LIMITS,
    **more: object,
) -> tuple[Ambiguity, WayOut | None]:
    parsed = parse(pattern, 0, target)
    before = ambiguity_of(compile_tree(parsed), manner, DEFAULT_LIMITS)
    assert before.slow is not None, pattern
    mode = "search" if manner == "scan" else manner
    growths = {manner: before.growth}
    return before, quicker(parsed, growths, manner, before.slow.parts, [mode], keeps, target, limits, **more)  # type: ignore[arg-type]


# Pattern, manner, what has to stay, the target, what is offered, its growth. Source: by hand; each is compared
# with `re` below.
CASES = [
    (r"(?:a*)*b", "match", "groups", OLD, r"a*b", None),
    (r"(?:[A-Z0-9]+ ?)+", "fullmatch", "groups", OLD, r"(?:[A-Z0-9] ?)+", None),
    (r"(?:[a-z]+-?)+$", "match", "groups", OLD, r"(?:[a-z]-?)+$", None),
    (r"(?:a|a)*b", "match", "groups", OLD, r"a*b", None),
    (r"(?:a|aa)+$", "match", "spans", OLD, r"a+$", None),
    (r"(a+)+$", "match", "language", OLD, r"a+$", None),
    (r"(a|ab|b)*c", "fullmatch", "language", OLD, r"[ab]*c", None),
    (r"(?:x+x+)+y", "match", "language", OLD, r"xx+y", None),
    (r"\s*,?\s*=", "match", "groups", OLD, r"\s*(?:,\s*)?=", None),
    (r"\d*,?\d*,?\d*;", "match", "groups", OLD, r"\d*(?:,\d*){0,2};", None),
    (r".*x?.*=", "match", "groups", OLD, r".*=", None),
    (r"=+[ =]*$", "match", "groups", OLD, r"=[ =]*$", None),
    (r"a*a*b", "search", "groups", OLD, r"a*b", 2),  # the search begins afresh all the same
    (r"(\d+)(.*)\Z", "match", "groups", NEW, r"(\d++)(.*)\Z", None),
    (r"(\d+)(.*)\Z", "match", "groups", OLD, None, None),
    (r"(a*)(\s*)(\w*)=", "match", "groups", NEW, r"(a*+)(\s*)(\w*)=", None),
    (r":\s*(\w+)\s*([ab]*)!", "match", "groups", NEW, r":\s*(\w++)\s*([ab]*)!", None),
    (r"(\s*)([\s=]*)([\s=;]*)!", "match", "groups", NEW, r"(\s*+)([\s=]*+)([\s=;]*)!", None),  # two changes
    (r"(.*)=(.*);", "match", "groups", NEW, None, None),  # whatever is changed, a group changes
    (r"(a+)\1b", "search", "groups", NEW, None, None),
    (r"(?:a{1,16}){1,16}$", "match", "language", OLD, r"a{1,256}$", None),
]  # fmt: skip


@pytest.mark.parametrize(("pattern", "manner", "keeps", "target", "wanted", "growth"), CASES)
def test_table(
    pattern: str,
    manner: Manner,
    keeps: Keeps,
    target: tuple[int, int],
    wanted: str | None,
    growth: int | None,
) -> None:
    before, found = asked(pattern, manner, keeps, target)
    assert (None if found is None else found.pattern) == wanted
    if found is None:
        return
    assert found.growth == growth
    assert degree(growth) < degree(before.growth)
    after = ambiguity_of(compile_tree(parse(found.pattern, 0, target)), manner, DEFAULT_LIMITS)
    assert (after.growth, after.undecided) == (growth, None)


def test_what_is_proven_is_told() -> None:
    assert [asked("(?:a*)*b", "match", keeps, OLD)[1].keeps for keeps in LOOKED_AT] == ["groups"] * 3  # type: ignore[union-attr, arg-type]
    found = asked("(a+)+$", "match", "language", OLD)[1]
    assert found is not None and found.keeps == "language"


def test_other_manners_do_not_get_slower() -> None:
    pattern = parse("(?:a*)*b")
    parts = ((3, 5),)
    for other, is_found in (("exponential", True), (2, True), (None, False)):
        growths = {"match": "exponential", "search": other}
        assert (
            quicker(pattern, growths, "match", parts, ["match", "search"], "spans", OLD) is not None
        ) is is_found  # type: ignore[arg-type]


def test_limits_and_what_is_left_alone() -> None:
    assert asked("(?:a*)*b", "match", "language", OLD, Limits(states=1))[1] is None
    assert asked("(?:a*)*b", "match", "language", OLD, fences=(4,))[1] is None
    long = "(?:a*)*b" + "c" * 293
    assert asked(long, "match", "language", OLD)[1] is None
    assert asked(long[:-1], "match", "language", OLD)[1] is not None
    assert quicker(parse("a*a*b"), {"match": 2}, "match", (), ["match"], "language", OLD) is None
    # Too dear for a square: three operators and more.
    assert asked(r"[^/]+-[^/]+\.x", "match", "language", OLD)[1] is None


def test_a_comment_stays() -> None:
    pattern = "(?x)(?:a*  # one\n)*b"
    assert asked(pattern, "match", "groups", OLD)[1] is None


def test_random_patterns_on_re() -> None:
    """Whatever is offered is quicker, and does the same as far as is claimed, on all short texts."""
    target = sys.version_info[:2]
    generator = random.Random(4)
    counts: Counter[str] = Counter()
    while counts["slow"] < 45:
        pattern = random_pattern(generator, 3)
        manner: Manner = generator.choice(("match", "fullmatch", "search", "scan"))
        keeps: Keeps = generator.choice(("language", "spans", "groups"))
        try:
            program = compile_tree(parse(pattern, 0, target))
        except (PatternError, LimitReached):
            continue
        slow = ambiguity_of(program, manner, DEFAULT_LIMITS).slow
        if len(pattern) > 40 or slow is None or (slow.growth == 2 and slow.by_restart):
            continue
        counts["slow"] += 1
        before, found = asked(pattern, manner, keeps, target)
        if found is None:
            continue
        counts[found.keeps] += 1
        counts["exponential"] += before.growth == "exponential"
        after = ambiguity_of(compile_tree(parse(found.pattern, 0, target)), manner, DEFAULT_LIMITS)
        assert degree(after.growth) < degree(before.growth) and after.undecided is None, (pattern, found)
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            a, b = re.compile(pattern), re.compile(str(found.pattern))
        mode = "search" if manner == "scan" else manner
        look = LOOKED_AT["spans" if found.keeps == "groups" else found.keeps]
        for text in TEXTS:
            assert look(a, mode, text) == look(b, mode, text), (pattern, found, text)
            if found.keeps == "groups":
                one, other = getattr(a, mode)(text), getattr(b, mode)(text)
                assert (one and one.regs) == (other and other.regs), (pattern, found, text)
                counts["texts"] += 1
    assert counts["groups"] + counts["spans"] + counts["language"] > 20
    assert counts["groups"] > 8
    assert counts["language"] > 2
    assert counts["exponential"] > 3
