"""The measurements of suggestions in a short form: nothing wrong, and not longer than they were."""

from __future__ import annotations

import re

from tests.bench.shorten import PLAIN, checked, lengthened, random_automata, round_trip, suggestions_of


def test_nothing_is_wrong_on_random_patterns() -> None:
    counts, wrong = checked(45, seed=5)
    assert wrong == []
    assert counts["groups"] > 80
    assert counts["language"] > 15
    assert counts["spans"] > 3
    assert counts["texts"] > 10_000


def test_shorter_than_the_weights_alone() -> None:
    rows = random_automata(4, 1, [(3, 2), (5, 2), (4, 3)])
    assert len(rows) == 3
    for states, letters, means in rows:
        assert all(means["search"] <= means[column] for column in ("weights", "bridges", "both")), (
            states,
            letters,
        )
        assert means["search"] < means["natural"], (states, letters)


def test_round_trips_come_back() -> None:
    tried, back, _ = round_trip(60, seed=2)
    assert tried == 60
    assert back >= 0.85 * tried


def test_longer_forms_are_longer_and_fair() -> None:
    import random

    generator = random.Random(1)
    made = [lengthened(pattern, generator) for pattern in PLAIN]
    done = [(short, long) for short, long in zip(PLAIN, made, strict=True) if long is not None]
    assert len(done) > 25
    for short, long in done:
        assert len(long) > len(short)
        re.compile(long)


def test_real_sites_are_checked() -> None:
    from patlint.source import find_patterns

    source = "import re\nre.match('(?:a|b)+c', input())\nre.search('[0-90-9]+x', input()).span()\n"
    times, counts, wrong = suggestions_of(list(find_patterns(source)))
    assert (len(times), wrong) == (2, [])
    assert counts["groups"] == 2
    assert counts["texts"] > 10
