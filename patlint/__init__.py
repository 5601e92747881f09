"""patlint finds mistakes in the regular expressions of Python code, and shows a text that proves each one.

The names below are the library. They are imported when first used, so that `patlint --help` stays quick.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from patlint.language import Language as Language
    from patlint.language import ambiguity as ambiguity
    from patlint.language import relate as relate
    from patlint.pairs import agreement as agreement
    from patlint.report.text import explain as explain
    from patlint.rewrite import shorten as shorten
    from patlint.run import lint_source as lint_source
    from patlint.source import find_patterns as find_patterns

__version__ = "0.1.0"

_HOMES = {
    "Language": "patlint.language",
    "agreement": "patlint.pairs",
    "ambiguity": "patlint.language",
    "explain": "patlint.report.text",
    "find_patterns": "patlint.source",
    "lint_source": "patlint.run",
    "relate": "patlint.language",
    "shorten": "patlint.rewrite",
}

__all__ = [
    "Language",
    "__version__",
    "agreement",
    "ambiguity",
    "explain",
    "find_patterns",
    "lint_source",
    "relate",
    "shorten",
]


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module 'patlint' has no attribute {name!r}")
    from importlib import import_module

    value: object = getattr(import_module(_HOMES[name]), name)
    globals()[name] = value
    return value
