"""Which states of a complete automaton have the same language, and the automaton with one state for each.

Sources: Moore, Gedanken-experiments on sequential machines, 1956 (rounds of refinement, for small automata);
Hopcroft, An n log n algorithm for minimizing states in a finite automaton, 1971 (for the others).
"""

from __future__ import annotations

from collections.abc import Sequence

SMALL = 64
"""Up to so many states Moore's rounds are quicker than Hopcroft's lists."""


def equivalence(table: Sequence[tuple[int, ...]], initial: list[int]) -> list[int]:
    """For each state the number of its class: the coarsest refinement of `initial` that the steps respect.

    `table[state][minterm]` is a state; `initial` are classes that must stay apart (accepting or not).
    """
    return _moore(table, initial) if len(table) <= SMALL else _hopcroft(table, initial)


def _moore(table: Sequence[tuple[int, ...]], classes: list[int]) -> list[int]:
    count = len(set(classes))
    while True:
        number: dict[tuple[int, ...], int] = {}
        refined = [
            number.setdefault((classes[state], *[classes[target] for target in row]), len(number))
            for state, row in enumerate(table)
        ]
        if len(number) == count:
            return refined
        classes, count = refined, len(number)


def _hopcroft(table: Sequence[tuple[int, ...]], initial: list[int]) -> list[int]:
    columns = list(dict.fromkeys(zip(*table, strict=True)))
    before: list[list[list[int]]] = []
    for column in columns:
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
