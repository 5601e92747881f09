"""The entry point: finds the command, imports it alone, and turns what goes wrong into one line and a status.

Status: 0 nothing at or above `--fail-on`, 1 findings, 2 a wrong call, a wrong configuration, or a file that
could not be read or parsed, 130 interrupted.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from contextlib import suppress
from typing import Final

COMMANDS: Final = {
    "lint": "find mistakes in the patterns of Python files",
    "list": "list every pattern with its place, its flags and how it is used",
    "inspect": "show everything that is known about one pattern",
    "mend": "put proven suggestions in the place of patterns",
    "ledger": "keep a file of known findings, so that only new ones are told",
    "rules": "list the rules, or explain one with an example",
    "completion": "give the script with which a shell completes patlint's words",
}

EXIT_WRONG: Final = 2
EXIT_INTERRUPTED: Final = 130

_HELP: Final = """\
patlint COMMAND [OPTIONS] ...

Finds mistakes in the regular expressions of Python code. Each finding comes
with a text that shows it on `re`, or with a proof.

commands:
{commands}

  patlint COMMAND --help   the options of a command
  patlint --version        the version

exit status: 0 nothing at or above --fail-on, 1 findings, 2 a wrong call or
configuration, or a file that could not be read or parsed
"""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line `arguments` (default: those of the process) and give the exit status."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    from patlint.cli.screen import CallError

    try:
        return _run(given)
    except CallError as error:
        return complain(str(error))
    except OSError as error:
        return complain(_said(error))
    except KeyboardInterrupt:
        # On 3.10 the worker pool's own clean-up can fail at exit, and would say so on the terminal.
        with suppress(OSError, ValueError):
            os.dup2(os.open(os.devnull, os.O_WRONLY), 2)
        return EXIT_INTERRUPTED


def _said(error: OSError) -> str:
    """One line about an error that no command expects."""
    try:
        os.getcwd()
    except OSError:
        return "the working directory is no more"
    what = error.strerror or str(error) or type(error).__name__
    return what if error.filename is None else f"{os.fsdecode(error.filename)}: {what}"


def complain(message: str) -> int:
    """Say one line on standard error; the exit status of a wrong call."""
    from patlint.cli.screen import say

    say(f"patlint: {message}")
    return EXIT_WRONG


def _give(text: str) -> int:
    from patlint.cli.screen import output

    with output() as write:
        write(text)
    return 0


def _run(given: list[str]) -> int:
    if not given:
        return complain("no command; see patlint --help")
    command, rest = given[0], given[1:]
    if command in ("-h", "--help"):
        return _give(
            _HELP.format(commands="\n".join(f"  {name:<12}{what}" for name, what in COMMANDS.items()))
        )
    if command == "--version":
        from patlint import __version__

        return _give(f"patlint {__version__}\n")
    if command not in COMMANDS:
        from patlint.nearest import nearest

        words = ("--help", "--version") if command.startswith("-") else tuple(COMMANDS)
        kind = "option" if command.startswith("-") else "command"
        return complain(f"unknown {kind} {command!r}{nearest(command, words) or '; see patlint --help'}")
    from importlib import import_module

    return int(import_module(f"patlint.cli.{command}").run(rest))
