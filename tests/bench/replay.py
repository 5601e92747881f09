"""`python -m tests.bench.replay`: every slow text that patlint reports on the bench, replayed on the real `re`.

For each pattern of the standard library and the packages, in each manner in which it is used, the reported
text is timed at growing n, each in a process of its own; the sizes are chosen by the steps that they take. A power
d must show itself as 2 ** d on doubling, an exponential as a factor for each further pump that does not sink. Prints
what does not, and the share.
Exit status 1 where a text does not grow as claimed.

    python -m tests.bench.replay --dir ../bench-env --no-install
"""

from __future__ import annotations

import argparse
import math
import sys
import tempfile
from collections import Counter
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeAlias

from patlint.limits import DEFAULT_LIMITS, LimitReached
from patlint.machine import counting
from patlint.machine.fit import LEAST_BASE
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Ambiguity, Growth, Manner, SlowText
from patlint.rules.subject import Subject
from patlint.source.sites import Site
from patlint.syntax.parser import parse
from patlint.target import running_target
from tests.bench.environment import PACKAGES, install, python_files
from tests.bench.slowest import asked, in_process, sites_of

TOLERANCE = 0.35
TURNS = 200_000
BUDGETS = ((2e7, 1), (5e7, 2), (2e8, 3), (8e8, 3))
"""Steps of the longest text that is timed, and how often; one after the other until the times agree with the claim:
a busy machine gives one wrong time in fifty."""
BRIEFLY = 0.03
"""Seconds of each measurement of the first try."""
PAUSE = 1_500
"""Pumps from which on a count is drawn on by its power, without counting further."""
LEAST_TIMES = (4e-3, 8e-3, 2e-2, 4e-2)
"""The same where steps cannot be counted: seconds of the smallest run that is compared."""

Steps: TypeAlias = Callable[[int], "int | None"]


@dataclass(frozen=True, slots=True)
class Replayed:
    pattern: str | bytes
    flags: int
    manner: str
    where: str
    slow: SlowText
    answer: dict[str, Any]

    @property
    def power(self) -> float:
        """The power that the times show; lower powers still hold it down or up, by half as much each time."""
        (a, s), (b, t), (c, u) = self.answer["times"]
        if not min(s, t, u) > 0:
            return 0.0
        early, late = math.log(t / s) / math.log(b / a), math.log(u / t) / math.log(c / b)
        return late if abs(late - round(late)) < TOLERANCE else 2 * late - early

    @property
    def agrees(self) -> bool:
        return grows_as(self.slow.growth, self) or self.as_counted

    @property
    def as_counted(self) -> bool:
        """Whether the times of a high power, which comes out only on texts too long to wait for, grow size by
        size as the steps do."""
        rows = self.answer.get("times")
        if not rows or not isinstance(self.slow.growth, int) or self.slow.growth < 4:
            return False
        counter = counting.Counter(compile_tree(parse(self.pattern, self.flags)))
        steps = [counter.steps(self.slow.text(n), self.manner, 10_000_000)[0] for n, _ in rows]
        ratios = [
            (t / s) / (more / few)
            for (_, s), (_, t), few, more in zip(rows, rows[1:], steps, steps[1:], strict=False)
            if few and more
        ]
        return len(ratios) == len(rows) - 1 and all(0.7 < ratio < 1.4 for ratio in ratios)


