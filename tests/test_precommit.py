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


def install(folder: Path, *more: str) -> None:
    """The hook of the manifest in the repository, run from this checkout, with `more` words in its call."""
    said = hook()
    entry = said["entry"].split()
    assert entry[0] == "patlint"
    local = said | {
        "language": "system",
        "entry": " ".join([sys.executable, "-m", "patlint", *entry[1:], *more]),
    }
    config = {"repos": [{"repo": "local", "hooks": [local]}]}
    (folder / "repository/.pre-commit-config.yaml").write_text(json.dumps(config))
    installed = pre_commit(folder, "install")
    assert installed.returncode == 0, installed.stdout


def commit(folder: Path) -> subprocess.CompletedProcess[str]:
    return run(folder, "git", "commit", "-m", "a change")


BAD = "import re\nre.compile('a(b')\n"
GOOD = "import re\nre.compile('a(b)')\n"


def test_commits_are_stopped_and_passed(folder: Path) -> None:
    repository = folder / "repository"
    install(folder)
    (repository / "gate.py").write_text(BAD)
    (repository / "notes.txt").write_text("re.compile('a(b')\n")
    run(folder, "git", "add", ".")
    stopped = commit(folder)
    assert stopped.returncode != 0
    assert "\ngate.py:2:14: error: invalid-pattern: " in stopped.stdout
    assert "\n1 file, 1 pattern: 1 error," in stopped.stdout
    assert "- exit code: 1\n" in stopped.stdout
    assert "notes.txt" not in stopped.stdout

    (repository / "gate.py").write_text(GOOD)
    run(folder, "git", "add", ".")
    passed = commit(folder)
    assert passed.returncode == 0, passed.stdout
    assert "Passed" in passed.stdout
    assert run(folder, "git", "status", "--porcelain").stdout == ""  # the cache ignores itself

    (repository / "gate.py").write_text("import re\nre.compile(\n")
    run(folder, "git", "add", ".")
    unread = commit(folder)
    assert unread.returncode != 0
    assert "- exit code: 2\n" in unread.stdout and "\ngate.py:2: " in unread.stdout


def test_what_is_staged_counts(folder: Path) -> None:
    """pre-commit puts unstaged changes aside while the hook runs, and puts them back."""
    gate = folder / "repository/gate.py"
    install(folder)
    gate.write_text(GOOD)
    run(folder, "git", "add", ".")
    gate.write_text(BAD)
    passed = commit(folder)
    assert passed.returncode == 0, passed.stdout
    assert gate.read_text() == BAD

    run(folder, "git", "add", ".")
    gate.write_text(GOOD + "# mended, and not staged\n")
    stopped = commit(folder)
    assert stopped.returncode != 0
    assert "\ngate.py:2:14: error: invalid-pattern: " in stopped.stdout
    assert gate.read_text() == GOOD + "# mended, and not staged\n"


def test_only_changed_files_beside_a_ledger(folder: Path) -> None:
    """Old findings in files that a commit does not touch stay untold, and those of the ledger in files that it does."""
    repository = folder / "repository"
    for name in ("old.py", "gate.py"):
        (repository / name).write_text(BAD)
    written = run(folder, sys.executable, "-m", "patlint", "ledger", "write", "--ledger", "known", "gate.py")
    assert written.stdout == "known: 1 known; 1 new, 0 gone\n"
    run(folder, "git", "add", ".")
    assert commit(folder).returncode == 0  # before there is a hook
    install(folder, "--ledger", "known")

    (repository / "gate.py").write_text("# A gate.\n\n" + BAD)
    run(folder, "git", "add", ".")
    passed = commit(folder)
    assert passed.returncode == 0, passed.stdout

    (repository / "gate.py").write_text(BAD + "re.compile('c)')\n")
    run(folder, "git", "add", ".")
    stopped = commit(folder)
    assert stopped.returncode != 0
    assert "\ngate.py:3:14: error: invalid-pattern: " in stopped.stdout
    assert "1 file, 2 patterns: 1 error, 0 warnings, 0 notes; 1 known," in stopped.stdout
    assert "old.py" not in stopped.stdout
