"""Pattern objects in lists, tuples and dicts: their uses where they come out again."""

from __future__ import annotations

import pytest

from patlint.source import find_patterns

SEEN = [
    ("_T = [re.compile('a'), re.compile('b')]\nfor r in _T: r.match(s)", ["match"], True),
    (
        "_T = (re.compile('a'), re.compile('b'))\ndef f(s):\n for r in _T:\n  if r.search(s): return 1",
        ["search"],
        True,
    ),
    ("_T = [re.compile(p) for p in ('a', 'b')]\nx = any(r.match(s) for r in _T)", ["match"], True),
    ("_T = tuple(re.compile(p) for p in ('a', 'b'))\nfor r in _T: r.match(s)", ["match"], True),
    ("_T = list(map(re.compile, ('a', 'b')))\nfor r in _T: r.match(s)", ["match"], True),
    ("for r in [re.compile('a')]: r.match(s)", ["match"], True),
    ("for r in map(re.compile, ('a', 'b')): r.match(s)", ["match"], True),
    ("_T = [(re.compile('a'), 1), (re.compile('b'), 2)]\nfor r, n in _T: r.match(s)", ["match"], True),
    ("_T = [(1, re.compile('a'))]\nfor n, r in _T: r.match(s)", ["match"], True),
    ("_T = [(1, re.compile('a'))]\nfor row in _T: row[1].match(s)", ["match"], True),
    ("_T = [(1, re.compile('a'))]\nfor row in _T: print(row[0])", [], True),
    ("_T = [(1, (2, re.compile('a')))]\nfor n, (m, r) in _T: r.match(s)", ["match"], True),
    ("_T = {'x': re.compile('a')}\n_T['x'].match(s)", ["match"], True),
    ("_T = {'x': re.compile('a')}\nfor k, r in _T.items(): r.match(s)", ["match"], True),
    ("_T = {'x': re.compile('a')}\nfor r in _T.values(): r.match(s)", ["match"], True),
    ("_T = {'x': re.compile('a')}\nfor k in _T: print(k)", [], True),
    ("_T = {'x': re.compile('a')}\n_T.get('x').match(s)", ["match"], True),
    ("_T = {k: re.compile(p) for k, p in (('x', 'a'), ('y', 'b'))}\n_T[k].match(s)", ["match"], True),
    ("_T = [re.compile('a')]\n_T[0].match(s)", ["match"], True),
    ("_T = (re.compile('b'), re.compile('a'))\n_T[0].match(s)", [], True),
    ("_T = [re.compile('a')]\nfor n, r in enumerate(_T): r.match(s)", ["match"], True),
    ("_T = [re.compile('a')]\nfor n, r in zip((1, 2), _T): r.match(s)", ["match"], True),
    ("_T = [re.compile('a')]\nfor r in reversed(_T): r.match(s)", ["match"], True),
    ("_T = [re.compile('a')] + [x]\nfor r in _T: r.match(s)", ["match"], True),
    ("_T = []\n_T.append(re.compile('a'))\nfor r in _T: r.match(s)", ["match"], True),
    ("_T = {}\n_T['x'] = re.compile('a')\n_T['x'].match(s)", ["match"], True),
    ("_T = [re.compile('a').match]\nfor m in _T: m(s)", ["match"], True),
    ("_T = [re.compile('a')]\n_T2 = [r.match for r in _T]\nfor m in _T2: m(s)", ["match"], True),
    ("_T = [[re.compile('a')]]\nfor g in _T:\n for r in g: r.match(s)", ["match"], True),
    ("_A, _B = (re.compile('a'), 1), 2\n_A[0].match(s)", ["match"], True),
    ("class A:\n _t = [re.compile('a')]\n def f(self, s):\n  for r in self._t: r.match(s)", ["match"], True),
    ("def f(s):\n t = [re.compile('a')]\n return any(r.match(s) for r in t)", ["match"], True),
    ("for r in [re.compile('a')]: r.match(s)\nfor r in x: r.search(s)", ["match"], True),
    # lost
    ("T = [re.compile('a')]\nfor r in T: r.match(s)", ["match"], False),
    ("_T = [re.compile('a')]\ng(_T)\nfor r in _T: r.match(s)", ["match"], False),
    ("_T = [re.compile('a')]\nfor r in _T: g(r)", [], False),
    ("_T = [re.compile('a')]\nr, = _T\nr.match(s)", [], False),
    ("_T = [re.compile('a')]\nr, *q = _T", [], False),
    ("def f(): return [re.compile('a')]", [], False),
    ("g([re.compile('a')])", [], False),
    ("_T = {re.compile('a'): 1}\nfor r in _T: r.match(s)", [], False),
    ("_T = [re.compile('a')]\nfor r in _T: pass\nr.match(s)", [], False),
    ("_T = [re.compile('a')]\nfor r in _T: pass\nelse: r.match(s)", [], False),
    ("_T = [re.compile('a')]\nfor r in _T:\n r = x\n r.match(s)", ["match"], False),
    ("_T = [('x', re.compile('a'))]\nfor n, r in _T:\n if n == 'y': r.match(s)", [], False),
    ("def f(t):\n t.append(re.compile('a'))\n for r in t: r.match(s)", [], False),
    ("_T = g()\n_T['x'] = re.compile('a')\nfor r in _T: r.match(s)", [], False),
    ("_T = [1]\n_T[0] = re.compile('a')\nfor r in _T: r.match(s)", [], False),
    ("_T = [re.compile('a')]\nx = [*_T]", [], False),
    ("_T = (*h, re.compile('a'))\n_T[1].match(s)\n_T[2].search(s)", [], False),
    ("_T = [re.compile('a')]\n_T.x", [], False),
    ("for p in ('a', 'b'): r = re.compile(p)\nr.match(s)", [], False),
    ("def f(s):\n for p in ('a', 'b'):\n  r = re.compile(p)\n  r.match(s)\n r.search(s)", ["match"], False),
    ("def f(s):\n for p in ('a', 'b'):\n  r = re.compile(p)\n  r.match(s)", ["match"], True),
]


@pytest.mark.parametrize("text, functions, seen", SEEN)
def test_following(text: str, functions: list[str], seen: bool) -> None:
    sites = [site for site in find_patterns("import re\n" + text, "a.py") if site.pattern == "a"]
    (site,) = sites
    assert [use.function for use in site.uses] == functions
    assert site.uses_seen is seen


def test_every_row_has_the_uses() -> None:
    text = "import re\n_T = [(re.compile(p), h) for p, h in (('a', 1), ('b', 2))]\nfor r, h in _T:\n r.match(s)\n"
    first, second = find_patterns(text, "a.py")
    assert (first.pattern, second.pattern) == ("a", "b")
    assert first.uses == second.uses and first.uses_seen and first.name == "_T"
    assert (first.place.line, first.place.column, second.place.column) == (2, 40, 50)
