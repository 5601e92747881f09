"""Widths against those of the standard library's own parser."""

from __future__ import annotations

import sys
import warnings
from typing import Any

import pytest

from patlint.syntax.parser import PatternError, parse
from patlint.syntax.width import width

from .generate import patterns

UNBOUNDED = 2**32 - 2  # what the library shows for it, or more, depends on the version


def library_width(text: str | bytes, flags: int) -> tuple[int, int]:
    parser: Any
    if sys.version_info >= (3, 11):
        from re import _parser as parser
    else:
        import sre_parse as parser
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        low, high = parser.parse(text, flags).getwidth()
    return low, high


def test_width_is_that_of_re() -> None:
    checked = unbounded = 0
    for text, flags in patterns(seed=8, count=6000):
        try:
            root = parse(text, flags).root
        except PatternError:
            continue
        low, high = width(root)
        their_low, their_high = library_width(text, flags)
        assert low == their_low, text
        if their_high >= UNBOUNDED:
            assert high is None, text
            unbounded += 1
        else:
            assert high == their_high, text
        checked += 1
    assert checked > 2000 and unbounded > 300


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("", (0, 0)),
        ("abc", (3, 3)),
        ("a|bc", (1, 2)),
        ("a*", (0, None)),
        ("(?:)*", (0, 0)),
        ("(?:a{2,3}){4}", (8, 12)),
        ("(?:a*){0}", (0, 0)),
        (r"(a|bc)\1", (2, 4)),
        (r"(a*)\1", (0, None)),
        ("(a)?(?(1)bb|c)", (1, 3)),
        ("(a)?(?(1)bb)", (0, 3)),
        (r"^\b(?=aaa)(?<!b)", (0, 0)),
        ("(?>ab?)", (1, 2)),
        ("(?:a{4294967294}){4294967294}", ((2**32 - 2) ** 2, (2**32 - 2) ** 2)),
    ],
)
def test_width(text: str, expected: tuple[int, int | None]) -> None:
    assert width(parse(text, 0, (3, 12)).root) == expected


def test_reference_to_a_group_inside() -> None:
    assert width(parse(r"((a|bc)d*)(\2\2)").root) == (3, None)
    assert width(parse(r"(a|bc)\1{2}").root) == (3, 6)


def test_reference_to_a_group_outside() -> None:
    reference = parse(r"(a)\1").root.items[1]  # type: ignore[union-attr]
    assert width(reference) == (0, None)
    assert width(reference, {1: (3, 4)}) == (3, 4)
