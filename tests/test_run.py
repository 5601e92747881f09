"""Whole runs: the same outcomes whatever the number of processes and whatever the cache holds."""

from __future__ import annotations

from pathlib import Path

import pytest

from patlint import lint_source
from patlint.cache import FOLDER
from patlint.config import Settings
from patlint.rules.registry import RULES
from patlint.run import RunResult, lint_paths
from patlint.source import SourceError

NAMES = tuple(rule.name for rule in RULES)
SETTINGS = Settings((3, 12), NAMES)
BAD = "import re\nre.compile('(')\n"


@pytest.fixture
def project(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    for number in range(9):
        (tmp_path / f"row{number}.py").write_text("# \n" * number + BAD)
    (tmp_path / "broken.py").write_bytes(b"import re\nre.compile(\n")
    (tmp_path / "nulls.py").write_bytes(b"import re\0\n")
    return tmp_path


def seen(result: RunResult) -> list[tuple[str, int, str]]:
    return [(each.path, each.line, each.rule) for each in result.findings]


EXPECTED = [(f"row{number}.py", number + 2, "invalid-pattern") for number in range(9)]


def test_one_process_and_two_give_the_same(project: Path) -> None:
    one = lint_paths(["."], SETTINGS, jobs=1)
    assert seen(one) == EXPECTED
    assert (one.files, one.skipped, len(one.problems)) == (9, 2, 2)
    assert [line.split(":")[0] for line in one.problems] == ["broken.py", "nulls.py"]
    assert lint_paths(["."], SETTINGS, jobs=2) == one
    assert lint_paths(["."], SETTINGS) == one


def test_no_project_no_cache(project: Path) -> None:
    lint_paths(["."], SETTINGS)
    assert not (project / FOLDER).exists()


def test_the_cache_changes_nothing_and_is_used(project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    settings = Settings((3, 12), NAMES, root=".")
    first = lint_paths(["."], settings, jobs=1)
    assert (project / FOLDER / ".gitignore").read_text() == "*\n"
    assert lint_paths(["."], settings, use_cache=False) == first

    linted: list[str] = []
    from patlint import run

    real = run.lint_bytes
    monkeypatch.setattr(
        run, "lint_bytes", lambda data, path, settings: linted.append(path) or real(data, path, settings)
    )
    assert lint_paths(["."], settings, jobs=1) == first
    assert linted == ["broken.py", "nulls.py"]  # what failed is tried again
    linted.clear()
    (project / "row3.py").write_text("import re\n")
    changed = lint_paths(["."], settings, jobs=1)
    assert linted == ["broken.py", "nulls.py", "row3.py"]
    assert seen(changed) == [each for each in EXPECTED if each[0] != "row3.py"]
    for entry in (project / FOLDER).iterdir():
        entry.write_bytes(b"\xff")
    assert lint_paths(["."], settings, jobs=1) == changed


def test_progress_counts_every_file(project: Path) -> None:
    told: list[tuple[int, int]] = []
    lint_paths(["."], SETTINGS, jobs=1, progress=lambda done, total: told.append((done, total)))
    assert told == [(number, 11) for number in range(1, 12)]


def test_a_dead_process_is_a_problem_of_its_files(project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A settings object that ends the process that unpickles it stands for a crash."""
    result = lint_paths(["row1.py", "row2.py"], DEADLY, jobs=2)
    assert result.findings == ()
    assert [line.split(": ")[0] for line in result.problems] == ["row1.py", "row2.py"]
    assert "BrokenProcessPool" in result.problems[0]


class Deadly(Settings):
    __slots__ = ()

    def __reduce__(self) -> tuple[object, ...]:
        import os

        return (os._exit, (3,))


DEADLY = Deadly((3, 12), NAMES)


def test_lint_source() -> None:
    (finding,) = lint_source(BAD, "row.py")
    assert (finding.path, finding.line, finding.rule, finding.level) == (
        "row.py",
        2,
        "invalid-pattern",
        "error",
    )
    assert lint_source(BAD)[0].path == "<text>"
    assert lint_source(BAD.encode(), "row.py") == (finding,)
    assert lint_source(BAD, settings=Settings((3, 12), NAMES, skip=frozenset({"invalid-pattern"}))) == ()
    assert lint_source("") == ()


def test_lint_source_knows_its_target() -> None:
    text = "import re\nre.compile(r'(?>a)')\n"
    assert [each.rule for each in lint_source(text, target=(3, 10))] == ["invalid-pattern"]
    assert lint_source(text, target=(3, 12)) == ()


def test_lint_source_minds_the_coding_comment() -> None:
    text = "# -*- coding: latin-1 -*-\nimport re\nre.compile('\xe9(')\n"
    (finding,) = lint_source(text)
    assert (finding.line, finding.pattern) == (3, "\xe9(")


@pytest.mark.parametrize("text", ["import re\nre.compile(\n", "\0", "\ud800"])
def test_lint_source_refuses_what_is_not_python(text: str) -> None:
    with pytest.raises(SourceError):
        lint_source(text)
