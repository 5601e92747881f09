"""unreachable-part and equal-siblings: what they call dead can be taken out, says `re`.

The twin is `re` itself: the pattern without the part is compared on every short text, spans of match and
search and all that finditer finds. Cases by hand stand beside: parts that are dead, and parts that are used.
"""

from __future__ import annotations

import itertools
import random
import re
import sys
import warnings
from dataclasses import replace

import pytest

from patlint import lint_source
from patlint.rules.finding import Finding
from patlint.source.sites import Function, LooksAt
from patlint.syntax import tree as t
from patlint.syntax.parser import parse
from tests.rules.support import findings, site

ATOMIC = sys.version_info >= (3, 11)
TEXTS = ["".join(text) for size in range(6) for text in itertools.product("ab\n", repeat=size)]


def without(pattern: str, finding: Finding) -> str:
    """The pattern with a part deleted: a branch with its bar, anything else as it stands."""
    start, end = span = finding.span
    for node in t.walk(parse(pattern).root):
        if isinstance(node, t.Alternation) and "branch" in finding.message:
            for index, branch in enumerate(node.branches):
                if branch.span == span:
                    return (
                        pattern[: start - 1] + pattern[end:]
                        if index
                        else pattern[:start] + pattern[end + 1 :]
                    )
    return pattern[:start] + pattern[end:]


def outcome(compiled: re.Pattern[str], text: str, function: Function) -> object:
    if function == "finditer":
        return [found.span() for found in compiled.finditer(text)]
    found = getattr(compiled, function)(text)
    return found and found.span()


def random_pattern(generator: random.Random, depth: int) -> str:
    if depth == 0 or generator.random() < 0.2:
        return generator.choice(
            ["a", "b", "a", "b", "ab", ".", "[ab]", "", "^", "$", r"\b", "(?=a)", "(?!b)", r"\n"]
        )
    inner = [random_pattern(generator, depth - 1) for _ in range(2)]
    return generator.choice(
        [
            f"{inner[0]}{inner[1]}",
            f"(?:{inner[0]}|{inner[1]})",
            f"(?:{inner[0]}|{inner[1]})",
            *([f"(?>{inner[0]}|{inner[1]})", f"(?:{inner[0]})*+"] if ATOMIC else []),
            f"(?<={generator.choice('ab')}){inner[0]}",
            f"(?:{inner[0]})" + generator.choice(["*", "+", "?", "*?", "+?", "??", "{2}", "{0,2}", "{1,2}?"]),
        ]
    )


@pytest.mark.parametrize("function", ["match", "fullmatch", "search", "finditer"])
def test_what_is_called_dead_can_be_deleted(function: Function) -> None:
    generator = random.Random(20260113)
    judged = 0
    for _ in range(600):
        pattern = random_pattern(generator, 4)
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                compiled = re.compile(pattern)
        except re.error:
            continue
        dead: list[Finding] = [
            finding
            for finding in findings(site(pattern, function, "span"))
            if finding.rule in ("unreachable-part", "equal-siblings")
        ]
        for finding in dead:
            shorter = without(pattern, finding)
            try:
                other = re.compile(shorter)
            except re.error:
                continue  # nothing left to repeat
            judged += 1
            for text in TEXTS:
                assert outcome(compiled, text, function) == outcome(other, text, function), (
                    pattern,
                    shorter,
                    text,
                    finding.rule,
                )
    assert judged >= 60


DEAD: list[tuple[str, Function, str]] = [
    ("east|eastern", "match", "eastern"),
    ("east|eastern", "search", "eastern"),
    ("(?:in|into) hold|in", "search", ""),
    ("x.*?", "search", ".*?"),
    ("x.*?", "fullmatch", ""),
    ("east|eastern", "fullmatch", ""),
    ("[a-z]|b", "match", "b"),
    ("(?:b|[a-z])x", "match", ""),
    ("|a", "match", "a"),
    ("|a", "finditer", ""),
    ("a??", "match", "a??"),
    ("a??", "findall", ""),
    ("ab?c*|ab", "search", "ab"),
    (r"(?:\d+|\d+\.\d+)kg", "match", ""),
    (r"\d+|\d+\.\d+", "match", r"\d+\.\d+"),
    ("a$b?", "match", "b?"),
    ("(?:a|b)*?", "search", "(?:a|b)*?"),
    (r"(a)\1|ab", "match", ""),
    (r"(?<=a)b|b", "search", ""),
    (r"(?<=a)b|ab", "search", ""),  # dead, but only because ab was found one place before: not claimed
]
"""(pattern, function, the part that is never taken or "" where every part is): worked out by hand."""


@pytest.mark.parametrize(("pattern", "function", "dead"), DEAD)
def test_parts_by_hand(pattern: str, function: Function, dead: str) -> None:
    found = findings(site(pattern, function, "span"), "unreachable-part")
    assert [pattern[slice(*finding.span)] for finding in found] == ([dead] if dead else [])


