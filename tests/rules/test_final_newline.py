"""final-newline: which tests validate, which patterns surprise, and what `re` says of each text that is shown.

Cases are ours; the twin is `re` on every short text, with `\\Z` put in place of each `$`.
"""

from __future__ import annotations

import itertools
import random
import re
import warnings
from dataclasses import replace

import pytest

from patlint import lint_source
from patlint.rules.finding import TextWitness
from patlint.source.sites import Site
from tests.rules.support import findings, site

REFUSING = [
    "def f(s):\n    if not P.match(s):\n        raise ValueError(s)\n    return s",
    "def f(s):\n    if P.match(s) is None:\n        raise ValueError(s)",
    "def f(s):\n    if not s or not P.match(s):\n        log(s)\n        raise ValueError(s)",
    "def f(s):\n    if not (isinstance(s, str) and P.match(s)):\n        return False\n    return True",
    "def f(s):\n    if P.match(s):\n        return s\n    raise ValueError(s)",
    "def f(s):\n    if P.match(s):\n        go(s)\n    else:\n        raise ValueError(s)",
    "def f(s):\n    found = P.match(s)\n    if not found:\n        raise ValueError(s)",
    "def f(s):\n    if not P.match(s):\n        if strict:\n            raise ValueError(s)",
    "def f(s):\n    return bool(P.match(s))",
    "def f(s):\n    return P.match(s) is not None",
    "def f(s):\n    return not P.match(s)",
    "def f(s):\n    return len(s) > 3 and P.match(s) is not None",
    "def f(s):\n    return (P.match(s) and check(s)) if s else False",
    "def f(s):\n    s = s.lower()\n    return bool(P.match(s))",
    "def f(s):\n    s = s.strip('x')\n    return bool(P.match(s))",
    "def f(items):\n    for s in items:\n        if not P.match(s):\n            raise ValueError(s)",
]
QUIET = [
    "def f(s):\n    if P.match(s):\n        go(s)",  # one case among others
    "def f(s):\n    if P.match(s):\n        go(s)\n    elif s:\n        raise ValueError(s)",
    "def f(s):\n    if not P.match(s):\n        return",
    "def f(s):\n    assert P.match(s)",
    "def f(items):\n    return [s for s in items if P.match(s)]",
    "def f(items):\n    return list(filter(lambda s: P.match(s), items))",
    "def f(s):\n    m = P.match(s)\n    if not m:\n        raise ValueError(s)\n    return m.group()",
    "def f(s):\n    return bool(P.match(s.strip()))",
    "def f(s):\n    return bool(P.match(s.rstrip('\\r\\n')))",
    "def f(s):\n    return bool(P.match(s.strip().lower()))",
    "def f(s):\n    return bool(P.match(s.strip().encode().decode()))",
    "def f(s):\n    return bool(P.match(s.replace('\\n', '')))",
    "def f(s):\n    s = s.strip() if s else ''\n    return bool(P.match(s))",
    "def f(s):\n    return bool(P.match(s + 'x'))",
    "def f(s):\n    return bool(P.match(f'{s}x'))",
    "def f(s):\n    s = s.strip()\n    return bool(P.match(s))",
    "def f(s):\n    for line in s.splitlines():\n        if not P.match(line):\n            raise ValueError(line)",
    "def f(s):\n    for n, line in enumerate(s.splitlines()):\n"
    "        if not P.match(line):\n            raise ValueError(n)",
    "def f(name):\n    with open(name) as file:\n        for line in file:\n"
    "            if not P.match(line):\n                raise ValueError(line)",
    "def f(s):\n    for word in s.split():\n        if not P.match(word):\n            raise ValueError(word)",
    "def f(s):\n    words = [w.strip() for w in s.split(',')]\n    for word in words:\n"
    "        if not P.match(word):\n            raise ValueError(word)",
    "def f(s):\n    return bool(P.match(input('code ')))",
    "def f(s):\n    return bool(P.fullmatch(s))",
    "def f(s):\n    return bool(P.match(s, 1))",
]


@pytest.mark.parametrize("code", REFUSING)
def test_a_test_that_refuses(code: str) -> None:
    found = lint_source(f"import re\nP = re.compile(r'[a-z]+$')\n{code}\n", "case.py")
    assert [(each.rule, each.message) for each in found] == [
        ("final-newline", "a text passes with a line feed at its end: 'a\\n'")
    ]


