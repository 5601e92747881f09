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
from patlint.machine.links import Masks

VARIANTS = 5
"""Readings of a pump (with other characters of the same sets) that are tried."""
READINGS = 2
"""Readings of which something had to be counted."""
GUESSES = 4
GUESSED = 4
"""Readings for which suffixes are guessed."""
ANYWAY = 2
LEADS = 4
"""Characters that are tried before the pumps."""
LEAD = 2
"""How often each pump but the last stands in the text for which a suffix is sought."""

Kind: TypeAlias = Literal["sure", "guess", "again", "led"]
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
    that showed nothing; "guess": not decided; "led": with a character before it, needed where nothing else showed
    anything.
    """
    readings = guessed = 0
    for number, (prefix, whole, more) in enumerate(_readings(suspect, letters)):
        lead, last = prefix, whole
        for between, pump in more:
            lead, last = lead + last * LEAD + between, pump
        suffix = continuations.failing(suspect, lead, last)
        kind: Kind = "sure"
        if suffix == "none":
            suffix = continuations.failing(suspect, lead, last, but_last=True)
            kind = "guess"
        if suffix == "unknown":
            for guess in _guesses(last, letters):
                yield _text(prefix, whole, more, guess, is_bytes), "guess"
        elif suffix != "none":
            yield _text(prefix, whole, more, suffix, is_bytes), kind
            if not more and _root(whole) != whole:  # the number of short pumps may matter
                yield Text(prefix, whole, suffix, is_bytes), "again"
        elif anyway:
            for guess in _guesses(last, letters)[:ANYWAY]:
                yield _text(prefix, whole, more, guess, is_bytes), "guess"
        if suspect.idle and suffix != "unknown" and number < READINGS:
            # What goes on from the text's start may be another than what begins later.
            for code in _leads(suspect.idle, whole, letters):
                led = continuations.failing(suspect, (*lead[: len(prefix)], code, *lead[len(prefix) :]), last)
                if led == "none":
                    led = continuations.failing(suspect, (*prefix, code), last, but_last=True)
                if not isinstance(led, str):
                    yield _text((*prefix, code), whole, more, led, is_bytes), "led"
        readings += suffix not in ("none", "unknown")
        guessed += suffix == "unknown"
        if readings >= READINGS or guessed >= GUESSED:
            break


def _text(prefix: Codes, whole: Codes, more: More, suffix: Codes, is_bytes: bool) -> Text:
    """The text with the shortest pumps that say the same."""
    pump = before = _root(whole)
    short: list[tuple[Codes, Codes]] = []
    for between, each in more:
        root = _root(each)
        rest = _after(before, without_pumps(between, root))
        if rest or root != before:
            short.append((rest, root))
        before = root
    return Text(without_pumps(prefix, pump), pump, suffix, is_bytes, tuple(short))


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


def _readings(suspect: Suspect, letters: Letters) -> Iterator[tuple[Codes, Codes, More]]:
    """Prefix and pumps in characters: the most readable, then others that may be treated better by what follows."""
    seen: set[tuple[Codes, Codes, More]] = set()
    union = 0
    for mask in sum((between + pump for between, pump in suspect.more), suspect.prefix + suspect.pump):
        union |= mask
    preferred = [0, *(1 << minterm for minterm in range(union.bit_length()) if union >> minterm & 1)]
    for prefer in preferred:

        def read(masks: Masks, prefer: int = prefer) -> Codes:
            return tuple(letters(mask, prefer) for mask in masks)

        more = tuple((read(between), read(pump)) for between, pump in suspect.more)
        reading = read(suspect.prefix), read(suspect.pump), more
        if reading not in seen:
            seen.add(reading)
            yield reading
        if len(seen) >= VARIANTS:
            return


def _root(pump: Codes) -> Codes:
    """The shortest text of which `pump` is a power."""
    size = len(pump)
    for length in range(1, size):
        if size % length == 0 and pump == pump[:length] * (size // length):
            return pump[:length]
    return pump


def _leads(mask: int, pump: Codes, letters: Letters) -> list[int]:
    """Characters of a set of minterms that may stand before the pumps."""
    codes = [code for minterm, code in enumerate(letters.letters) if mask >> minterm & 1]
    return sorted(codes, key=lambda code: (code in pump, not 32 < code < 127, code))[:LEADS]


def _guesses(pump: Codes, letters: Letters) -> list[Codes]:
    """Texts that may make the rest fail: nothing, and single characters."""
    codes = sorted(letters.letters, key=lambda code: (code in pump, not 32 < code < 127, code))
    return [(), *((code,) for code in codes)][:GUESSES]
