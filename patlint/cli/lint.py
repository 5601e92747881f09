"""`patlint lint`: findings in files, as text or JSON."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from patlint.cli.arguments import (
    CallError,
    Parser,
    add_file_options,
    count,
    load_settings,
    one_of,
    rule_names,
)
from patlint.cli.screen import output, progress_line, say, style

if TYPE_CHECKING:
    from patlint.config import FailOn
    from patlint.run import RunResult


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
        type=one_of("text", "json"),
        default="text",
        metavar="FORMAT",
        help="text or json (default: text)",
    )
    made.add_argument("--output", metavar="FILE", help="write the report there (default: standard output)")
    made.add_argument(
        "--fail-on",
        type=one_of("error", "warning", "note", "never"),
        metavar="LEVEL",
        help="lowest level that makes the exit status 1: error, warning, note or never (default: warning)",
    )
    made.add_argument(
        "--only",
        action="append",
        default=[],
        metavar="RULE",
        help="use this rule alone; may be repeated (default: all rules)",
    )
    made.add_argument(
        "--skip",
        action="append",
        default=[],
        metavar="RULE",
        help="leave this rule out; may be repeated (default: none)",
    )
    made.add_argument(
        "--jobs",
        type=count,
        metavar="N",
        help="processes (default: as many as there are cores, one for a few files)",
    )
    made.add_argument(
        "--no-cache", action="store_true", help="neither read nor write .patlint-cache (default: both)"
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
    from patlint.rules.registry import NAMES

    settings = load_settings(options, NAMES)
    if options.only:
        settings = replace(settings, only=rule_names(options.only, NAMES, "--only"))
    if options.skip:
        settings = replace(settings, skip=settings.skip | rule_names(options.skip, NAMES, "--skip"))
    if settings.only and settings.only <= settings.skip:
        raise CallError("no rule is left on: each rule that is asked for is left out as well")
    if options.fail_on:
        settings = replace(settings, fail_on=options.fail_on)
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
    with output(options.output) as write:
        if options.format == "json":
            from patlint.report.json import lint_report

            write(lint_report(result, settings.target))
        else:
            from patlint.report.text import lint_report as text_report

            for line in text_report(result, style(to_file=options.output is not None), options.verbose):
                write(line + "\n")
    return exit_status(result, settings.fail_on)


def exit_status(result: RunResult, fail_on: FailOn) -> int:
    """2 where a file could not be linted, 1 where a finding is at or above `fail_on`, else 0."""
    from patlint.rules.finding import LEVELS

    if result.problems:
        return 2
    failing = () if fail_on == "never" else LEVELS[: LEVELS.index(fail_on) + 1]
    return int(any(finding.level in failing for finding in result.findings))
