r"""Random patterns with every construct of `re`, by name. Knows nothing of patlint.

Each pattern draws a few of the constructs that are allowed and then nests them freely: a pattern with all of
them at once shows little of any. About one in four is a damaged copy of the pattern before it, so that pairs of
neighbours are close relatives. Not every pattern compiles; what `re` refuses is compared as a refusal.
"""

from __future__ import annotations

import random
import re
import sys
from dataclasses import dataclass

from tests.oracle.real import real_patterns

CONSTRUCTS = (
    *("sets", "escapes", "anchors", "boundaries", "ahead", "behind", "atomic", "possessive", "lazy", "empty"),
    *("bounded", "groups", "backs", "conditionals", "flags", "case", "verbose", "bytes", "astral", "locale"),
    "real",
)
NEW_IN_3_11 = {"atomic", "possessive"}


@dataclass(frozen=True, slots=True)
class Drawn:
    """`world` is plain, cased, astral, bytes or local: which texts the pattern is made for."""

    pattern: str | bytes
    flags: int
    world: str


LETTERS = {
    "plain": ("a", "b", "a", "b", "."),
    "cased": ("k", "K", "s", "\u017f", "\u212a", "i", "I", "\u0130", "\u0131", "a", "."),
    "astral": ("a", "\U00010400", "\U00010428", "\U0010ffff", "."),
    "bytes": ("a", "b", "\xe9", "\xc9", "\xff", "A", "."),
}
SETS = {
    "plain": ("[ab]", "[^a]", "[^b\n]", "[a-z]", "[^\\W]", "[\\s\\S]", "[b\\d]", "[A-z]", "[]a]", "[^]b]"),
    "cased": (
        *("[k]", "[^K]", "[a-z]", "[^A-Z]", "[h-l]", "[H-t]", "[\u0130]", "[^\u0131]", "[\u0100-\u0140]"),
        *(
            "[\\w-]",
            "[^\\Wk]",
            "[\u2100-\u2200]",
            "[i-\U00010000]",
            "[^A-\U00010428]",
            "[\xb5\xdf]",
            "[r-\u017f]",
        ),
    ),
    "astral": (
        *("[\U00010400-\U0001044f]", "[^\U00010400]", "[a-\U00010fff]", "[\ud800-\udfff]", "[A-\U00010410]"),
        *("[^\uffff-\U00010428]", "[\\W\U00010428]"),
    ),
    "bytes": ("[ab]", "[^a]", "[\xe0-\xff]", "[^\x80-\xff]", "[\\w\xe9]", "[A-b]", "[^\\W_]", "[\x00-\xc9]"),
}
ESCAPES = (
    *(r"\w", r"\W", r"\d", r"\s", r"\S", r"\n", r"\x61", r"\141", r"\.", r"[\b]", r"\t", r"[\x61-\x62]"),
    *(r"\u0061", r"\U00000062", r"\N{LATIN SMALL LETTER B}", r"\0"),
)
# What is put for what: mostly other spellings of the same, so that neighbours are equal and claimed to be.
RESPELLED = (
    *((r"(?<=[\w\])])\*(?![?+])", "{0,}"), (r"(?<=[\w\])])\+(?![?+])", "{1,}")),
    *((r"(?<=[\w\])])\?(?![?+])", "{0,1}"), (r"(?<=[\w\])])\?(?![?+])", "{,1}"), (r"(?<=\w)\*", "**")),
    *(("a", "[a]"), ("a", "(?:a)"), ("b", r"\x62"), ("b", "(?:b|b)"), (r"(?<![\\\[])\.", "[^\n]")),
    *(
        (r"(?<![\\\[(])\$", r"(?=\n?\Z)"),
        (r"(?<![\\\[(])\$", r"(?!\n?[^\n]|\n\n)"),
        (r"(?<!.)\^", r"(?<![\s\S])"),
    ),
    *((r"\\b", r"(?:(?<=\w)(?!\w)|(?<!\w)(?=\w))"), (r"\\Z", r"(?![\s\S])"), (r"\\A", r"(?<![\s\S])")),
    *((r"\(\?:", "(?:(?:)"), (r"\(\?>", "(?:"), (r"\(\?=", "(?=(?=)"), (r"\(\?<", "(?:)(?<")),
)
GREEDY = ("*", "+", "?")
BOUNDED = ("{2}", "{1,2}", "{0,2}", "{2,}", "{2,3}", "{,2}", "{0,1}", "{1}", "{0}", "{,}")
SCOPES = ("i", "s", "m", "a", "ai", "im", "-i", "m-s", "s-i", "u", "x")


