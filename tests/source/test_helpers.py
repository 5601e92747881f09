"""Functions of the file that build patterns or are given them: told as they run, near misses left alone."""

from __future__ import annotations

import pytest

from patlint.source import find_patterns, read_module, reasons
from tests.source.recording import run

RESOLVED = {
    "helper": "import re\ndef f(p): return '(%s)' % p\nre.match(f('a'), '')",
    "helpers of helpers": (  # as in the standard library's tokenize
        "import re\ndef group(*c): return '(' + '|'.join(c) + ')'\ndef any(*c): return group(*c) + '*'\n"
        "A = any('a', group('b', r'\\d'))\nB = A + group(A, any(*['c', 'd']))\nre.match(B, '')"
    ),
    "a default": "import re\nA = 'x'\ndef f(p, q='b' + A, *, r='c'): return p + q + r\nre.match(f('a'), '')",
    "keywords": "import re\ndef f(p, /, q, *, r='c'): return f'{p}{q}{r}'\nre.match(f('a', r='y', q='x'), '')",
    "statements": (
        "import re\ndef f(p):\n '''Text.'''\n if not p: raise ValueError\n q = p.strip()\n q = q + '+'\n"
        " return '(?:{})'.format(q)\nre.match(f(' a '), '')"
    ),
    "lambda": "import re\nf = lambda p, n=2: p * n\nre.match(f('a') + f('b', 3), '')",
    "within a function": "import re\ndef g():\n def f(p): return p + 'b'\n re.match(f('a'), '')\ng()",
    "results kept": (
        "import re, functools\n@functools.lru_cache(maxsize=None)\ndef f(p): return p + 'b'\nre.match(f('a'), '')"
    ),
    "called twice": "import re\ndef f(p): return p + f2(p)\ndef f2(p): return p * 2\nre.match(f(f('a')), '')",
    "in a loop": "import re\ndef f(p): return p + 'b'\nfor p in ('a', 'c'): re.match(f(p), '')",
    "a closure": "import re\ndef f(p):\n def g(): return p + 'x'\n return g()\nre.match(f('a'), '')",
    "given": "import re\ndef _c(p): return re.compile(p, re.I)\nA = _c('a')\nB = _c('b' + 'c')",
    "given by keyword": (
        "import re\ndef _c(p, flags=re.M): return re.compile(p, flags)\n_c(p='a')\n_c('b', flags=re.S)"
    ),
    "given through two": (
        "import re\ndef _c(p): return re.compile(p)\ndef _d(p): return _c('(%s)' % p)\n_d('a')\n_d('b')"
    ),
    "given in a loop": "import re\ndef _c(p): return re.compile(p)\nfor p in ('a', 'b'): _c(p)",
    "given to a closure": (
        "import re\ndef _f(p):\n def g(s): return re.match(p, s)\n return g\n_f('a')('')\n_f('b')('')"
    ),
    "given with a text": (
        "import re\ndef _f(p, s):\n if s: return re.match(p, s)\ndef g(s):\n _f('a', s)\n _f('b', s)\ng('a')"
    ),
    "the default is given": "import re\ndef _f(p='a'): return re.match(p, '')\n_f()\n_f('b')",
    "given to a function within": "import re\ndef g():\n def c(p): re.compile(p)\n c('a')\n c('b')\ng()",
    "given to the body of a class": "import re\nclass A:\n def _c(p): return re.compile(p)\n X = _c('a')\n Y = _c('b')",
}


@pytest.mark.parametrize("name", RESOLVED)
def test_resolved_as_run(name: str) -> None:
    source = RESOLVED[name]
    module = read_module(source, "a.py")
    assert module.unresolved == ()
    given = set(run(source))
    assert given, "the snippet must call re"
    assert {(site.function, site.pattern, site.flags) for site in module.sites} == given


