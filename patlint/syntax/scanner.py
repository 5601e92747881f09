r"""The tokens of a pattern: a character, or a backslash with the character after it.

`re` reads patterns one token ahead, and refuses a lone backslash at the end as soon as it comes into view,
before it complains about anything that stands earlier but is judged later (`*\`). The scanner does the
same, so that refusals have the same position.

>>> from patlint.syntax.dialect import dialect_of
>>> scanner = Scanner(r"a\.b", dialect_of(None))
>>> scanner.take(), scanner.take(), scanner.position
('a', '\\.', 3)
"""

from __future__ import annotations

import re
from itertools import accumulate

from .dialect import Dialect

END = ""
"""What the scanner shows when the pattern is used up."""

_split = re.compile(r"\\.|[^\\]", re.DOTALL).findall


class PatternError(Exception):
    """`re` refuses the pattern.

    `message` says why in our words, `position` is the offset that `re.error.pos` has (None where it has
    none), `kind` the name of the exception that `re.compile` raises: `error`, `OverflowError`,
    `ValueError` or, on 3.10 only, `Verbose`.
    """

    def __init__(self, message: str, position: int | None = None, kind: str = "error") -> None:
        super().__init__(message if position is None else f"{message} (position {position})")
        self.message = message
        self.position = position
        self.kind = kind


class Scanner:
    """`next` is the token in view (END after the last), `position` its offset in the pattern."""

    __slots__ = ("is_bytes", "dialect", "tokens", "starts", "index", "next", "_torn")

    def __init__(self, text: str | bytes, dialect: Dialect) -> None:
        self.dialect = dialect
        self.is_bytes = isinstance(text, bytes)
        decoded = text.decode("latin-1") if isinstance(text, bytes) else text
        self.tokens: list[str] = _split(decoded)
        self.starts: list[int] = list(accumulate(map(len, self.tokens), initial=0))
        self._torn = len(self.tokens) if self.starts[-1] < len(decoded) else -1
        self.tokens.append(END)
        self.seek(0)

    @property
    def position(self) -> int:
        return self.starts[self.index]

    def seek(self, index: int) -> None:
        """Go to the token with this index."""
        if index == self._torn:
            raise PatternError("a lone backslash ends the pattern", self.starts[index])
        self.index = index
        self.next = self.tokens[index]

    def take(self) -> str:
        """The token in view, and go on; END stays."""
        token = self.next
        if token:
            self.seek(self.index + 1)
        return token

    def skip(self, token: str) -> bool:
        """Go on if `token` is in view."""
        if self.next == token:
            self.seek(self.index + 1)
            return True
        return False

    def take_while(self, most: int, allowed: frozenset[str]) -> str:
        """At most `most` tokens that are in `allowed`."""
        taken = ""
        while most and self.next in allowed:
            taken += self.take()
            most -= 1
        return taken

    def take_until(self, terminator: str, what: str) -> str:
        """The text up to `terminator`, which is taken too; `what` names it in the refusal."""
        taken = ""
        while True:
            token = self.take()
            if not token:
                if not taken:
                    raise self.error(f"{what} is missing")
                raise self.error(f"{what} has no closing {terminator}", len(taken))
            if token == terminator:
                if not taken:
                    raise self.error(f"{what} is missing", 1)
                return taken
            taken += token

    def error(self, message: str, back: int = 0) -> PatternError:
        """A refusal `back` characters before the token in view."""
        return PatternError(message, self.position - back)
