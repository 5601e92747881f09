r"""Cases on which patlint and `re` once differed: a regression table, and what each fault of `breaks` looks like.

A row is (kind, pattern, flags, text, other pattern or None, cause). A cause "break NAME" is a fault of `breaks`:
without it the row must be right, with it wrong. The other rows were faults of patlint, found by the oracle and
mended since. Rows are printed by the oracle, made small; the cause is added by hand.

Source: runs of the oracle on CPython 3.10.13, 3.11.7, 3.12.1 and 3.13.0.
"""

from __future__ import annotations

from typing import TypeAlias

Case: TypeAlias = "tuple[str, str | bytes, int, str | bytes | None, str | bytes | None, str]"

CASES: tuple[Case, ...] = (
    ("alike", "a|b", 0, "a", "b?", "a set above 0x10FFFF, the marker's, was merged without end"),
    (
        "crash",
        b"(A|)\xff?",
        0,
        b"",
        b"(A|$|)\xff?",
        "marked automata of bytes had a class of codes above 0xFF",
    ),
    ("match", "aa$", 0, "aa\n", None, "break dollar"),
    ("search", "a$", 0, "a\n", None, "break dollar"),
    ("groups", "$", 0, "\n", None, "break dollar"),
    ("span", "(|.)+", 0, "a", None, "break empty-loop"),
    ("span", "(|a)+", 0, "a", None, "break empty-loop"),
    ("search", "(?i)\u0130", 0, "\u0131", None, "break kin"),
    ("span", "(?i)\u212a\u0130", 0, "K\u0131", None, "break kin"),
    ("match", "(?i)\u017f", 0, "s", None, "break kin"),
    ("search", r"(?<=\b)", 0, "", None, "break behind"),
    ("search", r"(?<=\B)", 0, "", None, "break behind"),
    ("match", "(?<=^$)a", 0, "a", None, "break behind"),
    ("span", ".?", 0, "a", None, "break veto"),
    ("span", "(?:bb)*?", 0, "bb", None, "break lazy"),
    ("groups", r"(b)\1", 2, "Bb", None, "break back-fold"),
    ("groups", r"(?i)(\u0061)\1", 0, "Aa", None, "break back-fold"),
    ("search", "(?m)^\n", 0, "a\n\n", None, "break line-start"),
    ("pair", "", 0, "a", "a*", "break relation"),
    ("parse", "\n+++", 0, None, None, "break position"),
    ("parse", r"%]+)\)s", 0, None, None, "break position"),
)
