"""`patlint completion`: each script asked by its own shell, what it offers compared with the parsers."""

from __future__ import annotations

import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest

from patlint.cli.completion import SHELLS, Command, commands
from patlint.cli.main import COMMANDS
from patlint.rules.registry import NAMES

from .conftest import Ran

Patlint = Callable[..., Ran]

# The words on the line, the last one being completed, and what must be offered.
CASES: list[tuple[tuple[str, ...], set[str]]] = [
    (("led",), {"ledger"}),
    (("",), set(COMMANDS)),
    (("lint", "--format", ""), {"text", "json", "sarif"}),
    (("lint", "--format", "s"), {"sarif"}),
    (("lint", "--fail-on", "n"), {"note", "never"}),
    (("lint", "--only", ""), set(NAMES)),
    (("lint", "--no-c"), {"--no-cache"}),
    (("lint", "src", "--target", "3.1"), {"3.10", "3.11", "3.12", "3.13"}),
    (("inspect", "--mode", "f"), {"fullmatch"}),
    (("rules", "shorter"), {"shorter-equivalent"}),
    (("ledger", "w"), {"write"}),
    (("completion", ""), set(SHELLS)),
]


def every_option() -> list[tuple[tuple[str, ...], set[str]]]:
    """Each command with all of its options, and each option with all of its words."""
    out: list[tuple[tuple[str, ...], set[str]]] = []
    for command in commands():
        out.append(((command.name, "--"), {option.name for option in command.options}))
        out += [((command.name, each.name, ""), set(each.words)) for each in command.options if each.words]
    return out


def shell(name: str) -> str:
    found = shutil.which(name)
    if found is None:
        pytest.skip(f"{name} is not installed")
    return found


def ask(program: str, script: str, tmp_path: Path) -> list[set[str]]:
    """What a shell prints for a script: one block for each case, blocks divided by a line of ="""
    place = tmp_path / "ask"
    place.write_text(script, encoding="utf-8")
    ran = subprocess.run(
        [program, str(place)], cwd=tmp_path, capture_output=True, text=True, stdin=subprocess.DEVNULL
    )
    assert (ran.returncode, ran.stderr) == (0, "")
    return [set(block.split("\n")) - {""} for block in ran.stdout.split("=\n")[:-1]]


def test_the_table_is_complete() -> None:
    table = {each.name: each for each in commands()}
    assert list(table) == list(COMMANDS)
    assert [each.name for each in table["lint"].options].count("--format") == 1
    assert all(isinstance(each, Command) and each.options for each in table.values())
    assert len(every_option()) >= 20


def test_bash(patlint: Patlint, tmp_path: Path) -> None:
    program = shell("bash")
    ran = patlint("completion", "bash")
    assert (ran.status, ran.err) == (0, "")
    (tmp_path / "script").write_text(ran.out)
    cases = (
        CASES + every_option() + [(("lint", "--format", "=", "j"), {"json"}), (("lint", "--as", ""), set())]
    )
    cases.append((("lint", "--only", "nullable,shorter"), {"nullable,shorter-equivalent"}))
    lines = ["source ./script"]
    for words, _ in cases:
        quoted = " ".join(f"'{word}'" for word in ("patlint", *words))
        lines.append(
            f"COMP_WORDS=({quoted}); COMP_CWORD={len(words)}; COMPREPLY=(); _patlint;"
            ' printf "%s\\n" "${COMPREPLY[@]}"; echo ='
        )
    offered = ask(program, "\n".join(lines), tmp_path)
    assert len(offered) == len(cases)
    for (words, expected), found in zip(cases, offered, strict=True):
        assert found - {"--help", "--version"} == expected - {"--help", "--version"}, words


def test_fish(patlint: Patlint, tmp_path: Path) -> None:
    program = shell("fish")
    (tmp_path / "script").write_text(patlint("completion", "fish").out)
    cases = CASES + every_option()
    lines = ["source ./script"]
    for words, _ in cases:
        lines.append(f'complete -C "{" ".join(("patlint", *words))}"; echo =')
    offered = ask(program, "\n".join(lines), tmp_path)
    assert len(offered) == len(cases)
    for (words, expected), found in zip(cases, offered, strict=True):
        names = {line.partition("\t")[0] for line in found}
        assert expected - {"--help"} <= names, words
        assert len(names) <= len(expected) + 1 or not expected, (words, names)


def test_zsh(patlint: Patlint, tmp_path: Path) -> None:
    """The builtins that offer words are replaced by functions that print them."""
    program = shell("zsh")
    (tmp_path / "script").write_text(patlint("completion", "zsh").out)
    cases = CASES + every_option()
    lines = [
        "compdef() { : }",
        "compset() { return 1 }",
        "_files() { : }",
        'compadd() { shift; print -l -- "$@" }',
        '_describe() { print -l -- "${(@)${(P@)2}%%:*}" }',
        "source ./script",
    ]
    for words, _ in cases:
        quoted = " ".join(f"'{word}'" for word in ("patlint", *words))
        lines.append(f"words=({quoted}); CURRENT={len(words) + 1}; PREFIX='{words[-1]}'; _patlint; echo =")
    offered = ask(program, "\n".join(lines), tmp_path)
    assert len(offered) == len(cases)
    for (words, expected), found in zip(cases, offered, strict=True):
        matching = {each for each in found if each.startswith(words[-1])}
        assert matching - {"--help", "--version"} == expected - {"--help", "--version"}, words


def test_a_shell_that_is_not_known(patlint: Patlint) -> None:
    assert patlint("completion", "bsh") == Ran(
        2,
        "",
        "patlint: SHELL: 'bsh' is not one of bash, zsh, fish; the nearest is bash; see patlint completion --help\n",
    )
