"""Wrong calls: one line on standard error, the nearest right word, status 2. And the help."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from importlib import import_module
from pathlib import Path

import pytest

from patlint import __version__
from patlint.cli.main import COMMANDS

from .conftest import CLEAN, Ran

Patlint = Callable[..., Ran]

WRONG = [
    ((), "no command; see patlint --help"),
    (("lintt",), "unknown command 'lintt'; the nearest is lint"),
    (("xyz",), "unknown command 'xyz'; see patlint --help"),
    (("--versoin",), "unknown option '--versoin'; the nearest is --version"),
    (("lint", "--fromat", "json"), "unknown option '--fromat'; the nearest is --format"),
    (("lint", "--fromat=json"), "unknown option '--fromat'; the nearest is --format"),
    (("lint", "--form", "json"), "unknown option '--form'; the nearest is --format"),  # no abbreviations
    (("lint", "-z"), "unknown option '-z'; see patlint lint --help"),
    (
        ("lint", "--format", "jsn"),
        "--format: 'jsn' is not one of text, json, sarif; the nearest is json; see patlint lint --help",
    ),
    (("lint", "--format"), "--format: expected one argument; see patlint lint --help"),
    (
        ("lint", "--fail-on", "warn"),
        "--fail-on: 'warn' is not one of error, warning, note, never; the nearest is warning;"
        " see patlint lint --help",
    ),
    (("lint", "--only", "nulable"), "--only: unknown rule 'nulable'; the nearest is nullable"),
    (("lint", "--skip", "nullable,x"), "--skip: unknown rule 'x'"),
    (("lint", "--target", "3.9"), "--target: unknown target '3.9'; patlint knows 3.10, 3.11, 3.12, 3.13"),
    (
        ("lint", "--only", "nullable", "--skip", "nullable"),
        "no rule is left on: each rule that is asked for is left out as well",
    ),
    (("lint", "--jobs", "0"), "--jobs: '0' is not a whole number above 0; see patlint lint --help"),
    (("lint", "--jobs", "two"), "--jobs: 'two' is not a whole number above 0; see patlint lint --help"),
    (("lint", "--as", "x.py"), "--as names standard input, but - is not among the paths"),
    (("lint", "--config", "none.toml"), "none.toml: cannot be read: No such file or directory"),
    (("lint", "--output", "no/where", "a.py"), "--output no/where: there is no directory no"),
    (("list", "--formt", "json"), "unknown option '--formt'; the nearest is --format"),
    (("rules", "nulable"), "unknown rule 'nulable'; the nearest is nullable"),
    (("rules", "nullable", "nullable"), "one argument too many: 'nullable'; see patlint rules --help"),
    (("inspect",), "the following arguments are required: PATTERN; see patlint inspect --help"),
    (
        ("inspect", "a", "--mode", "serch"),
        "--mode: 'serch' is not one of match, fullmatch, search; the nearest is search;"
        " see patlint inspect --help",
    ),
    (("inspect", "a", "--flags", "ik"), "--flags: unknown flag 'k'; the flags are a, i, L, m, s, u, x"),
    (
        ("inspect", "a", "--target", "3.14"),
        "--target: unknown target '3.14'; patlint knows 3.10, 3.11, 3.12, 3.13",
    ),
]


OPTIONS = [
    (command, option)
    for command in COMMANDS
    for action in import_module(f"patlint.cli.{command}").parser()._actions
    for option in action.option_strings
    if option.startswith("--")
]


@pytest.mark.parametrize(("command", "option"), OPTIONS)
def test_every_option_with_a_slip(patlint: Patlint, command: str, option: str) -> None:
    """A letter doubled, and one left out where enough are left to know the word by."""
    slips = [f"{option[:3]}{option[2:]}"] + [f"{option[:-2]}{option[-1]}"] * (len(option) > 5)
    for slip in slips:
        ran = patlint(command, slip, "x")
        assert ran == Ran(2, "", f"patlint: unknown option {slip!r}; the nearest is {option}\n")


def test_there_are_options() -> None:
    assert len(OPTIONS) >= 35


@pytest.mark.parametrize(("words", "message"), WRONG)
def test_wrong_calls(patlint: Patlint, words: tuple[str, ...], message: str) -> None:
    Path("a.py").write_text(CLEAN)
    assert patlint(*words) == Ran(2, "", f"patlint: {message}\n")


def test_wrong_configuration(patlint: Patlint) -> None:
    Path("a.py").write_text(CLEAN)
    Path("pyproject.toml").write_text('[tool.patlint]\nlevls = { nullable = "off" }\n')
    where = Path("pyproject.toml").absolute()
    assert patlint("lint") == Ran(2, "", f"patlint: {where}: unknown key levls; the nearest is levels\n")


@pytest.mark.parametrize("words", [("--help",), ("-h",)])
def test_help_names_every_command(patlint: Patlint, words: tuple[str, ...]) -> None:
    ran = patlint(*words)
    assert (ran.status, ran.err) == (0, "")
    assert max(map(len, ran.out.splitlines())) <= 80
    assert [line.split()[0] for line in ran.out.splitlines() if line.startswith("  ") and line[2] != " "][
        : len(COMMANDS)
    ] == list(COMMANDS)


def test_version(patlint: Patlint) -> None:
    assert patlint("--version") == Ran(0, f"patlint {__version__}\n", "")


@pytest.mark.parametrize("command", sorted(COMMANDS))
def test_each_option_says_its_default(
    patlint: Patlint, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, command: str
) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    with pytest.raises(SystemExit) as caught:
        patlint(command, "--help")
    assert caught.value.code == 0
    shown = capsys.readouterr().out
    assert [line for line in shown.splitlines() if len(line) > 80] == []
    parser = import_module(f"patlint.cli.{command}").parser()
    seen = 0
    for action in parser._actions:
        if "--help" in action.option_strings:
            continue
        seen += 1
        assert action.required or "(default: " in action.help, action.dest
    assert seen >= 1


def test_help_imports_nothing_slow() -> None:
    """`patlint --help` is quick because of what it does not import; the names are of the slow ones."""
    code = (
        "import sys; from patlint.cli.main import main; main(['--help']);"
        "print(sorted(n for n in sys.modules if n.split('.')[0] in"
        " ('libcst', 'argparse', 'ast', 'difflib', 'multiprocessing', 'dataclasses', 'json')))"
    )
    ran = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ran.stdout.splitlines()[-1] == "[]"
    count = subprocess.run(
        [sys.executable, "-c", code.replace("main(['--help'])", "import argparse")],
        capture_output=True,
        text=True,
        check=True,
    )
    assert "argparse" in count.stdout  # the check can fail
