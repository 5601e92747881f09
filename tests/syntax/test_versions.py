"""The parser against every version of `re` at hand: accepted or refused, why, where, flags, groups, names."""

from __future__ import annotations

import json
import subprocess

import pytest

from patlint.syntax.parser import PatternError, parse

from .awkward import awkward
from .generate import patterns
from .pythons import VERSIONS, interpreters

RANDOM = 9000

# Run by the other interpreter: what re.compile says of each pattern.
ORACLE = """
import json, re, sys, warnings
warnings.simplefilter("ignore")
said = []
for text, is_bytes, flags in json.load(sys.stdin):
    try:
        found = re.compile(text.encode("latin-1") if is_bytes else text, flags)
        said.append(["accepted", int(found.flags), found.groups, dict(found.groupindex)])
    except Exception as refusal:
        kind = "error" if isinstance(refusal, re.error) else type(refusal).__name__
        said.append(["refused", kind, getattr(refusal, "pos", None)])
json.dump(said, sys.stdout)
"""


def corpus() -> list[tuple[str | bytes, int]]:
    return awkward() + list(patterns(seed=2024, count=RANDOM))


def ask(interpreter: str, cases: list[tuple[str | bytes, int]]) -> list[list[object]]:
    sent = [
        [text.decode("latin-1"), True, flags] if isinstance(text, bytes) else [text, False, flags]
        for text, flags in cases
    ]
    done = subprocess.run(
        [interpreter, "-c", ORACLE], input=json.dumps(sent), capture_output=True, text=True, check=True
    )
    answers: list[list[object]] = json.loads(done.stdout)
    return answers


def verdict(text: str | bytes, flags: int, target: tuple[int, int]) -> list[object]:
    try:
        pattern = parse(text, flags, target)
    except PatternError as refusal:
        return ["refused", refusal.kind, refusal.position]
    return ["accepted", pattern.flags, pattern.groups, pattern.names]


@pytest.mark.parametrize("target", VERSIONS, ids=lambda version: f"{version[0]}.{version[1]}")
def test_every_verdict_is_that_of_re(target: tuple[int, int]) -> None:
    if target not in interpreters():
        pytest.skip(f"no Python {target[0]}.{target[1]} at hand")
    cases = corpus()
    answers = ask(interpreters()[target], cases)
    wrong = [
        (text, flags, answer, ours)
        for (text, flags), answer in zip(cases, answers, strict=True)
        if (ours := verdict(text, flags, target)) != answer
    ]
    assert wrong == []
    accepted = sum(answer[0] == "accepted" for answer in answers)
    assert accepted > 4000 and len(answers) - accepted > 4000
    kinds = {answer[1] for answer in answers if answer[0] == "refused"}
    assert {"error", "OverflowError", "ValueError"} <= kinds
    assert ("Verbose" in kinds) == (target == (3, 10))


# Pattern, flags, and for 3.10, 3.11, 3.12, 3.13: the position of the refusal, "no position", or "fine".
# Source: run on each version; the test above asks them again.
DIFFERENCES = [
    ("(?>a)", 0, (1, "fine", "fine", "fine")),
    ("a*+", 0, (2, "fine", "fine", "fine")),
    ("a(?i)b", 0, ("fine", 1, 1, 1)),
    ("(?-x: (?x) )", 0, ("no position", 6, 6, 6)),
    ("(a)(?(+1)b)", 0, ("fine", "fine", 6, 6)),
    ("(a)(?(-1)b)", 0, (6, 6, 6, 6)),
    (b"(?P<\xe9>a)", 0, ("fine", "fine", 4, 4)),
    ("(?t)a", 0, ("fine", "fine", "fine", 1)),
    ("a*", 1, ("no position", "no position", "no position", "fine")),
    (r"\UFFFFFFFF", 0, ("no position", "no position", "no position", 0)),
    ("(?(1073741823)a))", 0, (16, 3, 3, 3)),
    ("(?<=a{4294967294})", 0, ("no position", "fine", "fine", "fine")),
    ("(?<=a{4294967294}b)", 0, ("no position", "fine", "fine", "fine")),
    ("(?<=a{4294967294}bb)", 0, ("no position", "no position", "no position", "no position")),
]


@pytest.mark.parametrize(("text", "flags", "expected"), DIFFERENCES)
def test_known_differences(text: str | bytes, flags: int, expected: tuple[int | str, ...]) -> None:
    said: list[int | str] = []
    for target in VERSIONS:
        try:
            parse(text, flags, target)
            said.append("fine")
        except PatternError as refusal:
            said.append("no position" if refusal.position is None else refusal.position)
    assert tuple(said) == expected
