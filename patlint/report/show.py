r"""How patterns and texts are shown: as Python expressions, and as lines of a terminal with parts underlined.

`expression` gives what can be pasted into Python. `cells` gives one piece of display text for each character
of a pattern: itself where it is printable and fills whole columns, else an escape, so that an underline
stays in line: control and format characters, combining marks, letters written from right to left, and what
the output's encoding lacks are escaped; wide characters count two columns.

>>> expression("a" * 30 + "!"), expression("a\nb"), expression(b"\xff")
("'a' * 30 + '!'", "'a\\nb'", "b'\\xff'")
>>> cells("a\t\u0301")
('a', '\\t', '\\u0301')
"""

from __future__ import annotations

import unicodedata
from dataclasses import fields
from typing import Final

from patlint.limits import Limits
from patlint.rules.finding import SlowWitness, TextWitness, Witness

REPEATS: Final = {"exponential": 30, 2: 10_000, 3: 1_000}
"""How often a slow text shows its pump: enough for seconds of `re`'s time. Higher powers: `LEAST_REPEATS`."""
LEAST_REPEATS: Final = 150
LONG_RUN: Final = 12
"""A run of one character of this length or more is shown as `'x' * n`."""


def expression(text: str | bytes) -> str:
    """`text` as a Python expression in ASCII, long runs of one character as products."""
    parts: list[str] = []
    start = at = 0
    while at < len(text):
        end = at + 1
        while end < len(text) and text[end] == text[at]:
            end += 1
        if end - at >= LONG_RUN:
            if start < at:
                parts.append(ascii(text[start:at]))
            parts.append(f"{ascii(text[at : at + 1])} * {end - at}")
            start = end
        at = end
    if start < len(text) or not parts:
        parts.append(ascii(text[start:]))
    return " + ".join(parts)


def pattern_expression(pattern: str | bytes) -> str:
    r"""`pattern` as a Python literal in ASCII, raw where that saves a backslash.

    >>> print(pattern_expression(r"\d+'"), pattern_expression("a\n"), pattern_expression(b"\\."))
    r"\d+'" 'a\n' rb'\.'
    """
    text = pattern.decode("latin-1") if isinstance(pattern, bytes) else pattern
    plain = ascii(pattern)
    if "\\" not in text or not (text.isascii() and text.isprintable()):
        return plain
    quote = "'" if "'" not in text else '"'
    ends_raw = (len(text) - len(text.rstrip("\\"))) % 2 == 1
    if quote in text or ends_raw:
        return plain
    return f"r{'b' if isinstance(pattern, bytes) else ''}{quote}{text}{quote}"


def witness_expression(witness: Witness) -> str:
    """The text of a witness as a Python expression; a slow one with its pump often enough to be seen."""
    match witness:
        case TextWitness():
            return expression(witness.text)
        case SlowWitness():
            count = REPEATS.get(witness.growth, LEAST_REPEATS)
            if witness.bounded and witness.steps:
                count = witness.steps[-1][0]
            parts = [ascii(witness.prefix)] if witness.prefix else []
            parts.append(f"{ascii(witness.pump)} * {count}")
            for between, pump in witness.more:
                parts += [ascii(between)] if between else []
                parts.append(f"{ascii(pump)} * {count}")
            if witness.suffix:
                parts.append(ascii(witness.suffix))
            return " + ".join(parts)


def open_question(reasons: str) -> str:
    """Why a question stayed open, the names of limits in words; `reasons` are divided by `; `.

    >>> open_question("states; back-references")
    'limit states reached; back-references'
    """
    limits = {each.name for each in fields(Limits)}
    return "; ".join(f"limit {each} reached" if each in limits else each for each in reasons.split("; "))


def printable(text: str) -> str:
    """`text` with everything escaped that does not print: what could break or hide a line, lone surrogates."""
    return "".join(char if char.isprintable() else ascii(char)[1:-1] for char in text)


def cells(text: str | bytes, encoding: str = "utf-8") -> tuple[str, ...]:
    """The display of each character of `text`."""
    if isinstance(text, bytes):
        return tuple(chr(byte) if 32 <= byte < 127 else _byte_escape(byte) for byte in text)
    return tuple(_cell(char, encoding) for char in text)


def width(shown: str) -> int:
    """The columns that a piece of display text fills."""
    return sum(2 if unicodedata.east_asian_width(char) in "WF" else 1 for char in shown)


def _cell(char: str, encoding: str) -> str:
    if " " <= char <= "~":
        return char
    if not char.isprintable() or unicodedata.category(char)[0] == "M":
        return ascii(char)[1:-1]
    if unicodedata.bidirectional(char) in ("R", "AL", "AN"):
        return ascii(char)[1:-1]
    try:
        char.encode(encoding)
    except (UnicodeEncodeError, LookupError):
        return ascii(char)[1:-1]
    return char


def _byte_escape(byte: int) -> str:
    return ascii(chr(byte))[1:-1]
