"""Attributes of classes and objects: the texts that the call is given, class by class, and near misses."""

from __future__ import annotations

import pytest

from patlint.source import find_patterns, read_module, reasons
from tests.source.recording import run

RESOLVED = {
    "of self": "class A:\n P = 'a'\n def f(self): re.match(self.P, '')\nA().f()",
    "of cls": "class A:\n P = 'a'\n @classmethod\n def f(cls): re.match(cls.P, '')\nA.f()",
    "of the type": "class A:\n P = 'a'\n def f(self): re.match(type(self).P, '')\nA().f()",
    "by name": "class A:\n P = 'a'\nre.match(A.P, '')",
    "of a base": "class A:\n P = 'a'\nclass B(A):\n def f(self): re.match(self.P, '')\nB().f()",
    "of a base by name": "class A:\n P = 'a'\nclass B(A): pass\nre.match(B.P, '')",
    "of a far base": "class A:\n P = 'a'\nclass B(A): pass\nclass C(B):\n def f(self): re.match(self.P, '')\nC().f()",
    "of two bases": "class A:\n P = 'a'\nclass B:\n Q = 'b'\nclass C(A, B):\n"
    " def f(self): re.match(self.P + self.Q, '')\nC().f()",
    "first base": "class A:\n P = 'a'\nclass B:\n P = 'b'\nclass C(A, B): pass\nre.match(C.P, '')",
    "overridden": "class A:\n P = 'a'\n def f(self): re.match(self.P, '')\nclass B(A): P = 'b'\nA().f()\nB().f()",
    "given by what is derived": (
        "class A:\n P = None\n def f(self): re.match(self.P, '')\nclass B(A): P = 'b'\nclass C(B): P = 'c'\n"
        "B().f()\nC().f()"
    ),
    "two that belong together": (
        "class A:\n P = 'a'\n Q = 'x'\n def f(self): re.match(self.P + self.Q, '')\n"
        "class B(A):\n P = 'b'\n Q = 'y'\nA().f()\nB().f()"
    ),
    "an empty text to be written over": (
        "class A:\n P = ''\n def f(self): re.match(self.P + 'x', '')\nclass B(A): P = 'b'\nB().f()"
    ),
    "only the derived one calls": (
        "class A:\n P = 'a'\nclass B(A):\n P = 'b'\n def f(self): re.match(self.P, '')\nB().f()"
    ),
    "set in __init__": "class A:\n def __init__(self): self.p = 'a'\n def f(self): re.match(self.p, '')\nA().f()",
    "set in the base's __init__": (
        "class A:\n p = None\n def __init__(self): self.p = 'a'\n"
        "class B(A):\n def f(self): re.match(self.p, '')\nB().f()"
    ),
    "set in another class": (
        "class A:\n P = 'a'\n def f(self): re.match(self.P, '')\nclass B:\n def f(self): self.P = 'b'\nB().f()\nA().f()"
    ),
    "another class is set by name": (
        "class A:\n P = 'a'\n def f(self): re.match(self.P, '')\n"
        "class B:\n def g(self, **k):\n  self.__dict__.update(k)\n  setattr(self, 'P', 'b')\nB().g()\nA().f()"
    ),
    "another name is set": "class A:\n P = 'a'\n def f(self): re.match(self.P, '')\nsetattr(A, 'Q', 'b')\nA().f()",
    "in a closure": "class A:\n P = 'a'\n def f(self):\n  def g(): re.match(self.P, '')\n  g()\nA().f()",
    "a table of the class": "class A:\n T = ['a', 'b']\n def f(self):\n  for p in self.T: re.match(p, '')\nA().f()",
    "tables of classes": (
        "class A:\n T = ('a', 'b')\n def f(self):\n  for p in self.T: re.match(p, '')\n"
        "class B(A):\n T = ('c',)\nA().f()\nB().f()"
    ),
    "flags of classes": (
        "class A:\n P = 'a'\n F = re.I\n def f(self): re.compile(self.P, self.F)\n"
        "class B(A):\n P = 'b'\n F = 0\nA().f()\nB().f()"
    ),
    "a base that is not known": "class A(type('X', (), {})):\n P = 'a'\nre.match(A.P, '')",
}


@pytest.mark.parametrize("name", RESOLVED)
def test_resolved_as_run(name: str) -> None:
    source = "import re\n" + RESOLVED[name]
    module = read_module(source, "a.py")
    assert module.unresolved == ()
    given = set(run(source))
    assert given, "the snippet must call re"
    assert {(site.function, site.pattern, site.flags) for site in module.sites} == given


