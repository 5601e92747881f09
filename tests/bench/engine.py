"""`python -m tests.bench.engine`: whether the counted steps grow as the time of `re` does, by the clock.

First every row of `corpus.cost` on `re` itself, bounds included. Then families that no row names: the rows'
patterns in the other manners, on the same texts; what the counter's steps show must be what the times show. The
sizes are chosen by the steps that they take, so each family takes about a second. Prints what differs.

    python -m tests.bench.engine --families 250 --python python3.13
"""

from __future__ import annotations

import argparse
import random
import sys
from itertools import pairwise
from typing import Any

from patlint.limits import LimitReached
from patlint.machine.counting import Counter, countable
from patlint.machine.fit import Growth, fit
from patlint.machine.matcher import Matcher
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import SlowText
from patlint.syntax.parser import PatternError, parse
from tests.bench.replay import Steps, grows_as, replay
from tests.bench.slowest import in_process
from tests.corpus.cost import BOUNDS, ROWS, Base, Text
from tests.corpus.cpython import compiled

TURNS = 100_000


def steps_of(pattern: str, manner: str, text: Text) -> Steps | None:
    """Steps on n pumps; None where the pattern is not read."""
    try:
        program = compile_tree(parse(pattern, target=(3, 13)))
    except (PatternError, LimitReached):
        return None
    prefix, pump, suffix = text
    if countable(program):
        counter = Counter(program)
        return lambda n: counter.steps(prefix + pump * n + suffix, manner, TURNS)[0]
    matcher = Matcher(program)

    def walked(n: int) -> int | None:
        whole = prefix + pump * n + suffix
        if manner == "scan":
            _, steps, _, finished = matcher.scan(whole, TURNS)
            return steps if finished else None
        outcome = matcher.run(whole, manner, TURNS)
        return outcome.steps if outcome.finished else None

    return walked


def bounded(
    pattern: str, manner: str, text: str, growth: int | Base | str, python: str
) -> tuple[bool, list[tuple[int, float]]]:
    """Whether the time of a bounded pattern grows in K as told, and the times."""
    letter, length = text.split("*")
    rows: list[tuple[int, float]] = []
    k, last = (2, 0.0) if isinstance(growth, int) else (1, 0.0)
    while last < 0.4 and k < 30_000 and len(rows) < 24:
        size = 4 * k if length == "4K" else int(length.rstrip("!"))
        whole = letter * size + ("!" if length.endswith("!") else "")
        shown = pattern.replace("K", str(k))
        answer = in_process({"pattern": shown, "flags": 0, "manner": manner, "texts": [whole]}, python=python)
        if "times" not in answer:
            break
        last = answer["times"][0]
        rows.append((k, last))
        k = k * 2 if isinstance(growth, int) else k + 1
    long = [(k, t) for k, t in rows if t > (1e-3 if growth != 0 else 0)]
    ratios = [u / t for (_, t), (_, u) in pairwise(long)][-3:]
    if growth == 0:
        return max(t for _, t in rows) < 0.01, rows
    if not ratios:
        return growth == "faster" and last > 0.4 and rows[-1][0] < 20, rows
    if isinstance(growth, Base):
        return any(abs(ratio / growth.factor - 1) < 0.2 for ratio in ratios), rows
    if growth == "faster":
        return min(ratios) > 4 or ratios == sorted(ratios), rows
    assert isinstance(growth, int)
    return any(abs(ratio / 2**growth - 1) < 0.3 for ratio in ratios), rows


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.engine", description=__doc__)
    parser.add_argument(
        "--families", type=int, default=120, help="families beyond the rows (default: %(default)s)"
    )
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument(
        "--shard", default="1/1", metavar="I/N", help="every N-th case only, from the I-th on"
    )
    parser.add_argument("--python", default=sys.executable, help="the interpreter whose re is timed")
    given = parser.parse_args()
    cases: list[tuple[str, str, str, Text, Growth, Steps]] = []
    for row in ROWS:
        steps = steps_of(row.pattern, row.manner, row.text)
        if compiled(row.pattern) is not None and steps is not None:
            growth: Growth = "exponential" if isinstance(row.growth, Base) else row.growth
            cases.append(("row", row.pattern, row.manner, row.text, growth, steps))
    rows = len(cases)
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
    for pattern, manner, text in others:
        steps = steps_of(pattern, manner, text)
        found = None if steps is None else fit(steps, len(text[1]) >= 8)
        if steps is not None and found is not None and len(cases) - rows < given.families:
            cases.append(("family", pattern, manner, text, found, steps))
    part, parts = map(int, given.shard.split("/"))
    cases, bounds = cases[part - 1 :: parts], BOUNDS[part - 1 :: parts]
    rows = sum(case[0] == "row" for case in cases)
    differ: list[Any] = []
    for number, (kind, pattern, manner, text, growth, steps) in enumerate(cases, 1):
        if number % 25 == 0:
            print(f"{number - 1} of {len(cases)}, {len(differ)} differ", file=sys.stderr, flush=True)
        slow = SlowText(*text, growth, (), (), False)
        replayed = replay(pattern, 0, manner, "", slow, given.python, steps)
        if not grows_as(growth, replayed):
            differ.append((kind, pattern, manner, text, growth, replayed.answer))
            print("DIFFERS", *differ[-1], flush=True)
    print(f"{len(cases)} families ({rows} of them rows), {len(cases) - len(differ)} alike", flush=True)
    off = 0
    for pattern, manner, text_of, _, in_k in bounds:
        alike, times = bounded(pattern, manner, text_of, in_k, given.python)
        if not alike:
            off += 1
            print("DIFFERS bound", pattern, manner, text_of, in_k, times[-6:], flush=True)
    print(f"{len(bounds)} rows of bounds, {len(bounds) - off} alike")
    return 1 if differ or off else 0


if __name__ == "__main__":
    sys.exit(main())
