r"""Proofs that one pattern, or a part of one, may stand for another.

`ends` is the strongest: it compares two parts without groups, anchors and the like by the places at which
they can end, *in the order in which the engine tries them*. Whatever stands around a part only learns these
places in this order (nothing in such a part looks left or right, sets a group or a loop's mark), and trying
a place a second time ends as it did the first time. So parts that agree may be exchanged anywhere: same
language, spans, groups.

The order of the places is a regular language of marked texts: { u # v : the part ends after u and after u
v, and the engine comes to the later place first }. Together with the plain language it fixes the whole
order.

`same_language` and `same_spans` compare whole patterns.
Method: the ordered subset construction of `patlint.machine.priority`, without its cut.
"""

from __future__ import annotations

from dataclasses import replace

from patlint.limits import LimitReached, Limits
from patlint.machine.alphabet import Alphabet, common
from patlint.machine.determinise import Mode, language
from patlint.machine.dfa import Dfa, canonical, minimal
from patlint.machine.nfa import Nfa
from patlint.machine.obligations import FREE
from patlint.machine.priority import MARKER, spans
from patlint.machine.program import compile_tree
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet

MOST_CONTEXTS = 40
"""Pairs of contexts in which spans are compared, a few milliseconds each; look-behinds may have more."""


def ends(pattern: t.Pattern, part: t.Node, limits: Limits) -> Dfa:
    """The canonical automaton of `part`'s texts and of their order; `part` must not look outside itself.

    Raises LimitReached("states" or "work").
    """
    nfa = Nfa(compile_tree(pattern, limits, root=part), limits)
    accept = nfa.accept
    width = len(nfa.alphabet)
    if any(duty for _, duty in nfa.initial(nfa.start_context)) or nfa.asks_start or nfa.inexact:
        raise ValueError("a part with assertions has no ends of its own")
    first: tuple[int, ...] = tuple(position for position, _ in nfa.initial(nfa.start_context))
    # Before the mark an ordered tuple of positions, behind it a bit mask of those preferred to the marked
    # end.
    number: dict[tuple[int, ...] | int, int] = {first: 0}
    order: list[tuple[int, ...] | int] = [first]
    table: list[tuple[int, ...]] = []
    work = 0

    def index_of(state: tuple[int, ...] | int) -> int:
        index = number.get(state)
        if index is None:
            if len(order) >= limits.states:
                raise LimitReached("states", limits.states)
            index = number[state] = len(order)
            order.append(state)
        return index

    for state in order:
        row: list[int] = []
        work += width
        threads = state if isinstance(state, tuple) else tuple(_bits(state))
        work += width * len(threads)
        if work > limits.work:
            raise LimitReached("work", limits.work)
        for minterm in range(width):
            readers = nfa.readers[minterm]
            after: dict[int, None] = {}
            for position in threads:
                if position != accept and readers >> position & 1:
                    for reached, duty in nfa.after(position, minterm, nfa.contexts[minterm]):
                        if duty != FREE:
                            raise ValueError("a part with assertions has no ends of its own")
                        after[reached] = None
            row.append(
                index_of(tuple(after) if isinstance(state, tuple) else sum(1 << each for each in after))
            )
        if isinstance(state, tuple) and accept in state:
            row.append(index_of(sum(1 << position for position in state[: state.index(accept)])))
        else:
            row.append(index_of(0))
        table.append(tuple(row))
    accepting = [
        accept in state if isinstance(state, tuple) else bool(state >> accept & 1) for state in order
    ]
    alphabet = Alphabet(
        (*nfa.alphabet.classes, CharSet((MARKER, MARKER + 1))),
        (*nfa.alphabet.cuts, MARKER),
        (*nfa.alphabet.owners, width),
    )
    return canonical(minimal(alphabet, table, accepting))


def _bits(mask: int) -> list[int]:
    out = []
    while mask:
        low = mask & -mask
        mask ^= low
        out.append(low.bit_length() - 1)
    return out


def part_language(pattern: t.Pattern, part: t.Node, limits: Limits) -> Dfa:
    """The canonical automaton of the texts that `part`, which must not look outside itself, takes as a
    whole."""
    return canonical(language(Nfa(compile_tree(pattern, limits, root=part), limits), "fullmatch"))


def same_language(old: t.Pattern, new: t.Pattern, mode: Mode, limits: Limits) -> bool:
    """Whether both take the same texts in `mode`, neither all nor none; False where one is not said
    exactly, or a limit is met."""
    try:
        automata = []
        for pattern in (old, new):
            nfa = Nfa(compile_tree(pattern, limits), limits)
            if nfa.inexact:
                return False
            automata.append(canonical(language(nfa, mode)))
    except LimitReached:
        return False
    return automata[0] == automata[1] and len(automata[0]) > 1


def same_spans(old: t.Pattern, new: t.Pattern, scanning: bool, limits: Limits) -> bool:
    """Whether both match the same spans, whatever stands to the left; with `scanning` also where the match
    may not be empty, so that search, finditer, sub and split (without groups) agree too.

    False where one is not said exactly, or a limit is met.
    """
    small = replace(limits, states=min(limits.states, 400), work=min(limits.work, 40_000))
    try:
        a, b = (Nfa(compile_tree(pattern, small), small) for pattern in (old, new))
        if a.inexact or b.inexact:
            return False
        _, of_a, of_b = common(a.alphabet, b.alphabet)
        moves = list(zip(of_a, of_b, strict=True))
        pairs = {(a.start_context, b.start_context): None}
        order = list(pairs)
        for context_a, context_b in order:
            for minterm_a, minterm_b in moves:
                after = a.next_context(context_a, minterm_a), b.next_context(context_b, minterm_b)
                if after not in pairs:
                    pairs[after] = None
                    order.append(after)
            if len(order) > MOST_CONTEXTS:
                return False
        for context_a, context_b in pairs:
            for not_empty in (False, True) if scanning else (False,):
                if canonical(spans(a, context_a, not_empty)) != canonical(spans(b, context_b, not_empty)):
                    return False
    except LimitReached:
        return False
    return True
