"""shorter-equivalent: what the uses of a pattern need decides what is suggested."""

from __future__ import annotations

from pathlib import Path

import pytest

from patlint.config import load
from patlint.limits import DEFAULT_LIMITS
from patlint.outcome import lint_bytes
from patlint.rules import check_site
from patlint.rules.registry import NAMES
from patlint.run import lint_source
from patlint.source import find_patterns

# Lines after the pattern P, and the suggestion. Source: written for this test.
USES = [
    ("if P.search(s): pass", r"\s*sea\s*lock", r"sea\s*lock"),
    ("if P.match(s): pass", r"\s*sea\s*lock", None),
    ("if P.search(s): pass\nif P.match(s): pass", r"\s*sea\s*lock", None),
    ("if P.search(s): pass\nif P.fullmatch(s): pass", r"\s*sea\s*lock", None),
    ("if P.search(s): pass\nif P.match(s): pass", r"(?:a|b)+x", "[ab]+x"),
    ("if P.match(s): pass", r"to-.*", "to-"),
    ("if P.fullmatch(s): pass", r"to-.*", None),
    ("P.search(s).span()", r"to-.*", None),
    ("if P.match(s): pass", r"(?:pier|piers)(?:a|b)", "piers?[ab]"),
    ("P.search(s).group(1)", r"(a|b|c|d)x", "([a-d])x"),
    ("if P.fullmatch(s): pass", r"(a|b|c|d)x", "[a-d]x"),
]


@pytest.mark.parametrize(("uses", "pattern", "expected"), USES)
def test_use_decides(uses: str, pattern: str, expected: str | None) -> None:
    source = f"import re\ns = input()\n_P = re.compile(r'{pattern}')\n{uses.replace('P.', '_P.')}\n"
    found = [each.suggestion for each in lint_source(source) if each.rule == "shorter-equivalent"]
    assert [each.pattern for each in found if each is not None] == ([] if expected is None else [expected])


def test_what_is_joined_from_constants_is_not_merged() -> None:
    source = "import re\n_A = 'a'\n_B = 'b'\n_P = re.compile(f'(?:{_A}|{_B})+x')\n_P.match(input())\n"
    assert not [each for each in lint_source(source) if each.rule == "shorter-equivalent"]
    side_by_side = "import re\n_P = re.compile('(?:a' '|b)+x')\n_P.match(input())\n"
    assert [each.rule for each in lint_source(side_by_side)] == ["shorter-equivalent"]


def test_one_pattern_is_suggested() -> None:
    """Where time can be saved, that pattern is the one to take; where that rule is off, the shorter one is."""
    source = "import re\nif re.match('(?:a*)*b', input()): pass\n"
    found = [(each.rule, each.suggestion and each.suggestion.pattern) for each in lint_source(source)]
    assert found == [("exponential-ambiguity", "a*b")]
    alone = check_site(
        find_patterns(source)[0], None, DEFAULT_LIMITS, frozenset({"shorter-equivalent"})
    ).findings
    assert [each.suggestion and each.suggestion.pattern for each in alone] == ["a*b"]


@pytest.mark.parametrize(
    ("table", "found"),
    [
        ("", True),  # it saves 3 of 24 characters
        ("shorter = { characters = 3 }", True),
        ("shorter = { characters = 4 }", False),
        ("shorter = { percent = 12 }", True),
        ("shorter = { percent = 13 }", False),
        ("shorter = { characters = 1, percent = 0 }", True),
    ],
)
def test_the_least_saving_is_configured(tmp_path: Path, table: str, found: bool) -> None:
    (tmp_path / "pyproject.toml").write_text(f"[tool.patlint]\n{table}\n", encoding="utf-8")
    settings = load(NAMES, start=tmp_path)
    outcome = lint_bytes(
        b"import re\nif re.match('(?:a|b)cdefghijklmnopqrst', input()): pass\n", "x.py", settings
    )
    assert [each.rule for each in outcome.findings] == ["shorter-equivalent"] * found