UNRESOLVED = [
    ("def f(p): return '(%s)' % p\nf = g(f)\nre.match(f('a'), '')", reasons.CALL),
    ("@g\ndef f(p): return '(%s)' % p\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p):\n if p: return 'x'\n return p\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p): yield p\nre.match(f('a'), '')", reasons.CALL),
    ("async def f(p): return p\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p, **k): return p\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p): return p + x()\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p):\n p += 'b'\n return p\nre.match(f('a'), '')", reasons.REASSIGNED),
    ("def f(p):\n for q in p: p = q\n return p\nre.match(f('a'), '')", reasons.REASSIGNED),
    ("def f(p): return f(p + 'a')\nre.match(f('a'), '')", reasons.TOO_DEEP),
    ("def f(p): return p\ndef f(p): return 'b'\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p): return p\nexec(x)\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p): return p\nglobals()['f'] = x\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p): return p\nfrom m import *\nre.match(f('a'), '')", reasons.CALL),
    ("def f(p): return p\ndef g(f): re.match(f('a'), '')", reasons.CALL),
    ("def f(p): return p\nre.match(f(x), '')", reasons.PARAMETER),
    ("def f(p): return p\nre.match(f(*x), '')", reasons.UNBOUND),
    ("def f(*p): return '|'.join(p)\nre.match(f('a', x), '')", reasons.CALL),
    ("def f(p): return p\nre.match(f('a', 'b'), '')", reasons.CALL),
    ("def f(p, /): return p\nre.match(f(p='a'), '')", reasons.CALL),
    ("if x:\n def f(p): return p\nelse:\n f = g\nre.match(f('a'), '')", reasons.CALL),
    ("class A:\n def f(p): return p\nre.match(A.f('a'), '')", reasons.CALL),
    ("def f(p): re.match(p, '')", reasons.PARAMETER),
    ("def _f(p): return re.compile(p)\n_f(x)", reasons.UNBOUND),
    ("def _f(p): return re.compile(p)\n_f(*x)", reasons.STARRED),
    ("def _f(p): return re.compile(p)\n_f(**x)", reasons.STARRED),
    ("def _f(p): return re.compile(p)\nmap(_f, x)", reasons.PARAMETER),
    ("@g\ndef _f(p): return re.compile(p)\n_f('a')", reasons.PARAMETER),
    ("def _f(p):\n if p: re.compile(p)\n_f('a')", reasons.PARAMETER),
    ("def _f(p, k):\n if k == 'r': re.compile(p)\n_f('a', 'r')\n_f('*', 'g')", reasons.PARAMETER),
    ("def _f(p, k=1):\n if not k: return\n re.compile(p)\n_f('a')", reasons.PARAMETER),
    ("def _f(p):\n p = p or 'b'\n re.compile(p)\n_f('a')", reasons.EXPRESSION),
    ("def _f(p): re.compile(p)\ndef _f(p): pass\n_f('a')", reasons.PARAMETER),
    ("def _f(p): re.compile(p)\n_f('a')\nexec(x)", reasons.PARAMETER),
    ("class A:\n def _f(self, p): re.compile(p)\n def g(self): self._f('a')", reasons.PARAMETER),
    ("def _f(*p): re.compile(p)\n_f('a')", reasons.PARAMETER),
]


@pytest.mark.parametrize("source, reason", UNRESOLVED)
def test_unresolved(source: str, reason: str) -> None:
    module = read_module("import re\n" + source, "a.py")
    assert module.sites == ()
    assert [call.reason for call in module.unresolved] == [reason]


PARTLY = [
    ("def f(p): return re.compile(p)\nf('a')", {"a"}, reasons.PARAMETER),  # others may call it
    ("def _f(p): return re.compile(p)\n_f('a')\n_f(x)", {"a"}, reasons.UNBOUND),
    ("def _f(p): return re.compile(p)\n_f('a')\nx = [_f]", {"a"}, reasons.PARAMETER),
    ("def _f(p): return re.compile(p)\n_f('a')\ngetattr(m, '_f')('b')", {"a"}, reasons.PARAMETER),
    ("def _f(p): return re.compile(p)\n_f('a')\n_f()", {"a"}, reasons.PARAMETER),
    ("for p in ('a', x, 'b'): re.match(p, '')", {"a", "b"}, reasons.UNBOUND),
]


