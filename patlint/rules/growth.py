"""What both ambiguity rules share: the uses they judge, and figures in plain words."""

from __future__ import annotations

from collections.abc import Iterator
from math import ceil, exp, log

from patlint.machine.slow_text import Ambiguity, Manner, SlowText
from patlint.rules.finding import SlowWitness
from patlint.rules.subject import Subject, manner_of
from patlint.source.sites import Use

LONG = 10_000
"""Length of the text for which a polynomial's steps are told, in characters."""
ENDLESS = 1e9
"""Steps for which an exponential's text is sought: some seconds, and twice as long with every further pump."""


def judged(subject: Subject) -> Iterator[tuple[Manner, Use | None, Ambiguity]]:
    """Each manner in which the pattern is seen to be used, once, with its ambiguity.

    Where no use is seen, `match`: what is slow there is slow in search and fullmatch too.
    """
    seen: set[Manner] = set()
    for use in sorted(subject.uses, key=lambda use: use.bounded is not None):
        manner = manner_of(use)
        if manner not in seen:
            seen.add(manner)
            yield manner, use, subject.ambiguity(manner)
    if not seen:
        yield "match", None, subject.ambiguity("match")


def witness_of(slow: SlowText) -> SlowWitness:
    return SlowWitness(slow.prefix, slow.pump, slow.suffix, slow.growth, slow.steps)


def mode_name(manner: Manner) -> str:
    return "search" if manner == "scan" else manner


def figures(slow: SlowText) -> str:
    """How many steps a text of a telling length takes, reckoned from the counted ones."""
    n, steps = slow.steps[-1]
    size = len(slow.prefix) + len(slow.suffix)
    if slow.growth == "exponential":
        m, fewer = slow.steps[max(len(slow.steps) - 4, 0)]
        base = log(steps / fewer) / (n - m)
        wanted = max(n + ceil((log(ENDLESS) - log(steps)) / base), n)
        count = exp(log(steps) + base * (wanted - n))
    else:
        wanted = max((LONG - size) // len(slow.pump), n)
        count = steps * (wanted / n) ** slow.growth
    return f"a text of {size + wanted * len(slow.pump):,} characters takes {in_words(count)} steps"


def in_words(count: float) -> str:
    """A large number as one would say it."""
    for size, word in (
        (1e15, "million million"),
        (1e12, "million million"),
        (1e9, "thousand million"),
        (1e6, "million"),
    ):
        if count >= size:
            if size == 1e15:
                return "over a thousand million million"
            return f"about {count / size:,.0f} {word}"
    return f"about {count:,.0f}"
