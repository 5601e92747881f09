r"""How each construct of `re` behaves where one would not guess it, asked of `re`, the matcher and the automata.

Source of the values: the project's experiments on CPython 3.11.7, seen alike on 3.10.13, 3.12.1 and 3.13.0 where
the construct parses; every row is put to the `re` that runs the tests. Where a version differs, a row says so.
"""

from __future__ import annotations

import re
import sys
import unicodedata
from typing import TypeAlias

import pytest

from patlint.language import Language
from patlint.pairs import agreement
from patlint.syntax.casefold import folding, orbit
from tests.corpus.cpython import compiled
from tests.machine.support import MODES, dfa_of, ends, matcher_of, nfa_of, span_automaton

Span: TypeAlias = "tuple[int, int] | None"

# Function, pattern, text, span of the outcome.
OUTCOMES: tuple[tuple[str, str | bytes, str | bytes, Span], ...] = (
    # `\Z` is the end; `$` the end, or a line feed and then the end.
    ("match", r"a\Z", "a\n", None),
    ("match", "a$", "a\n", (0, 1)),
    ("match", "a$", "a\n\n", None),
    ("match", "(?m)a$", "a\n\n", (0, 1)),
    ("fullmatch", "a$", "a\n", None),
    ("fullmatch", "a$\n", "a\n", (0, 2)),
    ("search", "(?m)^b", "a\nb", (2, 3)),
    ("search", "^b", "a\nb", None),
    ("search", "(?m)^", "a\n", (0, 0)),
    ("match", "(?m)a\n^", "a\n", (0, 2)),
    # The start is not the same as a character that is no word character.
    ("match", r"\B", "", None),
    ("match", r"\B", " ", (0, 0)),
    ("match", r"\b", "", None),
    ("search", r"\B", "ab", (1, 1)),
    ("search", r"\b", " a", (1, 1)),
    ("match", r"(?a)\w", "\xe9", None),
    ("match", r"\w", "\xe9", (0, 1)),
    ("match", rb"\w", b"\xe9", None),
    ("search", r"(?a)\b", "\xe9", None),
    ("search", r"(?a)\B", "\xe9", (0, 0)),
    # Look-behind that looks forward at its own end.
    ("search", "(?<=a$)\n", "a\n", (1, 2)),
    ("search", "(?<=a$)\n", "a\n\n", None),
    ("search", "(?<=(?=ab)a)b", "ab", (1, 2)),
    ("search", "(?<=(?=ab)a).", "ac", None),
    ("search", r"(?<=a\b).", "a-", (1, 2)),
    ("search", r"(?<=a\b).", "ab", None),
    ("search", "(?<!a$)\n", "a\n\n", (1, 2)),
    # Too little text to the left: the look-behind fails, its negation holds.
    ("match", "(?<=a)", "a", None),
    ("match", "(?<!a)", "a", (0, 0)),
    ("match", "(?<=)a", "a", (0, 1)),
    # Loops whose body can be empty.
    ("match", "(?:|a)*", "a", (0, 0)),
    ("match", "(?:|a)+", "a", (0, 0)),
    ("match", "(?:|a){2,3}", "a", (0, 0)),
    ("match", "(?:a??)*", "a", (0, 0)),
    ("match", "(?:a|)*", "aa", (0, 2)),
    ("match", "(?:a?){2,3}", "aaaa", (0, 3)),
    ("match", "(?:a|b??){2}c", "abc", (0, 3)),
    ("fullmatch", "(?:|a)*", "aa", (0, 2)),
    # Atomic groups and possessive repeats (3.11).
    ("match", "(?>a$|ab)", "ab", (0, 2)),
    ("match", "(?>a|ab)b", "ab", (0, 2)),
    ("match", "(?>a|ab)c", "abc", None),
    ("fullmatch", "(?>a{1,2})++", "aaa", (0, 3)),
    ("fullmatch", "(?>a{1,2})++", "", None),
    ("match", "(?:a|ab){2}+", "aba", None),
    ("match", "(?>(?:a|ab){2})", "aba", (0, 3)),
    ("fullmatch", "(?:a|ab)*+", "ab", None),
    ("match", "a*+a", "aaa", None),
    ("match", "(?:a?)*+b", "aab", (0, 3)),
    # IGNORECASE: s, k and their kin; one character whose lower case is two; the range above U+FFFF.
    ("match", "(?i)k", "\u212a", (0, 1)),
    ("match", "(?i)s", "\u017f", (0, 1)),
    ("match", "(?i)\u0130", "i", (0, 1)),
    ("match", "(?ia)k", "\u212a", None),
    ("match", "(?i)[^k]", "\u212a", None),
    ("match", b"(?i)\xe9", b"\xc9", None),
    # Above U+FFFF a character in a set of several items is not lowered; alone, or out of a set, it is.
    ("match", "(?i)\U00010400", "\U00010428", (0, 1)),
    ("match", "(?i)[\U00010400]", "\U00010428", (0, 1)),
    ("match", "(?i)[\U00010400x]", "\U00010428", None),
    ("match", "(?i)[\U00010428x]", "\U00010400", (0, 1)),
    ("match", "(?i)\U00010400|x", "\U00010428", None),
    ("match", "(?i)[!-\U00010000]", "\U00010428", None),
)


