"""`python -m tests.bench.peers`: general-purpose automata libraries on the same real patterns, in the same run.

greenery, interegular and automata-lib build the minimal automaton of each pattern of the bench that is written
in what all read alike; so does patlint. Printed are, for the patterns that a library accepts, its CPU times and
ours beside them, then whether both languages agree: on texts in and near the language, and for interegular on
pairs of patterns (equal, within, disjoint). Nothing that is not asked of a library counts against it.

The dialects meet without flags, anchors, boundaries, look-around and back-references. `.` is told apart: greenery
lets it take the line feed, so ours is asked with DOTALL. `\\d`, `\\w` and `\\s` are ASCII there, so ours are asked
with ASCII. automata-lib has no escapes and counts blanks as nothing, so it is asked only where there are none.

Disagreements are explained one by one in `EXPLAINED`; one that is not, and any in which `re` is with the library,
makes the status 1.

    python -m tests.bench.peers --dir ../bench-env --seconds 2
"""

from __future__ import annotations

import argparse
import re
import signal
import sys
import tempfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from time import process_time
from typing import Any

from patlint.language import Language
from patlint.limits import LimitReached
from patlint.machine.dfa import Dfa
from patlint.machine.relations import relation
from tests.bench.membership import LONGEST, texts_near, unique_patterns

NOT_SHARED = re.compile(r"[\^$]|\\[bBAZ0-9NuUxpk]|\(\?(?!:)|[*+?}][+]|\[\[|&&|\\[^\w\s]?\Z")
"""What the dialects do not share, found by its spelling (too much rather than too little)."""
PLAIN = re.compile(r"[A-Za-z0-9|()*+?,_]*")
"""automata-lib's part; `,` only as itself, since `{` is left out."""


EXPLAINED: tuple[tuple[str, str, str], ...] = (
    ("greenery interegular", r"\[\^?\]", "theirs: a set that begins with `]` is taken for an empty one"),
)
"""Libraries, what such a pattern holds (an expression for its spelling), and whose fault it is, with the cause."""


def explained(library: str, pattern: str) -> str | None:
    """Why this library and patlint disagree on `pattern`, None where that is not known."""
    return next(
        (why for who, sign, why in EXPLAINED if library in who.split() and re.search(sign, pattern)), None
    )


class _OutOfTime(Exception):
    pass


@contextmanager
def time_limit(seconds: float) -> Iterator[None]:
    """Raises _OutOfTime in the body after so many seconds by the clock.

    Not by CPU time: a timer of that kind makes `process_time` coarse.
    """

    def stop(*_: object) -> None:
        raise _OutOfTime

    before = signal.signal(signal.SIGALRM, stop)
    signal.setitimer(signal.ITIMER_REAL, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)


@dataclass(slots=True)
class Peer:
    """A library: `build` makes its automaton (raises where it refuses), `accepts` runs it."""

    name: str
    build: Callable[[str], Any]
    accepts: Callable[[Any, str], bool]
    flags: int
    shared: Callable[[str], bool]
    pairs: bool = False
    theirs: list[float] = field(default_factory=list)
    ours: list[float] = field(default_factory=list)
    refused: int = 0
    too_slow: int = 0
    texts: int = 0
    wrong: list[tuple[str, str, bool]] = field(default_factory=list)
    compared: int = 0
    wrong_pairs: list[tuple[str, str]] = field(default_factory=list)


def peers() -> list[Peer]:
    """Those that are installed."""
    found = []

    def shared(pattern: str) -> bool:
        return NOT_SHARED.search(pattern) is None

    try:
        import greenery  # type: ignore[import-untyped,unused-ignore]

        found.append(
            Peer(
                "greenery",
                lambda pattern: greenery.parse(pattern).to_fsm().reduce(),
                lambda machine, text: bool(machine.accepts(text)),
                re.ASCII | re.DOTALL,
                shared,
            )
        )
    except ImportError:
        pass
    try:
        import interegular

        found.append(
            Peer(
                "interegular",
                lambda pattern: interegular.parse_pattern(pattern).to_fsm().reduce(),  # type: ignore[no-untyped-call,unused-ignore]
                lambda machine, text: bool(machine.accepts(text)),
                re.ASCII,
                shared,
                pairs=True,
            )
        )
    except ImportError:
        pass
    try:
        from automata.fa.dfa import DFA
        from automata.fa.nfa import NFA

        found.append(
            Peer(
                "automata-lib",
                lambda pattern: DFA.from_nfa(NFA.from_regex(pattern), minify=True),
                lambda machine, text: bool(machine.accepts_input(text)),
                re.ASCII,
                lambda pattern: PLAIN.fullmatch(pattern) is not None and "(?" not in pattern,
            )
        )
    except ImportError:
        pass
    return found


