"""`patlint ledger`, and `patlint lint` beside a ledger."""

from __future__ import annotations

import json
import os
from collections.abc import Callable
from pathlib import Path

import pytest

from .conftest import Ran

Patlint = Callable[..., Ran]

INVALID = "import re\nre.compile('a(b')\n"
OTHER = "import re\nre.compile('c)')\n"
TAIL = "0 waived, 0 unresolved, 0 inexact, 0 undecided, 0 skipped\n"
QUIET = "0 errors, 0 warnings, 0 notes"


def test_from_the_beginning_to_the_end(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    Path("b.py").write_text(INVALID)
    assert patlint("ledger", "write", "--ledger", "known") == Ran(0, "known: 2 known; 2 new, 0 gone\n", "")
    assert Path("known").read_text() == (
        '{"patlint-ledger": 1}\n'
        '{"path": "a.py", "rule": "invalid-pattern", "pattern": "a(b"}\n'
        '{"path": "b.py", "rule": "invalid-pattern", "pattern": "a(b"}\n'
    )
    quiet = Ran(0, f"2 files, 2 patterns: {QUIET}; 2 known, {TAIL}", "")
    assert patlint("lint", "--ledger", "known") == quiet

    Path("a.py").write_text(f"'''Moved down.'''\n\n{INVALID}")
    assert patlint("lint", "--ledger", "known") == quiet

    Path("b.py").write_text(OTHER)
    ran = patlint("lint", "--ledger", "known")
    assert (ran.status, ran.err) == (1, "")
    assert ran.out.startswith("b.py:2:14: error: invalid-pattern: ")
    assert ran.out.endswith(
        "\n\nknown: 1 entry is gone from the code; `patlint ledger prune` takes it out\n\n"
        f"2 files, 2 patterns: 1 error, 0 warnings, 0 notes; 1 known, {TAIL}"
    )
    assert "\nb.py: gone: invalid-pattern: 'a(b'\n" in patlint("lint", "--ledger", "known", "--verbose").out

    assert patlint("ledger", "prune", "--ledger", "known").out == "known: 1 known; 1 not entered, 1 gone\n"
    assert "gone" not in patlint("lint", "--ledger", "known").out
    assert patlint("ledger", "write", "--ledger", "known").out == "known: 2 known; 1 new, 0 gone\n"
    assert patlint("lint", "--ledger", "known") == quiet
    assert patlint("lint").status == 1


def test_of_the_configuration(patlint: Patlint) -> None:
    Path("sub").mkdir()
    Path("sub/a.py").write_text(INVALID)
    Path("pyproject.toml").write_text('[tool.patlint]\nledger = "sub/known"\n')
    missing = patlint("lint")
    assert missing == Ran(
        2,
        "",
        "patlint: sub/known: cannot be read: No such file or directory; `patlint ledger write` makes one\n",
    )
    assert patlint("ledger", "write").out == "sub/known: 1 known; 1 new, 0 gone\n"
    assert '"path": "a.py"' in Path("sub/known").read_text()
    assert patlint("lint").status == 0
    assert patlint("lint", "sub/a.py").status == 0
    assert patlint("lint", "--no-ledger").status == 1
    Path("other").write_text('{"patlint-ledger": 1}\n')
    assert patlint("lint", "--ledger", "other").status == 1
    os.chdir("sub")
    assert patlint("lint").out.endswith(f"1 known, {TAIL}")


def test_json(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    patlint("ledger", "write", "--ledger", "known")
    report = json.loads(patlint("lint", "--ledger", "known", "--format", "json").out)
    assert (report["summary"]["known"], report["findings"], report["gone"]) == (1, [], [])
    Path("a.py").write_text(OTHER)
    report = json.loads(patlint("lint", "--ledger", "known", "--format", "json").out)
    assert report["summary"]["known"] == 0
    assert [each["pattern"] for each in report["findings"]] == ["c)"]
    assert report["gone"] == [
        {"rule": "invalid-pattern", "path": "a.py", "pattern": "a(b", "bytes": False},
    ]
    sarif = json.loads(patlint("lint", "--ledger", "known", "--format", "sarif").out)
    assert len(sarif["runs"][0]["results"]) == 1


def test_files_and_rules_that_were_not_asked_keep_their_entries(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    Path("b.py").write_text(INVALID + "re.compile('[A-z]')\n")
    assert patlint("ledger", "write", "--ledger", "known").out == "known: 3 known; 3 new, 0 gone\n"
    for path in ("a.py", "b.py"):
        Path(path).write_text("")
    one = patlint("lint", "--ledger", "known", "a.py")
    assert "known: 1 entry is gone" in one.out
    assert (
        patlint("ledger", "prune", "--ledger", "known", "a.py").out
        == "known: 2 known; 0 not entered, 1 gone\n"
    )
    only = ("--only", "straddling-range")
    assert patlint("ledger", "prune", "--ledger", "known", *only).out.startswith("known: 1 known; ")
    assert '"rule": "invalid-pattern"' in Path("known").read_text()


def test_a_file_that_cannot_be_read_keeps_its_entries(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    patlint("ledger", "write", "--ledger", "known")
    before = Path("known").read_text()
    Path("a.py").write_text("import re\nre.compile(\n")
    for action in ("write", "prune"):
        ran = patlint("ledger", action, "--ledger", "known")
        assert (ran.status, ran.out) == (
            2,
            f"known: 1 known; 0 {'new' if action == 'write' else 'not entered'}, 0 gone\n",
        )
        assert ran.err.startswith("a.py:")
        assert Path("known").read_text() == before


def test_a_slip_in_a_path_makes_no_empty_ledger(patlint: Patlint) -> None:
    ran = patlint("ledger", "write", "--ledger", "fresh", "scr")
    assert (ran.status, ran.out) == (2, "")
    assert ran.err.startswith("scr: ")
    assert not Path("fresh").exists()


def test_standard_input_has_the_entries_of_its_name(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    patlint("ledger", "write", "--ledger", "known")
    assert patlint("lint", "-", "--as", "a.py", "--ledger", "known", stdin=INVALID).status == 0
    assert patlint("lint", "-", "--as", "b.py", "--ledger", "known", stdin=INVALID).status == 1
    assert patlint("lint", "-", "--ledger", "known", stdin=INVALID).status == 1


WRONG = [
    (("ledger",), "the following arguments are required: write|prune; see patlint ledger --help"),
    (
        ("ledger", "wirte"),
        "write|prune: 'wirte' is not one of write, prune; the nearest is write; see patlint ledger --help",
    ),
    (("ledger", "write"), "no ledger is named: give --ledger FILE, or the key ledger in the configuration"),
    (("ledger", "write", "--ledger", "known", "-"), "standard input has no place in a ledger"),
    (
        ("ledger", "prune", "--ledger", "none"),
        "none: cannot be read: No such file or directory; `patlint ledger write` makes one",
    ),
    (("ledger", "write", "--ledger", "no/known"), "no/known: cannot be written: No such file or directory"),
    (("lint", "--ledger", "a.py"), 'a.py: not a ledger: its first line is not {"patlint-ledger": 1}'),
    (("lint", "--ledger", "damaged"), "damaged:2: not an entry of a ledger"),
    (("ledger", "write", "--ledger", "damaged"), "damaged:2: not an entry of a ledger"),
    (("lint", "--ledger", "x", "--no-ledger"), "--ledger and --no-ledger exclude each other"),
]


@pytest.mark.parametrize(("words", "message"), WRONG)
def test_wrong_calls(patlint: Patlint, words: tuple[str, ...], message: str) -> None:
    Path("a.py").write_text(INVALID)
    Path("damaged").write_text('{"patlint-ledger": 1}\n{"path": "a.py", "rule": "inv\n')
    assert patlint(*words) == Ran(2, "", f"patlint: {message}\n")
    assert Path("damaged").read_text().endswith('"inv\n')
    assert sorted(os.listdir()) == [".git", "a.py", "damaged"] or words[:2] == ("ledger", "write")


def test_a_key_that_is_no_text(patlint: Patlint) -> None:
    Path("pyproject.toml").write_text("[tool.patlint]\nledger = true\n")
    where = Path("pyproject.toml").absolute()
    assert patlint("lint") == Ran(2, "", f"patlint: {where}: ledger must be a text, not true\n")
