"""The hook: the manifest is valid, and the real pre-commit stops and passes real commits with what it says.

The hook is run from this checkout (language `system`), since its own environment would need the network.
"""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

ROOT = Path(__file__).resolve().parent.parent
MANIFEST = ROOT / ".pre-commit-hooks.yaml"

pytest.importorskip("pre_commit")
yaml = pytest.importorskip("yaml")
if shutil.which("git") is None:
    pytest.skip("git is not installed", allow_module_level=True)


def environment(folder: Path) -> dict[str, str]:
    kept = {name: value for name, value in os.environ.items() if not name.startswith(("GIT_", "PRE_COMMIT"))}
    who = {
        f"GIT_{role}_{what}": value
        for role in ("AUTHOR", "COMMITTER")
        for what, value in (("NAME", "A Stevedore"), ("EMAIL", "stevedore@quay.example"))
    }
    return (
        kept
        | who
        | {
            "PYTHONPATH": str(ROOT),
            "PRE_COMMIT_HOME": str(folder / "pre-commit"),
            "GIT_CONFIG_GLOBAL": os.devnull,
            "GIT_CONFIG_SYSTEM": os.devnull,
            "NO_COLOR": "1",
        }
    )


def run(folder: Path, *words: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        words,
        cwd=folder / "repository",
        env=environment(folder),
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
    )


def pre_commit(folder: Path, *words: str) -> subprocess.CompletedProcess[str]:
    return run(folder, sys.executable, "-m", "pre_commit", *words)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "repository").mkdir()
    assert run(tmp_path, "git", "init", "-q").returncode == 0
    return tmp_path


def hook() -> dict[str, Any]:
    (only,) = yaml.safe_load(MANIFEST.read_text(encoding="utf-8"))
    assert isinstance(only, dict)
    return only


def test_the_manifest_is_valid(folder: Path) -> None:
    assert pre_commit(folder, "validate-manifest", str(MANIFEST)).returncode == 0
    broken = folder / "broken.yaml"
    broken.write_text(MANIFEST.read_text(encoding="utf-8").replace("language: python", "language: klingon"))
    assert pre_commit(folder, "validate-manifest", str(broken)).returncode != 0


def test_what_the_manifest_says() -> None:
    said = hook()
    assert (said["id"], said["entry"], said["language"], said["types"]) == (
        "patlint",
        "patlint lint",
        "python",
        ["python"],
    )


def test_commits_are_stopped_and_passed(folder: Path) -> None:
    repository = folder / "repository"
    said = hook()
    entry = said["entry"].split()
    assert entry[0] == "patlint"
    local = said | {
        "language": "system",
        "entry": " ".join([sys.executable, "-m", "patlint", *entry[1:]]),
    }
    config = {"repos": [{"repo": "local", "hooks": [local]}]}
    (repository / ".pre-commit-config.yaml").write_text(json.dumps(config))
    installed = pre_commit(folder, "install")
    assert installed.returncode == 0, installed.stdout

    (repository / "gate.py").write_text("import re\nre.compile('a(b')\n")
    (repository / "notes.txt").write_text("re.compile('a(b')\n")
    run(folder, "git", "add", ".")
    stopped = run(folder, "git", "commit", "-m", "a gate")
    assert stopped.returncode != 0
    assert "\ngate.py:2:14: error: invalid-pattern: " in stopped.stdout
    assert "\n1 file, 1 pattern: 1 error," in stopped.stdout
    assert "notes.txt" not in stopped.stdout

    (repository / "gate.py").write_text("import re\nre.compile('a(b)')\n")
    run(folder, "git", "add", ".")
    passed = run(folder, "git", "commit", "-m", "a gate")
    assert passed.returncode == 0, passed.stdout
    assert "Passed" in passed.stdout
    assert run(folder, "git", "status", "--porcelain").stdout == ""  # the cache ignores itself
