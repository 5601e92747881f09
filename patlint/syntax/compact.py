r"""A set of characters as the shortest leaf that matches exactly it.

>>> char_node(CharSet.of_chars("abcdef"), 0, False)
Set(span=(0, 0), items=(Range(span=(0, 0), low=97, high=102),), negated=False, flags=0)
>>> char_node(universe(False) - NEWLINE, 0, False)
Dot(span=(0, 0), flags=0)

Method: a leaf is a literal, a dot, a category or a set, or a set that excludes. For a set, every choice of
categories that lie within the wanted characters is tried, and the rest is covered with ranges that may
overlap what is wanted anyway; under IGNORECASE one character of each orbit is enough. Whatever is built is
checked with `char_set` before it is given, so exactness does not hang on this module's reasoning. Limit:
it is the shortest by this method, not of all conceivable texts.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator
from functools import lru_cache
from itertools import combinations

from .casefold import Folding, folding
from .charset import EMPTY, NEWLINE, CharSet
from .classes import category, char_set, is_locale_dependent, universe
from .spelling import char_text, member_text, set_text
from .tree import (
    ASCII,
    DOTALL,
    IGNORECASE,
    LOCALE,
    MULTILINE,
    UNICODE,
    Category,
    CharNode,
    ClassEscape,
    Dot,
    Literal,
    Range,
    Set,
    SetItem,
)

_NOWHERE = (0, 0)
_UNBOUNDED = 1 << 60
_LEAF_FLAGS = IGNORECASE | LOCALE | MULTILINE | DOTALL | UNICODE | ASCII
_KINDS: tuple[Category, ...] = ("d", "s", "w", "D", "S", "W")
# Pairs of which the first lies within the second.
_WITHIN = frozenset(("dw", "dS", "wS", "sD", "sW", "WD"))


@lru_cache(maxsize=4096)
def char_node(charset: CharSet, flags: int, is_bytes: bool) -> CharNode:
    """The shortest leaf under `flags` that matches exactly `charset` (codes below 256 for bytes).

    Where IGNORECASE is on and no folded leaf can say it, the leaf carries `flags` without IGNORECASE.
    Nothing that depends on the locale is used.
    """
    flags &= _LEAF_FLAGS
    if flags & LOCALE:
        flags &= ~IGNORECASE
    found = _shortest(charset, flags, is_bytes)
    if found is None:
        found = _shortest(charset, flags & ~IGNORECASE, is_bytes)
    assert found is not None, "without folding, the ranges themselves are always an answer"
    return found


def node_text(node: CharNode, is_bytes: bool) -> str:
    """The leaf as it is written, flags left aside."""
    match node:
        case Literal():
            return char_text(node.code, is_bytes)
        case Dot():
            return "."
        case ClassEscape():
            return "\\" + node.kind
        case Set():
            return set_text(node, is_bytes)


def _shortest(charset: CharSet, flags: int, is_bytes: bool) -> CharNode | None:
    best: CharNode | None = None
    rank = (_UNBOUNDED, False)  # length of the text, and whether it excludes
    for node in _simple_leaves(charset, flags, is_bytes):
        length = len(node_text(node, is_bytes))
        if length < rank[0] and _is_exact(node, charset, is_bytes):
            best, rank = node, (length, False)
    sides = [(charset, False), (universe(is_bytes) - charset, True)]
    sides.sort(
        key=lambda side: side[0].size()
    )  # the smaller one is likely to leave little room for the other
    for wanted, negated in sides:
        for kinds, need in _choices(wanted, flags, is_bytes):
            room = rank[0] - len("[^]" if negated else "[]") - 2 * len(kinds)
            items = _cover(need, wanted, flags, is_bytes, room) if kinds or need else None
            if items is None:
                continue
            node = Set(_NOWHERE, _ordered(kinds, items, flags), negated, flags)
            new_rank = (len(node_text(node, is_bytes)), negated)
            if new_rank < rank and _is_exact(node, charset, is_bytes):
                best, rank = node, new_rank
    return best


def _is_exact(node: CharNode, charset: CharSet, is_bytes: bool) -> bool:
    return not is_locale_dependent(node) and char_set(node, is_bytes) == charset


def _simple_leaves(charset: CharSet, flags: int, is_bytes: bool) -> Iterator[CharNode]:
    """Leaves other than tailored sets that may be `charset`, the nicer one first."""
    everything = universe(is_bytes)
    if charset and charset.size() <= 8:
        code = charset.bounds[0]
        if flags & IGNORECASE:
            code = _representative(code, folding(bool(flags & ASCII) or is_bytes))
        yield Literal(_NOWHERE, code, flags)
    if charset == (everything if flags & DOTALL else everything - NEWLINE):
        yield Dot(_NOWHERE, flags)
    for kind in _KINDS:
        if charset == category(kind, bool(flags & ASCII), is_bytes):
            yield ClassEscape(_NOWHERE, kind, flags)
    if not charset or charset == everything:
        both: tuple[SetItem, ...] = (ClassEscape(_NOWHERE, "s", flags), ClassEscape(_NOWHERE, "S", flags))
        yield Set(_NOWHERE, both, not charset, flags)


def _choices(wanted: CharSet, flags: int, is_bytes: bool) -> Iterator[tuple[tuple[Category, ...], CharSet]]:
    """Up to two categories within `wanted`, and what they leave to be covered."""
    ascii_only = bool(flags & ASCII) or is_bytes
    inside = {
        kind: members
        for kind in _KINDS
        if _lies_within(members := category(kind, ascii_only, is_bytes), wanted)
    }
    for count in range(min(len(inside), 2) + 1):
        for kinds in combinations(inside, count):
            if count == 2 and {kinds[0] + kinds[1], kinds[1] + kinds[0]} & _WITHIN:
                continue
            need = wanted
            for kind in kinds:
                need = need - inside[kind]
            yield kinds, need


def _lies_within(members: CharSet, wanted: CharSet) -> bool:
    return (
        bool(wanted)
        and members.bounds[0] in wanted
        and members.bounds[-1] - 1 in wanted
        and members <= wanted
    )


def _representative(code: int, fold: Folding) -> int:
    """The character by which the orbit of `code` is written: the first of its lower-case ones."""
    low = fold.low.get(code, code)
    return min((low, *fold.kin.get(low, ())))


def _cover(need: CharSet, allowed: CharSet, flags: int, is_bytes: bool, room: int) -> list[SetItem] | None:
    """Literals and ranges that match `need` and nothing outside `allowed`, which contains it.

    None where they would be longer than `room` characters, or fold beyond `allowed`.
    """
    if not flags & IGNORECASE:
        return _spelled(_extents(need, allowed, room), flags, is_bytes, room)
    fold = folding(bool(flags & ASCII) or is_bytes)
    cased = need & fold.cased
    points = _extents(need - cased, allowed, room)
    if points is None or _spelled(points, flags, is_bytes, room) is None:
        return None
    if not fold.takes(fold.lowered(cased)) <= allowed:
        return None
    waiting = {_representative(code, fold) for code in cased}
    helpers: dict[int, list[int]] = {}  # interval of `allowed` to characters in it that cover an orbit
    for code in allowed & fold.cased:
        if _representative(code, fold) in waiting:
            helpers.setdefault(bisect_right(allowed.bounds, code) - 1, []).append(code)
    # Greedy: the interval that covers most first; of two alike, that of the lower case.
    ranked = sorted(
        helpers.items(),
        key=lambda entry: (-len(entry[1]), -sum(_representative(c, fold) == c for c in entry[1])),
    )
    for interval, codes in ranked:
        here: dict[int, int] = {}
        for code in codes:
            orbit = _representative(code, fold)
            if orbit in waiting and (orbit not in here or code == orbit):
                here[orbit] = code
        if here:
            points[interval] = points.get(interval, EMPTY) | CharSet.of_codes(here.values())
            extent = points[interval]
            low, high = extent.bounds[0], extent.bounds[-1] - 1
            if extent.size() > 2:
                waiting.difference_update(_representative(c, fold) for c in codes if low <= c <= high)
            waiting.difference_update(here)
    return _spelled(points, flags, is_bytes, room)


def _extents(need: CharSet, allowed: CharSet, most: int) -> dict[int, CharSet] | None:
    """The parts of `need` by the interval of `allowed` (index of its lower bound) in which they lie.

    None where there are more than `most`.
    """
    parts: dict[int, list[int]] = {}
    bounds = need.bounds
    for index in range(0, len(bounds), 2):
        interval = bisect_right(allowed.bounds, bounds[index]) - 1
        parts.setdefault(interval, []).extend(bounds[index : index + 2])
        if len(parts) > most:
            return None
    return {interval: CharSet(tuple(part)) for interval, part in parts.items()}


def _spelled(
    points: dict[int, CharSet] | None, flags: int, is_bytes: bool, room: int
) -> list[SetItem] | None:
    """For each interval a range from its first to its last point, or literals where there are few."""
    if points is None:
        return None
    items: list[SetItem] = []
    for interval in sorted(points):
        part = points[interval]
        first, last = part.bounds[0], part.bounds[-1] - 1
        enough = 2 if chr(first).isalnum() and chr(last).isalnum() else 3
        if part.size() > enough:
            items.append(Range(_NOWHERE, first, last))
            room -= len(member_text(first, is_bytes)) + 1 + len(member_text(last, is_bytes))
        else:
            items += (Literal(_NOWHERE, code, flags) for code in part)
            room -= sum(len(member_text(code, is_bytes)) for code in part)
        if room < 0:
            return None
    return items


def _ordered(kinds: tuple[Category, ...], items: list[SetItem], flags: int) -> tuple[SetItem, ...]:
    """Categories first; `[`, `^` and `-` where they need no escape."""
    awkward = {ord("["): 1, ord("^"): 2, ord("-"): 3}
    items.sort(key=lambda item: awkward.get(item.code, 0) if isinstance(item, Literal) else 0)
    return (*(ClassEscape(_NOWHERE, kind, flags) for kind in kinds), *items)