EQUAL: list[tuple[str, str]] = [
    ("a|b|a", "a"),
    ("kg|t|kg", "kg"),
    ("[0-9][0-9]|x|[0-9]{2}", "[0-9]{2}"),
    ("(?:jpg|jpeg)|jpe?g", "jpe?g"),
    ("(?i:kgs?|t|KGS?)", "KGS?"),
    ("a+|aa*", "aa*"),
    ("a|(a)", "(a)"),
    (r"\bgate|gate", ""),
    ("a|b|c", ""),
    ("a||b|", ""),
    ("(?=x)x|(?=x)x", "(?=x)x"),
]


@pytest.mark.parametrize(("pattern", "twin"), EQUAL)
def test_siblings_by_hand(pattern: str, twin: str) -> None:
    found = findings(site(pattern, "fullmatch", "span"), "equal-siblings")
    assert [pattern[slice(*finding.span)] for finding in found] == ([twin] if twin else [])


LEVELS: list[tuple[str, Function, LooksAt, str]] = [
    ("east|eastern", "match", "span", "warning"),  # a piece wins
    ("east|eastern", "match", "truth", "note"),
    ("(?:east|eastern)s?", "search", "groups", "warning"),
    ("[a-z]+|b", "match", "span", "note"),  # nothing is lost without it
    (r"(?:\w|\d)x", "match", "span", "note"),
    (r"(?:x(?=y)|\w|\d)z", "match", "span", "note"),  # one of the earlier ones is enough
    (r'"(?:\\.|\\[0-7]{1,3}|[^\\"])*"', "match", "span", "note"),  # the loop takes the rest of it
    (r'"(?:\\.|(\\[0-7]{1,3})|[^\\"])*"', "match", "groups", "warning"),  # a group that is never set
    (r'"(?:[^"]|\\.)*"', "match", "span", "warning"),  # in front it would take a quote
    (r"(?:at|on|(?:in|at))x", "match", "span", "note"),
    ("x.*?", "search", "span", "warning"),
    ("x.*?", "search", "truth", "note"),
    ("x(.*?)", "match", "groups", "warning"),
    (r"\w*\d*:", "match", "groups", "note"),
    (r"(\w*)\d*:", "match", "groups", "warning"),  # the group has the digits
    (r"(\w*)\d*:", "match", "span", "note"),
    (r"(\w+)(?:\d*)-", "match", "groups", "warning"),
    (r"(\w*)+\d*:", "match", "groups", "warning"),
    (r".*(\d)?;", "match", "groups", "warning"),  # a group that is never set
    (r".*(\d)?;", "search", "span", "note"),
    (r"(?:\d+(?:\.\d*)?|\d*\.\d+)", "match", "groups", "note"),
]


@pytest.mark.parametrize(("pattern", "function", "looks_at", "level"), LEVELS)
def test_a_warning_only_where_somebody_is_misled(
    pattern: str, function: Function, looks_at: LooksAt, level: str
) -> None:
    found = findings(site(pattern, function, looks_at), "unreachable-part")
    assert {finding.level for finding in found} == {level}


def test_uses_that_are_not_seen_may_look_at_groups() -> None:
    public = replace(site(r"(\w*)\d*:", "match"), uses=(), uses_seen=False)
    assert [finding.level for finding in findings(public, "unreachable-part")] == ["warning"]


def test_a_part_that_begins_in_a_constant_is_shown_where_it_is_used() -> None:
    code = 'import re\n_C = r"[ab]"\n\nm = re.match(rf"(a.*){_C}?", s)\nx = m[1]\n'
    (found,) = (each for each in lint_source(code, "case.py") if each.rule == "unreachable-part")
    assert (found.line, found.column, found.end_line, found.end_column) == (4, 26, 4, 27)


def told(*endings: str) -> list[str]:
    """What is told of an alternation of `pier` and of `pier` with each of the endings."""
    pattern = "|".join(["pier", *(f"pier{each}" for each in endings)])
    code = f'import re\n\n\ndef place(s):\n    return re.match(r"{pattern}", s).group()\n'
    found = [each for each in lint_source(code, "case.py") if each.rule == "unreachable-part"]
    for each in found:
        named = [pattern[slice(*place.span)] for place in each.related if place.span]
        assert all(re.match(pattern, part)[0] == "pier" for part in [pattern[slice(*each.span)], *named])  # type: ignore[index]
        assert len(named) == (0 if len(endings) <= 3 else min(len(endings) - 1, 6))
    return [each.message for each in found]


def test_many_dead_branches_of_one_pattern_are_told_as_one() -> None:
    dead = "no match ever takes this branch"
    assert told("s", "head", "side") == [dead] * 3
    assert told("s", "head", "side", "work") == [
        f"{dead}, and the same holds of 3 further parts of the pattern"
    ]
    assert told(*"abcdefghij") == [f"{dead}, and the same holds of 9 further parts of the pattern"]


@pytest.mark.parametrize(("count", "level"), [(8, "note"), (9, "warning")])
def test_only_a_few_branches_are_tried_in_front(count: int, level: str) -> None:
    pieces = "|".join(rf"\\{number}x" for number in range(count))
    found = findings(site(rf'"(?:\\.|{pieces}|[^\\"])*"', "match", "span"), "unreachable-part")
    assert [finding.level for finding in found] == [level] * count
