"""Running the rules on one site."""

from __future__ import annotations

from dataclasses import dataclass

from patlint.limits import LimitReached, Limits
from patlint.rules.finding import Finding
from patlint.rules.registry import RULES, SILENCES
from patlint.rules.subject import Subject
from patlint.source.sites import Site


@dataclass(frozen=True, slots=True)
class Checked:
    """`inexact`: reasons why the pattern's language is only a superset; `undecided`: limits that were reached."""

    findings: tuple[Finding, ...]
    inexact: tuple[str, ...]
    undecided: tuple[str, ...]


def check_site(
    site: Site, target: tuple[int, int] | None, limits: Limits, enabled: frozenset[str]
) -> Checked:
    """What the `enabled` rules say of `site`. A limit silences the rule that meets it and no other."""
    findings: list[Finding] = []
    undecided: dict[str, None] = {}
    try:
        subject = Subject(site, target, limits)
    except LimitReached as reached:
        return Checked((), (), (reached.limit,))
    quiet: set[str] = set()
    order = sorted(RULES, key=lambda rule: rule.name not in _FIRST)
    for rule in order:
        if (
            rule.name not in enabled
            or rule.name in quiet
            or (subject.parsed is None and rule.name != "invalid-pattern")
        ):
            continue
        try:
            found = list(rule.check(subject))
        except LimitReached as reached:
            undecided[reached.limit] = None
            continue
        if found:
            quiet |= SILENCES.get(rule.name, frozenset())
            findings += found
    inexact: tuple[str, ...] = ()
    if subject.parsed is not None:
        for ambiguity in subject.ambiguities():
            if ambiguity.undecided is not None:
                undecided[ambiguity.undecided] = None
        try:
            inexact = tuple(dict.fromkeys(reason for reason, _ in subject.nfa.inexact))
        except LimitReached as reached:
            undecided[reached.limit] = None
    return Checked(tuple(findings), inexact, tuple(undecided))


_FIRST = frozenset({"invalid-pattern", "swallowed-escape"})
"""Rules about what the author meant to write come before those about what was written."""
