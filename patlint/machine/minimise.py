"""Which states of a complete automaton have the same language, and the automaton with one state for each.

Sources: Moore, Gedanken-experiments on sequential machines, 1956 (rounds of refinement);
Hopcroft, An n log n algorithm for minimizing states in a finite automaton, 1971 (for the few that need many).
"""

from __future__ import annotations

from collections.abc import Sequence

ROUNDS = 16
"""After so many rounds of Moore's, Hopcroft's lists go on: few automata need more."""
SMALL = 64
"""Automata of fewer states may have as many rounds as they need."""


def equivalence(table: Sequence[tuple[int, ...]], initial: list[int]) -> list[int]:
    """For each state the number of its class: the coarsest refinement of `initial` that the steps respect.

    `table[state][minterm]` is a state; `initial` are classes that must stay apart (accepting or not).
    """
    classes = _by_distance(table, initial)
    if max(classes) + 1 == len(table):
        return classes
    rows = list(zip(*dict.fromkeys(zip(*table, strict=True)), strict=True))
    classes, done = _moore(rows, classes)
    return classes if done else _hopcroft(rows, classes)


def _by_distance(table: Sequence[tuple[int, ...]], initial: list[int]) -> list[int]:
    """A first refinement: states from which the nearest state of a class other than 0 is as far are together.

    It spares long chains most of the rounds.
    """
    sources: list[list[int]] = [[] for _ in table]
    for state, row in enumerate(table):
        for target in set(row):
            sources[target].append(state)
    far = len(table)
    distance = [0 if number else far for number in initial]
    order = [state for state, number in enumerate(initial) if number]
    for state in order:
        next_distance = distance[state] + 1
        for source in sources[state]:
            if distance[source] == far:
                distance[source] = next_distance
                order.append(source)
    numbers: dict[tuple[int, int], int] = {}
    return [numbers.setdefault(pair, len(numbers)) for pair in zip(distance, initial, strict=True)]


def _moore(table: Sequence[tuple[int, ...]], classes: list[int]) -> tuple[list[int], bool]:
    """Refined classes, and whether they are final."""
    count = len(set(classes))
    for _ in range(len(table) if len(table) < SMALL else ROUNDS):
        number: dict[tuple[int, ...], int] = {}
        refined = [
            number.setdefault((classes[state], *[classes[target] for target in row]), len(number))
            for state, row in enumerate(table)
        ]
        if len(number) == count:
            return refined, True
        classes, count = refined, len(number)
        if count == len(table):
            return classes, True
    return classes, False


def _hopcroft(table: Sequence[tuple[int, ...]], initial: list[int]) -> list[int]:
    before: list[list[list[int]]] = []
    for column in zip(*table, strict=True):
        sources: list[list[int]] = [[] for _ in table]
        for state, target in enumerate(column):
            sources[target].append(state)
        before.append(sources)
    blocks: list[set[int]] = [set() for _ in range(max(initial) + 1)]
    for state, number in enumerate(initial):
        blocks[number].add(state)
    blocks = [block for block in blocks if block]
    owner = [0] * len(table)
    for index, block in enumerate(blocks):
        for state in block:
            owner[state] = index
    waiting = set(range(len(blocks)))
    while waiting:
        splitter = list(blocks[waiting.pop()])
        for sources in before:
            touched: dict[int, list[int]] = {}
            for target in splitter:
                for state in sources[target]:
                    touched.setdefault(owner[state], []).append(state)
            for index, members in touched.items():
                block = blocks[index]
                if len(members) == len(block):
                    continue
                moved = set(members)
                block -= moved
                if len(moved) > len(block):
                    blocks[index], moved = moved, block
                new = len(blocks)
                blocks.append(moved)
                for state in moved:
                    owner[state] = new
                waiting.add(new)
    return owner
