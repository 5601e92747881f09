"""The decision about growth, on every row of `corpus.cost`, and what a claim must bring with it."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import pytest

from patlint.limits import DEFAULT_LIMITS
from patlint.machine.counting import Counter
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import REFERENCES, Ambiguity, Growth, ambiguity_of
from patlint.machine.walks import walks
from patlint.syntax.parser import parse
from tests.corpus.cost import ROWS, Base
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker
from tests.machine.support import matcher_of

MANNERS = ("match", "fullmatch", "search", "scan")

# The rows of `corpus.cost` name one text each; on another text these patterns are worse.
WORSE_ELSEWHERE: dict[tuple[str, str], tuple[Growth, str]] = {
    ("(?:a|aa)*.*", "fullmatch"): ("exponential", "a^n and a line feed, which the dot does not take"),
    ("(?:a*+b?)*c", "match"): (
        "exponential",
        "(ab)^n: b is read by the iteration of its a or by one of its own",
    ),
    ("(?:a*+b?)*c", "search"): ("exponential", "(ab)^n, as under match"),
    ("(?:a(?=a*b)|a)*c", "match"): ("exponential", "a^n b: both branches can take each a"),
    ("(?:a(?:x?){2})*b", "match"): ("exponential", "(ax)^n: x is read by the first or by the second x?"),
}

# Rows that are not decided as they should be: (pattern, manner) with what is found. Must only shrink.
KNOWN_MISSES: dict[tuple[str, str], Growth | None] = {}


def decide(pattern: str, manner: str, **limits: int) -> Ambiguity:
    return ambiguity_of(
        compile_tree(parse(pattern, target=(3, 13))), manner, replace(DEFAULT_LIMITS, **limits)
    )  # type: ignore[arg-type]


def expected() -> dict[tuple[str, str], Growth | None]:
    worst: dict[tuple[str, str], float] = {}
    for row in ROWS:
        if compiled(row.pattern) is not None:
            growth = math.inf if isinstance(row.growth, Base) else row.growth
            key = row.pattern, row.manner
            worst[key] = max(worst.get(key, 0), growth)
    out: dict[tuple[str, str], Growth | None] = {
        key: None if growth < 2 else "exponential" if growth == math.inf else int(growth)
        for key, growth in worst.items()
    }
    return out | {key: growth for key, (growth, _) in WORSE_ELSEWHERE.items()}


def test_the_decision_on_every_row() -> None:
    wanted = expected()
    assert len(wanted) > 200
    wrong = {}
    for (pattern, manner), growth in wanted.items():
        found = decide(pattern, manner)
        assert found.growth is not None or found.undecided is None, (pattern, manner)
        if found.growth != growth:
            wrong[pattern, manner] = found.growth
    assert wrong == KNOWN_MISSES


def test_a_claim_brings_a_text_whose_steps_can_be_counted_again() -> None:
    maker = Maker(31, frozenset({"ahead", "behind", "backs"}))
    choose = random.Random(32)
    claims = 0
    for _ in range(150):
        pattern = f"(?:{maker.pattern(3)}|{maker.pattern(2)})*!"
        if compiled(pattern) is None:
            continue
        manner = choose.choice(MANNERS)
        found = decide(pattern, manner)
        if found.slow is None:
            assert found.growth is None
            continue
        slow, ours = found.slow, matcher_of(pattern)
        claims += 1
        assert slow.growth == found.growth and slow.growth != 1
        assert all(0 <= start <= end <= len(pattern) for start, end in slow.parts)
        assert not slow.by_restart or manner in ("search", "scan")
        walkable = [pair for pair in slow.steps if pair[1] < 300_000]
        assert len(walkable) > 1
        for n, steps in walkable[-2:]:
            text = slow.text(n)
            assert text == slow.prefix + slow.pump * n + slow.suffix  # type: ignore[operator]
            counted = ours.scan(text)[1] if manner == "scan" else ours.run(text, manner).steps
            assert counted == steps
        (n, few), (m, many) = slow.steps[(len(slow.steps) - 1) // 2], slow.steps[-1]
        assert many / few > (1.05 ** (m - n) if slow.growth == "exponential" else (m / n) ** 1.3)
    assert claims > 55


# Patterns that a maintainer writes on purpose and that are linear: nothing may be said.
# Source: common practice, no source.
FINE = (
    (r"[a-z]+(?:-[a-z]+)*", "fullmatch"),
    (r"\d+(?:\.\d+)?", "fullmatch"),
    (r"[A-Z]{2}\d{6}", "search"),
    (r"^\s+", "search"),
    (r"\b\w+\b", "scan"),
    (r"(?:[^\"\\]|\\.)*", "fullmatch"),
    (r"(\d{4})-(\d\d)-(\d\d)", "search"),
    (r"[^,]+", "scan"),
)


@pytest.mark.parametrize(("pattern", "manner"), FINE)
def test_ordinary_patterns_are_let_alone(pattern: str, manner: str) -> None:
    assert decide(pattern, manner).growth is None


# Found by `python -m tests.bench.misses` and by replaying on `re`, and mended: what was said before stands behind.
MENDED: tuple[tuple[str, str, Growth | None], ...] = (
    (r"(?:(?:(b)(?:[ab]){2,})|(?:[^\W]))*b", "search", 2),  # None: only one pump of a link was tried
    (r"(?:(?:(?:bb|(?:b){2,}))|(?:(?:(?:^)?|a\w)))*b", "scan", 2),  # None: the same
    (r"\{[a-z]+\} *[^\n]*(?:\n|$)(?:\:[a-z]+\: *[^\n]*\n+)*", "match", 2),  # None: two repeats in one loop
    (r"\{if\s+.*?\}.*?\{/if\}", "search", 3),  # 2: no pump for a whole chain
    (
        r"^<A HREF=\"(?!lua|LUA)([^:]+)\">\1</A>",
        "match",
        None,
    ),  # 2: a back-reference stops where texts differ
    (
        r"(?:(?:(?:(?:.|b))+)|(?:(?m:$)$))*b",
        "match",
        "exponential",
    ),  # None: its pump was one of another suspicion
    (r"(?!-)[a-z\d\*-]{1,63}(?<!-)", "match", None),  # fitted as 2 where the bound was near
    (r"(?:(?:(?:\n)*+)|(?:(?s:.)))*b", "scan", "exponential"),  # 2: enough was seen before all had been tried
    (r"(?:(?:(?:(?:a|[^\W])){2}+))*(?:((?:b)+?))!", "scan", 3),  # 2: the turns had gone on suffixes by guess
    (
        r"(?:a(?=a*b)|a)*c",
        "match",
        "exponential",
    ),  # 2: ways to one thread under other obligations are two ways
    (r"(?=a)a*\b(a+)?", "scan", 2),  # None: only the attempt at the text's start was looked at
    (r"(?:ab)*^(?:a|b)*b?\s*", "scan", 2),  # None: the same
    (r"^[-0-9]+|-+$", "scan", 2),  # None: the same, in real code
    (
        r"(?:(?:(?:(?:[ab])++)?+)*+|(?>(?s:.)[A-b]))*b",
        "search",
        "exponential",
    ),  # 3: pumps that the cuts spoil
    (r"(?:(?:(?<=\w\b))|(?:(?:[^a]|[^\W])(?:[ab])+?))*b", "search", "exponential"),  # 2: its pump had a b
    (r"(?s)\bb(a+)?.*?a*?$", "fullmatch", 2),  # None: the last way of a lazy repeat need not fail
    (r"(?:(?:(?:[ab]b){2,})|(?:(?>(?:b|\n)))|)*b", "match", "exponential"),  # None: its pumps all had bb
    (r"(?:((?:(?:\b|(?s:.))|(?:b){2,3}))\1)*(?=\n)b", "fullmatch", "exponential"),  # None: b was not tried
    (
        r"(?:(?:(?:(?:\b){2}|(b))){2}+(?:(?:|a)|()))*!",
        "match",
        "exponential",
    ),  # None: equal empty ways in a cut
)


@pytest.mark.parametrize(("pattern", "manner", "growth"), MENDED)
def test_mended(pattern: str, manner: str, growth: Growth | None) -> None:
    assert decide(pattern, manner).growth == growth


# What is still told as less than it is: found by the same search, with what is said and what the engine does on which
# text. Must only shrink.
OPEN: tuple[tuple[str, str, Growth, Growth, tuple[str, str, str, str]], ...] = (
    (  # two repeats of one loop compete before a line feed and again behind it
        r"(?:(?:(?s:.)*(?m:^))(?:$|.)*?)*[^a]",
        "match",
        2,
        3,
        ("a", "\n", "a", ""),
    ),
)


@pytest.mark.parametrize(("pattern", "manner", "said", "done", "pieces"), OPEN)
def test_still_open(
    pattern: str, manner: str, said: Growth, done: Growth, pieces: tuple[str, str, str, str]
) -> None:
    assert decide(pattern, manner).growth == said != done
    pump, between, second, suffix = pieces
    counter = Counter(matcher_of(pattern).program)
    text = [pump * n + between + second * n + suffix for n in (128, 256, 512)]
    early, middle, late = (counter.steps(each, manner, 1_000_000)[0] or 0 for each in text)
    assert round(2 * math.log2(late / middle) - math.log2(middle / early)) == done


# One pump shows less of these. The first is Weber and Seidl's: the words of a chain may differ; the others are
# shapes of real code: an assignment, a path with a version, an entry point, a tag.
SEVERAL: tuple[tuple[str, str, Growth], ...] = (
    ("a*a*xb*b*y", "match", 3),
    ("a*a*b*b*c*c*!", "match", 4),
    ("a*[ab]*b*!", "match", 3),
    (r"(.*?)\s*[=:]\s*(.*)$", "match", 3),
    (r"([\w ]+) ([\w.]+) .*\[.* ([\d.]+)\]", "match", 3),
    (r"\s*(.+?)\s*=\s*([\w.]+)\s*(?::\s*([\w.]+))?\s*$", "match", 4),
    (r"([^-]+)-(\d+[^-]*)(?:-(\d+[^-]*))?$", "match", 3),
)


@pytest.mark.parametrize(("pattern", "manner", "growth"), SEVERAL)
def test_several_pumps(pattern: str, manner: str, growth: Growth) -> None:
    found = decide(pattern, manner)
    assert found.growth == growth and found.slow is not None
    slow = found.slow
    assert 1 <= len(slow.more) < growth
    assert slow.text(3) == slow.prefix + slow.pump * 3 + "".join(  # type: ignore[operator]
        str(between) + str(pump) * 3 for between, pump in slow.more
    ) + str(slow.suffix)
    assert len(slow.text(7)) == slow.fixed + 7 * slow.period
    counts = [matcher_of(pattern).run(slow.text(n), manner).steps for n in (8, 16, 32)]
    early, late = (math.log2(b / a) for a, b in zip(counts, counts[1:], strict=False))
    assert round(2 * late - early) == growth


def test_one_pump_is_told_where_it_will_do() -> None:
    assert decide("a*a*xb*b*y", "match").slow == replace(
        decide("a*a*xb*b*y", "match").slow, prefix="", pump="a", more=(("x", "b"),)
    )
    for pattern in ("a*a*a*!", "(?:a|aa)*xb*b*y", r"x*\s*x*\s*!"):
        found = decide(pattern, "match").slow
        assert found is not None and not found.more


def test_a_high_power_is_not_exponential() -> None:
    found = decide("^(?:.*?,){11}P", "match")
    assert found.growth == 11 and found.slow is not None and not found.slow.bounded
    assert decide("a*" * 9 + "!", "match").growth == 9
    assert decide("(?:.*?,){3}P", "search").growth == 4


@pytest.mark.parametrize("manner", ["match", "search"])
def test_room_between_pumps_that_are_bounded(manner: str) -> None:
    """Twenty pumps at most, and at the end it matches; what lies between them makes each way long."""
    found = decide("(.*a){20}", manner).slow
    assert found is not None and found.growth == "exponential" and found.bounded
    assert len(found.pump) > 1 and len(found.text(found.steps[-1][0])) <= 4_000


@pytest.mark.parametrize(
    ("pattern", "growth", "undecided"),
    [
        (r"(['\"]).*?\1", None, REFERENCES),
        (r"(a)?(?(1)b+|c+)x", None, None),  # nothing competes: linear whatever the group holds
        (r"(a|b)\1", None, None),  # the same
        (r"(a+)\1!", 2, None),
        (r"(?:(a*)\1)*b", "exponential", None),
    ],
)
def test_back_references_are_decided_or_not(
    pattern: str, growth: Growth | None, undecided: str | None
) -> None:
    found = decide(pattern, "match")
    assert (found.growth, found.undecided) == (growth, undecided)


def brute_force_base(pattern: str, manner: str, letters: str) -> float:
    """The greatest factor for each pump that any pump of one or two letters and any suffix of one shows."""
    ours = matcher_of(pattern)
    pumps = [*letters, *(a + b for a in letters for b in letters if a != b)]
    best = 1.0
    for pump in pumps:
        for suffix in ("", *letters, "!"):
            counts = []
            for n in (8, 12):
                outcome = ours.run(pump * n + suffix, manner, 6_000)
                counts.append(outcome.steps)
                if not outcome.finished:
                    break
            if len(counts) == 2 and outcome.finished:
                best = max(best, (counts[1] / counts[0]) ** (1 / 4))
            elif not outcome.finished:
                best = max(best, 2.0)
    return best


def test_nothing_exponential_is_missed_on_small_patterns() -> None:
    """The twin tries all short pumps and suffixes; where the steps multiply, the decision must say so."""
    maker = Maker(33, frozenset())
    grown = steep = 0
    for _ in range(110):
        pattern = f"(?:{maker.pattern(3)}|{maker.pattern(2)})*!"
        if brute_force_base(pattern, "match", "ab") < 1.5:
            continue
        found = decide(pattern, "match")
        if (
            found.growth is None
            and found.unconfirmed
            and not matcher_of(pattern).run("aaa", "match", 20_000).finished
        ):
            steep += 1  # so steep that three pumps outrun the turns: too few sizes to confirm it
            continue
        grown += 1
        assert found.growth == "exponential", pattern
    assert grown > 25 and steep <= 2


@pytest.mark.parametrize("pattern", ["(a+)+$", "(?:a|aa)*b", "a*a*b"])
def test_both_sides_of_the_limit_on_turns(pattern: str) -> None:
    """Enough turns confirm; with hardly any the suspicion stays one, and no growth is claimed."""
    assert decide(pattern, "match").growth is not None
    found = decide(pattern, "match", turns=20)
    assert found.growth is None and (found.unconfirmed > 0 or found.undecided is not None)


# Bounded repeats that are endless in practice. Source: section 7 of `corpus.cost`, with bounds as in real code.
ENDLESS = (
    ("(a{1,30}){1,30}$", "match"),
    ("(?:a?){30}b", "match"),
    ("(?:a|aa){40}b", "match"),
    (".{0,2000}x.{0,2000}y", "search"),
    (r"(?:\w{1,63}\.?){1,20}@", "match"),
    ("(?:|){40}b", "match"),
    ("(?:a?|b?){40}c", "match"),
    ("(?:(?=x)|){40}c", "match"),
    ("(?:a{0,9}){0,9}b", "match"),
    ("(?:a{0,800}){3}b", "match"),
)
# Source: common practice, no source.
BOUNDED_WELL = (
    ("[a-z]{1,20}", "fullmatch"),
    (r"\d{1,3}(?:\.\d{1,3}){3}", "search"),
    ("[a-z]{1,63}@", "search"),
    ("(?:[a-z0-9](?:[a-z0-9-]{0,61}[a-z0-9])?\\.)+[a-z]{2,63}$", "match"),
    ("[a-z0-9](?:[a-z0-9-]{0,61}[a-z0-9])?(?:\\.[a-z0-9](?:[a-z0-9-]{0,61}[a-z0-9])?)*", "fullmatch"),
    ("(?:[0-9a-f]{1,4}:){7}[0-9a-f]{1,4}", "fullmatch"),
    ("[A-Z]{2}[0-9]{2}(?: ?[A-Z0-9]{4}){2,7} ?[A-Z0-9]{1,3}", "fullmatch"),
    ("(?:[a-z]{3} ){0,30}[a-z]{3}", "fullmatch"),
    ("a{0,1000}a{0,1000}b", "match"),
)


@pytest.mark.parametrize(("pattern", "manner"), ENDLESS)
def test_bounds_that_are_out_of_reach(pattern: str, manner: str) -> None:
    found = decide(pattern, manner)
    assert found.slow is not None and found.slow.bounded
    n, steps = found.slow.steps[-1]
    assert steps >= DEFAULT_LIMITS.bounded_steps and len(found.slow.text(n)) <= 4_000


@pytest.mark.parametrize(("pattern", "manner"), BOUNDED_WELL)
def test_bounds_that_hold(pattern: str, manner: str) -> None:
    assert decide(pattern, manner) == Ambiguity(None, None)


def test_both_sides_of_the_limit_on_bounded_steps() -> None:
    found = decide("a{0,200}a{0,200}b", "match", bounded_steps=30_000).slow
    assert found is not None and found.growth == 2 and found.steps[-1][1] >= 30_000
    assert decide("a{0,200}a{0,200}b", "match", bounded_steps=200_000).growth is None
    assert decide("(?:|){12}b", "match", bounded_steps=8_000).growth == 1
    assert decide("(?:|){12}b", "match", bounded_steps=80_000).growth is None


@pytest.mark.parametrize("scan", [False, True])
def test_both_sides_of_the_limit_on_product(scan: bool) -> None:
    pattern = "(?:ab|cd|ef)*x"
    program = compile_tree(parse(pattern))
    nodes = len(walks(Nfa(program, DEFAULT_LIMITS), scan).edges)
    assert nodes > 6
    assert len(walks(Nfa(program, replace(DEFAULT_LIMITS, product=nodes)), scan).edges) == nodes
    assert decide(pattern, "search" if scan else "match", product=nodes - 1).undecided == "product"


def test_a_limit_never_reads_as_a_proof() -> None:
    assert decide("(a+)+$", "match", product=2) == Ambiguity(None, None, 0, "product")
    assert decide("a{9}(a+)+$", "match", instructions=9) == Ambiguity(None, None, 0, "instructions")
    assert decide("(a+)+$", "match", work=1).undecided == "work"
