r"""Ambiguity's way out: a pattern that does the same, in less time on hostile texts.

`quicker` takes a pattern and the parts that compete for one text. Around them it looks for another way to
write the smallest island, and the larger ones that hold it: by the laws of expressions, and by expressions
of the island's minimal automaton. What comes from removing states of a deterministic automaton reads each
text in one way only, so there are no two ways to try; algebra may spoil that, and what stands around the
island may compete with it, so the growth of each candidate is asked like that of the original. Where the
target has them, a possessive repeat and an atomic group are tried as well. The result may be longer than
the original, within `ROOM`.

>>> from patlint.syntax.parser import parse
>>> slow = parse("(?:[A-Z0-9]+ ?)+")
>>> quicker(slow, {"fullmatch": "exponential"}, "fullmatch", ((3, 12),), ["fullmatch"], "spans", (3, 12)).pattern
'(?:[A-Z0-9] ?)+'

Nothing is suggested that is not proven (`proof.holds`), of lower growth in the manner asked about, and of no
higher one in the others; where the growth is undecided, there is no suggestion.

Source of the fact that such expressions are unambiguous: Book, Even, Greibach and Ott, Ambiguity in graphs and
expressions, 1971.
Limits: patterns up to `shorten.LONGEST` characters; `TRIES` candidates whose growth is asked, `ROUNDS` times.
"""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass, replace
from math import inf

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.determinise import Mode
from patlint.machine.dfa import Dfa
from patlint.machine.expression import expressions, in_order
from patlint.machine.program import compile_tree, one_character
from patlint.machine.slow_text import Growth, Manner, ambiguity_of
from patlint.rewrite.islands import Island, Place, Through, complexity, expression_of, inner_islands, islands
from patlint.rewrite.proof import Keeps, ends, holds, part_language
from patlint.rewrite.search import BINDINGS, Change, Search
from patlint.rewrite.shorten import LONGEST, limited, spliced
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet
from patlint.syntax.classes import char_set
from patlint.syntax.parser import PatternError, parse

TRIES = 5
"""Proven candidates whose growth is asked in one round, the cheapest first, some milliseconds each."""
LARGE = 1_000
"""Instructions from which each proof is held to what one suggestion may cost: dozens of them would take seconds."""
ROUNDS = 3
"""Changes one after the other, each lowering the growth."""
ROOM = 2.0
"""How many times as long as the original an island may become; and `SPARE` characters more."""
SPARE = 8
DEARER = 7
"""So much more may a suggestion cost than the pattern, unless growth is exponential: then the room is all. What
costs: each character, `OPERATOR` for each further operator, `DEPTH` for deeper brackets."""
OPERATOR = DEPTH = 3
POSSESSIVE = 6
"""What a possessive repeat or an atomic group costs, since fewer people read them; one more around a group."""
LAZY = 9
"""What it costs that no lazy repeat is left: its author thought of a shortest match."""
KEPT: tuple[Keeps, ...] = ("groups", "spans", "language")
Parts = Sequence[tuple[int, int]]
Grown = tuple[Growth | None, Parts, bool]
"""A growth, the parts that compete for its text, and whether a suspicion of more was left open."""


@dataclass(frozen=True, slots=True)
class WayOut:
    """`pattern` keeps `keeps`, and its time grows as `growth` (None: with the length) in the manner asked
    about. `open`: a suspicion of more was left that no text confirmed."""

    pattern: str | bytes
    keeps: Keeps
    growth: Growth | None
    open: bool = False


def degree(growth: Growth | None) -> float:
    return inf if growth == "exponential" else growth or 1


