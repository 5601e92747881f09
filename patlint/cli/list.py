"""`patlint list`: every pattern in the code, as text or JSON."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from patlint.cli.arguments import Parser, add_file_options, load_settings, one_of
from patlint.cli.screen import output, say

if TYPE_CHECKING:
    from patlint.inventory import Inventory, Listed


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser(
        "list",
        "[OPTIONS] [PATHS ...]",
        "List every pattern in Python files: place, pattern, flags, the modes in which it\n"
        "is used, and what the program looks at (truth, span, groups or unknown).",
        "exit status: 0, or 2 for a wrong call or configuration, or where a file could\n"
        "not be read or parsed",
    )
    add_file_options(made)
    made.add_argument(
        "--format",
        type=one_of("text", "json"),
        default="text",
        metavar="FORMAT",
        help="text or json (default: text)",
    )
    return made


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    from patlint.rules.registry import NAMES

    settings = load_settings(options, NAMES)
    from patlint.files import find_files, read_source
    from patlint.inventory import Inventory, inventory_of

    listed = find_files(options.paths, settings)
    inventories: list[Inventory] = []
    for path in listed.paths:
        name, data = read_source(path, options.name)
        if isinstance(data, str):
            inventories.append(Inventory(name, problems=(f"{name}: {data}",)))
        else:
            inventories.append(inventory_of(data, name, settings.target, settings.sinks, settings.root))
    problems = [*listed.problems, *(line for each in inventories for line in each.problems)]
    for line in problems:
        say(line)
    with output() as write:
        if options.format == "json":
            from patlint.report.json import list_report

            write(list_report(inventories))
        else:
            for each in inventories:
                for line in _lines(each):
                    write(line + "\n")
    return 2 if problems else 0


def _lines(inventory: Inventory) -> Iterator[str]:
    found = [(each.line, each.column, _line(each)) for each in inventory.patterns]
    found += [
        (each.line, each.column, f"{inventory.path}:{each.line}:{each.column}: unresolved: {each.reason}")
        for each in inventory.unresolved
    ]
    yield from (line for _, _, line in sorted(found))


def _line(listed: Listed) -> str:
    from patlint.report.show import pattern_expression

    words = [pattern_expression(listed.pattern)]
    words += listed.flags
    unused = "use not known" if "." in listed.function else "not used here"
    words.append(f"({'/'.join(listed.modes) or unused}, {listed.looks_at})")
    if "." in listed.function:
        words.append(f"for {listed.function}")
    return f"{listed.path}:{listed.line}:{listed.column}: {' '.join(words)}"
