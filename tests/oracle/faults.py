r"""Where `search` itself is at fault in CPython; what is wrong with groups is in `tests.corpus.cpython`.

A search first looks for a character that a match can begin with. If the pattern begins with a set that has a
category (`\w`, `[\D]`) in a scope that turns ASCII or UNICODE, that set is compiled under the flags of the whole
pattern: `re.match(r"(?a:\W)", "\xe9")` matches, `re.search` finds nothing. So with findall, finditer, split, sub.

Found by the oracle on 3.12.1, seen alike on 3.10.13, 3.11.7 and 3.13.0.
"""

from __future__ import annotations

import warnings
from typing import Any

from tests.corpus.cpython import sre_parse

KINDS = 4 | 32 | 256
"""LOCALE, UNICODE and ASCII, of which one is in force."""

# Pattern, flags, text on which match succeeds and search does not.
FAULTS: tuple[tuple[str | bytes, int, str | bytes], ...] = (
    (r"(?a:\W)", 0, "\xe9"),
    (r"(?u:\w)", 256, "\xb5"),
    (r"((?:(?a:[\Wx])))b", 0, "\xe9b"),
    (r"(?a:\D)", 0, "\u0661"),
    (r"(?a:\S)", 0, "\x85"),
)


def search_fault(pattern: str | bytes, flags: int = 0) -> bool:
    """Whether a search with this pattern may pass over a match; it never invents one that the scope refuses."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        tree: Any = sre_parse.parse(pattern, flags)
    outer = inner = tree.state.flags & KINDS
    while len(tree) and str(tree[0][0]) == "SUBPATTERN":
        _, added, _, tree = tree[0][1]
        inner = added & KINDS or inner
    if not len(tree) or str(tree[0][0]) != "IN" or inner == outer:
        return False
    return any(str(op) == "CATEGORY" for op, _ in tree[0][1])
