"""The step-counting matcher gives the spans and groups of `re`, on every construct."""

from __future__ import annotations

import random
import sys

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from patlint.machine.matcher import NEVER
from tests.corpus.cpython import FAULTS, compiled, known_fault, spans_of
from tests.corpus.generate import FEATURES, LEAVES, POSSESSIVE, REPEATS, Maker, texts
from tests.machine.support import MODES, matcher_of

TEXTS = (*texts("ab\n", 4), *texts("aA\u212a \n", 2), "abA\n", "K", "k", " b a", "\u0130", "\u0131i", "kbA")
TURNS = 20_000
"""Patterns that walk further on these short texts are left out, and counted: `re` would walk as far."""
PYTHON = sys.version_info[:2]
OLD = PYTHON < (3, 11)


def compare(pattern: str | bytes, each_text: list[str] | list[bytes], flags: int = 0) -> int:
    """How many comparisons of `pattern` with `re` were made; fails on the first that differs."""
    right = compiled(pattern, flags)
    if right is None or known_fault(pattern, flags):
        return 0
    ours = matcher_of(pattern, flags)
    made = 0
    for text in each_text:
        found, _, _, finished = ours.scan(text, TURNS)
        if not finished:
            continue
        expected = [spans_of(match) for match in right.finditer(text)]
        assert [outcome.spans for outcome in found] == expected, (pattern, "finditer", text)
        for mode in MODES:
            outcome = ours.run(text, mode, TURNS)
            if outcome.finished:
                assert outcome.spans == spans_of(getattr(right, mode)(text)), (pattern, mode, text)
                made += 1
        made += 1
    return made


@pytest.mark.parametrize("features", [(), *[(each,) for each in FEATURES], FEATURES], ids=" ".join)
def test_random_patterns(features: tuple[str, ...]) -> None:
    if OLD and features == ("atomic",):
        pytest.skip("atomic groups come with 3.11")
    maker = Maker(20, frozenset(features) - ({"atomic"} if OLD else set()))
    choose = random.Random(21)
    made = sum(compare(maker.pattern(4), choose.sample(TEXTS, 10)) for _ in range(500))
    assert made > (13_000 if OLD else 14_000)


