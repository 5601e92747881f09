"""lopsided-anchor: which alternations are called lopsided, and what `re` says of each text that is shown."""

from __future__ import annotations

import random
import re

import pytest

from patlint import lint_source
from patlint.rules.finding import TextWitness
from tests.rules.support import findings, site

CASES: list[tuple[str, str, bool]] = [
    ("^a|b|c$", "search", True),
    (r"\Aa|b|c\Z", "search", True),
    ("(^a|b|c$)", "search", True),
    ("(?:^a|b|c$)", "search", True),
    ("(?m)^a|b|c$", "search", True),
    ("^a|b|c$", "match", True),
    ("a|b$", "match", True),
    ("^a|b$", "match", True),
    ("a|b|c$", "match", True),
    # each with an anchor of its own, or none has one
    ("^a$|^b$", "match", False),
    ("^a|^b|^c", "search", False),
    ("a$|b$|c$", "search", False),
    ("^(?:a|b|c)$", "search", False),
    ("a|b|c", "search", False),
    # two branches in search: one at the beginning, one at the end
    ("^a|b$", "search", False),
    ("a|b$", "search", False),
    ("^a|b|c", "search", False),
    ("a|b|c$", "search", False),
    # in groups of their own the anchors are meant so
    ("(?:^a)|b|(?:c$)", "search", False),
    # trimming
    (r"^\s+|x|\s+$", "search", False),
    # the end as a case of its own
    (";|$", "match", False),
    ("^|b|$", "search", False),
    ("a|b$", "fullmatch", False),
    ("^a|b|c$", "fullmatch", False),
    ("^a|b|c$", "sub", False),
    ("^a|b|c$", "split", False),
    ("^a|b|c$", "findall", False),
    # in what the program runs it is no branch on its own
    (r"^(a)|\1|b$", "search", False),
]


@pytest.mark.parametrize(("pattern", "function", "found"), CASES)
def test_verdict(pattern: str, function: str, found: bool) -> None:
    of_rule = findings(site(pattern, function), "lopsided-anchor")  # type: ignore[arg-type]
    assert bool(of_rule) == found
    for finding in of_rule:
        replay(pattern, function, finding.witness)


def replay(pattern: str, function: str, witness: object) -> None:
    """The text passes, and not with anchors that bind all branches."""
    assert isinstance(witness, TextWitness)
    bare = re.sub(r"\^|\\A|\\Z|\$|\(\?m\)", "", pattern)
    flags = re.MULTILINE if "(?m)" in pattern else 0
    first, last = ("\\A", "\\Z") if "\\A" in pattern else ("^", "$")
    assert getattr(re, function)(pattern, witness.text)
    assert not getattr(re, function)(f"{first}(?:{bare}){last}", witness.text, flags)


def test_message_and_advice() -> None:
    (found,) = lint_source("import re\nok = re.search(r'^in|out|hold$', s) is None\n", "case.py")
    assert (found.rule, found.level, found.column) == ("lopsided-anchor", "warning", 18)
    assert found.message == "^ binds only the first branch of the alternation, $ only the last"
    assert found.evidence == "on this text search succeeds, and would not with all branches bound"
    assert found.way_out == (
        "write ^(?:in|out|hold)$ if all are meant, or else a group around each branch with its anchor"
    )
    assert found.marks == ((12, 13),)
    (found,) = lint_source("import re\nok = re.match(r'in|out$', s) is None\n", "case.py")
    assert found.message == "$ binds only the last branch of the alternation"
    assert found.way_out.startswith("write (?:in|out)$ if all are meant")


def test_a_compiled_pattern_names_the_call() -> None:
    code = "import re\n_STATE = re.compile(r'in|out$')\n\nok = _STATE.match(s) is None\n"
    (found,) = lint_source(code, "case.py")
    assert [(each.message, each.line) for each in found.related] == [("used here with match", 4)]
    assert lint_source(code.replace("match", "fullmatch"), "case.py") == ()


def test_uses_that_are_not_seen() -> None:
    """A public pattern may be run by search; in match alone two branches are lopsided."""
    assert [each.rule for each in lint_source("import re\nSTATE = re.compile('^in|out|hold$')\n")] == [
        "lopsided-anchor"
    ]
    assert lint_source("import re\nSTATE = re.compile('in|out$')\n") == ()


def test_the_form_that_is_advised_is_left_alone() -> None:
    for pattern in ("(?:^ab)|cd|(?:ef$)", "ab|cd|(?:ef$)"):
        function = "search" if "^" in pattern else "match"
        assert lint_source(f"import re\nok = re.{function}({pattern!r}, s) is None\n") == ()


def test_random_alternations_against_re() -> None:
    generator = random.Random(20260202)
    told = 0
    for _ in range(800):
        words = [
            "".join(generator.choices("ab.", k=generator.randint(1, 3)))
            for _ in range(generator.randint(2, 4))
        ]
        pattern = generator.choice(["", "^"]) + "|".join(words) + generator.choice(["", "$", "$"])
        function = generator.choice(["match", "search", "fullmatch"])
        for finding in findings(site(pattern, function), "lopsided-anchor"):  # type: ignore[arg-type]
            told += 1
            replay(pattern, function, finding.witness)
    assert told >= 150


def test_bytes() -> None:
    (found,) = findings(site(b"^a|b|c$", "search"), "lopsided-anchor")
    assert found.witness == TextWitness(b"aa")
