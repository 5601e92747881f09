"""Whether the texts of one automaton are all taken by others, which of them are needed, and a text that is not.

`Rivals.cover(one, others)` grows the set of others from texts: as long as `one` has a text that none of the chosen
takes, the first that takes it is added, and where none does, that text is the answer. So no union of hundreds of
automata is built: most are told apart by a single text, and only those that share texts are walked together.

>>> from patlint.language import Language
>>> patterns = ("a[0-9]", "b", "a[0-4]", "a[5-9]x?", "a1")
>>> rivals = Rivals({at: Language(each, mode="match").dfa for at, each in enumerate(patterns)}, 1000)
>>> rivals.cover(0, [1, 2, 3, 4]).takers
{2: (97, 48), 3: (97, 53)}
>>> rivals.missing(0, [1, 2])
(97, 53)

Cost: a few texts against each of the others, and a walk over tuples of states for each of the few that are compared.
Limit: `product` pairs of states. Source of the method: refinement from counterexamples (Clarke, Grumberg,
Jha, Lu and Veith, Counterexample-guided abstraction refinement, CAV 2000), here of a union.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from patlint.limits import LimitReached
from patlint.machine.alphabet import PREFERRED
from patlint.machine.dfa import Dfa, canonical
from patlint.machine.words import Codes, distances, sample, shortest

SAMPLES = 6
"""Random texts that are tried before automata are walked in pairs."""
MORE_SAMPLES = 100
"""Those before many are walked together."""
_PLEASANT = {code: place for place, code in enumerate((*PREFERRED, *range(33, 127), 32, 10))}


@dataclass(frozen=True, slots=True)
class Cover:
    """`takers`: the others that take all texts together, each with a text that it takes; None where there is no
    such set, and `text` is one that none of them takes. Both are None for an empty language."""

    takers: dict[int, Codes] | None = None
    text: Codes | None = None


class _Side:
    """One automaton with what is asked of it again and again."""

    def __init__(self, dfa: Dfa) -> None:
        self.dfa = dfa
        self._classes: dict[int, int] = {}

    @cached_property
    def settled(self) -> frozenset[int]:
        """The states that no character leads out of."""
        return frozenset(
            state
            for state, row in enumerate(self.dfa.table)
            if row[0] == state and row.count(state) == len(row)
        )

    @cached_property
    def full(self) -> frozenset[int]:
        """Those of them that accept."""
        return frozenset(state for state in self.settled if self.dfa.accepting[state])

    @cached_property
    def left(self) -> list[int | None]:
        return distances(self.dfa)

    @cached_property
    def shortest(self) -> Codes | None:
        return shortest(self.dfa)

    @cached_property
    def samples(self) -> list[Codes]:
        return list(dict.fromkeys(sample(self.dfa, 0, SAMPLES)))

    def more_samples(self) -> list[Codes]:
        return list(dict.fromkeys(sample(self.dfa, 1, MORE_SAMPLES)))

    @cached_property
    def canonical(self) -> Dfa:
        return canonical(self.dfa)

    def accepts(self, codes: Codes) -> bool:
        """Stops as soon as the rest of the text makes no difference."""
        table, settled, classes, state = self.dfa.table, self.settled, self._classes, 0
        for code in codes:
            if state in settled:
                break
            minterm = classes.get(code)
            if minterm is None:
                minterm = classes[code] = self.dfa.alphabet.classify(code)
            state = table[state][minterm]
        return self.dfa.accepting[state]


class Rivals:
    """Automata over one universe, by numbers, and how their languages lie to each other."""

    def __init__(self, automata: Mapping[int, Dfa], product: int) -> None:
        self._sides = {number: _Side(dfa) for number, dfa in automata.items()}
        self._product = product
        self._visited = 0
        self._spreads: dict[int, list[int]] = {}

    def shortest(self, one: int) -> Codes | None:
        return self._sides[one].shortest

    def is_universal(self, one: int) -> bool:
        return all(self._sides[one].dfa.accepting)

    def equal(self, one: int, other: int) -> bool:
        a, b = self._sides[one], self._sides[other]
        if len(a.dfa) != len(b.dfa) or a.left[0] != b.left[0]:
            return False
        if a.shortest is not None and not b.accepts(a.shortest):
            return False
        return a.canonical == b.canonical

    def cover(self, one: int, others: Sequence[int]) -> Cover:
        """Fewest others: one alone, where one is enough. Raises LimitReached("product")."""
        sides = self._sides
        first = sides[one]
        word = first.shortest
        if word is None:
            return Cover()
        alone = [each for each in others if sides[each].accepts(word)]
        if not alone:
            return Cover(None, word)
        texts = [word]
        for text in first.samples:
            kept = [each for each in alone if sides[each].accepts(text)]
            if not kept and not any(sides[each].accepts(text) for each in others):
                return Cover(None, text)
            alone = kept
        while alone:
            missed = self.missing(one, alone[:1])
            if missed is None:
                return Cover({alone[0]: word})
            if not any(sides[each].accepts(missed) for each in others):
                return Cover(None, missed)
            texts.append(missed)
            alone = [each for each in alone if sides[each].accepts(missed)]
        return self._several(one, others, texts)

    def _several(self, one: int, others: Sequence[int], texts: list[Codes]) -> Cover:
        """As `cover`, where none is enough alone; `texts` of `one` are known to be taken.

        All walks together visit at most `product` tuples, each counted as often as it has others.
        """
        sides = self._sides
        for text in sides[one].more_samples():
            if not any(sides[each].accepts(text) for each in others):
                return Cover(None, text)
        self._visited = 0
        chosen: dict[int, Codes] = {}
        while True:
            for text in texts:
                if not any(sides[each].accepts(text) for each in chosen):
                    taker = next((each for each in others if sides[each].accepts(text)), None)
                    if taker is None:
                        return Cover(None, text)
                    chosen[taker] = text
            left = self.missing(one, list(chosen), again=True)
            if left is None:
                break
            texts = [left]
        for each in list(chosen):
            fewer = [other for other in chosen if other != each]
            if fewer and self.missing(one, fewer, again=True) is None:
                del chosen[each]
        return Cover(dict(sorted(chosen.items())))

    def missing(self, one: int, others: Sequence[int], again: bool = False) -> Codes | None:
        """A shortest text of `one` that none of the others takes. Raises LimitReached("product").

        `again`: what was visited before counts as well.
        """
        self._visited = self._visited if again else 0
        first = self._sides[one]
        rest = [self._sides[each] for each in others]
        full = [each.full for each in rest]
        accepting = [each.dfa.accepting for each in rest]

        def found(place: tuple[int, ...]) -> bool:
            return first.dfa.accepting[place[0]] and not any(
                ends[at] for ends, at in zip(accepting, place[1:], strict=True)
            )

        def hopeless(place: tuple[int, ...]) -> bool:
            return first.left[place[0]] is None or any(
                at in ends for at, ends in zip(place[1:], full, strict=True)
            )

        return self._walk([one, *others], found, hopeless)

    def shared(self, one: int, other: int) -> Codes | None:
        """A shortest text that both take. Raises LimitReached("product")."""
        a, b = self._sides[one], self._sides[other]
        self._visited = 0
        return self._walk(
            [one, other],
            lambda place: a.dfa.accepting[place[0]] and b.dfa.accepting[place[1]],
            lambda place: a.left[place[0]] is None or b.left[place[1]] is None,
        )

    def _walk(
        self,
        numbers: Sequence[int],
        found: Callable[[tuple[int, ...]], bool],
        hopeless: Callable[[tuple[int, ...]], bool],
    ) -> Codes | None:
        """Breadth-first over tuples of states: the text of the first that is `found`."""
        tables = [self._sides[number].dfa.table for number in numbers]
        start = (0,) * len(tables)
        if hopeless(start):
            return None
        seen: dict[tuple[int, ...], tuple[tuple[int, ...], int] | None] = {start: None}
        order = [start]
        moves: list[tuple[tuple[int, ...], int]] = []
        for place in order:
            if found(place):
                codes: list[int] = []
                step = seen[place]
                while step is not None:
                    codes.append(step[1])
                    step = seen[step[0]]
                return tuple(reversed(codes))
            moves = moves or self._moves(numbers)
            rows = [table[state] for table, state in zip(tables, place, strict=True)]
            for minterms, letter in moves:
                after = tuple([row[minterm] for row, minterm in zip(rows, minterms, strict=True)])
                if after in seen:
                    continue
                seen[after] = (place, letter)
                if not hopeless(after):
                    order.append(after)
                    self._visited += len(place) - 1
                    if self._visited > self._product:
                        raise LimitReached("product", self._product)
        return None

    # letters

    @cached_property
    def _points(self) -> list[int]:
        """One character for each stretch in which no automaton tells characters apart; the readable ones first."""
        points = set(_PLEASANT)
        for side in self._sides.values():
            points.update(side.dfa.alphabet.cuts)
        end = min(
            side.dfa.alphabet.classes[side.dfa.alphabet.owners[-1]].bounds[-1]
            for side in self._sides.values()
        )
        far = len(_PLEASANT)
        return sorted(
            (point for point in points if point < end),
            key=lambda point: (_PLEASANT.get(point, far), point < 161, point),
        )

    def _spread(self, number: int) -> list[int]:
        """The minterm of each point."""
        spread = self._spreads.get(number)
        if spread is None:
            alphabet = self._sides[number].dfa.alphabet
            cuts, owners = alphabet.cuts, alphabet.owners
            spread = self._spreads[number] = [owners[bisect_right(cuts, point) - 1] for point in self._points]
        return spread

    def _moves(self, numbers: Sequence[int]) -> list[tuple[tuple[int, ...], int]]:
        """What a character may do to the automata together, each with a letter that does it; readable ones first."""
        columns = [self._spread(number) for number in numbers]
        first: dict[tuple[int, ...], int] = {}
        for minterms, point in zip(zip(*columns, strict=True), self._points, strict=True):
            if minterms not in first:
                first[minterms] = point
        return list(first.items())
