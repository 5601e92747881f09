"""`python -m tests.bench.misses`: hostile texts against patterns, in search of growth that patlint does not report.

For each pattern (random ones, and with `--dir` those of the bench) texts are made that know nothing of the
decision: every way round every loop, pairs of these, single characters, random words over the pattern's own
characters, mutated witnesses, several pumps one after the other; behind prefixes that lead into the pattern, with
several suffixes. Steps are counted at growing n (where there are back-references they are walked); a growth above
the reported one is a miss. A limit that was named (undecided) is no miss; with back-references a reported power is
only a least one. With `--timed N`, texts of N linear
patterns are also given to `re` under the clock.

    python -m tests.bench.misses --pairs 100000 --seed 1 --dir ../bench-env
"""

from __future__ import annotations

import argparse
import math
import random
import re
import sys
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, field
from itertools import islice
from pathlib import Path

from patlint.limits import DEFAULT_LIMITS, LimitReached
from patlint.machine import program as p
from patlint.machine.ambiguity import Letters
from patlint.machine.counting import Counter, countable
from patlint.machine.fit import fit
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Ambiguity, Manner, ambiguity_of
from patlint.machine.walks import Walks, walks
from patlint.syntax.parser import PatternError, parse
from tests.bench.environment import python_files
from tests.bench.slowest import asked, in_process, sites_of
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker

TURNS = 40_000
WALKED = 15_000
"""Turns where every step is walked."""
PER_PATTERN = 40
MANNERS: tuple[Manner, ...] = ("match", "fullmatch", "search", "scan")
Text = tuple[str, str, str, tuple[tuple[str, str], ...]]
"""prefix, pump, suffix, and further pumps, each with the text before it."""


@dataclass(frozen=True, slots=True)
class Miss:
    pattern: str | bytes
    flags: int
    manner: str
    text: Text
    claimed: float
    seen: float


def hostile(nfa: Nfa, graph: Walks, chance: random.Random, found: Ambiguity) -> Iterator[Text]:
    """Texts without end."""
    letters = [chr(code) for code in Letters(nfa).letters]
    rounds = [*_rounds(nfa, graph)] or [("", letters[0])]
    yield from (
        (prefix, pump, suffix, ()) for prefix, pump in rounds[:12] for suffix in ("", chance.choice(letters))
    )
    while True:
        prefix, pump = chance.choice(rounds)
        kind = chance.random()
        if kind < 0.3:
            pump += chance.choice(rounds)[1]
        elif kind < 0.5:
            pump = "".join(chance.choice(letters) for _ in range(chance.randint(1, 4)))
        elif kind < 0.6 and found.slow is not None:
            whole = whole_of(found)
            place = chance.randrange(len(whole))
            pump = whole[:place] + chance.choice(letters) + whole[place + chance.randint(0, 1) :]
        elif kind < 0.62 and found.slow is not None:
            pump = chance.choice(letters) + whole_of(found)
        if chance.random() < 0.3:
            prefix = ""
        more: tuple[tuple[str, str], ...] = ()
        if chance.random() < 0.25:
            more = tuple(
                (chance.choice(("", "", *letters)), chance.choice(rounds)[1])
                for _ in range(chance.choice((1, 1, 2)))
            )
        suffix = "".join(chance.choice(letters) for _ in range(chance.choice((0, 0, 1, 1, 2))))
        yield prefix, pump, suffix, more


def whole_of(found: Ambiguity) -> str:
    """The pump that is reported."""
    assert found.slow is not None
    pump = found.slow.pump
    return pump if isinstance(pump, str) else pump.decode("latin-1")


def at(text: Text, n: int) -> str:
    prefix, pump, suffix, more = text
    return prefix + pump * n + "".join(between + each * n for between, each in more) + suffix


def _rounds(nfa: Nfa, graph: Walks) -> Iterator[tuple[str, str]]:
    """For each node that lies on a cycle: a text that leads there, and a shortest one that leads round."""
    letter = Letters(nfa)
    for start, component in enumerate(graph.components):
        if component not in graph.cyclic:
            continue
        to = _shortest(graph, graph.entry, start, letter)
        around = _shortest(graph, (start,), start, letter)
        if to is not None and around:
            yield to, around


