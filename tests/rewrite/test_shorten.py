"""`shorten`: the table of pairs, what must be left alone, and laws against `re`."""

from __future__ import annotations

import random
import re
from collections import Counter

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from patlint.language import Language
from patlint.limits import LimitReached, Limits, Saving
from patlint.rewrite import shorten, suggest
from patlint.rewrite.shorten import LONGEST
from patlint.syntax.parser import PatternError, parse
from tests.rewrite.oracle import LOOKED_AT, TEXTS, random_pattern
from tests.rewrite.pairs import PAIRS, Pair


@pytest.mark.parametrize("pair", PAIRS, ids=lambda pair: f"{pair.long} {pair.mode} {pair.keeps}")
def test_pair(pair: Pair) -> None:
    found = shorten(pair.long, pair.flags, pair.mode, pair.keeps)  # type: ignore[arg-type]
    met = found is not None and len(found) <= len(pair.short)
    assert met is (not pair.known), found
    old = Language(pair.long, pair.flags, pair.mode)  # type: ignore[arg-type]
    for other in (pair.short, found):
        if other is not None and old.exact:
            assert Language(other, pair.flags, pair.mode) == old  # type: ignore[arg-type]


def test_enough_pairs_are_met() -> None:
    assert len(PAIRS) >= 60
    assert sum(not pair.known for pair in PAIRS) >= 0.8 * len(PAIRS)


# Patterns that are fine as they are. Source: read among suggestions for real code, then rewritten with
# other names.
LEFT_ALONE = [
    r"crate|box|barrel",
    r"cm|em|ex|in|mm|pc|pt|px",
    r"(===|==|~=|!=|<=|>=|<|>)",
    r"\"[^\"\\]*(?:\\.[^\"\\]*)*\"",
    r"[a-z0-9]+(?:[._-][a-z0-9]+)*",
    r"[!#$%&'*+.^_`|~0-9A-Za-z-]+",
    r"[\w\-\.]+",
    r"[0-9]{4}-[0-9]{2}-[0-9]{2}",
    r"\d\d:\d\d",
    r"(?:[A-Za-z0-9+/]{4})*(?:[A-Za-z0-9+/]{2}==|[A-Za-z0-9+/]{3}=)?",
    r"[.]txt",
    r"[\n\r\t\x0b\x0c]",
    r"^\s+|\s+$",
    r"30|36|38|39",
    r"(?:22[4-9]|23[0-9]|24[0-9]|25[0-5])\.",
    r"(?!)",
    r"[^\s\S]",
    r"",
    r"[aeiou]",
    r"(?:x{1,2}|-)y {2,}",
    r"[A-Za-z_]\w*(?:\.[A-Za-z_]\w*)*",
]


@pytest.mark.parametrize("pattern", LEFT_ALONE)
def test_left_alone(pattern: str) -> None:
    for mode in ("fullmatch", "search"):
        for keeps in ("spans", "groups"):
            assert shorten(pattern, 0, mode, keeps) is None  # type: ignore[arg-type]
    assert shorten(pattern) is None


def test_the_text_around_stays() -> None:
    verbose = "  (?:[0-90-9]) +  # [0-90-9] in a comment\n  [x]  (?: a | b )  # end"
    found = shorten(verbose, re.X, keeps="groups")
    assert found == "  [0-9] +  # [0-90-9] in a comment\n  x  (?: a | b )  # end"
    assert shorten(r"(?i)\x41(?:\x42|\x43)\-", 0, keeps="groups") == r"(?i)\x41[\x42\x43]\-"
    assert shorten("(?#note)(?:a|b)(?#note)", keeps="groups") == "(?#note)[ab](?#note)"
    assert shorten("(?:a(?#note)|b)c", keeps="groups") is None
    assert shorten(b"(?:\xff|\xfe)x", keeps="groups") == b"[\xff\xfe]x"
    assert shorten(r"(a)\1(?:1)", keeps="groups") is None  # `\11` would be another group


def test_what_is_kept_decides() -> None:
    # The order of words that begin alike matters to a search, unless what follows makes up for it.
    assert shorten("(?:box|boxes)[a-z]*!", mode="search", keeps="language") == "box[a-z]*!"
    assert shorten("(?:ab|abc|abcd)x", mode="search", keeps="spans") is None
    assert shorten("(?:pier|piers) ", mode="search", keeps="groups") == "piers? "
    assert shorten("(a|b|c|d)x", keeps="language") == "[a-d]x"
    assert shorten("(a|b|c|d)x", keeps="groups") == "([a-d])x"
    assert shorten("(?P<kind>a|b|c|d)x", keeps="language") == "(?P<kind>[a-d])x"
    assert shorten(r"(a|b|c|d)\1", keeps="language") == r"([a-d])\1"
    proposal = suggest(parse("(?:a|b)+"), "search", "spans")
    assert proposal is not None
    assert (proposal.pattern, proposal.keeps, proposal.saved) == ("[ab]+", "groups", 3)


