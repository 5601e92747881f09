"""`patlint rules`: the table, and every page with its examples linted on the spot."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from patlint.rules.registry import RULES

from .conftest import Ran

Patlint = Callable[..., Ran]


def test_table(patlint: Patlint) -> None:
    ran = patlint("rules")
    assert (ran.status, ran.err) == (0, "")
    lines = ran.out.splitlines()
    assert [line.split()[0] for line in lines] == [rule.name for rule in RULES]
    for line, rule in zip(lines, RULES, strict=True):
        assert line.endswith(f" {rule.summary}")
        assert rule.level in line
        assert len(line) <= 80


@pytest.mark.parametrize("name", [rule.name for rule in RULES])
def test_page(patlint: Patlint, name: str) -> None:
    ran = patlint("rules", name)
    assert (ran.status, ran.err) == (0, "")
    (rule,) = [each for each in RULES if each.name == name]
    lines = ran.out.splitlines()
    head = " ".join(line.strip() for line in lines[: lines.index("")])
    assert head == f"{name} ({rule.level}): {rule.summary}"
    source = f"{rule.wrong.source}{rule.right.source}"
    for line in lines:  # the first line of a finding is one line, however long, and code is code
        assert len(line) <= 80 or line.startswith("example.py:") or line.strip() in source
    found, quiet = ran.out.split("\nNot found:")
    assert f": {name}: " in found.split("\nFound:")[1]
    assert f": {name}: " not in quiet
