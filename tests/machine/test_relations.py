"""Relations, combinations and texts of languages, against sets of short strings."""

from __future__ import annotations

import itertools
import random
import re
from dataclasses import replace

import pytest

from patlint.limits import DEFAULT_LIMITS, LimitReached
from patlint.machine import words
from patlint.machine.dfa import Dfa, canonical
from patlint.machine.relations import combine, complement, relation
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker, texts
from tests.machine.support import MODES, dfa_of

LIMITS = DEFAULT_LIMITS
# Bodies of small bounded languages over {a, b}: all that tells them apart is short.
WORLD = texts("ab", 6)


def pairs(seed: int, number: int) -> list[tuple[Dfa, Dfa]]:
    maker = Maker(seed, frozenset({"ahead"}))
    choose = random.Random(seed)
    made = [dfa_of(f"(?!.*[^ab])(?:{maker.pattern(3)})", choose.choice(MODES)) for _ in range(2 * number)]
    return list(zip(made[::2], made[1::2], strict=True))


def text_of(codes: tuple[int, ...] | None) -> str | None:
    return None if codes is None else "".join(map(chr, codes))


def test_relation_against_sets_of_strings() -> None:
    kinds = set()
    for a, b in pairs(80, 150):
        found = relation(a, b, LIMITS)
        kinds.add(found.word)
        in_a = {text for text in WORLD if a.accepts(text)}
        in_b = {text for text in WORLD if b.accepts(text)}
        for shown, here in (
            (found.only_a, in_a - in_b),
            (found.only_b, in_b - in_a),
            (found.both, in_a & in_b),
        ):
            text = text_of(shown)
            if text is None:
                assert not here
            elif here:
                assert len(text) <= min(map(len, here))
        for shown, want in (
            (found.only_a, (True, False)),
            (found.only_b, (False, True)),
            (found.both, (True, True)),
        ):
            text = text_of(shown)
            assert text is None or (a.accepts(text), b.accepts(text)) == want
        assert relation(b, a, LIMITS).word == {"within": "covers", "covers": "within"}.get(
            found.word, found.word
        )
        quick = relation(a, b, LIMITS, until_differs=True)
        assert (quick.only_a is None and quick.only_b is None) == (found.word == "equal")
        assert (found.word == "equal") == (canonical(a) == canonical(b))
    assert kinds == {"equal", "within", "covers", "disjoint", "overlaps"}


def test_combinations_against_boolean_operations() -> None:
    operations = (
        lambda a, b: a and b,
        lambda a, b: a or b,
        lambda a, b: a and not b,
        lambda a, b: a != b,
    )
    made = 0
    for a, b in pairs(81, 60):
        for keep in operations:
            both = combine(a, b, keep, LIMITS)
            for text in WORLD[:40]:
                assert both.accepts(text) == keep(a.accepts(text), b.accepts(text))
                made += 1
        assert all(complement(a).accepts(text) != a.accepts(text) for text in WORLD[:40])
        assert canonical(complement(complement(a))) == canonical(a)
    assert made == 60 * 4 * 40


def test_both_sides_of_the_limit_on_product() -> None:
    a, b = dfa_of("(?:aa)*"), dfa_of("(?:aaa)*")
    # Six pairs for the length of a run of a, and one for each side's refusal.
    needed = next(
        n for n in range(1, 50) if not limited(lambda n=n: combine(a, b, max, replace(LIMITS, product=n)))
    )
    assert needed == 7
    assert limited(lambda: combine(a, b, max, replace(LIMITS, product=needed - 1))) == ("product", needed - 1)
    assert relation(a, a, replace(LIMITS, product=3)).word == "equal"
    assert limited(lambda: relation(a, a, replace(LIMITS, product=2))) == ("product", 2)


def limited(call) -> tuple[str, int] | None:  # type: ignore[no-untyped-def]
    try:
        call()
    except LimitReached as reached:
        return reached.limit, reached.value
    return None


@pytest.mark.parametrize("mode", MODES)
def test_texts_of_a_language(mode: str) -> None:
    maker = Maker(82, frozenset({"ahead"}))
    full = 0
    for _ in range(60):
        pattern = f"(?=[ab]*\\Z)(?:{maker.pattern(3)})"
        right = compiled(pattern)
        assert right is not None
        dfa = dfa_of(pattern, mode)  # type: ignore[arg-type]
        inside = [text for text in WORLD if getattr(right, mode)(text)]
        if mode == "search":  # a search may begin anywhere, behind characters other than a and b too
            assert all(dfa.accepts(text) for text in inside)
        else:
            for size in range(7):
                assert words.count(dfa, size) == sum(len(text) == size for text in inside)
        first = text_of(words.shortest(dfa))
        assert words.is_empty(dfa) == (first is None)
        listed = [text_of(codes) for codes in itertools.islice(words.words(dfa), 30)]
        assert listed[:1] == [] if first is None else len(listed[0]) == len(first)
        assert list(map(len, listed)) == sorted(map(len, listed)) and len(set(listed)) == len(listed)
        sampled = [text_of(codes) for codes in words.sample(dfa, 5, 12)]
        assert len(sampled) == (0 if first is None else 12)
        assert sampled == [text_of(codes) for codes in words.sample(dfa, 5, 12)]
        for text in (*listed, *sampled, *([] if first is None else [first])):
            assert getattr(right, mode)(text), (pattern, text)
            full += 1
        total = words.total(dfa)
        if total is not None:
            assert total == sum(words.count(dfa, size) for size in range(len(dfa) + 1))
            assert len(list(itertools.islice(words.words(dfa), 5_000))) <= total
    assert full > 600


# Source: counting by hand.
@pytest.mark.parametrize(
    ("pattern", "total"),
    [
        ("[ab]{3}", 8),
        ("a?b?", 4),
        ("(?!)", 0),
        ("", 1),
        ("a*", None),
        (r"(?s).", 0x110000),
        ("[01]{0,4}", 31),
    ],
)
def test_totals(pattern: str, total: int | None) -> None:
    assert words.total(dfa_of(pattern)) == total


def test_texts_of_many_paths_come_at_once() -> None:
    """There are 2**90 texts of the least length or next to it, and as many ways to begin one that fails."""
    for pattern in ("(?:[ab]x?){90}", "(?:a|bc?){90}", "(?:a|b|cd){90}"):
        listed = ["".join(map(chr, codes)) for codes in itertools.islice(words.words(dfa_of(pattern)), 3)]
        assert len(set(listed)) == 3 and sorted(listed, key=len) == listed
        assert all(re.fullmatch(pattern, text) for text in listed) and len(listed[0]) == 90
