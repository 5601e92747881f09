"""`patlint mend`: proven suggestions applied to files, as a diff or written."""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from patlint.cli.arguments import CallError, Parser, add_file_options, load_settings, rule_names
from patlint.cli.screen import output, progress_line, say

if TYPE_CHECKING:
    from patlint.config import Settings
    from patlint.mend import Mended


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser(
        "mend",
        "[OPTIONS] [PATHS ...]",
        "Put what is suggested and proven in the place of patterns: shorter equivalents, and\n"
        "such that match in less time. Shows a unified diff and changes nothing, unless\n"
        "--write is given. Only string literals are edited.",
        "exit status: 0 nothing to mend, or written; 1 a diff was shown; 2 a wrong call or\n"
        "configuration, or a file that could not be read, parsed or written\n\n"
        "Each file is read again after it was written, and put back where what was proven\n"
        "does not hold there. Standard input is mended to standard output with --write.",
    )
    add_file_options(made)
    made.add_argument("--write", action="store_true", help="change the files (default: show a diff)")
    made.add_argument(
        "--only",
        action="append",
        default=[],
        metavar="RULE",
        help="apply what this rule suggests alone; may be repeated (default: all rules)",
    )
    return made


@dataclass(slots=True)
class _Count:
    """What the line at the end says."""

    files: int = 0
    patterns: int = 0
    saved: int = 0
    left: int = 0
    errors: int = 0


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    from patlint.rules.registry import NAMES

    settings = load_settings(options, NAMES)
    if options.only:
        settings = replace(settings, only=rule_names(options.only, NAMES, "--only"))
    if options.write and "-" in options.paths and len(options.paths) > 1:
        raise CallError("--write: standard input is mended to standard output, by itself alone")
    count = _Count()
    with output() as write:
        for each in _mended(options.paths, options.name, settings, count):
            for line in each.problems:
                count.errors += 1
                say(line)
            for left in each.left:
                count.left += 1
                say(f"{each.path}:{left.line}:{left.column}: left as it was: {left.reason}")
            if options.write and options.paths == ["-"]:
                _give(each.data)
            elif options.write and each.changed and not _write(each, settings):
                count.errors += 1
                continue
            if not each.changed:
                continue
            if not options.write:
                for line in _diff(each):
                    write(line)
            count.files += 1
            count.patterns += len(each.claims)
            count.saved += len(each.old) - len(each.data)
    say(_summary(count, options.write))
    if count.errors:
        return 2
    return int(count.files > 0 and not options.write)


def _mended(paths: Sequence[str], name: str | None, settings: Settings, count: _Count) -> Iterator[Mended]:
    """Every file with something to say, in the order in which they were found."""
    from patlint.files import STDIN, read_source
    from patlint.mend import Mended, mended
    from patlint.run import lint_paths

    files = [path for path in paths if path != STDIN]
    if len(files) < len(paths):
        path, data = read_source(STDIN, name)
        if isinstance(data, str):
            yield Mended(path, b"", b"", problems=(f"{path}: {data}",))
        else:
            yield mended(data, path, settings)
    if not files:
        return
    with progress_line() as progress:
        result = lint_paths(files, settings, progress=progress)
    for line in result.problems:
        count.errors += 1
        say(line)
    for outcome in result.outcomes:
        if any(finding.suggestion is not None for finding in outcome.findings):
            path, data = read_source(outcome.path, None)
            if isinstance(data, str):
                yield Mended(path, b"", b"", problems=(f"{path}: {data}",))
            else:
                made = mended(data, path, settings)
                yield replace(made, problems=tuple(p for p in made.problems if p not in result.problems))


def _write(made: Mended, settings: Settings) -> bool:
    """Write a file and look at it again; False where it is as it was before."""
    from patlint.files import read_file
    from patlint.mend import unproven
    from patlint.rewrite.replace import NotReplaced, replace_file

    try:
        replace_file(made.path, made.old, made.data)
        found = read_file(made.path)
        if found == made.data:
            reason = unproven(made.old, found, made.path, made.claims, settings)
            if reason is None:
                return True
            replace_file(made.path, made.data, made.old)
        else:
            reason = "the file changed while it was looked at again"
        say(f"{made.path}: not mended: {reason}")
    except NotReplaced as error:
        say(f"{made.path}: {error}")
    return False


def _give(data: bytes) -> None:
    sys.stdout.flush()
    sys.stdout.buffer.write(data)


def _diff(made: Mended) -> Iterator[str]:
    from difflib import unified_diff

    from patlint.source.decode import decode, split_lines

    old, new = (split_lines(decode(data, made.path).text) for data in (made.old, made.data))
    for line in unified_diff(old, new, made.path, made.path):
        yield line if line.endswith("\n") else line + "\n\\ No newline at end of file\n"


def _summary(count: _Count, written: bool) -> str:
    if not count.files:
        said = "nothing mended" if count.left or count.errors else "nothing to mend"
    else:
        patterns = f"{count.patterns} pattern{'s' * (count.patterns != 1)}"
        files = f"{count.files} file{'s' * (count.files != 1)}"
        said = f"{patterns} in {files} {'mended' if written else 'to mend'}, {_saved(count.saved)}"
    return f"{said}; {count.left} left as they were, {count.errors} errors"


def _saved(size: int) -> str:
    """What the files lose, in words."""
    if not size:
        return "no longer and no shorter"
    return f"{abs(size)} byte{'s' * (abs(size) != 1)} {'shorter' if size > 0 else 'longer'}"
