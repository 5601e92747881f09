r"""Regular expressions as values, and their text.

An expression is a set of characters (`Chars`), something that is kept as it stands (`Opaque`: an anchor), a
`Chain`, a `Choice` or a repeat (`Times`). `Writer` writes one as pattern text with the spelling of
characters that it was given; lengths of texts are what decides between expressions. `algebra` builds and
simplifies them.

>>> Writer(lambda chars: "".join(map(chr, chars))).text(Times(Chars(CharSet.of_chars("x")), 2, None))
'xx+'
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

from patlint.syntax.charset import CharSet


@dataclass(frozen=True, slots=True)
class Chars:
    """One character out of a set."""

    chars: CharSet


@dataclass(frozen=True, slots=True)
class Opaque:
    """Pattern text that is kept as it is and holds together beside others."""

    written: str


@dataclass(frozen=True, slots=True)
class Chain:
    """One after the other; `items` is empty (the empty text) or has at least two, none of them a Chain."""

    items: tuple[Expr, ...]


@dataclass(frozen=True, slots=True)
class Choice:
    """One of `branches`: none (nothing matches) or at least two, none of them a Choice."""

    branches: tuple[Expr, ...]


@dataclass(frozen=True, slots=True)
class Times:
    """`body` from `low` to `high` times (None: without bound)."""

    body: Expr
    low: int
    high: int | None
    lazy: bool = False


Expr: TypeAlias = Chars | Opaque | Chain | Choice | Times
EMPTY = Chain(())
NOTHING = Choice(())

# How tightly a text must hold together: as the body of a group, beside others, under a repeat.
LOOSE, BESIDE, TIGHT = range(3)
DOUBLED = 8
"""`xx` is not written as `x{2}` for what is shorter than so many characters."""


class Writer:
    """Texts of expressions, remembered; `braces` prefers `x{2}` to `xx` for what is longer than a
    character."""

    def __init__(self, spell: Callable[[CharSet], str], braces: bool = False) -> None:
        self.spell = spell
        self.braces = braces
        self._texts: dict[tuple[Expr, int], str] = {}

    def text(self, expr: Expr, binding: int = LOOSE) -> str:
        key = (expr, binding)
        found = self._texts.get(key)
        if found is None:
            found = self._texts[key] = self._text(expr, binding)
        return found

    def size(self, expr: Expr) -> int:
        """The length of the expression's text beside others."""
        return len(self.text(expr, BESIDE))

    def _text(self, expr: Expr, binding: int) -> str:
        match expr:
            case Chars():
                return self.spell(expr.chars)
            case Opaque():
                return expr.written if binding != TIGHT else f"(?:{expr.written})"
            case Chain():
                text = "".join(self.text(item, BESIDE) for item in expr.items)
                return text if binding != TIGHT else f"(?:{text})"
            case Choice():
                if not expr.branches:
                    return "(?!)"
                text = "|".join(self.text(branch, LOOSE) for branch in expr.branches)
                return text if binding == LOOSE else f"(?:{text})"
            case Times():
                text = self._times_text(expr)
                return text if binding != TIGHT else f"(?:{text})"

    def _times_text(self, expr: Times) -> str:
        low, high = expr.low, expr.high
        mark = "?" if expr.lazy and low != high else ""
        body = self.text(expr.body, TIGHT)
        short = body + _counts(low, high) + mark
        if (
            low
            and isinstance(expr.body, Chars | Opaque)
            and (high is None or high - low <= 1)
            and (low, high) != (1, None)
            and low <= 4
        ):
            rest = body * (low - 1) + body + "+" if high is None else body * low + (body + "?") * (high - low)
            rest += mark
            bare = not self.braces or (len(body) == 1 and low == high and body != " ")
            doubled = low == high == 2 and len(body) < DOUBLED and not self.braces
            if doubled or (bare and len(rest) <= len(short)):
                return rest
        return short


def nullable(expr: Expr) -> bool:
    """Whether the empty text is in the language; False in doubt."""
    match expr:
        case Chars() | Opaque():
            return False
        case Chain():
            return all(map(nullable, expr.items))
        case Choice():
            return any(map(nullable, expr.branches))
        case Times():
            return expr.low == 0 or nullable(expr.body)


def _counts(low: int, high: int | None) -> str:
    match low, high:
        case 0, None:
            return "*"
        case 1, None:
            return "+"
        case 0, 1:
            return "?"
        case 1, 1:
            return ""
        case _, None:
            return f"{{{low},}}"
        case _ if low == high:
            return f"{{{low}}}"
        case _:
            return f"{{{low},{high}}}"
