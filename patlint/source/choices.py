"""One expression with several values: all of them, one after the other.

A loop over a table gives its variable one row after the other, and an expression that reads it has as many
values. `Choices.each(make)` calls `make` once for every combination of rows; wherever `make` comes to such a
name, it asks `take(key, size)` which row is meant, and gets the same answer for the same key within one call.

>>> choices = Choices()
>>> [each for each in choices.each(lambda: choices.take("loop", 3, "no") * 10)]
[0, 10, 20]

Outside of `each` nothing can be taken, and a key that is new while a value is looked at (between two steps
of `each`) neither: `Opaque` with the reason given.

Limit: `MOST` values of one expression. Cost: one call of `make` for each value.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterator
from contextlib import contextmanager
from typing import TypeVar

from patlint.source import reasons
from patlint.source.reasons import Opaque

MOST = 3_000
"""Values of one expression. The longest table of patterns in real code has 800 rows."""

Made = TypeVar("Made")


class Choices:
    """The rows that are taken at the moment."""

    __slots__ = ("consulted", "_taken", "_sizes", "_open", "_alone")

    def __init__(self) -> None:
        self.consulted = 0
        """How often a row was asked for: what was computed without a change of it is the same for all rows."""
        self._taken: dict[Hashable, int] = {}
        self._sizes: dict[Hashable, int] = {}
        self._open = False
        self._alone: set[Hashable] = set()

    def take(self, key: Hashable, size: int, reason: str) -> int:
        """The row of `key`, from 0 to `size` - 1. Errors: `Opaque(reason)` where none may be taken now."""
        self.consulted += 1
        known = self._taken.get(key)
        if known is None:
            if not self._open or not size:
                raise Opaque(reason)
            known = self._taken[key] = 0
            self._sizes[key] = size
        return known

    def take_alone(self, key: Hashable, size: int, reason: str) -> int:
        """Like `take`, for what may not be combined: `Opaque(reason)` where another such key is taken."""
        if any(other != key for other in self._alone & self._taken.keys()):
            raise Opaque(reason)
        self._alone.add(key)
        return self.take(key, size, reason)

    def taken(self, key: Hashable) -> int | None:
        """The row of `key`, None where it was not asked for."""
        return self._taken.get(key)

    @contextmanager
    def aside(self) -> Iterator[None]:
        """A question beside the value: no new row is taken for it."""
        was_open, self._open = self._open, False
        try:
            yield
        finally:
            self._open = was_open

    def each(self, make: Callable[[], Made]) -> Iterator[Made | Opaque]:
        """What `make` gives for every combination of rows; an `Opaque` that it raises is one of these.

        What has no text at all (`reasons.ABSENT`) is left out, if anything has one.
        """
        self._taken.clear()
        self._sizes.clear()
        told = False
        for _ in range(MOST):
            made: Made | Opaque
            self._open = True
            try:
                made = make()
            except Opaque as opaque:
                made = opaque
            finally:
                self._open = False
            if not isinstance(made, Opaque) or made.reason != reasons.ABSENT:
                told = True
                yield made
            while self._taken:
                key, row = self._taken.popitem()
                size = self._sizes.pop(key)
                if row + 1 < size:
                    self._taken[key] = row + 1
                    self._sizes[key] = size
                    break
            if not self._taken:
                if not told:
                    yield Opaque(reasons.ATTRIBUTE)
                return
        self._taken.clear()
        self._sizes.clear()
        yield Opaque(reasons.TOO_MANY)
