r"""Proofs that one pattern, or a part of one, may stand for another.

`ends` is the strongest: it compares two parts without groups, anchors and the like by the places at which
they can end, *in the order in which the engine tries them*. Whatever stands around a part only learns these
places in this order (nothing in such a part looks left or right, sets a group or a loop's mark), and trying
a place a second time ends as it did the first time. So parts that agree may be exchanged anywhere: same
language, spans, groups.

The order of the places is a regular language of marked texts: { u # v : the part ends after u and after u
v, and the engine comes to the later place first }. Together with the plain language it fixes the whole
order.

`same_groups` walks two patterns side by side and compares by `ends` what differs; `gives_nothing_back` is for
repeats that are made possessive; `same_language` and
`same_spans` compare whole patterns; `holds` asks what has to stay.
Method: the ordered subset construction of `patlint.machine.priority`, without its cut.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from typing import Literal, TypeAlias

from patlint.limits import LimitReached, Limits
from patlint.machine import agreement
from patlint.machine.alphabet import Alphabet
from patlint.machine.determinise import Mode, language
from patlint.machine.dfa import Dfa, canonical, minimal
from patlint.machine.nfa import Nfa
from patlint.machine.obligations import FREE
from patlint.machine.priority import MARKER
from patlint.machine.program import compile_tree
from patlint.rewrite.islands import is_pure, shape
from patlint.rewrite.possessive import END, rests
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet

Keeps: TypeAlias = Literal["language", "spans", "groups"]


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
        return not a.inexact and not b.inexact and agreement.same_spans(a, b, small, not_empty=scanning)
    except LimitReached:
        return False


def spans_stay(old: t.Pattern, new: t.Pattern, mode: Mode, limits: Limits) -> bool:
    """Whether both have the same outcome up to groups in `mode`, from every place of a text.

    Equal spans under match say nothing about fullmatch, which tries further ways: it is the whole text or nothing.
    """
    if mode != "fullmatch":
        return same_spans(old, new, mode == "search", limits)
    if not _looks_left(old) and not _looks_left(new):
        return same_language(old, new, mode, limits)
    one, other = (replace(each, root=t.Sequence((0, 0), (each.root, END))) for each in (old, new))
    return same_spans(one, other, False, limits)


def _looks_left(pattern: t.Pattern) -> bool:
    """Whether what stands to the left of a match may decide about it."""
    return any(
        (isinstance(node, t.Anchor) and node.kind not in ("$", r"\Z"))
        or (isinstance(node, t.Look) and not node.ahead)
        for node in t.walk(pattern.root)
    )


def holds(old: t.Pattern, new: t.Pattern, modes: Iterable[Mode], keeps: Keeps, limits: Limits) -> bool:
    """Whether `new` does as `old` in each of `modes`, as far as `keeps` goes; False where it is not proven."""
    if old.flags != new.flags:
        return False
    modes = set(modes)
    if (old.groups, old.names) == (new.groups, new.names):
        if same_groups(old, new, limits) or gives_nothing_back(old, new, modes, limits):
            return True
    elif keeps != "language":
        return False
    match keeps:
        case "groups":
            return False
        case "spans":
            return all(spans_stay(old, new, mode, limits) for mode in modes)
        case "language":
            return all(same_language(old, new, mode, limits) for mode in modes)


def gives_nothing_back(old: t.Pattern, new: t.Pattern, modes: Iterable[Mode], limits: Limits) -> bool:
    """Whether `new` is `old` with repeats made possessive that never had to give back what they took, so that both
    do the same in every way (`possessive.rests`); False where that is not proven."""
    for whole in {mode == "fullmatch" for mode in modes}:
        found = rests(old, new, whole)
        if found is None or not all(same_spans(one, other, False, limits) for one, other in found):
            return False
    return True


def same_groups(old: t.Pattern, new: t.Pattern, limits: Limits) -> bool:
    """Whether both do the same in every way: they differ only in parts that look at nothing outside
    themselves, and whose ends come in the same order.

    False where it is not so, or a limit is met. Cost: one `ends` for each part that differs.
    """
    try:
        return _Pair(old, new, limits).same(old.root, new.root)
    except LimitReached:
        return False


class _Pair:
    """Two patterns side by side."""

    def __init__(self, old: t.Pattern, new: t.Pattern, limits: Limits) -> None:
        self.old = old
        self.new = new
        self.limits = limits

    def same(self, a: t.Node, b: t.Node) -> bool:
        a, b = _bare(a), _bare(b)
        if shape(a) == shape(b):
            return True
        if self.pure(a) and self.pure(b):
            return ends(self.old, a, self.limits) == ends(self.new, b, self.limits)
        if isinstance(a, t.Alternation) and isinstance(b, t.Alternation):
            return self.rows(a.branches, b.branches, t.Alternation)
        if isinstance(a, t.Sequence) or isinstance(b, t.Sequence):
            return self.rows(_items(a), _items(b), t.Sequence)
        if type(a) is not type(b):
            return False
        below_a, below_b = t.children(a), t.children(b)
        if not below_a or len(below_a) != len(below_b) or _head(a) != _head(b):
            return False
        return all(self.same(one, other) for one, other in zip(below_a, below_b, strict=True))

    def rows(
        self, a: tuple[t.Node, ...], b: tuple[t.Node, ...], kind: type[t.Sequence] | type[t.Alternation]
    ) -> bool:
        """Neighbours on either side: what is not pure must stand on both in the same order."""
        runs_a, firm_a = self.parted(a)
        runs_b, firm_b = self.parted(b)
        if len(firm_a) != len(firm_b):
            return False
        for run_a, run_b in zip(runs_a, runs_b, strict=True):
            if kind is t.Alternation and bool(run_a) != bool(run_b):
                return False  # no branch is not the same as an empty one
            if run_a != run_b and not self.same_runs(kind((0, 0), run_a), kind((0, 0), run_b)):
                return False
        return all(self.same(one, other) for one, other in zip(firm_a, firm_b, strict=True))

    def same_runs(self, a: t.Node, b: t.Node) -> bool:
        return shape(a) == shape(b) or ends(self.old, a, self.limits) == ends(self.new, b, self.limits)

    def parted(self, nodes: tuple[t.Node, ...]) -> tuple[list[tuple[t.Node, ...]], list[t.Node]]:
        """The runs of pure nodes, empty ones too, and the others between them."""
        runs: list[list[t.Node]] = [[]]
        firm: list[t.Node] = []
        for node in nodes:
            if self.pure(node):
                runs[-1].append(node)
            else:
                firm.append(node)
                runs.append([])
        return [tuple(run) for run in runs], firm

    def pure(self, node: t.Node) -> bool:
        return is_pure(node, self.old.is_bytes)


def _bare(node: t.Node) -> t.Node:
    while isinstance(node, t.Group) and node.index is None and not (node.add_flags or node.del_flags):
        node = node.body
    return node


def _items(node: t.Node) -> tuple[t.Node, ...]:
    """The items of a sequence, plain groups opened."""
    node = _bare(node)
    if isinstance(node, t.Sequence):
        return tuple(below for item in node.items for below in _items(item))
    return (node,)


def _head(node: t.Node) -> object:
    """What a node says beside its children."""
    match node:
        case t.Group():
            return node.index, node.name, node.add_flags, node.del_flags
        case t.Repeat():
            return node.minimum, node.maximum, node.kind
        case t.Look():
            return node.ahead, node.negated, node.width
        case t.Conditional():
            return node.index, node.name
        case _:
            return None