def grows_as(growth: Growth, replayed: Replayed) -> bool:
    """Whether the times grow as claimed."""
    rows: list[list[float]] | None = replayed.answer.get("times")
    if not rows:
        return False
    if growth == "exponential":
        if len(rows) < 3:
            return rows[-1][1] > 0.5 and rows[-1][0] < 64
        (n, few), (m, more) = rows[0], rows[-1]
        half, middle = rows[len(rows) // 2]
        base = (more / few) ** (1 / (m - n))
        late = (more / middle) ** (1 / (m - half))
        return base > 1 + (LEAST_BASE - 1) / 2 and bool(late > 1 + (base - 1) * 0.6)
    return bool(abs(replayed.power - growth) <= TOLERANCE)


def ambiguities(sites: Iterable[Site]) -> list[tuple[str | bytes, int, Manner, Site, Ambiguity]]:
    """The verdict on each pattern of the sites in each manner."""
    target = running_target()
    found: list[tuple[str | bytes, int, Manner, Site, Ambiguity]] = []
    for (pattern, flags, manner), site in asked(sites).items():
        try:
            subject = Subject(site, target, DEFAULT_LIMITS)
            if subject.parsed is not None:
                found.append((pattern, flags, manner, site, subject.ambiguity(manner)))  # type: ignore[arg-type]
        except LimitReached:
            continue
    return found


def sizes(steps: Steps, growth: Growth, budget: float) -> list[int]:
    """Pumps at which the growth shows: the last takes about `budget` steps, as far as that can be counted."""
    if growth == "exponential":
        n, row = 1, []
        while n < 2_000 and (count := steps(n)) is not None and count < budget:
            if count > budget / 5_000:
                row.append(n)
            n += 1 if n < 60 else n // 16
        return row[-13:]
    known = 16
    counted = steps(known) or 1
    while known < PAUSE and (more := steps(2 * known)) is not None and more < budget:
        known, counted = 2 * known, more
    last = known * (budget / counted) ** (1 / growth) if growth else 1 << 16
    factor = 2.0 if growth < 4 else 1.5
    last = min(last, 4e6)
    return [max(int(last / factor**2), 2), max(int(last / factor), 3), max(int(last), 4)]


def replay(
    pattern: str | bytes,
    flags: int,
    manner: str,
    where: str,
    slow: SlowText,
    python: str = sys.executable,
    steps: Steps | None = None,
) -> Replayed:
    """The times of a slow text on `re`. `steps` are those on n pumps; without them they are counted here."""
    request: dict[str, Any] = {
        "pattern": pattern,
        "flags": flags,
        "manner": manner,
        "prefix": slow.prefix,
        "pump": slow.pump,
        "suffix": slow.suffix,
        "more": slow.more,
        "growth": slow.growth,
    }
    if steps is None:
        program = compile_tree(parse(pattern, flags))
        if counting.countable(program):
            counter = counting.Counter(program)
            steps = lambda n: counter.steps(slow.text(n), manner, TURNS)[0]  # noqa: E731
    tries: list[dict[str, Any]] = [{"least": least} for least in LEAST_TIMES]
    if steps is not None:
        tries = [{"sizes": sizes(steps, slow.growth, most), "runs": runs} for most, runs in BUDGETS]
        tries[0]["measured"] = BRIEFLY
    for how in tries:
        answer = in_process(request | how, python=python)
        replayed = Replayed(pattern, flags, manner, where, slow, answer)
        if replayed.agrees:
            break
    return replayed


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.replay", description=__doc__)
    parser.add_argument("--packages", nargs="+", default=PACKAGES, metavar="NAME")
    parser.add_argument("--dir", type=Path, default=Path(tempfile.gettempdir()) / "patlint-bench")
    parser.add_argument("--no-install", action="store_true")
    parser.add_argument("--python", default=sys.executable, help="the interpreter whose re is timed")
    given = parser.parse_args()
    if not given.no_install:
        install(given.dir, given.packages)
    return report(ambiguities(sites_of(python_files(given.dir))), given.python)


def report(
    found: list[tuple[str | bytes, int, Manner, Site, Ambiguity]], python: str = sys.executable
) -> int:
    degrees = Counter(str(ambiguity.growth) for *_, ambiguity in found)
    print(f"asked {len(found)} (pattern, flags, manner):", dict(degrees.most_common()))
    print("undecided", sum(ambiguity.undecided is not None for *_, ambiguity in found), end=", ")
    print("suspicions not confirmed", sum(ambiguity.unconfirmed > 0 for *_, ambiguity in found))
    ran = agreed = 0
    for pattern, flags, manner, site, ambiguity in found:
        if ambiguity.slow is None:
            continue
        replayed = replay(pattern, flags, manner, f"{site.path}:{site.place.line}", ambiguity.slow, python)
        ran += 1
        agreed += replayed.agrees
        if not replayed.agrees:
            slow = ambiguity.slow
            print(f"NOT AS CLAIMED {slow.growth} {manner} {pattern!r} flags {flags} {replayed.where}")
            print(
                f"    {slow.prefix!r} + {slow.pump!r} * n + {slow.more} + {slow.suffix!r}: {replayed.answer}"
            )
    print(f"replayed {ran}, as claimed {agreed} ({agreed / ran if ran else 1:.1%})")
    return 0 if ran == agreed else 1


if __name__ == "__main__":
    sys.exit(main())
