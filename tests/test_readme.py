"""The README: its examples run, its rules and keys are those of the program, its sample of output is real."""

from __future__ import annotations

import doctest
import os
import re
import subprocess
import sys
from dataclasses import asdict
from pathlib import Path

from patlint.cli.main import COMMANDS
from patlint.config import _KEYS, load
from patlint.limits import DEFAULT_LIMITS
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
