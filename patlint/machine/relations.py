"""How two languages lie to each other, and texts that show it: one walk over pairs of states.

Cost: at most (states of a) x (states of b) pairs times common minterms. Limit: `product`.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from patlint.limits import LimitReached, Limits
from patlint.machine.alphabet import common, representative
from patlint.machine.dfa import Dfa, minimal

Codes = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Relation:
    """Shortest texts, as code points: in `a` only, in `b` only, in both; None where there is none.

    The texts are proofs of difference or overlap, None a proof of inclusion or disjointness.
    """

    only_a: Codes | None
    only_b: Codes | None
    both: Codes | None

    @property
    def word(self) -> str:
        """equal, within, covers, disjoint or overlaps, as seen from `a`."""
        if self.only_a is None and self.only_b is None:
            return "equal"
        if self.only_a is None:
            return "within"
        if self.only_b is None:
            return "covers"
        return "disjoint" if self.both is None else "overlaps"


def relation(a: Dfa, b: Dfa, limits: Limits, *, until_differs: bool = False) -> Relation:
    """Walk the pairs breadth-first; with `until_differs` stop at the first text that one has and the other not.

    Raises LimitReached("product").
    """
    alphabet, of_a, of_b = common(a.alphabet, b.alphabet)
    letters = [representative(chars) for chars in alphabet.classes]
    # Characters that are pleasant to read first, so that they are preferred among texts of equal length.
    moves = sorted(zip(letters, of_a, of_b, strict=True), key=lambda move: letter_rank(move[0]))
    seen: dict[tuple[int, int], tuple[tuple[int, int], int] | None] = {(0, 0): None}
    order = [(0, 0)]
    found: dict[str, tuple[int, int]] = {}
    for pair in order:
        in_a, in_b = a.accepting[pair[0]], b.accepting[pair[1]]
        kind = "both" if in_a and in_b else "a" if in_a else "b" if in_b else ""
        if kind and kind not in found:
            found[kind] = pair
            if len(found) == 3 or (until_differs and kind != "both"):
                break
        row_a, row_b = a.table[pair[0]], b.table[pair[1]]
        for letter, class_a, class_b in moves:
            target = (row_a[class_a], row_b[class_b])
            if target not in seen:
                if len(seen) >= limits.product:
                    raise LimitReached("product", limits.product)
                seen[target] = (pair, letter)
                order.append(target)

    def text(kind: str) -> Codes | None:
        if kind not in found:
            return None
        codes: list[int] = []
        step = seen[found[kind]]
        while step is not None:
            codes.append(step[1])
            step = seen[step[0]]
        return tuple(reversed(codes))

    return Relation(text("a"), text("b"), text("both"))


def letter_rank(code: int) -> tuple[int, int]:
    if code == 10:
        return 1, code
    return (0 if 32 < code < 127 else 1 if code == 32 or code > 160 else 2), code


def combine(a: Dfa, b: Dfa, keep: Callable[[bool, bool], bool], limits: Limits) -> Dfa:
    """The minimal automaton of the texts for which `keep(in a, in b)`. Raises LimitReached("product")."""
    alphabet, of_a, of_b = common(a.alphabet, b.alphabet)
    moves = list(zip(of_a, of_b, strict=True))
    number = {(0, 0): 0}
    order = [(0, 0)]
    table: list[tuple[int, ...]] = []
    for state_a, state_b in order:
        row_a, row_b = a.table[state_a], b.table[state_b]
        row = []
        for class_a, class_b in moves:
            target = (row_a[class_a], row_b[class_b])
            index = number.get(target)
            if index is None:
                if len(order) >= limits.product:
                    raise LimitReached("product", limits.product)
                index = number[target] = len(order)
                order.append(target)
            row.append(index)
        table.append(tuple(row))
    accepting = [keep(a.accepting[state_a], b.accepting[state_b]) for state_a, state_b in order]
    return minimal(alphabet, table, accepting)


def complement(dfa: Dfa) -> Dfa:
    return Dfa(dfa.alphabet, dfa.table, tuple(not end for end in dfa.accepting))
