"""exponential-ambiguity: matching time can multiply with every repetition of a piece of text."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Level, Rule
from patlint.rules.growth import judged, told
from patlint.rules.subject import Subject


def check(subject: Subject) -> Iterator[Finding]:
    for manner, use, ambiguity in judged(subject):
        slow = ambiguity.slow
        if slow is None or slow.growth != "exponential":
            continue
        harmless = use is not None and (use.bounded is not None or use.own)
        level: Level = "note" if harmless else RULE.level
        yield told(RULE.name, level, subject, manner, slow)
        return


RULE = Rule(
    name="exponential-ambiguity",
    level="error",
    summary="time can multiply with every repetition",
    page="""\
The engine of re tries one way through the pattern after the other and
remembers nothing. Where a repeated piece of text can be taken in two ways,
n pieces can be taken in 2 to the n ways, and if the rest then fails, all of
them are tried: thirty characters can hold a program for minutes, and no other
thread runs meanwhile.

The finding gives a text: prefix, pump (to be repeated) and suffix. It was
confirmed by counting the steps of a matcher that walks as the engine does.

Way out: make each piece of text readable in one way only. Nested repeats
(`(a+)+`) are mostly one repeat too many; overlapping branches (`\\w|\\d`) can
be told apart or merged. From Python 3.11 on an atomic group `(?>...)` or a
possessive repeat `a++` forbids trying again.
""",
    wrong=Example(
        'import re\n\n\ndef is_manifest_name(text):\n    return re.match(r"(?:[a-z]+-?)+$", text) is not None\n',
        "letters without a hyphen can be cut into pieces at will",
    ),
    right=Example(
        "import re\n\n\ndef is_manifest_name(text):\n"
        '    return re.fullmatch(r"[a-z]+(?:-[a-z]+)*-?", text) is not None\n'
    ),
    check=check,
)
