r"""What a token that begins with a backslash means, outside and inside a set.

`escape_outside` gives the character, category, anchor or group number; `escape_inside` a character or a
category. Both may take further tokens (`\x41`, `\123`, `\N{DIGIT ONE}`) and refuse what `re` refuses, at
the same position. Names of characters are looked up in the running version's Unicode data.

>>> from patlint.syntax.dialect import dialect_of
>>> escape_inside(Scanner("41", dialect_of(None)), r"\x")
65
>>> escape_outside(Scanner("", dialect_of(None)), r"\d")
Category(kind='d')
"""

from __future__ import annotations

import string
from dataclasses import dataclass
from typing import cast

from .scanner import PatternError, Scanner
from .tree import AnchorKind
from .tree import Category as CategoryKind

DIGITS = frozenset(string.digits)
_OCTAL = frozenset(string.octdigits)
_HEX = frozenset(string.hexdigits)
_LETTERS = frozenset(string.ascii_letters)
_CONTROLS = {r"\a": 7, r"\b": 8, r"\t": 9, r"\n": 10, r"\v": 11, r"\f": 12, r"\r": 13, r"\\": 92}
_CATEGORIES = frozenset((r"\d", r"\D", r"\s", r"\S", r"\w", r"\W"))
_ANCHORS = frozenset((r"\A", r"\Z", r"\b", r"\B"))
_HEX_LENGTHS = {"x": 2, "u": 4, "U": 8}


@dataclass(frozen=True, slots=True)
class Category:
    kind: CategoryKind


@dataclass(frozen=True, slots=True)
class Boundary:
    kind: AnchorKind


@dataclass(frozen=True, slots=True)
class Reference:
    """A group number; `length` is that of the whole escape, for refusals."""

    number: int
    length: int


def escape_outside(scanner: Scanner, token: str) -> int | Category | Boundary | Reference:
    """What `token`, which was just taken, means outside a set; an integer is a character's code."""
    if token in _CATEGORIES:
        return Category(cast(CategoryKind, token[1]))
    if token in _ANCHORS:
        return Boundary(cast(AnchorKind, token))
    if token in _CONTROLS:
        return _CONTROLS[token]
    digit = token[1]
    if digit == "0":
        return int(digit + scanner.take_while(2, _OCTAL), 8)
    if digit in DIGITS:
        number = digit + scanner.take_while(1, DIGITS)
        if len(number) == 2 and number[0] in _OCTAL and number[1] in _OCTAL and scanner.next in _OCTAL:
            return _octal(scanner, number + scanner.take())
        return Reference(int(number), len(number) + 1)
    return _character(scanner, token)


def escape_inside(scanner: Scanner, token: str) -> int | Category:
    """What `token`, which was just taken, means in a set; an integer is a character's code."""
    if token in _CONTROLS:
        return _CONTROLS[token]
    if token in _CATEGORIES:
        return Category(cast(CategoryKind, token[1]))
    if token[1] in _OCTAL:
        return _octal(scanner, token[1] + scanner.take_while(2, _OCTAL))
    if token[1] in DIGITS:
        raise _bad(scanner, token)
    return _character(scanner, token)


def _octal(scanner: Scanner, digits: str) -> int:
    code = int(digits, 8)
    if code > 0o377:
        raise scanner.error(f"octal escape \\{digits} is above \\377", len(digits) + 1)
    return code


def _character(scanner: Scanner, token: str) -> int:
    letter = token[1]
    if letter in _HEX_LENGTHS and (letter == "x" or not scanner.is_bytes):
        wanted = _HEX_LENGTHS[letter]
        digits = scanner.take_while(wanted, _HEX)
        written = token + digits
        if len(digits) < wanted:
            raise scanner.error(f"escape {written} needs {wanted} hexadecimal digits", len(written))
        code = int(digits, 16)
        if code > 0x10FFFF:
            if code >= 2**31 and scanner.dialect.wide_escape_overflows:
                raise PatternError(f"escape {written} is no code point", None, "OverflowError")
            raise _bad(scanner, written)
        return code
    if letter == "N" and not scanner.is_bytes:
        return _named(scanner)
    if letter in _LETTERS:
        raise _bad(scanner, token)
    return ord(letter)


def _named(scanner: Scanner) -> int:
    import unicodedata  # a megabyte of tables that hardly any pattern asks for

    if not scanner.skip("{"):
        raise scanner.error(r"\N needs a character name in braces")
    name = scanner.take_until("}", "character name")
    try:
        found = unicodedata.lookup(name)
    except KeyError:
        found = ""
    if len(found) != 1:
        raise scanner.error(f"no character is named {name!r}", len(name) + len(r"\N{}"))
    return ord(found)


def _bad(scanner: Scanner, written: str) -> PatternError:
    return scanner.error(f"escape {written} has no meaning", len(written))
