"""Findings of one rule for patterns made up on the spot, with uses as the source side would give them."""

from __future__ import annotations

from patlint.limits import DEFAULT_LIMITS
from patlint.rules import RULES, check_site
from patlint.rules.finding import Finding
from patlint.source.sites import Function, LooksAt, Piece, Place, Site, Use

HERE = Place(1, 1, 1, 2)
ALL_RULES = frozenset(rule.name for rule in RULES)


def site(
    pattern: str | bytes, function: Function = "match", looks_at: LooksAt = "truth", flags: int = 0
) -> Site:
    """One call `re.FUNCTION(pattern, text)` with all of its uses seen."""
    use = Use(function, looks_at, HERE)
    pieces = (Piece(0, HERE, True),)
    return Site("made.py", pattern, flags, function, HERE, 1, pieces, (use,), True)


def findings(made: Site, rule: str | None = None) -> list[Finding]:
    found = check_site(made, None, DEFAULT_LIMITS, ALL_RULES).findings
    return [finding for finding in found if rule is None or finding.rule == rule]
