"""Makes a mismatch small: parts of its patterns, its text and its flags are dropped while it persists.

`again` looks at one case alone, without what the run had remembered; `cases` is checked by it too.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from typing import TypeVar

from patlint.limits import LimitReached
from tests.oracle import compare, pairs
from tests.oracle.compare import Mismatch, Tally
from tests.oracle.worlds import Text, world_of

S = TypeVar("S", str, bytes)
MOST_LOOKS = 1_500


def again(
    kind: str,
    pattern: str | bytes,
    flags: int,
    text: Text | None,
    other: str | bytes | None = None,
    tally: Tally | None = None,
) -> Mismatch | None:
    """The mismatch of this kind that the case shows now, None where it shows none."""
    tally = Tally() if tally is None else tally
    try:
        found = list(_looked(kind, pattern, flags, text, other, tally))
    except LimitReached:
        return None
    except RecursionError:
        raise
    except Exception as fault:
        return Mismatch("crash", pattern, flags, text, None, repr(fault), other) if kind == "crash" else None
    return next((each for each in found if each.kind == kind), None)


def _looked(
    kind: str, pattern: str | bytes, flags: int, text: Text | None, other: str | bytes | None, tally: Tally
) -> Iterator[Mismatch]:
    made = []
    for each in (pattern,) if other is None else (pattern, other):
        right = compare.asked(each, flags)
        tree, wrong = compare.compare_parse(each, flags, right, tally)
        yield from wrong
        if tree is None or not isinstance(right, re.Pattern):
            return
        if text is not None and isinstance(text, bytes) != isinstance(each, bytes):
            return
        made.append(compare.subject_of(each, flags, right, tree))
    if text is None:
        return
    world = world_of([text], isinstance(text, bytes))
    texts = [text]
    for subject in made:
        if not compare.finishes(subject, text) and len(text) > 5:
            return
        yield from compare.compare_languages(subject, world, tally)
        if kind in ("span", "crash"):
            yield from compare.compare_spans(subject, world, tally)
        if kind in ("scan", "crash"):
            yield from compare.compare_scan(subject, texts, tally)
        if kind in ("groups", "crash"):
            yield from compare.compare_groups(subject, texts, tally)
    if len(made) == 2:
        yield from pairs.compare_pair(made[0], made[1], world, tally)
        yield from pairs.compare_alike(made[0], made[1], texts, tally)


def shrunk(found: Mismatch) -> Mismatch:
    """The smallest case that single deletions lead to and that still shows a mismatch of the same kind."""
    looks = [0]

    def shows(case: Mismatch) -> Mismatch | None:
        looks[0] += 1
        if looks[0] > MOST_LOOKS:
            return None
        return again(case.kind, case.pattern, case.flags, case.text, case.other)

    best = shows(found)
    if best is None:
        return found
    while True:
        size = _size(best)
        for smaller in _smaller(best):
            if _size(smaller) < size:
                shown = shows(smaller)
                if shown is not None:
                    best = replace(smaller, theirs=shown.theirs, ours=shown.ours, text=shown.text)
                    break
        else:
            return best


def _size(case: Mismatch) -> tuple[int, int]:
    """What must become less: flags and characters, then characters that are not plain."""
    parts = [part for part in (case.pattern, case.text, case.other) if part is not None]
    flags = bin(case.flags).count("1")
    letters = b"a", "a"
    odd = sum(part[place : place + 1] not in letters for part in parts for place in range(len(part)))
    return 2 * flags + sum(map(len, parts)), odd


def _smaller(case: Mismatch) -> Iterator[Mismatch]:
    for bit in (2, 4, 8, 16, 64, 256):
        if case.flags & bit:
            yield replace(case, flags=case.flags & ~bit)
    if case.text:
        for text in _parts(case.text):
            yield replace(case, text=text)
    for pattern in _patterns(case.pattern):
        yield replace(case, pattern=pattern)
    if case.other is not None:
        if case.kind == "crash":
            yield replace(case, other=None)
        for pattern in _patterns(case.other):
            yield replace(case, other=pattern)
    if case.text:
        for text in _plainer(case.text):
            yield replace(case, text=text)
    yield from _renamed(case)


def _parts(whole: S) -> Iterator[S]:
    """The whole without one stretch, the longest stretches first."""
    size = len(whole)
    for length in range(size, 0, -1) if size < 12 else (size // 2, size // 4, 4, 2, 1):
        for start in range(size - length + 1):
            yield whole[:start] + whole[start + length :]


def _renamed(case: Mismatch) -> Iterator[Mismatch]:
    """One character made `a` wherever it stands."""
    if isinstance(case.pattern, str) and isinstance(case.text, str) and not isinstance(case.other, bytes):
        for char in dict.fromkeys(case.text):
            other = case.other and case.other.replace(char, "a")
            yield replace(
                case, pattern=case.pattern.replace(char, "a"), text=case.text.replace(char, "a"), other=other
            )


def _plainer(text: S) -> Iterator[S]:
    letter = b"a" if isinstance(text, bytes) else "a"
    for place in range(len(text)):
        if text[place : place + 1] > letter:
            yield text[:place] + letter + text[place + 1 :]


def _patterns(pattern: str | bytes) -> Iterator[str | bytes]:
    if isinstance(pattern, bytes):
        for text in _shorter(pattern.decode("latin-1")):
            yield text.encode("latin-1")
    else:
        yield from _shorter(pattern)


OPENING = re.compile(r"\((?:\?(?:[:>=!]|<[=!]|P<\w+>|[aimsux-]+:|\(\w+\)))?")


def _shorter(pattern: str) -> Iterator[str]:
    """The pattern without a group, without a group's brackets, without a stretch of its text."""
    for opening in OPENING.finditer(pattern):
        end = _closing(pattern, opening.start())
        if end is not None:
            yield pattern[: opening.start()] + pattern[end + 1 :]
            inside = pattern[opening.end() : end]
            bare = pattern[: opening.start()] + inside + pattern[end + 1 :]
            yield bare
            yield LATER.sub(_one_less, bare)
            yield inside
            for branch in inside.split("|")[:8]:
                yield pattern[: opening.end()] + branch + pattern[end:]
    yield from pattern.split("|")[:8]
    yield from _parts(pattern)


LATER = re.compile(r"(\\|\(\?\()([2-9])")


def _one_less(reference: re.Match[str]) -> str:
    """A reference to the group before: one group has gone."""
    return f"{reference[1]}{int(reference[2]) - 1}"


def _closing(pattern: str, start: int) -> int | None:
    depth, place = 0, start
    while place < len(pattern):
        if pattern[place] == "\\":
            place += 1
        elif pattern[place] == "(":
            depth += 1
        elif pattern[place] == ")":
            depth -= 1
            if not depth:
                return place
        place += 1
    return None