def _shortest(graph: Walks, begin: tuple[int, ...], end: int, letter: Letters) -> str | None:
    """A shortest text from one of the nodes to `end`, of one character at least if that is where it begins."""
    if len(begin) != 1 and end in begin:
        return ""
    seen = dict.fromkeys(begin, "")
    order = list(begin)
    for node in order:
        for edge in graph.edges[node]:
            text = seen[node] + chr(letter(edge.mask))
            if edge.target == end:
                return text
            if edge.target not in seen:
                seen[edge.target] = text
                order.append(edge.target)
    return None


def as_number(growth: int | str | None) -> float:
    return math.inf if growth == "exponential" else 1 if growth is None else float(growth)


def steps_of(program: p.Program, manner: Manner) -> Callable[[str | bytes], int | None]:
    """Steps on a text, None where the limit was met."""
    if countable(program):
        counter = Counter(program)
        return lambda text: counter.steps(text, manner, TURNS)[0]
    matcher = Matcher(program)

    def walked(text: str | bytes) -> int | None:
        if manner == "scan":
            _, steps, _, finished = matcher.scan(text, WALKED)
            return steps if finished else None
        outcome = matcher.run(text, manner, WALKED)
        return outcome.steps if outcome.finished else None

    return walked


@dataclass(slots=True)
class Tried:
    """Pattern-text pairs, patterns, those left undecided, misses, and some texts of patterns called linear."""

    pairs: int = 0
    patterns: int = 0
    undecided: int = 0
    misses: list[Miss] = field(default_factory=list)
    linear: list[tuple[str | bytes, int, Manner, Text]] = field(default_factory=list)


def search(
    program: p.Program, pattern: str | bytes, flags: int, manner: Manner, chance: random.Random, tried: Tried
) -> None:
    """Try texts on one pattern."""
    found = ambiguity_of(program, manner, DEFAULT_LIMITS)
    claimed = as_number(found.growth)
    tried.undecided += found.undecided is not None
    if found.undecided is not None or claimed == math.inf:
        return
    nfa = Nfa(program, DEFAULT_LIMITS)
    graph = walks(nfa, manner in ("search", "scan"))
    steps = steps_of(program, manner)
    tried.patterns += 1
    for text in islice(hostile(nfa, graph, chance, found), PER_PATTERN):
        tried.pairs += 1

        def count(n: int, text: Text = text) -> int | None:
            whole = at(text, n)
            return steps(whole.encode("latin-1", "replace") if program.is_bytes else whole)

        seen = as_number(fit(count, len(at(text, 1)) >= 8))
        if seen > max(claimed, 1) and (countable(program) or claimed == 1 or seen == math.inf):
            few, more = count(60), count(120)  # counts that come round every few pumps are alike at these
            if few is None or more is None or math.log2(more / few) > claimed + 0.4:
                tried.misses.append(Miss(pattern, flags, manner, text, claimed, seen))
                break
    if claimed == 1:
        tried.linear.append((pattern, flags, manner, text))


PARTS = (
    *("a*", "a+", "[ab]*", ".*", ".*?", r"\w+", r"\s*", "b?", "b", "(?:ab)*", "(?:a|b)*", "[^b]*", "$", "^"),
    *("(a+)?", "a{2,5}", "a*?", "(?:a|ab)*?", r"\b", "(?=a)", "(?!b)", "(?:a?b?)*"),
)
LOOPS = (
    "({0})*{1}!",
    "(?:{0}|{1})*?b",
    "(?:(?:{0})?{1})+$",
    "(?:{0}{1})*[^a]",
    "(?:{0}|{1}|)*b",
    "{0}*?{1}+?!",
)
POSSESSIVE = (
    *("(?:(?:{0})*+|{1})*b", "(?:(?>{0})|{1})*!", "(?:{0}(?:{1})?+)*b", "(?:(?:{0}){{2}}+{1})*!"),
    *("(?:(?={0}){1})*!", "(?:(?!{0}){1})+b", "(?>(?:{0}|{1})*b)", "(?:(?:{0}){{1,2}}+)*{1}!", "({0})++{1}b"),
)
BACKS = (r"({0})\1{1}b", r"(?:({0})\1)*{1}b", r"({0})?{1}(?(1)a*|b*)!", r"({0}){1}\1*!")
FLAGS = (re.IGNORECASE, re.MULTILINE, re.DOTALL, re.ASCII, re.MULTILINE | re.DOTALL)


