"""Patterns and flags told from the text are those that `re` is given when the snippet runs."""

from __future__ import annotations

import pytest

from patlint.source import find_patterns, read_module, reasons
from patlint.source.sinks import ENGINE
from tests.source.recording import run

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning")  # positional counts, 3.13

RESOLVED = {
    "plain": "import re\nre.match('a+', 'x')",
    "renamed": "import re as x\nx.search('a', '')",
    "from": "from re import match\nmatch('a', '')",
    "from renamed": "from re import compile as c\nc('a')",
    "star": "from re import *\ncompile('a', I)",
    "local import": "def f():\n import re\n re.match('a', '')\nf()",
    "try import": "try:\n import re\nexcept ImportError:\n re = None\nre.match('a', '')",
    "deleted at the end": "import re\nre.match('a', '')\ndel re",
    "alias of a function": "import re\nfind = re.search\nfind('a', '')",
    "alias of the module": "import re\n_r = re\n_r.search('a', '')",
    "module import after a comma": "import os, re\nre.match('a', '')",
    "module import continued": "import os, \\\n  re\nre.match('a', '')",
    "from import in parentheses": "from re import (\n  match,\n)\nmatch('a', '')",
    "two imports with one name": "import re\ndef f():\n import re\n re.match('a', '')\nf()",
    "constant": "import re\nP = 'a'\nre.match(P, '')",
    "annotated": "import re\nP: str = 'a'\nre.match(P, '')",
    "constant of a constant": "import re\nA = 'a'\nP = A + 'b'\nre.match(P, '')",
    "constant in a function": "import re\nP = 'a'\ndef f():\n re.match(P, '')\nf()",
    "local constant": "import re\ndef f():\n p = 'a'\n re.match(p, '')\nf()",
    "closure": "import re\ndef f():\n p = 'a'\n def g():\n  re.match(p, '')\n g()\nf()",
    "class constant in its body": "import re\nclass A:\n P = 'a'\n R = re.compile(P)",
    "class constant by name": "import re\nclass A:\n P = 'a'\nre.match(A.P, '')",
    "private constant of self": (
        "import re\nclass A:\n __p = 'a'\n def f(self):\n  re.match(self.__p, '')\nA().f()"
    ),
    "same text on both ways": "import re\nif len('x'):\n P = 'a'\nelse:\n P = 'a'\nre.match(P, '')",
    "pairs": "import re\nA, B = 'a', 'b'\nre.match(A + B, '')",
    "walrus": "import re\nre.match((p := 'a'), '')",
    "straight line": "import re\ndef f():\n p = 'a'\n re.match(p, '')\n p = 2\nf()",
    "added to itself": "import re\ndef f():\n p = 'a'\n p = p + 'b'\n re.match(p, '')\nf()",
    "deleted later": "import re\nP = 'a'\nre.match(P, '')\ndel P",
    "adjacent": "import re\nre.match('a' r'\\d' \"b\", '')",
    "plus": "import re\nre.match('a' + r'\\d' + 'b' * 3 + 2 * 'c', '')",
    "f-string": "import re\nA = 'x'\nN = 3\nre.match(f'{A}{{1}}{N:02d}{\"q\"!r}' 'z', '')",
    "percent": "import re\nA = 'x'\nre.match('%s%%%d[%r]' % (A, 5, 'q'), '')",
    "percent of one": "import re\nre.match('(%s)' % 'x', '')",
    "percent of a dict": "import re\nre.match('%(a)s+%(b)03d' % {'a': 'x', 'b': 5}, '')",
    "percent of bytes": "import re\nre.match(b'%s%%' % b'x', b'')",
    "format": "import re\nre.match('{}{{2}}{}'.format('a', 'b'), '')",
    "format by name": "import re\nA = 'q'\nre.match('{x}{0}{x:>3}'.format('a', x=A), '')",
    "join": "import re\nre.match('|'.join(['a', 'b' + 'c']), '')",
    "join of a table": "import re\nW = ('a', 'b')\nre.match('(%s)' % '|'.join(W), '')",
    "join of a list that stays": "import re\nW = ['b', 'a']\nre.match('|'.join(sorted(W)), '')",
    "join of escapes": "import re\nre.match('|'.join(map(re.escape, ['a.', 'b'])), '')",
    "join of a comprehension": "import re\nre.match('|'.join(re.escape(w) for w in ('a+', 'b')), '')",
    "join over a dict": "import re\nD = {'h': 'q'}\nre.match('|'.join([x % D for x in ('%(h)s', 'b')]), '')",
    "escape": "import re\nre.match(re.escape('a.b'), '')",
    "both ways the same": "import re\nre.match('a' if len('x') else 'a', '')",
    "methods": "import re\nre.match(' a '.strip().upper().replace('A', 'b'), '')",
    "encoded": "import re\nre.match('a'.encode(), b'')",
    "slices": "import re\nP = 'abcd'\nre.match(P[1:-1] + P[0], '')",
    "item of a tuple": "import re\nT = ('a', 'b')\nre.match(T[1], '')",
    "string module": "import re, string\nre.match('[%s]' % string.digits, '')",
    "text of a compiled one": "import re\nA = re.compile('a')\nre.match(A.pattern + 'a', '')",
    "parentheses": "import re\nre.match((((('a')))), '')",
    "bytes": "import re\nre.match(rb'a\\d' b'\\x41', b'')",
    "flag": "import re\nre.match('a', '', re.I)",
    "flags": "import re\nre.match('a', '', flags=re.I | re.MULTILINE | re.X)",
    "flags by name": "import re\nfrom re import DOTALL as D\nF = D | re.A\nre.compile('a', F)",
    "flag of RegexFlag": "import re\nre.compile('a', re.RegexFlag.I | re.RegexFlag['M'])",
    "flag as a number": "import re\nre.compile('a', 10)",
    "flags taken away": "import re\nre.compile('a', (re.I | re.M) & re.I)",
    "count is no flag": "import re\nre.sub('a', 'b', 'c', re.I)",
    "maxsplit and flags": "import re\nre.split('a', 'c', 1, re.I)",
    "count and flags": "import re\nre.sub('a', 'b', 'c', 1, re.I)",
    "all by keyword": "import re\nre.sub(string='c', repl='b', pattern='a', flags=re.S)",
    "compile by keyword": "import re\nre.compile(flags=re.I, pattern='a')",
    "inline flags stay": "import re\nre.compile('(?i)a')",
    "surrogate": "import re\nre.match('\\ud800', '')",
    "long chain": "import re\nre.match(" + " + ".join(["'a'"] * 800) + ", '')",
    "many adjacent": "import re\nre.match(" + " ".join(["'a'"] * 3000) + ", '')",
    "loop over a tuple": "import re\nfor p in ('a', 'b+'):\n re.match(p, '')",
    "loop over a constant": "import re\nT = ['a', 'b+']\ndef f():\n for p in T:\n  re.match(p, '')\nf()",
    "loop over rows": "import re\nT = (('x', 'a', len), ('y', 'b', None))\nfor n, p, h in T: re.match(p, n)",
    "loop over rows with flags": "import re\nfor p, f in (('a', re.I), ('b', re.M | re.S)): re.match(p, '', f)",
    "loop over names": "import re\nA = 'a'\nB = A + 'b'\nfor p in (A, B, 'c'): re.match(p, '')",
    "loop over values": "import re\nD = {'x': 'a', 'y': 'b'}\nfor p in D.values(): re.match(p, '')",
    "loop over keys": "import re\nD = {'a': 1, 'b': 2}\nfor p in D: re.match(p, '')",
    "loop over items": "import re\nD = {'x': 'a', 'y': 'b'}\nfor n, p in D.items(): re.match(n + p, '')",
    "loop with numbers": "import re\nfor n, p in enumerate(['a', 'b']): re.match('%s{%d}' % (p, n), '')",
    "loop over two tables": "import re\nfor n, p in zip(('x', 'y'), ('a', 'b')): re.match(n + p, n)",
    "loop in a loop": "import re\nfor a in ('a', 'b'):\n for b in ('c', 'd'): re.match(a + b, '')",
    "loop over a row": "import re\nT = [('a', 'b'), ('c',)]\nfor r in T:\n for p in r: re.match(p, '')",
    "loop over a sum": "import re\nA = ['a']\nB = ['b']\nfor p in A + B + ['c']: re.match(p, '')",
    "loop over a starred one": "import re\nA = ('a', 'b')\nfor p in (*A, 'c'): re.match(p, '')",
    "range and chr": "import re\nre.match('[%s]' % ''.join(chr(c) for c in (9, 32) + tuple(range(40, 43))), '')",
    "chain": (
        "import re\nfrom itertools import chain\n"
        "re.match(''.join([chr(c) for c in chain(range(97, 99), [100])]), '')"
    ),
    "dedent": "import re, textwrap\nre.match(textwrap.dedent('\\n  a\\n   b\\n'), '', re.X)",
    "join of a dict": "import re\nD = {'a': 1, 'b': len}\nre.match('|'.join(D), '')",
    "join of values": "import re\nD = {'a': 'x', 'b': 'y'}\nre.match('|'.join(D.values()), '')",
    "join of pairs": "import re\nT = [('a', 'x'), ('b', 'y')]\nre.match('|'.join('(?P<%s>%s)' % p for p in T), '')",
    "join of parts": (
        "import re\nT = [('a', 'x', len), ('b', 'y', 1)]\nre.match('|'.join(f'{n}{p}' for n, p, _ in T), '')"
    ),
    "join of items": "import re\nD = {'a': 'x', 'b': 'y'}\nre.match('|'.join(k + v for k, v in D.items()), '')",
    "longest first": "import re\nD = {'a': 1, 'bb': 2}\nre.match('|'.join(sorted(D, key=lambda x: -len(x))), '')",
    "characters": "import re\nre.match('|'.join(f'{ord(c):02X}' for c in sorted('ba')), '')",
    "vars of a class": "import re\nclass A:\n p = 'a'\n q = p + 'b'\n n = [1]\nre.match('%(q)s' % vars(A), '')",
    "map": "import re\nA, B = map(re.compile, ('a', 'b'))",
    "partial": "import re\nfrom functools import partial\npartial(re.sub, 'a', 'b', flags=re.I)('')",
    "compiled by a helper": "import re\ndef f(): return re.compile('a')\nre.match(f(), '')",
    "loop over a set": "import re\nfor p in {'a', 'b'}: re.match(p, '')",
    "comprehension": "import re\nA = [re.compile(p) for p in ('a', 'b')]",
    "comprehension over rows": "import re\nA = {n: re.compile(p, re.I) for n, p in (('x', 'a'), ('y', 'b'))}",
    "nested comprehension": "import re\nA = [re.match(p + q, '') for p in ('a', 'b') for q in ('c', p)]",
    "generator": "import re\nany(re.match(p, '') for p in ('a', 'b'))",
    "loop with a test of its outcome": (
        "import re\nfor p in ('a', 'b'):\n m = re.match(p, '')\n if m: continue\n re.match(p + 'c', '')"
    ),
    "loop under a condition": "import re\nx = len('a')\ndef f(x):\n"
    " for p in ('a', 'b'):\n  if p in x: re.match(p, x)\nf('ab')",
    "two loops with one name": "import re\nfor p in ('a', 'b'): re.match(p, '')\nfor p in 'c', 'd': re.match(p, '')",
    "a name made from a row": "import re\nfor p in ('a', 'b'):\n q = '(%s)' % p\n re.match(q, '')",
    "rows of lists": "import re\nT = [['a', 1], ['b', 2]]\nfor p, _ in T: re.match(p, '')",
    "star import before": "import re\nfrom string import *\nP = 'a'\nre.match(P, '')",
    "form feed": "import re\n\x0cP = 'a'\x0c\nre.match(P, '')",
}


