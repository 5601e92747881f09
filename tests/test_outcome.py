"""One file's outcome: levels, waivers, errors held to one pattern. The rules are stand-ins."""

from __future__ import annotations

from dataclasses import dataclass

import pytest

from patlint.config import PathSettings, Settings
from patlint.outcome import (
    Outcome,
    Remark,
    flag_names,
    from_values,
    internal,
    lint_bytes,
    lint_module,
    to_values,
)
from patlint.placed import PlacedFinding, RelatedPlace, read, write
from patlint.rules.finding import Finding, Related, SlowWitness, Suggestion, TextWitness
from patlint.source.sites import Module, Piece, Place, Site, Unresolved, Waiver

RULES = ("nullable", "empty-language", "overlapping-siblings", "stale-waiver")
SETTINGS = Settings((3, 12), RULES)


@dataclass(frozen=True)
class Checked:
    findings: tuple[Finding, ...] = ()
    inexact: tuple[str, ...] = ()
    undecided: tuple[str, ...] = ()


def site(line: int, pattern: str = "ab", statement: int | None = None, end_line: int | None = None) -> Site:
    place = Place(line, 5, end_line or line, 20)
    places = tuple(Place(line, 7 + at, line, 8 + at) for at in range(len(pattern)))
    return Site(
        path="dock.py",
        pattern=pattern,
        flags=0,
        function="compile",
        place=place,
        statement=statement or line,
        pieces=(Piece(0, place, False, places),),
        uses=(),
        uses_seen=False,
    )


def waiver(line: int, *rules: str, targets: tuple[int, ...] = ()) -> Waiver:
    return Waiver(Place(line, 30, line, 60), rules, "a reason", targets or (line,))


def module(sites: list[Site], waivers: list[Waiver] | None = None) -> Module:
    return Module("dock.py", tuple(sites), (), tuple(waivers or ()), ())


@pytest.fixture(autouse=True)
def one_finding_of_each_rule(monkeypatch: pytest.MonkeyPatch) -> None:
    """`check_site` finds each enabled rule but stale-waiver, in every pattern that holds its first letter."""

    def check(site: Site, target: object, limits: object, enabled: frozenset[str], *_: object) -> Checked:
        if site.pattern == "boom":
            raise ValueError("no\nluck")
        names = [name for name in RULES[:-1] if name in enabled and name[0] in str(site.pattern)]
        return Checked(
            tuple(Finding(name, "warning", (0, 1), f"a {name}") for name in names),
            ("a back-reference",) if "b" in str(site.pattern) else (),
            ("states",) if "u" in str(site.pattern) else (),
        )

    monkeypatch.setattr("patlint.rules.check_site", check, raising=False)


def rules_of(outcome: Outcome) -> list[tuple[int, str]]:
    return [(each.line, each.rule) for each in outcome.findings]


def test_findings_are_in_the_order_of_their_places() -> None:
    outcome = lint_module(module([site(9, "n"), site(2, "ne"), site(3, "b")]), SETTINGS)
    assert rules_of(outcome) == [(2, "empty-language"), (2, "nullable"), (9, "nullable")]
    assert outcome.patterns == 3
    assert outcome.inexact == (Remark(3, 5, "a back-reference"),)
    first = outcome.findings[0]
    assert (first.column, first.end_column, first.message) == (7, 8, "a empty-language")


def test_levels() -> None:
    settings = Settings((3, 12), RULES, levels=(("nullable", "error"), ("empty-language", "off")))
    outcome = lint_module(module([site(2, "ne")]), settings)
    assert [(each.rule, each.level) for each in outcome.findings] == [("nullable", "error")]


def test_levels_of_a_path() -> None:
    here = PathSettings("dock.py", (("nullable", "note"),), frozenset({"empty-language"}))
    settings = Settings((3, 12), RULES, per_path=(here, PathSettings("crane.py", (("nullable", "off"),))))
    outcome = lint_module(module([site(2, "ne")]), settings)
    assert [(each.rule, each.level) for each in outcome.findings] == [("nullable", "note")]


WAIVED = [
    ([site(2, "n")], [waiver(2, "nullable")], 1),
    ([site(2, "n")], [waiver(1, "nullable", targets=(1, 2))], 1),
    ([site(4, "n", statement=2)], [waiver(2, "nullable")], 1),
    ([site(2, "n", end_line=4)], [waiver(4, "nullable")], 1),
    ([site(2, "ne")], [waiver(2, "nullable", "empty-language")], 2),
    ([site(2, "n"), site(2, "n")], [waiver(2, "nullable")], 1),  # two readers of one text: told once
    ([site(2, "n")], [waiver(2, "nullable"), waiver(1, "nullable", targets=(1, 2))], 1),
]


@pytest.mark.parametrize(("sites", "waivers", "waived"), WAIVED)
def test_waived(sites: list[Site], waivers: list[Waiver], waived: int) -> None:
    outcome = lint_module(module(sites, waivers), SETTINGS)
    assert rules_of(outcome) == []
    assert outcome.waived == waived


STALE = [
    ([site(2, "e")], [waiver(2, "nullable")], "nothing here needs the waiver of nullable"),
    ([site(2, "n")], [waiver(3, "nullable")], "nothing here needs the waiver of nullable"),
    (
        [],
        [waiver(2, "nullable", "empty-language")],
        "nothing here needs the waiver of nullable and empty-language",
    ),
    (
        [site(2, "n")],
        [waiver(2, "nullable", "empty-language")],
        "nothing here needs the waiver of empty-language",
    ),
    (
        [site(2, "n")],
        [waiver(2, "nulable")],
        "this waiver names an unknown rule 'nulable'; the nearest is nullable",
    ),
    ([site(2, "n")], [waiver(2)], "this waiver names no rule"),
]


