"""Texts that may show what the graph of walks suspects: prefix + pump * n + suffix, or with several pumps.

The suffix is a shortest text that is refused by all that the engine tries before its last way (`continuation`);
where that is not decided, the empty text and single characters. A pump is a row of sets, read in several ways:
what follows may take one reading and refuse another.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Literal, TypeAlias

from patlint.machine.ambiguity import Codes, Letters, Suspect
from patlint.machine.continuation import Continuations

VARIANTS = 5
"""Readings of a pump (with other characters of the same sets) that are tried."""
READINGS = 2
"""Readings of which something had to be counted."""
GUESSES = 5
ANYWAY = 2
LEAD = 2
"""How often each pump but the last stands in the text for which a suffix is sought."""

Kind: TypeAlias = Literal["sure", "guess", "again"]
More: TypeAlias = tuple[tuple[Codes, Codes], ...]


@dataclass(frozen=True, slots=True)
class Text:
    """prefix + pump * n, then for each of `more` the text between and its pump * n, then suffix."""

    prefix: Codes
    pump: Codes
    suffix: Codes
    is_bytes: bool
    more: More = ()

    @property
    def fixed(self) -> int:
        """Characters that do not depend on n."""
        return len(self.prefix) + len(self.suffix) + sum(len(between) for between, _ in self.more)

    @property
    def period(self) -> int:
        """Characters that each further pump brings."""
        return len(self.pump) + sum(len(pump) for _, pump in self.more)

    def piece(self, codes: Codes) -> str | bytes:
        return bytes(codes) if self.is_bytes else "".join(map(chr, codes))

    def at(self, n: int) -> str | bytes:
        codes = self.prefix + self.pump * n
        for between, pump in self.more:
            codes += between + pump * n
        return self.piece(codes + self.suffix)

    def without(self, place: int) -> Text | None:
        """The text with one pump less, which stands there once; None where it has no other."""
        if not self.more:
            return None
        pieces = [((), self.pump), *self.more]
        before, pump = pieces.pop(place)
        if place == len(pieces):
            text = replace(self, suffix=before + pump + self.suffix)
        else:
            between, following = pieces[place]
            pieces[place] = (before + pump + between, following)
            text = self
        between, first = pieces[0]
        return replace(text, prefix=self.prefix + between, pump=first, more=tuple(pieces[1:]))


def texts(
    suspect: Suspect, letters: Letters, continuations: Continuations, is_bytes: bool, anyway: bool = False
) -> Iterator[tuple[Text, Kind]]:
    """The candidates and what each is. With `anyway` some also where no suffix makes the engine go back.

    "sure": it makes the engine walk all ways; "again": the one before with a longer pump, needed only where
    that showed nothing; "guess": not decided.
    """
    readings = 0
    for whole, more in _readings(suspect, letters):
        lead, last = suspect.prefix, whole
        for between, pump in more:
            lead, last = lead + last * LEAD + between, pump
        suffix = continuations.failing(suspect, lead, last)
        if suffix == "none" and not anyway:
            continue
        prefix, pump = without_pumps(suspect.prefix, _root(whole)), _root(whole)
        short: list[tuple[Codes, Codes]] = []
        before = pump
        for between, each in more:
            root = _root(each)
            rest = _after(before, without_pumps(between, root))
            if rest or root != before:
                short.append((rest, root))
            before = root
        if isinstance(suffix, str):
            for guess in _guesses(last, letters)[: GUESSES if suffix == "unknown" else ANYWAY]:
                yield Text(prefix, pump, guess, is_bytes, tuple(short)), "guess"
        else:
            yield Text(prefix, pump, suffix, is_bytes, tuple(short)), "sure"
            if pump != whole and not more:  # the number of short pumps may matter
                yield Text(suspect.prefix, whole, suffix, is_bytes), "again"
        readings += 1
        if readings >= READINGS:
            break


def without_pumps(prefix: Codes, pump: Codes) -> Codes:
    """A text before pumps without those at its end."""
    while prefix[-len(pump) :] == pump:
        prefix = prefix[: -len(pump)]
    return prefix


def _after(pump: Codes, between: Codes) -> Codes:
    """A text behind pumps without those at its beginning."""
    while between[: len(pump)] == pump:
        between = between[len(pump) :]
    return between


def _readings(suspect: Suspect, letters: Letters) -> Iterator[tuple[Codes, More]]:
    """The pumps in characters: the most readable, then others that may be treated better by what follows."""
    seen: set[tuple[Codes, More]] = set()
    union = 0
    for mask in sum((pump for _, pump in suspect.more), suspect.pump):
        union |= mask
    preferred = [0, *(1 << minterm for minterm in range(union.bit_length()) if union >> minterm & 1)]
    for prefer in preferred:
        pump = tuple(letters(mask, prefer) for mask in suspect.pump)
        more = tuple(
            (between, tuple(letters(mask, prefer) for mask in masks)) for between, masks in suspect.more
        )
        if (pump, more) not in seen:
            seen.add((pump, more))
            yield pump, more
        if len(seen) >= VARIANTS:
            return


def _root(pump: Codes) -> Codes:
    """The shortest text of which `pump` is a power."""
    size = len(pump)
    for length in range(1, size):
        if size % length == 0 and pump == pump[:length] * (size // length):
            return pump[:length]
    return pump


def _guesses(pump: Codes, letters: Letters) -> list[Codes]:
    """Texts that may make the rest fail: nothing, and single characters."""
    codes = sorted(letters.letters, key=lambda code: (code in pump, not 32 < code < 127, code))
    return [(), *((code,) for code in codes)][:GUESSES]
