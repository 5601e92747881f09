"""Python text -> the patterns in it: the only package that knows `ast` and libcst.

`read_module(data, path)` gives a `Module`: sites, unresolved calls, waivers; `find_patterns(text, path)` the
sites alone. What cannot be decoded or parsed is a `SourceError`. The names below are loaded when first used,
because libcst is slow to import.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from patlint.source.decode import SourceError as SourceError
    from patlint.source.module import find_patterns as find_patterns
    from patlint.source.module import read_module as read_module
    from patlint.source.sites import Module as Module
    from patlint.source.sites import Piece as Piece
    from patlint.source.sites import Place as Place
    from patlint.source.sites import Site as Site
    from patlint.source.sites import Unresolved as Unresolved
    from patlint.source.sites import Use as Use
    from patlint.source.sites import Waiver as Waiver

_HOMES = {
    "Module": "patlint.source.sites",
    "Piece": "patlint.source.sites",
    "Place": "patlint.source.sites",
    "Site": "patlint.source.sites",
    "SourceError": "patlint.source.decode",
    "Unresolved": "patlint.source.sites",
    "Use": "patlint.source.sites",
    "Waiver": "patlint.source.sites",
    "find_patterns": "patlint.source.module",
    "read_module": "patlint.source.module",
}

__all__ = [
    "Module",
    "Piece",
    "Place",
    "Site",
    "SourceError",
    "Unresolved",
    "Use",
    "Waiver",
    "find_patterns",
    "read_module",
]


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    value: object = getattr(import_module(_HOMES[name]), name)
    globals()[name] = value
    return value