@pytest.mark.parametrize(("sites", "waivers", "message"), STALE)
def test_stale(sites: list[Site], waivers: list[Waiver], message: str) -> None:
    outcome = lint_module(module(sites, waivers), SETTINGS)
    stale = [each for each in outcome.findings if each.rule == "stale-waiver"]
    assert [each.message for each in stale] == [message]
    assert (stale[0].level, stale[0].column, stale[0].pattern) == ("warning", 30, None)


def test_not_stale_where_it_cannot_be_told() -> None:
    idle = [waiver(2, "nullable")]
    off = Settings((3, 12), RULES, skip=frozenset({"nullable"}))
    assert rules_of(lint_module(module([], idle), off)) == []
    unasked = Settings((3, 12), RULES, skip=frozenset({"stale-waiver"}))
    assert rules_of(lint_module(module([], idle), unasked)) == []
    assert rules_of(lint_module(module([site(2, "u")], idle), SETTINGS)) == []  # a limit was reached
    assert rules_of(lint_module(module([site(2, "boom")], idle), SETTINGS)) == []
    by_default = [waiver(2, "overlapping-siblings")]
    assert rules_of(lint_module(module([], by_default), SETTINGS)) == []
    assert rules_of(lint_module(module([], idle), SETTINGS)) == [(2, "stale-waiver")]


def test_a_waiver_may_waive_its_own_staleness() -> None:
    outcome = lint_module(module([], [waiver(2, "nullable", "stale-waiver")]), SETTINGS)
    assert (rules_of(outcome), outcome.waived) == ([], 1)


def test_an_error_of_ours_is_held_to_its_pattern() -> None:
    outcome = lint_module(module([site(2, "boom"), site(4, "n")]), SETTINGS)
    assert rules_of(outcome) == [(4, "nullable")]
    assert outcome.linted
    (problem,) = outcome.problems
    assert problem.startswith("dock.py:2:5: patlint itself failed here (ValueError at test_outcome.py:")
    assert problem.endswith(": no luck)")


def test_internal_without_a_trace() -> None:
    assert internal(ValueError()) == "patlint itself failed here (ValueError)"


def test_an_error_in_reading_is_one_line(monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: object) -> Module:
        raise RecursionError

    monkeypatch.setattr("patlint.source.read_module", broken, raising=False)
    outcome = lint_bytes(b"", "dock.py", SETTINGS)
    assert outcome == Outcome("dock.py", problems=("dock.py: nested too deeply to be read",), linted=False)


def test_unresolved_calls_are_remarks() -> None:
    given = Module("dock.py", (), (Unresolved("dock.py", Place(3, 4, 3, 9), "match", "a parameter"),), (), ())
    assert lint_module(given, SETTINGS).unresolved == (Remark(3, 4, "match: a parameter"),)


def test_flag_names() -> None:
    assert flag_names(2 | 32, 0) == ("IGNORECASE",)
    assert flag_names(2 | 32, 32) == ("IGNORECASE", "UNICODE")
    assert flag_names(8 | 16 | 64 | 256, 0) == ("MULTILINE", "DOTALL", "VERBOSE", "ASCII")


def test_related_spans_are_placed(monkeypatch: pytest.MonkeyPatch) -> None:
    def check(site: Site, *_: object) -> Checked:
        related = (
            Related("one", (1, 2)),
            Related("two", path="crane.py", place=Place(1, 2, 3, 4)),
            Related("three"),
        )
        return Checked((Finding("nullable", "warning", (0, 0), "m", related=related),))

    monkeypatch.setattr("patlint.rules.check_site", check)
    (finding,) = lint_module(module([site(2)]), SETTINGS).findings
    assert finding.related == (
        RelatedPlace("one", "dock.py", 2, 8, 2, 9, (1, 2)),
        RelatedPlace("two", "crane.py", 1, 2, 3, 4),
        RelatedPlace("three", "dock.py", 2, 5, 2, 20),
    )
    assert (finding.line, finding.column, finding.end_column) == (2, 7, 7)


def test_an_outcome_survives_being_written() -> None:
    findings = (
        PlacedFinding(
            "nullable",
            "note",
            "d\udcff.py",
            1,
            2,
            3,
            4,
            "m",
            b"\xff",
            ("DOTALL",),
            "search",
            SlowWitness(b"", b"a", b"\x00", 2, ((1, 2), (3, 4))),
            Suggestion(b"b", "spans"),
            (RelatedPlace("x", "y", 1, 2, 3, 4, (5, 6)), RelatedPlace("x", "y", 1, 2, 3, 4)),
            "proof",
            "evidence",
            "way out",
            (0, 1),
            ((1, 2),),
        ),
        PlacedFinding(
            "nullable", "note", "d.py", 1, 2, 3, 4, "m", "\ud800\udc00", witness=TextWitness("\ud83d\ude00")
        ),
    )
    outcome = Outcome(
        "d.py", findings, 3, 4, (Remark(1, 2, "r"),), (Remark(2, 3, "s"),), (Remark(4, 5, "t"),)
    )
    assert from_values(read(write(to_values(outcome)))) == outcome
