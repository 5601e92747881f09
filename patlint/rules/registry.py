"""All rules in the order in which they are run and listed."""

from __future__ import annotations

from patlint.rules import (
    empty_language,
    equal_siblings,
    exponential_ambiguity,
    invalid_pattern,
    nullable,
    polynomial_ambiguity,
    shorter_equivalent,
    stale_waiver,
    straddling_range,
    swallowed_escape,
    unreachable_part,
    vacuous_test,
)
from patlint.rules.finding import Rule

RULES: tuple[Rule, ...] = (
    invalid_pattern.RULE,
    empty_language.RULE,
    vacuous_test.RULE,
    nullable.RULE,
    equal_siblings.RULE,
    unreachable_part.RULE,
    exponential_ambiguity.RULE,
    polynomial_ambiguity.RULE,
    straddling_range.RULE,
    swallowed_escape.RULE,
    shorter_equivalent.RULE,
    stale_waiver.RULE,
)
BY_NAME: dict[str, Rule] = {rule.name: rule for rule in RULES}

_EVERYTHING_ELSE = frozenset(BY_NAME)
SILENCES: dict[str, frozenset[str]] = {
    "invalid-pattern": _EVERYTHING_ELSE,
    "empty-language": _EVERYTHING_ELSE - {"exponential-ambiguity", "straddling-range", "swallowed-escape"},
    "vacuous-test": frozenset({"nullable", "unreachable-part", "shorter-equivalent"}),
    "equal-siblings": frozenset({"shorter-equivalent"}),
    "unreachable-part": frozenset({"shorter-equivalent"}),
    "straddling-range": frozenset({"shorter-equivalent"}),
    "swallowed-escape": frozenset({"shorter-equivalent", "unreachable-part", "vacuous-test", "nullable"}),
    "exponential-ambiguity": frozenset({"polynomial-ambiguity"}),
    "nullable": frozenset(),
}
"""One cause, one finding: a finding of the rule on the left keeps those on the right quiet about its site."""
