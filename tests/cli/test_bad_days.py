"""Disks that are full, names that are no text, files that change or vanish: one line, a status, nothing half done.

Ctrl-C, a reader that leaves early and terminals are in test_process.py, files that are no Python in
test_malformed.py, writing as a whole in tests/test_whole.py.
"""

from __future__ import annotations

import errno
import json
import os
import shutil
import signal
import socket
import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest

from patlint.cache import FOLDER

from .conftest import CLEAN, Ran
from .test_process import PATLINT, environment

resource = pytest.importorskip("resource", reason="pipes, limits and devices of POSIX")

Patlint = Callable[..., Ran]

INVALID = "import re\nre.compile('a(b')\n"
SHOWN = "good.py:2:14: error: invalid-pattern: "
FULL = pytest.mark.skipif(not os.path.exists("/dev/full"), reason="no /dev/full here")


def process(folder: Path, *words: str, **more: object) -> subprocess.CompletedProcess[str]:
    given: dict[str, object] = {
        "stdin": subprocess.DEVNULL,
        "stdout": subprocess.PIPE,
        "stderr": subprocess.PIPE,
    }
    return subprocess.run(  # type: ignore[call-overload, no-any-return]
        [*PATLINT, *words], cwd=folder, env=environment(), text=True, **given | more
    )


COMMANDS = [
    ("lint", "good.py"),
    ("lint", "good.py", "--format", "json"),
    ("lint", "good.py", "--format", "sarif"),
    ("list", "good.py"),
    ("inspect", "a+"),
    ("rules",),
    ("rules", "nullable"),
    ("ledger", "write", "--ledger", "known"),
    ("completion", "bash"),
    ("--help",),
    ("--version",),
    ("lint", "--help"),
]


@FULL
@pytest.mark.parametrize("words", COMMANDS, ids=" ".join)
def test_standard_output_is_full(tmp_path: Path, words: tuple[str, ...]) -> None:
    (tmp_path / "good.py").write_text(INVALID)
    with open("/dev/full", "w") as full:
        ran = process(tmp_path, *words, stdout=full)
    assert (ran.returncode, ran.stderr) == (2, "patlint: standard output: No space left on device\n")


@pytest.mark.parametrize("words", [("lint", "good.py"), ("--version",), ("lint", "--help")], ids=" ".join)
def test_standard_output_is_closed(tmp_path: Path, words: tuple[str, ...]) -> None:
    (tmp_path / "good.py").write_text(INVALID)
    ran = process(tmp_path, *words, stdout=None, preexec_fn=lambda: os.close(1))
    assert (ran.returncode, ran.stderr) == (2, "patlint: standard output is closed\n")


@FULL
def test_standard_error_is_full_or_closed(tmp_path: Path) -> None:
    """There is no telling then; the status and the report are what they are."""
    (tmp_path / "good.py").write_text(INVALID)
    words = ("lint", "good.py", "gone.py")
    with open("/dev/full", "w") as full:
        ran = process(tmp_path, *words, stderr=full)
    closed = process(tmp_path, *words, stderr=None, preexec_fn=lambda: os.close(2))
    assert (ran.returncode, closed.returncode) == (2, 2)
    assert ran.stdout.startswith(SHOWN) and ran.stdout == closed.stdout
    assert process(tmp_path, "lintt", stderr=None, preexec_fn=lambda: os.close(2)).returncode == 2


def test_all_three_are_closed(tmp_path: Path) -> None:
    (tmp_path / "good.py").write_text(INVALID)

    def close() -> None:
        for number in (0, 1, 2):
            os.close(number)

    ran = process(
        tmp_path,
        "lint",
        "good.py",
        "-",
        "--output",
        "report",
        stdin=None,
        stdout=None,
        stderr=None,
        preexec_fn=close,
    )
    assert ran.returncode == 2
    assert (tmp_path / "report").read_text().startswith(SHOWN)


@FULL
def test_output_to_a_full_device(patlint: Patlint) -> None:
    Path("good.py").write_text(INVALID)
    for form in ("text", "json", "sarif"):
        ran = patlint("lint", "--format", form, "--output", "/dev/full")
        assert ran == Ran(2, "", "patlint: --output /dev/full: No space left on device\n")


def test_output_that_cannot_be_written(patlint: Patlint) -> None:
    Path("good.py").write_text(INVALID)
    Path("there").mkdir()
    for path, why in [
        ("there", "this is a directory"),
        ("no/report", "there is no directory no"),
        ("good.py/report", "there is no directory good.py"),
        ("x" * 300, "File name too long"),
    ]:
        assert patlint("lint", "--output", path) == Ran(2, "", f"patlint: --output {path}: {why}\n")
    assert sorted(os.listdir()) == [".git", FOLDER, "good.py", "there"]


def too_large(folder: Path, limit: int, *words: str) -> subprocess.CompletedProcess[str]:
    """A run whose files may not grow beyond `limit` bytes, a full disk that root cannot pass."""

    def set_limit() -> None:
        resource.setrlimit(resource.RLIMIT_FSIZE, (limit, limit))
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)

    return process(folder, *words, preexec_fn=set_limit)


