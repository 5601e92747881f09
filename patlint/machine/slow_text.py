"""The text that shows a slow pattern: prefix + pump * n + suffix, confirmed by counting steps.

A suspicion from the graph of walks becomes a claim only when the steps, counted at growing n, are as many as the
claim says: for exponential growth each further pump must multiply them, for a power d they must lie on a
polynomial of that degree. `candidates` makes the texts; where it is decided that no suffix makes the engine go
back, the engine is never slow there, and nothing is counted. Where more is suspected than one pump shows, texts
of several pumps are counted too (`SlowText.more`).

A repeat with a bound is judged by what it can take in practice (`bounded`). If the steps lie on a power of the
text's length, that power is told; if they multiply until the bound is met, that is told, and that there is a bound.

Limit: `turns` of the counting for all suspicions of one question.
"""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass, replace
from typing import Literal, TypeAlias

from patlint.limits import LimitReached, Limits
from patlint.machine import program as p
from patlint.machine.alphabet import representative
from patlint.machine.ambiguity import EXPONENTIAL, Letters, Suspect, suspects
from patlint.machine.bounded import LONGEST, growth_below, opened, passes, repeats_nothing, stretched
from patlint.machine.candidates import Text, texts
from patlint.machine.continuation import Continuations
from patlint.machine.counting import Counter, countable
from patlint.machine.fit import Growth as Growth
from patlint.machine.fit import fit, settled
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_node
from patlint.machine.walks import cut_walks, walks
from patlint.syntax import tree as t

Manner: TypeAlias = Literal["match", "fullmatch", "search", "scan"]
"""A mode, or "scan" for findall, finditer, split and sub, which go on after each match."""

LEAST_STEPS = 1_000
"""Steps that the largest confirmed text must take, so that small noise is not fitted."""
LONG_PUMP = 8
"""From so many characters on a pump needs fewer repetitions to show its power."""
SCREEN_SIZES = (8, 24)
SCREEN_RATIO = 3.6
"""A guessed suffix must show more than three times the steps at three times the pumps before it is fitted."""
SUSPECTS = 8
SEVERAL = 4
"""Suspicions of several pumps of which something is counted."""
REFERENCES = "back-references"
"""What is undecided where back-references or conditionals let pass only some texts of a suspicion."""
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
    more: tuple[tuple[str | bytes, str | bytes], ...] = ()
    """Further pumps, each with the text that stands before it."""

    @property
    def fixed(self) -> int:
        """Characters that do not depend on n."""
        return len(self.prefix) + len(self.suffix) + sum(len(between) for between, _ in self.more)

    @property
    def period(self) -> int:
        """Characters that each further n brings."""
        return len(self.pump) + sum(len(pump) for _, pump in self.more)

    def text(self, n: int) -> str | bytes:
        text = self.prefix + self.pump * n  # type: ignore[operator]
        for between, pump in self.more:
            text += between + pump * n  # type: ignore[operator]
        return text + self.suffix  # type: ignore[operator]


@dataclass(frozen=True, slots=True)
class Ambiguity:
    """`growth` None means: no growth beyond linear was confirmed.

    `unconfirmed` counts suspicions that no text confirmed; `undecided` names the limit that cut the search
    short, or REFERENCES where a suspicion depends on what groups hold, so that None is then no proof, and a power
    the least one.
    """

    growth: Growth | None
    slow: SlowText | None
    unconfirmed: int = 0
    undecided: str | None = None


def ambiguity_of(program: p.Program, manner: Manner, limits: Limits) -> Ambiguity:
    """The worst confirmed growth of `program` (as the engine runs it) used in this manner."""
    power = 0
    try:
        found, power = _unbounded(program, manner, limits)
    except LimitReached as reached:
        found = Ambiguity(None, None, 0, reached.limit)
    if found.growth == "exponential" or program.tree is None:
        return found
    tree = opened(program.tree)
    if tree is program.tree:
        return found
    try:
        slow, cut = _bounded(program, tree, manner, limits, found.slow, power)
    except LimitReached as reached:
        return replace(found, undecided=found.undecided or reached.limit)
    if slow is None:
        return replace(found, undecided=found.undecided or ("turns" if cut and found.slow is None else None))
    return Ambiguity(slow.growth, slow, found.unconfirmed, None)


