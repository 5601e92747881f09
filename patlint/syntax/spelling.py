r"""How a character and a set are written in a pattern: with as few escapes as possible.

>>> char_text(ord(".")), char_text(9), char_text(0x1F600)
('\\.', '\\t', '\\U0001f600')

Printable characters up to U+FFFF stand for themselves (in bytes patterns, those of ASCII); the rest is
written as escapes that the whole dialect knows. Nothing written here makes `re` warn of set operations
that a later version may bring.
"""

from __future__ import annotations

from .tree import ClassEscape, Literal, Range, Set

_SPECIAL = frozenset(map(ord, r".^$*+?()[|" + "\\"))
_VERBOSE = frozenset(b" #")
_ENDS = frozenset(b"\\]^[-&~|")
_NAMED = {9: r"\t", 10: r"\n", 11: r"\v", 12: r"\f", 13: r"\r"}


def char_text(code: int, is_bytes: bool = False, verbose: bool = False) -> str:
    """A literal outside a set. A brace is left alone: whether it must be escaped depends on what follows."""
    if code in _SPECIAL or (verbose and code in _VERBOSE):
        return "\\" + chr(code)
    return member_text(code, is_bytes)


def member_text(code: int, is_bytes: bool = False) -> str:
    """A literal in a set, where no bracket, hyphen or the like asks for an escape."""
    if code in _NAMED:
        return _NAMED[code]
    if code < 127 or (code <= 0xFFFF and not is_bytes):
        char = chr(code)
        if char.isprintable():
            return char
    if code < 0x100:
        return f"\\x{code:02x}"
    return f"\\u{code:04x}" if code <= 0xFFFF else f"\\U{code:08x}"


def set_text(node: Set, is_bytes: bool = False) -> str:
    """A set with its brackets, the items in the order of the tree."""
    if not node.items:
        return r"[\s\S]" if node.negated else r"[^\s\S]"
    text = "[^" if node.negated else "["
    opening = text
    for index, item in enumerate(node.items):
        match item:
            case ClassEscape():
                text += "\\" + item.kind
            case Range():
                text += _end_text(item.low, is_bytes) + "-" + _end_text(item.high, is_bytes)
            case Literal():
                at_edge = text == opening or index == len(node.items) - 1
                text += _member_text(item.code, text, at_edge, is_bytes)
    return text + "]"


def _end_text(code: int, is_bytes: bool) -> str:
    """An end of a range."""
    return "\\" + chr(code) if code in _ENDS else member_text(code, is_bytes)


def _member_text(code: int, before: str, at_edge: bool, is_bytes: bool) -> str:
    char = chr(code)
    if (
        char in "\\]"
        or (char == "-" and not at_edge)
        or (char in "^[" and before == "[")
        or (char in "&~|-" and before[-1] == char)
    ):
        return "\\" + char
    return member_text(code, is_bytes)