def test_a_report_that_does_not_fit_leaves_the_old_one(tmp_path: Path) -> None:
    (tmp_path / "good.py").write_text(INVALID)
    (tmp_path / "report").write_text("old")
    for form in ("text", "json"):
        ran = too_large(tmp_path, 64, "lint", "--no-cache", "--format", form, "--output", "report")
        assert (ran.returncode, ran.stdout, ran.stderr) == (
            2,
            "",
            "patlint: --output report: File too large\n",
        )
    ran = too_large(tmp_path, 64, "ledger", "write", "--no-cache", "--ledger", "known")
    assert (ran.returncode, ran.stderr) == (2, "patlint: known: cannot be written: File too large\n")
    assert (tmp_path / "report").read_text() == "old"
    assert sorted(os.listdir(tmp_path)) == ["good.py", "report"]
    assert too_large(tmp_path, 100_000, "lint", "--no-cache", "--output", "report").returncode == 1


def test_a_cache_that_does_not_fit_is_none(tmp_path: Path) -> None:
    (tmp_path / ".git").mkdir()
    (tmp_path / "good.py").write_text(INVALID)
    ran = too_large(tmp_path, 64, "lint", "good.py")
    assert (ran.returncode, ran.stderr) == (1, "")
    assert ran.stdout.startswith(SHOWN)
    assert os.listdir(tmp_path / FOLDER) == [".gitignore"]


@pytest.mark.parametrize("code", [errno.ENOSPC, errno.EACCES, errno.EROFS])
def test_a_cache_that_cannot_be_written_is_none(
    patlint: Patlint, monkeypatch: pytest.MonkeyPatch, code: int
) -> None:
    def fail(*args: object, **more: object) -> None:
        raise OSError(code, os.strerror(code))

    Path("good.py").write_text(INVALID)
    for name in ("tempfile.mkstemp", "os.makedirs", "os.replace"):
        with monkeypatch.context() as patch:
            patch.setattr(name, fail)
            ran = patlint("lint")
            assert (ran.status, ran.err) == (1, "")
            assert ran.out.startswith(SHOWN)
    shutil.rmtree(FOLDER)
    Path(FOLDER).write_text("a file where the directory should be")
    assert patlint("lint").status == 1


def test_a_folder_that_cannot_be_entered(patlint: Patlint, monkeypatch: pytest.MonkeyPatch) -> None:
    """Root enters every folder, so the refusal is played."""
    for folder in ("closed", "open"):
        Path(folder).mkdir()
        Path(folder, "good.py").write_text(INVALID)
    real = os.scandir

    def refuse(path: str) -> object:
        if os.path.basename(path) == "closed":
            raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))
        return real(path)

    monkeypatch.setattr(os, "scandir", refuse)
    ran = patlint("lint")
    assert (ran.status, ran.err) == (2, "closed: cannot be read: Permission denied\n")
    assert ran.out.startswith(f"open/{SHOWN}")
    assert ran.out.endswith("1 skipped\n")


@pytest.mark.skipif(os.geteuid() == 0, reason="root reads everything")
def test_files_that_may_not_be_read(patlint: Patlint) -> None:
    Path("good.py").write_text(INVALID)
    Path("secret.py").write_text(INVALID)
    Path("secret.py").chmod(0)
    ran = patlint("lint")
    assert (ran.status, ran.err) == (2, "secret.py: cannot be read: Permission denied\n")
    assert ran.out.startswith(SHOWN)


def test_links_in_a_circle(patlint: Patlint) -> None:
    Path("sub").mkdir()
    Path("sub/good.py").write_text(INVALID)
    os.symlink("..", "sub/up")
    os.symlink("sub", "again")
    os.symlink("b.py", "a.py")
    os.symlink("a.py", "b.py")
    ran = patlint("lint")
    assert ran.status == 2
    assert (
        ran.err
        == "a.py: cannot be read: the link leads nowhere\nb.py: cannot be read: the link leads nowhere\n"
    )
    assert ran.out.count("invalid-pattern") == 1


def test_what_is_called_py_and_is_no_file(patlint: Patlint) -> None:
    """Opening a pipe that nobody writes to would wait for ever."""
    Path("good.py").write_text(INVALID)
    Path("folder.py").mkdir()
    os.mkfifo("pipe.py")
    os.symlink("pipe.py", "link.py")
    os.symlink("folder.py", "other.py")
    with socket.socket(socket.AF_UNIX) as listener:
        listener.bind("socket.py")
        for command in ("lint", "list"):
            ran = patlint(command)
            assert (ran.status, ran.err) == (1 if command == "lint" else 0, "")
        named = patlint("lint", "good.py", "socket.py")
    assert named.status == 2
    assert named.err.startswith("socket.py: cannot be read: ")
    assert named.out.startswith(SHOWN)


def test_a_pipe_is_read_once(tmp_path: Path) -> None:
    """What a shell gives for `<(command)`; the cache would have read it first."""
    (tmp_path / ".git").mkdir()
    for jobs in ("1", "2"):
        reader, writer = os.pipe()
        os.write(writer, INVALID.encode())
        os.close(writer)
        path = f"/dev/fd/{reader}"
        ran = process(tmp_path, "lint", "--jobs", jobs, path, pass_fds=(reader,))
        os.close(reader)
        assert (ran.returncode, ran.stderr) == (1, "")
        assert ran.stdout.startswith(f"{path}:2:14: error: invalid-pattern: ")