class Maker:
    """Patterns without end from one seed; `only` names the constructs that may occur (empty: all)."""

    def __init__(self, seed: int, only: frozenset[str] = frozenset(), files: int = 60) -> None:
        self.random = random.Random(seed)
        allowed = [name for name in CONSTRUCTS if not only or name in only]
        if sys.version_info < (3, 11):
            allowed = [name for name in allowed if name not in NEW_IN_3_11]
        self.real = real_patterns(files) if "real" in allowed else ()
        self.only_real = allowed == ["real"]
        self.allowed = [name for name in allowed if name != "real"]
        self.last: Drawn | None = None
        self.on: frozenset[str] = frozenset()
        self.palette = "plain"
        self.opened = self.closed = 0

    def draw(self) -> Drawn:
        """The next pattern."""
        chance = self.random.random()
        if self.last is not None and chance < 0.25:
            self.last = Drawn(self.damaged(self.last.pattern), self.last.flags, self.last.world)
        elif self.real and (self.only_real or chance < 0.32):
            self.last = Drawn(self._real(), self.random.choice((0, 0, 0, 2, 8, 16, 10)), "local")
        else:
            self.last = self._made()
        return self.last

    def _real(self) -> str | bytes:
        pattern = self.random.choice(self.real)
        for _ in range(self.random.choice((0, 1, 1, 2, 3))):
            pattern = self.damaged(pattern)
        return pattern

    def damaged(self, pattern: str | bytes) -> str | bytes:
        """The pattern with one edit of its text."""
        if isinstance(pattern, bytes):
            return self._damaged(pattern.decode("latin-1")).encode("latin-1", "ignore")
        return self._damaged(pattern)

    def _damaged(self, pattern: str) -> str:
        choice, size = self.random.choice, len(pattern)
        if self.random.random() < 0.3:
            old, new = choice(RESPELLED)
            return re.sub(old, new.replace("\\", "\\\\"), pattern, count=choice((0, 1)))
        start, end = sorted((self.random.randint(0, size), self.random.randint(0, size)))
        end = min(end, start + 8)
        part = pattern[start:end]
        kind = self.random.random()
        if kind < 0.25:
            return pattern[:start] + pattern[start + 1 :]
        if kind < 0.45:
            new = choice(
                ("*", "+", "?", "|", "a", "b", "$", "^", ".", "(", ")", "\\", r"\b", "[", "{2}", "-")
            )
            return pattern[:start] + new + pattern[start:]
        if kind < 0.6:
            wrap = choice(
                ("(?:%s)", "(?:%s)*", "(%s)", "(?=%s)", "(?:%s|)", "(?:|%s)", "(?i:%s)", "(?:%s)??")
            )
            return pattern[:start] + wrap % part + pattern[end:]
        if kind < 0.75:
            old, new = choice((("*", "+"), ("+", "*"), ("?", "*"), ("*", "*?"), ("a", "[ab]"), ("(?:", "(")))
            return pattern.replace(old, new, 1)
        if kind < 0.85:
            return pattern[:start] + pattern[end:]
        return pattern[:end] + part + pattern[end:]

    def _made(self) -> Drawn:
        draw = self.random
        size = min(len(self.allowed), draw.choice((1, 2, 3, 4, 5, 7)))
        on = set(draw.sample(self.allowed, size))
        if on & {"backs", "conditionals"}:
            on.add("groups")
        palettes = [name for name in ("bytes", "astral") if name in on]
        palettes += ["cased", "plain"] if "case" in on else ["plain"]
        if self.allowed == ["bytes"]:
            palettes = ["bytes"]
        self.on = frozenset(on)
        self.palette = draw.choice(palettes)
        self.opened = self.closed = 0
        flags = 0
        if "case" in on and draw.random() < 0.6:
            flags |= 2
        if "flags" in on:
            flags |= draw.choice((0, 2, 8, 16, 24, 256, 258, 10))
        if "verbose" in on:
            flags |= 64
        if "locale" in on and self.palette == "bytes":
            flags = flags & ~256 | 4
        text = self.pattern(draw.choice((2, 3, 3, 4, 4, 5)))
        if "case" in on and not flags & 2 and draw.random() < 0.7:
            text = f"(?i){text}"
        elif "flags" in on and draw.random() < 0.3:
            text = f"(?{draw.choice(('i', 'm', 's', 'a', 'ms', 'im', 'x'))}){text}"
        pattern = text.encode("latin-1", "ignore") if self.palette == "bytes" else text
        return Drawn(pattern, flags, self.palette)

    # Parts

    def leaf(self) -> str:
        draw, on = self.random, self.on
        kinds = [name for name in ("sets", "escapes", "anchors", "boundaries") if name in on]
        if kinds and draw.random() < 0.4:
            return (
                self.anchor() if (kind := draw.choice(kinds)) in ("anchors", "boundaries") else self.one(kind)
            )
        if draw.random() < 0.08:
            return ""
        return draw.choice(LETTERS[self.palette])

    def one(self, kind: str = "") -> str:
        """One character."""
        choice = self.random.choice
        if kind == "sets" or (not kind and "sets" in self.on and self.random.random() < 0.4):
            return choice(SETS[self.palette])
        if kind == "escapes" or (not kind and "escapes" in self.on and self.random.random() < 0.4):
            return choice(ESCAPES[:12] if self.palette == "bytes" else ESCAPES)
        return choice(LETTERS[self.palette])

    def anchor(self) -> str:
        rows = (["^", "$", r"\A", r"\Z", "(?m:^)", "(?m:$)"] if "anchors" in self.on else []) + (
            [r"\b", r"\B", r"(?a:\b)"] if "boundaries" in self.on else []
        )
        if self.palette == "bytes":
            rows = [row for row in rows if row != r"(?a:\b)" or "locale" not in self.on]
        return self.random.choice(rows or [""])

    def joined(self, *parts: str) -> str:
        if "verbose" not in self.on:
            return "".join(parts)
        return "".join(part + self.random.choice(("", "", " ", "\n", "# x\n", "(?#c)")) for part in parts)

    def pattern(self, depth: int) -> str:
        draw = self.random
        if depth <= 0 or draw.random() < 0.18:
            return self.leaf()
        special = [name for name in SPECIAL if name in self.on]
        if special and draw.random() < 0.35:
            made: str = getattr(self, draw.choice(special))(depth - 1)
            return made
        kind = draw.random()
        if kind < 0.36:
            return self.joined(self.pattern(depth - 1), self.pattern(depth - 1))
        if kind < 0.58:
            branches = "|".join(self.pattern(depth - 1) for _ in range(draw.choice((2, 2, 3))))
            return f"(?:{branches})"
        return self.repeat(depth - 1)

    def repeat(self, depth: int) -> str:
        draw = self.random
        body = self.one() if draw.random() < 0.3 else f"(?:{self.pattern(depth)})"
        if "empty" in self.on and draw.random() < 0.4:
            body = draw.choice(("(?:|{})", "(?:{}|)", "(?:(?:{})?)", "(?:(?:{})??)", "(?:(?:{})*)")).format(
                body
            )
        mark = draw.choice(BOUNDED if "bounded" in self.on and draw.random() < 0.5 else GREEDY)
        chance = draw.random()
        if "lazy" in self.on and chance < 0.5:
            mark += "?"
        elif "possessive" in self.on and chance < 0.8:
            mark += "+"
        return self.joined(body) + mark

    possessive = repeat
    empty = repeat

    def groups(self, depth: int) -> str:
        self.opened += 1
        number = self.opened
        name = f"?P<n{number}>" if self.random.random() < 0.15 else ""
        body = self.pattern(depth)
        self.closed += 1
        return f"({name}{body})"

    def backs(self, depth: int) -> str:
        if not self.closed:
            return self.groups(depth) + rf"\{self.opened}"
        number = self.random.randint(1, self.opened)
        return self.random.choice((rf"\{number}", rf"(?:\{number})", rf"(?i:\{number})", rf"(?:\{number})*"))

    def conditionals(self, depth: int) -> str:
        group = "" if self.opened and self.random.random() < 0.5 else self.groups(depth) + "?"
        number = self.random.randint(1, max(self.opened, 1))
        no = f"|{self.pattern(depth - 1)}" if self.random.random() < 0.7 else ""
        return f"{group}(?({number}){self.pattern(depth - 1)}{no})"

    def ahead(self, depth: int) -> str:
        return f"(?{self.random.choice('=!')}{self.pattern(depth)})"

    def atomic(self, depth: int) -> str:
        return f"(?>{self.pattern(depth)})"

    def flags(self, depth: int) -> str:
        return f"(?{self.random.choice(SCOPES)}:{self.pattern(depth)})"

    def behind(self, depth: int) -> str:
        width = self.random.choice((0, 1, 1, 2, 3))
        return f"(?<{self.random.choice('=!')}{self.fixed(width, depth)})"

    def fixed(self, width: int, depth: int) -> str:
        """A pattern of exactly `width` characters, with what looks left and right anywhere in it."""
        draw = self.random
        if depth <= 0 or draw.random() < 0.3:
            parts = [self.one() for _ in range(width)]
            if draw.random() < 0.4:
                parts.insert(draw.randint(0, width), self.anchor())
            return "".join(parts)
        kind = draw.random()
        if kind < 0.25:
            left = draw.randint(0, width)
            return self.fixed(left, depth - 1) + self.fixed(width - left, depth - 1)
        if kind < 0.45:
            return f"(?:{self.fixed(width, depth - 1)}|{self.fixed(width, depth - 1)})"
        if kind < 0.55 and "ahead" in self.on:
            return self.ahead(depth - 1) + self.fixed(width, depth - 1)
        if kind < 0.65:
            return self.behind(depth - 1) + self.fixed(width, depth - 1)
        if kind < 0.75 and "atomic" in self.on:
            return f"(?>{self.fixed(width, depth - 1)})"
        if kind < 0.85 and "groups" in self.on:
            self.opened += 1
            body = self.fixed(width, depth - 1)
            self.closed += 1
            return f"({body})"
        if kind < 0.95 and width == 2:
            return f"(?:{self.fixed(1, depth - 1)}){{2}}"
        return self.fixed(width, depth - 1) + self.anchor()


SPECIAL = (*("ahead", "behind", "atomic", "possessive", "empty", "groups", "backs", "conditionals", "flags"),)
