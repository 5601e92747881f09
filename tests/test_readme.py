"""The README: its examples run, its rules and keys are those of the program, its sample of output is real."""

from __future__ import annotations

import doctest
import json
import os
import re
import shutil
import subprocess
import sys
from dataclasses import asdict
from pathlib import Path

import pytest

from patlint.cli.main import COMMANDS
from patlint.config import _KEYS, load
from patlint.limits import DEFAULT_LIMITS, DEFAULT_SAVING
from patlint.rules.registry import RULES

ROOT = Path(__file__).resolve().parent.parent
TEXT = (ROOT / "README.md").read_text(encoding="utf-8")
BLOCKS = re.findall(r"(?ms)^```(\w+)\n(.*?)^```$", TEXT)
NAMES = [rule.name for rule in RULES]


def blocks(kind: str) -> list[str]:
    return [body for name, body in BLOCKS if name == kind]


def table_rows(heading: str) -> list[list[str]]:
    section = TEXT.split(f"\n## {heading}\n")[1].split("\n## ")[0]
    lines = [line for line in section.splitlines() if line.startswith("| `")]
    return [[cell.strip() for cell in line.strip("|").split(" | ")] for line in lines]


def test_python_examples() -> None:
    examples = [body for body in blocks("python") if ">>>" in body]
    test = doctest.DocTestParser().get_doctest("\n".join(examples), {}, "README.md", "README.md", 0)
    assert len(test.examples) >= 8
    said: list[str] = []
    outcome = doctest.DocTestRunner().run(test, out=said.append)
    assert outcome.failed == 0, "".join(said)


def test_the_other_python_blocks_compile() -> None:
    others = [body for body in blocks("python") if ">>>" not in body]
    assert others
    for body in others:
        compile(body, "README.md", "exec")


def test_the_cell_of_a_notebook(capsys: pytest.CaptureFixture[str]) -> None:
    (cell,) = [body for body in blocks("python") if "lint_source" in body and ">>>" not in body]
    exec(compile(cell, "a cell", "exec"), {})
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].startswith("a cell:5:26: error: exponential-ambiguity: ")
    assert lines[1] == r"  pattern  (?:[A-Z0-9]+ ?)+$"
    assert "  text     '0' * 30 + 'a'" in lines


def test_the_lines_of_shell(tmp_path: Path) -> None:
    """Every bash block but the one that installs, run as it stands; `patlint` is this checkout."""
    shell = shutil.which("bash")
    if shell is None:
        pytest.skip("bash is not installed")
    (tmp_path / "bin").mkdir()
    program = tmp_path / "bin/patlint"
    program.write_text(f'#!/bin/sh\nexec {sys.executable} -m patlint "$@"\n')
    program.chmod(0o755)
    (tmp_path / "src").mkdir()
    (tmp_path / "src/orders.py").write_text("import re\nre.compile('a(b')\n")
    statuses = []
    for body in blocks("bash"):
        script = "\n".join(line for line in body.splitlines() if " pip install " not in line)
        ran = subprocess.run(
            [shell, "-c", script],
            cwd=tmp_path,
            env=os.environ | {"PYTHONPATH": str(ROOT), "PATH": f"{tmp_path / 'bin'}:{os.environ['PATH']}"},
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
        )
        assert ran.stderr == ""
        statuses.append(ran.returncode)
    assert statuses == [0, 1, 1, 1]  # the ledger, two jobs, an editor
    assert json.loads((tmp_path / "patlint.json").read_text())["findings"]
    assert json.loads((tmp_path / "patlint.sarif").read_text())["version"] == "2.1.0"
    assert len((tmp_path / "patlint.ledger").read_text().splitlines()) == 2


def test_rules_are_those_of_the_registry() -> None:
    rows = table_rows("Rules")
    assert [name.strip("`") for name, _, _ in rows] == NAMES
    assert [level for _, _, level in rows] == [rule.level for rule in RULES]


def test_commands_are_those_of_the_program() -> None:
    assert [cell.split()[1] for cell, _ in table_rows("Commands")] == list(COMMANDS)


def test_exactly_two_commands_for_a_fresh_machine() -> None:
    commands = blocks("sh")
    assert len(commands) == 2
    for command in commands:
        assert command.count("\n") == 1
        made = re.match(r"python3 -m venv (\S+) && ", command)
        assert made is not None and command.count(f"{made[1]}/bin/") == 2
    assert commands[0].endswith("patlint lint --fail-on never fixtures\n")
    assert commands[1].endswith("python -m pytest\n") and "'.[test]'" in commands[1]


def test_configuration_is_read_and_complete(tmp_path: Path) -> None:
    (body,) = blocks("toml")
    (tmp_path / "pyproject.toml").write_text(body, encoding="utf-8")
    settings = load(NAMES, start=tmp_path)
    assert settings.target == (3, 11)
    assert asdict(settings.limits) == asdict(DEFAULT_LIMITS)
    assert settings.saving == DEFAULT_SAVING
    assert [key for key in _KEYS if not re.search(rf"(?m)^(?:\[tool\.patlint\.)?{key}\b", body)] == []


def test_sample_of_output_is_real() -> None:
    found = re.search(r"(?s)<!-- sample: patlint (.*?) -->\n```text\n(.*?)```\n", TEXT)
    assert found is not None
    done = subprocess.run(
        [sys.executable, "-m", "patlint", *found[1].split()],
        cwd=ROOT / "fixtures",
        env=os.environ | {"PYTHONPATH": str(ROOT), "PYTHONIOENCODING": "utf-8", "COLUMNS": "80"},
        capture_output=True,
        encoding="utf-8",
    )
    assert (done.returncode, done.stderr) == (0, "")
    assert found[2].splitlines() == done.stdout.splitlines()
    assert len(found[2].splitlines()) > 10
