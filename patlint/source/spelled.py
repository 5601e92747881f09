"""A constant text together with where each stretch of it was written.

`Spelled` is what the evaluation of a pattern works with: the text, and the `Run`s that it is made of, in
order. Cutting and joining keep the places, so that a finding in `"%s+" % WORD` can point into WORD.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from patlint.source import reasons
from patlint.source.literals import Run
from patlint.source.reasons import Opaque
from patlint.source.sites import Piece, Place

LONGEST = 1_000_000
"""Characters of one pattern. The longest ones in real code (tables of emoji, of host names) have 50,000."""


@dataclass(frozen=True, slots=True)
class Spelled:
    """A constant text and its runs; the texts of the runs joined are `value`."""

    value: str | bytes
    runs: tuple[Run, ...]

    def pieces(self) -> tuple[Piece, ...]:
        pieces = []
        start = 0
        for run in self.runs:
            pieces.append(Piece(start, run.whole, run.raw, run.places, run.spellings))
            start += len(run.text)
        return tuple(pieces)


class Listed(tuple[Any, ...]):
    """The items of a list, or of something that gives them one by one: no operand of `%`, no text."""

    __slots__ = ()


def without_spelling(value: str | bytes, place: Place) -> Spelled:
    """A computed text, for which `place` stands as a whole."""
    check_length(len(value))
    return Spelled(value, (Run(value, place, False, (), ()),))


def check_length(length: int) -> None:
    if length > LONGEST:
        raise Opaque(reasons.TOO_LONG)


def join(parts: Iterable[Spelled]) -> Spelled:
    """The parts one after the other. Errors: `Opaque` where str and bytes meet, or the text is too long."""
    listed = list(parts)
    if not listed:
        return Spelled("", ())
    check_length(sum(len(part.value) for part in listed))
    runs = tuple(run for part in listed for run in part.runs if run.text)
    strings = [part.value for part in listed if isinstance(part.value, str)]
    if len(strings) == len(listed):
        return Spelled("".join(strings), runs)
    if strings:
        raise Opaque(reasons.MIXED)
    return Spelled(b"".join(part.value for part in listed if isinstance(part.value, bytes)), runs)


def repeat(part: Spelled, count: int) -> Spelled:
    check_length(len(part.value) * max(count, 0))
    return Spelled(part.value * count, part.runs * count if part.value else ())


def cut(part: Spelled, start: int, end: int) -> Spelled:
    """The characters `start` to `end`, half-open, with their places."""
    runs = []
    offset = 0
    for run in part.runs:
        low, high = max(start - offset, 0), min(end - offset, len(run.text))
        if low < high:
            runs.append(_cut_run(run, low, high))
        offset += len(run.text)
        if offset >= end:
            break
    return Spelled(part.value[start:end], tuple(runs))


def _cut_run(run: Run, low: int, high: int) -> Run:
    if low == 0 and high == len(run.text):
        return run
    if not run.places:
        return Run(run.text[low:high], run.whole, run.raw, (), ())
    places = run.places[low:high]
    first, last = places[0], places[-1]
    whole = Place(first.line, first.column, last.end_line, last.end_column)
    return Run(run.text[low:high], whole, run.raw, places, run.spellings[low:high])


def merged(part: Spelled, value: str | bytes) -> Spelled:
    """`part`, written in several characters, as the spelling of the one character `value` (`%%`, `{{`)."""
    runs = part.runs
    first, last = runs[0], runs[-1]
    begin = first.places[0] if first.places else first.whole
    end = last.places[-1] if last.places else last.whole
    if (end.end_line, end.end_column) < (begin.line, begin.column):
        end = begin
    place = Place(begin.line, begin.column, end.end_line, end.end_column)
    spelling = "".join(text for run in runs for text in run.spellings)
    if not spelling:
        return Spelled(value, (Run(value, place, first.raw, (), ()),))
    return Spelled(value, (Run(value, place, first.raw, (place,), (spelling,)),))
