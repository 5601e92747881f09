"""What the commands share in reading their arguments: one-line errors that name the nearest right word."""

from __future__ import annotations

import argparse
import os
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, NoReturn

from patlint.nearest import nearest

if TYPE_CHECKING:
    from patlint.config import Settings


class CallError(Exception):
    """A wrong call; the message is one line."""


class Parser(argparse.ArgumentParser):
    """A parser that raises CallError; no abbreviations, so that a new option never changes an old call."""

    def __init__(self, command: str, usage: str, description: str, epilog: str | None = None) -> None:
        super().__init__(
            prog=f"patlint {command}",
            usage=f"patlint {command} {usage}",
            description=description,
            epilog=epilog,
            allow_abbrev=False,
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )
        self._optionals.title = "options"

    def error(self, message: str) -> NoReturn:
        raise CallError(f"{message.removeprefix('argument ')}; see {self.prog} --help")

    def read(self, given: Sequence[str]) -> argparse.Namespace:
        """The arguments; an option that does not exist is told with the nearest one."""
        # Options may stand among the paths; after `--` nothing is one.
        parse = self.parse_known_args if "--" in given else self.parse_known_intermixed_args
        known, rest = parse(list(given))
        for word in rest:
            if word.startswith("-") and word != "-":
                name = word.partition("=")[0]
                options = [each for each in self._option_string_actions if each.startswith("--")]
                raise CallError(f"unknown option {name!r}{nearest(name, options)}")
        if rest:
            raise CallError(f"one argument too many: {rest[0]!r}; see {self.prog} --help")
        return known


def one_of(*words: str) -> Callable[[str], str]:
    """A type for one of `words`."""

    def read(value: str) -> str:
        if value not in words:
            raise argparse.ArgumentTypeError(
                f"{value!r} is not one of {', '.join(words)}{nearest(value, words)}"
            )
        return value

    return read


def count(value: str) -> int:
    """A type for a whole number above 0."""
    if not value.isascii() or not value.isdigit() or int(value) < 1:
        raise argparse.ArgumentTypeError(f"{value!r} is not a whole number above 0")
    return int(value)


def rule_names(values: Sequence[str], rules: Sequence[str], option: str) -> frozenset[str]:
    """The rules named by an option that may be repeated and take several names joined by commas."""
    names = [name.strip() for value in values for name in value.split(",")]
    for name in names:
        if name not in rules:
            raise CallError(f"{option}: unknown rule {name!r}{nearest(name, rules)}")
    return frozenset(names)


def add_file_options(parser: Parser) -> None:
    """PATHS and the options that say how files are found and read."""
    parser.add_argument(
        "paths", nargs="*", metavar="PATHS", help="files and directories, - for standard input (default: .)"
    )
    parser.add_argument(
        "--as", dest="name", metavar="NAME", help="name of standard input in the report (default: <stdin>)"
    )
    parser.add_argument(
        "--target",
        metavar="VERSION",
        help="Python version whose re is meant, 3.10 to 3.13 (default: the lowest"
        " that requires-python in pyproject.toml allows, else the running one)",
    )
    parser.add_argument(
        "--config",
        metavar="FILE",
        help="configuration (default: the nearest pyproject.toml with [tool.patlint])",
    )


def load_settings(options: argparse.Namespace, rules: Sequence[str]) -> Settings:
    """The configuration for the given paths, with --target applied; --as without - is refused."""
    from dataclasses import replace

    from patlint.config import load
    from patlint.target import target_named, unknown_target

    if not options.paths:
        options.paths = ["."]
    if options.name is not None and "-" not in options.paths:
        raise CallError("--as names standard input, but - is not among the paths")
    first = options.paths[0]
    if first == "-":
        first = os.path.dirname(options.name or "") or "."
    settings = load(rules, start=first, config=options.config)
    if options.target is not None:
        target = target_named(options.target)
        if target is None:
            raise CallError(f"--target: {unknown_target(options.target)}")
        settings = replace(settings, target=target)
    return settings
