"""`python -m tests.bench`: lint the standard library and a set of large packages, and say what came of it.

The packages go into a virtual environment in `--dir`, made at the first run; `--no-install` takes it as it
is.

    python -m tests.bench --dir ../bench-env --json before.json
    python -m tests.bench --dir ../bench-env --no-install --sample 40 --seed 1 --rule nullable
"""

from __future__ import annotations

import argparse
import json
import sys
import tempfile
from itertools import islice
from pathlib import Path

from patlint.rules.registry import RULES
from tests.bench.environment import PACKAGES, install, python_files
from tests.bench.measure import measure
from tests.bench.show import for_reading, lines, sample, summary


def main() -> int:
    given = _arguments()
    if not given.no_install:
        failed = install(given.dir, given.packages)
        if failed:
            print("not installed:", *failed, file=sys.stderr)
    paths = islice(python_files(given.dir), given.limit)
    measured = measure(paths, frozenset(given.rule), _progress if sys.stderr.isatty() else None)
    if given.sample is not None:
        for finding in sample(measured.findings, given.sample, given.seed):
            print(*for_reading(finding), sep="\n", end="\n\n")
        return 0
    numbers = summary(measured)
    print(*lines(numbers), sep="\n")
    if given.json is not None:
        given.json.write_text(json.dumps(numbers, indent=2) + "\n", encoding="utf-8")
    return 1 if measured.failures else 0


def _arguments() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.bench", description=main.__doc__)
    names = [rule.name for rule in RULES]
    parser.add_argument("--packages", nargs="+", default=PACKAGES, metavar="NAME", help="what to install")
    parser.add_argument(
        "--dir",
        type=Path,
        default=Path(tempfile.gettempdir()) / "patlint-bench",
        help="the virtual environment (default: %(default)s)",
    )
    parser.add_argument("--no-install", action="store_true", help="take the environment as it is")
    parser.add_argument("--limit", type=int, metavar="N", help="read only the first N files")
    parser.add_argument("--json", type=Path, metavar="FILE", help="write the numbers to FILE too")
    parser.add_argument(
        "--sample", type=int, metavar="N", help="print N findings for reading instead of numbers"
    )
    parser.add_argument("--seed", type=int, default=0, help="choice of the sample (default: 0)")
    parser.add_argument(
        "--rule", action="append", default=[], choices=names, metavar="RULE", help="only this rule"
    )
    return parser.parse_args()


def _progress(files: int) -> None:
    print(f"\r{files} files", end="", file=sys.stderr, flush=True)


if __name__ == "__main__":
    sys.exit(main())
