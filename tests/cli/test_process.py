"""What only a process of its own shows: pipes that close, terminals, Ctrl-C, `python -m patlint`."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
from contextlib import suppress
from pathlib import Path

import pytest

from .conftest import SLOW

INVALID = "import re\n" + "re.compile('a(b')\n" * 3_000
PATLINT = [sys.executable, "-m", "patlint"]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / ".git").mkdir()
    return tmp_path


def environment(**more: str) -> dict[str, str]:
    root = Path(__file__).resolve().parents[2]
    kept = {name: value for name, value in os.environ.items() if name not in ("NO_COLOR", "TERM", "COLUMNS")}
    return kept | {"PYTHONPATH": str(root)} | more


def test_module_and_pipeline(folder: Path) -> None:
    ran = subprocess.run(
        [*PATLINT, "lint", "-", "--as", "x.py"],
        input=SLOW,
        capture_output=True,
        text=True,
        cwd=folder,
        env=environment(),
    )
    assert (ran.returncode, ran.stderr) == (1, "")
    assert ran.stdout.startswith("x.py:2:")


@pytest.mark.parametrize(
    "words",
    [
        ("lint", "a.py"),
        ("lint", "a.py", "--format", "json"),
        ("lint", "a.py", "--format", "sarif"),
        ("list", "a.py"),
    ],
)
def test_a_reader_that_leaves_early(folder: Path, words: tuple[str, ...]) -> None:
    (folder / "a.py").write_text(INVALID)
    with subprocess.Popen(
        [*PATLINT, *words],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=folder,
        env=environment(),
    ) as process:
        assert process.stdout is not None and process.stderr is not None
        assert process.stdout.readline()
        process.stdout.close()
        assert process.stderr.read() == b""
        assert process.wait() == (1 if words[0] == "lint" else 0)


def on_terminal(folder: Path, **more: str) -> str:
    """Standard output of a run whose standard output is a terminal; standard error is not one."""
    import pty

    ours, theirs = pty.openpty()
    process = subprocess.Popen(
        [*PATLINT, "lint", "--no-cache", "a.py"],
        stdin=subprocess.DEVNULL,
        stdout=theirs,
        stderr=subprocess.PIPE,
        cwd=folder,
        env=environment(**more),
    )
    os.close(theirs)
    out = b""
    while True:
        try:
            chunk = os.read(ours, 65536)
        except OSError:  # how Linux tells that the other side is closed
            break
        if not chunk:
            break
        out += chunk
    os.close(ours)
    assert process.stderr is not None
    assert process.stderr.read() == b""
    process.stderr.close()
    assert process.wait() == 1
    return out.decode()


def test_colour_only_on_a_terminal_that_wants_it(folder: Path) -> None:
    pytest.importorskip("pty")
    (folder / "a.py").write_text("import re\nre.compile('a(b')\n")
    coloured = on_terminal(folder, TERM="xterm", COLUMNS="80")
    assert "\x1b[1;31merror\x1b[0m" in coloured
    plain = on_terminal(folder, TERM="xterm", NO_COLOR="1", COLUMNS="80")
    assert plain == on_terminal(folder, TERM="dumb", COLUMNS="80")
    assert "\x1b" not in plain
    assert re.sub(r"\x1b\[[\d;]*m", "", coloured) == plain


@pytest.mark.skipif(sys.platform == "win32", reason="signals of a terminal, named pipes")
@pytest.mark.parametrize("jobs", [1, 2])
def test_interrupt_ends_quietly(folder: Path, jobs: int) -> None:
    """Ctrl-C reaches every process of the group. Named pipes hold each of them in the middle of its work."""
    pipes = [folder / f"pipe{number}.py" for number in range(jobs)]
    for pipe in pipes:
        os.mkfifo(pipe)
    with subprocess.Popen(
        [*PATLINT, "lint", "--no-cache", "--jobs", str(jobs), *(pipe.name for pipe in pipes)],
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=folder,
        env=environment(),
        start_new_session=True,
        # A shell that runs the tests in the background has its children ignore the signal.
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),
    ) as process:
        # Each opening waits until patlint has opened its side.
        writers = [os.open(pipe, os.O_WRONLY) for pipe in pipes]
        while process.poll() is None:
            os.killpg(process.pid, signal.SIGINT)
            # CPython 3.10 looks at signals nowhere between the end of open and a read that waits.
            with suppress(subprocess.TimeoutExpired):
                process.wait(timeout=5)
        assert process.stdout is not None and process.stderr is not None
        assert (process.stdout.read(), process.stderr.read()) == (b"", b"")
        assert process.wait() == 130
        for writer in writers:
            os.close(writer)


def test_a_cached_run_loads_nothing_slow(folder: Path) -> None:
    """Most of the time of a small run is imports; a run whose files are all known needs neither parser nor machine."""
    (folder / "a.py").write_text(SLOW)
    code = (
        "import sys; from patlint.cli.main import main; status = main(['lint', *sys.argv[1:]]);"
        "print(status, sorted(n for n in sys.modules if n.startswith(('libcst', 'patlint.machine', 'patlint.source.',"
        " 'patlint.rewrite', 'patlint.language')) or n in ('ast', 'multiprocessing', 'asyncio')))"
    )

    def run(*words: str) -> str:
        ran = subprocess.run(
            [sys.executable, "-c", code, *words],
            capture_output=True,
            text=True,
            check=True,
            cwd=folder,
            env=environment(),
        )
        return ran.stdout.splitlines()[-1]

    first = run()
    assert "libcst" in first and "patlint.machine.program" in first  # the check can fail
    for words in ((), ("--format", "json")):
        assert run(*words) == "1 ['ast']"  # with which the cache is read
