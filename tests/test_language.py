"""`Language`: laws of its operations, witnesses that hold on `re`, what a superset may say, and errors."""

from __future__ import annotations

import itertools

import pytest

from patlint.language import Language, Undecided, ambiguity, relate
from patlint.limits import LimitReached, Limits
from patlint.syntax.scanner import PatternError
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker, texts

WORLD = texts("ab\n", 4)
MODES = ("match", "fullmatch", "search")


def languages(
    seed: int, number: int, features: frozenset[str] = frozenset({"ahead"})
) -> list[tuple[str, Language]]:
    maker = Maker(seed, features)
    patterns = [maker.pattern(3) for _ in range(number)]
    return [(p, Language(p, 0, MODES[i % 3])) for i, p in enumerate(patterns)]  # type: ignore[arg-type]


def test_boolean_laws() -> None:
    made = 0
    for (_, a), (_, b), (_, c) in zip(languages(90, 40), languages(91, 40), languages(92, 40), strict=True):
        assert ~(a & b) == ~a | ~b
        assert ~(a | b) == ~a & ~b
        assert ~~a == a and hash(~~a) == hash(a)
        assert a - b == a & ~b
        assert a & (b | c) == (a & b) | (a & c)
        assert a | (a & b) == a == a & (a | b)
        assert (a - a).is_empty() and (a | ~a).is_universal()
        assert a.isdisjoint(~a) and a.isdisjoint(b) == (a & b).is_empty()
        made += 1
    assert made == 40


def test_inclusion_is_a_partial_order() -> None:
    some = [language for _, language in languages(93, 24)]
    holds = 0
    for a, b in itertools.product(some, repeat=2):
        assert (a <= b and b <= a) == (a == b)
        assert (a < b) == (a <= b and a != b)
        assert (a <= b) == (a - b).is_empty() == (a | b == b)
        holds += a <= b
    for a, b, c in itertools.product(some[:12], repeat=3):
        assert not (a <= b and b <= c) or a <= c
    assert all(a <= a for a in some) and 24 < holds < 24 * 24


def test_witnesses_hold_on_re() -> None:
    differ = equal = 0
    rows = languages(94, 60)
    for (first, a), (second, b) in zip(rows, rows[3:], strict=False):  # three apart: the same mode
        mode = MODES[rows.index((first, a)) % 3]
        one, other = compiled(first), compiled(second)
        witness = a.difference_witness(b)
        if witness is None:
            assert a == b
            assert all(bool(getattr(one, mode)(t)) == bool(getattr(other, mode)(t)) for t in WORLD)
            equal += 1
            continue
        assert a != b
        assert bool(getattr(one, mode)(witness)) != bool(getattr(other, mode)(witness)), (
            first,
            second,
            witness,
        )
        shorter = [text for text in WORLD if len(text) < len(witness)]
        assert all(bool(getattr(one, mode)(t)) == bool(getattr(other, mode)(t)) for t in shorter)
        found = a.relation(b)
        for text, wanted in ((found.only_first, (1, 0)), (found.only_second, (0, 1)), (found.both, (1, 1))):
            if text is not None:
                assert (bool(getattr(one, mode)(text)), bool(getattr(other, mode)(text))) == wanted
        differ += 1
    assert differ > 30 and equal > 2


def test_texts_hold_on_re() -> None:
    shown = 0
    for index, (pattern, language) in enumerate(languages(95, 45)):
        right = compiled(pattern)
        matches = getattr(right, MODES[index % 3])
        for text in [*language.words(8), *language.samples(5, seed=index)]:
            assert matches(text) and language.accepts(text)
            shown += 1
        if language.is_empty():
            assert (
                language.shortest() is None and not any(map(matches, WORLD)) and language.is_empty_for_sure()
            )
        else:
            shortest = language.shortest()
            assert shortest is not None and matches(shortest)
            assert not any(matches(text) for text in WORLD if len(text) < len(shortest))
        if language.is_universal():
            assert all(map(matches, WORLD))
    assert shown > 300