def _unbounded(program: p.Program, manner: Manner, limits: Limits) -> tuple[Ambiguity, int]:
    """What is confirmed of the program as it stands, and the power that its graph allows (0: any)."""
    undecided = None
    unconfirmed = fitted = 0
    best: SlowText | None = None
    asked = _suspicions(program, manner, limits)
    if asked is None:
        return Ambiguity(None, None), 1
    found, letters, continuations = asked
    single = [suspect for suspect in found if not suspect.more]
    most = max(suspect.degree for suspect in single)
    power = 0 if single[0].degree == EXPONENTIAL else max(suspect.degree for suspect in found)
    if not countable(program):
        power = 0  # a back-reference costs the length that it reads again, which no node of the graph shows
    counting = _Counting(program, manner, limits.turns, power)
    for suspect in single:
        if best is not None and _enough(best, suspect, most):
            break
        if fitted >= SUSPECTS or counting.turns <= 0:
            undecided = "turns"
            break
        tried, slow = _confirm(suspect, most, letters, continuations, counting)
        fitted += tried
        unconfirmed += tried and slow is None
        if slow is not None and (best is None or _worse(slow.growth, best.growth)):
            best = slow
    fitted = 0
    for suspect in found:
        if not suspect.more or (best is not None and not _worse(suspect.degree, best.growth)):
            continue
        if counting.turns <= 0:
            undecided = "turns"
        if fitted >= SEVERAL or counting.turns <= 0:
            break
        tried, slow = _confirm(suspect, suspect.degree, letters, continuations, counting)
        fitted += tried
        unconfirmed += tried and slow is None
        if slow is not None and (best is None or _worse(slow.growth, best.growth)):
            best = slow
    if counting.cut and best is None:
        undecided = "turns"
    if best is not None and _enough(best, found[0], max(suspect.degree for suspect in found)):
        undecided = None
    elif counting.counter is None:
        undecided = REFERENCES
    return Ambiguity(best.growth if best else None, best, unconfirmed, undecided), power


def _suspicions(
    program: p.Program, manner: Manner, limits: Limits
) -> tuple[list[Suspect], Letters, Continuations] | None:
    """What the graph of a program shows, or None where it shows nothing. Raises LimitReached."""
    nfa = Nfa(program, limits)
    graph = walks(nfa, manner in ("search", "scan"))
    found = list(suspects(nfa, graph)) if graph.cyclic else []
    if not found:
        return None
    if any(
        isinstance(op, p.Atomic) or (isinstance(op, p.Run) and op.kind == "possessive") for op in program.code
    ):
        with suppress(LimitReached):  # then the pumps of the greater graph must do
            found = _merged(list(suspects(nfa, cut_walks(nfa, graph.scan))), found)
    letters = Letters(nfa)
    return found, letters, Continuations(nfa, manner, letters)


def _merged(first: list[Suspect], second: list[Suspect]) -> list[Suspect]:
    """The suspicions of both, exponential ones in front and those of several pumps at the end."""
    both = [*first, *second]
    kinds = (
        [suspect for suspect in both if suspect.degree == EXPONENTIAL],
        [suspect for suspect in both if suspect.degree != EXPONENTIAL and not suspect.more],
        [suspect for suspect in both if suspect.more],
    )
    return [suspect for kind in kinds for suspect in kind]


def _bounded(
    program: p.Program, tree: t.Node, manner: Manner, limits: Limits, known: SlowText | None, power: int
) -> tuple[SlowText | None, bool]:
    """A text on which the bounded repeats of `program` take too many steps, and whether turns were wanting.

    `tree` is the pattern without its bounds. What is as slow without them (`known`) is not told again. `power`:
    what multiplies at first is a power in the end if it comes to this one.
    """
    counting = _Counting(program, manner, limits.turns)
    if program.tree is not None and repeats_nothing(program.tree):
        for chars in counting.matcher.alphabet.classes:
            counts = _Counts(counting, Text((), (representative(chars),), (), program.is_bytes))
            if (counts.at(1) or 0) >= limits.bounded_steps:
                return counts.claim_below(1, 1, (program.tree.span,), False, True), False
    free = compile_node(tree, program.groups, program.is_bytes, limits)
    asked = _suspicions(free, manner, limits)
    if asked is None:
        return None, False
    for suspect in [suspect for suspect in asked[0] if not suspect.more][:SUSPECTS]:
        if suspect.degree == 2 and suspect.by_restart:
            continue  # the text times the bound: never enough
        for text, kind in texts(suspect, asked[1], asked[2], program.is_bytes, anyway=True):
            if kind == "led":
                continue
            for longer in stretched(text, suspect, asked[1]):
                counts = _Counts(counting, longer)
                n, _ = passes(counts.at, longer.fixed, longer.period, limits.bounded_steps)
                growth: Growth = 1 if n is None else growth_below(counts.at, n)
                in_the_end = growth == "exponential" and power > 1 and settled(counts.at, power)
                if in_the_end:
                    growth = power
                if n is None or growth == 1 or (known is not None and not _worse(growth, known.growth)):
                    if counts.within_reach(limits.bounded_steps):
                        continue
                    break
                return counts.claim_below(n, growth, suspect.parts, suspect.by_restart, not in_the_end), False
        if counting.turns <= 0:
            break
    return None, counting.cut


