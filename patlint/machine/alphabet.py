"""Minterms: the classes into which a pattern's character sets cut the alphabet.

All characters of one minterm are in the same ones of the sets, so an automaton need not tell them apart.
Minterms are numbered in the order of their smallest characters.

>>> alphabet, masks = minterms((CharSet.of_range(97, 122), CharSet.of_chars("ab")), ALL_BYTES)
>>> alphabet.classes
(CharSet('[\\x00-`{-\\xff]'), CharSet('[ab]'), CharSet('[c-z]'))
>>> masks  # the first set is minterms 1 and 2, the second minterm 1
(6, 2)

Cost: one sweep over the sorted places where any set changes.
Source: D'Antoni and Veanes, Minimization of Symbolic Automata, POPL 2014, section 2 (minterms).
"""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass
from functools import lru_cache

from patlint.syntax.charset import ALL_BYTES, ALL_CODES, CharSet


@dataclass(frozen=True, slots=True)
class Alphabet:
    """`classes` are the minterms; `cuts[i]` begins a stretch of characters in class `owners[i]`."""

    classes: tuple[CharSet, ...]
    cuts: tuple[int, ...]
    owners: tuple[int, ...]

    def classify(self, code: int) -> int:
        return self.owners[bisect_right(self.cuts, code) - 1]

    def __len__(self) -> int:
        return len(self.classes)


@lru_cache(maxsize=4096)
def minterms(
    sets: tuple[CharSet, ...], universe: CharSet, covered: bool = False
) -> tuple[Alphabet, tuple[int, ...]]:
    """The alphabet cut by `sets`, and for each set the bit mask of the minterms that it is made of.

    `covered`: what is in none of the sets is no character (the gap below the marker of marked texts).
    """
    toggles: dict[int, int] = {0: 0}
    bit = 1
    for chars in sets:
        for place in chars.bounds:
            toggles[place] = toggles.get(place, 0) ^ bit
        bit <<= 1
    end = universe.bounds[-1]
    toggles.pop(end, None)
    number: dict[int, int] = {}
    bounds: list[list[int]] = []
    cuts: list[int] = []
    owners: list[int] = []
    members = 0
    owner = -1
    for place in sorted(toggles):
        if place > end:
            break
        members ^= toggles[place]
        if covered and not members:
            if owner >= 0:
                bounds[owner].append(place)
            owner = -1
            continue
        new = number.get(members)
        if new is None:
            new = number[members] = len(bounds)
            bounds.append([])
        if new == owner:
            continue
        if owner >= 0:
            bounds[owner].append(place)
        bounds[new].append(place)
        cuts.append(place)
        owners.append(new)
        owner = new
    if owner >= 0:
        bounds[owner].append(end)
    masks = [0] * len(sets)
    for members, index in number.items():
        while members:
            low = members & -members
            masks[low.bit_length() - 1] |= 1 << index
            members ^= low
    alphabet = Alphabet(tuple(CharSet(tuple(row)) for row in bounds), tuple(cuts), tuple(owners))
    return alphabet, tuple(masks)


def universe(is_bytes: bool) -> CharSet:
    return ALL_BYTES if is_bytes else ALL_CODES


def common(a: Alphabet, b: Alphabet) -> tuple[Alphabet, tuple[int, ...], tuple[int, ...]]:
    """The coarsest alphabet that refines both, with the class of `a` and of `b` for each of its minterms."""
    if a.classes == b.classes:
        same = tuple(range(len(a)))
        return a, same, same
    whole = CharSet((0, max(a.classes[a.owners[-1]].bounds[-1], b.classes[b.owners[-1]].bounds[-1])))
    alphabet, _ = minterms(a.classes + b.classes, whole, True)
    firsts = [chars.bounds[0] for chars in alphabet.classes]
    return alphabet, tuple(map(a.classify, firsts)), tuple(map(b.classify, firsts))


PREFERRED = tuple(map(ord, "abcdefghijklmnopqrstuvwxyz0123456789-_.,:;/ ABCDEFGHIJKLMNOPQRSTUVWXYZ"))
_PRINTABLE = CharSet.of_range(32, 126)
_LETTERS_AND_UP = CharSet.of_ranges([(0xA1, 0xAC), (0xAE, 0x377)])


@lru_cache(maxsize=4096)
def representative(chars: CharSet) -> int:
    """The member of a set that is the most pleasant to read; `chars` must not be empty."""
    for code in PREFERRED:
        if code in chars:
            return code
    for pleasant in (_PRINTABLE, _LETTERS_AND_UP):
        found = chars & pleasant
        if found:
            return found.bounds[0]
    return chars.bounds[0]
