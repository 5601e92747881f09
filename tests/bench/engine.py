"""`python -m tests.bench.engine`: whether the counted steps grow as the time of `re` does, by the clock.

First every row of `corpus.cost` on `re` itself. Then families that no row names: the rows' patterns in the other
manners, on the same texts; what the counter's steps show must be what the times show. Prints what differs.

    python -m tests.bench.engine --families 120 --python python3.13
"""

from __future__ import annotations

import argparse
import random
import sys
from typing import Any

from patlint.limits import LimitReached
from patlint.machine.counting import Counter, countable
from patlint.machine.fit import Growth, fit
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import SlowText
from patlint.syntax.parser import PatternError, parse
from tests.bench.replay import Replayed, grows_as, replay
from tests.corpus.cost import ROWS, Base, Text
from tests.corpus.cpython import compiled

TURNS = 100_000


def timed(pattern: str, manner: str, text: Text, growth: Growth, python: str) -> Replayed:
    slow = SlowText(*text, growth, (), (), False)
    return replay(pattern, 0, manner, "", slow, python)


def counted(pattern: str, manner: str, text: Text) -> Growth | None:
    """The growth of the counted steps; None where it cannot be told."""
    try:
        program = compile_tree(parse(pattern))
    except (PatternError, LimitReached):
        return None
    if not countable(program):
        return None
    counter = Counter(program)
    prefix, pump, suffix = text
    return fit(lambda n: counter.steps(prefix + pump * n + suffix, manner, TURNS)[0], len(pump) >= 8)


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.engine", description=__doc__)
    parser.add_argument(
        "--families", type=int, default=120, help="families beyond the rows (default: %(default)s)"
    )
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--python", default=sys.executable, help="the interpreter whose re is timed")
    given = parser.parse_args()
    cases: list[tuple[str, str, str, Text, Growth]] = []
    for row in ROWS:
        if compiled(row.pattern) is not None:
            growth: Growth = "exponential" if isinstance(row.growth, Base) else row.growth
            cases.append(("row", row.pattern, row.manner, row.text, growth))
    named = {row.key for row in ROWS}
    others = sorted(
        {
            (row.pattern, manner, row.text)
            for row in ROWS
            for manner in ("match", "fullmatch", "search", "scan")
            if (row.pattern, manner, row.text) not in named and compiled(row.pattern) is not None
        }
    )
    random.Random(given.seed).shuffle(others)
    more = 0
    for pattern, manner, text in others:
        found = counted(pattern, manner, text)
        if found is not None and more < given.families:
            more += 1
            cases.append(("family", pattern, manner, text, found))
    differ: list[Any] = []
    for kind, pattern, manner, text, growth in cases:
        replayed = timed(pattern, manner, text, growth, given.python)
        if not grows_as(growth, replayed):
            differ.append((kind, pattern, manner, text, growth, replayed.answer))
            print("DIFFERS", *differ[-1], flush=True)
    print(f"{len(cases)} families ({len(cases) - more} of them rows), {len(cases) - len(differ)} alike")
    return 1 if differ else 0


if __name__ == "__main__":
    sys.exit(main())
