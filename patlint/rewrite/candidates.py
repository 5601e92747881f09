"""Everything that was thought of in the place of a pattern, with its length and what became of it.

`suggest` gives the best that is proven and readable; `candidates` shows the way there: each pattern that the
laws and the automata of its parts gave, whether or not it may stand for the original.

>>> from patlint.syntax.parser import parse
>>> for found in candidates(parse("(?:0|1|2)[0-9]|x"), "fullmatch", "language"):
...     print(found.length, found.pattern, found.verdict)
12 [0-2][0-9]|x groups stay
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.determinise import Mode
from patlint.rewrite.islands import Island, inner_islands, islands, splice
from patlint.rewrite.proof import Keeps, same_groups, same_language, same_spans
from patlint.rewrite.search import Known, Search
from patlint.rewrite.shorten import LONGEST, limited, proven
from patlint.rewrite.taste import is_readable
from patlint.syntax import tree as t
from patlint.syntax.parser import PatternError, parse

MOST = 12
"""Candidates that are shown, the shortest ones."""


@dataclass(frozen=True, slots=True)
class Candidate:
    """`verdict` is what was proven to stay ("groups stay"), or why it is no suggestion."""

    pattern: str | bytes
    length: int
    verdict: str


def candidates(
    parsed: t.Pattern,
    mode: Mode,
    keeps: Keeps,
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
) -> list[Candidate]:
    """The candidates for a pattern, shorter than it and shortest first, at most `MOST`; `keeps` is the least that
    has to stay, and each says what does."""
    if len(parsed.text) > LONGEST or parsed.flags & t.LOCALE:
        return []
    search = Search(parsed, mode, keeps, target, limited(limits))
    found: dict[str, Candidate] = {}
    for edits in search.ways():
        text = splice(search.text, [(edit.island.span, edit.text) for edit in edits])
        if len(text) < len(search.text) and text not in found:
            made = proven(search, edits, False)
            verdict = "not proven, or slower to match" if made is None else _STAYS[made.keeps]
            found[text] = Candidate(search.typed(text), len(text), verdict)
    for island, text, turned in _texts(search):
        whole = splice(search.text, [(island.span, text)])
        if len(whole) < len(search.text) and whole not in found:
            found[whole] = Candidate(
                search.typed(whole), len(whole), _verdict(search, island, text, whole, turned)
            )
    ranked = sorted(found.values(), key=lambda each: (each.length, each.pattern))
    # Of each thing that may have to stay the shortest is shown, however many shorter ones keep less.
    first = {each.verdict: each for each in reversed(ranked) if each.verdict in _STAYS.values()}
    rest = [each for each in ranked if each not in first.values()]
    shown = [*first.values(), *rest[: MOST - len(first)]]
    return sorted(shown, key=lambda each: (each.length, each.pattern))


_STAYS = {"groups": "groups stay", "spans": "spans stay", "language": "the language stays"}


def _texts(search: Search) -> Iterator[tuple[Island, str, bool]]:
    """Texts for islands, the largest islands first."""
    waiting = list(islands(search.parsed))
    while waiting:
        island = waiting.pop(0)
        waiting += inner_islands(island, search.parsed.is_bytes)
        start, end = island.span
        if end - start > 1 and not search.is_fixed(island):
            known = Known(search.parsed, island.node, search.limits)
            for text, turned in search.texts(island, 2 * (end - start), known).items():
                yield island, text, turned


def _verdict(search: Search, island: Island, text: str, whole: str, turned: bool) -> str:
    old = search.parsed
    try:
        new = parse(search.typed(whole), old.flags & ~old.inline, search.target, search.limits)
    except (PatternError, LimitReached):
        return "cannot be written there"
    read = search.read(text, island)
    start, end = island.span
    if read is not None and not is_readable(
        island.node, read.root, (end - start, len(text)), turned, read.is_bytes
    ):
        return "less readable"
    if same_groups(old, new, search.limits):
        return _STAYS["groups"]
    if same_spans(old, new, search.mode == "search", search.limits):
        return _STAYS["spans"]
    if same_language(old, new, search.mode, search.limits):
        return _STAYS["language"]
    return "not proven"
