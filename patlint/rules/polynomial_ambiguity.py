"""polynomial-ambiguity: matching time can grow with a power of the text's length."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.machine.slow_text import Manner, SlowText
from patlint.rules.finding import Example, Finding, Level, Rule
from patlint.rules.growth import ENDLESS, LONG, at_length, figures, judged, mode_name, told, witness_of
from patlint.rules.subject import Subject
from patlint.source.sites import Use


def check(subject: Subject) -> Iterator[Finding]:
    worst: tuple[Manner, Use | None, SlowText] | None = None
    degree = 1
    for manner, use, ambiguity in judged(subject):
        slow = ambiguity.slow
        if use is not None and use.own:
            continue  # messages are short, and nobody hostile writes them
        if slow is None or slow.growth == "exponential" or slow.growth <= degree - slow.bounded:
            continue
        degree = slow.growth
        worst = manner, use, slow
    if worst is not None:
        yield (
            _restarting(subject, *worst) if degree == 2 and worst[2].by_restart else _finding(subject, *worst)
        )


def _restarting(subject: Subject, manner: Manner, use: Use | None, slow: SlowText) -> Finding:
    """A square that comes from the search's beginning afresh alone."""
    span, *others = slow.parts or [(0, len(subject.site.pattern))]
    return Finding(
        RULE.name,
        "note",
        span,
        f"the search begins afresh at every place, so time can grow with the square: {figures(slow)}",
        mode=mode_name(manner),
        witness=witness_of(slow),
        way_out="bound the repeat, or anchor the beginning: match or ^ where that is meant",
        marks=tuple(others),
        brief=True,
    )


def _finding(subject: Subject, manner: Manner, use: Use | None, slow: SlowText) -> Finding:
    level: Level = RULE.level
    small = not slow.bounded and (slow.growth == 2 or at_length(slow, LONG)[1] < ENDLESS)
    if small or (use is not None and use.bounded is not None):
        level = "note"
    return told(RULE.name, level, subject, manner, slow, small)


RULE = Rule(
    name="polynomial-ambiguity",
    level="warning",
    summary="time can grow with a power of the length",
    page="""\
Two repeats in a row that can take the same characters (`.*.*=`) are tried
with every boundary between them if the rest fails: time grows with the square
of the text's length, with three of them with the cube. A search adds a power,
since it begins afresh at every character: `\\s+$` takes quadratic time on a
long run of blanks even though match with it is linear.

A note where the growth is a square, or where a text of ten thousand
characters takes less than a thousand million steps (a long piece of text has
to be repeated): it matters only for texts of that length. Where no better
pattern is known, and where only the beginning afresh makes it a square, such
notes have one line a file; `--verbose` shows the texts. A warning from the
cube on.

The finding gives a text: prefix, pump (to be repeated) and suffix. It was
confirmed by counting the steps of a matcher that walks as the engine does.
""",
    wrong=Example(
        'import re\n\n\ndef has_total(line):\n    return re.search(r"\\d*,?\\d*,?\\d*;", line) is not None\n',
        "three repeats can share one run of digits, and the search adds one power",
    ),
    right=Example(
        'import re\n\n\ndef has_total(line):\n    return re.match(r"\\d+(?:,\\d+){0,2};", line) is not None\n'
    ),
    check=check,
)
