"""Random patterns. Knows the vocabulary, not the parser. Three kinds, from noise to mostly valid."""

from __future__ import annotations

import random
from collections.abc import Iterator

_VOCABULARY = r"""
    (?: (?= (?! (?<= (?<! (?> (?P<n> (?P<m> (?P=n) (?P=m) (?(1) (?(2) (?(n) (?i) (?x) (?-x: (?x: (?i:
    (?s-i: (?a) (?u) (?L) (?a: (?L: (?u: (?im (?t) (?t: (?#c) ) ) ) ) \1 \2 \3 \10 \0 \08 \012 \123 \400
    \377 \18 \x41 \x4 \u0041 \u00 \U0001F600 \U00110000 \N{COLON} \N \d \w \S \b \B \A \Z \z \q \- \] \[
    \{ \n \\ {2} {2,} {,3} {,} {3,2} {1 *? ++ ?+ {2}+ [^ [] [^] [a-z] [z-a] [\d-z] [a-\d] [\w-] [a- [[a]
    [a&&b] [\x41-\x42] é ₂ ١ (?P<é> (?(01) (?(+1) (?(0) (?( ab a|b #x
"""
_FRAGMENTS = [*"ab10_ {}()[]^$.|*+?-,:=!<>P#\\&~'\n\t", *_VOCABULARY.split()]
_ATOMS = list("ab1 #.{}]é-K") + [r"\d", r"\w", "[a-c]", "[^a]", r"\.", r"\n", r"[\W_]"]
_ANCHORS = ["^", "$", r"\b", r"\B", r"\A", r"\Z", "(?#c)"]
_REPEATS = ["*", "+", "?", "{2}", "{1,3}", "{,2}", "{2,}", "*?", "+?", "??", "*+", "++", "{1,2}+", "{3}?"]
_OPENINGS = [
    "(?:",
    "(?i:",
    "(?-i:",
    "(?x:",
    "(?-x:",
    "(?=",
    "(?!",
    "(?<=",
    "(?<!",
    "(?>",
    "(?s-im:",
    "(?a:",
    "(?u:",
    "(?L:",
]
_STARTS = ["", "", "", "", "", "(?i)", "(?x)", "(?a)", "(?L)", "(?ms)", "(?#x)(?i)", " (?x)"]
_FLAGS = [0, 0, 0, 0, 2, 4, 8, 16, 32, 64, 64, 256, 2 | 64, 2 | 256, 6]


def noise(rng: random.Random) -> str:
    """Fragments in a row; most are refused."""
    return "".join(rng.choice(_FRAGMENTS) for _ in range(rng.choice((1, 2, 3, 4, 5, 6, 8, 10))))


class _Sketch:
    """A pattern under construction: how many groups were opened, and which are closed."""

    def __init__(self, rng: random.Random) -> None:
        self.rng = rng
        self.opened = 0
        self.closed: list[int] = []

    def several(self, depth: int) -> str:
        return "".join(self.piece(depth + 1) for _ in range(self.rng.choice((0, 1, 1, 2, 2, 3))))

    def branches(self, depth: int) -> str:
        return "|".join(self.several(depth) for _ in range(self.rng.choice((1, 1, 1, 2, 3))))

    def piece(self, depth: int) -> str:
        rng, kind = self.rng, self.rng.random()
        if depth > 4 or kind < 0.35:
            return rng.choice(_ATOMS)
        if kind < 0.42:
            return rng.choice(_ANCHORS)
        if kind < 0.6:
            body = rng.choice(_ATOMS) if rng.random() < 0.6 else f"(?:{self.branches(depth)})"
            return body + rng.choice(_REPEATS)
        if kind < 0.75:
            self.opened += 1
            index = self.opened
            opening = f"(?P<n{index}>" if rng.random() < 0.3 else "("
            text = f"{opening}{self.branches(depth)})"
            self.closed.append(index)
            return text
        if kind < 0.88:
            return f"{rng.choice(_OPENINGS)}{self.branches(depth)})"
        if kind < 0.94 and self.closed:
            return f"\\{rng.choice(self.closed)}"
        if self.closed:
            no = "|" + self.several(depth) if rng.random() < 0.6 else ""
            return f"(?({rng.choice(self.closed)}){self.several(depth)}{no})"
        return rng.choice(_ATOMS)


def sketch(rng: random.Random) -> str:
    """Grown from the grammar; most are accepted."""
    return rng.choice(_STARTS) + _Sketch(rng).branches(0)


def mutant(rng: random.Random) -> str:
    """A sketch with one place damaged."""
    text = sketch(rng)
    at = rng.randrange(len(text) + 1)
    return text[:at] + rng.choice(("", rng.choice(_FRAGMENTS))) + text[at + rng.randrange(3) :]


def patterns(seed: int, count: int) -> Iterator[tuple[str | bytes, int]]:
    """`count` patterns with flags, str and bytes, a third of each kind."""
    rng = random.Random(seed)
    for number in range(count):
        text = (noise, sketch, mutant)[number % 3](rng)
        flags = rng.choice(_FLAGS)
        if flags & 4 or rng.random() < 0.25:
            try:
                yield text.encode("latin-1"), flags
                continue
            except UnicodeEncodeError:
                pass
        yield text, flags
