"""Texts that hang on a condition: every one that the call is given, none that it is not."""

from __future__ import annotations

import itertools

import pytest

from patlint.source import find_patterns, read_module, reasons
from tests.source.recording import run

TOLD = {
    "if and else": "def f(x):\n if x: p = 'a'\n else: p = 'b'\n re.match(p, '')",
    "one of many": (
        "def f(x):\n if x == 0: p = 'a'\n elif x == 1: p = 'b'\n elif x == 2: p = 'c'\n else: p = 'd'\n re.match(p, '')"
    ),
    "a first assignment": "def f(x):\n p = 'a'\n if x: p = 'b'\n re.match(p + 'c', '')",
    "one way leaves": "def f(x):\n if x == 0: p = 'a'\n elif x == 1: p = 'b'\n else: return\n re.match(p, '')",
    "two names": "def f(x):\n if x:\n  p = 'a'\n  q = 'b'\n else:\n  p = 'c'\n  q = 'd'\n re.match(p + q, '')",
    "two names and defaults": (
        "def f(x):\n p = 'a'\n q = 'b'\n if x == 0: p = 'c'\n elif x == 1: q = 'd'\n re.match(p + q, '')"
    ),
    "of the module": "X = given()\nif X: P = 'a'\nelse: P = 'b'\ndef f(x): re.match(P, '')",
    "of the module at once": "X = given()\nP = 'a'\nif X: P = 'b'\nre.match(P, '')\ndef f(x): pass",
    "bytes or text": (
        "def f(x):\n if isinstance(x, bytes): p = b'a'\n else: p = 'a'\n re.match(p, b'' if p == b'a' else '')"
    ),
    "an expression": "def f(x): re.match('a' if x else 'b', '')",
    "an expression within": "def f(x): re.match('(%s)' % ('a' if x else 'b'), '')",
    "a constant that is one": "X = given()\nP = 'a' if X else 'b'\ndef f(x): re.match(P + P, '')",
    "flags": "def f(x):\n if x: p, g = 'a', re.I\n else: p, g = 'b', 0\n re.match(p, '', g)",
    "in a loop": "def f(x):\n for _ in range(2):\n  if x: p = 'a'\n  else: p = 'b'\n  re.match(p, '')",
    "used deeper": "def f(x):\n if x: p = 'a'\n else: p = 'b'\n for _ in (1, 2):\n  re.match(p, '')",
}


@pytest.mark.parametrize("name", TOLD)
def test_told_as_run(name: str) -> None:
    source = "import re\n" + TOLD[name] + "\n"
    module = read_module(source, "a.py")
    assert module.unresolved == ()
    given = set()
    for x, value in itertools.product((0, 1), (0, 1, 2, 3, b"")):
        given |= set(run(f"{source}f({value!r})\n", {"given": lambda x=x: x}))
    assert len(given) > 1
    assert {(site.function, site.pattern, site.flags) for site in module.sites} == given


NOT_TOLD = [
    # a condition that some ways cannot meet
    ("import sys\nre.match('a' if sys.version_info > (3, 9) else 'b', '')", reasons.EXPRESSION),
    ("from compat import PY3\nre.match('a' if PY3 else 'b', '')", reasons.EXPRESSION),
    ("import sys\nNEW = sys.version_info > (3,)\nre.match('a' if NEW else 'b', '')", reasons.EXPRESSION),
    ("import sys\nif sys.version_info > (3,): P = 'a'\nelse: P = 'b'\nre.match(P, '')", reasons.EXPRESSION),
    ("re.match('a' if hasattr(re, 'NOFLAG') else 'b', '')", reasons.EXPRESSION),
    ("re.match('a' if 0 else 'b', '')", reasons.EXPRESSION),
    ("DEBUG = False\nre.match('a' if DEBUG else 'b', '')", reasons.EXPRESSION),
    ("for p in ('a', 'b'): re.match(p if p != 'a' else 'c', '')", reasons.EXPRESSION),
    ("def _f(k): re.match('a' if k else 'b', '')\n_f(1)", reasons.EXPRESSION),
    ("def g(k): return 'a' if k else 'b'\ndef f(x): re.match(g(x) + g(1), '')", reasons.EXPRESSION),
    ("def f(x): re.match('|'.join('a' if w else x for w in ('a', 'b')), '')", reasons.EXPRESSION),
    # texts of two conditions
    ("def f(x, y): re.match(('a' if x else 'b') + ('c' if y else 'd'), '')", reasons.EXPRESSION),
    (
        "def f(x):\n p = 'a'\n if x: p = 'b'\n q = 'c'\n if x: q = 'd'\n re.match(p + q, '')",
        reasons.EXPRESSION,
    ),
    # a call under a condition on the same
    ("def f(x):\n p = 'a'\n if x: p = 'b'\n if x: re.match(p, '')", reasons.EXPRESSION),
    ("def f(x):\n p = 'a'\n if x: p = 'b'\n x and re.match(p, '')", reasons.EXPRESSION),
    # other bindings
    ("def f(x):\n p = 'a'\n if x: p += 'b'\n re.match(p, '')", reasons.REASSIGNED),
    ("def f(x):\n p = 'a'\n if x:\n  for _ in x: p = 'b'\n re.match(p, '')", reasons.REASSIGNED),
    ("def f(x):\n p = 'a'\n if x: p = 'b'\n while x: p = 'c'\n re.match(p, '')", reasons.REASSIGNED),
    ("def f(x):\n p = 'a'\n if x:\n  if x > 1: p = 'b'\n re.match(p, '')", reasons.REASSIGNED),
    ("def f(x):\n re.match(p, '')\n if x: p = 'b'\n else: p = 'a'", reasons.REASSIGNED),
    ("def f(x):\n p = 'a'\n for _ in x:\n  re.match(p, '')\n  if x: p = 'b'", reasons.REASSIGNED),
    (
        "def f(x):\n p = 'a'\n def g():\n  nonlocal p\n  p = 'c'\n if x: p = 'b'\n re.match(p, '')",
        reasons.REASSIGNED,
    ),
    ("def f(x):\n p = 'a'\n if x: p = 'b'\n def g(): re.match(p, '')\n p = 'c'", reasons.REASSIGNED),
    ("def f(x, p):\n if x: p = 'a'\n else: p = 'b'\n g(p)\n re.match(p, '')", reasons.REASSIGNED),
    ("P = 'a'\nif x: P = 'b'\ndef g():\n global P\n P = 'c'\nre.match(P, '')", reasons.REASSIGNED),
    ("P = 'a'\nif x: P = 'b'\nexec(x)\nre.match(P, '')", reasons.DYNAMIC),
]


@pytest.mark.parametrize("source, reason", NOT_TOLD)
def test_not_told(source: str, reason: str) -> None:
    module = read_module("import re\n" + source, "a.py")
    assert module.sites == ()
    assert [call.reason for call in module.unresolved] == [reason]


def test_the_places_are_those_of_the_ways() -> None:
    source = "import re\ndef f(x):\n if x: p = 'a+'\n else: p = 'b'\n re.match(p, '')\n"
    assert [(site.pattern, site.place.line, site.place.column) for site in find_patterns(source, "a.py")] == [
        ("a+", 3, 12),
        ("b", 4, 12),
    ]
