r"""Bytes of a Python file -> text and lines, by the rules of Python itself.

The encoding is the byte order mark's or the cookie's (PEP 263), UTF-8 where there is neither. Lines end at
`\n`, `\r\n` and `\r`, as for Python's tokenizer, and at nothing else: `str.splitlines` would also break
them at form feeds and at U+2028.

>>> decode(b"# coding: latin-1\nx = '\xe9'\n", "a.py").text
"# coding: latin-1\nx = 'é'\n"
>>> split_lines("a\x0cb\r\nc")
('a\x0cb\r\n', 'c')

Limits: encodings that are not supersets of ASCII cannot be declared by a cookie, and are refused.
"""

from __future__ import annotations

import ast
import codecs
import re
import warnings
from dataclasses import dataclass

BOM = b"\xef\xbb\xbf"
_COOKIE = re.compile(rb"[ \t\f]*#.*?coding[:=][ \t]*([-\w.]+)")
_BLANK = re.compile(rb"[ \t\f]*(?:#.*)?\Z")
_LINE_END = re.compile(rb"\r\n|\r|\n")
_ODD_BREAKS = re.compile("[\x0b\x0c\x1c-\x1e\x85\u2028\u2029]")
"""Where `str.splitlines` ends a line and Python does not."""
_LINES = re.compile(r"[^\r\n]*(?:\r\n|\r|\n)|[^\r\n]+\Z")


class SourceError(Exception):
    """A file that cannot be decoded or parsed; `line` is 1-based, None where it is not known."""

    def __init__(self, path: str, message: str, line: int | None = None) -> None:
        super().__init__(f"{path}:{line}: {message}" if line else f"{path}: {message}")
        self.path = path
        self.message = message
        self.line = line


@dataclass(frozen=True, slots=True)
class Source:
    """The decoded text without its byte order mark; `encoding` turns it back into the file's bytes."""

    path: str
    text: str
    encoding: str


def decode(data: bytes | str, path: str) -> Source:
    """Errors: `SourceError` for an unknown encoding, bytes that it does not know, and null characters."""
    if isinstance(data, str):
        source = Source(path, data.removeprefix("\ufeff"), "utf-8-sig" if data[:1] == "\ufeff" else "utf-8")
    else:
        encoding = _encoding(data, path)
        try:
            source = Source(path, data.decode(encoding), encoding)
        except UnicodeDecodeError as error:
            line = len(_LINE_END.findall(data[: error.start])) + 1
            raise SourceError(path, f"cannot be decoded as {encoding}", line) from None
        except Exception:  # a codec may raise anything
            raise SourceError(path, f"cannot be decoded as {encoding}") from None
    null = source.text.find("\0")
    if null >= 0:
        line = len(split_lines(source.text[:null] + "x"))
        raise SourceError(path, "holds a null character", line)
    return source


def _encoding(data: bytes, path: str) -> str:
    marked = data.startswith(BOM)
    cookie = _cookie(data[3:] if marked else data)
    if cookie is None:
        return "utf-8-sig" if marked else "utf-8"
    try:
        info = codecs.lookup(cookie)
    except (LookupError, ValueError):
        raise SourceError(path, f"unknown encoding: {cookie}", 1) from None
    if not getattr(info, "_is_text_encoding", True) or info.name.startswith(("utf-16", "utf-32")):
        raise SourceError(path, f"not an encoding of source text: {cookie}", 1)
    if marked:
        if info.name != "utf-8":
            raise SourceError(path, f"a UTF-8 byte order mark and the encoding {cookie}", 1)
        return "utf-8-sig"
    return info.name


def _cookie(data: bytes) -> str | None:
    """The encoding that a comment in one of the first two lines names."""
    start = 0
    for _ in range(2):
        end = _LINE_END.search(data, start)
        line = data[start : end.start() if end else len(data)]
        found = _COOKIE.match(line)
        if found:
            return found[1].decode("ascii", "replace")
        if not end or not _BLANK.match(line):
            return None
        start = end.end()
    return None


def split_lines(text: str) -> tuple[str, ...]:
    """The lines with their ends; joined they give `text` again."""
    if not _ODD_BREAKS.search(text):
        return tuple(text.splitlines(keepends=True))
    return tuple(_LINES.findall(text))


def parse(text: str, path: str) -> ast.Module:
    """Errors: `SourceError`, whatever the parser comes to."""
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return ast.parse(text)
    except SyntaxError as error:
        raise SourceError(path, f"cannot be parsed: {error.msg}", error.lineno) from None
    except RecursionError:
        raise SourceError(path, "cannot be parsed: nested too deeply") from None
    except MemoryError:
        raise SourceError(path, "cannot be parsed: out of memory or nested too deeply") from None
    except (ValueError, OverflowError) as error:
        raise SourceError(path, f"cannot be parsed: {type(error).__name__}") from None
