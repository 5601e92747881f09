"""`python -m tests.oracle`: patlint against the `re` of the Python that runs it; exit status 1 on a mismatch.

python -m tests.oracle --seconds 60
python3.12 -m tests.oracle --seed 3 --trials 500000 --only behind ahead anchors
"""

from __future__ import annotations

import argparse
import sys
import time
from contextlib import nullcontext

from tests.oracle.breaks import BREAKS, broken
from tests.oracle.campaign import Plan, run
from tests.oracle.compare import Mismatch, Tally
from tests.oracle.patterns import CONSTRUCTS


def main(arguments: list[str] | None = None) -> int:
    given = _arguments(arguments)
    plan = Plan(
        given.seed, given.trials, given.seconds, frozenset(given.only), given.files, given.most, given.raw
    )
    began = time.monotonic()
    with broken(given.breaks) if given.breaks else nullcontext():
        tally = run(plan, _show)
    print(*report(tally, time.monotonic() - began), sep="\n")
    return 1 if tally.mismatches else 0


def report(tally: Tally, seconds: float) -> list[str]:
    """What was done, a line each."""
    version = ".".join(map(str, sys.version_info[:3]))
    said = {
        "Python": version,
        "trials": f"{tally.trials:,} in {seconds:.0f} s, {tally.trials / max(seconds, 0.01):,.0f} a second",
        "patterns": f"{tally.patterns:,}: {tally.refused:,} refused by re, {tally.compared:,} compared",
        "exact": f"{tally.exact / max(tally.compared, 1):.1%}; supersets: {_counts(tally.inexact)}",
        "comparisons": _counts(tally.comparisons),
        "relations": _counts(tally.relations),
        "limits met": _counts(tally.limits),
        "faults of CPython passed over": _counts(tally.faults),
        "mismatches": f"{len(tally.mismatches)}",
    }
    return [f"{name}: {value}" for name, value in said.items()]


def _counts(counter: object) -> str:
    rows = sorted(dict(counter).items())  # type: ignore[call-overload]
    return ", ".join(f"{name} {number:,}" for name, number in rows) or "none"


def _show(mismatch: Mismatch) -> None:
    print(mismatch.row(), flush=True)


def _arguments(arguments: list[str] | None) -> argparse.Namespace:
    parser = argparse.ArgumentParser(
        prog="python -m tests.oracle", description="Compare patlint with the re of this Python."
    )
    parser.add_argument("--seed", type=int, default=0, help="of all random choices (default: %(default)s)")
    parser.add_argument(
        "--trials", type=int, default=200_000, help="pairs of a pattern and a text (default: %(default)s)"
    )
    parser.add_argument("--seconds", type=float, default=0.0, help="stop after so many (default: no end)")
    parser.add_argument(
        "--only", nargs="+", default=[], choices=CONSTRUCTS, metavar="CONSTRUCT", help=", ".join(CONSTRUCTS)
    )
    parser.add_argument(
        "--files",
        type=int,
        default=60,
        help="files of the library read for real patterns (default: %(default)s)",
    )
    parser.add_argument(
        "--most", type=int, default=5, help="stop after so many mismatches (default: %(default)s)"
    )
    parser.add_argument("--raw", action="store_true", help="do not make mismatches small")
    parser.add_argument("--break", dest="breaks", choices=BREAKS, help=argparse.SUPPRESS)
    return parser.parse_args(arguments)


if __name__ == "__main__":
    sys.exit(main())
