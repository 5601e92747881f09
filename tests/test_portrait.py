"""Everything about one pattern: the answers agree with `re`, and a missing answer has a reason."""

from __future__ import annotations

import itertools
import re

import pytest

from patlint.limits import Limits
from patlint.portrait import LENGTHS, MODES, WORDS, portrait_of
from patlint.rules.finding import SlowWitness
from patlint.rules.registry import RULES
from patlint.source.sites import Mode

NAMES = tuple(rule.name for rule in RULES)
TARGET = (3, 12)

# Patterns whose texts over {a, b} of each length can be counted by trying all: anything else is refused.
SMALL = [
    "a|b",
    "(?:ab)*",
    "a{2,3}",
    "(a|b)*abb",
    "(?=a)[ab]{2}",
    r"\Aa\Z",
    "a??b",
    "[ab]{0,4}",
    "(?!a)[ab]+",
    "",
]


@pytest.mark.parametrize("pattern", SMALL)
def test_counts_and_words_are_those_of_re(pattern: str) -> None:
    portrait = portrait_of(pattern, 0, "fullmatch", TARGET)
    assert portrait.counts is not None and portrait.words is not None
    texts = [
        "".join(letters)
        for length in range(LENGTHS)
        for letters in itertools.product("ab", repeat=length)
        if re.fullmatch(pattern, "".join(letters))
    ]
    assert list(portrait.counts) == [sum(len(text) == n for text in texts) for n in range(LENGTHS)]
    assert portrait.shortest == texts[0] or len(str(portrait.shortest)) == len(texts[0])
    assert all(re.fullmatch(pattern, str(word)) for word in portrait.words)
    assert len(portrait.words) == min(WORDS, len(portrait.words)) == len(set(portrait.words)) > 0
    assert portrait.open == ()
    if portrait.total is not None:
        assert portrait.total == len(texts) and not portrait.endless


def test_flags_groups_and_names() -> None:
    portrait = portrait_of("(?i)(?P<row>a)(b)", 8, "match", TARGET)
    assert (portrait.flags, portrait.groups, portrait.names) == (("IGNORECASE", "MULTILINE"), 2, {"row": 1})


MODE_ANSWERS: list[tuple[str, Mode, bool, bool]] = [
    ("a*", "match", False, True),
    ("a*", "fullmatch", False, False),
    ("a*", "search", False, True),
    ("(?!)", "search", True, False),
    (r"$a", "search", True, False),
]


@pytest.mark.parametrize(("pattern", "mode", "empty", "universal"), MODE_ANSWERS)
def test_empty_and_universal(pattern: str, mode: Mode, empty: bool, universal: bool) -> None:
    portrait = portrait_of(pattern, 0, mode, TARGET)
    assert (portrait.empty, portrait.universal) == (empty, universal)


# Source: Aho, Lam, Sethi, Ullman, Compilers, 2nd ed., section 3.9 (4 states over {a, b}); with a sink for all
# other characters one more in mode fullmatch. From memory.
def test_states_of_each_mode() -> None:
    portrait = portrait_of("(a|b)*abb", 0, "fullmatch", TARGET)
    assert portrait.states["fullmatch"] == 5
    assert list(portrait.states) == list(MODES)


def test_a_refused_pattern() -> None:
    portrait = portrait_of("a(b", 2, "search", TARGET, rules=NAMES)
    assert portrait.refused is not None
    assert portrait.refused[1] == 1
    assert portrait.flags == ("IGNORECASE",)
    assert [each.rule for each in portrait.findings] == ["invalid-pattern"]


def test_a_superset_leaves_answers_open() -> None:
    portrait = portrait_of(r"(a)\1", 0, "fullmatch", TARGET)
    assert portrait.inexact[0][1] == (3, 5)
    assert (portrait.counts, portrait.words, portrait.shortest) == (None, None, None)
    assert portrait.states["fullmatch"] is not None
    assert len(portrait.open) == 1


def test_a_limit_leaves_answers_open() -> None:
    portrait = portrait_of("(a|b)*a(a|b){10}", 0, "fullmatch", TARGET, Limits(states=50))
    assert portrait.states["fullmatch"] is None
    assert portrait.total is None and portrait.endless is None
    assert "limit states reached (50)" in portrait.open
    assert portrait_of("((a))", 0, "match", TARGET, Limits(nesting=1)).open == ("limit nesting reached (1)",)


def test_growth() -> None:
    slow = portrait_of("(a+)+$", 0, "match", TARGET, rules=NAMES)
    assert slow.growth == "exponential"
    assert isinstance(slow.slow, SlowWitness) and set(str(slow.slow.pump)) == {"a"}
    assert "exponential-ambiguity" in [each.rule for each in slow.findings]
    assert portrait_of("a*a*$", 0, "match", TARGET).growth == 2
    assert portrait_of("a*b", 0, "match", TARGET).growth == 1


def test_bytes() -> None:
    portrait = portrait_of(b"[\x80-\xff]", 0, "fullmatch", TARGET)
    assert portrait.total == 128
    assert isinstance(portrait.shortest, bytes)
    assert portrait.words and len(portrait.words) <= WORDS
