r"""The search for what could be written in the place of parts of a pattern.

A `Search` looks at one pattern. Candidates come from the laws of expressions and from the automata of islands
(`islands`), written with the author's habits (`spelling`). A `Change` is one text for one island; `ways` gives
sets of changes for the whole pattern. Nothing here is a proof of more than the island: `shorten` and `quicker`
prove what they take.

>>> from patlint.syntax.parser import parse
>>> search = Search(parse("x(?:a|b)y{1,}"), "fullmatch", "groups", None, DEFAULT_LIMITS)
>>> [(change.island.span, change.text, change.certain) for change in next(search.ways())]
[((1, 8), '[ab]', True), ((8, 13), 'y+', True)]

Limit: automata up to `ATTEMPTS` islands.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

from patlint.limits import DEFAULT_LIMITS as DEFAULT_LIMITS
from patlint.limits import LimitReached, Limits
from patlint.machine.algebra import Algebra
from patlint.machine.determinise import Mode
from patlint.machine.dfa import Dfa
from patlint.machine.expr import BESIDE, LOOSE, TIGHT, Chain, Chars, Expr, Times, nullable
from patlint.machine.expression import expression, in_order
from patlint.rewrite.islands import (
    Island,
    Through,
    expression_of,
    has_comment,
    inner_islands,
    islands,
    mixes_cases,
)
from patlint.rewrite.proof import Keeps, ends, part_language
from patlint.rewrite.spelling import Habits, habits_of
from patlint.rewrite.taste import TURNED_SAVING, is_readable, merges_words, runs_for_loops
from patlint.rewrite.worth import is_involved, is_word
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet
from patlint.syntax.classes import char_set
from patlint.syntax.parser import PatternError, parse

ATTEMPTS = 6
"""Islands of one pattern of which the automaton is turned into an expression, a few milliseconds each."""
BINDINGS = {"loose": LOOSE, "beside": BESIDE, "tight": TIGHT}


@dataclass(frozen=True, slots=True)
class Change:
    """A new text for an island; `certain` where its ends are proven to come in the same order."""

    island: Island
    text: str
    node: t.Node
    certain: bool
    saved: int
    gives_up_runs: bool = False
    """Wanted only where it is quicker to match."""


@dataclass(slots=True)
class Known:
    """What is to be known about an island once."""

    pattern: t.Pattern
    node: t.Node
    limits: Limits
    _language: Dfa | None = None
    _ends: Dfa | None = None

    @property
    def language(self) -> Dfa:
        if self._language is None:
            self._language = part_language(self.pattern, self.node, self.limits)
        return self._language

    @property
    def ends(self) -> Dfa:
        if self._ends is None:
            self._ends = ends(self.pattern, self.node, self.limits)
        return self._ends


@dataclass(slots=True)
class Search:
    """The search for one pattern: ways to edit it, and the proof of each."""

    parsed: t.Pattern
    mode: Mode
    keeps: Keeps
    target: tuple[int, int] | None
    limits: Limits
    fences: tuple[int, ...] = ()
    attempts: int = 0
    text: str = ""
    habits: Habits = field(init=False)
    tried: dict[tuple[t.Span, bool], list[Change]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        text = self.parsed.text
        self.text = text if isinstance(text, str) else text.decode("latin-1")
        self.habits = habits_of(self.parsed)

    def ways(self) -> Iterator[list[Change]]:
        """Sets of edits, the boldest first."""
        if self.keeps == "language":
            if self.parsed.groups and not self.refers():
                yield self.everywhere("groups")
            if self.mode != "fullmatch":
                yield [edit for island in islands(self.parsed) for edit in self.trimmed(island)]
        if self.keeps != "groups":
            if self.has_bound_branches():
                yield self.everywhere("anchors")
            yield self.everywhere("plain")
        yield self.everywhere("plain", certain=True)

    def everywhere(self, through: Through, certain: bool = False) -> list[Change]:
        return [
            edit for island in islands(self.parsed, through) for edit in self.best(island, through, certain)
        ]

    def has_bound_branches(self) -> bool:
        """Whether an alternation holds anchors."""
        return any(
            isinstance(node, t.Alternation) and any(isinstance(below, t.Anchor) for below in t.walk(node))
            for node in t.walk(self.parsed.root)
        )

    def refers(self) -> bool:
        return any(isinstance(node, t.BackReference | t.Conditional) for node in t.walk(self.parsed.root))

    def best(self, island: Island, through: Through = "plain", certain: bool = False) -> list[Change]:
        """The edits in an island that save most; `certain` asks for proof that needs no look at the rest."""
        whole = [edit for edit in self.attempt(island) if edit.certain or not certain]
        if whole:
            whole = [max(whole, key=lambda edit: (not edit.gives_up_runs, edit.saved, edit.certain))]
        if not t.children(island.node) or is_word(island.node):
            return whole
        parts = [
            edit
            for inner in inner_islands(island, self.parsed.is_bytes, through)
            for edit in self.best(inner, through, certain)
        ]
        return whole if sum(edit.saved for edit in whole) > sum(edit.saved for edit in parts) else parts

    def attempt(self, island: Island) -> list[Change]:
        key = (island.span, island.branches)
        found = self.tried.get(key)
        if found is None:
            found = self.tried[key] = list(self.edits(island))
        return found

    def edits(self, island: Island) -> Iterator[Change]:
        start, end = island.span
        old = self.text[start:end]
        node = island.node
        if len(old) < 2 or is_word(node) or self.is_fixed(island):
            return
        anchored = any(isinstance(each, t.Anchor) for each in t.walk(node))
        captures = sum(isinstance(each, t.Group) and each.index is not None for each in t.walk(node))
        room = len(old) - 2 * captures
        turned_room = int(len(old) * (1 - TURNED_SAVING))
        old_parts = Known(self.parsed, node, self.limits)
        bare = room
        for text, turned in sorted(
            self.texts(island, 0 if anchored else min(room, turned_room), old_parts).items(),
            key=lambda row: len(row[0]),
        ):
            if len(text) >= room or not text:
                continue
            read = self.read(text, island)
            if read is None or not is_readable(node, read.root, (len(old), len(text)), turned, read.is_bytes):
                continue
            if anchored:
                yield Change(island, text, read.root, False, len(old) - len(text))  # only the whole can tell
                return
            try:
                certain = not captures and ends(read, read.root, self.limits) == old_parts.ends
                if not certain:
                    if len(text) >= bare or part_language(read, read.root, self.limits) != old_parts.language:
                        continue
                    bare = len(text)
            except LimitReached:
                continue
            gives_up_runs = runs_for_loops(node, read.root, read.is_bytes)
            yield Change(island, text, read.root, certain, len(old) - len(text), gives_up_runs)
            if certain and not gives_up_runs:
                return

    def is_fixed(self, island: Island) -> bool:
        """Whether an island cannot be written anew without loss."""
        start, end = island.span
        if any(start < fence < end for fence in self.fences):
            return True
        return has_comment(self.text[start:end], self.habits.verbose) or (
            mixes_cases(island.node, self.parsed.is_bytes)
        )

    def texts(self, island: Island, room: int, old: Known) -> dict[str, bool]:
        """Candidates for an island; True for those that are written anew from the automaton."""
        node, binding = island.node, BINDINGS[island.place]
        found: dict[str, bool] = {}
        for ordered in (True, False):
            algebra = self.algebra(island.flags, ordered)
            short = expression_of(node, algebra, self.parsed.is_bytes)
            found[algebra.text(short, binding)] = False
            counted = algebra.counted(short)
            found.setdefault(algebra.text(counted, binding), False)
        room = min(room, min(map(len, found)) - 1)  # what is no shorter than the laws' is of no use
        if room > 0 and self.attempts < ATTEMPTS and is_involved(node) and not merges_words(node):
            self.attempts += 1
            try:
                made = expression(old.language, algebra, room)
            except LimitReached:
                made = None
            if made is not None:
                leaves = [
                    char_set(each, self.parsed.is_bytes)
                    for each in t.walk(node)
                    if isinstance(each, t.Literal | t.Dot | t.ClassEscape | t.Set)
                ]
                found.setdefault(algebra.text(in_order(made, leaves), binding), True)
        return found

    def trimmed(self, island: Island) -> list[Change]:
        """As `best`, without what may be missing at the ends of the pattern."""
        left = island.first and self.mode == "search"
        start, end = island.span
        if not (left or island.last) or self.is_fixed(island):
            return self.best(island)
        algebra = self.algebra(island.flags, False)
        expr = expression_of(island.node, algebra, self.parsed.is_bytes)
        cut = _trim(expr, algebra, left, island.last)
        if cut == expr:
            return self.best(island)
        text = algebra.text(cut, BINDINGS[island.place])
        read = self.read(text, island)
        if read is None or (not text and island.branches):
            return self.best(island)
        return [Change(island, text, read.root, False, end - start - len(text))]

    def algebra(self, flags: int, ordered: bool) -> Algebra:
        def spell(chars: CharSet) -> str:
            return self.habits.spell(chars, flags)

        return Algebra(spell, ordered, self.habits.braces, words=True)

    def read(self, text: str, island: Island) -> t.Pattern | None:
        """An island's new text as a pattern of its own."""
        flags = island.flags | (t.VERBOSE if self.habits.verbose else 0)
        try:
            return parse(self.typed(text), flags, self.target, self.limits)
        except (PatternError, LimitReached):
            return None

    def typed(self, text: str) -> str | bytes:
        return text.encode("latin-1") if self.parsed.is_bytes else text


def _trim(expr: Expr, algebra: Algebra, left: bool, right: bool) -> Expr:
    """`expr` without what may be missing at its left or right end."""
    items: list[Expr] = list(expr.items) if isinstance(expr, Chain) else [expr]
    for at_end in [True] * right + [False] * left:
        while items:
            place = -1 if at_end else 0
            item = items[place]
            if nullable(item):
                if _is_sign(item):
                    break
                del items[place]
            elif isinstance(item, Times) and item.low != item.high:
                items[place] = algebra.times(item.body, item.low, item.low)
            else:
                break
    return algebra.chain(items)


def _is_sign(expr: Expr) -> bool:
    """Whether `expr` is optional punctuation, which says what is expected there; a letter may go (`jars?`)."""
    if not isinstance(expr, Times) or expr.high != 1:
        return False
    items = expr.body.items if isinstance(expr.body, Chain) else (expr.body,)
    return all(
        isinstance(item, Chars) and item.chars.size() == 1 and not chr(item.chars.bounds[0]).isalnum()
        for item in items
    )