@pytest.mark.parametrize(("function", "pattern", "text", "span"), OUTCOMES)
def test_outcomes(function: str, pattern: str | bytes, text: str | bytes, span: Span) -> None:
    right = compiled(pattern)
    if right is None:
        assert sys.version_info < (3, 11)
        pytest.skip("this Python has no atomic groups")
    found = getattr(right, function)(text)
    assert (found and found.span()) == span
    assert matcher_of(pattern).run(text, function).span == span
    for mode in MODES:
        assert dfa_of(pattern, mode).accepts(text) == (getattr(right, mode)(text) is not None), mode
    begun = right.match(text)
    assert ends(span_automaton(nfa_of(pattern)), text) == ([] if begun is None else [begun.end()])


def test_rows_that_need_atomic_groups_are_few() -> None:
    new = [pattern for _, pattern, *_ in OUTCOMES if re.search(r"\(\?>|[+}*]\+", str(pattern))]
    assert len(OUTCOMES) >= 60 and len(new) == 10
    if sys.version_info >= (3, 11):
        assert all(compiled(pattern) is not None for _, pattern, *_ in OUTCOMES)


# Pattern, text, spans that finditer finds, what split gives, what sub("-") makes of it.
SCANS = (
    ("$", "a\n", [(1, 1), (2, 2)], ["a", "\n", ""], "a-\n-"),
    ("(?:)", "a", [(0, 0), (1, 1)], ["", "a", ""], "-a-"),
    ("(?:|a)", "a", [(0, 0), (0, 1), (1, 1)], ["", "", "", ""], "---"),
    ("|a", "aa", [(0, 0), (0, 1), (1, 1), (1, 2), (2, 2)], ["", "", "", "", "", ""], "-----"),
    ("|a", "xay", None, ["", "x", "", "", "y", ""], None),
    ("a|", "xay", [(0, 0), (1, 2), (2, 2), (3, 3)], ["", "x", "", "y", ""], "-x--y-"),
)


@pytest.mark.parametrize(("pattern", "text", "spans", "parts", "replaced"), SCANS)
def test_scans(pattern, text, spans, parts, replaced) -> None:  # type: ignore[no-untyped-def]
    found = [match.span() for match in re.finditer(pattern, text)]
    assert spans is None or found == spans
    assert re.split(pattern, text) == parts
    assert replaced is None or re.sub(pattern, "-", text) == replaced
    ours = [outcome.span for outcome in matcher_of(pattern).scan(text)[0]]
    assert ours == found
    places = [0, *(place for span in found for place in span), len(text)]
    assert [text[a:b] for a, b in zip(places[::2], places[1::2], strict=True)] == parts


# Pattern, text, pos, endpos, span under match: `\b` and look-behind see what stands before pos, `^` does not match
# there; endpos is a true end.
PLACES = (
    (r"\bb", "ab", 1, 2, None),
    (r"\Bb", "ab", 1, 2, (1, 2)),
    ("(?<=a)b", "ab", 1, 2, (1, 2)),
    ("(?<!a)b", "ab", 1, 2, None),
    ("^b", "ab", 1, 2, None),
    ("(?m)^b", "\nb", 1, 2, (1, 2)),
    (r"a\Z", "ab", 0, 1, (0, 1)),
    ("a$", "ab", 0, 1, (0, 1)),
    (r"a\b", "ab", 0, 1, (0, 1)),
    ("a(?!b)", "ab", 0, 1, (0, 1)),
)


@pytest.mark.parametrize(("pattern", "text", "pos", "endpos", "span"), PLACES)
def test_places_in_a_text(pattern: str, text: str, pos: int, endpos: int, span: Span) -> None:
    found = re.compile(pattern).match(text, pos, endpos)
    assert (found and found.span()) == span
    assert matcher_of(pattern).run(text[:endpos], "match", pos=pos).span == span


# First, second, whether match takes equal spans, whether a scan does.
PAIRS = (
    ("(?:)", "(?:|a)", True, False),
    ("(?:$)", "(?:^)$", True, False),
    ("(?:a|b)*", "[ab]*", True, True),
    ("a|ab", "ab?", False, False),
)


@pytest.mark.parametrize(("first", "second", "match", "scan"), PAIRS)
def test_equal_spans_of_match_are_not_those_of_a_scan(
    first: str, second: str, match: bool, scan: bool
) -> None:
    said = agreement(first, second)
    assert (said.spans.holds, said.scans.holds) == (match, scan)


# Unicode's version: characters that fold with another, and families of them. Counted on 3.10, 3.11, 3.12 and 3.13.
ORBITS = {
    "13.0.0": (2_806, 1_387),
    "14.0.0": (2_886, 1_427),
    "15.0.0": (2_886, 1_427),
    "15.1.0": (2_886, 1_427),
}


def test_orbits() -> None:
    cased = folding(False).cased
    families = {orbit(code) for code in cased}
    assert sum(family.size() for family in families) == cased.size()  # they share no character
    known = ORBITS.get(unicodedata.unidata_version)
    assert known in (None, (cased.size(), len(families)))
    assert known is not None or sys.version_info >= (3, 14)


def test_a_search_that_begins_with_a_scoped_class_is_told() -> None:
    r"""`re.search` looks for the class under the flags outside the group, and passes over what match finds."""
    pattern = r"(?a:\W)"
    assert re.match(pattern, "\xe9") is not None
    if sys.version_info < (3, 14):
        assert re.search(pattern, "\xe9") is None
    assert not Language(pattern, mode="search").exact