def test_order_matters_in_atomic_groups() -> None:
    for pattern in ("(?>pier|piers)s", "(?>pier|piers)[a-z]", "(?:(?:pier|piers)[st]){2}+x"):
        found = shorten(pattern, target=(3, 11))
        assert found is None or "piers??" in str(found), found


def test_letters_keep_their_case() -> None:
    assert shorten("(?:Tide|tidE)s*(?:a|b)", re.I, "search") == "(?:Tide|tidE)s*[ab]"
    assert shorten("Sat[a-z]*T?(?:a|b)", re.I) == "Sat[a-z]*T?[ab]"


def test_groups_are_not_emptied() -> None:
    assert shorten(r"(\w+)\.(\w*)", mode="match") is None


def test_vacuous_and_empty_results_are_not_given() -> None:
    assert shorten("a*b*c*", mode="search") is None
    assert shorten("[a-z]*", mode="match") is None


def test_target_and_flags() -> None:
    # An atomic group is refused by 3.10, so what stands in it cannot be looked at.
    with pytest.raises(PatternError):
        shorten("(?>a|b)", target=(3, 10))
    assert shorten("x(?>(?:a)|(?:b))", target=(3, 11)) == "x(?>a|b)"
    assert shorten(rb"(?L)(?:a|b)+") is None  # what letters are depends on the locale
    assert shorten(b"(?:a|b)+", re.L) is None


def test_limits() -> None:
    long = "(?:a|b)" + "c" * (LONGEST - 7)
    assert len(long) == LONGEST
    found = suggest(parse(long), saving=Saving(2, 0))
    assert found is not None
    assert found.pattern in ("[ab]c{293}", "[ab]" + "c" * (LONGEST - 7))
    assert suggest(parse(long + "c"), saving=Saving(2, 0)) is None
    assert shorten("(?:a|bb)(?:a|bb)(?:c|d|e)", limits=Limits(states=1)) is None
    assert suggest(parse("(?:ab)c"), saving=Saving(4, 10)) is not None
    assert suggest(parse("(?:ab)c"), saving=Saving(5, 10)) is None
    assert suggest(parse("(?:ab)" + "cd" * 20), saving=Saving(2, 8)) is not None
    assert suggest(parse("(?:ab)" + "cd" * 20), saving=Saving(2, 10)) is None
    with pytest.raises(LimitReached):
        shorten("(" * 200 + ")" * 200)


def test_not_slower() -> None:
    """A run of one set is not turned into a loop, unless that ends exponential growth."""
    assert shorten(r"/[^/\\]*(?:\\.[^/\\]*)*/") is None
    assert shorten("(?:[A-Z0-9]+ ?)+") == "(?:[A-Z0-9] ?)+"


def compare(pattern: str, flags: int, counts: Counter[str]) -> None:
    """Whatever is suggested for `pattern` does the same as far as is claimed, on all short texts."""
    try:
        parsed = parse(pattern, flags)
    except (PatternError, LimitReached):
        return
    old = re.compile(pattern, flags)
    for keeps in LOOKED_AT:
        for mode in ("match", "fullmatch", "search"):
            found = suggest(parsed, mode, keeps, saving=Saving(1, 0))  # type: ignore[arg-type]
            if found is None:
                continue
            assert len(found.pattern) == len(pattern) - found.saved < len(pattern)
            assert isinstance(found.pattern, str)
            new = re.compile(found.pattern, flags)
            look = LOOKED_AT[found.keeps]
            for text in TEXTS:
                assert look(old, mode, text) == look(new, mode, text), (pattern, found, mode, text)
            counts[found.keeps] += 1


def test_random_patterns() -> None:
    generator = random.Random(11)
    counts: Counter[str] = Counter()
    for _ in range(130):
        pattern = random_pattern(generator, 3)
        if len(pattern) < 60:
            compare(pattern, generator.choice((0, 0, re.I, re.S, re.M)), counts)
    assert counts["groups"] > 100
    assert counts["language"] > 20
    assert counts["spans"] > 3


LEAVES = st.sampled_from(["a", "b", "[ab]", "[^a]", ".", r"\w", "[a-ba]", "^", "$", r"\b", ""])
PATTERNS = st.recursive(
    LEAVES,
    lambda inner: st.one_of(
        st.tuples(inner, inner).map("".join),
        st.lists(inner, min_size=2, max_size=3).map(lambda branches: f"(?:{'|'.join(branches)})"),
        inner.map(lambda body: f"({body})"),
        st.tuples(inner, st.sampled_from(["*", "+", "?", "{2}", "{1,2}", "*?", "??"])).map(
            lambda pair: f"(?:{pair[0]}){pair[1]}"
        ),
    ),
    max_leaves=6,
)


@settings(max_examples=60, deadline=None, derandomize=True, database=None)
@given(PATTERNS)
def test_generated_patterns(pattern: str) -> None:
    compare(pattern, 0, Counter())


@settings(max_examples=60, deadline=None, derandomize=True, database=None)
@given(PATTERNS)
def test_twice_is_not_longer(pattern: str) -> None:
    first = shorten(pattern, keeps="groups")
    if first is not None:
        second = shorten(first, keeps="groups")
        assert second is None or len(second) < len(first)