@pytest.mark.parametrize("name", RESOLVED)
def test_resolved_as_run(name: str) -> None:
    source = RESOLVED[name]
    module = read_module(source, "a.py")
    assert module.unresolved == ()
    told = {(site.function, site.pattern, site.flags) for site in module.sites}
    given = set(run(source))
    assert given, "the snippet must call re"
    assert told == given


UNRESOLVED = [
    ("import re\ndef f(p):\n re.match(p, '')", reasons.PARAMETER),
    ("import re\ndef f(p='a'):\n re.match(p, '')", reasons.PARAMETER),
    ("import re\nfrom m import P\nre.match(P, '')", reasons.IMPORTED),
    ("import re\nfrom m import *\nre.match(P, '')", reasons.IMPORTED),
    ("import re\nP = 'a'\nP += 'b'\nre.match(P, '')", reasons.REASSIGNED),
    ("import re\nP = 'a'\ndef g():\n global P\n P = 'b'\nre.match(P, '')", reasons.REASSIGNED),
    (
        "import re\ndef f():\n p = 'a'\n def g():\n  nonlocal p\n  p = 'b'\n re.match(p, '')",
        reasons.REASSIGNED,
    ),
    ("import re\nfor p in x:\n re.match(p, '')", reasons.UNBOUND),
    ("import re\ndef f(x):\n for p in x:\n  re.match(p, '')", reasons.PARAMETER),
    ("import re\n[re.match(p, '') for p in open('a')]", reasons.LOOP_VARIABLE),
    ("import re\nfor p in ('a', 'b'): pass\nre.match(p, '')", reasons.LOOP_VARIABLE),
    ("import re\nfor p in ('a', 'b'): pass\nelse: re.match(p, '')", reasons.LOOP_VARIABLE),
    ("import re\nfor p in ('a', 'b'):\n p = g(p)\n re.match(p, '')", reasons.REASSIGNED),
    ("import re\nfor p in ('a', 'b'):\n if x: p = 'c'\n re.match(p, '')", reasons.REASSIGNED),
    ("import re\nfor p in ('a', 'b'):\n for p in ('c', x):\n  pass\n re.match(p, '')", reasons.REASSIGNED),
    ("import re\nfor p in ('a', 'b'):\n def f(): re.match(p, '')", reasons.LOOP_VARIABLE),
    ("import re\nfor p in ('a', 'b'):\n if p == 'a': re.match(p, '')", reasons.LOOP_VARIABLE),
    (
        "import re\nfor k, p in (('r', 'a'), ('g', '*')):\n if k == 'r': re.match(p, '')",
        reasons.LOOP_VARIABLE,
    ),
    (
        "import re\nfor k, p in (('r', 'a'), ('g', '*')):\n k == 'r' and re.match(p, '')",
        reasons.LOOP_VARIABLE,
    ),
    (
        "import re\nfor k, p in (('r', 'a'), ('g', '*')):\n if k != 'r': continue\n re.match(p, '')",
        reasons.LOOP_VARIABLE,
    ),
    (
        "import re\nfor k, p in (('r', 'a'), ('g', '*')):\n j = k.upper()\n if j == 'R': re.match(p, '')",
        reasons.LOOP_VARIABLE,
    ),
    (
        "import re\nfor k, p in (('r', 'a'), ('g', '*')):\n match k:\n  case 'r': re.match(p, '')",
        reasons.LOOP_VARIABLE,
    ),
    ("import re\n[re.match(p, '') for k, p in (('r', 'a'), ('g', '*')) if k == 'r']", reasons.LOOP_VARIABLE),
    ("import re\n[re.match(p, '') if k == 'r' else 1 for k, p in (('r', 'a'),)]", reasons.LOOP_VARIABLE),
    ("import re\nT = ['a', 'b']\nT.append('c')\nfor p in T: re.match(p, '')", reasons.CHANGED),
    ("import re\nT = ['a', 'b']\nT[0] = 'c'\nfor p in T: re.match(p, '')", reasons.CHANGED),
    ("import re\nT = ['a', 'b']\ndel T[0]\nfor p in T: re.match(p, '')", reasons.CHANGED),
    ("import re\nT = ['a', 'b']\nT += ['c']\nfor p in T: re.match(p, '')", reasons.REASSIGNED),
    (
        "import re\nT = ['a', 'b']\ndef f():\n global T\n T = []\nfor p in T: re.match(p, '')",
        reasons.REASSIGNED,
    ),
    ("import re\nT = ['a', 'b']\nfrom m import *\nfor p in T: re.match(p, '')", reasons.STAR_IMPORT),
    ("import re\nT = ['a', 'b']\nexec(x)\nfor p in T: re.match(p, '')", reasons.LOOP_VARIABLE),
    ("import re\nT = ('a', 'b')\nexec(x)\ndef f():\n for p in T: re.match(p, '')", reasons.DYNAMIC),
    ("import re\nfor p in ('a', 'b'):\n exec(x)\n re.match(p, '')", reasons.LOOP_VARIABLE),
    (
        "import re\nT = [['a'], ['b']]\nfor r in T: r.append(1)\nfor (p,) in T: re.match(p, '')",
        reasons.CHANGED,
    ),
    (
        "import re\nT = [('x', ['a'])]\nfor _, r in T: r.append(1)\n"
        "for _, r in T:\n for p in r: re.match(p, '')",
        reasons.CHANGED,
    ),
    ("import re\nT = [('x', ['a'])]\nf(T[0])\nfor _, (p,) in T: re.match(p, '')", reasons.CHANGED),
    ("import re\nT = {'a': 1}\nT['b'] = 2\nfor p in T: re.match(p, '')", reasons.CHANGED),
    ("import re\nT = {'a': 1}\nT.update(x)\nfor p in T: re.match(p, '')", reasons.CHANGED),
    ("import re\nT = {'k': 'a', 'k': 'b'}\nfor p in T.values(): re.match(p, '')", reasons.ELEMENT),
    ("import re\nT = {'k': 'a', **x}\nfor p in T.values(): re.match(p, '')", reasons.ELEMENT),
    ("import re\nfor q, *p in (('a', 1), ('b', 2)): re.match(p, q)", reasons.LOOP_VARIABLE),
    (
        "import re\ndef enumerate(x): return x\nfor _, p in enumerate(('ab', 'cd')): re.match(p, '')",
        reasons.UNPACKED,
    ),
    ("import re\nclass A:\n for p in ('a', 'b'):\n  re.match(p, '')", reasons.LOOP_VARIABLE),
    ("import re\nS = {'a', 'b'}\nre.match('|'.join(S), '')", reasons.EXPRESSION),
    ("import re\nre.match('|'.join({'a', 'b'}), '')", reasons.EXPRESSION),
    ("import re\nre.match('|'.join(set('ab')), '')", reasons.CALL),
    ("import re\nre.match('|'.join(p + q for p, q in {('a', 'b'), ('c', 'd')}), '')", reasons.LOOP_VARIABLE),
    (
        "import re\nS = {'a', 'b'}\nre.match('|'.join('%d%s' % (n, p) for n, p in enumerate(S)), '')",
        reasons.LOOP_VARIABLE,
    ),
    (
        "import re\nre.match('|'.join(n + p for n, p in sorted([('b', 'c'), ('a', 'b')])), '')",
        reasons.LOOP_VARIABLE,
    ),
    ("import re\nD = {'a': 1}\nD['b'] = 2\nre.match('|'.join(D), '')", reasons.CHANGED),
    ("import re\nD = {'a': 1, **x}\nre.match('|'.join(D), '')", reasons.ELEMENT),
    ("import re\nclass A:\n p = 'a'\nA.p = 'b'\nre.match('%(p)s' % vars(A), '')", reasons.FORMATTED),
    ("import re\nclass A:\n p = 'a'\nx = A()\nre.match('%(p)s' % vars(x), '')", reasons.CALL),
    ("import re\nre.match('%(p)s' % vars(), '')", reasons.CALL),
    ("import re\nfrom m import dedent\nre.match(dedent('a'), '')", reasons.CALL),
    ("import re\nre.match('a' * len(x), '')", reasons.UNBOUND),
    ("import re\nre.match(''.join(map(chr, range(9))), '')", reasons.CALL),
    ("import re\nre.match(''.join(chr(c) for c in range(10 ** 6)), '')", reasons.TOO_LONG),
    ("import re\nfor p in (" + "'a'," * 3001 + "): re.match(p, '')", reasons.TOO_MANY),
    ("import re\nwith f() as p:\n re.match(p, '')", reasons.UNPACKED),
    ("import re\ntry:\n pass\nexcept E as p:\n re.match(p, '')", reasons.UNPACKED),
    ("import re\nmatch x:\n case [p]:\n  re.match(p, '')", reasons.UNPACKED),
    ("import re\nmatch x:\n case {**p}:\n  re.match(p, '')", reasons.UNPACKED),
    ("import re\na, p = f()\nre.match(p, '')", reasons.UNPACKED),
    ("import re\nP = 'a'\nfrom m import *\nre.match(P, '')", reasons.STAR_IMPORT),
    ("import re\nP = 'a'\nexec(x)\nre.match(P, '')", reasons.DYNAMIC),
    ("import re\nP = 'a'\nglobals()['P'] = 'b'\nre.match(P, '')", reasons.DYNAMIC),
    ("import re\nP = 'a'\nglobals().update(x)\nre.match(P, '')", reasons.DYNAMIC),
    ("import re\nre.match(f(), '')", reasons.CALL),
    ("import re\nre.match(x.y, '')", reasons.ATTRIBUTE),
    ("import re\nclass A:\n P = 'a'\nA.P = 'b'\nre.match(A.P, '')", reasons.ATTRIBUTE),
    ("import re\nP = 'a'\nclass A:\n P = 'b'\n R = re.match(P, '')", reasons.REASSIGNED),
    ("import re\nW = ['a']\nW.append(x)\nre.match('|'.join(W), '')", reasons.CHANGED),
    ("import re\nW = ['a']\nf(W)\nre.match('|'.join(W), '')", reasons.CHANGED),
    ("import re\nD = {'a': 'b'}\nD['a'] = 'c'\nre.match('%(a)s' % D, '')", reasons.CHANGED),
    ("import re\nre.match(x[0], '')", reasons.UNBOUND),
    ("import re\nre.match('a' if 5 else 'b', '')", reasons.EXPRESSION),
    ("import re\nre.match(lambda: 1, '')", reasons.NOT_TEXT),
    ("import re\ndef p(): pass\nre.match(p, '')", reasons.NOT_TEXT),
    ("import re\nre.match(None, '')", reasons.NOT_TEXT),
    ("import re\nre.match('%s' % (), '')", reasons.FORMATTED),
    ("import re\nre.match('{}{}'.format('a'), '')", reasons.FORMATTED),
    ("import re\nre.match('{0.real}'.format(5), '')", reasons.FORMATTED),
    ("import re\nre.match(f'{5:{6}}', '')", reasons.FORMATTED),
    ("import re\nre.match('%s' % ['a'], '')", reasons.FORMATTED),
    ("import re\nW = ['a']\nre.match('(%s)' % W, '')", reasons.FORMATTED),
    ("import re\nre.match('{}'.format(('a',)), '')", reasons.FORMATTED),
    ("import re\nre.match(f'{(1, 2)}', '')", reasons.FORMATTED),
    ("import re\nre.match(f'{True}', '')", reasons.NOT_TEXT),
    ("import re\nre.match('a' * True, '')", reasons.NOT_TEXT),
    ("import re\nre.match('\u01c5'.lower(), '')", reasons.CALL),
    ("import re\nfrom m import *\nre.match(str(5), '')", reasons.CALL),
    ("import re\nclass A:\n W = ['a']\nA.W.append('b')\nre.match('|'.join(A.W), '')", reasons.CHANGED),
    ("import re\nre.compile('a', f())", reasons.FLAGS),
    ("import re\ndef f(flags):\n re.compile('a', flags)", reasons.FLAGS),
    ("import re\nre.compile('a', **k)", reasons.FLAGS),
    ("import re\nre.match('a', *k)", reasons.FLAGS),
    ("import re\nre.match(*k)", reasons.STARRED),
    ("import re\nre.match()", reasons.MISSING),
    ("import re\nre.Scanner(rows())", reasons.SCANNER),
    ("import re\ng(re.compile)", reasons.PASSED_ON),
    ("import re\nmap(re.compile, x)", reasons.UNBOUND),
    ("import re\ndef map(f, x): pass\nmap(re.compile, ('a',))", reasons.PASSED_ON),
    ("import re\nfrom functools import partial\npartial(re.sub, x)", reasons.UNBOUND),
    ("import re\nre.match('a' + b'b', '')", reasons.MIXED),
    ("import re\nre.match('a' * 10**9, '')", reasons.TOO_LONG),
    ("import re\nre.match('%99999d' % 1, '')", reasons.TOO_LONG),
    ("import re\nre.match('a'" + ".strip()" * 200 + ", '')", reasons.TOO_DEEP),
    ("try:\n import regex as re\nexcept ImportError:\n import re\nre.match('a', '')", reasons.OTHER_ENGINE),
    ("import re\nif x:\n re = y\nre.match('a', '')", reasons.OTHER_ENGINE),
    ("import re\nP = P\nre.match(P, '')", reasons.REASSIGNED),
]


