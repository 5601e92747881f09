"""Reading how often a repeat repeats: `*`, `+`, `?`, `{2}`, `{2,}`, `{,3}`, `{2,3}`.

>>> from patlint.syntax.dialect import dialect_of
>>> read_counts(Scanner("2,}", dialect_of(None)), "{", 0)
(2, None)
>>> read_counts(Scanner("2,x", dialect_of(None)), "{", 0) is None
True
"""

from __future__ import annotations

from .escapes import DIGITS
from .scanner import PatternError, Scanner

MAX_REPEAT = 2**32 - 1
"""Counts from here on are refused (`OverflowError`)."""

_LONGEST_NUMBER = 4300  # digits; int() refuses longer ones
_SIGNS: dict[str, tuple[int, int | None]] = {"*": (0, None), "+": (1, None), "?": (0, 1)}


def read_counts(scanner: Scanner, token: str, start: int) -> tuple[int, int | None] | None:
    """Minimum and maximum (None: without bound) of the repeat that `token`, taken at `start`, begins.

    None where it is a literal brace; the scanner then stands behind the brace.
    """
    if token in _SIGNS:
        return _SIGNS[token]
    if scanner.next == "}":
        return None
    index = scanner.index
    low = high = scanner.take_while(len(scanner.tokens), DIGITS)
    if scanner.skip(","):
        high = scanner.take_while(len(scanner.tokens), DIGITS)
    if not scanner.skip("}"):
        scanner.seek(index)
        return None
    minimum = _count(low) if low else 0
    maximum = _count(high) if high else None
    if maximum is not None and maximum < minimum:
        raise PatternError(f"the repeat's minimum {minimum} is above its maximum {maximum}", start + 1)
    return minimum, maximum


def _count(digits: str) -> int:
    if len(digits) > _LONGEST_NUMBER:
        raise PatternError("the repeat count has too many digits", None, "ValueError")
    count = int(digits)
    if count >= MAX_REPEAT:
        raise PatternError("the repeat count is too large", None, "OverflowError")
    return count
