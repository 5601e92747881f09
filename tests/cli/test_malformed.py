"""Files that are no Python, or hardly: one line on standard error, no traceback, the others still linted."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import pytest

from .conftest import Ran

Patlint = Callable[..., Ran]

GOOD = "import re\nre.compile('a(b')\n"

MALFORMED: list[tuple[str, bytes]] = [
    ("null bytes", b"import re\nre.compile('a')\0\n"),
    ("only a null byte", b"\0"),
    ("half a file", b"import re\nre.compile(\n"),
    ("half a text", b"import re\nre.compile('''a\n"),
    ("half a character", b"import re\nre.compile('\xe9')\n"),
    ("unknown coding", b"# coding: klingon\nimport re\nre.compile('a')\n"),
    ("nested parentheses", b"import re\nre.compile(" + b"(" * 5_000 + b"'a'" + b")" * 5_000 + b")\n"),
    ("nested lists", b"import re\nx = " + b"[" * 5_000 + b"re.compile('a')" + b"]" * 5_000 + b"\n"),
    ("wrong indentation", b"import re\n  re.compile('a')\n"),
    ("another language", b"import re; puts 're.compile' if x then end\n"),
]


@pytest.mark.parametrize("content", [each[1] for each in MALFORMED], ids=[each[0] for each in MALFORMED])
@pytest.mark.parametrize("command", ["lint", "list"])
def test_one_line_and_the_others_still(patlint: Patlint, command: str, content: bytes) -> None:
    Path("bad.py").write_bytes(content)
    Path("good.py").write_text(GOOD)
    ran = patlint(command, ".")
    assert ran.status == 2
    (line,) = ran.err.splitlines()
    assert line.startswith("bad.py:")
    assert "patlint itself" not in line
    assert len(line) < 200
    assert ran.out.startswith("good.py:2:1")
    if command == "lint":
        assert ran.out.endswith("1 skipped\n")


HARD: list[tuple[str, bytes, int | None]] = [
    ("empty", b"", 0),
    ("a byte order mark", b"\xef\xbb\xbfimport re\nre.compile('ab')\n", 1),
    (
        "a line of ten million characters",
        b"import re\nx = '" + b"y" * 10_000_000 + b"'\nre.compile('ab')\n",
        1,
    ),
    ("a pattern of a hundred thousand characters", b"import re\nre.compile('" + b"ab" * 50_000 + b"')\n", 1),
    ("nested groups", b"import re\nre.compile('" + b"(" * 5_000 + b"a" + b")" * 5_000 + b"')\n", 1),
    ("nested unclosed groups", b"import re\nre.compile('" + b"(" * 5_000 + b"')\n", 1),
    ("a long sum", b"import re\nre.compile(" + b"'a' + " * 5_000 + b"'a')\n", None),
    ("many branches", b"import re\nre.compile('" + b"|".join(b"w%d" % n for n in range(5_000)) + b"')\n", 1),
]


@pytest.mark.parametrize(("content", "patterns"), [each[1:] for each in HARD], ids=[each[0] for each in HARD])
def test_hard_but_python(patlint: Patlint, content: bytes, patterns: int | None) -> None:
    Path("hard.py").write_bytes(content)
    Path("good.py").write_text(GOOD)
    ran = patlint("lint", "--no-cache", "good.py", "hard.py")
    assert "patlint itself" not in ran.err
    assert "Traceback" not in ran.err + ran.out
    assert ran.out.startswith("good.py:2:1")
    if patterns is not None:
        assert (ran.status, ran.err) == (1, "")
        assert f"2 files, {patterns + 1} pattern{'s' if patterns else ''}:" in ran.out


def test_paths_that_are_not_there(patlint: Patlint) -> None:
    Path("empty").mkdir()
    os.symlink("nowhere", "dangling.py")
    Path("good.py").write_text(GOOD)
    ran = patlint("lint", "good.py", "gone.py", "empty", "dangling.py")
    assert ran.status == 2
    assert ran.err == (
        "gone.py: cannot be read: No such file or directory\n"
        "empty: no Python files in this directory\n"
        "dangling.py: cannot be read: the link leads nowhere\n"
    )
    assert ran.out.startswith("good.py:2:14: error: invalid-pattern: ")
    assert patlint("lint").err == "dangling.py: cannot be read: the link leads nowhere\n"


def test_standard_input_that_is_no_python(patlint: Patlint) -> None:
    ran = patlint("lint", "-", "--as", "x.py", stdin=b"import re\nre.compile(\0")
    assert ran.status == 2
    assert ran.err.startswith("x.py:")
    assert len(ran.err.splitlines()) == 1