def _enough(best: SlowText, suspect: Suspect, most: int) -> bool:
    """Whether what is confirmed is as bad as this suspicion and all those after it."""
    if best.growth == "exponential" or suspect.degree == EXPONENTIAL:
        return best.growth == "exponential"
    return 1 < most <= best.growth


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
    for text, kind in texts(suspect, letters, continuations, counting.is_bytes):
        counts = _Counts(counting, text)
        known = slow if kind == "again" else best if kind == "led" else None
        if known is not None or (kind in ("guess", "led") and not counts.promising()):
            continue
        tried = True
        slow = counts.claim(suspect, None if best is None or alone else best.growth)
        if slow is not None and text.more:
            slow = _fewer_pumps(suspect, slow, text, counting)
        if slow is not None:
            first = counting.manner != "scan" or counts.slow_at_once(slow.growth)
            if (
                best is None
                or _worse(slow.growth, best.growth)
                or (alone and slow.growth == best.growth and first)
            ):
                best, alone = slow, not first
        if counting.turns <= 0 or (best is not None and not alone and _enough(best, suspect, most)):
            break
    return tried, best


def _fewer_pumps(suspect: Suspect, slow: SlowText, text: Text, counting: _Counting) -> SlowText:
    """The same growth from as few pumps as will do."""
    place = 0
    while place <= len(text.more):
        shorter = text.without(place)
        found = None if shorter is None else _Counts(counting, shorter).claim(suspect, None)
        if shorter is not None and found is not None and not _worse(slow.growth, found.growth):
            slow, text = found, shorter
        else:
            place += 1
    return slow


class _Counting:
    """Counts the steps of one program in one manner while the turns last."""

    def __init__(self, program: p.Program, manner: Manner, turns: int, power: int = 0) -> None:
        self.manner = manner
        self.power = power
        """The highest that the graph allows; 0: it has two cycles on one text somewhere, anything may come."""
        self.turns = turns
        self.is_bytes = program.is_bytes
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

    def __init__(self, counting: _Counting, text: Text) -> None:
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

    def claim(self, suspect: Suspect, above: Growth | None) -> SlowText | None:
        """What the counts show, if it is slow, and slower than `above`."""
        power = self.counting.power
        long_pump = self.text.period >= LONG_PUMP
        growth = fit(self.at, long_pump, suspect.degree, power == 0)
        if growth is None or growth in (0, 1):
            return None
        if growth != "exponential" and power:
            growth = min(growth, power)
        if above is not None and not _worse(growth, above):
            return None
        if growth == "exponential":
            self.known = {n: steps for n, steps in self.known.items() if steps <= SHOWN_STEPS}
            for n in (2, 4, 6, *range(8, 512, 4)):
                steps = self.at(n)
                if steps is None or (n > 6 and steps > SHOWN_STEPS // 2):
                    break
        else:
            self.at(max((16 if long_pump else 128) >> growth - 2, 4))
        if max(self.known.values()) < LEAST_STEPS:
            return None
        return self.told(growth, suspect.parts, suspect.by_restart, False)

    def claim_below(
        self, n: int, growth: Growth, parts: tuple[t.Span, ...], by_restart: bool, bounded: bool
    ) -> SlowText:
        """What is seen up to n pumps, where the steps are too many already."""
        self.known = {size: steps for size, steps in self.known.items() if size <= n}
        return self.told(growth, parts, by_restart, bounded)

    def told(self, growth: Growth, parts: tuple[t.Span, ...], by_restart: bool, bounded: bool) -> SlowText:
        text = self.text
        return SlowText(
            text.piece(text.prefix),
            text.piece(text.pump),
            text.piece(text.suffix),
            growth,
            tuple(sorted(self.known.items())),
            parts,
            by_restart,
            bounded,
            tuple((text.piece(between), text.piece(pump)) for between, pump in text.more),
        )

    def within_reach(self, threshold: int) -> bool:
        """Whether longer pumps, up to the longest text, might take as many steps as the threshold."""
        return any(
            steps * LONGEST >= threshold * (self.text.fixed + n * self.text.period)
            for n, steps in self.known.items()
        )
