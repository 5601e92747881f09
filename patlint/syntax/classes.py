r"""The characters that a leaf of the tree matches, exactly, under the flags that it carries.

>>> char_set(Set((0, 0), (Range((0, 0), 97, 99),), negated=False, flags=IGNORECASE), is_bytes=True)
CharSet('[A-Ca-c]')

`re` compiles a set to lower-case codes and compares the lowered character of the text with them; so does
this module, because the detour shows: beyond U+FFFF a literal in a set is not lowered (`[\U00010400x]`
under IGNORECASE matches neither U+10400 nor U+10428), and a range is also compared with the raised
character. A set of one literal is compiled as that literal and has no such quirk.

Categories are found by asking the running `re` about every code point, on first use (about 60 ms). Under
LOCALE the answer depends on the locale at run time: what is given is that of the C locale, in which
bytes above 127 are no letters; `is_locale_dependent` tells where that matters.
"""

from __future__ import annotations

import re
from functools import lru_cache
from typing import TypeAlias

from .casefold import Folding, all_characters, folding, orbit
from .charset import ALL_BYTES, ALL_CODES, EMPTY, NEWLINE, CharSet
from .tree import (
    ASCII,
    DOTALL,
    IGNORECASE,
    LOCALE,
    Anchor,
    BackReference,
    Category,
    CharNode,
    ClassEscape,
    Dot,
    Literal,
    Node,
    Range,
    Set,
)

_BMP_END = 0xFFFF

_ASCII_CATEGORIES = {
    "d": CharSet.of_range(48, 57),
    "s": CharSet.of_chars(" \t\n\r\f\v"),
    "w": CharSet.of_ranges([(48, 57), (65, 90), (95, 95), (97, 122)]),
}


def universe(is_bytes: bool) -> CharSet:
    """Every character that a text can hold."""
    return ALL_BYTES if is_bytes else ALL_CODES


def category(kind: Category, ascii_only: bool, is_bytes: bool = False) -> CharSet:
    r"""What `\d`, `\D`, `\s`, `\S`, `\w` or `\W` matches; `ascii_only` under ASCII and in bytes."""
    low = kind.lower()
    positive = _ASCII_CATEGORIES[low] if ascii_only or is_bytes else _unicode_categories()[low]
    return positive if kind == low else universe(is_bytes) - positive


def word_set(flags: int, is_bytes: bool) -> CharSet:
    r"""The word characters of `\b` and `\B`."""
    return category("w", bool(flags & ASCII), is_bytes)


def char_set(node: CharNode | Range, is_bytes: bool) -> CharSet:
    """The characters that `node` matches; a Range alone stands for its members without folding."""
    match node:
        case Literal():
            if node.flags & IGNORECASE:
                return _orbit(node.code, is_bytes or bool(node.flags & ASCII))
            return CharSet((node.code, node.code + 1))
        case ClassEscape():
            return category(node.kind, bool(node.flags & ASCII), is_bytes)
        case Dot():
            return _dot(bool(node.flags & DOTALL), is_bytes)
        case Range():
            return CharSet((node.low, node.high + 1))
        case Set():
            items = tuple(
                (item.low, item.high)
                if isinstance(item, Range)
                else item.kind
                if isinstance(item, ClassEscape)
                else item.code
                for item in node.items
            )
            mode = node.flags & (IGNORECASE | ASCII)
            return _set(items, node.negated, mode, is_bytes)


def is_locale_dependent(node: Node) -> bool:
    """Whether what `node` itself matches depends on the locale (LOCALE, in bytes patterns only)."""
    match node:
        case Literal() | BackReference():
            return bool(node.flags & LOCALE and node.flags & IGNORECASE)
        case ClassEscape():
            return bool(node.flags & LOCALE) and node.kind in "wW"
        case Set():
            if not node.flags & LOCALE:
                return False
            if node.flags & IGNORECASE:
                return True
            return any(isinstance(item, ClassEscape) and item.kind in "wW" for item in node.items)
        case Anchor():
            return bool(node.flags & LOCALE) and node.kind in (r"\b", r"\B")
        case _:
            return False


_Item: TypeAlias = int | tuple[int, int] | Category


@lru_cache(maxsize=4096)
def _orbit(code: int, ascii_only: bool) -> CharSet:
    return orbit(code, ascii_only)


@lru_cache(maxsize=4)
def _dot(everything: bool, is_bytes: bool) -> CharSet:
    return universe(is_bytes) if everything else universe(is_bytes) - NEWLINE


@lru_cache(maxsize=4096)
def _set(items: tuple[_Item, ...], negated: bool, mode: int, is_bytes: bool) -> CharSet:
    ascii_only = is_bytes or bool(mode & ASCII)
    distinct = dict.fromkeys(items)
    if not mode & IGNORECASE:
        found = _union(distinct, ascii_only, is_bytes)
    elif len(distinct) == 1 and isinstance(items[0], int):
        found = _orbit(items[0], ascii_only)
    else:
        found = _folded(distinct, folding(ascii_only), ascii_only, is_bytes)
    return universe(is_bytes) - found if negated else found


def _union(items: dict[_Item, None], ascii_only: bool, is_bytes: bool) -> CharSet:
    plain = CharSet.of_ranges(
        (item, item) if isinstance(item, int) else item for item in items if not isinstance(item, str)
    )
    for item in items:
        if isinstance(item, str):
            plain |= category(item, ascii_only, is_bytes)
    return plain


def _folded(items: dict[_Item, None], fold: Folding, ascii_only: bool, is_bytes: bool) -> CharSet:
    """What a set of several items matches under IGNORECASE."""
    lowered = []  # ranges and literals that are compiled to lower case
    found = EMPTY  # lower-case codes beside those
    for item in items:
        if isinstance(item, str):
            found |= category(item, ascii_only, is_bytes)
        elif isinstance(item, int):
            if fold.low.get(item, item) <= _BMP_END:
                lowered.append((item, item))
            else:
                found |= CharSet((item, item + 1))
        else:
            low, high = item
            if high > _BMP_END:
                found |= CharSet((low, high + 1)) | fold.raised_into(low, high)
            if low <= _BMP_END:
                lowered.append((low, min(high, _BMP_END)))
    return fold.takes(found | fold.lowered(CharSet.of_ranges(lowered)))


@lru_cache(maxsize=1)
def _unicode_categories() -> dict[str, CharSet]:
    text = all_characters()
    return {
        kind: CharSet(tuple(bound for found in re.finditer(f"\\{kind}+", text) for bound in found.span()))
        for kind in "dsw"
    }
