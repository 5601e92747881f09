"""The text that shows a slow pattern: prefix + pump * n + suffix, confirmed by counting steps.

A suspicion from the graph of walks becomes a claim only when the matcher, run at growing n, walks as many steps
as the claim says: for exponential growth each further pump must multiply them, for a power d each doubling must
come near 2 ** d. The suffix makes the rest fail: first a shortest text after which the pattern's automaton
refuses, then single characters (the attempt that is walked in vain need not be the whole match).

Limit: `turns` of the matcher for each confirmation.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal, TypeAlias

from patlint.limits import LimitReached, Limits
from patlint.machine import program as p
from patlint.machine.alphabet import representative
from patlint.machine.ambiguity import EXPONENTIAL, Suspect, suspects
from patlint.machine.determinise import Mode, language
from patlint.machine.dfa import Dfa
from patlint.machine.matcher import NEVER, Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.walks import walks

Growth: TypeAlias = int | Literal["exponential"]
Manner: TypeAlias = Literal["match", "fullmatch", "search", "scan"]
"""A mode, or "scan" for findall, finditer, split and sub, which go on after each match."""

Codes = tuple[int, ...]

LEAST_BASE = 1.08
"""Growth per pump from which it counts as exponential; `(?:aa|aaa)*` on single a has 1.15 a pair."""
LEAST_STEPS = 2_000
"""Steps that the largest confirmed text must take, so that small noise is not fitted."""
SUFFIXES = 5
LONG_PUMP = 8
"""From so many characters on a pump needs fewer repetitions to show its power."""
SCREEN_SIZES = (8, 24)
SCREEN_TURNS = 3_000
SCREEN_RATIO = 3.6
"""A first look at each suffix: three times the pumps must take more than three times the steps. Only the two
texts on which most is walked are run at length."""
SUSPECTS = 6


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
    undecided = None
    tried = confirmed = 0
    budget = [limits.turns * 2]
    best: SlowText | None = None
    try:
        nfa = Nfa(program, limits)
        graph = walks(nfa, manner in ("search", "scan"))
        if not graph.cyclic:
            return Ambiguity(None, None)
        found = list(suspects(nfa, graph))
        most = max((suspect.degree for suspect in found), default=0)
        matcher = Matcher(program) if found else None
        dfa = _language(nfa, manner) if found else None
        for suspect in found:
            if best is not None and (best.growth == "exponential" or suspect.degree == most <= best.growth):
                break
            if tried >= SUSPECTS or budget[0] <= 0:
                undecided = "turns"
                break
            tried += 1
            assert matcher is not None
            slow, cut = _confirm(suspect, most, nfa, matcher, dfa, manner, limits, budget)
            if cut and slow is None:
                undecided = "turns"
            confirmed += slow is not None
            if slow is not None and (best is None or _worse(slow, best)):
                best = slow
    except LimitReached as reached:
        undecided = reached.limit
    return Ambiguity(best.growth if best else None, best, tried - confirmed, undecided)


def _worse(a: SlowText, b: SlowText) -> bool:
    if b.growth == "exponential":
        return False
    return a.growth == "exponential" or a.growth > b.growth


def _language(nfa: Nfa, manner: Manner) -> Dfa | None:
    mode: Mode = "search" if manner == "scan" else manner
    try:
        return language(nfa, mode)
    except LimitReached:
        return None


def _suffixes(suspect: Suspect, nfa: Nfa, dfa: Dfa | None, manner: Manner) -> Iterator[Codes]:
    """Texts to put behind the pumps, the most promising first, each once."""
    tried: set[Codes] = set()
    if dfa is not None:
        refused = _refused(suspect, dfa)
        if refused is not None:
            tried.add(refused)
            yield refused
    if () not in tried:
        tried.add(())
        yield ()
    letters = [representative(chars) for chars in nfa.alphabet.classes]
    letters.sort(key=lambda code: (code in suspect.pump, not 32 < code < 127, code))
    for code in letters:
        if (code,) not in tried:
            tried.add((code,))
            yield (code,)


def _refused(suspect: Suspect, dfa: Dfa) -> Codes | None:
    """A shortest suffix with which the automaton refuses the text at many pumps."""
    state = 0
    classify = dfa.alphabet.classify
    for code in suspect.prefix + suspect.pump * (len(dfa) + 2 if len(dfa) < 50 else 52):
        state = dfa.table[state][classify(code)]
    seen: dict[int, Codes] = {state: ()}
    letters = sorted(
        ((representative(chars), minterm) for minterm, chars in enumerate(dfa.alphabet.classes)),
        key=lambda pair: (pair[0] in suspect.pump, not 32 < pair[0] < 127, pair[0]),
    )
    order = [state]
    for state in order:
        if not dfa.accepting[state]:
            return seen[state]
        for letter, minterm in letters:
            target = dfa.table[state][minterm]
            if target not in seen:
                seen[target] = (*seen[state], letter)
                order.append(target)
    return None


def _confirm(
    suspect: Suspect,
    most: int,
    nfa: Nfa,
    matcher: Matcher,
    dfa: Dfa | None,
    manner: Manner,
    limits: Limits,
    budget: list[int],
) -> tuple[SlowText | None, bool]:
    """The text that confirms a suspicion, and whether the limit on turns cut the search for it short."""
    pump = _root(suspect.pump)
    prefix = suspect.prefix
    while prefix[-len(pump) :] == pump:
        prefix = prefix[: -len(pump)]
    candidates: list[tuple[int, int, _Counts]] = []
    for order, suffix in enumerate(_suffixes(suspect, nfa, dfa, manner)):
        if order >= SUFFIXES or budget[0] <= 0:
            break
        text = _Text(prefix, pump, suffix, nfa.program.is_bytes)
        counts = _Counts(matcher, manner, text, budget)
        few, more = (counts.at(n, SCREEN_TURNS) for n in SCREEN_SIZES)
        if few is not None and more is not None and more < SCREEN_RATIO * few:
            continue
        walked = NEVER if few is None or more is None else more
        candidates.append((-walked.bit_length(), order, counts))
        if walked == NEVER or order == 0:
            break  # nothing promises more than a text that is refused at great cost
    best: SlowText | None = None
    cut = budget[0] <= 0
    for _, _, counts in sorted(candidates, key=lambda row: row[:2])[:2]:
        growth = (
            _exponential(counts, limits.turns // 3)
            if suspect.degree == EXPONENTIAL
            else _power(counts, limits.turns, most)
        )
        if growth is None:
            cut |= counts.cut
            continue
        slow = SlowText(
            *counts.text.pieces(),
            growth,
            tuple(sorted(counts.known.items())),
            suspect.parts,
            suspect.by_restart,
        )
        if best is None or _worse(slow, best):
            best = slow
        if growth == "exponential" or growth >= most:
            break
    return best, cut


def _root(pump: Codes) -> Codes:
    """The shortest text of which `pump` is a power."""
    size = len(pump)
    for length in range(1, size):
        if size % length == 0 and pump == pump[:length] * (size // length):
            return pump[:length]
    return pump


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


class _Counts:
    """Steps at growing n, remembered; None where the limit on turns was met (then that many were walked)."""

    def __init__(self, matcher: Matcher, manner: Manner, text: _Text, budget: list[int]) -> None:
        self.matcher, self.manner, self.text, self.budget = matcher, manner, text, budget
        self.known: dict[int, int] = {}
        self.cut = False
        """A run at length was stopped by the limit on turns."""

    def at(self, n: int, turns: int) -> int | None:
        if n in self.known:
            return self.known[n]
        text = self.text.at(n)
        turns = min(turns, self.budget[0])
        if self.manner == "scan":
            _, steps, left, finished = self.matcher.scan(text, turns)
        else:
            outcome = self.matcher.run(text, self.manner, turns)
            steps, left, finished = outcome.steps, outcome.turns_left, outcome.finished
        self.budget[0] -= turns - left
        if finished:
            self.known[n] = steps
            return steps
        self.cut |= turns > SCREEN_TURNS or self.budget[0] <= 0
        return None


def _exponential(counts: _Counts, turns: int) -> Growth | None:
    """Each further pump must multiply the steps, and go on doing so."""
    sizes = [*range(1, 24), *range(26, 60, 3), *range(64, 128, 8)]
    ratios: list[float] = []
    n = last = 0
    for size in sizes:
        now = counts.at(size, turns)
        if now is None:
            break
        if last:
            ratios.append((now / last) ** (1 / (size - n)))
        n, last = size, now
        if n > 40 and max(ratios[-3:]) < LEAST_BASE:
            return None
    if last < LEAST_STEPS:
        return None
    if len(ratios) < 4:
        # A great base leaves few sizes within the turns; a power's second ratio is at most 3/4 of its first.
        steep = len(ratios) >= 2 and min(ratios[-2:]) > 3 and ratios[-1] > 0.9 * ratios[-2]
        return "exponential" if steep else None
    # A power n ** d has ratios that sink towards 1 as (1 + 1 / n) ** d; those of a base do not sink.
    # Over six sizes where there are enough, since texts of period 2 or 3 grow by fits and starts.
    window = 6 if len(ratios) >= 12 else 3
    half = (len(ratios) + window) // 2
    late = math.prod(ratios[-window:]) ** (1 / window)
    early = math.prod(ratios[half - window : half]) ** (1 / window)
    grows = late > LEAST_BASE and late > 0.8 * early and late > (1 + 1 / n) ** 5
    return "exponential" if grows else None


def _power(counts: _Counts, turns: int, most: int) -> Growth | None:
    """The power in n that doubling n shows, at most `most`; None below a square."""
    short = len(counts.text.pump) < LONG_PUMP
    n, enough = (16, 64) if short else (4, 16)
    last = counts.at(n, turns)
    slope = 0.0
    while last is not None and n < 512:
        now = counts.at(2 * n, turns)
        if now is None:
            break
        slope = math.log2(now / last) if last else 0.0
        n, last = 2 * n, now
        if n >= enough and abs(slope - round(slope)) < 0.3 and n * slope >= enough * most / 2:
            break
    if last is None or last < LEAST_STEPS:
        return None
    degree = math.floor(slope + 0.3) if n >= enough else _difference_order(counts, turns)
    return min(degree, most) if degree >= 2 else None


def _difference_order(counts: _Counts, turns: int) -> int:
    """The degree of the polynomial on which counts at small equal distances lie, 0 where there is none."""
    values: list[int] = []
    for n in range(2, 2 + 2 * 8, 2):
        steps = counts.at(n, turns)
        if steps is None:
            break
        values.append(steps)
    degree = 0
    while len(values) > 1 and any(values):
        values = [b - a for a, b in zip(values, values[1:], strict=False)]
        degree += 1
        if len(set(values)) == 1:
            return degree if values[0] and len(values) > 1 else 0
    return 0
