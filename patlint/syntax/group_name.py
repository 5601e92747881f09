"""Reading the name or number by which a pattern speaks of a group: `(?P<name>`, `(?P=name)`, `(?(1)`.

>>> from patlint.syntax.dialect import dialect_of
>>> read_name(Scanner("year>", dialect_of(None)), ">")
'year'
>>> read_condition(Scanner("12)", dialect_of(None)))
12
"""

from __future__ import annotations

from .scanner import PatternError, Scanner

_WHAT = "the group's name"


def read_name(scanner: Scanner, terminator: str) -> str:
    """A name, up to and with `terminator`."""
    name = scanner.take_until(terminator, _WHAT)
    _check(scanner, name)
    return name


def read_condition(scanner: Scanner) -> int | str:
    """The number (1 or more) or name of a condition, up to and with the parenthesis."""
    written = scanner.take_until(")", _WHAT)
    if scanner.dialect.loose_numbers:
        is_name = written.isidentifier()
    else:
        is_name = not (written.isdecimal() and written.isascii())
    if is_name:
        _check(scanner, written)
        return written
    return _number(scanner, written)


def _check(scanner: Scanner, name: str) -> None:
    latin = scanner.is_bytes and not name.isascii()
    if not name.isidentifier() or (latin and not scanner.dialect.latin_names):
        raise scanner.error(f"{name!r} cannot name a group", len(name) + 1)


def _number(scanner: Scanner, written: str) -> int:
    back = len(written) + 1
    try:
        index = int(written)
    except ValueError:
        index = -1  # no number, or one with too many digits
    if index < 0:
        if not scanner.dialect.loose_numbers:
            raise PatternError("the group's number has too many digits", None, "ValueError")
        raise scanner.error(f"{written!r} cannot name a group", back)
    if index == 0:
        raise scanner.error("group 0 cannot be a condition", back)
    if index >= scanner.dialect.group_limit:
        raise scanner.error(f"there is no group {index}", back)
    return index
