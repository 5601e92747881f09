r"""Both ambiguity rules: advisories, published examples, and what a finding says."""

from __future__ import annotations

import itertools
import math
import random
import re
import sys

import pytest

from patlint.limits import DEFAULT_LIMITS
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Growth, ambiguity_of
from patlint.machine.walks import walks
from patlint.rules import check_site
from patlint.rules.finding import Finding
from patlint.source.sites import Piece, Site, Use
from patlint.syntax.parser import parse
from tests.bench.misses import campaign, random_patterns
from tests.corpus.advisories import ADVISORIES
from tests.rules.support import HERE, findings, site

GROWTH_RULES = frozenset({"exponential-ambiguity", "polynomial-ambiguity"})
NEW = (3, 12)


def growth(pattern: str, manner: str) -> Growth | None:
    found = ambiguity_of(compile_tree(parse(pattern, 0, NEW)), manner, DEFAULT_LIMITS)  # type: ignore[arg-type]
    assert found.growth is not None or found.undecided is None, pattern
    return found.growth


def number(found: Growth | None) -> float:
    return math.inf if found == "exponential" else 1 if found is None else float(found)


@pytest.mark.parametrize(
    ("advisory", "package", "pattern", "manner", "least", "repaired", "left"), ADVISORIES
)
def test_advisories(
    advisory: str, package: str, pattern: str, manner: str, least: int, repaired: str, left: int
) -> None:
    assert number(growth(pattern, manner)) >= (least or math.inf)
    assert number(growth(repaired, manner)) <= left


def test_there_are_enough_advisories() -> None:
    assert len({row[0] for row in ADVISORIES}) >= 20


# Worked examples of the literature, all from memory: the expression, with an end that fails, under match; what
# the steps of a backtracker then are: one power above the degree of ambiguity, since each path is walked.
PUBLISHED: tuple[tuple[str, Growth | None, str], ...] = (
    ("(?:a|ab)(?:c|bcd)!", None, "Book, Even, Greibach, Ott 1971: ambiguous, but finitely"),
    ("a*a*!", 2, "Weber, Seidl 1991: IDA, degree 1"),
    ("a*a*a*!", 3, "Weber, Seidl 1991: a chain of two, degree 2"),
    ("a*a*a*a*!", 4, "Weber, Seidl 1991: a chain of three, degree 3"),
    ("[ab]*a[ab]*!", 2, "Weber, Seidl 1991: as many paths as there are a"),
    ("[ab]*a[ab]*b[ab]*!", 3, "Weber, Seidl 1991: pairs of an a and a later b"),
    ("(?:a|a)*!", "exponential", "Allauzen, Mohri, Rastogi 2008: EDA, two loops at one state"),
    ("(?:a*)*!", "exponential", "Allauzen, Mohri, Rastogi 2008: EDA"),
    ("(?:aa|aaa)*!", "exponential", "Weber, Seidl 1991: EDA, cycles of two lengths"),
    ("(?:a|ab|ba)*!", "exponential", "Sardinas, Patterson 1953: aba is read in two ways, no code"),
    ("(?:a|ab|bb)*!", None, "Sardinas, Patterson 1953: a code, though ambiguous until the end is seen"),
    ("[ab]*a[ab][ab]!", None, "Hopcroft, Motwani, Ullman, 2.3.6: nondeterministic, unambiguous"),
    ("(?:a|b|ab)*c", "exponential", "Kirrage, Rathnayake, Thielecke 2013"),
    ("(?:(?:ab)*|a|b)*!", "exponential", "Brueggemann-Klein 1993: star of a nullable expression"),
)


@pytest.mark.parametrize(("pattern", "wanted", "source"), PUBLISHED)
def test_published_examples(pattern: str, wanted: Growth | None, source: str) -> None:
    assert growth(pattern, "match") == wanted


def paths(pattern: str, size: int) -> int:
    """Paths of the graph over `size` times a that reach the literal `!` behind the pattern."""
    nfa = Nfa(compile_tree(parse(pattern + "!")), DEFAULT_LIMITS)
    graph = walks(nfa, False)
    letter = 1 << nfa.alphabet.classify(ord("a"))
    counts = dict.fromkeys(graph.entry, 1)
    for _ in range(size):
        after: dict[int, int] = {}
        for node, count in counts.items():
            for edge in graph.edges[node]:
                if edge.mask & letter:
                    after[edge.target] = after.get(edge.target, 0) + count * edge.ways
        counts = after
    end = 1 << nfa.alphabet.classify(ord("!"))
    return sum(count for node, count in counts.items() if nfa.reads[graph.positions[node]] & end)


def fibonacci(n: int) -> int:
    a, b = 0, 1
    for _ in range(n):
        a, b = b, a + b
    return a


@pytest.mark.parametrize("size", [1, 2, 5, 9, 14])
def test_path_counts(size: int) -> None:
    """Source: stars and bars; compositions into 1 and 2; the product rule; a deterministic program."""
    for k in (1, 2, 3, 4):
        assert paths("a*" * k, size) == math.comb(size + k - 1, k - 1)
    assert paths("(?:a|aa)*", size) == fibonacci(size + 1)
    assert paths("(?:a|(a))*", size) == 2**size
    assert paths("(?:a(?:x?)?)*", size) == 2**size
    assert paths("(?:ab|a)*", size) == paths("[a-c]*", size) == 1


def one(pattern: str, function: str = "match", looks_at: str = "truth") -> Finding:
    made = site(pattern, function, looks_at)  # type: ignore[arg-type]
    found = [f for f in check_site(made, NEW, DEFAULT_LIMITS, GROWTH_RULES).findings]
    assert len(found) == 1, found
    return found[0]


