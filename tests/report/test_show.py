"""Texts as Python expressions, and patterns as columns."""

from __future__ import annotations

import ast
import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from patlint.report.show import cells, expression, pattern_expression, width, witness_expression
from patlint.rules.finding import SlowWitness, TextWitness

EXPRESSIONS = [
    ("", "''"),
    ("abc", "'abc'"),
    ("a" * 11, "'aaaaaaaaaaa'"),
    ("a" * 12, "'a' * 12"),
    ("a" * 30 + "!", "'a' * 30 + '!'"),
    ("<" + "ab" * 2 + "\n" * 40 + ">", "'<abab' + '\\n' * 40 + '>'"),
    ("\ud800\udc00", "'\\ud800\\udc00'"),
    ("it's", '"it\'s"'),
    (b"\xff" * 20, "b'\\xff' * 20"),
    (b"", "b''"),
]


@pytest.mark.parametrize(("text", "shown"), EXPRESSIONS)
def test_expression(text: str | bytes, shown: str) -> None:
    assert expression(text) == shown


@given(st.one_of(st.text(max_size=20), st.binary(max_size=20)), st.integers(0, 40))
def test_an_expression_gives_the_text(text: str | bytes, times: int) -> None:
    whole = text + text[:1] * times + text
    shown = expression(whole)
    assert shown.isascii()
    assert eval(shown) == whole  # nothing but literals, `*` and `+`
    literal = pattern_expression(whole)
    assert literal.isascii()
    assert ast.literal_eval(literal) == whole


@given(st.text(alphabet="\\'\"a\n", max_size=8))
def test_a_pattern_expression_gives_the_pattern(text: str) -> None:
    assert ast.literal_eval(pattern_expression(text)) == text
    assert ast.literal_eval(pattern_expression(text.encode())) == text.encode()


def test_pattern_expression_is_raw_where_that_helps() -> None:
    assert pattern_expression(r"\d+") == r"r'\d+'"
    assert pattern_expression(r"\d'") == '''r"\\d'"'''
    assert pattern_expression("\\d'\"") == """'\\\\d\\'"'"""
    assert pattern_expression("a\\\\") == r"r'a\\'"
    assert pattern_expression("abc") == "'abc'"


SLOW = [
    (SlowWitness("", "a", "!", "exponential"), "'a' * 30 + '!'"),
    (SlowWitness("<", "ab", "", 2, ((10, 5), (40, 90))), "'<' + 'ab' * 10000"),
    (SlowWitness(b"", b"a", b"!", 3), "b'a' * 1000 + b'!'"),
    (SlowWitness("", "a", "!", 7), "'a' * 150 + '!'"),
    (
        SlowWitness("", "a", "!", 3, (), (("x", "b"), ("", "c"))),
        "'a' * 1000 + 'x' + 'b' * 1000 + 'c' * 1000 + '!'",
    ),
    (SlowWitness("", "a", "!", "exponential", ((8, 90), (64, 900)), (), True), "'a' * 64 + '!'"),
]


@pytest.mark.parametrize(("witness", "shown"), SLOW)
def test_slow_witness(witness: SlowWitness, shown: str) -> None:
    assert witness_expression(witness) == shown


def test_text_witness() -> None:
    assert witness_expression(TextWitness("a\n")) == "'a\\n'"


CELLS = [
    ("a ~", "utf-8", ("a", " ", "~")),
    ("\t\n\x00\x7f", "utf-8", ("\\t", "\\n", "\\x00", "\\x7f")),
    ("e\u0301", "utf-8", ("e", "\\u0301")),  # a combining mark
    ("\u200b\u202e", "utf-8", ("\\u200b", "\\u202e")),  # zero width; right-to-left override
    ("\u05d0", "utf-8", ("\\u05d0",)),  # a letter written from right to left
    ("\u6f22", "utf-8", ("\u6f22",)),
    ("\u6f22\xe9", "latin-1", ("\\u6f22", "\xe9")),
    ("\xe9", "ascii", ("\\xe9",)),
    ("\xe9", "no such encoding", ("\\xe9",)),
    ("\ud800", "utf-8", ("\\ud800",)),
    (b"a\xff\n", "utf-8", ("a", "\\xff", "\\n")),
]


@pytest.mark.parametrize(("text", "encoding", "shown"), CELLS)
def test_cells(text: str | bytes, encoding: str, shown: tuple[str, ...]) -> None:
    assert cells(text, encoding) == shown


def test_width() -> None:
    assert width("ab") == 2
    assert width("\u6f22x") == 3


def test_no_cell_can_leave_its_columns() -> None:
    """Over all code points: what is shown is printable, has no mark, and no right-to-left letter."""
    seen = 0
    for code in range(0x110000):
        shown = cells(chr(code))[0]
        if len(shown) == 1:
            seen += 1
            assert shown.isprintable()
            if code > 126:
                assert unicodedata.combining(shown) == 0
                assert unicodedata.bidirectional(shown) not in ("R", "AL")
    assert seen > 100_000