@pytest.mark.parametrize("source, patterns, reason", PARTLY)
def test_told_in_part(source: str, patterns: set[str], reason: str) -> None:
    module = read_module("import re\n" + source, "a.py")
    assert {site.pattern for site in module.sites} == patterns
    assert [call.reason for call in module.unresolved] == [reason]


def test_the_place_is_at_the_caller() -> None:
    source = "import re\ndef _c(p):\n return re.compile(p)\n_A = _c('a+')\n_B = _c(\n 'b')\n"
    first, second = find_patterns(source, "a.py")
    assert (first.pattern, first.place.line, first.place.column, first.statement) == ("a+", 4, 9, 4)
    assert (second.pattern, second.place.line, second.place.column, second.statement) == ("b", 6, 2, 5)
    assert first.spelling(1) == "+" and first.place_of(1).column == 11


USES = [
    # each call's pattern goes its own way
    (
        "def _c(p): return re.compile(p)\n_A = _c('a')\n_B = _c('b')\n_A.match(s)\n_B.search(s)",
        {"a": (["match"], True), "b": (["search"], True)},
    ),
    (
        "def _c(p): return re.compile(p)\n_A = _c('a').match\nB = _c('b')\n_A(s)\nB.search(s)",
        {"a": (["match"], True), "b": (["search"], False)},
    ),
    ("def _c(p):\n r = re.compile(p)\n return r\n_A = _c('a')\n_A.match(s)", {"a": (["match"], True)}),
    ("def _c(): return re.compile('a')\n_c().match(s)\n_c().search(s)", {"a": (["match", "search"], True)}),
    ("def c(): return re.compile('a')\nc().match(s)", {"a": (["match"], False)}),
    ("def _c(): return re.compile('a')\n_c().match(s)\ng(_c)", {"a": (["match"], False)}),
    ("def _c(n):\n return _c(n - 1) if n else re.compile('a')\n_c(1).match(s)", {"a": ([], False)}),
    (
        "def _f(p, s): return re.match(p, s)\n_f('a', s)\n_f('b', s)",
        {"a": (["match"], True), "b": (["match"], True)},
    ),
]


@pytest.mark.parametrize("source, expected", USES)
def test_uses(source: str, expected: dict[str, tuple[list[str], bool]]) -> None:
    sites = find_patterns("import re\n" + source, "a.py")
    found = {site.pattern: ([use.function for use in site.uses], site.uses_seen) for site in sites}
    assert found == expected


NOT_WHAT_THEY_LOOK = [
    # a function of the file's own by the name of one that keeps results
    "def cache(f): return lambda x: 'q'\n@cache\ndef w(x): return x\nre.match(w('a'), '')",
    # a keyword by the name of `*p`: it lands in `**k`
    "def _f(*p, **k): re.match(p[0], '')\n_f('a', p='b')",
]


@pytest.mark.parametrize("source", NOT_WHAT_THEY_LOOK)
def test_not_what_they_look(source: str) -> None:
    found = read_module("import re\n" + source, "a.py")
    assert found.sites == () and len(found.unresolved) == 1


def test_a_keyword_beside_a_default() -> None:
    found = find_patterns("import re\ndef _f(p='a', /, **k): re.match(p, '')\n_f(p='b')", "a.py")
    assert [site.pattern for site in found] == ["a"]


CALLING_THEMSELVES = [
    "def f(t, w):\n if t: f(t, w)\n else: re.search(w, t)\n",
    "def f(t, w='x'):\n if w: return re.match(w, t)\n return g(t, w)\ndef g(t, w): return f(t, w)\n",
    "def f(t, w='x'):\n if w: return re.match(w, t)\n return g(t, w)\ndef g(t, w): return f(t, w)\nf('', 'y')\n",
    "def f(t, *, w):\n if not t: return re.match(w, t)\n return f(t[1:], w=w + 'a')\nf('aa', w='b')\n",
]


@pytest.mark.parametrize("source", CALLING_THEMSELVES)
def test_functions_that_call_themselves_are_no_circle(source: str) -> None:
    found = read_module("import re\n" + source, "circle.py")
    assert {each.pattern for each in found.sites} <= {"x", "y", "b"}
    assert found.unresolved or found.sites
