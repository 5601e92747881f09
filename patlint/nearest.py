"""The nearest right word for a wrong one, as the tail of a one-line message.

>>> nearest("exponental-ambiguity", ["nullable", "exponential-ambiguity"])
'; the nearest is exponential-ambiguity'
>>> nearest("zzz", ["nullable"])
''
"""

from __future__ import annotations

from collections.abc import Iterable


def nearest(word: str, words: Iterable[str]) -> str:
    """The tail of a message that names the nearest of `words`, empty where none is near."""
    from difflib import get_close_matches  # only wrong calls pay for it

    found = get_close_matches(word, list(words), n=1, cutoff=0.5)
    return f"; the nearest is {found[0]}" if found else ""
