r"""String literals with another text: the spelling of what changes, and of a whole literal where it must.

`spelled` writes characters for the inside of a literal, as its author would: an escape that stood there is
used again. `respelled` gives ways to write a whole literal with another value, nearest to the old one first:
other quotes, triple quotes, and at last a plain literal with every backslash doubled. What Python makes of
each is checked.

>>> print(next(respelled("r'a'", "['\"]")))
r'''['"]'''

Source of the rules: Python language reference, section "String and Bytes literals".
"""

from __future__ import annotations

import ast
import re
import warnings
from collections.abc import Iterator, Mapping

from patlint.source.literals import split_token

QUOTES = ('"', "'", '"""', "'''")
_NAMED = {"\n": r"\n", "\r": r"\r", "\t": r"\t", "\\": r"\\"}
_ESCAPES = frozenset("\n\r\\'\"abfnrtvxuUN01234567")
"""What stands for something else behind a backslash in a literal that is not raw."""


def spelled(
    text: str,
    raw: bool,
    *,
    known: Mapping[str, str] | None = None,
    quote: str = "",
    doubled: bool = False,
    lone: bool = False,
) -> str:
    """`text` for the inside of a literal; `known` are spellings that stood there.

    `quote` is escaped where the literal is not raw, `doubled` writes braces twice (an f-string), `lone` keeps
    a backslash single where Python lets it stand.
    """
    known = known or {}
    out: list[str] = []
    for place, char in enumerate(text):
        if char in known and (char != "\\" or not lone):
            out.append(known[char])
        elif raw or (char.isprintable() and char != "\\"):
            out.append(
                f"\\{char}" if char == quote and not raw else char * 2 if doubled and char in "{}" else char
            )
        elif char == "\\" and lone and text[place + 1 : place + 2] not in _ESCAPES | {""}:
            out.append(char)
        elif char in _NAMED:
            out.append(_NAMED[char])
        else:
            code = ord(char)
            out.append(
                f"\\x{code:02x}" if code < 256 else f"\\u{code:04x}" if code < 65536 else f"\\U{code:08x}"
            )
    return "".join(out)


def respelled(token: str, value: str | bytes) -> Iterator[str]:
    """Literals with `value`, like `token`."""
    yield from (way for way in _ways(token, value) if means(way, value))


def means(token: str, value: str | bytes) -> bool:
    """Whether Python reads the literal `token` as `value`."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # backslashes that stand alone
        try:
            return bool(ast.literal_eval(token) == value)
        except (SyntaxError, ValueError, MemoryError):
            return False


def _ways(token: str, value: str | bytes) -> Iterator[str]:
    prefix = re.match("[A-Za-z]*", token)
    assert prefix is not None
    _, old_quotes, _ = split_token(token)
    text = value.decode("latin-1") if isinstance(value, bytes) else value
    order = sorted(QUOTES, key=lambda each: (len(each) != len(old_quotes), each[0] != old_quotes[0]))
    raw = "r" in prefix[0].lower()
    if raw:
        for quotes in order:
            yield prefix[0] + quotes + text + quotes
    plain = prefix[0].replace("r", "").replace("R", "")
    safe = text if isinstance(value, str) else "".join(map(_ascii_byte, text))
    for quotes in order[:2]:
        body = safe if isinstance(value, bytes) else spelled(text, False)
        yield plain + quotes + body.replace(quotes[0], "\\" + quotes[0]) + quotes


def _ascii_byte(char: str) -> str:
    return spelled(char, False) if char < "\x80" else f"\\x{ord(char):02x}"
