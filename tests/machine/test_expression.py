"""Automaton to expression: laws on random automata, worked examples, limits."""

from __future__ import annotations

import itertools
import random
import re

import pytest

from patlint.language import Language
from patlint.machine import expr as a
from patlint.machine.algebra import Algebra, reverse
from patlint.machine.alphabet import minterms
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.expression import MOST_STATES, complexity, expression, in_order, rank
from patlint.syntax.charset import ALL_CODES, CharSet
from patlint.syntax.render import render_set


def plain_algebra(**options: bool) -> Algebra:
    return Algebra(lambda chars: render_set(chars, 0, False), **options)


def short(pattern: str, **options: bool) -> str | None:
    made = plain_algebra(**options)
    found = expression(Language(pattern).dfa, made)
    return None if found is None else made.text(found)


def automaton(letters: str, table: list[list[int]], ends: set[int]) -> Dfa:
    """A complete automaton over `letters`; other characters lead to a dead state."""
    alphabet, masks = minterms(tuple(CharSet.of_chars(letter) for letter in letters), ALL_CODES)
    dead = len(table)
    rows = []
    for state in range(dead + 1):
        row = [dead] * len(alphabet)
        for mask, target in zip(masks, table[state] if state < dead else [dead] * len(letters), strict=True):
            row[mask.bit_length() - 1] = target
        rows.append(tuple(row))
    return minimal(alphabet, rows, [state in ends for state in range(dead + 1)])


# Worked examples of state elimination: table over the letters, accepting states, the expression in the
# source.
WORKED = [
    # Sipser, Introduction to the Theory of Computation, 2nd ed., example 1.66 (from memory)
    ("ab", [[0, 1], [1, 1]], {1}, "a*b(?:a|b)*"),
    # Sipser, example 1.68 (from memory)
    (
        "ab",
        [[1, 2], [0, 1], [1, 0]],
        {1, 2},
        "(?:a(?:aa|b)*ab|b)(?:(?:ba|a)(?:aa|b)*ab|bb)*(?:(?:ba|a)(?:aa|b)*|)|a(?:aa|b)*",
    ),
    # Hopcroft, Motwani, Ullman, 3rd ed., example 3.5: texts over {0, 1} with a 0 (from memory)
    ("01", [[1, 0], [1, 1]], {1}, "1*0(?:0|1)*"),
    # Binary numerals divisible by 3 (standard exercise, no source)
    ("01", [[0, 1], [2, 0], [1, 2]], {0}, "(?:0|1(?:01*0)*1)*"),
    # Aho, Lam, Sethi, Ullman, Compilers, 2nd ed., section 3.9: the minimal automaton of (a|b)*abb
    ("ab", [[1, 0], [1, 2], [1, 3], [1, 0]], {3}, "(?:a|b)*abb"),
    # An even number of a (OEIS A011782, counted in tests of words)
    ("ab", [[1, 0], [0, 1]], {0}, "(?:b*ab*a)*b*"),
]


@pytest.mark.parametrize(("letters", "table", "ends", "source"), WORKED)
def test_worked_examples(letters: str, table: list[list[int]], ends: set[int], source: str) -> None:
    dfa = automaton(letters, table, ends)
    assert Language(source) == Language.of_automaton(dfa, False, Language("").limits)
    made = plain_algebra()
    found = expression(dfa, made)
    assert found is not None
    text = made.text(found)
    assert Language(text) == Language(source)
    assert len(text) <= len(source)


def test_example_3_6_with_its_published_length() -> None:
    # Hopcroft, Motwani, Ullman, 3rd ed., example 3.6: a 1 two or three places from the end (from memory).
    source = "(?:0|1)*1(?:0|1)|(?:0|1)*1(?:0|1)(?:0|1)"
    text = short(source)
    assert text == "[01]*1[01]{1,2}" or (text is not None and len(text) <= len("[01]*1[01][01]?"))
    assert Language(text) == Language(source)


def test_random_automata_keep_their_language() -> None:
    generator = random.Random(20)
    texts = ["".join(letters) for n in range(6) for letters in itertools.product("abc", repeat=n)]
    done = nested = 0
    for _ in range(150):
        size = generator.randint(1, 6)
        table = [[generator.randrange(size + 1) for _ in "abc"] for _ in range(size)]
        ends = {state for state in range(size) if generator.random() < 0.4}
        dfa = automaton("abc", table, ends)
        for ordered in (False, True):
            made = plain_algebra(ordered=ordered)
            found = expression(dfa, made)
            if found is None:
                continue
            compiled = re.compile(made.text(found))
            for text in texts:
                assert (compiled.fullmatch(text) is not None) == dfa.accepts(text), made.text(found)
            done += 1
            nested += complexity(found)[0] > 1
    assert done > 250
    assert nested > 50


