"""Whether the texts of one automaton are all taken by others, which of them are needed, and a text that is not.

`cover(one, others)` grows the set of others from texts: as long as `one` has a text that none of the chosen takes,
the first that takes it is added, and where none does, that text is the answer. So no union of hundreds of automata is
built: most are told apart by a single text, and only those that share texts are compared.

>>> from patlint.language import Language
>>> patterns = ("a[0-9]", "b", "a[0-4]", "a[5-9]x?", "a1")
>>> one, *others = (Side(Language(each, mode="match").dfa) for each in patterns)
>>> cover(one, dict(enumerate(others)), 1000).takers
{1: (97, 48), 2: (97, 53)}
>>> cover(one, dict(enumerate(others[:2])), 1000).text
(97, 53)

Cost: one text against each of the others, and a walk over tuples of states for each of the few that are compared.
Limit: `product` tuples. Source of the method: refinement from counterexamples (Clarke, Grumberg, Jha, Lu and Veith,
Counterexample-guided abstraction refinement, CAV 2000), here of a union.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from patlint.limits import LimitReached
from patlint.machine.alphabet import minterms, representative
from patlint.machine.dfa import Dfa
from patlint.machine.relations import letter_rank
from patlint.machine.words import Codes, distances, shortest
from patlint.syntax.charset import CharSet


class Side:
    """An automaton with what is asked of it again and again."""

    def __init__(self, dfa: Dfa) -> None:
        self.dfa = dfa

    @cached_property
    def settled(self) -> frozenset[int]:
        """The states that no character leads out of."""
        return frozenset(
            state
            for state, row in enumerate(self.dfa.table)
            if row[0] == state and row.count(state) == len(row)
        )

    @cached_property
    def left(self) -> list[int | None]:
        return distances(self.dfa)

    @cached_property
    def shortest(self) -> Codes | None:
        return shortest(self.dfa)

    def accepts(self, codes: Codes) -> bool:
        """Stops as soon as the rest of the text makes no difference."""
        dfa, settled, state = self.dfa, self.settled, 0
        for code in codes:
            if state in settled:
                break
            state = dfa.table[state][dfa.alphabet.classify(code)]
        return dfa.accepting[state]


@dataclass(frozen=True, slots=True)
class Cover:
    """`takers`: the others that take all texts together, each with a text that it takes; None where there is no
    such set, and `text` is one that none of them takes. Both are None for an empty language."""

    takers: dict[int, Codes] | None = None
    text: Codes | None = None


def cover(one: Side, others: Mapping[int, Side], product: int) -> Cover:
    """Fewest others first: one alone, where one is enough. Raises LimitReached("product")."""
    word = one.shortest
    if word is None:
        return Cover()
    takers = [key for key, other in others.items() if other.accepts(word)]
    if not takers:
        return Cover(None, word)
    texts = [word]
    alone = takers
    while alone:
        missed = missing(one, [others[alone[0]]], product)
        if missed is None:
            return Cover({alone[0]: word})
        texts.append(missed)
        if not any(other.accepts(missed) for other in others.values()):
            return Cover(None, missed)
        alone = [key for key in alone if others[key].accepts(missed)]
    chosen: dict[int, Codes] = {}
    while True:
        for text in texts:
            if not any(others[key].accepts(text) for key in chosen):
                taker = next((key for key, other in others.items() if other.accepts(text)), None)
                if taker is None:
                    return Cover(None, text)
                chosen[taker] = text
        left = missing(one, [others[key] for key in chosen], product)
        if left is None:
            break
        texts = [left]
    for key in list(chosen):
        fewer = [others[each] for each in chosen if each != key]
        if fewer and missing(one, fewer, product) is None:
            del chosen[key]
    return Cover(dict(sorted(chosen.items())))


def missing(first: Side, others: Sequence[Side], product: int) -> Codes | None:
    """A shortest text of `one` that none of the others takes. Raises LimitReached("product")."""
    left, one = first.left, first.dfa
    if left[0] is None:
        return None
    automata = [other.dfa for other in others]
    moves = _moves(one, automata)
    full = [frozenset(state for state in each.settled if each.dfa.accepting[state]) for each in others]
    start = (0, *(0 for _ in others))
    seen: dict[tuple[int, ...], tuple[tuple[int, ...], int] | None] = {start: None}
    order = [start]
    for place in order:
        state, *rest = place
        if one.accepting[state] and not any(
            other.accepting[at] for other, at in zip(automata, rest, strict=True)
        ):
            codes: list[int] = []
            step = seen[place]
            while step is not None:
                codes.append(step[1])
                step = seen[step[0]]
            return tuple(reversed(codes))
        row = one.table[state]
        rows = [other.table[at] for other, at in zip(automata, rest, strict=True)]
        for letter, minterm, *minterms_of in moves:
            target = row[minterm]
            if left[target] is None:
                continue
            after = (target, *[each[number] for each, number in zip(rows, minterms_of, strict=True)])
            if after in seen or any(at in ends for at, ends in zip(after[1:], full, strict=True)):
                continue
            if len(seen) >= product:
                raise LimitReached("product", product)
            seen[after] = (place, letter)
            order.append(after)
    return None


def shared(first: Side, second: Side, product: int) -> Codes | None:
    """A shortest text that both take. Raises LimitReached("product")."""
    if first.left[0] is None or second.left[0] is None:
        return None
    one, two = first.dfa, second.dfa
    seen: dict[tuple[int, int], tuple[tuple[int, int], int] | None] = {(0, 0): None}
    order = [(0, 0)]
    moves: list[tuple[int, ...]] = []
    for place in order:
        if one.accepting[place[0]] and two.accepting[place[1]]:
            codes: list[int] = []
            step = seen[place]
            while step is not None:
                codes.append(step[1])
                step = seen[step[0]]
            return tuple(reversed(codes))
        moves = moves or _moves(one, [two])
        row, other = one.table[place[0]], two.table[place[1]]
        for letter, minterm, second_minterm in moves:
            after = (row[minterm], other[second_minterm])
            if after in seen or first.left[after[0]] is None or second.left[after[1]] is None:
                continue
            if len(seen) >= product:
                raise LimitReached("product", product)
            seen[after] = (place, letter)
            order.append(after)
    return None


def _moves(one: Dfa, others: Sequence[Dfa]) -> list[tuple[int, ...]]:
    """For each minterm of all automata together a letter, and the minterm of each automaton; readable ones first."""
    automata = (one, *others)
    sets = tuple(dict.fromkeys(chars for each in automata for chars in each.alphabet.classes))
    whole = CharSet((0, max(chars.bounds[-1] for chars in one.alphabet.classes)))
    alphabet, _ = minterms(sets, whole, True)
    rows = []
    for chars in alphabet.classes:
        first = chars.bounds[0]
        rows.append((representative(chars), *(each.alphabet.classify(first) for each in automata)))
    return sorted(rows, key=lambda row: letter_rank(row[0]))
