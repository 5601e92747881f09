"""The bench runs, on the demo code base; nothing is timed."""

from __future__ import annotations

from pathlib import Path

from tests.bench.measure import measure
from tests.bench.show import CONTEXT, for_reading, lines, sample, summary

FIXTURES = Path(__file__).resolve().parents[2] / "fixtures"


def test_bench_on_the_fixtures() -> None:
    files = sorted(FIXTURES.rglob("*.py"))
    measured = measure(files)
    numbers = summary(measured)
    assert numbers["files"] == len(files) and numbers["failures"] == [] and numbers["unreadable"] == []
    assert numbers["calls"] == numbers["resolved"] + 1 and list(numbers["unresolved"].values()) == [1]
    assert numbers["unique_patterns"] > 50 and len(numbers["slowest"]) == 10
    said = list(lines(numbers))
    assert len(said) > 20 and all(line == line.rstrip() for line in said)

    some = sample(measured.findings, 10, seed=3)
    assert len(some) == 10 == len(set(map(id, some)))
    assert some == sample(measured.findings, 10, seed=3) != sample(measured.findings, 10, seed=4)
    assert len({each.rule for each in some}) == min(10, len({each.rule for each in measured.findings}))
    for finding in some:
        shown = list(for_reading(finding))
        assert sum(line.startswith("   >") for line in shown) == finding.end_line - finding.line + 1
        assert len([line for line in shown if line[3:9].strip(" >").isdigit()]) >= CONTEXT


def test_one_rule_alone() -> None:
    measured = measure(sorted(FIXTURES.rglob("*.py")), frozenset({"nullable"}))
    assert {each.rule for each in measured.findings} == {"nullable"}
