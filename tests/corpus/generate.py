r"""Random patterns over a small alphabet, in `re`'s own spelling. Knows nothing of patlint.

`Maker(seed, features)` gives patterns without end; the features are named in `FEATURES`. Not every pattern that
is made compiles (`\2` with one group, `a` in a look-behind of two widths): callers skip and count those.

>>> Maker(1, frozenset()).pattern(2) == Maker(1, frozenset()).pattern(2)
True
"""

from __future__ import annotations

import itertools
import random

FEATURES = ("ahead", "behind", "atomic", "backs", "flags")

LEAVES = (
    *("a", "b", "a", "b", "a", "b", ".", "[ab]", "[^a]", r"\w", r"\n", r"[^\W]", "", ""),
    *("^", "$", r"\b", r"\B", r"\Z", r"\A", "(?m:^)", "(?m:$)", "(?s:.)"),
)
REPEATS = ("*", "+", "?", "*?", "+?", "??", "{2}", "{1,2}", "{0,2}?", "{2,}", "{2,3}", "{0,1}", "{1,}?")
POSSESSIVE = ("*+", "++", "?+", "{1,2}+", "{2}+", "{2,}+", "{0,2}+")
WIDTH_ONE = (
    "a",
    "b",
    "[ab]",
    ".",
    r"\w",
    r"\n",
    "(?=a)b",
    "(a)",
    "$a",
    r"b\b",
    "(?<=a)b",
    "(?<!b)a",
    r"b(?=a)",
)


class Maker:
    """Patterns from one seed; `features` says which constructs beyond the plain ones may occur."""

    def __init__(self, seed: int, features: frozenset[str]) -> None:
        self.random = random.Random(seed)
        self.features = features

    def pattern(self, depth: int) -> str:
        """One pattern whose constructs nest `depth` deep at most."""
        draw, choice = self.random.random, self.random.choice
        if depth == 0 or draw() < 0.22:
            return choice(LEAVES)
        special = [feature for feature in FEATURES if feature in self.features]
        if special and draw() < 0.3:
            return getattr(self, choice(special))(depth - 1)
        kind = draw()
        if kind < 0.34:
            return self.pattern(depth - 1) + self.pattern(depth - 1)
        if kind < 0.56:
            return f"(?:{self.pattern(depth - 1)}|{self.pattern(depth - 1)})"
        if kind < 0.7:
            return f"({self.pattern(depth - 1)})"
        return f"(?:{self.pattern(depth - 1)}){choice(REPEATS)}"

    def ahead(self, depth: int) -> str:
        return f"(?{self.random.choice('=!')}{self.pattern(depth)})"

    def behind(self, depth: int) -> str:
        width = self.random.randint(0, 2)
        branches = [
            "".join(self.random.choice(WIDTH_ONE) for _ in range(width))
            + self.random.choice(("", "", "$", r"\b"))
            for _ in range(self.random.randint(1, 2))
        ]
        return f"(?<{self.random.choice('=!')}{'|'.join(branches)})"

    def atomic(self, depth: int) -> str:
        if self.random.random() < 0.4:
            return f"(?>{self.pattern(depth)})"
        return f"(?:{self.pattern(depth)}){self.random.choice(POSSESSIVE)}"

    def backs(self, depth: int) -> str:
        if self.random.random() < 0.5:
            return rf"({self.pattern(depth)}){self.pattern(max(depth - 1, 0))}\1"
        yes, no = self.pattern(depth), self.pattern(max(depth - 1, 0))
        group = f"({self.pattern(max(depth - 1, 0))})?" if self.random.random() < 0.7 else ""
        return f"{group}(?({self.random.choice('112')}){yes}|{no})"

    def flags(self, depth: int) -> str:
        flag = self.random.choice(("i", "s", "m", "a", "ai", "-i", "im"))
        extra = self.random.choice(
            ("", "A", "[^B]", "k", "[A-b]", "\u212a", "[\u0130-\u0131]", r"(a)(?i:\1)")
        )
        return f"(?{flag}:{self.pattern(depth)}{extra})"


def texts(letters: str, longest: int) -> tuple[str, ...]:
    """All texts over `letters` up to a length, the shortest first."""
    rows = (itertools.product(letters, repeat=size) for size in range(longest + 1))
    return tuple("".join(row) for row in itertools.chain.from_iterable(rows))
