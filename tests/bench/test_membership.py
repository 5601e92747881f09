"""The short form of `tests.bench.membership`: on the patterns of the demo code."""

from __future__ import annotations

from pathlib import Path

from tests.bench.membership import check
from tests.bench.slowest import sites_of

FIXTURES = Path(__file__).parents[2] / "fixtures"


def test_re_agrees_on_texts_near_the_languages_of_the_demo() -> None:
    sites = sites_of(sorted(FIXTURES.rglob("*.py")))
    patterns = list(dict.fromkeys((site.pattern, site.flags) for site in sites))
    counted, wrong = check(patterns, 6, 1)
    assert not wrong
    assert counted["patterns"] >= 60 and counted["limits"] <= 1 and counted["inexact"] <= 5
    assert counted["texts"] > 3_000 and counted["texts"] / 10 < counted["taken"] < counted["texts"] * 0.9
