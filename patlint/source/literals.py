r"""One string token -> its characters, each with its place and its spelling.

The text of a token is read here a second time, only to learn where each character stands; what Python makes
of it is compared with the outcome by the caller, so that a mistake costs positions and never the text.

>>> run = read_token('"a\\x41\\d"', (1, 4))
>>> run.text, run.spellings
('aA\\d', ('a', '\\x41', '\\', 'd'))

Source of the rules: Python language reference, section "String and Bytes literals".
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass

from patlint.source.places import Position, advance
from patlint.source.sites import Place

_TOKEN = re.compile(r"""([A-Za-z]*)('''|\"\"\"|'|")""")
_SIMPLE = {
    "\\": "\\",
    "'": "'",
    '"': '"',
    "a": "\a",
    "b": "\b",
    "f": "\f",
    "n": "\n",
    "r": "\r",
    "t": "\t",
    "v": "\v",
}
_PLAIN = re.compile(r"[^\\\r\n{}]+")
_OCTAL = re.compile(r"[0-7]{1,3}")
_HEX = {"x": 2, "u": 4, "U": 8}
_NAMED = re.compile(r"N\{([^{}]*)\}")


@dataclass(frozen=True, slots=True)
class Run:
    """The characters of one token (or of a stretch of one), their places and spellings."""

    text: str | bytes
    whole: Place
    raw: bool
    places: tuple[Place, ...]
    spellings: tuple[str, ...]


class BadLiteral(Exception):
    """A token whose characters cannot be told."""


def split_token(token: str) -> tuple[str, str, str]:
    """Prefix in lower case, quotes, and what stands between them."""
    found = _TOKEN.match(token)
    if not found or not token.endswith(found[2]) or len(token) < found.end() + len(found[2]):
        raise BadLiteral(token)
    return found[1].lower(), found[2], token[found.end() : len(token) - len(found[2])]


def read_token(token: str, start: Position) -> Run:
    """A whole token that is no f-string; `start` is where its prefix stands."""
    prefix, quotes, body = split_token(token)
    if "f" in prefix or "t" in prefix:
        raise BadLiteral(token)
    begin = (start[0], start[1] + len(prefix) + len(quotes))
    return read_body(body, begin, raw="r" in prefix, is_bytes="b" in prefix, doubled=False)


def read_body(body: str, start: Position, *, raw: bool, is_bytes: bool, doubled: bool) -> Run:
    """The characters of `body`, which begins at `start`; `doubled`: `{{` and `}}` stand for one brace."""
    chars: list[str] = []
    spellings: list[str] = []
    places: list[Place] = []
    line, column = start
    index, length = 0, len(body)
    while index < length:
        plain = _PLAIN.match(body, index)
        if plain:
            text = plain[0]
            chars.append(text)
            spellings.extend(text)
            places.extend([Place(line, at, line, at + 1) for at in range(column + 1, column + 1 + len(text))])
            index += len(text)
            column += len(text)
            continue
        text, spelled = _next(body, index, raw, is_bytes, doubled)
        end_line, end_column = advance((line, column), spelled)
        if text:
            place = Place(line, column + 1, end_line, end_column + 1)
            chars.append(text)
            spellings.append(spelled)
            places.append(place)
        index += len(spelled)
        line, column = end_line, end_column
    whole = Place(start[0], start[1] + 1, line, column + 1)
    joined = "".join(chars)
    try:
        value: str | bytes = joined.encode("latin-1") if is_bytes else joined
    except UnicodeEncodeError:
        raise BadLiteral(body) from None
    return Run(value, whole, raw, tuple(places), tuple(spellings))


def _next(body: str, index: int, raw: bool, is_bytes: bool, doubled: bool) -> tuple[str, str]:
    """The character at `index`, which is no plain one, and its spelling; empty for a joined line."""
    char = body[index]
    if char == "\r":
        return "\n", "\r\n" if body.startswith("\r\n", index) else "\r"
    if char in "{}":
        if not doubled:
            return char, char
        if body.startswith(char * 2, index):
            return char, char * 2
        raise BadLiteral(body)
    if char == "\n" or raw:
        return char, char
    return _escape(body, index, is_bytes)


def _escape(body: str, index: int, is_bytes: bool) -> tuple[str, str]:
    following = body[index + 1 : index + 2]
    if following in ("\n", "\r"):
        return "", body[index : index + 3] if body.startswith("\r\n", index + 1) else body[index : index + 2]
    if following in _SIMPLE and following:
        return _SIMPLE[following], body[index : index + 2]
    octal = _OCTAL.match(body, index + 1)
    if octal:
        code = int(octal[0], 8)
        return chr(code & 0xFF if is_bytes else code), "\\" + octal[0]
    width = _HEX.get(following, 0) if following == "x" or not is_bytes else 0
    if width:
        digits = body[index + 2 : index + 2 + width]
        try:
            return chr(int(digits, 16)), body[index : index + 2 + width]
        except (ValueError, OverflowError):
            raise BadLiteral(body) from None
    if following == "N" and not is_bytes:
        named = _NAMED.match(body, index + 1)
        if named:
            try:
                return unicodedata.lookup(named[1]), "\\" + named[0]
            except KeyError:
                pass
        raise BadLiteral(body)
    return "\\", "\\"
