"""`patlint inspect`: whole screens, and the JSON."""

from __future__ import annotations

import json
from collections.abc import Callable

import pytest

from patlint.cli.inspect import _number

from .conftest import Ran

Patlint = Callable[..., Ran]


def test_an_octet(patlint: Patlint) -> None:
    """Source of the pattern: RFC 3986, appendix A, dec-octet."""
    ran = patlint("inspect", "--target", "3.12", "25[0-5]|2[0-4][0-9]|1[0-9]{2}|[1-9]?[0-9]")
    assert (ran.status, ran.err) == (0, "")
    assert ran.out == (
        "pattern   '25[0-5]|2[0-4][0-9]|1[0-9]{2}|[1-9]?[0-9]'\n"
        "flags     none\n"
        "target    3.12\n"
        "mode      fullmatch\n"
        "groups    0\n"
        "exact     yes\n"
        "states    match 3, fullmatch 7, search 2\n"
        "texts     256\n"
        "lengths   10 of 1, 90 of 2, 156 of 3\n"
        "such as   '0', '1', '2', '3', '5', '6'\n"
        "time      no growth beyond the text's length was found\n"
        "shorter   '25[0-5]|(?:2[0-4]|1[0-9]|[1-9]?)[0-9]' (37 for 41: less readable)\n"
    )


def test_candidates(patlint: Patlint) -> None:
    ran = patlint("inspect", "(?:0|1|2)[0-9]|x")
    assert "shorter   '[0-2][0-9]|x' (12 for 16: groups stay)\n" in ran.out
    report = json.loads(patlint("inspect", "--format", "json", "(?:0|1|2)[0-9]|x").out)
    assert report["shorter"] == [{"pattern": "[0-2][0-9]|x", "length": 12, "verdict": "groups stay"}]
    assert "shorter" not in patlint("inspect", "crate|box").out


def test_a_slow_pattern(patlint: Patlint) -> None:
    ran = patlint("inspect", "--flags", "im", "--mode", "match", "(?P<word>a+)+$")
    assert ran.status == 0
    lines = ran.out.splitlines()
    assert lines[1] == "flags     IGNORECASE MULTILINE"
    assert lines[4] == "groups    1 (1 is word)"
    assert "time      exponential in the number of repetitions" in lines
    assert any(line.startswith("slow text ") and "* 30" in line for line in lines)
    assert any(line.startswith("<pattern>:1:") and ": exponential-ambiguity: " in line for line in lines)


def test_a_superset(patlint: Patlint) -> None:
    ran = patlint("inspect", r"(a)\1")
    assert "exact     no, the automata are supersets: back-reference r'\\1'\n" in ran.out
    assert "texts     not known\n" in ran.out
    assert "open      the automaton is only a superset: back-reference\n" in ran.out


def test_an_open_question_is_told_once(patlint: Patlint) -> None:
    lines = patlint("inspect", "(?:a{1,100}){1,100}").out.splitlines()
    assert [line for line in lines if line.startswith("open ")] == ["open      limit work reached (400000)"]


WIDE = [".*a.*b.*c", "(?:a{1,100}){1,100}", r"(a)(b)\1\2(?(1)c|d)", "[a-z]{9}[0-9]{9}", "(?=a)"]


@pytest.mark.parametrize("pattern", WIDE)
def test_rows_fit_the_width(patlint: Patlint, pattern: str) -> None:
    """Numbers, texts and reasons go on in the next row; each of them stands in one."""
    lines = patlint("inspect", "--mode", "match", pattern).out.split("\n\n")[0].splitlines()
    assert max(map(len, lines)) <= 80
    first = next(at for at, line in enumerate(lines) if line.startswith(("lengths ", "exact ")))
    told = [line for line in lines[first:] if line.startswith(" ")]
    assert told and all(line.startswith(" " * 10) and line[10] != " " for line in told)


def test_none_and_all(patlint: Patlint) -> None:
    assert "texts     none: the language is empty\n" in patlint("inspect", "(?!)").out
    assert "texts     all\n" in patlint("inspect", "--mode", "search", "a*").out
    assert "texts     endlessly many\n" in patlint("inspect", "a+").out


def test_a_refused_pattern(patlint: Patlint) -> None:
    ran = patlint("inspect", "--target", "3.12", "a(b")
    assert ran.status == 1
    assert ran.out.startswith(
        "pattern   'a(b'\n"
        "flags     none\n"
        "target    3.12\n"
        "mode      fullmatch\n"
        "refused   the group has no closing parenthesis, at position 1\n"
        "\n"
        "<pattern>:1:2: error: invalid-pattern: "
    )


def test_target(patlint: Patlint) -> None:
    assert patlint("inspect", "--target", "3.10", "(?>a)").status == 1
    assert patlint("inspect", "--target", "3.11", "(?>a)").status == 0


def test_bytes(patlint: Patlint) -> None:
    assert "pattern   b'\\xe9'\n" in patlint("inspect", "--bytes", "\xe9").out
    assert "pattern   b'\\xff'\n" in patlint("inspect", "--bytes", "\udcff").out  # a byte that is no UTF-8
    assert patlint("inspect", "--bytes", "\u20ac") == Ran(
        2, "", "patlint: --bytes: the pattern has characters above U+00FF\n"
    )


def test_a_pattern_may_begin_with_a_dash(patlint: Patlint) -> None:
    assert "pattern   '-+'\n" in patlint("inspect", "--", "-+").out


KEYS = [
    "pattern",
    "bytes",
    "target",
    "mode",
    "flags",
    "refused",
    "groups",
    "names",
    "exact",
    "inexact",
    "states",
    "empty",
    "universal",
    "endless",
    "total",
    "shortest",
    "words",
    "counts",
    "growth",
    "witness",
    "shorter",
    "open",
    "findings",
]


def test_json(patlint: Patlint) -> None:
    ran = patlint(
        "inspect", "--format", "json", "--mode", "match", "--target", "3.12", r"(?s)(?P<x>a+)+(?<=a)$"
    )
    report = json.loads(ran.out)
    assert list(report) == KEYS
    assert (report["flags"], report["groups"], report["names"]) == (["DOTALL"], 1, {"x": 1})
    assert report["growth"] == "exponential"
    assert list(report["witness"]) == ["prefix", "pump", "suffix", "growth"]
    assert list(report["states"]) == ["match", "fullmatch", "search"]
    refused = json.loads(patlint("inspect", "--format", "json", "a(b").out)
    assert refused["refused"]["position"] == 1
    assert refused["counts"] is None


NUMBERS = [
    (0, "0"),
    (10**16 - 1, "9999999999999999"),
    (10**16, "about 1.0 * 10**16"),
    (10**17 - 1, "about 9.9 * 10**16"),
    (1114112**8, "about 2.3 * 10**48"),
    (2**20_000, "about 3.9 * 10**6020"),
]


def test_numbers_beyond_writing_are_not_told(patlint: Patlint) -> None:
    assert json.loads(patlint("inspect", "--format", "json", ".{140}").out)["total"] == (0x110000 - 1) ** 140
    report = json.loads(patlint("inspect", "--format", "json", ".{300}").out)
    assert (report["total"], report["endless"]) == (None, False)
    assert "there are more than 2**3000 texts" in report["open"]


@pytest.mark.parametrize(("number", "shown"), NUMBERS, ids=[shown for _, shown in NUMBERS])
def test_numbers(number: int, shown: str) -> None:
    assert _number(number) == shown
