"""Running the rules on one site, and on one family of sites."""

from __future__ import annotations

from dataclasses import dataclass

from patlint.limits import DEFAULT_SAVING, LimitReached, Limits, Saving
from patlint.rules.finding import Finding
from patlint.rules.kin import Kin
from patlint.rules.registry import RULES, SILENCES
from patlint.rules.subject import Subject
from patlint.source.sites import Family, Member, Site

Subjects = dict[int, Subject]
"""Subjects by the `id` of their sites, kept where a site is asked about more than once."""


@dataclass(frozen=True, slots=True)
class Checked:
    """`inexact`: reasons why the pattern's language is only a superset; `undecided`: limits that were reached."""

    findings: tuple[Finding, ...]
    inexact: tuple[str, ...]
    undecided: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class CheckedFamily:
    """Findings and the limits that were reached, each with the member that it is about."""

    findings: tuple[tuple[Member, Finding], ...]
    undecided: tuple[tuple[Member, str], ...]


def check_site(
    site: Site,
    target: tuple[int, int] | None,
    limits: Limits,
    enabled: frozenset[str],
    subjects: Subjects | None = None,
    saving: Saving = DEFAULT_SAVING,
) -> Checked:
    """What the `enabled` rules say of `site`. A limit silences the rule that meets it and no other.

    `subjects` keeps the subject for `check_family`; `saving` is the least that a shorter pattern has to save.
    """
    findings: list[Finding] = []
    undecided: dict[str, None] = {}
    try:
        subject = Subject(site, target, limits, saving)
    except LimitReached as reached:
        return Checked((), (), (reached.limit,))
    if subjects is not None:
        subjects[id(site)] = subject
    quiet: set[str] = set()
    order = sorted(RULES, key=lambda rule: rule.name not in _FIRST)
    for rule in order:
        if (
            rule.check is None
            or rule.name not in enabled
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
            if rule.name in _WAYS_OUT and any(each.suggestion is not None for each in found):
                quiet.add("shorter-equivalent")
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


def check_family(
    family: Family,
    target: tuple[int, int] | None,
    limits: Limits,
    enabled: frozenset[str],
    subjects: Subjects,
) -> CheckedFamily:
    """What the `enabled` rules say of `family`. A limit leaves open what is asked of one member, and of no other."""
    asked = [rule for rule in RULES if rule.check_family is not None and rule.name in enabled]
    if not asked:
        return CheckedFamily((), ())

    def subject_of(member: Member) -> Subject | None:
        key = id(member.site)
        if key not in subjects:
            try:
                subjects[key] = Subject(member.site, target, limits)
            except LimitReached:
                return None  # told where the site is checked
        return subjects[key]

    kin = Kin(family, subject_of, limits)
    findings: list[tuple[Member, Finding]] = []
    quiet: dict[int, frozenset[str]] = {}
    for rule in asked:
        assert rule.check_family is not None
        for number, finding in rule.check_family(kin):
            if rule.name not in quiet.get(number, ()):
                findings.append((family.members[number], finding))
                quiet[number] = quiet.get(number, frozenset()) | SILENCES.get(rule.name, frozenset())
    undecided = tuple((family.members[number], limit) for number, limit in sorted(kin.undecided.items()))
    return CheckedFamily(tuple(findings), undecided)


_WAYS_OUT = frozenset({"exponential-ambiguity", "polynomial-ambiguity"})
"""What one of these suggests is the one pattern to take, though a shorter one may be known."""
_FIRST = frozenset({"invalid-pattern", "swallowed-escape"})
"""Rules about what the author meant to write come before those about what was written."""
