"""Lists and dicts that change between their making and their use: no text is claimed that `re` is not given."""

from __future__ import annotations

import pytest

from patlint.source import find_patterns, read_module, reasons
from tests.source.recording import run

CHANGED = [
    "D = {'k': ['a']}\nD['k'].append('b')\nre.match('|'.join(D['k']), '')",
    "D = {'k': ['a']}\nD.get('k').append('b')\nre.match('|'.join(D['k']), '')",
    "D = {'k': ['a']}\nfor v in D.values(): v.append('b')\nre.match('|'.join(D['k']), '')",
    "D = {'k': ['a']}\nfor k, v in D.items(): v.append('b')\nre.match('|'.join(D['k']), '')",
    "L = [['a']]\nfor i, v in enumerate(L): v.append('b')\nre.match('|'.join(L[0]), '')",
    "L = [['a']]\nfor r in enumerate(L): r[1].append('b')\nre.match('|'.join(L[0]), '')",
    "L = [['a']]\nM = L + []\nM[0].append('b')\nre.match('|'.join(L[0]), '')",
    "L = [['a']]\nM = [*L]\nM[0].append('b')\nre.match('|'.join(L[0]), '')",
    "T = (['a'],)\nT[0].append('b')\nre.match('|'.join(T[0]), '')",
    "T = (['a'], ['b'])\nx, y = T\nx.append('c')\nre.match('|'.join(T[0]), '')",
    "L = list(('a',))\nL.append('b')\nre.match('|'.join(L), '')",
    "L = sorted(('a',))\nL.append('b')\nre.match('|'.join(L), '')",
    "L = ['a'] + ['b']\nL.append('c')\nre.match('|'.join(L), '')",
    "L = ['a', 'b'][:1]\nL.append('c')\nre.match('|'.join(L), '')",
    "L = list(('a',))\nL.append('b')\nfor p in L: re.match(p, '')",
    "def f(): return ['a']\nL = f()\nL.append('b')\nre.match('|'.join(L), '')",
    "def f():\n return ['a']\nL = f()\nL.append('b')\nfor p in L: re.match(p, '')",
    "def f(x):\n x.append('b')\n return '|'.join(x)\nre.match(f(['a']), '')",
    "def f(x=['a']):\n x.append('b')\n return '|'.join(x)\nre.match(f(), '')",
    "G = (p for p in ('a', 'b'))\nnext(G)\nre.match('|'.join(G), '')",
    "G = reversed(['a', 'b'])\nnext(G)\nre.match('|'.join(G), '')",
    "class A:\n D = {'k': ['a']}\nA.D['k'].append('b')\nre.match('|'.join(A.D['k']), '')",
    "class A:\n L = list(('a',))\nA.L.append('b')\nfor p in A.L: re.match(p, '')",
]
KEPT = [
    "D = {'k': ['a']}\nre.match('|'.join(D['k']), '')\nprint(D['k'][0])",
    "D = {'k': ['a']}\nn = D['k'][0]\nn.strip()\nre.match(D['k'][0] + 'b', '')",
    "D = {'k': ['a']}\nfor k, v in D.items():\n for x in v: x.strip()\nre.match('|'.join(D['k']), '')",
    "L = [('x', ['a'])]\nfor n, v in L: pass\nre.match(L[0][1][0], '')",
    "L = list(('a',))\nlen(L)\nre.match('|'.join(L), '')",
    "L = tuple(p for p in ('a', 'b'))\nprint(L)\nfor p in L: re.match(p, '')",
    "def f(x): return '|'.join(x)\nre.match(f(['a', 'b']), '')",
]


@pytest.mark.parametrize("source", CHANGED)
def test_what_was_changed_is_not_told(source: str) -> None:
    module = read_module(f"import re\n{source}\n", "x.py")
    assert [site.pattern for site in module.sites] == []
    assert [each.reason for each in module.unresolved] == [reasons.CHANGED]


@pytest.mark.parametrize("source", KEPT)
def test_what_stays_is_told(source: str) -> None:
    text = f"import re\n{source}\n"
    told = sorted(str(site.pattern) for site in find_patterns(text, "x.py"))
    assert told and told == sorted(pattern for _, pattern, _ in run(text))
