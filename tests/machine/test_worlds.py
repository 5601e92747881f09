r"""Automata against `re`, on every pattern of a small world and on random larger ones.

The world: all trees up to a size over {a, b} with concatenation, alternation, greedy and lazy repeats, anchors,
boundaries and look-ahead, on all texts up to a length over "ab\n". `re` is the twin.
"""

from __future__ import annotations

import random
import sys
from functools import lru_cache

import pytest

from patlint.limits import LimitReached
from patlint.machine.determinise import language
from tests.corpus.cpython import compiled
from tests.corpus.generate import FEATURES, Maker, texts
from tests.machine.support import MODES, ends, nfa_of, span_automaton

WORLD = texts("ab\n", 4)
LEAVES = ("a", "b", "", "^", "$", r"\b", ".")
WRAPS = ("(?:{})*", "(?:{})+?", "(?:{})?", "(?:{}){{2}}", "(?={})", "(?!{})")


@lru_cache
def trees(size: int) -> tuple[str, ...]:
    """All patterns of exactly `size` nodes."""
    if size == 1:
        return LEAVES
    rows = [wrap.format(inner) for wrap in WRAPS for inner in trees(size - 1)]
    for left in range(1, size - 1):
        for first in trees(left):
            for second in trees(size - 1 - left):
                rows.append(f"(?:{first}|{second})")
                if first and second:
                    rows.append(first + second)
    return tuple(dict.fromkeys(rows))


def compare(pattern: str | bytes, world: list[str] | tuple[str, ...] | list[bytes], flags: int = 0) -> int:
    """How many texts agreed in the three modes and in the end of the match; fails where one does not."""
    right = compiled(pattern, flags)
    if right is None:
        return 0
    try:
        nfa = nfa_of(pattern, flags)
        automata = [(mode, language(nfa, mode)) for mode in MODES]
        marked = span_automaton(nfa)
    except LimitReached:
        return 0
    for text in world:
        try:
            found = right.match(text)
            truths = (found is not None, right.fullmatch(text) is not None, right.search(text) is not None)
        except SystemError:  # the fault "possessive" of `corpus.cpython`
            continue
        for (mode, automaton), truth in zip(automata, truths, strict=True):
            accepted = automaton.accepts(text)
            assert accepted == truth or accepted and nfa.inexact, (pattern, mode, text)
        if not nfa.inexact:
            assert ends(marked, text) == ([] if found is None else [found.end()]), (pattern, text)
    return len(world)


@pytest.mark.parametrize("size", [1, 2, 3, 4])
def test_every_small_pattern(size: int) -> None:
    made = sum(compare(pattern, WORLD) for pattern in trees(size))
    assert made == len(trees(size)) * len(WORLD)
    assert len(trees(size)) == {1: 7, 2: 42, 3: 337, 4: 3_114}[size]


def test_patterns_of_five_nodes() -> None:
    """Every nineteenth of them, on the texts up to three characters."""
    some = trees(5)[::19]
    world = texts("ab\n", 3)
    assert sum(compare(pattern, world) for pattern in some) == len(some) * len(world)
    assert len(some) > 1_200


@pytest.mark.parametrize(
    "features",
    [(), ("ahead",), ("ahead", "flags"), ("behind",), ("atomic",), ("ahead", "behind", "atomic"), FEATURES],
    ids=" ".join,
)
def test_random_patterns(features: tuple[str, ...]) -> None:
    """All but back-references and conditionals is exact; those are supersets, never less."""
    if sys.version_info < (3, 11) and features == ("atomic",):
        pytest.skip("atomic groups come with 3.11")
    maker = Maker(40, frozenset(features) - ({"atomic"} if sys.version_info < (3, 11) else set()))
    choose = random.Random(41)
    world = [*texts("ab\n", 5), *texts("aAk\u212a ", 2), " b a", "ab A", "\u0130", "\u0131"]
    assert sum(compare(maker.pattern(4), choose.sample(world, 40)) for _ in range(400)) > 10_000


def test_bytes_and_flags() -> None:
    maker = Maker(42, frozenset({"ahead"}))
    rows = [text.encode() for text in texts("ab\n", 3)] + [b"\xe9", b"A\xff", b" a"]
    assert sum(compare(maker.pattern(3).encode() + rb"|\xe9[^\xff]?", rows) for _ in range(50)) > 2_000
    for flags in (2, 8, 16, 256, 2 | 8 | 16):
        assert (
            sum(compare(maker.pattern(3), [*WORLD[:60], "A", "aB", "B\na"], flags) for _ in range(25)) > 1_000
        )


# What is widened to a superset, and what is exact. Source: the construct list of this project.
@pytest.mark.parametrize(
    ("pattern", "reasons"),
    [
        (r"(a)\1", ["back-reference"]),
        ("(a)?(?(1)a|b)", ["conditional"]),
        ("(?=a.)(?!ab)a", []),
        (r"^\ba\B$\Z", []),
        ("(a|b)*?", []),
        (r"(?<=a\b)(?<!b$)b", []),
    ],
)
def test_what_is_exact(pattern: str, reasons: list[str]) -> None:
    assert [reason for reason, _ in nfa_of(pattern).inexact] == reasons


@pytest.mark.parametrize(("context", "left"), [("start", ""), ("line", "\n"), ("word", "a"), ("other", " ")])
def test_spans_in_every_context(context: str, left: str) -> None:
    """What stands to the left of the match's beginning decides anchors and boundaries."""
    maker = Maker(43, frozenset({"ahead"}))
    made = 0
    for _ in range(50):
        pattern = maker.pattern(3)
        right = compiled(pattern)
        nfa = nfa_of(pattern)
        at = nfa.contexts[nfa.alphabet.classify(ord(left))] if left else nfa.start_context
        marked = span_automaton(nfa, at)
        for text in WORLD[:60]:
            found = None if right is None else right.match(left + text, len(left))
            # `^` never matches behind `pos`, as behind a character; elsewhere `pos` hides nothing.
            assert ends(marked, text) == ([] if found is None else [found.end() - len(left)]), (pattern, text)
            made += 1
    assert made == 50 * 60
