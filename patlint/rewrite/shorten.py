r"""A shorter pattern that may stand for another, proven.

>>> shorten("(?:0[0-9]|1[0-9]|2[0-3]):[0-5][0-9]")
'(?:[01][0-9]|2[0-3]):[0-5][0-9]'
>>> shorten("x(a|a)y", keeps="groups") is None  # the group's text is kept, its inside may change
False
>>> shorten("[0-9]{4}-[0-9]{2}") is None
True

Candidates come from the laws of expressions and from the automata of islands (`islands`), written with the
author's habits (`spelling`). None is trusted: each is parsed again, must differ from the original in its
islands only, must have the same groups, must not be deeper nested or have more operators, must not be
slower to match, and

- keeps="groups": each island ends at the same places in the same order (`proof.ends`), so that nothing
  changes at all;
- keeps="spans": that, or the spans of the whole pattern are proven equal;
- keeps="language": that, or the languages in `mode` are proven equal. Then optional parts at the ends may
  go too, where they decide nothing, and unnamed groups with the island in which they stand.

Limits: patterns up to `LONGEST` characters; automata up to `ATTEMPTS` islands. A limit that is met gives no
suggestion.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from typing import Literal, TypeAlias

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.algebra import Algebra
from patlint.machine.determinise import Mode
from patlint.machine.dfa import Dfa
from patlint.machine.expr import BESIDE, LOOSE, TIGHT, Chain, Chars, Expr, Times, nullable
from patlint.machine.expression import expression, in_order
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Growth, ambiguity_of
from patlint.rewrite.islands import (
    Island,
    Through,
    expression_of,
    has_comment,
    inner_islands,
    islands,
    mixes_cases,
    shape,
    splice,
)
from patlint.rewrite.proof import ends, part_language, same_language, same_spans
from patlint.rewrite.spelling import Habits, habits_of
from patlint.rewrite.taste import TURNED_SAVING, is_readable, merges_words, runs_for_loops
from patlint.rewrite.worth import is_involved, is_word, worth_a_try
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet
from patlint.syntax.classes import char_set
from patlint.syntax.parser import PatternError, parse

Keeps: TypeAlias = Literal["language", "spans", "groups"]

LONGEST = 300
"""Characters of a pattern for which a shorter one is looked for."""
ATTEMPTS = 6
"""Islands of one pattern of which the automaton is turned into an expression, a few milliseconds each."""
LEAST_SAVING = 2
LEAST_SHARE = 0.1
"""A suggestion saves at least so many characters, and this share of the pattern's length; one character is
enough where the new pattern is of lower growth (`(?:[a-z] ?)+` for `(?:[a-z]+ ?)+`)."""

_BINDINGS = {"loose": LOOSE, "beside": BESIDE, "tight": TIGHT}
_SMALL = {"states": 300, "work": 30_000, "turns": 20_000}


@dataclass(frozen=True, slots=True)
class Proposal:
    """`pattern` may stand for the original; `keeps` is what is proven to stay the same."""

    pattern: str | bytes
    keeps: Keeps
    saved: int


@dataclass(frozen=True, slots=True)
class _Edit:
    """A new text for an island; `certain` where its ends are proven to come in the same order."""

    island: Island
    text: str
    node: t.Node
    certain: bool
    saved: int
    gives_up_runs: bool = False
    """Wanted only where it is quicker to match."""


def shorten(
    pattern: str | bytes,
    flags: int = 0,
    mode: Mode = "fullmatch",
    keeps: Keeps = "language",
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
) -> str | bytes | None:
    """A shorter pattern for use in `mode` that keeps the language, spans or groups; None where none was
    found.

    Raises PatternError where `re` refuses the pattern.
    """
    found = suggest(parse(pattern, flags, target, limits), mode, keeps, target, limits)
    return None if found is None else found.pattern


def suggest(
    parsed: t.Pattern,
    mode: Mode = "fullmatch",
    keeps: Keeps = "language",
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
    *,
    least_saving: int = LEAST_SAVING,
    least_share: float = LEAST_SHARE,
    fences: tuple[int, ...] = (),
) -> Proposal | None:
    """As `shorten`, for a parsed pattern. No change goes over an offset of `fences`: what stands on either
    side was written in different places."""
    if not least_saving < len(parsed.text) <= LONGEST or parsed.flags & t.LOCALE:
        return None
    truth = keeps == "language" and mode != "fullmatch"
    if not worth_a_try(parsed, truth):
        return None
    search = Search(parsed, mode, keeps, target, limited(limits), fences)
    least = max(least_saving, least_share * len(parsed.text))
    for edits in search.ways():
        saved = sum(edit.saved for edit in edits)
        suspicious = any(edit.gives_up_runs for edit in edits)
        if saved < 1 or (saved < least and not suspicious):
            continue
        found = search.proven(edits, suspicious)
        if found is not None:
            return found
    return None


def limited(limits: Limits) -> Limits:
    """`limits` cut down to what one suggestion may cost."""
    return replace(limits, **{name: min(value, getattr(limits, name)) for name, value in _SMALL.items()})


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
    tried: dict[tuple[t.Span, bool], list[_Edit]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        text = self.parsed.text
        self.text = text if isinstance(text, str) else text.decode("latin-1")
        self.habits = habits_of(self.parsed)

    def ways(self) -> Iterator[list[_Edit]]:
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

    def everywhere(self, through: Through, certain: bool = False) -> list[_Edit]:
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

    def best(self, island: Island, through: Through = "plain", certain: bool = False) -> list[_Edit]:
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

    def attempt(self, island: Island) -> list[_Edit]:
        key = (island.span, island.branches)
        found = self.tried.get(key)
        if found is None:
            found = self.tried[key] = list(self.edits(island))
        return found

    def edits(self, island: Island) -> Iterator[_Edit]:
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
                yield _Edit(island, text, read.root, False, len(old) - len(text))  # only the whole can tell
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
            yield _Edit(island, text, read.root, certain, len(old) - len(text), gives_up_runs)
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
        node, binding = island.node, _BINDINGS[island.place]
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

    def trimmed(self, island: Island) -> list[_Edit]:
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
        text = algebra.text(cut, _BINDINGS[island.place])
        read = self.read(text, island)
        if read is None or (not text and island.branches):
            return self.best(island)
        return [_Edit(island, text, read.root, False, end - start - len(text))]

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

    def proven(self, edits: list[_Edit], suspicious: bool) -> Proposal | None:
        """The pattern with `edits`, if it is proven; where `suspicious`, also that it is quicker to match."""
        old = self.parsed
        text = splice(self.text, [(edit.island.span, edit.text) for edit in edits])
        try:
            new = parse(self.typed(text), old.flags & ~old.inline, self.target, self.limits)
        except (PatternError, LimitReached):
            return None
        swaps = {id(edit.island.nodes[0]): (len(edit.island.nodes), edit.node) for edit in edits}
        if new.flags != old.flags or new.inline != old.inline or shape(new.root) != shape(old.root, swaps):
            return None
        same_groups = (new.groups, new.names) == (old.groups, old.names)
        keeps: Keeps
        if same_groups and all(edit.certain for edit in edits):
            keeps = "groups"
        elif same_groups and self.keeps == "spans" and self.same_spans(new):
            keeps = "spans"
        elif self.keeps == "language" and same_language(old, new, self.mode, self.limits):
            keeps = "language"
        else:
            return None
        if not text or self.is_slower(new, suspicious):
            return None
        return Proposal(self.typed(text), keeps, len(self.text) - len(text))

    def same_spans(self, new: t.Pattern) -> bool:
        if self.mode == "fullmatch" and same_language(self.parsed, new, "fullmatch", self.limits):
            return True  # the whole text or nothing
        return same_spans(self.parsed, new, self.mode == "search", self.limits)

    def is_slower(self, new: t.Pattern, suspicious: bool) -> bool:
        """Whether matching may take longer; where `suspicious`, unless it is certainly quicker."""
        now = ambiguity_of(compile_tree(new, self.limits), self.mode, self.limits)
        if now.growth is None and now.undecided is None and not suspicious:
            return False
        before = ambiguity_of(compile_tree(self.parsed, self.limits), self.mode, self.limits)
        if now.undecided is not None and (suspicious or before.undecided is None):
            return True
        return _degree(now.growth) + suspicious > _degree(before.growth)


def _degree(growth: Growth | None) -> int:
    return 1 if growth is None else 1_000 if growth == "exponential" else growth


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