@pytest.mark.parametrize("source, reason", UNRESOLVED)
def test_unresolved(source: str, reason: str) -> None:
    module = read_module(source, "a.py")
    assert module.sites == ()
    assert [call.reason for call in module.unresolved] == [reason]


def test_every_reason_is_met() -> None:
    """No reason is dead but that of a spelling, for which no source is known."""
    assert {reason for _, reason in UNRESOLVED} >= reasons.REASONS - {reasons.ELEMENT, reasons.UNREADABLE}


IGNORED = [
    "import regex as re\nre.match('a', '')",
    "import re2 as re\nre.match('a', '')",
    "import re\ndef f(re):\n re.match('a', '')",
    "import re\ndef f():\n re = g()\n re.match('a', '')",
    "import re\nclass A:\n def match(self, p): pass\nA().match('a')",
    "def match(p, s): pass\nmatch('a', '')",
    "import sre\nsre.match('a', '')",
    "compile('a', 'b', 'exec')",
    "from other import match\nmatch('a', '')",
    "import re\nx.re.match('a', '')",
    "# import re\nre.match('a', '')",
]


@pytest.mark.parametrize("source", IGNORED)
def test_not_of_re(source: str) -> None:
    module = read_module(source, "a.py")
    assert module.sites == ()
    assert all("." in call.function and call.reason == ENGINE for call in module.unresolved)


def test_the_same_constant_is_one_site() -> None:
    source = "import re\nP = 'a'\ndef f(s):\n return re.match(P, s) is None or re.search(P, s) is None\n"
    (site,) = find_patterns(source, "a.py")
    assert [use.function for use in site.uses] == ["match", "search"]
    other = source + "re.compile(P, re.I)\n"
    assert [site.flags for site in find_patterns(other, "a.py")] == [0, 2]
