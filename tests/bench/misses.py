"""`python -m tests.bench.misses`: hostile texts against patterns, in search of growth that patlint does not report.

For each pattern (random ones, and with `--dir` those of the bench) texts are made that know nothing of the
decision: every way round every loop, pairs of these, single characters, random words over the pattern's own
characters, mutated witnesses; behind prefixes that lead into the pattern, with several suffixes. Steps are counted
at growing n; a growth above the reported one is a miss. A limit that was named (undecided) is no miss.

    python -m tests.bench.misses --pairs 100000 --seed 1 --dir ../bench-env
"""

from __future__ import annotations

import argparse
import math
import random
import sys
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path

from patlint.limits import DEFAULT_LIMITS, LimitReached
from patlint.machine import program as p
from patlint.machine.ambiguity import Letters
from patlint.machine.counting import Counter, countable
from patlint.machine.fit import fit
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Ambiguity, Manner, ambiguity_of
from patlint.machine.walks import Walks, walks
from patlint.syntax.parser import PatternError, parse
from tests.bench.environment import python_files
from tests.bench.slowest import asked, sites_of
from tests.corpus.cpython import compiled
from tests.corpus.generate import Maker

TURNS = 40_000
PER_PATTERN = 40
MANNERS: tuple[Manner, ...] = ("match", "fullmatch", "search", "scan")
Text = tuple[str, str, str]


@dataclass(frozen=True, slots=True)
class Miss:
    pattern: str | bytes
    flags: int
    manner: str
    text: Text
    claimed: float
    seen: float


def hostile(nfa: Nfa, graph: Walks, chance: random.Random, found: Ambiguity) -> Iterator[Text]:
    """Texts without end: prefix, pump, suffix."""
    letters = [chr(code) for code in Letters(nfa).letters]
    rounds = [*_rounds(nfa, graph)] or [("", letters[0])]
    yield from (
        (prefix, pump, suffix) for prefix, pump in rounds[:12] for suffix in ("", chance.choice(letters))
    )
    while True:
        prefix, pump = chance.choice(rounds)
        kind = chance.random()
        if kind < 0.3:
            pump += chance.choice(rounds)[1]
        elif kind < 0.5:
            pump = "".join(chance.choice(letters) for _ in range(chance.randint(1, 4)))
        elif kind < 0.6 and found.slow is not None:
            whole = found.slow.pump if isinstance(found.slow.pump, str) else found.slow.pump.decode("latin-1")
            place = chance.randrange(len(whole))
            pump = whole[:place] + chance.choice(letters) + whole[place + chance.randint(0, 1) :]
        if chance.random() < 0.3:
            prefix = ""
        yield prefix, pump, "".join(chance.choice(letters) for _ in range(chance.choice((0, 0, 1, 1, 2))))


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


def search(
    program: p.Program, pattern: str | bytes, flags: int, manner: Manner, texts: int, chance: random.Random
) -> tuple[int, list[Miss], bool]:
    """How many texts were tried on one pattern, the misses, and whether patlint left it undecided."""
    found = ambiguity_of(program, manner, DEFAULT_LIMITS)
    claimed = as_number(found.growth)
    if found.undecided is not None or claimed == math.inf or not countable(program):
        return 0, [], found.undecided is not None
    nfa = Nfa(program, DEFAULT_LIMITS)
    graph = walks(nfa, manner in ("search", "scan"))
    counter = Counter(program)
    tried = 0
    misses = []
    texts_made = hostile(nfa, graph, chance, found)
    while tried < texts:
        prefix, pump, suffix = next(texts_made)
        tried += 1

        def count(n: int, text: Text = (prefix, pump, suffix)) -> int | None:
            whole: str | bytes = text[0] + text[1] * n + text[2]
            if program.is_bytes:
                whole = str(whole).encode("latin-1", "replace")
            return counter.steps(whole, manner, TURNS)[0]

        seen = as_number(fit(count, len(pump) >= 8))
        if seen > max(claimed, 1):
            misses.append(Miss(pattern, flags, manner, (prefix, pump, suffix), claimed, seen))
            break
    return tried, misses, False


def random_patterns(chance: random.Random) -> Iterator[tuple[str, int]]:
    """Random patterns, half of them shaped as real ones are: loops of overlapping sets with things between."""
    makers = [
        Maker(chance.randrange(1 << 30), frozenset(f)) for f in ((), ("ahead", "behind"), ("atomic", "flags"))
    ]
    parts = (
        "a*",
        "a+",
        "[ab]*",
        ".*",
        ".*?",
        r"\w+",
        r"\s*",
        "b?",
        "b",
        "(?:ab)*",
        "(?:a|b)*",
        "[^b]*",
        "$",
        "^",
        "(a+)?",
        "a{2,5}",
    )
    while True:
        if chance.random() < 0.5:
            pattern = "".join(chance.choice(parts) for _ in range(chance.randint(2, 6)))
        else:
            maker = chance.choice(makers)
            pattern = chance.choice(("{0}{1}", "(?:{0}|{1})*b", "(?:{0})*{1}!", "{0}*{1}|b")).format(
                *(f"(?:{maker.pattern(2)})" for _ in range(2))
            )
        if compiled(pattern) is not None:
            yield pattern, 0


def campaign(
    patterns: Iterable[tuple[str | bytes, int, Manner | None]], pairs: int, chance: random.Random
) -> tuple[int, int, int, list[Miss]]:
    """Pairs tried, patterns, patterns left undecided, and the misses."""
    tried = asked_about = undecided = 0
    misses: list[Miss] = []
    for pattern, flags, manner in patterns:
        if tried >= pairs:
            break
        try:
            program = compile_tree(parse(pattern, flags))
            how: Manner = manner if manner is not None else chance.choice(MANNERS)
            more, found, open_ = search(program, pattern, flags, how, PER_PATTERN, chance)
        except (LimitReached, PatternError):
            continue
        asked_about += more > 0
        undecided += open_
        tried += more
        misses += found
    return tried, asked_about, undecided, misses


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.misses", description=__doc__)
    parser.add_argument(
        "--pairs", type=int, default=100_000, help="pattern-text pairs (default: %(default)s)"
    )
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--dir", type=Path, help="environment of the bench; without it random patterns only")
    given = parser.parse_args()
    chance = random.Random(given.seed)
    patterns: list[tuple[str | bytes, int, Manner | None]] = []
    if given.dir is not None:
        patterns = [(p_, f, m) for p_, f, m in asked(sites_of(python_files(given.dir)))]  # type: ignore[misc]
    return report(patterns, given.pairs, chance)


def report(patterns: list[tuple[str | bytes, int, Manner | None]], pairs: int, chance: random.Random) -> int:
    real = campaign(patterns, pairs, chance)
    made = campaign(((text, flags, None) for text, flags in random_patterns(chance)), pairs - real[0], chance)
    for name, (tried, asked_about, undecided, misses) in (("real", real), ("random", made)):
        print(f"{name}: {tried} pairs on {asked_about} patterns, {undecided} undecided, {len(misses)} misses")
        for miss in misses:
            print(
                f"    {miss.manner} {miss.pattern!r} flags {miss.flags}: claimed {miss.claimed}, "
                f"seen {miss.seen} on {miss.text}"
            )
    return 1 if real[3] or made[3] else 0


if __name__ == "__main__":
    sys.exit(main())
