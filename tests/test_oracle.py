"""The short form of the oracle: fixed seeds, every construct, every case ever found, every fault on purpose."""

from __future__ import annotations

import ast
import re
import sys

import pytest

from tests.machine.support import matcher_of
from tests.oracle.__main__ import main, report
from tests.oracle.breaks import BREAKS, broken
from tests.oracle.campaign import Plan, run
from tests.oracle.cases import CASES, Case
from tests.oracle.compare import Mismatch, Tally
from tests.oracle.faults import FAULTS, search_fault
from tests.oracle.patterns import CONSTRUCTS, NEW_IN_3_11
from tests.oracle.shrink import again, shrunk

HERE = [name for name in CONSTRUCTS if sys.version_info >= (3, 11) or name not in NEW_IN_3_11]
FILES = 8


def rows(tally: Tally) -> list[str]:
    return [mismatch.row() for mismatch in tally.mismatches]


def test_all_constructs_together() -> None:
    tally = run(Plan(seed=1, trials=60_000, files=FILES))
    assert rows(tally) == []
    assert (
        tally.trials >= 60_000
        and tally.compared > 120
        and tally.refused > (10 if sys.version_info < (3, 11) else 15)
    )
    assert tally.exact > 0.8 * tally.compared
    least = {"match": 60_000, "fullmatch": 60_000, "search": 60_000, "span": 45_000, "groups": 6_000}
    least |= {"pair": 50_000, "scan": 400, "parse": 400, "witness": 200}
    assert {kind: tally.comparisons[kind] for kind in least if tally.comparisons[kind] < least[kind]} == {}
    assert set(tally.relations) >= {"equal", "within", "covers", "overlaps", "disjoint"}
    assert set(tally.inexact) <= {"back-reference", "conditional", "locale"}
    assert sum(tally.faults.values()) < tally.compared // 5


@pytest.mark.parametrize("name", HERE)
def test_each_construct_alone(name: str) -> None:
    tally = run(Plan(seed=2, trials=5_000, only=frozenset((name,)), files=FILES))
    assert rows(tally) == []
    assert tally.trials >= 5_000 and tally.compared > 10


def test_spans_claimed_equal() -> None:
    tally = run(Plan(seed=4, trials=40_000, only=frozenset(("anchors", "groups"))))
    assert rows(tally) == []
    assert tally.relations["same spans"] >= 3 and tally.comparisons["alike"] >= 90


@pytest.mark.parametrize(("kind", "pattern", "flags", "text", "other", "cause"), CASES)
def test_cases_found_before(kind, pattern, flags, text, other, cause) -> None:  # type: ignore[no-untyped-def]
    tally = Tally()
    assert again(kind, pattern, flags, text, other, tally) is None
    if sys.version_info < (3, 11) and "(?>" in str(pattern):
        return
    assert sum(tally.comparisons.values()) > 0
    name = cause.removeprefix("break ")
    if name != cause:
        with broken(name):
            assert again(kind, pattern, flags, text, other) is not None
        assert again(kind, pattern, flags, text, other) is None


@pytest.mark.parametrize(("pattern", "flags", "text"), FAULTS)
def test_faults_of_search_still_are(pattern: str, flags: int, text: str) -> None:
    """So that `search_fault` excuses no more than it must."""
    right = re.compile(pattern, flags)
    assert search_fault(pattern, flags)
    assert right.match(text) is not None
    if sys.version_info < (3, 14):
        assert right.search(text) is None
    assert matcher_of(pattern, flags).run(text, "search").span == right.match(text).span()


@pytest.mark.parametrize(
    "pattern", [r"(?a:x\W)", r"x(?a:\W)", r"(?a:\W)*", r"(?a:\W|xy)", r"(?u:\W)", r"\W", "(?a:[^b])"]
)
def test_search_is_trusted_elsewhere(pattern: str) -> None:
    assert not search_fault(pattern)
    for text in ("\xe9", "x\xe9", "\xe9b", "xy"):
        found = re.search(pattern, text)
        assert matcher_of(pattern).run(text, "search").span == (found and found.span())


# Fault, constructs among which it hides, and kinds of mismatch of which one must be the first.
FOUND_BY = (
    ("dollar", ("anchors",), ("match", "fullmatch", "search", "span", "groups")),
    ("dollar", (), ("match", "fullmatch", "search", "span", "groups")),
    ("empty-loop", ("empty",), ("span", "scan")),
    ("empty-loop", (), ("span", "scan")),
    ("kin", ("case",), ("match", "fullmatch", "search", "span", "groups")),
    ("kin", (), ("match", "fullmatch", "search", "span", "groups")),
    ("behind", ("behind", "boundaries"), ("match", "fullmatch", "search", "span")),
    ("veto", ("lazy",), ("span", "scan")),
    ("lazy", ("lazy",), ("span", "groups")),
    ("back-fold", ("backs", "case"), ("groups",)),
    ("line-start", ("anchors",), ("match", "fullmatch", "search", "span", "scan")),
    ("relation", ("sets",), ("pair",)),
    ("position", ("groups",), ("parse",)),
)


@pytest.mark.parametrize(("name", "only", "kinds"), FOUND_BY)
def test_faults_on_purpose_are_found(name: str, only: tuple[str, ...], kinds: tuple[str, ...]) -> None:
    with broken(name):
        tally = run(Plan(seed=5, trials=150_000, only=frozenset(only), files=FILES, most=1, raw=True))
    assert tally.mismatches and {each.kind for each in tally.mismatches} & set(kinds), rows(tally)


def test_every_fault_on_purpose_is_asked_for() -> None:
    assert {name for name, _, _ in FOUND_BY} == set(BREAKS)
    assert {cause[6:] for *_, cause in CASES if cause.startswith("break ")} == set(BREAKS)


def test_a_mismatch_is_made_small_and_printed_as_a_row() -> None:
    with broken("dollar"):
        found = again("match", r"(?:x|(b(?=a)|a{1,2})+?)*(?m:^)?a$(?:\n|c)??", 0, "aaa\n")
        assert found is not None
        small = shrunk(found)
    assert (small.pattern, small.text) == ("a$", "a\n")
    row: Case = ast.literal_eval(small.row().split("  # ")[0].rstrip(","))
    assert row == ("match", "a$", 0, "a\n", None, "cause?")
    both = Mismatch("pair", b"\xff", 2, b"\n", 1, 2, b"")
    assert ast.literal_eval(both.row().split("  # ")[0].rstrip(",")) == (
        *("pair", b"\xff", 2, b"\n", b""),
        "cause?",
    )


def test_the_command(capsys: pytest.CaptureFixture[str]) -> None:
    call = ["--seed", "6", "--trials", "20000", "--only", "anchors"]
    assert main(call) == 0
    said = capsys.readouterr().out.splitlines()
    assert [line.split(":")[0] for line in said] == [line.split(":")[0] for line in report(Tally(), 1.0)]
    assert said[-1] == "mismatches: 0"
    assert main([*call, "--break", "dollar", "--most", "1", "--raw"]) == 1
    out = capsys.readouterr().out
    assert out.startswith("('") and "\nmismatches: " in out and "mismatches: 0" not in out


def test_the_same_seed_makes_the_same_run() -> None:
    plan = Plan(seed=7, trials=4_000, files=FILES)
    first, second = run(plan), run(plan)
    assert first == second and first.patterns > 5
