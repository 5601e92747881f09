"""Both sides of each limit, and the worked numbers that `patlint.limits` gives."""

from __future__ import annotations

from dataclasses import fields, replace

import pytest

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.determinise import language
from patlint.machine.nfa import Nfa
from patlint.machine.priority import spans
from patlint.machine.program import compile_tree
from patlint.syntax.parser import parse

CASES = {
    "nesting": "((((a))))",
    "instructions": "(?:ab|c){4}d{9}",
    "states": "(?:a|b)*a(?:a|b){5}",
    "work": "(?:a|b)*a(?:a|b){5}",
}


def build(pattern: str, limits: Limits) -> int:
    program = compile_tree(parse(pattern, limits=limits), limits)
    return len(language(Nfa(program, limits), "fullmatch"))


@pytest.mark.parametrize(("limit", "pattern"), CASES.items())
def test_both_sides(limit: str, pattern: str) -> None:
    whole = build(pattern, DEFAULT_LIMITS)

    def reaches(value: int) -> bool:
        try:
            assert build(pattern, replace(DEFAULT_LIMITS, **{limit: value})) == whole
        except LimitReached as reached:
            assert (reached.limit, reached.value) == (limit, value)
            assert str(reached) == f"limit {limit} reached ({value})"
            return True
        return False

    low, high = 0, 4_096
    assert reaches(low) and not reaches(high)
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (middle, high) if reaches(middle) else (low, middle)
    assert reaches(low) and not reaches(high)
    assert high == {"nesting": 4, "instructions": 21, "states": 65, "work": high}[limit]


def test_every_limit_is_tested_on_both_sides() -> None:
    """`contexts` in test_pairs, `product` in test_relations; `turns` and `bounded_steps` in test_slow_text."""
    assert {each.name for each in fields(Limits)} == {*CASES, "product", "turns", "contexts", "bounded_steps"}


@pytest.mark.parametrize("limit", ["states", "work"])
def test_spans_heed_the_limits(limit: str) -> None:
    nfa = Nfa(compile_tree(parse("(?:a|b)*a(?:a|b){5}")), replace(DEFAULT_LIMITS, **{limit: 20}))
    with pytest.raises(LimitReached) as reached:
        spans(nfa, nfa.start_context)
    assert reached.value.limit == limit


def test_worked_numbers() -> None:
    """The numbers in the docstrings of `patlint.limits`."""
    program = compile_tree(parse("(?:[a-z]{2}-){1,3000}"))
    assert len(program.code) == 9_000
    with pytest.raises(LimitReached):
        build("(?:a|b)*a(?:a|b){10}", DEFAULT_LIMITS)
    assert build("(?:a|b)*a(?:a|b){10}", replace(DEFAULT_LIMITS, states=3_000)) == 2_049