@pytest.mark.parametrize("code", QUIET)
def test_a_test_that_refuses_nothing_or_whose_text_is_known(code: str) -> None:
    found = lint_source(f"import re\nP = re.compile(r'[a-z]+$')\n{code}\n", "case.py")
    assert [each.rule for each in found] == []


PATTERNS: list[tuple[str, str, str | None]] = [
    ("[a-z]+$", "match", "a\n"),
    ("^[a-z]+$", "search", "a\n"),
    (r"\A[a-z]+$", "search", "a\n"),
    ("^(?:a|bc)$", "search", "a\n"),
    ("^a$|^bc$", "search", "a\n"),
    ("a$|b$", "match", "a\n"),
    ("(a|b$)c?$", "match", "a\n"),
    ("^$", "match", None),  # the empty text alone is no example
    ("^a?$", "match", "a\n"),
    ("[a-z]+$", "search", None),  # not bound at its beginning
    ("[a-z]+", "match", None),
    (r"[a-z]+\Z", "match", None),
    (r"[a-z]+\s*$", "match", None),  # takes the line feed itself
    (r"[a-z]+(?:\n|$)", "match", None),
    ("[^:]+$", "match", None),
    ("(?s)a.*$", "match", None),
    ("(?m)^[a-z]+$", "match", None),
    (r".*\.py$", "match", None),  # a suffix is looked for
    ("default.*$", "match", None),  # a prefix is looked for
    ("a$|b", "match", None),
    (r"(a)\1$", "match", None),  # not regular
]


@pytest.mark.parametrize(("pattern", "function", "text"), PATTERNS)
def test_patterns(pattern: str, function: str, text: str | None) -> None:
    found = findings(validating(pattern, function), "final-newline")
    assert [each.witness for each in found] == ([] if text is None else [TextWitness(text)])


def validating(pattern: str | bytes, function: str) -> Site:
    made = site(pattern, function, "truth")  # type: ignore[arg-type]
    return replace(made, uses=tuple(replace(use, validates=True) for use in made.uses))


def test_bytes() -> None:
    (found,) = findings(validating(rb"[a-z]+$", "match"), "final-newline")
    assert found.witness == TextWitness(b"a\n")


def test_all_uses_must_agree() -> None:
    code = "import re\n_P = re.compile('[a-z]+$')\ndef f(s):\n    return bool(_P.match(s))\n"
    assert [each.rule for each in lint_source(code)] == ["final-newline"]
    assert lint_source(code + "def g(s):\n    return _P.match(s).group()\n") == ()


TEXTS = ["".join(text) for size in range(6) for text in itertools.product("ab\n", repeat=size)]


def random_pattern(generator: random.Random, depth: int) -> str:
    if depth == 0 or generator.random() < 0.2:
        return generator.choice(["a", "b", "ab", "[ab]", ".", r"\s", r"\n", "$", "$", "^", "(?=a)", ""])
    inner = [random_pattern(generator, depth - 1) for _ in range(2)]
    return generator.choice(
        [
            f"{inner[0]}{inner[1]}",
            f"(?:{inner[0]}|{inner[1]})",
            f"(?:{inner[0]})?",
            f"(?:{inner[0]})*",
            f"{inner[0]}$",
        ]
    )


def test_random_patterns_against_re() -> None:
    generator = random.Random(20260201)
    told = quiet = 0
    for _ in range(3000):
        pattern = random_pattern(generator, 3) + "$"
        function = generator.choice(["match", "search"])
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                soft, hard = re.compile(pattern), re.compile(pattern.replace("$", r"\Z"))
        except re.error:
            continue
        found = findings(validating(pattern, function), "final-newline")
        if not found:
            quiet += 1
            continue
        told += 1
        assert isinstance(found[0].witness, TextWitness)
        text = found[0].witness.text
        assert isinstance(text, str) and text.endswith("\n")
        assert getattr(soft, function)(text) and getattr(soft, function)(text[:-1]), (pattern, text)
        assert not getattr(hard, function)(text), (pattern, text)
        for short in TEXTS:
            outcome = getattr(hard, function)(short)
            assert (outcome is not None) == (hard.fullmatch(short) is not None), (pattern, short)
            assert outcome is None or not short.endswith("\n"), (pattern, short)
    assert told >= 150 and quiet >= 150