def test_what_a_finding_says() -> None:
    found = one("(?:[a-z]+-?)+$")
    assert (found.rule, found.level, found.brief) == ("exponential-ambiguity", "error", False)
    assert found.evidence.startswith("'a' can be taken in more than one way; already a text of ")
    assert found.suggestion is not None and found.suggestion.pattern == "(?:[a-z]-?)+$"
    assert found.suggestion.keeps == "groups"
    assert found.way_out == "growth is exponential as it stands, linear with the pattern above"

    found = one(".*x?.*=")
    assert (
        found.message == "matching time can grow with the square of the text's length"
        and found.level == "note"
    )
    assert found.evidence.startswith("both can take 'a'; a text of 10,000 characters takes about ")
    assert found.suggestion is not None and found.suggestion.pattern == ".*="
    assert found.way_out == "growth is quadratic as it stands, linear with the pattern above"

    found = one(r"(.*)=(.*);", "search", "groups")
    assert ", and the search begins afresh at every place; " in found.evidence
    assert found.suggestion is None

    found = one(r"(.*)=(.*);", "match", "groups")
    assert found.suggestion is None and found.evidence.startswith("both can take '")
    assert found.way_out == (
        "let the first of them stop at '=', if it is not to run across it: take it out of its characters; or bound "
        "the length of the text"
    )

    found = one(r"(\w+)(\d+[a-z]*);", "match", "groups")
    assert found.suggestion is None and found.way_out.startswith("let the repeats take different characters")

    assert one(r"\d*,?\d*,?\d*;", "search").level == "warning"


def test_a_bound_is_told() -> None:
    found = one("(a{1,30}){1,30}$")
    assert found.rule == "exponential-ambiguity" and found.message.endswith(
        ", up to a bound that is out of reach"
    )
    found = one("(?:|){40}b")
    assert found.rule == "polynomial-ambiguity" and found.level == "warning"
    assert found.message == "matching time can be endless on any text"
    assert "a text of one character takes about 2 million million steps" in found.evidence


def test_restart_alone_is_one_line() -> None:
    found = one(r"\s+$", "search")
    assert found.brief and found.level == "note" and found.evidence == ""


def test_small_figures_are_a_note() -> None:
    """A cube of which 10,000 characters are nothing, because much has to be written for each turn of it."""
    longer = one("<letterhead[^;]*name=([^;]*)name=[^;]*;", "search", "groups")
    assert longer.message == "matching time can grow with the 4th power of the text's length"
    small = one("<letterhead of the terminal[^;]*name of the ship=[^;]*;", "search", "groups")
    assert small.message == "matching time can grow with the cube of the text's length"
    assert (longer.level, longer.brief, small.level, small.brief) == ("warning", False, "note", True)


def test_a_square_with_a_way_out_is_told_at_length() -> None:
    assert not one(".*x?.*=").brief
    assert one(r"(\w+)(\d+[a-z]*);", "match", "groups").brief


def test_a_bounded_input_makes_a_note() -> None:
    use = Use("match", "truth", HERE, bounded=20)
    made = Site("made.py", "(a+)+$", 0, "match", HERE, 1, (Piece(0, HERE, True),), (use,), True)
    assert [f.level for f in findings(made) if f.rule in GROWTH_RULES] == ["note"]


@pytest.mark.skipif(sys.version_info < (3, 11), reason="re has no possessive repeats")
def test_a_suggestion_does_the_same_on_re() -> None:
    """All texts up to six characters, the spans where the program looks at them."""
    compared = 0
    texts = ["".join(row) for size in range(7) for row in itertools.product("ab-", repeat=size)]
    for pattern in (
        "(?:a+-?)+$",
        "(a+)+b",
        "(?:[ab]+)*-",
        r"(?:\w+b*)+",
        "(?:a|ab)*-",
        "a*a*b",
        "(?:a+b?)*-",
        "a*-?a*-?a*b",
    ):
        for function, looks_at in itertools.product(("match", "fullmatch", "search"), ("truth", "span")):
            made = site(pattern, function, looks_at)  # type: ignore[arg-type]
            for found in check_site(made, sys.version_info[:2], DEFAULT_LIMITS, GROWTH_RULES).findings:
                if found.suggestion is None:
                    continue
                old, new = (getattr(re.compile(p), function) for p in (pattern, found.suggestion.pattern))
                for text in texts:
                    a, b = old(text), new(text)
                    assert (a is None) == (b is None), (pattern, found.suggestion, text)
                    if looks_at == "span" and a is not None:
                        assert a.span() == b.span(), (pattern, found.suggestion, text)
                    compared += 1
    assert compared > 10_000


def test_no_growth_is_missed() -> None:
    """The short form of `python -m tests.bench.misses`."""
    chance = random.Random(9)
    patterns = ((text, flags, None) for text, flags in random_patterns(chance))
    tried = campaign(patterns, 2_500, chance)
    assert tried.pairs >= 2_500 and tried.patterns > 50
    assert not tried.misses


def test_a_suspicion_that_is_left_open_is_told() -> None:
    """The possessive group is walked as if it gave back, and no text confirms that: not told as plainly linear."""
    found = one(r"(\w*)(\d*);", looks_at="groups")
    assert found.suggestion is not None and found.suggestion.pattern == r"(\w*+)(\d*);"
    assert (
        found.way_out
        == "growth is quadratic as it stands, linear with the pattern above, as far as texts confirm it"
    )
