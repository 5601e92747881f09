"""Complete deterministic automata over minterms.

`table[state][minterm]` is the next state, state 0 the start. `minimal` gives the automaton that has the fewest
states, numbered breadth-first; `canonical` merges minterms that no state tells apart as well, so that two
languages are equal exactly when their canonical automata are.
"""

from __future__ import annotations

from dataclasses import dataclass

from patlint.machine.alphabet import Alphabet, minterms
from patlint.machine.minimise import equivalence
from patlint.syntax.charset import CharSet


@dataclass(frozen=True, slots=True)
class Dfa:
    alphabet: Alphabet
    table: tuple[tuple[int, ...], ...]
    accepting: tuple[bool, ...]

    def accepts(self, text: str | bytes) -> bool:
        state = 0
        for code in text if isinstance(text, bytes) else map(ord, text):
            state = self.table[state][self.alphabet.classify(code)]
        return self.accepting[state]

    def __len__(self) -> int:
        return len(self.table)


def minimal(alphabet: Alphabet, table: list[tuple[int, ...]], accepting: list[bool]) -> Dfa:
    """The smallest automaton of the same language, its states in breadth-first order."""
    classes = equivalence(table, [int(end) for end in accepting])
    order = [0]
    number = {classes[0]: 0}
    rows: list[tuple[int, ...]] = []
    for state in order:
        row = []
        for target in table[state]:
            index = number.get(classes[target])
            if index is None:
                index = number[classes[target]] = len(order)
                order.append(target)
            row.append(index)
        rows.append(tuple(row))
    return Dfa(alphabet, tuple(rows), tuple(accepting[state] for state in order))


def canonical(dfa: Dfa) -> Dfa:
    """The minimal automaton over the coarsest alphabet: equal for equal languages of one universe."""
    columns: dict[tuple[int, ...], list[CharSet]] = {}
    for chars, column in zip(dfa.alphabet.classes, zip(*dfa.table, strict=True), strict=True):
        columns.setdefault(column, []).append(chars)
    if len(columns) == len(dfa.alphabet):
        return dfa
    whole = CharSet((0, max(chars.bounds[-1] for chars in dfa.alphabet.classes)))
    merged = tuple(
        CharSet.of_ranges(each for chars in row for each in chars.ranges()) for row in columns.values()
    )
    alphabet, masks = minterms(merged, whole, True)
    rows = list(zip(*columns, strict=True))
    order = [mask.bit_length() - 1 for mask in masks]
    if order != list(range(len(order))):
        inverse = sorted(range(len(order)), key=order.__getitem__)
        rows = [tuple(row[i] for i in inverse) for row in rows]
    return minimal(alphabet, rows, list(dfa.accepting))