def trees(features: tuple[str, ...]) -> st.SearchStrategy[str]:
    wraps = ["(?:{})", "({})", "(?={})", "(?!{})", "(?i:{})", "(?s:{})", r"(?:(a)|b)?{}\1", "({})?(?(1)a|b)"]
    wraps += [] if OLD else ["(?>{})"]
    marks = [*REPEATS, *(() if OLD else POSSESSIVE)]

    def larger(inner: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
        return st.one_of(
            st.tuples(inner, inner).map("".join),
            st.tuples(inner, inner).map(lambda pair: f"(?:{pair[0]}|{pair[1]})"),
            st.tuples(inner, st.sampled_from(marks)).map(lambda pair: f"(?:{pair[0]}){pair[1]}"),
            st.tuples(st.sampled_from(wraps), inner).map(lambda pair: pair[0].replace("{}", pair[1])),
        )

    return st.recursive(st.sampled_from(LEAVES), larger, max_leaves=10)


def test_drawn_patterns() -> None:
    made = [0]

    @settings(max_examples=200, derandomize=True, database=None, deadline=None)
    @given(trees(FEATURES), st.lists(st.text("abA\n ", max_size=6), min_size=1, max_size=4))
    def check(pattern: str, each_text: list[str]) -> None:
        made[0] += compare(pattern, each_text)

    check()
    assert made[0] > 500


def test_bytes() -> None:
    maker = Maker(22, frozenset({"ahead", "behind"}))
    rows = [text.encode() for text in texts("ab\n", 3)] + [b"\xe9a", b"\xff", b" a\xe9"]
    made = sum(compare(maker.pattern(3).encode() + rb"|[\x80-\xff]", rows) for _ in range(60))
    made += compare(rb"(?i)\w\xe9|[\xe0-\xe9]+K", [b"a\xe9", b"\xe9\xc9k", b"\xe9K", "\u212a".encode()])
    assert made > 8_000


@pytest.mark.parametrize("flags", [2, 8, 16, 256, 2 | 256, 8 | 16, 2 | 8 | 16 | 256])
def test_flags_of_the_call(flags: int) -> None:
    maker = Maker(23, frozenset({"ahead", "flags", "backs"}))
    choose = random.Random(24)
    assert sum(compare(maker.pattern(4), choose.sample(TEXTS, 6), flags) for _ in range(50)) > 700


def test_places_other_than_the_start() -> None:
    r"""With `pos`, `\b` and look-behind see the earlier text, `^` does not match there."""
    made = 0
    maker = Maker(25, frozenset({"ahead", "behind"}))
    fixed = ["^a", r"\Aa", r"\ba", r"\Ba", "(?<=b)a", "(?<!b)a", "(?m)^a", r"(?m)^|a\b", "(?<=^b)a"]
    for pattern in [*fixed, *(maker.pattern(3) for _ in range(60))]:
        right = compiled(pattern)
        if right is None or known_fault(pattern):
            continue
        ours = matcher_of(pattern)
        for text in ("bab", "ab", "b\na", "aa", " a"):
            for pos in range(len(text) + 1):
                for mode in MODES:
                    outcome = ours.run(text, mode, TURNS, pos)
                    assert outcome.spans == spans_of(getattr(right, mode)(text, pos)), (
                        pattern,
                        mode,
                        text,
                        pos,
                    )
                    made += 1
    assert made > 3_000


# Loops whose body can be empty, boundaries, possessive iterations: pattern, text, span of match.
# Source: check values of the project's experiments on 3.10 to 3.13; compared with the running `re` below.
SPANS = (
    ("(?:|a)*", "a", (0, 0)),
    ("(?:|a)+", "a", (0, 0)),
    ("(?:|a){2,3}", "a", (0, 0)),
    ("(?:a??)*", "a", (0, 0)),
    ("(?:a|)*", "aa", (0, 2)),
    ("(?:a?){2,3}", "aaaa", (0, 3)),
    ("(?>a$|ab)", "ab", (0, 2)),
    ("(?:a|ab){2}+", "aba", None),
    ("(?>(?:a|ab){2})", "aba", (0, 3)),
    ("(?>a{1,2})++", "aba", (0, 1)),
    (r"\B", "", None),
    (r"\B", " ", (0, 0)),
    (r"\b", "", None),
    (r"(?<=a$)\n|a", "a\n", (0, 1)),
    ("a$", "a\n", (0, 1)),
    (r"a\Z", "a\n", None),
    (r"(?i)k\Z", "\u212a", (0, 1)),
    ("(?i)[^k]", "\u212a", None),
    ("(?ia)k", "\u212a", None),
)


@pytest.mark.parametrize(("pattern", "text", "span"), SPANS)
def test_check_values(pattern: str, text: str, span: tuple[int, int] | None) -> None:
    right = compiled(pattern)
    if right is None:
        pytest.skip("this Python's `re` refuses the pattern")
    assert matcher_of(pattern).run(text, "match").span == span
    found = right.match(text)
    assert (None if found is None else found.span()) == span


# pattern, text, what finditer finds. Source as above.
SCANS = (
    ("$", "a\n", [(1, 1), (2, 2)]),
    ("(?:|a)", "a", [(0, 0), (0, 1), (1, 1)]),
    ("|a", "aa", [(0, 0), (0, 1), (1, 1), (1, 2), (2, 2)]),
    ("a*?", "aa", [(0, 0), (0, 1), (1, 1), (1, 2), (2, 2)]),
    (r"\b|b", "b b", [(0, 0), (0, 1), (1, 1), (2, 2), (2, 3), (3, 3)]),
)


@pytest.mark.parametrize(("pattern", "text", "spans"), SCANS)
def test_scans(pattern: str, text: str, spans: list[tuple[int, int]]) -> None:
    ours = matcher_of(pattern)
    assert [outcome.span for outcome in ours.scan(text)[0]] == spans
    assert [match.span() for match in compiled(pattern).finditer(text)] == spans
    assert [outcome.span for outcome in ours.scan(text, maximum=1)[0]] == spans[:1]


@pytest.mark.parametrize(("cause", "since", "until", "pattern", "mode", "text", "says", "right"), FAULTS)
def test_faults_of_cpython(cause, since, until, pattern, mode, text, says, right) -> None:  # type: ignore[no-untyped-def]
    """Each fault still is one, so that `known_fault` excuses no more than it must."""
    theirs = compiled(pattern)
    if theirs is None:
        pytest.skip("this Python's `re` refuses the pattern")
    assert matcher_of(pattern).run(text, mode).spans == right
    if not since <= PYTHON <= until:
        if PYTHON <= (3, 13):
            assert known_fault(pattern) is None
        return
    assert known_fault(pattern) == cause
    if says is SystemError:
        with pytest.raises(SystemError):
            getattr(theirs, mode)(text)
    else:
        assert spans_of(getattr(theirs, mode)(text)) == says != right


def test_the_faults_are_rare_among_random_patterns() -> None:
    maker = Maker(26, frozenset(FEATURES) - ({"atomic"} if OLD else set()))
    causes = [known_fault(p) for p in (maker.pattern(4) for _ in range(500)) if compiled(p) is not None]
    assert len(causes) > 400
    assert sum(cause is not None for cause in causes) < len(causes) // 5


@pytest.mark.parametrize("pattern", ["(?:a|a)*b", "(a+)+$", "(?=(a|aa)+b)", "a*?a*?b", "(?:a{1,3}){3}$"])
def test_both_sides_of_the_limit_on_turns(pattern: str) -> None:
    ours = matcher_of(pattern)
    text = "a" * 7 + "!"
    whole = ours.run(text, "search")
    needed = NEVER - whole.turns_left
    assert whole.finished and needed > 20
    at = ours.run(text, "search", needed)
    assert (at.finished, at.spans, at.steps, at.turns_left) == (True, whole.spans, whole.steps, 0)
    below = ours.run(text, "search", needed - 1)
    assert (below.finished, below.spans) == (False, None)
    found, steps, left, finished = ours.scan(text, needed - 1)
    assert (found, left, finished) == ([], 0, False)


def test_a_scan_over_a_run_is_one_turn_but_many_steps() -> None:
    outcome = matcher_of("a*b").run("a" * 1_000, "match")
    assert NEVER - outcome.turns_left < 10
    assert 1_000 <= outcome.steps <= 2_010
