"""Texts of a language: the shortest, the first ones, how many of a length, samples.

Texts are tuples of code points (or of bytes). Where any character of a minterm would do, the most readable is
taken, so `shortest` and `words` show one text for each path through the automaton.
"""

from __future__ import annotations

import random
from collections.abc import Iterator

from patlint.machine.alphabet import representative
from patlint.machine.dfa import Dfa

Codes = tuple[int, ...]


def distances(dfa: Dfa) -> list[int | None]:
    """For each state the length of a shortest text from it to acceptance, None where there is none."""
    before: list[set[int]] = [set() for _ in dfa.table]
    for state, row in enumerate(dfa.table):
        for target in row:
            before[target].add(state)
    out: list[int | None] = [0 if end else None for end in dfa.accepting]
    order = [state for state, end in enumerate(dfa.accepting) if end]
    for state in order:
        for source in before[state]:
            if out[source] is None:
                out[source] = (out[state] or 0) + 1
                order.append(source)
    return out


def is_empty(dfa: Dfa) -> bool:
    return distances(dfa)[0] is None


def shortest(dfa: Dfa) -> Codes | None:
    """A shortest text, the most readable among those, or None where the language is empty."""
    left = distances(dfa)
    if left[0] is None:
        return None
    state, codes = 0, []
    while left[state]:
        closer = [m for m, target in enumerate(dfa.table[state]) if left[target] == (left[state] or 0) - 1]
        letter, minterm = min(((representative(dfa.alphabet.classes[m]), m) for m in closer), key=_rank)
        codes.append(letter)
        state = dfa.table[state][minterm]
    return tuple(codes)


def _rank(move: tuple[int, int]) -> tuple[bool, bool, int]:
    letter = move[0]
    return not 32 < letter < 127, letter < 32, letter


def words(dfa: Dfa) -> Iterator[Codes]:
    """Texts in the order of their length, one for each path; endless where the language is infinite.

    Each takes as many steps as it has characters, times minterms, however many paths lead nowhere.
    """
    left = distances(dfa)
    if left[0] is None:
        return
    letters = sorted(
        ((representative(chars), minterm) for minterm, chars in enumerate(dfa.alphabet.classes)),
        key=_rank,
    )
    before = [0] * len(dfa)
    for state, row in enumerate(dfa.table):
        for target in set(row):
            before[target] |= 1 << state
    last = None if total(dfa) is None else len(dfa) - 1  # a longer text goes through a state twice
    within = [sum(1 << state for state, end in enumerate(dfa.accepting) if end)]
    """At n the states from which a text of n characters is accepted, as a bit mask."""
    while last is None or len(within) <= last + 1:
        if within[-1] & 1:
            yield from _of_length(dfa, letters, within)
        closer, further = within[-1], 0
        while closer:
            low = closer & -closer
            closer ^= low
            further |= before[low.bit_length() - 1]
        within.append(further)


def _of_length(dfa: Dfa, letters: list[tuple[int, int]], within: list[int]) -> Iterator[Codes]:
    """The texts of one character fewer than `within` has entries: no step leads where none can be finished."""
    left = len(within) - 1
    if not left:
        yield ()
        return
    codes: list[int] = []
    states, waiting = [0], [iter(letters)]
    while waiting:
        row, useful = dfa.table[states[-1]], within[left - len(states)]
        for letter, minterm in waiting[-1]:
            if useful >> row[minterm] & 1:
                if len(states) == left:
                    yield (*codes, letter)
                    continue
                codes.append(letter)
                states.append(row[minterm])
                waiting.append(iter(letters))
                break
        else:
            waiting.pop()
            states.pop()
            if codes:
                codes.pop()


def count(dfa: Dfa, length: int) -> int:
    """How many texts of `length` characters are in the language."""
    sizes = [chars.size() for chars in dfa.alphabet.classes]
    ways = [int(end) for end in dfa.accepting]
    steps: list[dict[int, int]] = []
    for row in dfa.table:
        weights: dict[int, int] = {}
        for target, size in zip(row, sizes, strict=True):
            weights[target] = weights.get(target, 0) + size
        steps.append(weights)
    for _ in range(length):
        ways = [sum(size * ways[target] for target, size in weights.items()) for weights in steps]
    return ways[0]


def total(dfa: Dfa) -> int | None:
    """How many texts are in the language, None where it is infinite. One step for each edge."""
    useful = [distance is not None for distance in distances(dfa)]
    sizes = [chars.size() for chars in dfa.alphabet.classes]
    texts: dict[int, int] = {}
    open_states: set[int] = set()
    stack = [0] if useful[0] else []
    if not stack:
        return 0
    while stack:
        state = stack[-1]
        targets = {target for target in dfa.table[state] if useful[target]}
        if state not in open_states:
            open_states.add(state)
            waiting = [target for target in targets if target not in texts]
            if any(target in open_states for target in waiting):
                return None  # a cycle through useful states
            stack += waiting
            continue
        stack.pop()
        if state in texts:
            continue
        texts[state] = int(dfa.accepting[state]) + sum(
            size * texts[target]
            for target, size in zip(dfa.table[state], sizes, strict=True)
            if target in texts and useful[target]
        )
    return texts[0]


def sample(dfa: Dfa, seed: int, number: int, extra: int = 6) -> list[Codes]:
    """`number` texts by random walks that head for acceptance after about `extra` further characters."""
    left = distances(dfa)
    if left[0] is None:
        return []
    generator = random.Random(seed)
    out = []
    classes = [list(chars.ranges()) for chars in dfa.alphabet.classes]
    for _ in range(number):
        state, codes, budget = 0, [], generator.randint(0, extra)
        while True:
            if dfa.accepting[state] and (budget <= 0 or generator.random() < 0.3):
                break
            here = left[state] or 0
            moves = [m for m, target in enumerate(dfa.table[state]) if left[target] is not None]
            if budget <= 0:
                closer = [m for m in moves if (left[dfa.table[state][m]] or 0) < here]
                moves = closer or moves
            if not moves:
                break
            minterm = generator.choice(moves)
            low, high = generator.choice(classes[minterm])
            codes.append(generator.choice((low, high, generator.randint(low, high))))
            state = dfa.table[state][minterm]
            budget -= 1
        out.append(tuple(codes))
    return out
