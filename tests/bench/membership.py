"""`python -m tests.bench.membership`: texts in and near the language of each real pattern, put to `re`.

For every unique pattern of the bench (`--dir`, see `tests.bench`) and each of match, fullmatch and search: texts
sampled from the automaton, from its complement, and both with one edit. `re` must agree on each; of a superset
only that it takes what `re` takes. Prints what was tried and every disagreement; the status is 1 if there is one.

    python -m tests.bench.membership --dir ../bench-env --texts 12 --seed 3
"""

from __future__ import annotations

import argparse
import random
import re
import sys
import tempfile
import warnings
from collections import Counter
from collections.abc import Iterable, Iterator
from pathlib import Path

from patlint.limits import DEFAULT_LIMITS, LimitReached
from patlint.machine import words
from patlint.machine.determinise import Mode, language
from patlint.machine.dfa import Dfa
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.relations import complement
from patlint.syntax.parser import parse
from patlint.syntax.scanner import PatternError
from tests.bench.environment import python_files
from tests.bench.slowest import sites_of

MODES: tuple[Mode, ...] = ("match", "fullmatch", "search")
LONGEST = 200
"""Longer texts are left out: `re` may take very long on those of an ambiguous pattern."""


def edited(codes: tuple[int, ...], choose: random.Random, dfa: Dfa) -> tuple[int, ...]:
    """One character inserted, left out, put in another's place, or doubled."""
    place = choose.randint(0, len(codes))
    stretches = list(choose.choice(dfa.alphabet.classes).ranges())
    low, high = choose.choice(stretches)
    new = (choose.choice((low, high, choose.randint(low, high))),)
    return choose.choice(
        (
            codes[:place] + new + codes[place:],
            codes[:place] + codes[place + 1 :],
            codes[:place] + new + codes[place + 1 :],
            codes[:place] + codes[max(place - 1, 0) :],
        )
    )


def texts_near(dfa: Dfa, number: int, seed: int) -> Iterator[tuple[int, ...]]:
    choose = random.Random(seed)
    for side in (dfa, complement(dfa)):
        for codes in words.sample(side, seed, number):
            if len(codes) <= LONGEST:
                yield codes
                yield edited(codes, choose, dfa)


def check(
    patterns: Iterable[tuple[str | bytes, int]], number: int, seed: int
) -> tuple[Counter[str], list[tuple[str | bytes, int, str, str | bytes]]]:
    """Counts (patterns, texts, taken, limits, inexact), and the disagreements: pattern, flags, mode, text."""
    counted: Counter[str] = Counter()
    wrong: list[tuple[str | bytes, int, str, str | bytes]] = []
    for pattern, flags in patterns:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            try:
                compiled = re.compile(pattern, flags)
            except (re.error, ValueError):
                continue
        counted["patterns"] += 1
        try:
            nfa = Nfa(compile_tree(parse(pattern, flags)), DEFAULT_LIMITS)
        except (LimitReached, PatternError):
            counted["limits"] += 1
            continue
        counted["inexact"] += bool(nfa.inexact)
        for mode in MODES:
            try:
                dfa = language(nfa, mode)
            except LimitReached:
                counted["limits"] += 1
                continue
            for codes in texts_near(dfa, number, seed):
                text = bytes(codes) if isinstance(pattern, bytes) else "".join(map(chr, codes))
                truth = getattr(compiled, mode)(text) is not None
                found = dfa.accepts(text)
                counted["texts"] += 1
                counted["taken"] += truth
                if truth != found and (truth or not nfa.inexact):
                    wrong.append((pattern, flags, mode, text))
    return counted, wrong


def unique_patterns(folder: Path) -> list[tuple[str | bytes, int]]:
    return list(dict.fromkeys((site.pattern, site.flags) for site in sites_of(python_files(folder))))


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.membership", description=main.__doc__)
    default = Path(tempfile.gettempdir()) / "patlint-bench"
    parser.add_argument(
        "--dir", type=Path, default=default, help="the virtual environment (default: %(default)s)"
    )
    parser.add_argument(
        "--texts", type=int, default=8, metavar="N", help="samples for each language and side"
    )
    parser.add_argument("--seed", type=int, default=0)
    given = parser.parse_args()
    counted, wrong = check(unique_patterns(given.dir), given.texts, given.seed)
    print(
        *(f"{name}: {counted[name]}" for name in ("patterns", "inexact", "limits", "texts", "taken")),
        sep="\n",
    )
    print(f"disagreements: {len(wrong)}")
    for row in wrong[:20]:
        print(*map(repr, row))
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
