"""All rules in the order in which they are run and listed.

`NAMES` costs nothing to import; `RULES` and `BY_NAME` load the rules, and with them the machine, when they are
first asked for, so that a run that finds everything in the cache stays quick. A rule's module is named as the
rule is, with underscores.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from patlint.rules.finding import Rule

    RULES: tuple[Rule, ...]
    BY_NAME: dict[str, Rule]

NAMES: Final[tuple[str, ...]] = (
    "invalid-pattern",
    "empty-language",
    "vacuous-test",
    "nullable",
    "equal-siblings",
    "covered-sibling",
    "overlapping-siblings",
    "unreachable-part",
    "exponential-ambiguity",
    "polynomial-ambiguity",
    "straddling-range",
    "swallowed-escape",
    "lopsided-anchor",
    "final-newline",
    "shorter-equivalent",
    "stale-waiver",
)

_EVERYTHING_ELSE = frozenset(NAMES)
SILENCES: dict[str, frozenset[str]] = {
    "invalid-pattern": _EVERYTHING_ELSE,
    "empty-language": _EVERYTHING_ELSE - {"exponential-ambiguity", "straddling-range", "swallowed-escape"},
    "vacuous-test": frozenset({"nullable", "unreachable-part", "shorter-equivalent"}),
    "equal-siblings": frozenset({"shorter-equivalent"}),
    "covered-sibling": frozenset({"shorter-equivalent"}),
    "unreachable-part": frozenset({"shorter-equivalent"}),
    "straddling-range": frozenset({"shorter-equivalent"}),
    "swallowed-escape": frozenset({"shorter-equivalent", "unreachable-part", "vacuous-test", "nullable"}),
    "lopsided-anchor": frozenset({"shorter-equivalent"}),
    "exponential-ambiguity": frozenset({"polynomial-ambiguity"}),
    "nullable": frozenset(),
}
"""One cause, one finding: a finding of the rule on the left keeps those on the right quiet about its site."""


def __getattr__(name: str) -> object:
    if name not in ("RULES", "BY_NAME"):
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    rules: tuple[Rule, ...] = tuple(
        import_module(f"patlint.rules.{each.replace('-', '_')}").RULE for each in NAMES
    )
    globals().update(RULES=rules, BY_NAME={rule.name: rule for rule in rules})
    return globals()[name]
