"""CPython's own table `test.re_tests`: accepted or refused as it says."""

from __future__ import annotations

import pytest

from patlint.syntax.parser import PatternError, parse


def test_the_table_of_cpython() -> None:
    table = pytest.importorskip("test.re_tests")
    wrong = []
    refused = 0
    for row in table.tests:
        text, outcome = row[0], row[2]
        try:
            parse(text)
            accepted = True
        except PatternError:
            accepted = False
            refused += 1
        if accepted == (outcome == table.SYNTAX_ERROR):
            wrong.append(row)
    assert wrong == []
    assert len(table.tests) > 400 and refused > 10
