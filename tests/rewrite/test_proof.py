"""The proofs against `re`: equal automata mean equal behaviour, and different ones show a difference."""

from __future__ import annotations

import itertools
import random
import re

import pytest

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.determinise import Mode
from patlint.rewrite.proof import ends, holds, part_language, same_groups, same_language, same_spans
from patlint.syntax.parser import parse
from tests.rewrite.oracle import ends_of, random_pattern

SHORT_TEXTS = [
    *("".join(letters) for n in range(5) for letters in itertools.product("abc", repeat=n)),
    *("".join(letters) for n in range(1, 3) for letters in itertools.product("ab-d\n", repeat=n)),
]


def order(part: str) -> object:
    pattern = parse(part)
    return ends(pattern, pattern.root, DEFAULT_LIMITS)


SAME_ORDER = [
    ("a|b", "[ab]"),
    ("aa*", "a+"),
    ("(?:a?){3}", "a{0,3}"),
    ("(?:a+)?", "a*"),
    ("a|ab", "ab??"),
    ("ab|a", "ab?"),
    ("a*a*", "a*"),
    ("(?:a|b)c|(?:a|b)", "[ab]c?"),
    ("(?:a|-|--)?[abc]+", "(?:-|--)?[abc]+"),
    ("a{2,3}?", "aaa??"),
]
OTHER_ORDER = [
    ("a|ab", "ab?"),
    ("a*", "a*?"),
    ("a*", "a+"),
    ("|a", "a?"),
    ("a|abc|ab", "a|ab|abc"),
    ("(?:a|ab)(?:c|bc)", "(?:ab|a)(?:c|bc)"),
    ("(?:a|ab)(?:c|bcd)", "(?:ab|a)(?:c|bcd)"),
]


@pytest.mark.parametrize(("one", "other"), SAME_ORDER)
def test_equal_ends(one: str, other: str) -> None:
    assert order(one) == order(other)


@pytest.mark.parametrize(("one", "other"), OTHER_ORDER)
def test_other_ends(one: str, other: str) -> None:
    differs = any(ends_of(one, text) != ends_of(other, text) for text in [*SHORT_TEXTS, "abcd"])
    assert (order(one) != order(other)) == differs


def test_ends_are_those_of_re() -> None:
    """Pairs of random parts: automata are equal exactly where `re` finds the same ends in the same order."""
    generator = random.Random(5)
    rows: dict[object, list[tuple[str, tuple[tuple[int, ...], ...]]]] = {}
    parts = {random_pattern(generator, 2, pure=True) for _ in range(260)}
    for part in sorted(parts):
        seen = tuple(tuple(ends_of(part, text)) for text in SHORT_TEXTS)
        rows.setdefault(order(part), []).append((part, seen))
    alike = 0
    for members in rows.values():
        for part, seen in members[1:]:
            assert seen == members[0][1], (part, members[0][0])
            alike += 1
    # Different automata: almost always a short text shows it.
    distinct = len({members[0][1] for members in rows.values()})
    assert distinct >= 0.9 * len(rows)
    assert alike > 20
    assert len(rows) > 80


def test_a_part_must_not_look_outside() -> None:
    for part in (r"a\b", "a$", "^a", "a(?=b)"):
        with pytest.raises(ValueError, match="a part with assertions has no ends of its own"):
            order(part)


def test_limits_are_raised() -> None:
    pattern = parse("(?:a|b)*a(?:a|b){6}")
    for limits, name in ((Limits(states=20), "states"), (Limits(work=50), "work")):
        with pytest.raises(LimitReached) as caught:
            ends(pattern, pattern.root, limits)
        assert caught.value.limit == name
    assert len(part_language(pattern, pattern.root, DEFAULT_LIMITS)) > 100


LANGUAGES = [
    ("jars?", "jar", "search", True),
    ("jars?", "jar", "fullmatch", False),
    ("^a$|^b$", "^[ab]$", "search", True),
    ("a*", "b*", "search", False),  # equal, but vacuous: another matter
    (r"(a)\1", "aa", "fullmatch", False),  # not said exactly
]


@pytest.mark.parametrize(("one", "other", "mode", "same"), LANGUAGES)
def test_languages(one: str, other: str, mode: str, same: bool) -> None:
    assert same_language(parse(one), parse(other), mode, DEFAULT_LIMITS) is same  # type: ignore[arg-type]


