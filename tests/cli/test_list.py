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
