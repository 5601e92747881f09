"""What CPython's `re` says, in the shapes that the tests compare, and where it is at fault itself."""

from __future__ import annotations

import re
import sys
import warnings
from collections.abc import Iterator
from typing import Any

if sys.version_info >= (3, 11):
    from re import _parser as sre_parse
else:
    import sre_parse

Spans = tuple["tuple[int, int] | None", ...]


def compiled(pattern: str | bytes, flags: int = 0) -> re.Pattern[Any] | None:
    """The compiled pattern, None where `re` refuses it."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            return re.compile(pattern, flags)
        except (re.error, OverflowError):
            return None


def spans_of(match: re.Match[Any] | None) -> Spans | None:
    """The spans of the match and of each group (None: not matched), None where nothing matched."""
    if match is None:
        return None
    spans = (match.span(group) for group in range(match.re.groups + 1))
    return tuple(span if span != (-1, -1) else None for span in spans)


def known_fault(pattern: str | bytes, flags: int = 0) -> str | None:
    """Why `re`'s groups (and with them back-references and conditionals) cannot be trusted, else None.

    - "possessive": a capture inside a possessive repeat of more than one character. What a failed iteration
      captured is kept (`((a)|b|c)*+`, `(?:(a)|[ab]{1,2}){1,2}+`), and 3.11 raises SystemError on some. Found by
      experiment on 3.11.7, 3.12.1 and 3.13.0.
    - "negative look": a capture inside a negative look-around is kept where the body matched, so that the
      assertion failed. Found by experiment on 3.10.13 (`(?:(?!(.)\\A.)|(?m:^))`).
    """
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        tree = sre_parse.parse(pattern, flags)
    for name, body in _constructs(tree):
        if name == "POSSESSIVE_REPEAT" and any(_captures(each) for each in _constructs(body)):
            return "possessive"
        if name == "ASSERT_NOT" and any(_captures(each) for each in _constructs(body)):
            return "negative look"
    return None


def _captures(construct: tuple[str, Any]) -> bool:
    return construct[0] == "SUBPATTERN"


def _constructs(tree: Any) -> Iterator[tuple[str, Any]]:
    """The constructs of CPython's own tree with their bodies; SUBPATTERN only where it captures."""
    for op, value in tree:
        name = str(op)
        if name in ("MAX_REPEAT", "MIN_REPEAT", "POSSESSIVE_REPEAT"):
            bodies = [value[2]]
        elif name == "SUBPATTERN":
            bodies = [value[3]]
            name = name if value[0] is not None else "GROUP"
        elif name in ("ASSERT", "ASSERT_NOT"):
            bodies = [value[1]]
        elif name == "ATOMIC_GROUP":
            bodies = [value]
        elif name == "BRANCH":
            bodies = value[1]
        elif name == "GROUPREF_EXISTS":
            bodies = [body for body in value[1:] if body is not None]
        else:
            bodies = []
        for body in bodies:
            yield name, body
            yield from _constructs(body)
        if not bodies:
            yield name, ()