def test_names_that_are_no_text(patlint: Patlint, tmp_path: Path) -> None:
    odd = b"odd \xff\n.py"
    try:
        (tmp_path / os.fsdecode(odd)).write_text(INVALID)
    except OSError:
        pytest.skip("this file system takes only names that are UTF-8")
    ran = process(tmp_path, "lint")
    assert (ran.returncode, ran.stderr) == (1, "")
    assert ran.stdout.startswith("odd \\udcff\\n.py:2:14: error: invalid-pattern: ")
    report = json.loads(patlint("lint", "--format", "json").out)
    assert os.fsencode(report["findings"][0]["path"]) == odd
    sarif = json.loads(patlint("lint", "--format", "sarif").out)
    assert sarif["runs"][0]["artifacts"][0]["location"]["uri"] == "odd%20%FF%0A.py"
    assert patlint("ledger", "write", "--ledger", "known").status == 0
    assert patlint("lint", "--ledger", "known").status == 0
    (tmp_path / os.fsdecode(odd)).write_text("import re\nre.compile(\n")
    ran = process(tmp_path, "lint")
    assert ran.returncode == 2
    assert ran.stderr.startswith("odd \\udcff\\n.py:")
    assert len(ran.stderr.splitlines()) == 1


def test_a_file_that_vanishes(patlint: Patlint, monkeypatch: pytest.MonkeyPatch) -> None:
    """Between the walk and the reading."""
    from patlint import run

    Path("good.py").write_text(INVALID)
    Path("vanishes.py").write_text(INVALID)
    real = run.find_files

    def find_and_remove(*args: object, **more: object) -> object:
        found = real(*args, **more)  # type: ignore[arg-type]
        Path("vanishes.py").unlink()
        return found

    monkeypatch.setattr(run, "find_files", find_and_remove)
    ran = patlint("lint")
    assert (ran.status, ran.err) == (2, "vanishes.py: cannot be read: No such file or directory\n")
    assert ran.out.startswith(SHOWN)
    assert ran.out.endswith("1 skipped\n")


def test_a_file_that_changes_while_it_is_read(patlint: Patlint, monkeypatch: pytest.MonkeyPatch) -> None:
    """What is kept in the cache is the outcome of what was linted, whatever was read before."""
    from patlint import run

    Path("good.py").write_text(CLEAN)
    real = run.read_file
    contents = iter([CLEAN, INVALID])

    def read(path: str) -> bytes | str:
        Path(path).write_text(next(contents))
        return real(path)

    with monkeypatch.context() as patch:
        patch.setattr(run, "read_file", read)
        assert patlint("lint").out.startswith(SHOWN)
    assert patlint("lint").out.startswith(SHOWN)
    Path("good.py").write_text(CLEAN)
    assert patlint("lint").status == 0


def test_the_working_directory_is_gone(tmp_path: Path) -> None:
    folder = tmp_path / "gone"
    folder.mkdir()
    (tmp_path / "good.py").write_text(INVALID)

    def leave() -> None:
        os.chdir(folder)
        folder.rmdir()

    ran = process(tmp_path, "lint", preexec_fn=leave)
    assert (ran.returncode, ran.stderr) == (2, "patlint: the working directory is no more\n")


def test_an_error_that_no_command_expects(patlint: Patlint, monkeypatch: pytest.MonkeyPatch) -> None:
    from patlint.cli import list as command

    for error, said in [
        (OSError(errno.EIO, "Input/output error"), "Input/output error"),
        (OSError(errno.EIO, "Input/output error", "a.py"), "a.py: Input/output error"),
        (OSError(), "OSError"),
    ]:

        def fail(given: object, error: OSError = error) -> int:
            raise error

        monkeypatch.setattr(command, "run", fail)
        assert patlint("list") == Ran(2, "", f"patlint: {said}\n")


@pytest.mark.parametrize("jobs", ["1", "2"])
def test_many_files(patlint: Patlint, jobs: str) -> None:
    """The short form of ten thousand files."""
    for number in range(1_000):
        Path(f"f{number}.py").write_text(INVALID if number % 100 == 0 else "x = 1\n")
    first = patlint("lint", "--jobs", jobs)
    assert (first.status, first.err) == (1, "")
    assert first.out.endswith(
        "\n1000 files, 10 patterns: 10 errors, 0 warnings, 0 notes;"
        " 0 waived, 0 unresolved, 0 inexact, 0 undecided, 0 skipped\n"
    )
    assert patlint("lint") == first


def test_a_huge_file(patlint: Patlint) -> None:
    lines = 100_000
    Path("good.py").write_text("x = 1\n" * lines + INVALID)
    ran = patlint("lint")
    assert (ran.status, ran.err) == (1, "")
    assert ran.out.startswith(f"good.py:{lines + 2}:14: error: invalid-pattern: ")
