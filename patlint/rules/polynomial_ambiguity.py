"""polynomial-ambiguity: matching time can grow with a power of the text's length."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Level, Rule
from patlint.rules.growth import evidence, figures, grows, judged, mode_name, possessive, way_out, witness_of
from patlint.rules.subject import Subject


def check(subject: Subject) -> Iterator[Finding]:
    worst: Finding | None = None
    degree = 1
    for manner, use, ambiguity in judged(subject):
        slow = ambiguity.slow
        if slow is None or slow.growth == "exponential" or slow.growth <= degree - slow.bounded:
            continue
        degree = slow.growth
        restart = slow.by_restart and degree == 2
        level: Level = RULE.level
        if restart or (degree == 2 and not slow.bounded) or (use is not None and use.bounded is not None):
            level = "note"
        better = None if restart else possessive(subject, use, manner, slow)
        advice = "let the repeats take different characters, or put between them what only one can take"
        span, *others = slow.parts or [(0, len(subject.site.pattern))]
        worst = Finding(
            RULE.name,
            level,
            span,
            f"the search begins afresh at every place, so time can grow with the square: {figures(slow)}"
            if restart
            else grows(slow),
            mode=mode_name(manner),
            witness=witness_of(slow),
            evidence="" if restart else evidence(slow),
            proof="counted by a matcher that walks as the engine does",
            way_out="bound the repeat, or anchor the beginning: match or ^ where that is meant"
            if restart
            else way_out(better, manner, slow, subject, advice),
            suggestion=better,
            marks=tuple(others),
            brief=restart,
        )
    if worst is not None:
        yield worst


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

A note where the growth is a square: it matters only for texts of
ten thousand characters and more. Where only the beginning afresh makes it a
square, the note has one line; `--verbose` shows the text. A warning from the
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