def test_bytes_and_wide_sets() -> None:
    for pattern in (rb"\w+=|[^\x00-\x7f]", rb"(?s:.)*\x00"):
        language = Language(pattern)
        made = Algebra(lambda chars: render_set(chars, 0, True))
        found = expression(language.dfa, made)
        assert found is not None
        assert Language(made.text(found).encode("latin-1")) == language
    wide = r"\w+(?:-\w+)*|\S"
    assert Language(short(wide) or "") == Language(wide)


def test_nothing_and_the_empty_text() -> None:
    assert short("(?!)") == "(?!)"
    assert short("") == ""
    assert short("|a") == "a?"


SHORT = [
    ("0[0-9]|1[0-9]|2[0-3]", "[01][0-9]|2[0-3]"),
    ("L1|L2|L3|R1|R2|R3", "[LR][1-3]"),
    ("(?:[a-z]+ ?)+", "(?:[a-z] ?)+"),
    ("https?|http", "https?"),
    ("(?:a|b)*a(?:a|b)*|b*", "[ab]*"),
    ("(?:ab)*a|(?:ab)*", None),
    ("x{3,5}", "x{3,5}"),
]


@pytest.mark.parametrize(("pattern", "expected"), SHORT)
def test_short_results(pattern: str, expected: str | None) -> None:
    text = short(pattern)
    assert text is not None
    assert Language(text) == Language(pattern)
    if expected is not None:
        assert text == expected
    assert len(text) <= len(pattern)


def test_limits() -> None:
    many = "[ab]*a[ab]{5}"  # 64 states
    assert len(Language(many).dfa) > MOST_STATES
    assert expression(Language(many).dfa, plain_algebra()) is None
    few = "[ab]{38}"  # 39 useful states
    assert short(few) == "[ab]{38}"
    longest = len(short("25[0-5]|1[0-9]") or "")
    dfa = Language("25[0-5]|1[0-9]").dfa
    assert expression(dfa, plain_algebra(), longest) is not None
    assert expression(dfa, plain_algebra(), longest - 1) is None


def chars(letters: str) -> a.Expr:
    return a.Chars(CharSet.of_chars(letters))


def test_laws() -> None:
    x, y, z = chars("x"), chars("y"), chars("z")
    made = plain_algebra()
    ordered = plain_algebra(ordered=True)
    counted = 0
    for algebra, built, text in (
        (made, made.choice((x, x)), "x"),
        (made, made.chain((x, made.star(x))), "x+"),
        (made, made.chain((made.star(x), made.star(x))), "x*"),
        (made, made.choice((x, a.EMPTY)), "x?"),
        (ordered, ordered.choice((a.EMPTY, x)), "x??"),
        (made, made.choice((a.EMPTY, x)), "x?"),
        (made, made.optional(made.times(x, 1, None)), "x*"),
        (made, made.star(made.star(x)), "x*"),
        (made, made.star(made.choice((made.star(x), y))), "[xy]*"),
        (made, made.star(made.chain((made.star(x), made.star(y)))), "[xy]*"),
        (made, made.chain((x, made.optional(x), made.optional(x))), "x{1,3}"),
        (made, made.times(made.optional(x), 3, 3), "x{0,3}"),
        (made, made.times(made.times(x, 2, 2), 0, None), "(?:xx)*"),
        (made, made.times(made.times(x, 2, 3), 2, 2), "x{4,6}"),
        (made, made.choice((x, made.chain((x, y)))), "xy?"),
        (ordered, ordered.choice((x, ordered.chain((x, y)))), "xy??"),
        (made, made.choice((made.chain((x, z)), made.chain((y, z)))), "[xy]z"),
        (made, made.choice((x, made.chain((y, z)), z)), "[xz]|yz"),
        (ordered, ordered.choice((x, ordered.chain((y, z)), z)), "x|yz|z"),
        (made, made.chain((x, made.star(made.chain((y, x))), y)), "(?:xy)+"),
        (made, made.chain((x, y, made.star(made.chain((x, y))))), "(?:xy)+"),
        (made, made.chain((made.star(made.chain((x, y))), x, y)), "(?:xy)+"),
        (made, made.chain((x, a.NOTHING)), "(?!)"),
        (made, made.star(a.NOTHING), ""),
        (made, made.chain([x] * 7), "x{7}"),
        (made, made.chain([x] * 3), "xxx"),
        (made, made.counted(made.chain((*[chars("xyz"), y] * 3, chars("xyz")))), "(?:[x-z]y){3}[x-z]"),
    ):
        assert algebra.text(built) == text
        counted += 1
    assert counted == 27


def test_order_of_branches_and_rank() -> None:
    x, y = chars("x"), chars("y")
    made = plain_algebra()
    both = a.Choice((a.Chain((y, y)), a.Chain((x, y))))
    leaves = [CharSet.of_chars("x"), CharSet.of_chars("y")]
    assert made.text(in_order(both, leaves)) == "xy|yy"
    assert rank(x, made) < rank(both, made)
    assert reverse(a.Chain((x, y, made.star(x))), made) == made.chain((made.star(x), y, x))
