"""`patlint lint`: status, reports, options."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pytest

from .conftest import CLEAN, SLOW, Ran

Patlint = Callable[..., Ran]

INVALID = "import re\nre.compile('a(b')\n"
TAIL = "0 waived, 0 unresolved, 0 inexact, 0 undecided, 0 skipped\n"


def test_nothing_found(patlint: Patlint) -> None:
    Path("a.py").write_text(CLEAN)
    assert patlint("lint") == Ran(0, f"1 file, 1 pattern: 0 errors, 0 warnings, 0 notes; {TAIL}", "")


def test_an_invalid_pattern_whole(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    ran = patlint("lint", "a.py")
    assert (ran.status, ran.err) == (1, "")
    first, pattern, under, *_, blank, summary = ran.out.split("\n")[:-1]
    assert first.startswith("a.py:2:14: error: invalid-pattern: ")
    assert (pattern, under) == ("  pattern  a(b", "            =")
    assert (blank, summary + "\n") == ("", f"1 file, 1 pattern: 1 error, 0 warnings, 0 notes; {TAIL}")


def test_standard_input_as_json(patlint: Patlint) -> None:
    ran = patlint("lint", "-", "--as", "x.py", "--format", "json", stdin=SLOW)
    assert (ran.status, ran.err) == (1, "")
    report = json.loads(ran.out)
    assert list(report["summary"]) == [
        "files",
        "skipped",
        "patterns",
        "unresolved",
        "inexact",
        "undecided",
        "waived",
        "known",
    ]
    (finding,) = [each for each in report["findings"] if each["rule"] == "exponential-ambiguity"]
    assert (finding["path"], finding["line"], finding["level"]) == ("x.py", 2, "error")
    witness = finding["witness"]
    assert list(witness) == ["prefix", "pump", "suffix", "growth"]
    assert witness["growth"] == "exponential"
    assert set(witness["pump"]) == {"a"}
    assert witness["suffix"]


def test_standard_input_has_a_name(patlint: Patlint) -> None:
    assert patlint("lint", "-", stdin=INVALID).out.startswith("<stdin>:2:14: error: invalid-pattern: ")
    assert patlint("lint", "--as", "x.py", "-", stdin=INVALID).out.startswith("x.py:2:14: ")


FAIL_ON = [("error", 1), ("warning", 1), ("note", 1), ("never", 0)]


@pytest.mark.parametrize(("level", "status"), FAIL_ON)
def test_fail_on(patlint: Patlint, level: str, status: int) -> None:
    Path("a.py").write_text(INVALID)
    assert patlint("lint", "--fail-on", level).status == status


@pytest.mark.parametrize(
    ("set_to", "level", "status"),
    [
        ("warning", "error", 0),
        ("warning", "warning", 1),
        ("warning", "note", 1),
        ("note", "warning", 0),
        ("note", "note", 1),
    ],
)
def test_fail_on_compares_levels(patlint: Patlint, set_to: str, level: str, status: int) -> None:
    Path("a.py").write_text(INVALID)
    Path("pyproject.toml").write_text(f'[tool.patlint]\nlevels = {{ invalid-pattern = "{set_to}" }}\n')
    assert patlint("lint", "--fail-on", level).status == status


def test_fail_on_of_the_configuration(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    Path("pyproject.toml").write_text('[tool.patlint]\nfail-on = "never"\n')
    assert patlint("lint").status == 0
    assert patlint("lint", "--fail-on", "error").status == 1


def test_only_and_skip(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    assert patlint("lint", "--only", "nullable").status == 0
    assert patlint("lint", "--only", "nullable", "--only", "invalid-pattern").status == 1
    assert patlint("lint", "--only", "nullable,invalid-pattern").status == 1
    assert patlint("lint", "--skip", "invalid-pattern").status == 0
    Path("pyproject.toml").write_text('[tool.patlint]\nskip = ["invalid-pattern"]\n')
    assert patlint("lint").status == 0
    assert patlint("lint", "--skip", "nullable").status == 0  # added to the configuration's


def test_a_waiver(patlint: Patlint) -> None:
    Path("a.py").write_text("import re\nre.compile('a(b')  # patlint: waive invalid-pattern -- on purpose\n")
    ran = patlint("lint")
    assert ran == Ran(0, f"1 file, 1 pattern: 0 errors, 0 warnings, 0 notes; {TAIL.replace('0', '1', 1)}", "")


def test_a_stale_waiver(patlint: Patlint) -> None:
    Path("a.py").write_text("import re\nre.compile('ab')  # patlint: waive invalid-pattern -- on purpose\n")
    ran = patlint("lint")
    assert ran.status == 1
    assert ran.out == (
        "a.py:2:19: warning: stale-waiver: nothing here needs the waiver of invalid-pattern\n"
        "  advice   delete the comment, or the rule from it\n"
        "\n"
        f"1 file, 1 pattern: 0 errors, 1 warning, 0 notes; {TAIL}"
    )


def test_output_to_a_file(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    assert patlint("lint", "--output", "report.json", "--format", "json") == Ran(1, "", "")
    assert json.loads(Path("report.json").read_text())["findings"][0]["rule"] == "invalid-pattern"
    assert patlint("lint", "--output", "report.txt") == Ran(1, "", "")
    assert Path("report.txt").read_text().startswith("a.py:2:14: error: invalid-pattern: ")


def test_verbose_lists_what_stayed_open(patlint: Patlint) -> None:
    Path("a.py").write_text("import re\ndef f(x):\n    return re.compile(x)\n")
    ran = patlint("lint", "--verbose")
    assert ran.status == 0
    line, blank, summary = ran.out.split("\n")[:-1]
    assert line.startswith("a.py:3:") and ": unresolved: " in line
    assert (blank, summary) == (
        "",
        "1 file, 0 patterns: 0 errors, 0 warnings, 0 notes; "
        "0 waived, 1 unresolved, 0 inexact, 0 undecided, 0 skipped",
    )
    assert patlint("lint").out == summary + "\n"


def test_target(patlint: Patlint) -> None:
    Path("a.py").write_text("import re\nre.compile(r'(?>ab)')\n")
    assert json.loads(patlint("lint", "--format", "json", "--target", "3.12").out)["target"] == "3.12"
    assert patlint("lint", "--target", "3.12").status == 0
    assert patlint("lint", "--target", "3.10").status == 1
    Path("pyproject.toml").write_text('[project]\nname = "x"\nrequires-python = ">=3.9"\n')
    report = json.loads(patlint("lint", "--format", "json").out)
    assert (report["target"], len(report["findings"])) == ("3.10", 1)


def test_config_from_a_file(patlint: Patlint) -> None:
    Path("a.py").write_text(INVALID)
    Path("own.toml").write_text('skip = ["invalid-pattern"]\n')
    assert patlint("lint").status == 1
    assert patlint("lint", "--config", "own.toml").status == 0


def test_exclude_and_per_path(patlint: Patlint) -> None:
    Path("lib").mkdir()
    Path("lib/a.py").write_text(INVALID)
    Path("b.py").write_text(CLEAN)
    Path("pyproject.toml").write_text('[tool.patlint]\nexclude = ["lib"]\n')
    ran = patlint("lint", ".", "lib/a.py")
    assert ran.status == 0
    assert ran.out.endswith("2 skipped\n")
    Path("pyproject.toml").write_text(
        '[tool.patlint.per-path."lib/*"]\nlevels = { invalid-pattern = "note" }\n'
    )
    ran = patlint("lint")
    assert ran.status == 0
    assert ran.out.startswith("lib/a.py:2:14: note: invalid-pattern: ")


def test_the_cache_is_beside_the_configuration(patlint: Patlint) -> None:
    Path("sub").mkdir()
    Path("sub/a.py").write_text(INVALID)
    Path("pyproject.toml").write_text("[tool.patlint]\n")
    first = patlint("lint", "--no-cache", "sub")
    assert not Path(".patlint-cache").exists()
    assert patlint("lint", "sub") == first
    assert Path(".patlint-cache/.gitignore").read_text() == "*\n"
    assert patlint("lint", "sub") == first


def test_sinks_of_the_configuration(patlint: Patlint) -> None:
    """Linted, mended and cached by the same table."""
    Path("a.py").write_text("from terminal.text import expect\nexpect('(?:a|b|c)x', s)\n")
    assert patlint("lint").out.endswith(
        "1 file, 0 patterns: 0 errors, 0 warnings, 0 notes; 0 waived, "
        "0 unresolved, 0 inexact, 0 undecided, 0 skipped\n"
    )
    told = '[tool.patlint.sinks]\n"terminal.text.expect" = { argument = 0, mode = "match", looks-at = "truth" }\n'
    Path("pyproject.toml").write_text(told)
    assert "shorter-equivalent" in patlint("lint").out
    patlint("mend", "--write")
    assert Path("a.py").read_text() == "from terminal.text import expect\nexpect('[abc]x', s)\n"
    Path("pyproject.toml").write_text(told.replace("match", "serch"))
    ran = patlint("lint")
    assert (ran.status, ran.out) == (2, "") and "sinks.'terminal.text.expect'.mode must be one of" in ran.err


def test_surrogates_and_bytes_survive_in_json(patlint: Patlint) -> None:
    Path("a.py").write_text("import re\nre.compile('\\ud800(')\nre.compile(b'\\xff(')\n")
    ran = patlint("lint", "--format", "json")
    findings = json.loads(ran.out)["findings"]
    assert [(each["pattern"], each["bytes"]) for each in findings] == [("\ud800(", False), ("\xff(", True)]
    assert ran.out.isascii()
    assert patlint("lint").status == 1
