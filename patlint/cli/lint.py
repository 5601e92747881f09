"""`patlint lint`: findings in files, as text, JSON or SARIF."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Final

from patlint.cli.arguments import (
    CallError,
    Parser,
    add_file_options,
    add_run_options,
    one_of,
    run_settings,
)
from patlint.cli.screen import output, progress_line, say, style

if TYPE_CHECKING:
    from patlint.config import FailOn, Settings
    from patlint.ledger import Ledger
    from patlint.run import RunResult

FORMATS: Final = ("text", "json", "sarif")


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser(
        "lint",
        "[OPTIONS] [PATHS ...]",
        "Find mistakes in the regular expressions of Python files.",
        "exit status: 0 nothing at or above --fail-on, 1 findings, 2 a wrong call or\n"
        "configuration, or a file that could not be read or parsed\n\n"
        "A comment `# patlint: waive RULE -- reason` on the pattern's line or the line\n"
        "above waives a finding.",
    )
    add_file_options(made)
    made.add_argument(
        "--format",
        type=one_of(*FORMATS),
        default="text",
        metavar="FORMAT",
        help="text, json or sarif (SARIF 2.1.0) (default: text)",
    )
    made.add_argument("--output", metavar="FILE", help="write the report there (default: standard output)")
    made.add_argument(
        "--fail-on",
        type=one_of("error", "warning", "note", "never"),
        metavar="LEVEL",
        help="lowest level that makes the exit status 1: error, warning, note or never (default: warning)",
    )
    add_run_options(made, "findings that are known and not told (default: the configuration's, else none)")
    made.add_argument(
        "--no-ledger",
        action="store_true",
        help="tell the known findings too (default: leave out what the configuration's ledger holds)",
    )
    made.add_argument(
        "--verbose",
        action="store_true",
        help="show every finding in full, and what is unresolved, inexact or undecided (default: only count it)",
    )
    return made


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    settings = run_settings(options)
    if options.fail_on:
        settings = replace(settings, fail_on=options.fail_on)
    if options.no_ledger and options.ledger:
        raise CallError("--ledger and --no-ledger exclude each other")
    named = None if options.no_ledger else ledger_path(options.ledger, settings)
    ledger = None if named is None else read_ledger(named)
    _check_output(options.output)
    from patlint.run import lint_paths

    with progress_line() as progress:
        result = lint_paths(
            options.paths,
            settings,
            jobs=options.jobs,
            use_cache=not options.no_cache,
            stdin_name=options.name,
            progress=progress,
        )
    for line in result.problems:
        say(line)
    if ledger is not None:
        result = beside_ledger(result, ledger, settings, options.paths)
    status = exit_status(result, settings.fail_on)
    with output(options.output) as write:
        if options.format == "json":
            from patlint.report.json import lint_report

            write(lint_report(result, settings.target))
        elif options.format == "sarif":
            write(_sarif(result, settings, status, options.verbose))
        else:
            from patlint.report.text import lint_report as text_report

            for line in text_report(result, style(to_file=options.output is not None), options.verbose):
                write(line + "\n")
    return status


def ledger_path(option: str | None, settings: Settings) -> str | None:
    """The ledger that is meant, as short as it can be told from here."""
    if option is not None or settings.ledger is None:
        return option
    full = os.path.abspath(settings.ledger)
    here = os.path.join(os.getcwd(), "")
    return full[len(here) :] if full.startswith(here) else full


def read_ledger(path: str) -> Ledger:
    """The ledger at `path`; a CallError says what is wrong with it."""
    from patlint.ledger import LedgerError, load

    try:
        return load(path)
    except LedgerError as error:
        missing = "" if os.path.lexists(path) else "; `patlint ledger write` makes one"
        raise CallError(f"{error}{missing}") from None


def beside_ledger(result: RunResult, ledger: Ledger, settings: Settings, paths: Sequence[str]) -> RunResult:
    """The run without the findings that are in the ledger."""
    from patlint.ledger import judge

    judged = judge(ledger, result.outcomes, paths, settings.asks)
    return replace(
        result, outcomes=judged.outcomes, ledger=ledger.path, known=len(judged.known), gone=judged.gone
    )


def exit_status(result: RunResult, fail_on: FailOn) -> int:
    """2 where a file could not be linted, 1 where a finding is at or above `fail_on`, else 0."""
    from patlint.rules.finding import LEVELS

    if result.problems:
        return 2
    failing = () if fail_on == "never" else LEVELS[: LEVELS.index(fail_on) + 1]
    return int(any(finding.level in failing for finding in result.findings))


def _check_output(path: str | None) -> None:
    """A report that cannot be written is better told before the work than after it."""
    if path is None:
        return
    folder = os.path.dirname(path) or "."
    if os.path.isdir(path):
        raise CallError(f"--output {path}: this is a directory")
    if not os.path.isdir(folder):
        raise CallError(f"--output {path}: there is no directory {folder}")


def _sarif(result: RunResult, settings: Settings, status: int, verbose: bool) -> str:
    from pathlib import Path

    from patlint.config import OFF_BY_DEFAULT, repository
    from patlint.report.sarif import lint_report
    from patlint.rules.registry import RULES

    root = repository(Path())
    return lint_report(
        result,
        settings.target,
        RULES,
        status,
        off=OFF_BY_DEFAULT,
        root="." if root is None else str(root),
        verbose=verbose,
    )
