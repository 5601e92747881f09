"""Comments that waive findings."""

from __future__ import annotations

import pytest

from patlint.source import read_module

GOOD = [
    ("x = 1  # patlint: waive nullable -- on purpose", [(("nullable",), "on purpose", (1,))]),
    (
        "# patlint: waive nullable, empty-language -- two\nx = 1",
        [(("nullable", "empty-language"), "two", (1, 2))],
    ),
    ("# patlint: waive nullable -- far\n\n# more\nx = 1", [(("nullable",), "far", (1, 4))]),
    ("#patlint:waive nullable--a--b", [(("nullable",), "a--b", (1, 2))]),
    ("if x:\n    # patlint: waive nullable -- in\n    y = 1", [(("nullable",), "in", (2, 3))]),
    ("x = '# patlint: waive nullable -- no'", []),
    ("x = '''\n# patlint: waive nullable -- no\n'''", []),
    ("# patlint is mentioned here: waive nothing", []),
    ("x = (1,  # patlint: waive nullable -- first\n  2)", [(("nullable",), "first", (1,))]),
    ("x = 1\r# patlint: waive nullable -- cr\ry = 2\r", [(("nullable",), "cr", (2, 3))]),
    ("x = f'{1}'  # patlint: waive nullable -- f\r\n", [(("nullable",), "f", (1,))]),
]


@pytest.mark.parametrize("text, expected", GOOD)
def test_waivers(text: str, expected: list[object]) -> None:
    module = read_module(text, "a.py")
    assert [(w.rules, w.reason, w.target_lines) for w in module.waivers] == expected
    assert module.bad_waivers == ()


BAD = [
    ("# patlint: ignore nullable -- x", "expected `patlint: waive RULE[, RULE] -- reason`"),
    ("# patlint: waive", "expected `patlint: waive RULE[, RULE] -- reason`"),
    ("# patlint: waive nullable", "a reason is missing: write ` -- ` and why"),
    ("# patlint: waive nullable --  ", "a reason is missing: write ` -- ` and why"),
    ("# patlint: waive nullable, -- x", "a rule is missing"),
    ("# patlint: waive -- x", "a rule is missing"),
    ("# patlint: waive Not_a_rule -- x", "not the name of a rule: 'Not_a_rule'"),
    ("# PATLINT: waive nullable -- x", "expected `patlint: waive RULE[, RULE] -- reason`"),
]


@pytest.mark.parametrize("text, problem", BAD)
def test_malformed(text: str, problem: str) -> None:
    module = read_module("é = 1; " + text, "a.py")
    assert module.waivers == ()
    ((place, found),) = module.bad_waivers
    assert found == problem
    assert (place.line, place.column, place.end_column) == (
        1,
        8,
        8 + len(text),
    )
