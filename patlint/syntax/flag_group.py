"""Reading the letters of a flag group: `(?im)` for the whole pattern, `(?i-s:` for a part of it.

>>> from patlint.syntax.dialect import dialect_of
>>> read_flags(Scanner("-s:", dialect_of(None)), "i")
FlagGroup(add=2, remove=16, whole=False)
"""

from __future__ import annotations

from dataclasses import dataclass

from .dialect import Dialect
from .scanner import Scanner
from .tree import ASCII, FLAG_LETTERS, LOCALE, UNICODE

TEMPLATE = 1
TYPE_FLAGS = ASCII | LOCALE | UNICODE


@dataclass(frozen=True, slots=True)
class FlagGroup:
    """The flags set and taken away; `whole`: for the whole pattern."""

    add: int
    remove: int
    whole: bool


def flag_of(letter: str, dialect: Dialect) -> int:
    """The bit of a flag's letter, 0 where it is none."""
    if letter == "t" and dialect.template_flag:
        return TEMPLATE
    return FLAG_LETTERS.get(letter, 0)


def read_flags(scanner: Scanner, letter: str) -> FlagGroup:
    """The group of which `letter`, a flag or a minus sign, was just taken; up to `:` or `)`."""
    add = remove = 0
    while letter != "-":
        if letter == ")":
            return FlagGroup(add, 0, True)
        if letter == ":":
            break
        flag = flag_of(letter, scanner.dialect)
        if letter == "L" and not scanner.is_bytes:
            raise scanner.error("flag L is for bytes patterns only")
        if letter == "u" and scanner.is_bytes:
            raise scanner.error("flag u is for str patterns only")
        add |= flag
        if flag & TYPE_FLAGS and add & TYPE_FLAGS != flag:
            raise scanner.error("flags a, u and L exclude each other")
        letter = _next(scanner, "-:)", "a colon, a minus sign or a parenthesis")
    if add & TEMPLATE:
        raise scanner.error("flag t cannot be set for a part of the pattern", 1)
    if letter == "-":
        letter = _next(scanner, "", "a flag")
        while letter != ":":
            flag = flag_of(letter, scanner.dialect)
            if flag & TYPE_FLAGS:
                raise scanner.error("flags a, u and L cannot be taken away")
            remove |= flag
            letter = _next(scanner, ":", "a colon")
    if remove & TEMPLATE:
        raise scanner.error("flag t cannot be taken away for a part of the pattern", 1)
    if add & remove:
        raise scanner.error("a flag is both set and taken away", 1)
    return FlagGroup(add, remove, False)


def _next(scanner: Scanner, ends: str, wanted: str) -> str:
    """A flag's letter, or one of the characters `ends`."""
    letter = scanner.take()
    if letter and (letter in ends or flag_of(letter, scanner.dialect)):
        return letter
    if letter.isalpha():
        raise scanner.error(f"{letter} is no flag", len(letter))
    raise scanner.error(f"{wanted} is missing after the flags", len(letter))
