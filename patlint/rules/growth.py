"""What both ambiguity rules share: the uses they judge, figures in plain words, and a proven way out."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import ceil, exp, log

from patlint.machine.program import one_character
from patlint.machine.slow_text import Ambiguity, Growth, Manner, SlowText
from patlint.rewrite.quicker import WayOut, quicker
from patlint.rules.finding import Finding, Level, SlowWitness, Suggestion
from patlint.rules.shorter_equivalent import fences, needed
from patlint.rules.subject import Subject, manner_of
from patlint.source.sites import Use
from patlint.syntax import tree as t
from patlint.syntax.classes import char_set

LONG = 10_000
"""Length of the text for which a polynomial's steps are told, in characters."""
ENDLESS = 1e9
"""Steps that are out of reach for a program that has more to do: some seconds. For so many an exponential's text is
sought, and with every further pump it takes twice as long."""


def judged(subject: Subject) -> Iterator[tuple[Manner, Use | None, Ambiguity]]:
    """Each manner in which the pattern is seen to be used, once, with its ambiguity.

    Where no use is seen, `match`: what is slow there is slow in search and fullmatch too.
    """
    seen: set[Manner] = set()
    for use in sorted(subject.uses, key=lambda use: (use.own, use.bounded is not None)):
        manner = manner_of(use)
        if manner not in seen:
            seen.add(manner)
            yield manner, use, subject.ambiguity(manner)
    if not seen:
        yield "match", None, subject.ambiguity("match")


def witness_of(slow: SlowText) -> SlowWitness:
    return SlowWitness(slow.prefix, slow.pump, slow.suffix, slow.growth, slow.steps, slow.more, slow.bounded)


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
        wanted, count = at_length(slow, LONG)
    already = "already " if slow.growth == "exponential" else ""
    return (
        f"{already}a text of {slow.fixed + wanted * slow.period:,} characters takes {in_words(count)} steps"
    )


def at_length(slow: SlowText, length: int) -> tuple[int, float]:
    """How many pumps make a text of about `length` characters, and the steps that it takes; not for "exponential"."""
    n, steps = slow.steps[-1]
    wanted = max((length - slow.fixed) // slow.period, n)
    return wanted, steps * (wanted / n) ** int(slow.growth)


def evidence(slow: SlowText) -> str:
    """What competes for the pump, and how many steps that makes."""
    pumps = dict.fromkeys(ascii(pump) for pump in (slow.pump, *(pump for _, pump in slow.more)))
    shown = " and ".join(pumps) if sum(map(len, pumps)) < 30 else "the repeated text"
    ways = f"both can take {shown}" if len(slow.parts) == 2 else f"{shown} can be taken in more than one way"
    if len(pumps) > 1:
        ways = f"{shown} can each be taken in more than one way"
    if slow.by_restart:
        ways += ", and the search begins afresh at every place"
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


def better(subject: Subject, manner: Manner, slow: SlowText) -> WayOut | None:
    """A pattern that does the same in every use, and is less slow in `manner`, if one is found and proven."""
    if subject.site.embedded:
        return None
    modes, keeps = needed(subject.site)
    manners: list[Manner] = [manner, *(manner_of(use) for use in subject.uses)]
    if not subject.site.uses_seen:
        manners += ["search", "fullmatch"]
    return quicker(
        subject.pattern,
        {each: subject.ambiguity(each).growth for each in manners},
        manner,
        slow.parts,
        modes,
        keeps,
        subject.target,
        subject.limits,
        fences(subject.site),
    )


def told(
    rule: str, level: Level, subject: Subject, manner: Manner, slow: SlowText, small: bool = False
) -> Finding:
    """The whole finding with its way out; one that is `small` is brief where no better pattern is known."""
    span, *others = slow.parts or [(0, len(subject.site.pattern))]
    found = better(subject, manner, slow)
    return Finding(
        rule,
        level,
        span,
        grows(slow),
        mode=mode_name(manner),
        witness=witness_of(slow),
        evidence=evidence(slow),
        way_out=advice(found, subject, slow),
        suggestion=None if found is None else Suggestion(found.pattern, found.keeps),
        marks=tuple(others),
        brief=small and found is None,
    )


def advice(found: WayOut | None, subject: Subject, slow: SlowText) -> str:
    """Growth as it is and with what is suggested, or else the advice that fits the cause."""
    if found is not None:
        after = f"{named(found.growth)} with the pattern above"
        if found.open:
            after += ", as far as texts confirm it"
        return f"growth is {named(slow.growth)} as it stands, {after}"
    stop = separator(subject.pattern.root, slow.parts, subject.pattern.is_bytes)
    if stop is not None:
        return (
            f"let the first of them stop at {stop}, if it is not to run across it: take it out of its characters; "
            "or bound the length of the text"
        )
    if slow.growth == "exponential":
        return "let only one part take each character: separate the repeats, or merge them into one"
    return "let the repeats take different characters, or put between them what only one can take"


def separator(root: t.Node, parts: Sequence[t.Span], is_bytes: bool) -> str | None:
    """The character, as a Python text, that stands behind the first of the parts and that this part can take."""
    if len(parts) < 2:
        return None
    behind: t.Node | None = None
    stack: list[tuple[t.Node, t.Node | None]] = [(root, None)]
    while stack:
        node, after = stack.pop()
        if isinstance(node, t.Repeat) and node.span == parts[0]:
            leaf, behind = one_character(node.body), after
            if leaf is None or not isinstance(behind, t.Literal):
                return None
            inside = behind.code in char_set(leaf, is_bytes)
            return ascii(chr(behind.code)) if inside else None
        if isinstance(node, t.Sequence):
            stack += zip(node.items, (*node.items[1:], after), strict=False)
        elif isinstance(node, t.Group | t.Alternation):
            stack += [(below, after) for below in t.children(node)]
    return None


def named(growth: Growth | None) -> str:
    """A growth in one word or two."""
    match growth:
        case None | 1:
            return "linear"
        case "exponential":
            return "exponential"
        case 2 | 3:
            return "quadratic" if growth == 2 else "cubic"
        case _:
            return f"of power {growth}"


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
