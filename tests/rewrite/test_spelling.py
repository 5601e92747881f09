r"""Sets of characters as the author would write them."""

from __future__ import annotations

import re

import pytest

from patlint.rewrite.spelling import habits_of, reduced_set
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet
from patlint.syntax.classes import char_set
from patlint.syntax.parser import parse


def chars_of(text: str, flags: int) -> CharSet:
    leaf = parse(text, flags).root
    assert isinstance(leaf, t.Literal | t.Dot | t.ClassEscape | t.Set)
    return char_set(leaf, False)


# A set, the flags, what is left of it (None: nothing is said twice).
REDUCED = [
    ("[0-90-9]", 0, "[0-9]"),
    ("[abca]", 0, "[abc]"),
    (r"[\w\d_.]", 0, r"[\w.]"),
    (r"[\w_]", 0, r"\w"),
    (r"[^\s ]", 0, r"\S"),
    (r"[^\s ,]", 0, r"[^\s,]"),
    ("[a-zA-Z]", re.I, "[a-z]"),
    ("[a-zA-Z]", 0, None),
    ("[0123]", 0, "[0-3]"),
    ("[123]", 0, None),
    ("[abc]", 0, None),
    ("[a-fg-z]", 0, "[a-z]"),
    ("[0-9A-Za-z_]", re.A, None),
    (r"[\x00\x01\x02\x03\x04\x05\x06\x07]", 0, r"[\x00-\x07]"),
    (r"[\t\n\v\f\r]", 0, None),
    (r"[-_.-]", 0, "[_.-]"),
    ("[!#$%&'()*+]", 0, None),
    (r"[\-\.\:]", 0, None),
    ("[.]", 0, None),
    ("[ ]", 0, None),
    ("[a]", 0, "a"),
    ("[^a]", 0, None),
    ("[aA]", re.I, "a"),
    ("[]a-c-b]", 0, "[]a-c-]"),
]


@pytest.mark.parametrize(("text", "flags", "expected"), REDUCED)
def test_reduced(text: str, flags: int, expected: str | None) -> None:
    node = parse(text, flags).root
    assert isinstance(node, t.Set)
    found = reduced_set(node, text, False)
    assert found == expected
    if found is not None:
        assert chars_of(found, flags) == char_set(node, False)


# A pattern, and how a set given as another pattern is written there.
SPELLED = [
    ("[0-9]x", "[0-9]", 0, "[0-9]"),
    (r"\dx", "[^\\D]", 0, r"\d"),
    ("x", "[0-9]", re.A, "[0-9]"),
    (r"[\-_]|x", "[x_-]", 0, r"[\-_x]"),
    ("a|b|c", "[a-c]", 0, "[abc]"),
    ("[a-z]|_|[0-9]", "[0-9_a-z]", 0, "[a-z_0-9]"),
    (r"\x1b|x", r"[x\x1b]", 0, r"[\x1bx]"),
    (r"\t| ", r"[ \t]", 0, r"[\t ]"),
    ("x", "[^\n]", 0, r"[^\n]"),
    (".", "[^\n]", 0, "."),
    ("k|s", "[ks]", re.I, "[ks]"),
    (r"\^|-|]", r"[\]^-]", 0, r"[\]^-]"),
]


@pytest.mark.parametrize(("pattern", "wanted", "flags", "expected"), SPELLED)
def test_spelled(pattern: str, wanted: str, flags: int, expected: str) -> None:
    parsed = parse(pattern, flags)
    wanted_chars = chars_of(wanted, flags)
    leaf_flags = next(
        node.flags
        for node in t.walk(parsed.root)
        if isinstance(node, t.Literal | t.Dot | t.Set | t.ClassEscape)
    )
    text = habits_of(parsed).spell(wanted_chars, leaf_flags)
    assert text == expected
    assert chars_of(text, flags) == wanted_chars


def test_braces_are_a_habit() -> None:
    assert habits_of(parse(r"\d{2}")).braces
    assert habits_of(parse(r"\d{2}?")).braces
    assert not habits_of(parse(r"\d\d+\}")).braces