SPANS = [
    # CONSTRUCTS.md's pairs: equal `match`, different finditer or search
    ("(?:)", "(?:|a)", False, True),
    ("(?:)", "(?:|a)", True, False),
    ("(?:$)", "(?:^)$", False, False),
    ("ab|a", "ab?", True, True),
    ("a|ab", "ab?", True, False),
    (r"\bpx\b|\bpt\b", r"\bp[xt]\b", True, True),
    (r"(a)\1", r"(a)\1", True, False),  # not said exactly
]


@pytest.mark.parametrize(("one", "other", "scanning", "same"), SPANS)
def test_spans(one: str, other: str, scanning: bool, same: bool) -> None:
    assert same_spans(parse(one), parse(other), scanning, DEFAULT_LIMITS) is same


def test_a_limit_is_no_proof() -> None:
    one = parse("(?:a|b)*a(?:a|b){6}")
    assert same_language(one, one, "fullmatch", DEFAULT_LIMITS)
    assert not same_language(one, one, "fullmatch", Limits(states=20))
    assert not same_spans(one, one, True, Limits(states=20))


GROUPS = [
    ("(a|b)x(?:c|d)", "([ab])x[cd]", True),
    ("(?:ab)(c)(?:d|e)", "ab(c)[de]", True),
    ("a|ab|(c)", "ab??|(c)", True),
    ("a|ab|(c)", "ab?|(c)", False),
    ("(?=a|b)c", "(?=[ab])c", True),
    ("(a)|b|c", "(a)|[bc]", True),
    ("(a)|", "(a)", False),
    ("(a)(b)", "(a)b", False),
    ("(a)|(b)", "(b)|(a)", False),
    ("(?i:a|b)(c)", "(?i:[ab])(c)", True),
    ("(?:(a)|b){2}", "(?:(a)|b)(?:(a)|b)", False),
    (r"(?:a|b)\b(?:c|)", r"[ab]\bc?", True),
    ("(?>a|ab)c", "(?>ab?)c", False),
]


@pytest.mark.parametrize(("one", "other", "same"), GROUPS)
def test_groups(one: str, other: str, same: bool) -> None:
    a, b = parse(one, target=(3, 12)), parse(other, target=(3, 12))
    assert same_groups(a, b, DEFAULT_LIMITS) is same
    assert holds(a, b, ["search"], "groups", DEFAULT_LIMITS) is same


def test_same_groups_are_those_of_re() -> None:
    """Whatever is called the same does the same on `re`, groups included."""
    generator = random.Random(9)
    frames = [
        "(c)(?:%s)(?:%s)",
        "(?:%s)(a|b)|(?:%s)",
        "(?:(?:%s)(b)?(?:%s))*",
        "(?=(?:%s))(.)(?:%s)",
        "(%s)(?:%s)$",
    ]
    parts = [
        "a",
        "[a]",
        "a|a",
        "ab?",
        "a|ab",
        "ab|a",
        "ab??",
        "a*",
        "(?:a+)?",
        "a*?",
        "aa*",
        "a+",
        "|a",
        "a??",
    ]
    parts += ["a?", "a|", "a|b", "[ab]", "b|a"]
    texts = generator.sample(SHORT_TEXTS, 60)
    alike = asked = 0
    for _ in range(2500):
        frame = generator.choice(frames)
        one, other = (frame % tuple(generator.sample(parts, 2)) for _ in range(2))
        asked += 1
        if same_groups(parse(one), parse(other), DEFAULT_LIMITS):
            alike += 1
            for text in texts:
                a, b = re.search(one, text), re.search(other, text)
                assert (a and a.regs) == (b and b.regs), (one, other, text)
    assert asked == 2500
    assert alike > 20


def test_spans_of_fullmatch_are_its_own() -> None:
    """The first way of match says nothing about the further ways of fullmatch, nor the text's start about other
    places."""

    def kept(old: str, new: str, mode: Mode) -> bool:
        return holds(parse(old), parse(new), [mode], "spans", DEFAULT_LIMITS)

    assert kept("a|ab", "a", "match") and not kept("a|ab", "a", "fullmatch")
    assert kept("a|ab", "ab|a", "fullmatch") and not kept("a|ab", "ab|a", "match")
    assert kept(r"(?<=x)a|b", r"b|(?<=x)a", "fullmatch")
    assert not kept(r"(?<=x)a|b", "b", "fullmatch")  # a match from a place inside the text
    assert not kept(r"\Ba|b", "b", "fullmatch")
    assert kept("a$|b", r"b|a$", "fullmatch")
