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
    """Why the groups of this Python's `re` (and what asks for them) cannot be trusted, else None.

    All found by experiment on 3.10.13, 3.11.7, 3.12.1 and 3.13.0; `FAULTS` shows one of each.

    - "possessive": what a failed iteration of a possessive repeat captured is kept; 3.11 raises SystemError on
      some. The engine saves no captures for an iteration that it cannot come back to.
    - "open group": a conditional asks for a group that it stands in; the engine sees an end of that group left
      over from a path that failed. `re` refuses a back-reference in that place, a conditional it does not.
    - "negative look", only 3.10: captures of a negative look-around are kept where its body matched.
    - "lazy", only 3.10: captures in a lazy repeat are kept where the path behind the repeat failed.
    """
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        constructs = list(_constructs(sre_parse.parse(pattern, flags)))
    with_captures = {name for name, body in constructs if any(map(_captures, _constructs(body)))}
    if "POSSESSIVE_REPEAT" in with_captures:
        return "possessive"
    for name, body in constructs:
        if name.startswith("SUBPATTERN") and f"GROUPREF_EXISTS {name.split()[1]}" in dict(_constructs(body)):
            return "open group"
    if sys.version_info < (3, 11):
        if "ASSERT_NOT" in with_captures:
            return "negative look"
        if "MIN_REPEAT" in with_captures:
            return "lazy"
    return None


# cause, first and last version on which it was seen, pattern, mode, text, what `re` says, what is right
FAULTS: tuple[tuple[Any, ...], ...] = (
    ("possessive", (3, 11), (3, 13), "((a)|b|c)*+", "match", "abc", SystemError, ((0, 3), (2, 3), (0, 1))),
    ("possessive", (3, 11), (3, 13), "(?:(a)|b)*+", "match", "ab", ((0, 2), (1, 1)), ((0, 2), (0, 1))),
    (
        "open group",
        (3, 10),
        (3, 13),
        "(((?:(a)?(?(1)b|.))+?))",
        "fullmatch",
        "cc",
        None,
        ((0, 2),) * 3 + (None,),
    ),
    (
        "negative look",
        (3, 10),
        (3, 10),
        r"(?:(?!(.)\A.)|$)?",
        "match",
        "ab",
        ((0, 0), (0, 1)),
        ((0, 0), None),
    ),
    ("lazy", (3, 10), (3, 10), "(?:((?:.)+?)a)+?", "fullmatch", "aaa", ((0, 3), (2, 2)), ((0, 3), (0, 2))),
)


def _captures(construct: tuple[str, Any]) -> bool:
    return construct[0].startswith("SUBPATTERN")


def _constructs(tree: Any) -> Iterator[tuple[str, Any]]:
    """The constructs of CPython's own tree with their bodies; a group's number follows its name."""
    for op, value in tree:
        name = str(op)
        if name in ("MAX_REPEAT", "MIN_REPEAT", "POSSESSIVE_REPEAT"):
            bodies = [value[2]]
        elif name == "SUBPATTERN":
            bodies = [value[3]]
            name = f"{name} {value[0]}" if value[0] is not None else "GROUP"
        elif name in ("ASSERT", "ASSERT_NOT"):
            bodies = [value[1]]
        elif name == "ATOMIC_GROUP":
            bodies = [value]
        elif name == "BRANCH":
            bodies = value[1]
        elif name == "GROUPREF_EXISTS":
            bodies = [body for body in value[1:] if body is not None]
            name = f"{name} {value[0]}"
        else:
            bodies = []
        for body in bodies:
            yield name, body
            yield from _constructs(body)
        if not bodies:
            yield name, ()
