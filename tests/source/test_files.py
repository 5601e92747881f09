"""Encodings, line ends, and files that are none: text or `SourceError`, never another exception."""

from __future__ import annotations

import random

import pytest

from patlint.source import SourceError, read_module
from patlint.source.decode import decode, split_lines

GOOD = {
    "utf-8": ("import re\nre.match('é', s)\n".encode(), "utf-8"),
    "mark": (b"\xef\xbb\xbf" + "import re\nre.match('é', s)\n".encode(), "utf-8-sig"),
    "mark and cookie": (b"\xef\xbb\xbf# coding: utf-8\nimport re\n\nre.match('\xc3\xa9', s)\n", "utf-8-sig"),
    "latin-1": (b"# -*- coding: latin-1 -*-\nimport re\nre.match('\xe9', s)\n", "iso8859-1"),
    "second line": (
        b"#!/usr/bin/python\n# vim: set fileencoding=cp1252 :\nimport re\nre.match('\xe9', s)",
        "cp1252",
    ),
    "cookie after a carriage return": (
        b"#\r# coding: latin-1\rimport re\rre.match('\xe9', s)\r",
        "iso8859-1",
    ),
    "shift_jis": ("# coding: shift_jis\nimport re\nre.match('あ', s)\n".encode("shift_jis"), "shift_jis"),
    "no cookie on the third line": ("\n\n# coding: latin-1\nimport re\nre.match('é', s)\n".encode(), "utf-8"),
    "no cookie after code": ("x = 1\n# coding: latin-1\nimport re\nre.match('é', s)\n".encode(), "utf-8"),
}


@pytest.mark.parametrize("name", GOOD)
def test_encodings(name: str) -> None:
    data, encoding = GOOD[name]
    module = read_module(data, "a.py")
    assert module.encoding == encoding
    assert [site.pattern for site in module.sites] == ["あ" if name == "shift_jis" else "é"]
    assert "".join(module.lines).encode(encoding) == data
    line = module.lines[module.sites[0].place.line - 1]
    assert line.startswith("re.match('")


BAD = {
    "null": (b"x = 1\ny = '\0'\n", "holds a null character", 2),
    "not utf-8": (b"x = 1\ny = '\xe9'\n", "cannot be decoded as utf-8", 2),
    "unknown encoding": (b"# coding: nonsense\n", "unknown encoding: nonsense", 1),
    "no text encoding": (b"# coding: rot13\n", "not an encoding of source text: rot13", 1),
    "two encodings": (
        b"\xef\xbb\xbf# coding: latin-1\n",
        "a UTF-8 byte order mark and the encoding latin-1",
        1,
    ),
    "utf-16": ("import re\n".encode("utf-16"), "cannot be decoded as utf-8", 1),
    "mark in the middle": ("x = 1\n\ufeffy = 2\n".encode(), None, 2),
    "half a file": (b"import re\nre.match('a', (\n", None, 2),
    "half a string": (b"import re\nre.match('a\n", None, 2),
    "half a line": (b"import re\ndef f(", None, 2),
    "indentation": (b"if x:\n  a\n b\n", None, None),
    "parentheses": (b"(" * 300 + b")" * 300, None, None),
}


@pytest.mark.parametrize("name", BAD)
def test_bad_files(name: str) -> None:
    data, message, line = BAD[name]
    with pytest.raises(SourceError) as caught:
        read_module(data, "dir/a.py")
    error = caught.value
    assert error.path == "dir/a.py"
    if message is not None:
        assert error.message == message
    else:
        assert error.message.startswith("cannot be parsed")
    if line is not None:
        assert error.line == line


def test_lone_surrogates() -> None:
    with pytest.raises(SourceError):
        read_module("x = '\ud800'\n", "a.py")


def test_deep_files_are_data_or_refused() -> None:
    """Python 3.11 and 3.12 refuse 5,000 terms, 3.10 and 3.13 take them (seen by trying)."""
    answers = 0
    for middle in (
        "'a' + " * 5_000 + "'a'",
        "-" * 5_000 + "1",
        "'a'" + ".b()" * 5_000,
        "[" * 150 + "]" * 150,
    ):
        text = f"import re\nre.match({middle}, s)\n"
        try:
            module = read_module(text, "a.py")
        except SourceError as error:
            assert "nested too deeply" in error.message
        else:
            assert len(module.sites) + len(module.unresolved) == 1
        answers += 1
    assert answers == 4


def test_truncated_and_damaged_files() -> None:
    """Whatever is cut off or overwritten: a module or a `SourceError`."""
    text = (
        "# patlint: waive nullable -- because\nimport re\nP = rf'''a{1}\n''' 'b' \"c\"\n"
        "def f(s, *a):\n    while (m := re.match(P + '%s' % 'x', s)):\n        s = s[m.end():]\n"
        "class A:\n    _r = re.compile(b'\\x41' rb'\\d', flags=re.I)\n"
        "    def g(self): return self._r.sub(b'', x)\n"
    )
    data = text.encode()
    choices = random.Random(3)
    good = bad = 0
    for number in range(1_200):
        if number < len(data):
            piece = data[:number]
        else:
            damaged = bytearray(data)
            for _ in range(choices.randint(1, 4)):
                damaged[choices.randrange(len(damaged))] = choices.choice(b"\0\r\n\"'\\{}()#\xff: =x")
            piece = bytes(damaged)
        try:
            read_module(piece, "a.py")
            good += 1
        except SourceError:
            bad += 1
    assert good > 50 and bad > 300


def test_lines_are_pythons() -> None:
    text = "a\x0bb\x0cc\x1c\x85\u2028\u2029d\r\ne\rf\n\ng"
    assert split_lines(text) == ("a\x0bb\x0cc\x1c\x85\u2028\u2029d\r\n", "e\r", "f\n", "\n", "g")
    assert split_lines("a\nb") == ("a\n", "b") and split_lines("a\n") == ("a\n",) and split_lines("") == ()
    assert split_lines("\x0c\n\r\r\n") == ("\x0c\n", "\r", "\r\n")


def test_text_with_a_mark() -> None:
    assert decode("\ufeffx = 1\n", "a.py").text == "x = 1\n"


def test_nothing_to_read() -> None:
    module = read_module(b"", "a.py")
    assert module.sites == () and module.lines == ()
