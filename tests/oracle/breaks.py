"""Faults put into patlint on purpose, so that the oracle can be seen to find them.

    with broken("dollar"):
        ...

Everything that patlint's functions remember is forgotten before and after.
"""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import replace
from typing import Any

from patlint.machine import contexts, matcher, obligations, ordered, program, relations
from patlint.syntax import casefold, scanner
from patlint.syntax.charset import EMPTY

Undo = Callable[[], None]


def _set(owner: Any, name: str, value: Any) -> Undo:
    old = getattr(owner, name)
    setattr(owner, name, value)
    return lambda: setattr(owner, name, old)


def dollar() -> list[Undo]:
    r"""`$` means `\\Z`: no line feed may follow."""
    right = program._Builder.assertion

    def assertion(self: Any, node: Any, then: int) -> Any:
        made = right(self, node, then)
        return replace(made, kind="end") if made.kind == "final" else made

    return [_set(program._Builder, "assertion", assertion)]


def empty_loop() -> list[Undo]:
    """Loops whose body can be empty have no guard."""
    right = program._Builder.choice

    def choice(self: Any, body: int, exit: int, lazy: bool, loop: int | None) -> Any:
        return right(self, body, exit, lazy, None)

    return [_set(program._Builder, "choice", choice)]


def kin() -> list[Undo]:
    """IGNORECASE does not take lower-case letters with the same upper case together."""
    right = casefold.folding

    def folding(ascii_only: bool = False) -> Any:
        return replace(right(ascii_only), kin={}, related=EMPTY)

    return [
        _set(module, "folding", folding)
        for name, module in list(sys.modules.items())
        if name.startswith("patlint.") and getattr(module, "folding", None) is right
    ]


def behind() -> list[Undo]:
    """A look-behind forgets what its body asked of the rest of the text."""

    def union(self: Any, duties: Any) -> int:
        return obligations.ALL if duties else obligations.NONE

    return [_set(obligations.Obligations, "union", union)]


def veto() -> list[Undo]:
    """What an atomic group prefers does not keep the rest from being taken."""
    return [_set(ordered, "_veto", lambda nfa, better, context: obligations.ALL)]


def lazy() -> list[Undo]:
    """Lazy repeats are greedy."""
    right = program._Builder.choice

    def choice(self: Any, body: int, exit: int, lazy: bool, loop: int | None) -> Any:
        return right(self, body, exit, False, loop)

    return [_set(program._Builder, "choice", choice)]


def back_fold() -> list[Undo]:
    """A back-reference under IGNORECASE compares exactly."""
    return [_set(matcher, "_lowered", lambda char, ascii_only: char if isinstance(char, int) else ord(char))]


def line_start() -> list[Undo]:
    """Nothing remembers that the character before is a line feed."""
    right = contexts.Contexts.bits_after
    drop = ~contexts.AFTER_NEWLINE
    return [_set(contexts.Contexts, "bits_after", lambda self, minterm: right(self, minterm) & drop)]


def relation() -> list[Undo]:
    """A language within another is said to cover it."""
    right: Any = relations.Relation.word

    def word(self: Any) -> str:
        said: str = right.fget(self)
        return "covers" if said == "within" else said

    return [_set(relations.Relation, "word", property(word))]


def position() -> list[Undo]:
    """Refusals are one character late."""
    right = scanner.PatternError.__init__

    def made(self: Any, message: str, position: int | None = None, kind: str = "error") -> None:
        right(self, message, position and position + 1, kind)

    return [_set(scanner.PatternError, "__init__", made)]


BREAKS: dict[str, Callable[[], list[Undo]]] = {
    "dollar": dollar,
    "empty-loop": empty_loop,
    "kin": kin,
    "behind": behind,
    "veto": veto,
    "lazy": lazy,
    "back-fold": back_fold,
    "line-start": line_start,
    "relation": relation,
    "position": position,
}


@contextmanager
def broken(name: str) -> Iterator[None]:
    """patlint with the fault `name` of `BREAKS`."""
    undo = BREAKS[name]()
    _forget()
    try:
        yield
    finally:
        for each in undo:
            each()
        _forget()


def _forget() -> None:
    for name, module in list(sys.modules.items()):
        if name.startswith("patlint."):
            for value in list(vars(module).values()):
                clear = getattr(value, "cache_clear", None)
                if clear is not None:
                    clear()
