r"""Texts on which a pattern is compared: worlds of short texts, members, near misses, borders of classes.

A `World` holds with each text all its beginnings, so that an automaton makes one step a text.

>>> world = world_of(["ab", "b"])
>>> world.texts, world.parents, [world.letters[symbol] for symbol in world.symbols[1:]]
(('', 'a', 'b', 'ab'), (0, 0, 0, 1), [97, 98, 98])
"""

from __future__ import annotations

import random
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from typing import TypeAlias

from patlint.machine import words
from patlint.machine.dfa import Dfa
from tests.corpus.generate import texts as all_texts

Text: TypeAlias = "str | bytes"


@dataclass(frozen=True, slots=True)
class World:
    """`texts[i]` is `texts[parents[i]]` and one more character, `letters[symbols[i]]`; text 0 is empty."""

    texts: tuple[Text, ...]
    parents: tuple[int, ...]
    symbols: tuple[int, ...]
    letters: tuple[int, ...]

    def __len__(self) -> int:
        return len(self.texts)


def world_of(texts: Iterable[Text], is_bytes: bool = False) -> World:
    """The texts and all their beginnings, the shortest first."""
    wanted: set[Text] = {b"" if is_bytes else ""}
    for text in texts:
        for size in range(len(text), 0, -1):
            if text[:size] in wanted:
                break
            wanted.add(text[:size])
    order = sorted(wanted, key=lambda text: (len(text), text))
    index = {text: number for number, text in enumerate(order)}
    letters: dict[int, int] = {}
    parents, symbols = [0], [0]
    for text in order[1:]:
        last = text[-1]
        code = last if isinstance(last, int) else ord(last)
        parents.append(index[text[:-1]])
        symbols.append(letters.setdefault(code, len(letters)))
    return World(tuple(order), tuple(parents), tuple(symbols), tuple(letters))


CASED = "aAkK\u212asS\u017fiI\u0130\u0131\n_"
ASTRAL = "a\U00010400\U00010428\U0010ffff\n"


@lru_cache
def fixed_world(name: str) -> World:
    """The world of a palette of `patterns`: every text over a few letters up to a length, and some more."""
    if name == "plain":
        return world_of((*all_texts("ab\n", 5), *all_texts("ab _1A\n", 2), "a b", "b\ta", "a1_"))
    if name == "cased":
        return world_of(
            (*all_texts(CASED, 2), *all_texts("kK\u212aA\n", 3), "stS", "\u1e9e\xdf", "\xb5\u03bc")
        )
    if name == "astral":
        return world_of((*all_texts(ASTRAL, 3), *all_texts("\ud800\xe9a\uffff\U00010000", 2)))
    if name == "bytes":
        rows = (*all_texts("ab\n", 4), *all_texts("aA\xe9\xc9\xff_ \n", 2))
        return world_of((row.encode("latin-1") for row in rows), True)
    raise KeyError(name)


def local_world(pattern: Text, generator: random.Random) -> World:
    """All short texts over a few of the characters that a pattern names, and the line feed."""
    codes = list(pattern) if isinstance(pattern, bytes) else [ord(char) for char in pattern]
    own = sorted({code for code in codes if chr(code).isalnum() or code > 126 or chr(code) in " -_/.:@#<\"'"})
    letters = "\n" + "".join(map(chr, generator.sample(own, min(4, len(own)))))
    rows = all_texts(letters, 3)
    if isinstance(pattern, bytes):
        return world_of((row.encode("latin-1") for row in rows), True)
    return world_of(rows)


def members(dfa: Dfa, is_bytes: bool, generator: random.Random, number: int) -> list[Text]:
    """Texts of a language, each with one text that differs from it by one edit."""
    found: list[Text] = []
    for codes in words.sample(dfa, generator.randrange(1 << 30), number):
        if len(codes) <= 24:
            found += (_text(codes, is_bytes), _text(_edited(codes, dfa, generator), is_bytes))
    return found


def _text(codes: Iterable[int], is_bytes: bool) -> Text:
    return bytes(codes) if is_bytes else "".join(map(chr, codes))


def _edited(codes: tuple[int, ...], dfa: Dfa, generator: random.Random) -> tuple[int, ...]:
    place = generator.randint(0, len(codes))
    other = generator.choice(generator.choice(dfa.alphabet.classes).bounds[:-1])
    other = generator.choice((10, other, *codes))
    kind = generator.random()
    if kind < 0.3:
        return (*codes[:place], *codes[place + 1 :])
    if kind < 0.6:
        return (*codes[:place], other, *codes[place + 1 :])
    if kind < 0.75:
        return (*codes, 10)
    return (*codes[:place], other, *codes[place:])


def borders(dfa: Dfa, is_bytes: bool, generator: random.Random, number: int) -> list[Text]:
    """Texts of one character: first and last ones of the stretches that the pattern's sets are made of."""
    codes = {code + by for code in dfa.alphabet.cuts for by in (-1, 0)} - {-1}
    return [_text((code,), is_bytes) for code in generator.sample(sorted(codes), min(number, len(codes)))]
