"""Both sides of each limit, and the worked numbers that `patlint.limits` gives."""

from __future__ import annotations

import sys
from dataclasses import fields, replace

import pytest

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.determinise import language
from patlint.machine.dfa import canonical
from patlint.machine.nfa import Nfa
from patlint.machine.priority import shown_used, spans
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


@pytest.mark.parametrize(
    ("what", "pattern"),
    [
        ("closures", "(?:(?:a?b?){0,9}){0,9}"),
        ("look-behind", "(?<=a.{9})b"),
        ("look-ahead", "(?:(?!a.{9}b).)*"),
        ("vetoes", "(?:(?!b)(?:a|ab)c?(?!a))++" if sys.version_info >= (3, 11) else "(?=(?!ab).*(?!ba))"),
        ("obligations", "".join(f"(?!{letter}x)" for letter in "abcdefghijkl")),
    ],
)
def test_what_a_program_computes_on_the_way_counts_as_work(what: str, pattern: str) -> None:
    """The smallest work that a fresh program needs besides the determinisation itself, and one less."""

    def spend(value: int) -> None:
        nfa = Nfa(compile_tree(parse(pattern)), replace(DEFAULT_LIMITS, work=value))
        for context in nfa.all_contexts():
            for thread in nfa.initial(context):
                for minterm in range(len(nfa.alphabet)):
                    nfa.after(thread[0], minterm, nfa.next_context(context, minterm))

    low, high = 0, DEFAULT_LIMITS.work
    spend(high)
    while high - low > 1:
        middle = (low + high) // 2
        try:
            spend(middle)
            high = middle
        except LimitReached as reached:
            assert (reached.limit, reached.value) == ("work", middle)
            low = middle
    assert low > 10, what


def test_equal_look_arounds_share_what_is_known_of_them() -> None:
    """Two hundred words, each between the same look-arounds: one tracker, one automaton."""
    names = [f"w{number}" for number in range(200)]
    nfa = Nfa(compile_tree(parse("|".join(rf"(?<!\w){name}(?!\w)" for name in names))), DEFAULT_LIMITS)
    assert (
        len(set(nfa.body_of)) == 400
        and len(nfa.trackers) == 1
        and set(nfa.body_of.values()) == set(nfa.trackers)
    )
    same = language(nfa, "search")
    whole = rf"(?<!\w)(?:{'|'.join(names)})(?!\w)"
    assert canonical(same) == canonical(language(Nfa(compile_tree(parse(whole)), DEFAULT_LIMITS), "search"))
    other = Nfa(compile_tree(parse(r"(?<=a)x|(?<=(?i:a))x|(?<=b)x|(?<!a)x")), DEFAULT_LIMITS)
    assert len(other.trackers) == 3


def test_showing_what_is_used_stops() -> None:
    """Within a text too: a way through all of these reads 400 characters, and each step has as many threads."""
    nfa = Nfa(compile_tree(parse(r"\w+\s*" * 200)), replace(DEFAULT_LIMITS, work=4_000))
    assert shown_used(nfa, "match", [nfa.accept - 1]) == set()
    nfa = Nfa(nfa.program, DEFAULT_LIMITS)
    assert len(shown_used(nfa, "match", [nfa.accept - 1])) >= 200