def random_patterns(chance: random.Random) -> Iterator[tuple[str, int]]:
    """Random patterns, some shaped as real ones are: loops of overlapping sets with things between."""
    features = ((), ("ahead", "behind"), ("atomic", "flags"), ("atomic", "ahead"))
    makers = [Maker(chance.randrange(1 << 30), frozenset(each)) for each in features]
    shapes = ("{0}{1}", "(?:{0}|{1})*b", "(?:{0})*{1}!", "{0}*{1}|b")
    while True:
        kind = chance.random()
        if kind < 0.4:
            pattern = "".join(chance.choice(PARTS) for _ in range(chance.randint(2, 6)))
        else:
            maker = chance.choice(makers)
            shape = chance.choice(
                shapes if kind < 0.55 else LOOPS if kind < 0.7 else POSSESSIVE if kind < 0.9 else BACKS
            )
            pattern = shape.format(*(f"(?:{maker.pattern(2)})" for _ in range(2)))
        flags = int(chance.choice(FLAGS)) if chance.random() < 0.25 else 0
        if compiled(pattern, flags) is not None:
            yield pattern, flags


def campaign(
    patterns: Iterable[tuple[str | bytes, int, Manner | None]], pairs: int, chance: random.Random
) -> Tried:
    tried = Tried()
    for pattern, flags, manner in patterns:
        if tried.pairs >= pairs:
            break
        try:
            program = compile_tree(parse(pattern, flags))
            how: Manner = manner if manner is not None else chance.choice(MANNERS)
            search(program, pattern, flags, how, chance, tried)
        except (LimitReached, PatternError):
            continue
    return tried


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.misses", description=__doc__)
    parser.add_argument(
        "--pairs", type=int, default=100_000, help="pattern-text pairs (default: %(default)s)"
    )
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--timed", type=int, default=0, help="texts of linear patterns that re is timed on")
    parser.add_argument("--dir", type=Path, help="environment of the bench; without it random patterns only")
    given = parser.parse_args()
    chance = random.Random(given.seed)
    patterns: list[tuple[str | bytes, int, Manner | None]] = []
    if given.dir is not None:
        patterns = [(p_, f, m) for p_, f, m in asked(sites_of(python_files(given.dir)))]  # type: ignore[misc]
    return report(patterns, given.pairs, given.timed, chance)


def report(
    patterns: list[tuple[str | bytes, int, Manner | None]], pairs: int, timed: int, chance: random.Random
) -> int:
    real = campaign(patterns, pairs, chance)
    made = campaign(((*each, None) for each in random_patterns(chance)), pairs - real.pairs, chance)
    for name, tried in (("real", real), ("random", made)):
        print(
            f"{name}: {tried.pairs} pairs on {tried.patterns} patterns, {tried.undecided} undecided, "
            f"{len(tried.misses)} misses"
        )
        for miss in tried.misses:
            print(
                f"    {miss.manner} {miss.pattern!r} flags {miss.flags}: claimed {miss.claimed}, "
                f"seen {miss.seen} on {miss.text}",
                flush=True,
            )
    linear = chance.sample(real.linear + made.linear, min(timed, len(real.linear + made.linear)))
    slow = 0
    for pattern, flags, manner, (prefix, pump, suffix, more) in linear:
        request: dict[str, object] = {"pattern": pattern, "flags": flags, "manner": manner, "growth": 1}
        for name, piece in zip(PIECES, (prefix, pump, suffix), strict=True):
            request[name] = _as(pattern, piece)
        request["more"] = [[_as(pattern, piece) for piece in pair] for pair in more]
        answer = in_process(request | {"least": 4e-3})
        (n, few), (m, many) = [(0, 1.0), (0, 1.0)] if "times" not in answer else answer["times"][::2]
        if not n or math.log(max(many, 1e-9) / max(few, 1e-9)) / math.log(m / n) > 1.5:
            slow += 1
            print(
                f"    {manner} {pattern!r} flags {flags} not linear by the clock on "
                f"{(prefix, pump, suffix, more)}: {answer}"
            )
    print(f"timed: {len(linear)} texts of patterns called linear, {slow} not linear")
    return 1 if real.misses or made.misses or slow else 0


PIECES = ("prefix", "pump", "suffix")


def _as(pattern: str | bytes, text: str) -> str | bytes:
    return text.encode("latin-1", "replace") if isinstance(pattern, bytes) else text


if __name__ == "__main__":
    sys.exit(main())
