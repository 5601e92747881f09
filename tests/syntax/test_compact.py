"""Sets of characters as short leaves: the exact set, and the text that a reader expects."""

from __future__ import annotations

import random
import re
import warnings

import pytest

from patlint.syntax.casefold import folding, orbit
from patlint.syntax.charset import ALL_CODES, EMPTY, NEWLINE, CharSet
from patlint.syntax.classes import category, char_set, universe
from patlint.syntax.parser import parse
from patlint.syntax.render import char_node, render_set
from patlint.syntax.tree import ASCII, DOTALL, IGNORECASE, LOCALE, Group, Literal

I, A, S = IGNORECASE, ASCII, DOTALL  # noqa: E741 the letters of re
chars = CharSet.of_chars
WORD, DIGIT = category("w", False), category("d", False)

EXPECTED: list[tuple[CharSet, int, bool, str]] = [
    (chars("a"), 0, False, "a"),
    (chars("."), 0, False, r"\."),
    (chars("{"), 0, False, r"\{"),
    (chars("\n"), 0, False, r"\n"),
    (chars("\U0001f600"), 0, False, r"\U0001f600"),
    (chars("ab"), 0, False, "[ab]"),
    (chars("abc"), 0, False, "[a-c]"),
    (chars("+,-"), 0, False, "[+,-]"),
    (chars("0123456789"), 0, False, "[0-9]"),
    (chars("0123456789"), A, False, r"\d"),
    (chars("0123456789"), 0, True, r"\d"),
    (chars("0123456789abcdef"), 0, False, "[0-9a-f]"),
    (chars("0123456789abcdef"), A, False, r"[\da-f]"),
    (chars("-a^]["), 0, False, r"[\]a[^-]"),
    (chars("^a"), 0, False, "[a^]"),
    (chars("^["), 0, False, r"[\[^]"),
    (chars("&|~-"), 0, False, "[&|~-]"),
    (category("w", True), 0, False, "[0-9A-Z_a-z]"),
    (category("w", True), A, False, r"\w"),
    (category("w", True) | chars("-."), A, False, r"[\w.-]"),
    (category("w", True) | chars("\xe9"), 0, True, r"[\w\xe9]"),
    (WORD, 0, False, r"\w"),
    (WORD - DIGIT, 0, False, r"[^\d\W]"),
    (WORD - DIGIT - chars("_"), 0, False, r"[^\d\W_]"),
    (ALL_CODES - WORD, 0, False, r"\W"),
    (ALL_CODES - category("s", False) - chars(","), 0, False, r"[^\s,]"),
    (ALL_CODES - chars("a"), 0, False, "[^a]"),
    (ALL_CODES - chars("^"), 0, False, "[^^]"),
    (ALL_CODES - NEWLINE, 0, False, "."),
    (ALL_CODES - NEWLINE, S, False, r"[^\n]"),
    (ALL_CODES, 0, False, r"[\s\S]"),
    (ALL_CODES, S, False, "."),
    (EMPTY, 0, False, r"[^\s\S]"),
    # IGNORECASE: one of each orbit is enough; what is not closed under folding steps out of it
    (orbit(ord("k")), I, False, "k"),
    (orbit(ord("k")) | chars("-"), I, False, "[k-]"),
    (chars("k"), I, False, "(?-i:k)"),
    (chars("kK"), I, False, "(?-i:[Kk])"),
    (chars("kK"), I | A, False, "k"),
    (chars("kK"), I, True, "k"),
    (chars("0123456789abcdefABCDEF"), I | A, False, r"[\da-f]"),
    (WORD, I, False, r"\w"),
    # LOCALE: nothing that depends on it
    (chars("kK"), I | LOCALE, True, "(?-i:[Kk])"),
    (category("w", True), LOCALE, True, r"[\dA-Z_a-z]"),
]


@pytest.mark.parametrize(("wanted", "flags", "is_bytes", "text"), EXPECTED, ids=[r[3] for r in EXPECTED])
def test_expected_text(wanted: CharSet, flags: int, is_bytes: bool, text: str) -> None:
    assert render_set(wanted, flags, is_bytes) == text
    assert read_back(text, flags, is_bytes) == wanted


def read_back(text: str, flags: int, is_bytes: bool) -> CharSet:
    node = parse(text.encode("latin-1") if is_bytes else text, flags).root
    while isinstance(node, Group):
        node = node.body
    return char_set(node, is_bytes)  # type: ignore[arg-type]


def test_random_sets_come_back() -> None:
    rng = random.Random(21)
    cased = list(folding(False).cased)
    escaping = 0
    for _ in range(500):
        is_bytes = rng.random() < 0.3
        wanted = EMPTY
        for _ in range(rng.randint(1, 4)):
            kind = rng.random()
            if is_bytes or kind < 0.3:
                low = rng.randrange(256)
                part = CharSet.of_range(low, min(255, low + rng.choice((0, 0, 1, 2, 9, 40))))
            elif kind < 0.6:
                part = orbit(rng.choice(cased))
            elif kind < 0.8:
                part = category(rng.choice("dswDSW"), rng.random() < 0.5)  # type: ignore[arg-type]
            else:
                low = rng.choice((rng.choice(cased), rng.randrange(0x10FF00)))
                part = CharSet.of_range(low, low + rng.choice((0, 1, 30, 255)))
            wanted = rng.choice((wanted | part, wanted | part, wanted - part, part - wanted))
        if rng.random() < 0.3:
            wanted = universe(is_bytes) - wanted
        flags = rng.choice((0, I, I, S, A, A | I))
        text = render_set(wanted, flags, is_bytes)
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            re.compile(text.encode("latin-1") if is_bytes else text, flags)
        assert read_back(text, flags, is_bytes) == wanted, (wanted, flags, text)
        escaping += text.startswith("(?-i:")
    assert escaping > 20


def test_every_set_over_a_few_characters() -> None:
    """All subsets of the characters that need care in a set, as bytes patterns."""
    letters = b"-^]["
    others = b"\\&a"
    seen = set()
    for bits in range(1, 1 << (len(letters) + len(others))):
        wanted = CharSet.of_codes(c for n, c in enumerate(letters + others) if bits >> n & 1)
        text = render_set(wanted, 0, True)
        assert read_back(text, 0, True) == wanted
        found = re.findall(text.encode("latin-1"), bytes(range(256)))
        assert sorted(b"".join(found)) == list(wanted)
        seen.add(text)
    assert len(seen) == 127


def test_node_carries_its_flags() -> None:
    assert char_node(chars("k"), I, False) == Literal((0, 0), ord("k"), 0)
    assert char_node(orbit(ord("k")), I, False) == Literal((0, 0), ord("k"), I)
