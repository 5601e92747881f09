"""What the commands share in reading their arguments: one-line errors that name the nearest right word."""

from __future__ import annotations

import argparse
import os
import textwrap
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, NoReturn

from patlint.cli.screen import CallError as CallError
from patlint.nearest import nearest

if TYPE_CHECKING:
    from patlint.config import Settings


class Parser(argparse.ArgumentParser):
    """A parser that raises CallError; no abbreviations, so that a new option never changes an old call."""

    def __init__(self, command: str, usage: str, description: str, epilog: str | None = None) -> None:
        super().__init__(
            prog=f"patlint {command}",
            usage=f"patlint {command} {usage}",
            description=fitted(description),
            epilog=None if epilog is None else fitted(epilog),
            allow_abbrev=False,
            add_help=False,
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )
        self._positionals.title = "arguments"
        self._optionals.title = "options"
        self.add_argument("-h", "--help", action="help", help="show this text and nothing else")

    def print_help(self, file: object = None) -> None:
        from patlint.cli.screen import output

        with output() as write:
            write(self.format_help())

    def error(self, message: str) -> NoReturn:
        # argparse counts PATHS, of which there may be none, among what is missing beside something else.
        message = message.replace(", PATHS", "")
        raise CallError(f"{message.removeprefix('argument ')}; see {self.prog} --help")

    def read(self, given: Sequence[str]) -> argparse.Namespace:
        """The arguments; an option that does not exist is told with the nearest one."""
        # Options may stand among the paths; after `--` nothing is one.
        parse = self.parse_known_args if "--" in given else self.parse_known_intermixed_args
        for word in given[: given.index("--")] if "--" in given else given:
            if word.startswith("--"):
                self._check_option(word)
        known, rest = parse(list(given))
        for word in rest:
            if word.startswith("-") and word != "-":
                self._check_option(word)
        if rest:
            raise CallError(f"one argument too many: {rest[0]!r}; see {self.prog} --help")
        return known

    def _check_option(self, word: str) -> None:
        name = word.partition("=")[0]
        options = [each for each in self._option_string_actions if each.startswith("--")]
        if name not in options:
            raise CallError(f"unknown option {name!r}{nearest(name, options) or f'; see {self.prog} --help'}")


def fitted(text: str) -> str:
    """`text` with the paragraphs that have a line of more than 80 characters filled anew."""
    return "\n\n".join(
        textwrap.fill(each, 80) if max(map(len, each.split("\n"))) > 80 else each
        for each in text.split("\n\n")
    )


@dataclass(frozen=True, slots=True)
class OneOf:
    """A type for one of `words`."""

    words: tuple[str, ...]

    def __call__(self, value: str) -> str:
        if value not in self.words:
            raise argparse.ArgumentTypeError(
                f"{value!r} is not one of {', '.join(self.words)}{nearest(value, self.words)}"
            )
        return value


def one_of(*words: str) -> OneOf:
    """A type for one of `words`."""
    return OneOf(words)


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


def add_file_options(parser: Parser, stdin: bool = True) -> None:
    """PATHS and the options that say how files are found and read."""
    also = ", - for standard input" if stdin else ""
    parser.add_argument("paths", nargs="*", metavar="PATHS", help=f"files and directories{also} (default: .)")
    if stdin:
        parser.add_argument(
            "--as",
            dest="name",
            metavar="NAME",
            help="name of standard input in the report (default: <stdin>)",
        )
    else:
        parser.set_defaults(name=None)
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


def add_run_options(parser: Parser, ledger: str) -> None:
    """The options of the commands that ask the rules; `ledger` is what `--ledger` is for."""
    parser.add_argument(
        "--only",
        action="append",
        default=[],
        metavar="RULE",
        help="use this rule alone; may be repeated (default: all that are on)",
    )
    parser.add_argument(
        "--skip",
        action="append",
        default=[],
        metavar="RULE",
        help="leave this rule out; may be repeated (default: none)",
    )
    parser.add_argument(
        "--ledger",
        metavar="FILE",
        help=ledger,
    )
    parser.add_argument(
        "--jobs",
        type=count,
        metavar="N",
        help="processes (default: as many as there are cores, one for a few files)",
    )
    parser.add_argument(
        "--no-cache", action="store_true", help="neither read nor write .patlint-cache (default: both)"
    )


def run_settings(options: argparse.Namespace) -> Settings:
    """`load_settings` with --only and --skip applied."""
    from dataclasses import replace

    from patlint.rules.registry import NAMES

    settings = load_settings(options, NAMES)
    if options.only:
        settings = replace(settings, only=rule_names(options.only, NAMES, "--only"))
    if options.skip:
        settings = replace(settings, skip=settings.skip | rule_names(options.skip, NAMES, "--skip"))
    if settings.only and settings.only <= settings.skip:
        raise CallError("no rule is left on: each rule that is asked for is left out as well")
    return settings


def load_settings(options: argparse.Namespace, rules: Sequence[str]) -> Settings:
    """The configuration for the given paths, with --target applied; --as without - is refused."""
    from dataclasses import replace

    from patlint.config import ConfigError, load
    from patlint.target import target_named, unknown_target

    if not options.paths:
        options.paths = ["."]
    if options.name is not None and "-" not in options.paths:
        raise CallError("--as names standard input, but - is not among the paths")
    first = options.paths[0]
    if first == "-":
        first = os.path.dirname(options.name or "") or "."
    try:
        settings = load(rules, start=first, config=options.config)
    except ConfigError as error:
        raise CallError(str(error)) from None
    if options.target is not None:
        target = target_named(options.target)
        if target is None:
            raise CallError(f"--target: {unknown_target(options.target)}")
        settings = replace(settings, target=target)
    return settings
