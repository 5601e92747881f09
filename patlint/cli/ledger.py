"""`patlint ledger`: the file of known findings is written, or freed of what is gone."""

from __future__ import annotations

import os
from collections.abc import Sequence
from typing import Final

from patlint.cli.arguments import CallError, Parser, add_file_options, add_run_options, one_of, run_settings
from patlint.cli.lint import ledger_path, read_ledger
from patlint.cli.screen import output, progress_line, say

ACTIONS: Final = ("write", "prune")


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser(
        "ledger",
        "[OPTIONS] write|prune [PATHS ...]",
        "Keep a ledger: a file of known findings. `patlint lint --ledger FILE` leaves\n"
        "them out, so that only new ones are told. A finding is known by its rule, file,\n"
        "pattern and flags, not by its line.\n\n"
        "write  enter everything that is found now, and take out what is gone\n"
        "prune  take out what is gone, enter nothing",
        "Only files among PATHS are looked at; entries of others stay. With --only or\n"
        "--skip entries of the other rules stay.\n\n"
        "exit status: 0 written, 2 a wrong call or configuration, a file that could not\n"
        "be read or parsed (its entries stay), or a ledger that could not be written",
    )
    made.add_argument("action", type=one_of(*ACTIONS), metavar="write|prune", help="see above")
    add_file_options(made, stdin=False)
    add_run_options(made, "the ledger to keep (default: the configuration's)")
    return made


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    if "-" in options.paths:
        raise CallError("standard input has no place in a ledger")
    settings = run_settings(options)
    path = ledger_path(options.ledger, settings)
    if path is None:
        raise CallError("no ledger is named: give --ledger FILE, or the key ledger in the configuration")
    from patlint.ledger import Ledger, LedgerError, entered, judge, pruned, save
    from patlint.run import lint_paths

    new_file = options.action == "write" and not os.path.lexists(path)
    ledger = Ledger(path) if new_file else read_ledger(path)
    with progress_line() as progress:
        result = lint_paths(
            options.paths, settings, jobs=options.jobs, use_cache=not options.no_cache, progress=progress
        )
    for line in result.problems:
        say(line)
    if new_file and result.problems and not result.files:
        return 2  # nothing was read: a slip in a path does not make an empty ledger
    judged = judge(ledger, result.outcomes, options.paths, settings.asks)
    lines = entered(judged) if options.action == "write" else pruned(judged)
    try:
        save(path, lines)
    except LedgerError as error:
        raise CallError(str(error)) from None
    new = f"{len(judged.new)} new" if options.action == "write" else f"{len(judged.new)} not entered"
    with output() as write:
        write(f"{path}: {len(lines)} known; {new}, {len(judged.gone)} gone\n")
    return 2 if result.problems else 0
