"""`patlint rules`: the rules in one line each, or the page of one with its example linted on the spot."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from patlint.cli.arguments import CallError, Parser
from patlint.cli.screen import output, style
from patlint.nearest import nearest

if TYPE_CHECKING:
    from patlint.report.text import Style
    from patlint.rules.finding import Rule


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser("rules", "[RULE]", "List the rules, or explain one with an example.")
    made.add_argument("rule", nargs="?", metavar="RULE", help="the rule to explain (default: list all)")
    return made


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    from patlint.rules.registry import RULES

    if options.rule is None:
        lines = list(_table(RULES))
    else:
        named = {rule.name: rule for rule in RULES}
        if options.rule not in named:
            raise CallError(f"unknown rule {options.rule!r}{nearest(options.rule, named)}")
        lines = list(_page(named[options.rule], style()))
    with output() as write:
        for line in lines:
            write(line + "\n")
    return 0


def _table(rules: Sequence[Rule]) -> Iterator[str]:
    from patlint.config import OFF_BY_DEFAULT

    widest = max((len(rule.name) for rule in rules), default=0)
    for rule in rules:
        level = f"{rule.level}, off" if rule.name in OFF_BY_DEFAULT else rule.level
        yield f"{rule.name:<{widest}}  {level:<9} {rule.summary}"


def _page(rule: Rule, style: Style) -> Iterator[str]:
    from patlint.config import Settings
    from patlint.report.text import finding_block
    from patlint.rules.registry import NAMES
    from patlint.run import lint_source
    from patlint.target import running_target

    asked = Settings(running_target(), NAMES, levels=((rule.name, rule.level),))  # on, even if off by default
    head = f"{rule.name} ({rule.level}): {rule.summary}"
    yield from textwrap.wrap(head, style.columns, subsequent_indent="  ", break_on_hyphens=False)
    yield ""
    yield from rule.page.strip().splitlines()
    for title, example in (("Found:", rule.wrong), ("Not found:", rule.right)):
        yield ""
        yield f"{title} {example.says}".rstrip()
        yield ""
        yield from textwrap.indent(example.source.strip("\n"), "    ").splitlines()
        found = lint_source(example.source, "example.py", settings=asked)
        for finding in [each for each in found if each.rule == rule.name]:
            yield ""
            yield from finding_block(finding, style)
