"""Every rule's page: its wrong example is found by the rule, its right one is not, and both are Python."""

from __future__ import annotations

import pytest

from patlint import lint_source
from patlint.config import Settings
from patlint.rules import RULES
from patlint.rules.finding import LEVELS, Rule
from patlint.rules.registry import NAMES
from patlint.target import running_target


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.name)
def test_examples_show_the_rule_and_its_absence(rule: Rule) -> None:
    asked = Settings(running_target(), NAMES, levels=((rule.name, rule.level),))  # on, even if off by default
    wrong = [finding.rule for finding in lint_source(rule.wrong.source, "wrong.py", settings=asked)]
    right = [finding.rule for finding in lint_source(rule.right.source, "right.py", settings=asked)]
    assert rule.name in wrong
    assert rule.name not in right
    assert set(right) <= {"polynomial-ambiguity"}, "the right way has at most a note on restarts"
    assert rule.wrong.says


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.name)
def test_pages_fit_a_terminal(rule: Rule) -> None:
    assert rule.level in LEVELS
    assert rule.page.endswith("\n") and rule.summary == rule.summary.strip()
    assert max(map(len, rule.page.splitlines())) <= 79


def test_names_are_unique() -> None:
    assert len({rule.name for rule in RULES}) == len(RULES) >= 14
