"""Minimisation against brute force, and its laws."""

from __future__ import annotations

import itertools
import random

import pytest

from patlint.machine.alphabet import minterms
from patlint.machine.dfa import canonical, minimal
from patlint.machine.minimise import ROUNDS, SMALL, _by_distance, _hopcroft, _moore, equivalence
from patlint.syntax.charset import ALL_CODES, CharSet
from tests.corpus.generate import Maker
from tests.machine.support import MODES, dfa_of

AB = minterms((CharSet.of_chars("a"), CharSet.of_chars("b")), ALL_CODES)[0]


def random_automaton(
    choose: random.Random, states: int, letters: int
) -> tuple[list[tuple[int, ...]], list[bool]]:
    # Targets from a small part, so that states are often equivalent.
    reach = max(1, states // choose.choice((1, 2, 8)))
    table = [tuple(choose.randrange(reach) for _ in range(letters)) for _ in range(states)]
    return table, [choose.random() < 0.1 for _ in range(states)]


def brute_force(table: list[tuple[int, ...]], accepting: list[bool]) -> list[frozenset[tuple[int, ...]]]:
    """For each state the accepted texts shorter than the number of states: equal exactly where equivalent."""
    letters = range(len(table[0]))
    out = []
    for state in range(len(table)):
        accepted = set()
        for size in range(len(table)):
            for text in itertools.product(letters, repeat=size):
                here = state
                for letter in text:
                    here = table[here][letter]
                if accepting[here]:
                    accepted.add(text)
        out.append(frozenset(accepted))
    return out


def partition(classes: list[object]) -> list[int]:
    number: dict[object, int] = {}
    return [number.setdefault(each, len(number)) for each in classes]


def test_against_brute_force() -> None:
    choose = random.Random(70)
    merged = 0
    for _ in range(150):
        table, accepting = random_automaton(choose, choose.randint(1, 6), choose.randint(1, 3))
        twin = partition(list(brute_force(table, accepting)))
        initial = [int(end) for end in accepting]
        assert partition(list(_moore(table, initial)[0])) == twin
        assert partition(list(_moore(table, _by_distance(table, initial))[0])) == twin
        assert partition(list(_hopcroft(table, initial))) == twin
        merged += len(set(twin)) < len(table)
    assert merged > 50


def test_both_methods_agree_on_larger_ones() -> None:
    choose = random.Random(71)
    merged = 0
    for _ in range(120):
        table, accepting = random_automaton(choose, choose.choice((SMALL - 1, SMALL, SMALL + 1, 200)), 3)
        initial = [int(end) + choose.choice((0,) * 30 + (1,)) for end in accepting]
        (moore, done), hopcroft = _moore(table, initial), _hopcroft(table, initial)
        assert done
        assert partition(list(moore)) == partition(list(hopcroft))
        assert partition(list(equivalence(table, initial))) == partition(list(moore))
        merged += len(set(moore)) < len(table)
    assert merged > 30


@pytest.mark.parametrize("length", [SMALL - 3, SMALL - 2, SMALL + ROUNDS, 300])
def test_a_ring_needs_many_rounds(length: int) -> None:
    """Two letters step round a ring; only `b` at one place gives it away, so that distances tell nothing."""
    step = [(place + 1) % length for place in range(length)]
    accepting = length
    # The third letter accepts at once, everywhere.
    table = [(onward, accepting if place == 0 else onward, accepting) for place, onward in enumerate(step)]
    table.append((accepting + 1,) * 3)
    table.append((accepting + 1,) * 3)
    initial = [0] * length + [1, 0]
    moore, done = _moore(table, _by_distance(table, initial))
    assert done == (len(table) < SMALL)
    classes = equivalence(table, initial)
    assert len(set(classes)) == len(table)
    if done:
        assert partition(list(moore)) == partition(list(classes))


def test_minimal_keeps_the_language_and_is_idempotent() -> None:
    choose = random.Random(72)
    texts = ["".join(row) for size in range(6) for row in itertools.product("ab!", repeat=size)]
    made = 0
    for _ in range(150):
        table, accepting = random_automaton(choose, choose.randint(1, 8), len(AB))
        small = minimal(AB, table, accepting)
        for text in choose.sample(texts, 60):
            state = 0
            for char in text:
                state = table[state][AB.classify(ord(char))]
            assert small.accepts(text) == accepting[state]
            made += 1
        assert minimal(small.alphabet, list(small.table), list(small.accepting)) == small
        assert canonical(canonical(small)) == canonical(small)
        # Breadth-first numbers: the first occurrences of states in the rows rise one by one.
        firsts = list(dict.fromkeys([0, *itertools.chain.from_iterable(small.table)]))
        assert firsts == list(range(len(small)))
    assert made == 150 * 60


def test_canonical_automata_are_equal_exactly_for_equal_languages() -> None:
    """The twin compares acceptance of all texts that the automata can tell apart."""
    maker = Maker(73, frozenset())
    some = [dfa_of(maker.pattern(2), mode) for _ in range(40) for mode in MODES]
    texts = ["".join(row) for size in range(6) for row in itertools.product("ab\n ", repeat=size)]
    signatures = [tuple(map(each.accepts, texts)) for each in some]
    pairs = equal = 0
    for (i, first), (j, second) in itertools.combinations(enumerate(some), 2):
        same = canonical(first) == canonical(second)
        if (
            same or len(first) + len(second) <= 6
        ):  # two automata of m and n states differ below length m + n - 1
            assert same == (signatures[i] == signatures[j]) or not same, (i, j)
            pairs += 1
            equal += same
    assert pairs > 1_000 and equal > 300
    assert canonical(dfa_of(r"[0-9]|[a-z]")) == canonical(dfa_of("[a-z0-9]"))
    assert canonical(dfa_of("a|b")) != canonical(dfa_of("a|c"))