def quicker(
    parsed: t.Pattern,
    growths: Mapping[Manner, Growth | None],
    manner: Manner,
    parts: Parts,
    modes: Iterable[Mode],
    keeps: Keeps,
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
    fences: tuple[int, ...] = (),
) -> WayOut | None:
    """The cheapest pattern of the lowest growth that was found (`_cost`); None where there is none.

    `growths` are those of the original in all manners of use, `parts` the spans that compete in `manner`,
    `modes` and `keeps` what has to stay.
    Raises LimitReached("instructions").
    """
    if len(parsed.text) > LONGEST or parsed.flags & t.LOCALE or not parts:
        return None
    if len(compile_tree(parsed, limits).code) > LARGE:
        limits = limited(limits)
    modes = list(modes)
    found: WayOut | None = None
    now = parsed
    for _ in range(ROUNDS):
        small = limits if growths[manner] == "exponential" else limited(limits)
        search = Search(now, modes[0], keeps, target, small, fences if found is None else ())
        step = _step(search, parsed, growths, manner, parts, modes, limits)
        if step is None:
            break
        now, (growth, parts, is_open) = step
        found = WayOut(now.text, keeps, growth, is_open)
        growths = {each: growth if each == manner else before for each, before in growths.items()}
        if growth is None or fences or not parts:
            break
    if found is None:
        return None
    stays = next(each for each in KEPT if each == keeps or holds(parsed, now, modes, each, limits))
    return replace(found, keeps=stays)


def _step(
    search: Search,
    first: t.Pattern,
    growths: Mapping[Manner, Growth | None],
    manner: Manner,
    parts: Parts,
    modes: list[Mode],
    limits: Limits,
) -> tuple[t.Pattern, Grown] | None:
    """The best pattern with one change that does as `first`, and how it grows."""
    best: tuple[t.Pattern, Grown] | None = None
    most = inf if growths[manner] == "exponential" else len(search.text) + DEARER
    ranked = []
    for new, extra in _candidates(search, parts):
        cost = _cost(search.parsed, new) + extra
        if cost <= most:
            ranked.append((cost, -_common(search.parsed.text, new.text), _as_text(new.text), new, extra > 0))
    asked = 0
    for *_, new, only_less in sorted(ranked, key=lambda row: row[:3]):
        if not holds(first, new, modes, search.keeps, limits):
            continue
        if asked >= TRIES:
            break
        asked += 1
        # Without some ways back an engine is never slower, in whatever manner.
        after = _growth(new, {manner: growths[manner]} if only_less else growths, manner, limits)
        if after is not None and (best is None or degree(after[0]) < degree(best[1][0])):
            best = new, after
            if after[0] is None:
                break
    return best


def _common(old: str | bytes, new: str | bytes) -> int:
    """How many characters both begin with."""
    return next((place for place, (a, b) in enumerate(zip(old, new, strict=False)) if a != b), len(old))


def _as_text(pattern: str | bytes) -> str:
    return pattern if isinstance(pattern, str) else pattern.decode("latin-1")


def _cost(old: t.Pattern, new: t.Pattern) -> int:
    (old_depth, old_operators), (depth, operators) = complexity(old.root), complexity(new.root)
    cost = len(new.text) + OPERATOR * max(operators - old_operators, 0) + DEPTH * max(depth - old_depth, 0)
    return cost + LAZY * (_lazy(new) < _lazy(old))


def _lazy(pattern: t.Pattern) -> int:
    return sum(isinstance(each, t.Repeat) and each.kind == "lazy" for each in t.walk(pattern.root))


def _growth(
    new: t.Pattern, growths: Mapping[Manner, Growth | None], manner: Manner, limits: Limits
) -> Grown | None:
    """The growth in `manner`, where it is lower than before, and not higher in other manners."""
    try:
        program = compile_tree(new, limits)
        now = ambiguity_of(program, manner, limits)
        if now.undecided is not None or degree(now.growth) >= degree(growths[manner]):
            return None
        for each, before in growths.items():
            if each != manner:
                other = ambiguity_of(program, each, limits)
                if other.undecided is not None or degree(other.growth) > degree(before):
                    return None
    except LimitReached:
        return None
    return now.growth, () if now.slow is None else now.slow.parts, now.unconfirmed > 0


def _candidates(search: Search, parts: Parts) -> Iterator[tuple[t.Pattern, int]]:
    """Patterns, and what each costs more than can be seen of it."""
    seen: set[str | bytes] = {search.parsed.text}
    through: list[Through] = ["plain"]
    if search.keeps == "language" and search.parsed.groups and not search.refers():
        through.insert(0, "groups")
    for each in through:
        for island in _around(search, parts, each):
            for change in _changes(search, island):
                new = spliced(search, [change])
                if new is not None and new.text not in seen:
                    seen.add(new.text)
                    yield new, 0
    if (search.target or sys.version_info[:2]) >= (3, 11):
        for text, extra in _without_return(search, parts):
            typed = search.typed(text)
            try:
                new = parse(typed, search.parsed.flags & ~search.parsed.inline, search.target, search.limits)
            except (PatternError, LimitReached):
                continue
            if new.flags == search.parsed.flags and new.groups == search.parsed.groups:
                yield new, extra


