"""Folding over all code points: against `re`, and against the tables of the standard library's compiler."""

from __future__ import annotations

import re
import sys
import unicodedata
from types import ModuleType

import pytest

from patlint.syntax.casefold import all_characters, folding, orbit
from patlint.syntax.charset import CharSet

EVERY = range(0x110000)


def compiler() -> ModuleType:
    if sys.version_info >= (3, 11):
        from re import _compiler

        return _compiler
    import sre_compile

    return sre_compile


def test_all_characters() -> None:
    assert all_characters() == "".join(map(chr, EVERY))


def test_low_is_the_engines() -> None:
    """`_sre.unicode_tolower` is what the engine lowers with; CPython only."""
    sre = pytest.importorskip("_sre")
    low = folding(False).low
    assert [code for code in EVERY if low.get(code, code) != sre.unicode_tolower(code)] == []
    assert len(low) > 1300


def test_kin_is_the_compilers_table() -> None:
    """Source: `re._casefix._EXTRA_CASES` from 3.11, `sre_compile._ignorecase_fixes` in 3.10."""
    names = ("_EXTRA_CASES", "_ignorecase_fixes")
    table = next(getattr(compiler(), name) for name in names if hasattr(compiler(), name))
    assert {k: sorted(v) for k, v in folding(False).kin.items()} == {k: sorted(v) for k, v in table.items()}
    assert len(table) >= 50


def test_orbits_partition_and_match_what_re_matches() -> None:
    cased = folding(False).cased
    text = "".join(map(chr, cased))
    seen: set[int] = set()
    orbits = 0
    for code in cased:
        members = orbit(code)
        if code not in seen:
            orbits += 1
            assert {other for other in members if orbit(other) != members} == set()
            assert seen.isdisjoint(members)
            seen.update(members)
            found = re.findall(re.escape(chr(code)), text, re.IGNORECASE)
            assert "".join(found) == "".join(map(chr, members)), hex(code)
    assert seen == set(cased)
    if unicodedata.unidata_version == "14.0.0":
        # Source: counted with Unicode 14 when the rules were found.
        assert (len(seen), orbits) == (2886, 1427)
    assert orbits > 1300


def test_uncased_characters_fold_with_nothing() -> None:
    """Each character is alone in its orbit exactly if `re` finds no other that it equals."""
    lowered = all_characters()
    cased = folding(False).cased
    others = "".join(map(chr, (code for code in EVERY if code not in cased)))
    assert len(others) + cased.size() == len(lowered)
    # A back-reference compares folded characters: x\1 over pairs of different uncased neighbours.
    pairs = re.findall(r"(?is)(?=(.)\1)", others)
    assert pairs == []
    assert ord("k") in cased and ord("-") not in cased and 0x212A not in folding(True).cased


@pytest.mark.parametrize("char", "aAkKzZ@[`{é\u212a\u017f\u0130\u0131")
def test_ascii_orbit(char: str) -> None:
    found = re.findall(re.escape(char), all_characters(), re.IGNORECASE | re.ASCII)
    assert orbit(ord(char), ascii_only=True) == CharSet.of_chars("".join(found))


# Source: Unicode Character Database, from memory; checked against re in the same test.
@pytest.mark.parametrize(
    ("char", "members"),
    [
        ("k", "Kk\u212a"),
        ("s", "Ss\u017f"),
        ("i", "Ii\u0130\u0131"),
        ("\u0130", "Ii\u0130\u0131"),
        ("\u00b5", "\u00b5\u039c\u03bc"),
        ("\u03c3", "\u03a3\u03c2\u03c3"),
        ("\u00df", "\u00df\u1e9e"),
        ("\U00010400", "\U00010400\U00010428"),
        ("\u0345", "\u0345\u0399\u03b9\u1fbe"),
        ("\ud800", "\ud800"),
        ("1", "1"),
    ],
)
def test_well_known_orbits(char: str, members: str) -> None:
    assert orbit(ord(char)) == CharSet.of_chars(members)
    assert sorted(re.findall(char, all_characters(), re.IGNORECASE)) == sorted(members)
