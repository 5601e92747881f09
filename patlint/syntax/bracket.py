r"""Reading `[...]`: a set of characters, from after its opening bracket to its closing one.

>>> from patlint.syntax.dialect import dialect_of
>>> read_set(Scanner(r"^\d-]", dialect_of(None)), 0, 0).items[1]
Literal(span=(3, 4), code=45, flags=0)
"""

from __future__ import annotations

from .escapes import Category, escape_inside
from .scanner import PatternError, Scanner
from .tree import ClassEscape, Literal, Range, Set, SetItem


def read_set(scanner: Scanner, start: int, flags: int) -> Set:
    """The set whose bracket, at offset `start`, was just taken."""
    negated = scanner.skip("^")
    items: list[SetItem] = []
    while True:
        low_start = scanner.position
        low_token = _take(scanner, start)
        if low_token == "]" and items:
            break
        low = _meaning(scanner, low_token)
        low_end = scanner.position
        if not scanner.skip("-"):
            items.append(_item((low_start, low_end), low, flags))
            continue
        high_token = _take(scanner, start)
        if high_token == "]":
            items.append(_item((low_start, low_end), low, flags))
            items.append(Literal((low_end, low_end + 1), ord("-"), flags))
            break
        high = _meaning(scanner, high_token)
        if not isinstance(low, int) or not isinstance(high, int) or high < low:
            written = f"{low_token}-{high_token}"
            raise scanner.error(f"{written} is no range", len(written))
        items.append(Range((low_start, scanner.position), low, high))
    return Set((start, scanner.position), tuple(items), negated, flags)


def _take(scanner: Scanner, start: int) -> str:
    token = scanner.take()
    if not token:
        raise PatternError("the set has no closing bracket", start)
    return token


def _meaning(scanner: Scanner, token: str) -> int | Category:
    return escape_inside(scanner, token) if token[0] == "\\" else ord(token)


def _item(span: tuple[int, int], meaning: int | Category, flags: int) -> SetItem:
    if isinstance(meaning, int):
        return Literal(span, meaning, flags)
    return ClassEscape(span, meaning.kind, flags)
