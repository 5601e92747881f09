"""`agreement`: every yes holds on all short texts, every no on its own text, and what stays undecided."""

from __future__ import annotations

import random
import re
from collections import Counter

import pytest

from patlint import agreement
from patlint.limits import DEFAULT_LIMITS, Limits
from patlint.machine.agreement import _context_pairs
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.pairs import Answer
from patlint.syntax.parser import parse
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker, texts

WORLD = texts("ab\n", 5)


def found(pattern: re.Pattern[str], kind: str, text: str) -> object:
    if kind == "spans":
        match = pattern.match(text)
        return match and match.span()
    if kind == "scans":
        first = pattern.search(text)
        return (
            first and first.span(),
            [each.span() for each in pattern.finditer(text)],
            pattern.sub("-", text),
        )
    return pattern.fullmatch(text) is not None


def variants(pattern: str) -> list[str]:
    """Patterns near to `pattern`, many of which agree with it in one thing and not in another."""
    return [
        f"(?:{pattern})|",
        f"|(?:{pattern})",
        f"(?:{pattern})|(?:{pattern})a?",
        f"(?:{pattern})(?:)",
        f"(?<=a)(?:{pattern})|(?:{pattern})",
        f"(?:{pattern})?",
        f"(?:{pattern})??",
        rf"(?:{pattern})\b|(?:{pattern})",
        f"(?!b)(?:{pattern})|(?:{pattern})",
    ]


def test_against_re() -> None:
    maker = Maker(95, frozenset({"ahead", "behind"}))
    choose = random.Random(95)
    counted: Counter[tuple[str, bool | None]] = Counter()
    for _ in range(110):
        first = maker.pattern(2)
        second = choose.choice(variants(first))
        one, other = compiled(first), compiled(second)
        both = agreement(first, second)
        for kind in ("language", "spans", "scans"):
            answer: Answer = getattr(both, kind)
            counted[kind, answer.holds] += 1
            if answer.holds:
                for text in WORLD:
                    assert found(one, kind, text) == found(other, kind, text), (first, second, kind, text)
            elif answer.holds is False:
                text = str(answer.text)
                assert found(one, kind, text) != found(other, kind, text), (first, second, kind, text)
            else:
                assert answer.reason and answer.text is None
        # What scans agree on, a match from the beginning agrees on.
        assert not (both.scans.holds and both.spans.holds is False)
    assert all(
        counted[kind, holds] >= 20 for kind in ("language", "spans", "scans") for holds in (True, False)
    )
    assert counted["scans", None] <= 10


# The first three are CONSTRUCTS.md's pairs, found by experiment.
@pytest.mark.parametrize(
    ("first", "second", "spans", "scans"),
    [
        ("(?:)", "(?:|a)", True, False),
        ("(?:$)", "(?:^)$", True, False),
        ("(?:|a)*", "(?:|a)+", True, True),
        ("ab|a", "ab?", True, True),
        ("a|ab", "ab?", False, False),
        (r"\bpx\b|\bpt\b", r"\bp[xt]\b", True, True),
        ("a(?<=xa)|a", "a", True, True),
        ("(?<=x)a|b", "b", True, False),
    ],
)
def test_pairs_known(first: str, second: str, spans: bool, scans: bool) -> None:
    both = agreement(first, second)
    assert (both.spans.holds, both.scans.holds) == (spans, scans)


def test_a_difference_that_never_shows_is_undecided() -> None:
    """Behind `a` the second cannot match, but the engine never begins there: it has read that `a` and more."""
    both = agreement("a(?:.*)|b", "a(?:.*)|(?<!a)b")
    assert both.language.holds and both.spans.holds and both.scans.holds is not True
    assert both.scans.holds is False or both.scans.reason


def test_supersets() -> None:
    undecided = Answer(None, None, "only a superset is known: back-reference")
    both = agreement(r"(a|b)\1", "aa|bb")
    assert (both.language, both.spans, both.scans) == (undecided,) * 3
    never = agreement(r"(a)\1(?!)", "b(?!)")
    assert never.language.holds and never.spans.holds and never.scans.holds
    differs = agreement(r"(a)\1", "b")
    assert differs.language == Answer(False, "b")
    assert differs.spans.holds is False and differs.scans.holds is False
    same = agreement(r"(a)\1", r"(a)\1")
    assert same.language.holds and same.spans.holds and same.scans.holds
    local = agreement(rb"(?L)\w", rb"(?L)[a-z]")
    assert local.language.holds is None and local.language.reason == "only a superset is known: locale"


def test_bytes_and_kinds() -> None:
    assert agreement(b"a|ab", b"ab?").spans == Answer(False, b"ab")
    with pytest.raises(TypeError, match="^languages of str and of bytes cannot be compared$"):
        agreement("a", b"a")


def test_limits() -> None:
    slow = "(?:a|b)*a(?:a|b){6}"
    both = agreement(slow, slow + "(?:)", limits=Limits(states=20))
    for answer in (both.language, both.spans, both.scans):
        assert answer == Answer(None, None, "limit states reached (20)")
    tiny = agreement(slow, slow + "(?:)", limits=Limits(instructions=3))
    assert tiny.scans == Answer(None, None, "limit instructions reached (3)")


def test_both_sides_of_contexts() -> None:
    """The worked number of `patlint.limits`."""
    a, b = r"\b|^x", "(?<=a)b"
    nfas = [Nfa(compile_tree(parse(pattern)), DEFAULT_LIMITS) for pattern in (a, b)]
    assert len(_context_pairs(*nfas, DEFAULT_LIMITS)) == 4
    reached = Answer(None, None, "limit contexts reached (3)")
    assert agreement(r"\bx|y", r"\bx|(?<=a)y|y", limits=Limits(contexts=4)).scans.holds
    assert agreement(r"\bx|y", r"\bx|(?<=a)y|y", limits=Limits(contexts=3)).scans == reached