def _without_return(search: Search, parts: Parts) -> Iterator[tuple[str, int]]:
    """The pattern with one of the repeats that compete made possessive, or put into an atomic group; its cost."""
    for node in t.walk(search.parsed.root):
        if not isinstance(node, t.Repeat) or node.kind != "greedy":
            continue
        start, end = node.span
        if any(start <= low and high <= end for low, high in parts):
            single = one_character(node.body) is not None
            yield f"{search.text[:end]}+{search.text[end:]}", POSSESSIVE + (not single)
            if not single:
                yield f"{search.text[:start]}(?>{search.text[start:end]}){search.text[end:]}", POSSESSIVE


def _around(search: Search, parts: Parts, through: Through) -> list[Island]:
    """The islands that hold all `parts`, the smallest first."""
    found: list[Island] = []
    for island in islands(search.parsed, through):
        if all(island.span[0] <= low and high <= island.span[1] for low, high in parts):
            found += _nested(island, parts, search.parsed.is_bytes, through)
    return found[::-1]


def _nested(island: Island, parts: Parts, is_bytes: bool, through: Through) -> Iterator[Island]:
    yield island
    nodes, branches = island.nodes, island.branches
    if len(nodes) == 1 and isinstance(nodes[0], t.Sequence | t.Alternation):
        nodes, branches = t.children(nodes[0]), isinstance(nodes[0], t.Alternation)
    if len(nodes) > 1:
        touched = [
            index
            for index, node in enumerate(nodes)
            if any(node.span[0] < high and low < node.span[1] for low, high in parts)
        ]
        if not touched:
            return
        run = nodes[touched[0] : touched[-1] + 1]
        if len(run) < len(nodes):
            place: Place = "loose" if branches else "beside"
            inner = Island(run, branches and len(run) > 1, place, island.flags)
            yield from _nested(inner, parts, is_bytes, through)
        return
    for inner in inner_islands(island, is_bytes, through):
        if all(inner.span[0] <= low and high <= inner.span[1] for low, high in parts):
            yield from _nested(inner, parts, is_bytes, through)


def _changes(search: Search, island: Island) -> Iterator[Change]:
    """Other texts for an island that are proven to have its language, the shortest first."""
    if search.is_fixed(island):
        return
    start, end = island.span
    old = search.text[start:end]
    pattern, limits, is_bytes = search.parsed, search.limits, search.parsed.is_bytes
    try:
        language = part_language(pattern, island.node, limits)
    except LimitReached:
        return
    captures = any(isinstance(each, t.Group) and each.index is not None for each in t.walk(island.node))
    order: Dfa | None = None
    with suppress(LimitReached):
        order = None if captures else ends(pattern, island.node, limits)
    room = int(ROOM * len(old)) + SPARE
    texts: dict[str, None] = {}
    binding = BINDINGS[island.place]
    for ordered in (True, False):
        algebra = search.algebra(island.flags, ordered)
        short = expression_of(island.node, algebra, is_bytes)
        texts[algebra.text(short, binding)] = None
        texts[algebra.text(algebra.counted(short), binding)] = None
    leaves: list[CharSet] = [
        char_set(each, is_bytes)
        for each in t.walk(island.node)
        if isinstance(each, t.Literal | t.Dot | t.ClassEscape | t.Set)
    ]
    for made in expressions(language, algebra, room):
        texts[algebra.text(in_order(made, leaves), binding)] = None
        texts[algebra.text(algebra.counted(in_order(made, leaves)), binding)] = None
    for text in sorted(texts, key=len):
        if text == old or not text or len(text) > room:
            continue
        read = search.read(text, island)
        if read is None:
            continue
        certain = same = False
        with suppress(LimitReached):
            certain = order is not None and ends(read, read.root, limits) == order
        with suppress(LimitReached):
            same = certain or part_language(read, read.root, limits) == language
        if not certain and (search.keeps == "groups" or not same):
            continue
        yield Change(island, text, read.root, certain, len(old) - len(text))
