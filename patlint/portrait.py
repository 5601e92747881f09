"""Everything that is known about one pattern: what `patlint inspect` shows.

`portrait_of` asks each question by itself, so that a limit or a construct that is not said exactly leaves the
other answers standing. An answer that is not known is None, and `open` says why.

>>> portrait = portrait_of("(?i)ab?", 0, "fullmatch", (3, 12))
>>> portrait.flags, portrait.states, portrait.total, portrait.words
(('IGNORECASE',), {'match': 3, 'fullmatch': 4, 'search': 2}, 6, ('a', 'ab'))
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from functools import partial
from typing import Final, TypeVar

from patlint.language import Language, Undecided
from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import REFERENCES, ambiguity_of
from patlint.outcome import flag_names
from patlint.placed import PlacedFinding, place_finding
from patlint.rules.finding import Growth, SlowWitness
from patlint.source.sites import Mode, Piece, Place, Site, Use
from patlint.syntax.parser import PatternError, parse
from patlint.syntax.tree import Pattern
from patlint.target import Target

MODES: Final[tuple[Mode, ...]] = ("match", "fullmatch", "search")
WORDS: Final = 6
"""Texts that are shown."""
LENGTHS: Final = 8
"""Lengths, from 0, for which the texts are counted."""
MOST_BITS: Final = 3_000
"""Size of the largest number of texts that is told, about 900 digits; Python writes no more than 4,300."""
NAME: Final = "<pattern>"

Answer = TypeVar("Answer")


@dataclass(frozen=True, slots=True)
class Portrait:
    """Answers about `pattern` in `mode`; None where `open` says why an answer is not known.

    `refused` is (message, position) where `re` refuses the pattern; then nothing else is known. `states` are
    those of the minimal automaton in each mode. `counts[n]` is the number of texts of length n, `words` one
    text for each path of the automaton; `total` is None as well where there is no end of them (`endless`).
    `growth` is 1 where no growth beyond linear was found; `slow` shows a greater one.
    """

    pattern: str | bytes
    mode: Mode
    target: Target
    flags: tuple[str, ...]
    refused: tuple[str, int | None] | None = None
    groups: int = 0
    names: dict[str, int] = field(default_factory=dict)
    inexact: tuple[tuple[str, tuple[int, int]], ...] = ()
    states: dict[Mode, int | None] = field(default_factory=dict)
    empty: bool | None = None
    universal: bool | None = None
    total: int | None = None
    endless: bool | None = None
    shortest: str | bytes | None = None
    words: tuple[str | bytes, ...] | None = None
    counts: tuple[int, ...] | None = None
    growth: Growth | None = None
    slow: SlowWitness | None = None
    findings: tuple[PlacedFinding, ...] = ()
    open: tuple[str, ...] = ()
    shorter: tuple[tuple[str | bytes, int, str], ...] = ()
    """Patterns that were considered in its place: each with its length and what became of it."""


def portrait_of(
    pattern: str | bytes,
    flags: int,
    mode: Mode,
    target: Target,
    limits: Limits = DEFAULT_LIMITS,
    rules: Sequence[str] = (),
) -> Portrait:
    """What is known about `pattern`; `rules` are the names of those whose findings are wanted."""
    site = _site(pattern, flags, mode)
    try:
        parsed = parse(pattern, flags, target, limits)
    except PatternError as error:
        shown = flag_names(flags, flags)
        findings, _ = _findings(site, target, limits, rules, shown)
        return Portrait(pattern, mode, target, shown, (error.message, error.position), findings=findings)
    except LimitReached as reached:
        return Portrait(pattern, mode, target, flag_names(flags, flags), open=(_limit(reached),))
    names = flag_names(parsed.flags, flags | parsed.inline)
    asked = _Asked()
    languages = {each: asked(partial(Language, parsed, 0, each, target, limits)) for each in MODES}
    language = languages[mode]
    inexact = () if language is None else tuple((each.reason, each.span) for each in language.inexact)
    total = words = counts = shortest = empty = universal = endless = None
    if language is not None:
        empty = asked(language.is_empty)
        universal = asked(language.is_universal)
        if language.exact:
            total = asked(language.total)
            endless = total is None
            if total is not None and total.bit_length() > MOST_BITS:
                total = None
                asked.reasons.append(f"there are more than 2**{MOST_BITS} texts")
            shortest = asked(language.shortest)
            words = asked(lambda: tuple(language.words(WORDS)))
            counts = asked(lambda: tuple(language.count(length) for length in range(LENGTHS)))
    growth, slow = _ambiguity(parsed, mode, limits, asked)
    findings, undecided = _findings(site, target, limits, rules, names)
    return Portrait(
        pattern,
        mode,
        target,
        names,
        None,
        parsed.groups,
        dict(parsed.names),
        inexact,
        {each: None if made is None else made.states for each, made in languages.items()},
        empty,
        universal,
        total,
        endless,
        shortest,
        words,
        counts,
        growth,
        slow,
        findings,
        tuple(dict.fromkeys((*asked.reasons, *undecided))),
        _shorter(parsed, mode, target, limits) if rules else (),
    )


def _shorter(
    parsed: Pattern, mode: Mode, target: Target, limits: Limits
) -> tuple[tuple[str | bytes, int, str], ...]:
    from patlint.rewrite.candidates import candidates

    try:
        found = candidates(parsed, mode, "language", target, limits)
    except LimitReached:
        return ()
    return tuple(
        (each.pattern, each.length, each.verdict) for each in found if each.length < len(parsed.text)
    )


class _Asked:
    """Asks one question after the other; `reasons` are why answers are missing."""

    def __init__(self) -> None:
        self.reasons: list[str] = []

    def __call__(self, question: Callable[[], Answer]) -> Answer | None:
        try:
            return question()
        except LimitReached as reached:
            self.reasons.append(_limit(reached))
        except Undecided as undecided:
            self.reasons.append(str(undecided))
        return None


def _limit(reached: LimitReached) -> str:
    return f"limit {reached.limit} reached ({reached.value})"


def _ambiguity(
    parsed: Pattern, mode: Mode, limits: Limits, asked: _Asked
) -> tuple[Growth | None, SlowWitness | None]:
    found = asked(lambda: ambiguity_of(compile_tree(parsed, limits), mode, limits))
    if found is None:
        return None, None
    if found.undecided is not None:
        asked.reasons.append(
            "whether texts are slow depends on back-references"
            if found.undecided == REFERENCES
            else f"limit {found.undecided} reached in the search for slow texts"
        )
    slow = found.slow
    if slow is None:
        return (1 if found.undecided is None else None), None
    return slow.growth, SlowWitness(
        slow.prefix, slow.pump, slow.suffix, slow.growth, slow.steps, slow.more, slow.bounded
    )


def _site(pattern: str | bytes, flags: int, mode: Mode) -> Site:
    """The pattern as if it stood alone on a line and were called once, everything of the match being read."""
    places = tuple(Place(1, at + 1, 1, at + 2) for at in range(len(pattern)))
    whole = Place(1, 1, 1, len(pattern) + 1)
    use = Use(mode, "groups", whole)
    return Site(NAME, pattern, flags, mode, whole, 1, (Piece(0, whole, True, places),), (use,), True)


def _findings(
    site: Site, target: Target, limits: Limits, rules: Sequence[str], flags: tuple[str, ...]
) -> tuple[tuple[PlacedFinding, ...], tuple[str, ...]]:
    if not rules:
        return (), ()
    from patlint.rules import check_site

    checked = check_site(site, target, limits, frozenset(rules))
    placed = [place_finding(each, site, each.level, flags) for each in checked.findings]
    return tuple(sorted(placed, key=lambda each: each.sort_key)), tuple(checked.undecided)
