"""CPython's own table of patterns, `test.re_tests`, through the matcher and the automata.

Source: the standard library's `test` package (not every installation has it). Each row is pattern, text, outcome
and, where it matches, an expression with its expected value; `re` itself is asked for the spans.
"""

from __future__ import annotations

import pytest

from patlint.limits import LimitReached
from patlint.machine.determinise import language
from patlint.syntax.scanner import PatternError
from tests.corpus.cpython import compiled, known_fault, spans_of
from tests.machine.support import MODES, matcher_of, nfa_of

table = pytest.importorskip("test.re_tests", reason="this Python has no test package")


def test_every_row() -> None:
    refused = run = automata = 0
    for row in table.tests:
        pattern, text, outcome = row[:3]
        right = compiled(pattern)
        if right is None:
            assert outcome == table.SYNTAX_ERROR, pattern
            with pytest.raises(PatternError):
                matcher_of(pattern)
            refused += 1
            continue
        if outcome == table.SYNTAX_ERROR or known_fault(pattern):
            continue
        ours = matcher_of(pattern)
        for mode in MODES:
            assert ours.run(text, mode).spans == spans_of(getattr(right, mode)(text)), (pattern, text, mode)
        assert (ours.run(text, "search").spans is not None) == (outcome == table.SUCCEED)
        run += 1
        try:
            nfa = nfa_of(pattern)
            for mode in MODES:
                accepted = language(nfa, mode).accepts(text)
                truth = getattr(right, mode)(text) is not None
                assert accepted == truth or accepted and nfa.inexact, (pattern, text, mode)
        except LimitReached:
            continue
        automata += 1
    assert refused > 20 and run > 350 and automata > 340


def test_the_benchmarks_of_the_table() -> None:
    for pattern, text in table.benchmarks:
        right = compiled(pattern)
        assert right is not None
        assert matcher_of(pattern).run(text, "search").spans == spans_of(right.search(text))
    assert len(table.benchmarks) >= 10
