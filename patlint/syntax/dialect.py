"""What the versions of CPython's `re` accept differently: the one place where the parser asks for it.

Found by running more than 100,000 patterns through 3.10.13, 3.11.7, 3.12.1 and 3.13.0 and by reading the
parsers of the standard library; tests/syntax/test_versions.py repeats the comparison. Versions below 3.10
are treated as 3.10, versions above 3.13 as 3.13.

>>> dialect_of((3, 10)).atomic, dialect_of((3, 11)).atomic
(False, True)
"""

from __future__ import annotations

import sys
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Dialect:
    """The points on which versions differ."""

    atomic: bool
    """`(?>...)` and the possessive `*+`, `++`, `?+`, `{1,2}+` exist (3.11)."""
    late_flags: bool
    """`(?i)` may stand anywhere and holds for the whole pattern; a late `(?x)` makes `re` start anew (3.10).
    From 3.11 it must stand first."""
    loose_numbers: bool
    """`(?( +1_0)...)`: the number of a condition is whatever `int` takes (until 3.11)."""
    latin_names: bool
    """Group names in bytes patterns may hold letters of Latin-1 (until 3.11)."""
    template_flag: bool
    """The letter `t` is a flag, which forbids repeats (until 3.12)."""
    wide_escape_overflows: bool
    r"""`\U80000000` and above raise OverflowError, without a position (until 3.12)."""
    group_limit: int
    """A condition that names a number from here on is refused at once, not after the end of the pattern."""
    widest_look_behind: int
    """The widest fixed width of a look-behind, in characters."""
    faulty_look_behind: int
    """Wider ones up to this are refused with RuntimeError, as a fault of the compiler (3.10)."""


_DIALECTS = {
    10: Dialect(False, True, True, True, True, True, 2**31 - 1, 2**31 - 1, 2**32 - 2),
    11: Dialect(True, False, True, True, True, True, 2**30 - 1, 2**32 - 1, 0),
    12: Dialect(True, False, False, False, True, True, 2**30 - 1, 2**32 - 1, 0),
    13: Dialect(True, False, False, False, False, False, 2**30 - 1, 2**32 - 1, 0),
}


def dialect_of(target: tuple[int, int] | None) -> Dialect:
    """The dialect of the Python version `target`, of the running one for None."""
    major, minor = sys.version_info[:2] if target is None else target
    if major != 3:
        minor = 10 if major < 3 else 13
    return _DIALECTS[min(max(minor, 10), 13)]
