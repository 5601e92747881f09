r"""A repeat is only called one that gives nothing back where `re` finds the same spans and groups without it."""

from __future__ import annotations

import random
import re
import sys
import warnings

import pytest

from patlint.limits import DEFAULT_LIMITS, LimitReached
from patlint.machine.determinise import Mode
from patlint.machine.program import one_character
from patlint.rewrite.proof import gives_nothing_back, holds
from patlint.syntax import tree as t
from patlint.syntax.parser import PatternError, parse
from tests.rewrite.oracle import LOOKED_AT, TEXTS, random_pattern

NEW = (3, 12)
MODES: tuple[Mode, ...] = ("match", "fullmatch", "search")

# The pattern, one repeat made possessive, and whether that changes nothing under match. Source: by hand; the
# second test compares with `re`.
CASES = [
    (r"(\d+)(.*)\Z", r"(\d++)(.*)\Z", True),
    (r"( *)x", r"( *+)x", True),
    (r"(a*)(ab|b)", r"(a*+)(ab|b)", True),  # where ab succeeds behind fewer, b does behind all
    (r"(\d+)(\d)", r"(\d++)(\d)", False),
    (r"(?:(a+)b?)+c", r"(?:(a++)b?)+c", True),
    (r"(?:(a+)|b)*ab", r"(?:(a++)|b)*ab", False),
    (r"(?=(a+))a", r"(?=(a++))a", True),
    (r"(?=(a+)a)a", r"(?=(a++)a)a", False),
    (r"(?:a+)?(a|b)", r"(?:a++)?(a|b)", False),
    (r"(?:a+)?(b)", r"(?:a++)?(b)", True),
    (r"(a*)\b", r"(a*+)\b", False),  # behind "aa", before a letter of another kind
    (r"(\w*)\b", r"(\w*+)\b", True),
    (r"(a*)$", r"(a*+)$", True),
    (r"(a*)(\1)b", r"(a*+)(\1)b", False),  # a back-reference is not judged
    (r"(?:a*){2,3}b", r"(?:a*+){2,3}b", False),  # nor is a loop with a bound
    (r"(?:a|a*)*b", r"(?:a|a*+)*b", False),  # nor one with empty iterations
    (r"(?:a+b)*+ab", r"(?:a++b)*+ab", True),
    (r"a+b", r"a*+b", False),  # something else changed
    (r"(a+)b+c", r"(a++)b++c", True),
    (r"(a+)b+b", r"(a++)b++b", False),
    (r"(a+)(a?b+)b", r"(a++)(a?b++)c", False),
]


@pytest.mark.parametrize(("old", "new", "wanted"), CASES)
def test_table(old: str, new: str, wanted: bool) -> None:
    a, b = parse(old, 0, NEW), parse(new, 0, NEW)
    assert gives_nothing_back(a, b, ["match"], DEFAULT_LIMITS) is wanted
    assert holds(a, b, ["match"], "groups", DEFAULT_LIMITS) is wanted


def test_the_end_is_asked_for_in_fullmatch() -> None:
    a, b = parse("(a*)(a|)", 0, NEW), parse("(a*+)(a|)", 0, NEW)
    assert gives_nothing_back(a, b, ["match", "fullmatch", "search"], DEFAULT_LIMITS)
    a, b = parse("(a*)(a?b|)", 0, NEW), parse("(a*+)(a?b|)", 0, NEW)
    assert gives_nothing_back(a, b, ["fullmatch"], DEFAULT_LIMITS)
    a, b = parse("([ab]*)(?:b|)", 0, NEW), parse("([ab]*+)(?:b|)", 0, NEW)
    assert gives_nothing_back(a, b, ["fullmatch"], DEFAULT_LIMITS)
    a, b = parse("(a*)(?:ab|)", 0, NEW), parse("(a*+)(?:ab|)", 0, NEW)
    assert gives_nothing_back(a, b, ["match", "search"], DEFAULT_LIMITS)
    assert not gives_nothing_back(a, b, ["fullmatch"], DEFAULT_LIMITS)


@pytest.mark.skipif(sys.version_info < (3, 11), reason="re has no possessive repeats")
def test_random_patterns_on_re() -> None:
    generator = random.Random(21)
    yes = no = 0
    texts = generator.sample(TEXTS, 90)
    for _ in range(500):
        pattern = random_pattern(generator, 3)
        if len(pattern) > 40:
            continue
        try:
            old = parse(pattern, 0, NEW)
        except (PatternError, LimitReached):
            continue
        for node in t.walk(old.root):
            if not isinstance(node, t.Repeat) or node.kind != "greedy" or one_character(node.body) is None:
                continue
            changed = pattern[: node.span[1]] + "+" + pattern[node.span[1] :]
            try:
                new = parse(changed, 0, NEW)
                if not gives_nothing_back(old, new, MODES, DEFAULT_LIMITS):
                    no += 1
                    continue
            except (PatternError, LimitReached):
                continue
            yes += 1
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                a, b = re.compile(pattern), re.compile(changed)
            for text in texts:
                assert LOOKED_AT["groups"](a, "", text) == LOOKED_AT["groups"](b, "", text), (pattern, text)
    assert yes > 60
    assert no > 20