@pytest.mark.parametrize(
    ("pattern", "text"), [(r"b(a*)\1", "baa"), ("(a)?(?(1)b|c)", "ab"), (r"(?P<q>['\"]).*?(?P=q)", "''")]
)
def test_what_a_superset_may_say(pattern: str, text: str) -> None:
    """A superset proves that a text is not in the language, never that one is."""
    wide = Language(pattern)
    assert not wide.exact and wide.inexact[0].reason in ("back-reference", "conditional")
    start, end = wide.inexact[0].span
    assert pattern[start:end].startswith((r"\1", "(?"))
    assert wide.accepts("#") is False
    assert wide.is_universal() is False
    assert wide <= Language(r"(?s).*")
    assert wide.isdisjoint(Language("#")) and Language("#").isdisjoint(wide)
    inside = Language(text)
    for question in (
        lambda: wide.is_empty(),
        lambda: wide.shortest(),
        lambda: next(wide.words()),
        lambda: wide.samples(1),
        lambda: wide.count(1),
        lambda: wide.total(),
        lambda: wide == inside,
        lambda: inside == wide,
        lambda: inside <= wide,
        lambda: inside < wide,
        lambda: wide <= inside,
        lambda: wide == Language(pattern),
        lambda: wide != Language(pattern),
        lambda: wide in {inside},
        lambda: hash(wide),
        lambda: wide <= Language("#"),
        lambda: wide.isdisjoint(inside),
        lambda: inside.isdisjoint(wide),
        lambda: wide.relation(inside),
        lambda: inside.relation(wide),
        lambda: wide.difference_witness(inside),
        lambda: inside - wide,
        lambda: ~wide,
        lambda: wide.accepts(text),
    ):
        with pytest.raises(
            Undecided, match="^the automaton is only a superset: (back-reference|conditional)$"
        ):
            question()
    # What is combined with a superset is one itself; removing an exact language is allowed.
    for made in (wide & inside, wide | inside, wide - Language("#")):
        assert made.inexact == wide.inexact
    assert not wide.is_empty_for_sure()
    # A text of an exact language that is not even in the superset tells them apart.
    outside = Language("#")
    assert wide != outside and outside != wide and not outside <= wide and not outside < wide
    assert wide.difference_witness(outside) == outside.difference_witness(wide) == "#"
    assert Language("(?!)") <= wide and wide == wide


def test_a_superset_may_prove_that_nothing_matches() -> None:
    never = Language(r"(a)\1(?!)")
    assert not never.exact and never.is_empty() and never.is_empty_for_sure()
    assert never.shortest() is None
    assert never.isdisjoint(Language("a"))


def test_kinds_do_not_mix() -> None:
    text, octets = Language("a"), Language(b"a")
    assert (text == octets) is False and octets.accepts(b"a") and text.accepts("a")
    assert octets.shortest() == b"a" and isinstance(octets.samples(1)[0], bytes)
    for wrong in (
        lambda: text <= octets,
        lambda: text & octets,
        lambda: text | octets,
        lambda: text - octets,
        lambda: text.isdisjoint(octets),
        lambda: text.relation(octets),
        lambda: text.difference_witness(octets),
        lambda: relate("a", b"a"),
    ):
        with pytest.raises(TypeError, match="^languages of str and of bytes cannot be compared$"):
            wrong()
    for wrong in (lambda: text.accepts(b"a"), lambda: octets.accepts("a")):
        with pytest.raises(TypeError, match="^a bytes text needs a bytes pattern, a str text a str pattern$"):
            wrong()
    assert text != "a"


def test_errors() -> None:
    with pytest.raises(PatternError):
        Language("(")
    with pytest.raises(ValueError, match="^mode must be match, fullmatch or search, not 'findall'$"):
        Language("a", mode="findall")  # type: ignore[arg-type]
    with pytest.raises(LimitReached) as reached:
        Language("(?:a|b)*a(?:a|b){20}", limits=Limits(states=100))
    assert (reached.value.limit, reached.value.value) == ("states", 100)


def test_repr_and_states() -> None:
    assert repr(Language("a")) == "<Language: 3 states, exact>"
    assert repr(Language(r"(a)\1")).endswith("superset>")
    assert Language("").states == 2 and Language("(?s).*").states == 1


# Source: definitions.
@pytest.mark.parametrize(
    ("first", "second", "word"),
    [
        ("a|b", "[ab]", "equal"),
        ("a", "a|b", "within"),
        ("a+", "a", "covers"),
        ("a", "b", "disjoint"),
        ("a|b", "b|c", "overlaps"),
        (r"\d", "[0-9]", "covers"),
        ("(?!)", r"[^\s\S]", "equal"),
    ],
)
def test_relate(first: str, second: str, word: str) -> None:
    assert relate(first, second).word == word
    assert (relate(first, second).only_first is None) == (word in ("equal", "within"))
    assert relate(first.encode(), second.encode()).word == ("equal" if first == r"\d" else word)


def test_modes_are_nested() -> None:
    """What fullmatch takes match takes, what match takes search takes."""
    maker = Maker(96, frozenset({"ahead"}))
    for _ in range(40):
        pattern = maker.pattern(3)
        match, full, search = (Language(pattern, mode=mode) for mode in MODES)  # type: ignore[arg-type]
        # With `$`, fullmatch needs the end itself, so the three are nested all the same.
        assert full <= match <= search


def test_ambiguity_heeds_flags_and_mode() -> None:
    assert ambiguity("(a+)+$", mode="match").growth == "exponential"
    assert ambiguity("a*$").growth == 2
    assert ambiguity("a*$", mode="match").growth is None
    assert ambiguity("a.*y").growth == ambiguity("a.*y", 16).growth == 2
    assert ambiguity(b"(a+)+$", mode="match").slow.pump == b"a"  # type: ignore[union-attr]
    assert ambiguity("(?:a|A)*!", mode="match").growth is None
    assert ambiguity("(?:(?i:a)|A)*!", mode="match").growth == "exponential"
