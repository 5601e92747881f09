"""`.ci/run` runs the commands that the README gives, not others; the whole script is too slow for a test."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
SCRIPT = ROOT / ".ci" / "run"

if shutil.which("bash") is None:
    pytest.skip("bash is not installed", allow_module_level=True)


def show(folder: Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        ["bash", str(folder / ".ci" / "run"), "--show"],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
    )


def test_the_commands_are_those_of_the_readme() -> None:
    blocks = re.findall(r"(?ms)^```sh\n(.*?)^```$", (ROOT / "README.md").read_text(encoding="utf-8"))
    assert len(blocks) == 2
    ran = show(ROOT)
    assert (ran.returncode, ran.stdout) == (0, "".join(blocks))
    assert "patlint lint" in blocks[0] and "pytest" in blocks[1]


def test_a_readme_without_them_is_an_error(tmp_path: Path) -> None:
    (tmp_path / ".ci").mkdir()
    shutil.copy(SCRIPT, tmp_path / ".ci" / "run")
    (tmp_path / "README.md").write_text("```sh\ntrue\n```\n")
    ran = show(tmp_path)
    assert (ran.returncode, ran.stderr) == (1, "README.md must have two fenced sh blocks\n")


def test_it_can_be_run() -> None:
    assert os.access(SCRIPT, os.X_OK)
    assert SCRIPT.read_text().splitlines()[0] == "#!/usr/bin/env bash"
