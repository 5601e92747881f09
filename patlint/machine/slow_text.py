"""The text that shows a slow pattern: prefix + pump * n + suffix, confirmed by counting steps.

A suspicion from the graph of walks becomes a claim only when the steps, counted at growing n, are as many as the
claim says: for exponential growth each further pump must multiply them, for a power d they must lie on a
polynomial of that degree. The suffix makes the engine go back: a shortest text that is refused by all that the
engine tries before its last way (`continuation`); where that is not decided, the empty text and single
characters. Where it is decided that no suffix does it, the engine is never slow there, and nothing is counted.

Limit: `turns` of the counting for all suspicions of one question.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Literal, TypeAlias

from patlint.limits import LimitReached, Limits
from patlint.machine import program as p
from patlint.machine.alphabet import representative
from patlint.machine.ambiguity import EXPONENTIAL, Codes, Letters, Suspect, suspects
from patlint.machine.bounded import growth_below, opened, passes, repeats_nothing
from patlint.machine.continuation import Continuations
from patlint.machine.counting import Counter, countable
from patlint.machine.fit import Growth as Growth
from patlint.machine.fit import fit
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_node
from patlint.machine.walks import walks
from patlint.syntax import tree as t

Manner: TypeAlias = Literal["match", "fullmatch", "search", "scan"]
"""A mode, or "scan" for findall, finditer, split and sub, which go on after each match."""

LEAST_STEPS = 1_000
"""Steps that the largest confirmed text must take, so that small noise is not fitted."""
LONG_PUMP = 8
"""From so many characters on a pump needs fewer repetitions to show its power."""
VARIANTS = 5
"""Readings of a pump (with other characters of the same sets) that are tried."""
READINGS = 2
"""Readings of which something had to be counted."""
GUESSES = 5
SCREEN_SIZES = (8, 24)
SCREEN_RATIO = 3.6
"""A guessed suffix must show more than three times the steps at three times the pumps before it is fitted."""
SUSPECTS = 8
SHOWN_STEPS = 2_000_000_000
"""Exponential counts are told up to so many steps."""


@dataclass(frozen=True, slots=True)
class SlowText:
    """`steps` are counted (n, steps) pairs; `parts` the spans that compete."""

    prefix: str | bytes
    pump: str | bytes
    suffix: str | bytes
    growth: Growth
    steps: tuple[tuple[int, int], ...]
    parts: tuple[tuple[int, int], ...]
    by_restart: bool
    bounded: bool = False
    """The growth is the one seen up to the last of `steps`; a bound in the pattern ends it somewhere."""

    def text(self, n: int) -> str | bytes:
        return self.prefix + self.pump * n + self.suffix  # type: ignore[operator]


@dataclass(frozen=True, slots=True)
class Ambiguity:
    """`growth` None means: no growth beyond linear was confirmed.

    `unconfirmed` counts suspicions that no text confirmed; `undecided` names the limit that cut the search
    short, so that None is then no proof.
    """

    growth: Growth | None
    slow: SlowText | None
    unconfirmed: int = 0
    undecided: str | None = None


def ambiguity_of(program: p.Program, manner: Manner, limits: Limits) -> Ambiguity:
    """The worst confirmed growth of `program` (as the engine runs it) used in this manner."""
    try:
        found = _unbounded(program, manner, limits)
    except LimitReached as reached:
        found = Ambiguity(None, None, 0, reached.limit)
    if found.growth == "exponential" or program.tree is None:
        return found
    tree = opened(program.tree)
    if tree is program.tree:
        return found
    try:
        slow, cut = _bounded(program, tree, manner, limits, found.slow)
    except LimitReached as reached:
        return replace(found, undecided=found.undecided or reached.limit)
    if slow is None:
        return replace(found, undecided=found.undecided or ("turns" if cut and found.slow is None else None))
    return Ambiguity(slow.growth, slow, found.unconfirmed, None)


def _unbounded(program: p.Program, manner: Manner, limits: Limits) -> Ambiguity:
    undecided = None
    unconfirmed = fitted = 0
    best: SlowText | None = None
    asked = _suspicions(program, manner, limits)
    if asked is None:
        return Ambiguity(None, None)
    found, letters, continuations = asked
    most = max(suspect.degree for suspect in found)
    counting = _Counting(program, manner, limits.turns)
    counting.may_multiply = any(suspect.degree == EXPONENTIAL for suspect in found)
    for suspect in found:
        if best is not None and _enough(best, most):
            break
        if fitted >= SUSPECTS or counting.turns <= 0:
            undecided = "turns" if best is None else None
            break
        tried, slow = _confirm(suspect, most, letters, continuations, counting)
        fitted += tried
        unconfirmed += tried and slow is None
        if slow is not None and (best is None or _worse(slow.growth, best.growth)):
            best = slow
    if counting.cut and best is None:
        undecided = "turns"
    return Ambiguity(best.growth if best else None, best, unconfirmed, undecided)


def _suspicions(
    program: p.Program, manner: Manner, limits: Limits
) -> tuple[list[Suspect], Letters, Continuations] | None:
    """What the graph of a program shows, or None where it shows nothing. Raises LimitReached."""
    nfa = Nfa(program, limits)
    graph = walks(nfa, manner in ("search", "scan"))
    found = list(suspects(nfa, graph)) if graph.cyclic else []
    if not found:
        return None
    letters = Letters(nfa)
    return found, letters, Continuations(nfa, graph, manner, letters)


def _bounded(
    program: p.Program, tree: t.Node, manner: Manner, limits: Limits, known: SlowText | None
) -> tuple[SlowText | None, bool]:
    """A text on which the bounded repeats of `program` take too many steps, and whether turns were wanting.

    `tree` is the pattern without its bounds. What is as slow without them (`known`) is not told again.
    """
    counting = _Counting(program, manner, limits.turns)
    if program.tree is not None and repeats_nothing(program.tree):
        for chars in counting.matcher.alphabet.classes:
            counts = _Counts(counting, _Text((), (representative(chars),), (), program.is_bytes))
            if (counts.at(1) or 0) >= limits.bounded_steps:
                span = program.tree.span
                return SlowText(
                    *counts.text.pieces(), 1, ((1, counts.known[1]),), (span,), False, True
                ), False
    free = compile_node(tree, program.groups, program.is_bytes, limits)
    asked = _suspicions(free, manner, limits)
    if asked is None:
        return None, False
    for suspect in asked[0][:SUSPECTS]:
        if suspect.degree == 2 and suspect.by_restart:
            continue  # the text times the bound: never enough
        for prefix, pump, suffix, _ in _texts(suspect, *asked[1:]):
            counts = _Counts(counting, _Text(prefix, pump, suffix, program.is_bytes))
            n, _ = passes(counts.at, len(prefix) + len(suffix), len(pump), limits.bounded_steps)
            if n is None:
                continue
            growth = growth_below(counts.at, n)
            if growth == 1:
                continue
            if known is not None and not _worse(growth, known.growth):
                continue
            steps = tuple(sorted(counts.known.items()))
            return SlowText(
                *counts.text.pieces(), growth, steps, suspect.parts, suspect.by_restart, True
            ), False
        if counting.turns <= 0:
            break
    return None, counting.cut


def _enough(best: SlowText, most: int) -> bool:
    """Whether what is confirmed is as bad as any suspicion."""
    return best.growth == "exponential" or 1 < most <= best.growth


def _worse(a: Growth, b: Growth) -> bool:
    if b == "exponential":
        return False
    return a == "exponential" or a > b


def _confirm(
    suspect: Suspect, most: int, letters: Letters, continuations: Continuations, counting: _Counting
) -> tuple[bool, SlowText | None]:
    """Whether anything had to be counted, and the text that confirms a suspicion."""
    best: SlowText | None = None
    tried = alone = False
    slow: SlowText | None = None
    for prefix, pump, suffix, kind in _texts(suspect, letters, continuations):
        counts = _Counts(counting, _Text(prefix, pump, suffix, counting.is_bytes))
        if (kind == "guess" and not counts.promising()) or (kind == "again" and slow is not None):
            continue
        tried = True
        slow = counts.claim(suspect, most)
        if slow is not None:
            first = counting.manner != "scan" or counts.slow_at_once(slow.growth)
            if (
                best is None
                or _worse(slow.growth, best.growth)
                or (alone and slow.growth == best.growth and first)
            ):
                best, alone = slow, not first
        if counting.turns <= 0 or (best is not None and not alone and _enough(best, most)):
            break
    return tried, best


def _texts(
    suspect: Suspect, letters: Letters, continuations: Continuations
) -> Iterator[tuple[Codes, Codes, Codes, Literal["sure", "guess", "again"]]]:
    """Prefixes, pumps and suffixes that may show what is suspected, and what each is.

    "sure": it makes the engine walk all ways; "again": the one before with a longer pump, needed only where
    that showed nothing; "guess": not decided.
    """
    readings = 0
    for whole in _readings(suspect, letters):
        suffix = continuations.failing(suspect, suspect.prefix, whole)
        if suffix == "none":
            continue
        pump = _root(whole)
        prefix = suspect.prefix
        while prefix[-len(pump) :] == pump:
            prefix = prefix[: -len(pump)]
        if suffix == "unknown":
            yield from ((prefix, pump, guess, "guess") for guess in _guesses(pump, letters))
        else:
            yield prefix, pump, suffix, "sure"
            if pump != whole:  # the number of short pumps may matter
                yield suspect.prefix, whole, suffix, "again"
        readings += 1
        if readings >= READINGS:
            break


def _readings(suspect: Suspect, letters: Letters) -> Iterator[Codes]:
    """The pump in characters: the most readable, then others that may be treated better by what follows."""
    seen: set[Codes] = set()
    union = 0
    for mask in suspect.pump:
        union |= mask
    preferred = [0, *(1 << minterm for minterm in range(union.bit_length()) if union >> minterm & 1)]
    for prefer in preferred:
        pump = tuple(letters(mask, prefer) for mask in suspect.pump)
        if pump not in seen:
            seen.add(pump)
            yield pump
        if len(seen) >= VARIANTS:
            return


def _root(pump: Codes) -> Codes:
    """The shortest text of which `pump` is a power."""
    size = len(pump)
    for length in range(1, size):
        if size % length == 0 and pump == pump[:length] * (size // length):
            return pump[:length]
    return pump


def _guesses(pump: Codes, letters: Letters) -> list[Codes]:
    """Texts that may make the rest fail: nothing, and single characters."""
    codes = sorted(letters.letters, key=lambda code: (code in pump, not 32 < code < 127, code))
    return [(), *((code,) for code in codes)][:GUESSES]


@dataclass(frozen=True, slots=True)
class _Text:
    prefix: Codes
    pump: Codes
    suffix: Codes
    is_bytes: bool

    def pieces(self) -> tuple[str | bytes, str | bytes, str | bytes]:
        make = bytes if self.is_bytes else _string
        return make(self.prefix), make(self.pump), make(self.suffix)

    def at(self, n: int) -> str | bytes:
        codes = self.prefix + self.pump * n + self.suffix
        return bytes(codes) if self.is_bytes else _string(codes)


def _string(codes: Codes) -> str:
    return "".join(map(chr, codes))


class _Counting:
    """Counts the steps of one program in one manner while the turns last."""

    def __init__(self, program: p.Program, manner: Manner, turns: int) -> None:
        self.manner = manner
        self.turns = turns
        self.is_bytes = program.is_bytes
        self.may_multiply = False
        """The graph has two cycles on one text somewhere; without them what multiplies ends at a bound."""
        self.cut = False
        """A count was stopped by the limit on turns."""
        self.counter = Counter(program) if countable(program) else None
        self.most = turns // 3 if self.counter is not None else turns // 12
        """Turns of one count; the matcher, which walks every step, must leave some for other sizes."""
        self.matcher = Matcher(program) if self.counter is None else self.counter.matcher

    def steps(self, text: str | bytes, manner: str = "") -> int | None:
        turns = min(self.turns, self.most)
        manner = manner or self.manner
        if self.counter is not None:
            steps, left = self.counter.steps(text, manner, turns)
        elif manner == "scan":
            _, walked, left, finished = self.matcher.scan(text, turns)
            steps = walked if finished else None
        else:
            outcome = self.matcher.run(text, manner, turns)
            steps, left = outcome.steps if outcome.finished else None, outcome.turns_left
        self.turns -= turns - left
        self.cut |= steps is None
        return steps


class _Counts:
    """Steps on one text at growing n, remembered."""

    def __init__(self, counting: _Counting, text: _Text) -> None:
        self.counting, self.text = counting, text
        self.known: dict[int, int] = {}

    def at(self, n: int) -> int | None:
        if n not in self.known:
            steps = self.counting.steps(self.text.at(n))
            if steps is None:
                return None
            self.known[n] = steps
        return self.known[n]

    def promising(self) -> bool:
        few = self.at(SCREEN_SIZES[0])
        more = None if few is None else self.at(SCREEN_SIZES[1])
        return few is None or more is None or more > SCREEN_RATIO * few

    def slow_at_once(self, growth: Growth) -> bool:
        """Whether a single search is as slow as the scan, so that the text shows itself there too."""
        few, more = (self.counting.steps(self.text.at(n), "search") for n in (12, 24))
        if few is None or more is None:
            return True
        return more > few * 2 ** (growth - 0.6 if growth != "exponential" else 3)

    def claim(self, suspect: Suspect, most: int) -> SlowText | None:
        """What the counts show, if it is slow."""
        growth = fit(self.at, len(self.text.pump) >= LONG_PUMP)
        if growth is None or growth in (0, 1):
            return None
        if growth == "exponential":
            if not self.counting.may_multiply:
                return None
            self.known = {n: steps for n, steps in self.known.items() if steps <= SHOWN_STEPS}
            for n in (2, 4, 6, *range(8, 512, 4)):
                steps = self.at(n)
                if steps is None or (n > 6 and steps > SHOWN_STEPS // 2):
                    break
        else:
            growth = min(growth, most) if most else growth
            self.at((16 if len(self.text.pump) >= LONG_PUMP else 128) >> growth - 2)
        if max(self.known.values()) < LEAST_STEPS:
            return None
        counted = tuple(sorted(self.known.items()))
        return SlowText(*self.text.pieces(), growth, counted, suspect.parts, suspect.by_restart)
