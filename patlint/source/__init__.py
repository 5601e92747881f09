"""Python text -> the patterns in it: the only package that knows `ast` and libcst.

`read_module(data, path)` gives a `Module`: sites, unresolved calls, waivers; `find_patterns(text, path)` the
sites alone. What cannot be decoded or parsed is a `SourceError`.
"""

from patlint.source.decode import SourceError
from patlint.source.module import find_patterns, read_module
from patlint.source.sites import Module, Piece, Place, Site, Unresolved, Use, Waiver

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
