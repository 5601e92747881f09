"""invalid-pattern: `re` of the target version refuses the pattern."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Rule
from patlint.rules.subject import Subject


def check(subject: Subject) -> Iterator[Finding]:
    error = subject.error
    if error is None:
        return
    size = len(subject.site.pattern)
    if error.position is None:
        span = (0, size)
    else:
        start = min(error.position, size)
        span = (start, min(start + 1, size))
    spelled = subject.site.spelling(span[0]) if span[0] < size else None
    eaten = (
        spelled is not None and spelled.startswith("\\") and not spelled.startswith(("\\\\", "\\'", '\\"'))
    )
    version = "" if subject.target is None else " of Python {}.{}".format(*subject.target)
    yield Finding(
        RULE.name,
        RULE.level,
        span,
        f"re{version} refuses this pattern: {error.message}",
        proof="the pattern is not in the dialect",
        evidence="compiling it raises an exception as soon as this line runs",
        way_out=f"Python made this character of {spelled}: write the pattern as a raw literal"
        if eaten
        else "",
    )


RULE = Rule(
    name="invalid-pattern",
    level="error",
    summary="re refuses the pattern",
    page="""\
The pattern is not in the dialect of the target version, so the call raises an
exception when it runs. The place underlined is where re gives up; the mistake
is often a little before it: a group that was never closed, a quantifier with
nothing to repeat, a range written backwards.

The target version counts: possessive repeats and atomic groups exist from
Python 3.11 on, and flags for the whole pattern must stand at its beginning
from 3.11 on.
""",
    wrong=Example('import re\n\nSEAL = re.compile(r"SEAL-([0-9]{6}")\n', "the group is never closed"),
    right=Example('import re\n\nSEAL = re.compile(r"SEAL-([0-9]{6})")\n'),
    check=check,
)
