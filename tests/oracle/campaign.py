"""A run of the oracle: patterns are drawn, compared in every respect, and counted, until enough is done."""

from __future__ import annotations

import random
import re
import time
from collections.abc import Callable
from dataclasses import dataclass

from patlint.limits import LimitReached
from tests.oracle import compare, pairs
from tests.oracle.compare import Mismatch, Subject, Tally
from tests.oracle.patterns import Drawn, Maker
from tests.oracle.shrink import shrunk
from tests.oracle.worlds import World, borders, fixed_world, local_world, members, world_of

DAMAGED = 2
"""Damaged copies of each pattern that are only parsed."""
GROUP_TEXTS = 8
SCAN_TEXTS = 30
SCAN_EVERY = 4
"""Patterns to each one whose span automata are built in every context."""
PROBES = ("aaaaa", "bbbbb", "ababa", "ab\nab", "\n\n\n\n", "kKkKk")
MORE_PROBES = (
    "aaaab",
    "bbbba",
    "\n\n\na",
    "aaaa\n",
    "bbbb\n",
    "abab\n",
    "baba\n",
    "aabba",
    "abbb ",
    "kkkkA",
    "aaaa_",
)
"""For patterns with `MANY` repeats without end: those that walk far often do so only where they fail."""
MANY = 3
UNBOUNDED = re.compile(r"[*+]|,\}")
SMALL = 40
"""Texts that are left to a pattern on which the matcher walks far."""


@dataclass(frozen=True, slots=True)
class Plan:
    """Stop after `trials`, `seconds` (0: no end) or `most` mismatches; `only` names constructs."""

    seed: int = 0
    trials: int = 200_000
    seconds: float = 0.0
    only: frozenset[str] = frozenset()
    files: int = 60
    most: int = 5
    raw: bool = False
    """Leave mismatches as they were found."""


def run(plan: Plan, found: Callable[[Mismatch], None] = lambda mismatch: None) -> Tally:
    """Carry out `plan`; `found` is called with each mismatch, made small."""
    tally = Tally()
    maker = Maker(plan.seed, plan.only, plan.files)
    generator = random.Random(plan.seed + 1)
    deadline = time.monotonic() + plan.seconds if plan.seconds else None
    last: Subject | None = None
    last_world: World | None = None
    while tally.trials < plan.trials and len(tally.mismatches) < plan.most:
        if deadline is not None and time.monotonic() > deadline:
            break
        drawn = maker.draw()
        tally.patterns += 1
        world = None
        subject = neighbour = None
        wrong: list[Mismatch] = []
        try:
            for _ in range(DAMAGED):
                damaged = maker.damaged(drawn.pattern)
                wrong += compare.compare_parse(
                    damaged, drawn.flags, compare.asked(damaged, drawn.flags), tally
                )[1]
            right = compare.asked(drawn.pattern, drawn.flags)
            tree, refused = compare.compare_parse(drawn.pattern, drawn.flags, right, tally)
            wrong += refused
            if tree is None or not isinstance(right, re.Pattern):
                tally.refused += 1
            else:
                world = _world(drawn, last, last_world, generator)
                subject = compare.subject_of(drawn.pattern, drawn.flags, right, tree)
                neighbour = last if last_world is world else None
                wrong += _compared(subject, world, neighbour, generator, tally)
        except LimitReached as reached:
            tally.limits[reached.limit] += 1
        except Exception as fault:  # whatever it is, it is a mismatch
            text = next((text for text in world.texts if len(text) == 2), None) if world else None
            other = neighbour.pattern if neighbour else None
            wrong.append(Mismatch("crash", drawn.pattern, drawn.flags, text, None, repr(fault), other))
        for mismatch in {each.kind: each for each in reversed(wrong)}.values():  # the first of each kind
            small = mismatch if plan.raw else shrunk(mismatch)
            tally.mismatches.append(small)
            found(small)
        if subject is not None and "match" in subject.truths:
            last, last_world = subject, world
    return tally


def _world(drawn: Drawn, last: Subject | None, last_world: World | None, generator: random.Random) -> World:
    if drawn.world != "local":
        return fixed_world(drawn.world)
    same = last is not None and last_world is not None and type(last.pattern) is type(drawn.pattern)
    if same and generator.random() < 0.5:
        assert last_world is not None
        return last_world  # so that pairs of real patterns are compared
    return local_world(drawn.pattern, generator)


def _compared(
    subject: Subject, world: World, last: Subject | None, generator: random.Random, tally: Tally
) -> list[Mismatch]:
    is_bytes = isinstance(subject.pattern, bytes)
    tally.compared += 1
    tally.exact += subject.exact
    tally.inexact.update({reason for reason, _ in subject.nfa.inexact})
    plain = subject.pattern.decode("latin-1") if isinstance(subject.pattern, bytes) else subject.pattern
    probes = PROBES + MORE_PROBES if len(UNBOUNDED.findall(plain)) >= MANY else PROBES
    wide = all(compare.finishes(subject, probe.encode() if is_bytes else probe) for probe in probes)
    wide = wide and compare.finishes(subject, world.texts[-1])
    if not wide:
        tally.limits["turns"] += 1
        last = None
        world = world_of(world.texts[:SMALL], is_bytes)
    wrong = compare.compare_languages(subject, world, tally)
    wrong += compare.compare_spans(subject, world, tally)
    tally.trials += len(world)
    pick = generator.sample(world.texts, min(GROUP_TEXTS, len(world)))
    wrong += compare.compare_groups(subject, pick, tally)
    if last is not None:
        wrong += pairs.compare_pair(last, subject, world, tally)
        if last.flags == subject.flags and generator.random() < 0.6:
            some = generator.sample(world.texts, min(SCAN_TEXTS, len(world)))
            wrong += pairs.compare_alike(last, subject, some, tally)
    if wide:
        wrong += _beyond(subject, generator, tally, is_bytes)
    else:
        subject.truths = {}  # they are not those of the whole world: no pair can be made of them
    return wrong


def _beyond(subject: Subject, generator: random.Random, tally: Tally, is_bytes: bool) -> list[Mismatch]:
    """Members of the languages, near misses and the borders of classes."""
    texts = []
    for mode, number in (("fullmatch", 5), ("search", 3)):
        if mode in subject.languages:
            texts += members(subject.languages[mode].dfa, is_bytes, generator, number)
    texts = [text for text in dict.fromkeys(texts) if len(text) <= 5 or compare.finishes(subject, text)]
    known = next(iter(subject.languages.values()), None)
    single = borders(known.dfa, is_bytes, generator, 24) if known is not None else []
    own = world_of((*texts, *single), is_bytes)
    truths = dict(subject.truths)
    wrong = compare.compare_languages(subject, own, tally)
    wrong += compare.compare_spans(subject, own, tally)
    subject.truths = truths
    tally.trials += len(own)
    wrong += compare.compare_groups(subject, texts[:GROUP_TEXTS], tally)
    if generator.random() * SCAN_EVERY < 1:
        short = [text for text in own.texts if len(text) <= 10]
        wrong += compare.compare_scan(subject, generator.sample(short, min(SCAN_TEXTS, len(short))), tally)
    return wrong