CLASS = "class A:\n P = 'a'\n def f(self): re.match(self.P, '')\n"
UNRESOLVED = [
    ("re.match(x.y, '')", reasons.ATTRIBUTE),
    ("def f(self): re.match(self.P, '')\nclass A: P = 'a'", reasons.ATTRIBUTE),
    (CLASS + "A.P = 'b'", reasons.ATTRIBUTE),
    (CLASS + "x.P = 'b'", reasons.ATTRIBUTE),
    (CLASS + "del A.P", reasons.ATTRIBUTE),
    (CLASS + "A.P += 'b'", reasons.ATTRIBUTE),
    (CLASS + "for A.P in x: pass", reasons.ATTRIBUTE),
    (CLASS + "setattr(A, 'P', 'b')", reasons.ATTRIBUTE),
    (CLASS + "setattr(A, x, 'b')", reasons.ATTRIBUTE),
    (CLASS + "map(setattr, x)", reasons.ATTRIBUTE),
    (CLASS + "A().__dict__['P'] = 'b'", reasons.ATTRIBUTE),
    (CLASS + " def g(self, **k): self.__dict__.update(k)", reasons.ATTRIBUTE),
    (CLASS + "class B(A):\n def g(self, k): setattr(self, k, 'b')", reasons.ATTRIBUTE),
    (CLASS + " def g(self): self.P = 'b'", reasons.ATTRIBUTE),
    (CLASS + "class B(A):\n def g(self): self.P = 'b'", reasons.ATTRIBUTE),
    ("class A(Enum):\n P = 'a'\nre.match(A.P, '')", reasons.ATTRIBUTE),
    ("@g\nclass A:\n P = 'a'\nre.match(A.P, '')", reasons.ATTRIBUTE),
    ("class A(B):\n P: str = 'a'\n def f(self): re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A(B):\n def f(self): re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A:\n P = 'a'\n if x: P = 'b'\nre.match(A.P, '')", reasons.ATTRIBUTE),
    ("class A:\n def P(self): return 'a'\nre.match(A.P, '')", reasons.ATTRIBUTE),
    ("class A:\n P = 'a'\n def f(self):\n  if self.P: re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A:\n P = 'a'\n def f(self): self.P and re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A:\n P = 'a'\n @staticmethod\n def f(self): re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A:\n P = 'a'\n def f(self):\n  self = g()\n  re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A:\n def g(self): self.p = 'a'\n def f(self): re.match(self.p, '')", reasons.ATTRIBUTE),
    (
        "class A:\n def __init__(self, x):\n  if x: self.p = 'a'\n def f(self): re.match(self.p, '')",
        reasons.ATTRIBUTE,
    ),
    (
        "class A:\n def __init__(self): self.p = 'a'\n def f(self): re.match(self.p, '')\nclass B(A): p = 'b'",
        reasons.ATTRIBUTE,
    ),
    (
        "class A:\n def __init__(self): self.p = ['a']\n def f(self):\n  for p in self.p: re.match(p, '')",
        reasons.ATTRIBUTE,
    ),
    ("class A:\n def __init__(self, p): self.p = p\n def f(self): re.match(self.p, '')", reasons.PARAMETER),
    (
        "class A:\n T = ['a']\n def f(self):\n  self.T.append('b')\n  for p in self.T: re.match(p, '')",
        reasons.CHANGED,
    ),
    (
        "class X: P = 'x'\nclass A(X): pass\nclass B(X): P = 'b'\nclass C(A, B): pass\nre.match(C.P, '')",
        reasons.ATTRIBUTE,  # the second base goes before the first one's
    ),
    ("class A:\n __slots__ = ('P',)\n def f(self): re.match(self.P, '')", reasons.ATTRIBUTE),
    ("class A:\n P = 'a'\nA = g(A)\nre.match(A.P, '')", reasons.ATTRIBUTE),
    (
        "class A:\n P = 'a'\n def f(self):\n  vars(self)['P'] = 'b'\n  re.match(self.P, '')",
        reasons.ATTRIBUTE,
    ),
    (
        "class A:\n P = 'a'\n def f(self):\n  object.__setattr__(self, 'P', 'b')\n  re.match(self.P, '')",
        reasons.ATTRIBUTE,
    ),
]


@pytest.mark.parametrize("source, reason", UNRESOLVED)
def test_unresolved(source: str, reason: str) -> None:
    module = read_module("import re\n" + source, "a.py")
    assert module.sites == ()
    assert [call.reason for call in module.unresolved] == [reason]


PARTLY = [
    (CLASS + "class B(A): P = x", {"a"}),
    (CLASS + "class B(A):\n def P(self): return 'b'", {"a"}),
    (CLASS + "class B(A):\n P = 'b'\n def f(self): pass", {"a"}),  # never comes to the call
    (CLASS + "class B(A):\n def f(self): pass\nclass C(B): P = 'c'", {"a"}),
]


@pytest.mark.parametrize("source, patterns", PARTLY)
def test_classes_that_count(source: str, patterns: set[str]) -> None:
    sites = find_patterns("import re\n" + source, "a.py")
    assert {site.pattern for site in sites} == patterns


def test_the_place_is_in_the_class() -> None:
    source = "import re\nclass A:\n P = 'a+'\n def f(self): re.match(self.P, '')\nclass B(A): P = 'b'\n"
    assert [(site.pattern, site.place.line, site.place.column) for site in find_patterns(source, "a.py")] == [
        ("a+", 3, 6),
        ("b", 5, 17),
    ]
