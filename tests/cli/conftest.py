"""A project directory to be in, and the command line run in this process."""

from __future__ import annotations

import io
import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from patlint.cli.main import main

SLOW = 'import re\np = re.compile("(a+)+$")\nprint(p.match(input()))\n'
CLEAN = 'import re\nprint(re.match("ab", input()))\n'


@dataclass(frozen=True)
class Ran:
    """What a call gave: exit status, standard output, standard error."""

    status: int
    out: str
    err: str


@pytest.fixture
def patlint(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Callable[..., Ran]:
    """Runs `patlint` with the given words in an empty directory that is a project of its own."""
    (tmp_path / ".git").mkdir()
    monkeypatch.chdir(tmp_path)

    def run(*words: str, stdin: str | bytes = b"") -> Ran:
        data = stdin.encode() if isinstance(stdin, str) else stdin
        monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(data)))
        status = main(words)
        captured = capsys.readouterr()
        return Ran(status, captured.out, captured.err)

    return run
