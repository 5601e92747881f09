"""Texts that a library may make another pattern of -> whether what is found of the text alone holds all the same.

`objection(sink, part, text, flags)` is the reason why nothing may be said of a text, None where something may:
`PART` of one that says another thing within the larger pattern, `ENGINE` of one that is for another engine.
`stands_alone(text, flags)` asks it of a part of whatever pattern.

>>> stands_alone("a+", 0), stands_alone("^a+", 0)
(True, False)

Limits: a text that the parser gives up is taken to be for `re`, and not to stand alone.
"""

from __future__ import annotations

from patlint.limits import LimitReached
from patlint.source.sinks import ENGINE, PART, SCANNER, Sink
from patlint.syntax import tree as t
from patlint.syntax.parser import PatternError, parse


def objection(sink: Sink, part: bool, pattern: str | bytes, flags: int) -> str | None:
    """A reason of `Unresolved`, or None. `part`: whether the text becomes a part of a larger pattern."""
    if part and not stands_alone(pattern, flags):
        return PART
    if sink.name == SCANNER and _sets_flags(pattern, flags):
        return PART
    if sink.elsewhere and _is_refused(pattern, flags):
        return ENGINE
    return None


def stands_alone(pattern: str | bytes, flags: int) -> bool:
    """Whether what holds for the pattern by itself holds for it as a part of a larger one.

    Not where it looks at what stands around it, counts groups, or sets flags; nor where its brackets may only
    be balanced by what comes before and after.
    """
    try:
        parsed = parse(pattern, flags)
    except PatternError as error:
        return "parenthesis" not in str(error)
    except LimitReached:
        return False
    if parsed.inline:
        return False
    around = (t.Anchor, t.Look, t.BackReference, t.Conditional)
    return not any(isinstance(node, around) for node in t.walk(parsed.root))


def _is_refused(pattern: str | bytes, flags: int) -> bool:
    """Whether `re` of the newest Python refuses the pattern."""
    try:
        parse(pattern, flags, (3, 13))
    except PatternError:
        return True
    except LimitReached:
        pass
    return False


def _sets_flags(pattern: str | bytes, flags: int) -> bool:
    """Whether the pattern sets flags for all of itself: `re.Scanner` loses them."""
    try:
        return parse(pattern, flags).inline != 0
    except (PatternError, LimitReached):
        return False
