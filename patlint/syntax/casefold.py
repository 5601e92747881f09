r"""Which characters IGNORECASE treats as one: the folding of `re`, derived from the methods of `str`.

`re` lowers the character of the text with a map of its own (`low`) and compares it with what the pattern
was compiled to. Two lower-case characters with the same upper case (`s` and U+017F) are taken together
where the pattern names one of them. Under ASCII and in bytes only A-Z and a-z fold.

>>> [hex(code) for code in orbit(ord("K"))]
['0x4b', '0x6b', '0x212a']
>>> orbit(ord("K"), ascii_only=True).size()
2

The tables are made on first use (about 20 ms) from the running version's Unicode data, and so hold for
that version. Method: experiment over all code points; tests/syntax/test_casefold.py compares every code
point with `re`.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

from .charset import CharSet

_BLOCK = 256


@dataclass(frozen=True, slots=True)
class Folding:
    """One way to fold: Unicode's or ASCII's.

    `low` maps each character that lowering changes to its lower case, `sources` is that map backwards,
    `kin` maps a lower-case character to the others with the same upper case, `raised` pairs each
    lower-case character that raising changes with (the first character of) its upper case, sorted by it.
    `moved`, `lows` and `related` hold the keys of `low`, `sources` and `kin`; `cased` is all of them, the
    characters that fold with another.
    """

    low: dict[int, int]
    sources: dict[int, tuple[int, ...]]
    kin: dict[int, tuple[int, ...]]
    raised: tuple[tuple[int, int], ...]
    moved: CharSet
    lows: CharSet
    related: CharSet
    cased: CharSet

    def lowered(self, codes: CharSet) -> CharSet:
        """The lower case of each member, with its kin: what a set is compiled to."""
        changed = codes & self.moved
        lows = (codes - changed) | CharSet.of_codes(self.low[code] for code in changed)
        return lows | CharSet.of_codes(other for code in lows & self.related for other in self.kin[code])

    def raised_into(self, first: int, last: int) -> CharSet:
        """The lower-case characters whose upper case is in `first..last`."""
        start = bisect_left(self.raised, (first, -1))
        end = bisect_left(self.raised, (last + 1, -1))
        return CharSet.of_codes(code for _, code in self.raised[start:end])

    def takes(self, lows: CharSet) -> CharSet:
        """All characters whose lower case is in `lows`."""
        return (lows - self.moved) | CharSet.of_codes(
            code for low in lows & self.lows for code in self.sources[low]
        )


def orbit(code: int, ascii_only: bool = False) -> CharSet:
    """All characters that a literal `code` matches under IGNORECASE. `ascii_only` for ASCII and bytes.

    Orbits are the classes of an equivalence relation; most hold one character.
    """
    fold = folding(ascii_only)
    low = fold.low.get(code, code)
    family = (low, *fold.kin.get(low, ()))
    return CharSet.of_codes(member for lower in family for member in fold.sources.get(lower, (lower,)))


@lru_cache(maxsize=2)
def folding(ascii_only: bool) -> Folding:
    """The tables, made once."""
    if ascii_only:
        low = {code: code + 32 for code in range(65, 91)}
        # What is compared with a raised character is raised by Unicode's rules even under ASCII; so all
        # that raises counts, lower case by ASCII's rule or not.
        return _tables(low, {}, _raised_pairs(_changing()))
    low = {}
    changing = _changing()
    for code in changing:
        lower = ord(chr(code).lower()[0])  # U+0130 is the only one with two; `re` takes the first
        if lower != code:
            low[code] = lower
    by_upper: dict[str, list[int]] = {}
    for code in changing:
        if code not in low:
            by_upper.setdefault(chr(code).upper(), []).append(code)
    kin = {
        code: tuple(other for other in family if other != code)
        for family in by_upper.values()
        if len(family) > 1
        for code in family
    }
    return _tables(low, kin, _raised_pairs(code for code in changing if code not in low))


def _tables(
    low: dict[int, int], kin: dict[int, tuple[int, ...]], raised: tuple[tuple[int, int], ...]
) -> Folding:
    sources: dict[int, list[int]] = {}
    for code, lower in low.items():
        sources.setdefault(lower, [lower]).append(code)
    moved, lows, related = (CharSet.of_codes(table) for table in (low.keys(), sources.keys(), kin.keys()))
    return Folding(
        low,
        {lower: tuple(codes) for lower, codes in sources.items()},
        kin,
        raised,
        moved,
        lows,
        related,
        moved | lows | related,
    )


def _raised_pairs(codes: Iterable[int]) -> tuple[tuple[int, int], ...]:
    pairs = ((ord(chr(code).upper()[0]), code) for code in codes)
    return tuple(sorted(pair for pair in pairs if pair[0] != pair[1]))


@lru_cache(maxsize=1)
def _changing() -> tuple[int, ...]:
    """Every character that lowering or raising changes, and what it is raised to, rising."""
    text = all_characters()
    found: set[int] = set()
    for start in range(0, len(text), _BLOCK):
        block = text[start : start + _BLOCK]
        if block.lower() != block or block.upper() != block:
            for char in block:
                upper = char.upper()
                if upper != char or char.lower() != char:
                    found.add(ord(char))
                    if len(upper) == 1:
                        found.add(ord(upper))
    return tuple(sorted(found))


def all_characters() -> str:
    """The 1,114,112 code points in order, surrogates included, as one text (about 10 ms)."""
    plane = bytearray(4 * 0x10000)
    plane[0::4] = bytes(range(256)) * 256
    plane[1::4] = b"".join(bytes((high,)) * 256 for high in range(256))
    planes = []
    for number in range(17):
        plane[2::4] = bytes((number,)) * 0x10000
        planes.append(bytes(plane))
    data = b"".join(planes)
    # Surrogates cannot be decoded, or only through an error handler that takes half a second.
    surrogates = "".join(map(chr, range(0xD800, 0xE000)))
    return data[: 4 * 0xD800].decode("utf-32-le") + surrogates + data[4 * 0xE000 :].decode("utf-32-le")