def run(peer: Peer, patterns: list[str], seconds: float) -> None:
    built: list[tuple[str, Dfa, Any]] = []
    for pattern in patterns:
        if not peer.shared(pattern):
            continue
        try:
            begin = process_time()
            dfa = Language(pattern, peer.flags).dfa
            middle = process_time()
        except LimitReached:
            continue
        try:
            with time_limit(seconds):
                again = process_time()
                machine = peer.build(pattern)
                spent = process_time() - again
        except _OutOfTime:
            peer.too_slow += 1
            continue
        except Exception:  # noqa: BLE001 (each library has its own, and none of one kind)
            peer.refused += 1
            continue
        peer.ours.append(middle - begin)
        peer.theirs.append(spent)
        built.append((pattern, dfa, machine))
        for codes in texts_near(dfa, 4, len(built)):
            text = "".join(map(chr, codes))
            if len(text) > LONGEST or (peer.name == "automata-lib" and not text.isalnum()):
                continue
            peer.texts += 1
            taken = dfa.accepts(text)
            if peer.accepts(machine, text) != taken:
                peer.wrong.append((pattern, text, taken))
                break
    if peer.pairs:
        _pairs(peer, built, seconds)


def _pairs(peer: Peer, built: list[tuple[str, Dfa, Any]], seconds: float) -> None:
    """Each pattern beside some that follow: equal, within, disjoint.

    Not by interegular's `isdisjoint`, which contradicts its own intersection, for `\\S` and `[&]` for example.
    """
    limits = Language("").limits
    for step in (1, 3, 7, 15):
        for (one, a, x), (other, b, y) in zip(built, built[step:], strict=False):
            try:
                found = relation(a, b, limits)
                with time_limit(seconds):
                    theirs = (x.equivalent(y), x.issubset(y), (x & y).empty())
            except (LimitReached, _OutOfTime):
                continue
            ours = (found.word == "equal", found.only_a is None, found.both is None)
            peer.compared += 1
            if ours != theirs:
                peer.wrong_pairs.append((one, other))


def percentile(values: list[float], share: float) -> float:
    return sorted(values)[min(int(len(values) * share), len(values) - 1)] if values else 0.0


def report(peer: Peer) -> Iterator[str]:
    yield f"{peer.name}: {len(peer.theirs)} patterns accepted, {peer.refused} refused, {peer.too_slow} too slow"
    for name, times in (("theirs", peer.theirs), ("ours", peer.ours)):
        shown = "  ".join(f"{label} {percentile(times, share) * 1000:.2f}" for label, share in SHARES)
        yield f"  {name:8} ms  {shown}"
    yield f"  {peer.texts} texts, {len(peer.wrong)} patterns on which they differ"
    if peer.pairs:
        yield f"  {peer.compared} pairs, {len(peer.wrong_pairs)} on which they differ"
    for pattern, text, taken in peer.wrong:
        right = re.compile(pattern, peer.flags).fullmatch(text) is not None
        yield f"    {pattern!r} {text!r}: ours {taken}, re {right}; {explained(peer.name, pattern)}"
    for one, other in peer.wrong_pairs:
        yield f"    {one!r} {other!r}: {explained(peer.name, one) or explained(peer.name, other)}"


SHARES = (("median", 0.5), ("95 %", 0.95), ("99 %", 0.99), ("most", 1.0))


def is_open(pattern: str | bytes, flags: int) -> bool:
    return isinstance(pattern, str) and not flags & re.VERBOSE and "(?x" not in pattern


def plainer(pattern: str | bytes) -> str:
    """The pattern without names, without anchors at its two ends: a real one in more dialects."""
    assert isinstance(pattern, str)
    text = re.sub(r"\(\?P<\w+>|\(\?:", "(", pattern)
    text = re.sub(r"^(?:\^|\\b|\\A)+", "", text)
    return re.sub(r"(?<!\\)(?:\$|\\Z|\\b)+$", "", text)


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.peers", description=main.__doc__)
    default = Path(tempfile.gettempdir()) / "patlint-bench"
    parser.add_argument(
        "--dir", type=Path, default=default, help="the virtual environment (default: %(default)s)"
    )
    parser.add_argument("--seconds", type=float, default=2.0, help="seconds that a library has for a pattern")
    given = parser.parse_args()
    patterns = list(dict.fromkeys(plainer(p) for p, f in unique_patterns(given.dir) if is_open(p, f)))
    open_questions = 0
    for peer in peers():
        run(peer, patterns, given.seconds)
        print(*report(peer), sep="\n")
        open_questions += sum(
            (re.compile(pattern, peer.flags).fullmatch(text) is not None) != taken
            or explained(peer.name, pattern) is None
            for pattern, text, taken in peer.wrong
        )
        open_questions += sum(
            explained(peer.name, one) is None and explained(peer.name, other) is None
            for one, other in peer.wrong_pairs
        )
    return 1 if open_questions else 0


if __name__ == "__main__":
    sys.exit(main())
