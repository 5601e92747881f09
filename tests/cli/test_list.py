"""`patlint list`: the inventory as text and JSON."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

from .conftest import Ran

Patlint = Callable[..., Ran]

SOURCE = """\
import re
if re.match(r"(?i)\\d+'", input(), re.S):
    pass
re.fullmatch(b"\\xff", data).group(1)
def look(text):
    return re.search(text, "abc")
"""


def test_text(patlint: Patlint) -> None:
    Path("a.py").write_text(SOURCE)
    ran = patlint("list")
    assert (ran.status, ran.err) == (0, "")
    first, second, third = ran.out.splitlines()
    assert first == 'a.py:2:13: r"(?i)\\d+\'" IGNORECASE DOTALL (match, truth)'
    assert second == "a.py:4:14: b'\\xff' (fullmatch, groups)"
    assert third.startswith("a.py:6:") and ": unresolved: search: " in third


def test_what_another_library_takes(patlint: Patlint) -> None:
    Path("a.py").write_text(
        "import pytest\nfrom django.urls import re_path\nfrom terminal.text import expect\n"
        "pytest.raises(E, match='a+')\nre_path('^a$', v)\nexpect('b+')\nimport regex\nregex.match('c', s)\n"
    )
    assert patlint("list").out.splitlines() == [
        "a.py:4:24: 'a+' (search, truth) for pytest.raises",
        "a.py:5:9: '^a$' (use not known, unknown) for django.urls.re_path",
        "a.py:8:1: unresolved: regex.match: a pattern for another engine than re",
    ]
    Path("pyproject.toml").write_text(
        '[tool.patlint.sinks]\n"terminal.text.expect" = { argument = 0, mode = "match", flags = ["X"] }\n'
        '"pytest.raises" = false\n"regex.match" = false\n'
    )
    assert patlint("list").out.splitlines() == [
        "a.py:5:9: '^a$' (use not known, unknown) for django.urls.re_path",
        "a.py:6:8: 'b+' VERBOSE (match, unknown) for terminal.text.expect",
    ]
    functions = [each["function"] for each in json.loads(patlint("list", "--format", "json").out)["patterns"]]
    assert functions == ["django.urls.re_path", "terminal.text.expect"]


def test_json(patlint: Patlint) -> None:
    Path("a.py").write_text(SOURCE)
    report = json.loads(patlint("list", "--format", "json").out)
    assert report["patterns"] == [
        {
            "path": "a.py",
            "line": 2,
            "column": 13,
            "end_line": 2,
            "end_column": 24,
            "pattern": "(?i)\\d+'",
            "bytes": False,
            "flags": ["IGNORECASE", "DOTALL"],
            "modes": ["match"],
            "looks_at": "truth",
            "function": "match",
        },
        {
            "path": "a.py",
            "line": 4,
            "column": 14,
            "end_line": 4,
            "end_column": 21,
            "pattern": "\xff",
            "bytes": True,
            "flags": [],
            "modes": ["fullmatch"],
            "looks_at": "groups",
            "function": "fullmatch",
        },
    ]
    (unresolved,) = report["unresolved"]
    assert list(unresolved) == ["path", "line", "column", "reason"]


def test_standard_input_and_invalid_patterns(patlint: Patlint) -> None:
    ran = patlint("list", "-", "--as", "x.py", stdin="import re\nre.compile('(', re.I)\n")
    assert ran == Ran(0, "x.py:2:12: '(' IGNORECASE (not used here, unknown)\n", "")
