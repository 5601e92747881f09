"""What both ambiguity rules share: the uses they judge, figures in plain words, and a proven way out."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from math import ceil, exp, inf, log

from patlint.limits import LimitReached
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Ambiguity, Growth, Manner, SlowText, ambiguity_of
from patlint.rewrite.proof import holds
from patlint.rules.finding import Keeps, SlowWitness, Suggestion
from patlint.rules.subject import Subject, manner_of
from patlint.source.sites import Mode, Use
from patlint.syntax import tree as t
from patlint.syntax.parser import PatternError, parse

LONG = 10_000
"""Length of the text for which a polynomial's steps are told, in characters."""
CANDIDATES = 4
"""Repeats that are tried as possessive ones."""
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
    return SlowWitness(
        slow.prefix, slow.pump, slow.suffix, slow.growth, slow.steps, slow.more, slow.bounded
    )


def mode_name(manner: Manner) -> str:
    return "search" if manner == "scan" else manner


def figures(slow: SlowText) -> str:
    """How many steps a text of a telling length takes, reckoned from the counted ones."""
    n, steps = slow.steps[-1]
    if slow.bounded:
        length = slow.fixed + n * slow.period
        characters = f"{length:,} characters" if length != 1 else "one character"
        return f"a text of {characters} takes {in_words(steps)} steps"
    if slow.growth == "exponential":
        m, fewer = slow.steps[max(len(slow.steps) - 4, 0)]
        base = log(steps / fewer) / (n - m)
        wanted = max(n + ceil((log(ENDLESS) - log(steps)) / base), n)
        count = exp(log(steps) + base * (wanted - n))
    else:
        wanted = max((LONG - slow.fixed) // slow.period, n)
        count = steps * (wanted / n) ** slow.growth
    return f"a text of {slow.fixed + wanted * slow.period:,} characters takes {in_words(count)} steps"


def evidence(slow: SlowText) -> str:
    """What competes for the pump, and how many steps that makes."""
    pumps = dict.fromkeys(ascii(pump) for pump in (slow.pump, *(pump for _, pump in slow.more)))
    shown = " and ".join(pumps) if sum(map(len, pumps)) < 30 else "the repeated text"
    ways = f"both can take {shown}" if len(slow.parts) == 2 else f"{shown} can be taken in more than one way"
    if len(pumps) > 1:
        ways = f"{shown} can each be taken in more than one way"
    return f"{ways}; {figures(slow)}"


def grows(slow: SlowText) -> str:
    """The message of a finding that is not of one line."""
    if slow.growth == "exponential":
        said = "matching time can multiply with every repetition of a piece of text"
    elif slow.growth == 1:
        said = "matching time can be endless on any text"
    else:
        power = {2: "square", 3: "cube"}.get(slow.growth, f"{slow.growth}th power")
        said = f"matching time can grow with the {power} of the text's length"
    return f"{said}, up to a bound that is out of reach" if slow.bounded and slow.growth != 1 else said


def possessive(subject: Subject, use: Use | None, manner: Manner, slow: SlowText) -> Suggestion | None:
    """The pattern with one repeat made possessive, where that is proven to do the same, and less slowly.

    The target must have possessive repeats (3.11), and the program must not look at groups.
    """
    if (
        (subject.target or sys.version_info[:2]) < (3, 11)
        or use is None
        or use.looks_at in ("groups", "unknown")
    ):
        return None
    keeps: Keeps = "language" if use.looks_at == "truth" and manner != "scan" else "spans"
    mode: Mode = "search" if manner == "scan" else manner
    text = subject.site.pattern
    tried = 0
    for node in t.walk(subject.pattern.root):
        if not isinstance(node, t.Repeat) or node.kind != "greedy" or tried >= CANDIDATES:
            continue
        if not any(node.span[0] <= start and end <= node.span[1] for start, end in slow.parts):
            continue
        place = node.span[1]
        plus = b"+" if isinstance(text, bytes) else "+"
        changed = text[:place] + plus + text[place:]  # type: ignore[operator]
        tried += 1
        try:
            new = parse(changed, subject.site.flags, subject.target, subject.limits)
            program = compile_tree(new, subject.limits)
            if holds(subject.pattern, new, [mode], keeps, subject.limits):
                after = ambiguity_of(program, manner, subject.limits)
                if after.undecided is None and degree(after.growth) < degree(slow.growth):
                    return Suggestion(changed, keeps)
        except (PatternError, LimitReached):
            continue
    return None


def degree(growth: Growth | None) -> float:
    return inf if growth == "exponential" else growth or 1


def way_out(
    suggestion: Suggestion | None, manner: Manner, slow: SlowText, subject: Subject, advice: str
) -> str:
    """The suggestion's effect in words, or else the advice."""
    if suggestion is None:
        return advice
    program = compile_tree(
        parse(suggestion.pattern, subject.site.flags, subject.target, subject.limits), subject.limits
    )
    now = ambiguity_of(program, manner, subject.limits).growth
    words = {1: "in line with the length", 2: "with its square", 3: "with its cube"}
    return f"the possessive form matches the same, and its time grows {words.get(int(degree(now)), 'less')}"


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
