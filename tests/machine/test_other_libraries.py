"""Agreement with general-purpose automata libraries where the dialects meet: plain expressions over {a, b}.

greenery 4 (languages of regular expressions), interegular (the same) and automata-lib (automata). Each is asked
on its own; the test of one that is not installed is skipped. No disagreement is known: a new one fails.
"""

from __future__ import annotations

import itertools
import random

import pytest

from patlint.language import Language
from tests.corpus.generate import texts

WORLD = texts("ab", 5)
NUMBER = 150


def plain(choose: random.Random, depth: int) -> str:
    """Letters, sets, concatenation, alternation, repeats: what all dialects read alike."""
    kind = choose.random()
    if depth == 0 or kind < 0.2:
        return choose.choice(("a", "b", "[ab]", "a", "b"))
    if kind < 0.5:
        return plain(choose, depth - 1) + plain(choose, depth - 1)
    if kind < 0.75:
        return f"({plain(choose, depth - 1)}|{plain(choose, depth - 1)})"
    return f"({plain(choose, depth - 1)}){choose.choice(('*', '+', '?', '{2}', '{1,2}', '{2,}', '{0,2}'))}"


def patterns(seed: int) -> list[str]:
    choose = random.Random(seed)
    return [plain(choose, 3) for _ in range(NUMBER)]


def test_greenery() -> None:
    greenery = pytest.importorskip("greenery")
    rows = [(pattern, Language(pattern), greenery.parse(pattern)) for pattern in patterns(110)[:50]]
    words = set()
    for (_, a, x), (_, b, y) in zip(rows, rows[1:] + rows[:1], strict=True):
        equal, within, apart = x.equivalent(y), (x & y).equivalent(x), (x & y).empty()
        assert (a == b, a <= b, a.isdisjoint(b)) == (equal, within, apart)
        words.add((equal, within, apart))
    for pattern, a, x in rows[:25]:
        machine = x.to_fsm()
        assert [a.accepts(text) for text in WORLD] == [machine.accepts(text) for text in WORLD], pattern
        # Complete over a, b and one symbol for all others, as ours is once minterms are merged.
        assert a.states == len(machine.reduce().states), pattern
    assert len(words) >= 4


def test_interegular() -> None:
    interegular = pytest.importorskip("interegular")
    rows = [(p, Language(p), interegular.parse_pattern(p).to_fsm()) for p in patterns(111)]
    words = set()
    for (_, a, x), (_, b, y) in zip(rows, rows[1:] + rows[:1], strict=True):
        equal, within, apart = x == y, x <= y, x.isdisjoint(y)
        assert (a == b, a <= b, a.isdisjoint(b)) == (equal, within, apart)
        words.add((equal, within, apart))
    for pattern, a, x in rows[:60]:
        assert [a.accepts(text) for text in WORLD] == [x.accepts(text) for text in WORLD], pattern
    assert len(words) >= 4


def test_automata_lib() -> None:
    pytest.importorskip("automata")
    from automata.fa.dfa import DFA
    from automata.fa.nfa import NFA

    made = 0
    rows = []
    for pattern in patterns(112)[:100]:
        ours = Language(pattern)
        theirs = DFA.from_nfa(NFA.from_regex(pattern, input_symbols={"a", "b"})).minify().to_complete()
        for text in WORLD:
            assert ours.accepts(text) == theirs.accepts_input(text), pattern
        # Ours refuses other letters, so it always has a state that refuses all; theirs only where a or b lead there.
        dfa = ours.dfa
        symbols = [dfa.alphabet.classify(ord(letter)) for letter in "ab"]
        reached = [0]
        for state in reached:
            reached += [
                dfa.table[state][s] for s in dict.fromkeys(symbols) if dfa.table[state][s] not in reached
            ]
        assert len(set(reached)) == len(theirs.minify(retain_names=False).states), pattern
        rows.append((ours, theirs))
        made += 1
    for (a, x), (b, y) in itertools.pairwise(rows):
        assert (a == b, a <= b, a.isdisjoint(b)) == (x == y, x.issubset(y), x.isdisjoint(y))
    assert made == 100
