"""Which patterns stand side by side in a program, in which order, and how they are tried.

The rows are small programs. That what they are said to do is what they do is shown in tests/rules/test_families.py,
where programs of these forms are run.
"""

from __future__ import annotations

import pytest

from patlint.source import read_module
from patlint.source.sites import Family

ROWS = "[('x', re.compile('a')), ('y', re.compile('b')), ('z', re.compile('c'))]"


def families(source: str) -> list[Family]:
    return list(read_module("import re\n" + source, "a.py").families)


def only(source: str) -> Family:
    (found,) = families(source)
    return found


def patterns(family: Family) -> str:
    return " ".join(str(member.site.pattern) for member in family.members)


TABLES = [
    # source, order, named, modes of the trials, positioned
    (f"T = {ROWS}\ndef f(s):\n  for n, p in T:\n    if p.match(s): return n", "first", False, "match", False),
    (f"T = {ROWS}\ndef f(s, i):\n  for n, p in T:\n    m = p.match(s, i)\n    if m: return n",
     "first", False, "match", True),
    (f"T = {ROWS}\ndef f(s):\n  for n, p in T:\n    if p.search(s): break\ndef g(s):\n  for n, p in tuple(T):\n"
     "    if p.fullmatch(s): return n", "first", False, "search fullmatch", False),
    (f"T = {ROWS}\nT.append(('w', x))\ndef f(s):\n  for n, p in T:\n    if p.match(s): return n",
     "first", False, "match", False),
    (f"T = {ROWS}\ndef f(s):\n  return any(p.match(s) for n, p in T)", "first", False, "match", False),
    (f"T = {ROWS}\ndef f(s):\n  return next(filter(None, (p.match(s) for n, p in T)), None)",
     "first", False, "match", False),
    ("T = {'x': re.compile('a'), 'y': re.compile('b'), 'z': re.compile('c')}\ndef f(s):\n"
     "  for p in T.values():\n    if p.match(s): return 1", "first", True, "match", False),
    ("T = {re.compile('a'): 1, re.compile('b'): 2, re.compile('c'): 3}\ndef f(s):\n"
     "  for p in T:\n    if p.match(s): return T[p]", "unknown", True, "", False),
    # all are applied
    (f"T = {ROWS}\ndef f(s):\n  for n, p in T:\n    s = p.sub(n, s)\n  return s", "independent", False, "", False),
    (f"T = {ROWS}\ndef f(s):\n  for n, p in T:\n    if p.match(s): x = n", "independent", False, "", False),
    (f"T = {ROWS}\ndef f(s):\n  return [n for n, p in T if p.match(s)]", "independent", False, "", False),
    # not known
    (f"T = {ROWS}\nuse(T)\ndef f(s):\n  for n, p in T:\n    if p.match(s): return n", "unknown", False, "", False),
    (f"T = {ROWS}\nT = list(T)\ndef f(s):\n  for n, p in T:\n    if p.match(s): return n", "unknown", False, "", False),
    (f"T = {ROWS}\ndef f(s):\n  for n, p in T:\n    if p.match(s): return n\n"
     "def g(s):\n  return [n for n, p in T if p.match(s)]",
     "unknown", False, "", False),
    ("T = {re.compile('a'), re.compile('b'), re.compile('c')}\ndef f(s):\n  for p in T:\n    if p.match(s): return p",
     "unknown", False, "", False),
    ("T = {'x': re.compile('a'), 'y': re.compile('b'), 'z': re.compile('c')}\ndef f(k, s):\n  return T[k].match(s)",
     "unknown", True, "", False),
    ("T = [Rule(re.compile('a'), 1), Rule(re.compile('b'), 2), Rule(re.compile('c'), 3)]\ndef f(s):\n"
     "  for r in T:\n    if r.p.match(s): return r", "unknown", False, "", False),
    ("def f():\n  return re.compile('a'), re.compile('b'), re.compile('c')", "unknown", True, "", False),
    ("T = [re.compile(p) for p in ('a', 'b', 'c')]\ndef f(s):\n  for p in T:\n    if p.match(s): return 1",
     "first", False, "match", False),
    ("def f(s):\n  for p in ('a', 'b', 'c'):\n    if re.search(p, s): return 1", "first", False, "search", False),
    ("def f(s):\n  return any(re.search(p, s) for p in ('a', 'b', 'c'))", "first", False, "search", False),
    # constants
    ("A_RULE = re.compile('a')\nB_RULE = re.compile('b')\nC_RULE = re.compile('c')", "unknown", True, "", False),
    ("RULE_1 = re.compile('a')\nRULE_2 = re.compile('b')\nRULE_3 = re.compile('c')", "unknown", False, "", False),
]  # fmt: skip


@pytest.mark.parametrize(("source", "order", "named", "modes", "positioned"), TABLES)
def test_tables(source: str, order: str, named: bool, modes: str, positioned: bool) -> None:
    family = only(source)
    assert patterns(family) == "a b c"
    assert (family.order, family.named) == (order, named)
    assert {" ".join(member.modes) for member in family.members} == {modes}
    assert len(family.trials) == len(modes.split())
    assert {trial.positioned for trial in family.trials} == ({positioned} if modes else set())


CHAINS = [
    # source, the families: members, * behind those that take
    ("if re.match('a', s): pass\n elif re.match('b', s): pass", ["a* b*"]),
    ("if re.match('a', s): return 1\n if re.match('b', s): return 2", ["a* b*"]),
    ("if re.match('a', s): x = 1\n if re.match('b', s): return 2", []),
    ("if re.match('a', s) and x: pass\n elif re.match('b', s): pass", ["a b*"]),
    ("if x or re.match('a', s): pass\n elif re.match('b', s): pass", ["a* b*"]),
    ("if not re.match('a', s): pass\n elif re.match('b', s): pass", []),
    ("if re.match('a', s) is not None: pass\n elif (m := re.match('b', s)): pass", ["a* b*"]),
    ("m = re.match('a', s)\n if m: return 1\n m = re.match('b', s)\n if m: return 2", ["a* b*"]),
    ("m = re.match('a', s)\n m = re.match('b', s)\n if m: return 1\n if re.match('c', s): return 2", ["b* c*"]),
    ("m = re.match('a', s) or re.match('b', s) or re.match('c', t)", ["a* b*"]),
    ("if re.match('a', s): return 1\n s = s.strip()\n if re.match('b', s): return 2", []),
    ("if re.match('a', s): return 1\n for s in t: pass\n if re.match('b', s): return 2", []),
    ("if re.match('a', s): return 1\n with open(t) as s: pass\n if re.match('b', s): return 2", []),
    ("if re.match('a', s): return 1\n print(s)\n if re.match('b', s): return 2", ["a* b*"]),
    ("if re.match('a', s.strip()): return 1\n if re.match('b', s.strip()): return 2", ["a* b*"]),
    ("if re.match('a', s.t): return 1\n print(s)\n if re.match('b', s.t): return 2", []),
    ("if re.match('a', s.t): return 1\n if re.match('b', s.t): return 2", ["a* b*"]),
    ("if re.match('a', s[0]): return 1\n print(s)\n if re.match('b', s[0]): return 2", []),
    ("if re.match('a', next(s)): return 1\n if re.match('b', next(s)): return 2", []),
    ("if re.match('a', s): return 1\n if re.match('b', t): return 2\n if re.match('c', s): return 2", ["a* c*"]),
    ("for s in t:\n  if re.match('a', s): continue\n  if re.match('b', s): break", ["a* b*"]),
    ("if re.match('a', s):\n  try:\n   return int(s)\n  except ValueError: pass\n if re.match('b', s): return 2", []),
    ("if re.match('a', s):\n  try:\n   return int(s)\n  except ValueError: return 1\n if re.match('b', s): return 2",
     ["a* b*"]),
    ("if re.match('a', s):\n  if t: return 1\n  else: raise ValueError\n if re.match('b', s): return 2", ["a* b*"]),
    ("if re.match('a', s):\n  with t: return 1\n if re.match('b', s): return 2", []),
    ("if A.match(s): return 1\n if A.fullmatch(s): return 2", ["x* x*"]),
    ("if A.match(s, 1): return 1\n if B.match(s): return 2", []),
    ("if A.match(s, 1): return 1\n if B.match(s, 1): return 2", ["x* y*"]),
    ("if A.match(s, 1, 2): return 1\n if B.match(s, 1, 2): return 2", []),
]  # fmt: skip


@pytest.mark.parametrize(("body", "expected"), CHAINS)
def test_chains(body: str, expected: list[str]) -> None:
    source = f"A, B = re.compile('x'), re.compile('y')\ndef f(s, t, x):\n {body}\n"
    found = [each for each in read_module("import re\n" + source, "a.py").families if each.kind == "tests"]
    told = [" ".join(f"{m.site.pattern}{'*' * m.takes}" for m in each.members) for each in found]
    assert told == expected


ALTERNATIVES = [
    "T = ('a', 'b') if x else ('c', 'd')\ndef f(s):\n  for p in T:\n    if re.match(p, s): return 1",
    "def f(s, x):\n  for p in (('a', 'b') if x else ('c', 'd')):\n    if re.match(p, s): return 1",
    "def f(s, x):\n  for p in {'a', 'b', 'c'}:\n    if re.match(p, s): return 1",
    "def f(s, T):\n  for p in T:\n    if re.match(p, s): return 1\nf('', ('a', 'b'))\nf('', ('ab', 'c'))",
    "class A:\n  T = ('a', 'b')\n  def f(self, s):\n    for p in self.T:\n      if re.match(p, s): return 1\n"
    "class B(A):\n  T = ('ab', 'c')",
    "if x: P = 'a'\nelse: P = 'ab'\nT = [re.compile(P), re.compile('b')]\ndef f(s):\n"
    "  for p in T:\n    if p.match(s): return 1",
    "def f(x):\n  P = 'a' if x else 'b'\n  return [re.compile(P + p) for p in ('c', 'd')]",
]
"""Texts of which a run of the program has one or the other: no family of all."""


@pytest.mark.parametrize("source", ALTERNATIVES)
def test_alternatives_are_no_siblings(source: str) -> None:
    assert [each for each in families(source) if each.order == "first"] == []


def test_a_global_text_may_change_in_any_call() -> None:
    source = "def f():\n  if re.match('a', s): return 1\n  g()\n  if re.match('b', s): return 2\n"
    assert families(source) == []
    assert len(families(source.replace("  g()\n", ""))) == 1


def test_rests_of_rows() -> None:
    family = only("T = [(re.compile('a'), f), (re.compile('b'), f), (re.compile('c'), g)]")
    assert family.members[0].rest == family.members[1].rest != family.members[2].rest
    family = only("T = [re.compile('a'), re.compile('b')]")
    assert [member.rest for member in family.members] == ["", ""]
    family = only("T = [(re.compile(p), f(p)) for p in ('a', 'b')]")
    assert [member.rest for member in family.members] == [None, None]


def test_columns_are_families_of_their_own() -> None:
    found = families("T = [(re.compile('a'), re.compile('b')), (re.compile('c'), re.compile('d'))]")
    assert sorted(map(patterns, found)) == ["a c", "b d"]
    found = families("T = {'x': [re.compile('a'), re.compile('b')], 'y': [re.compile('c'), re.compile('d')]}")
    assert sorted(map(patterns, found)) == ["a b", "c d"]


def test_steps_tell_what_is_asked_together() -> None:
    family = only(
        "def f(s):\n  if re.match('a', s) or re.match('b', s): pass\n  elif re.match('c', s): pass\n"
    )
    first, second, third = (member.step for member in family.members)
    assert first == second < third
    family = only("def f(s):\n  return any(re.match(p, s) for p in ('a', 'b'))\n")
    assert len({member.step for member in family.members}) == 1


RULES = """
from pygments.lexer import RegexLexer, include, words
from pygments.token import Name

class Crane({}):
    tokens = {{
        'root': [(r'a', Name), include('more'), (words(('x',)), Name), (r'b', Name, 'more'), (r'c', Name)],
        'more': [(r'd', Name)],
    }}
"""


def test_rules_of_lexers() -> None:
    family = only(RULES.format("RegexLexer"))
    assert (patterns(family), family.order) == ("a b c", "first")
    assert family.trials[0].positioned and {member.modes for member in family.members} == {("match",)}
    assert {member.site.flags for member in family.members} == {8}
    assert families(RULES.format("Other")) == []
    assert families(RULES.format("RegexLexer, Flagged")) == []


ROUTES = """
from django.urls import re_path, include
from . import views, urls
from .views import gate
nested = include('x')
urlpatterns = [
    re_path(r'^a$', views.a), re_path(r'b', gate), re_path('c', include('x')), re_path('d', nested),
    re_path('e', admin.site.urls), re_path('f', urls.patterns), re_path('g', Gate.as_view()), re_path('h', made()),
]
"""


def test_routes() -> None:
    """Only plain views take: what is included may fit nothing, and then the next route is tried."""
    family = only(ROUTES)
    assert [(str(m.site.pattern), m.modes, m.takes) for m in family.members] == [
        ("^a$", ("search", "fullmatch"), True),
        ("b", ("search", "search"), True),
        *((each, ("search", "search"), each == "g") for each in "cdefgh"),
    ]


def test_rows_of_an_application() -> None:
    source = "from tornado.web import Application\nApplication([{}])"
    family = only(source.format("('/a', A), ('/b', B)"))
    assert {member.modes for member in family.members} == {("fullmatch",)}
    family = only(source.format("('/a$', A), ('/b$', B)"))
    assert {member.modes for member in family.members} == {("match",)}
    assert families(source.format("('/a$', A), ('/b', B)")) == []


def test_rows_of_a_scanner() -> None:
    family = only("re.Scanner([('a', None), ('b', None)])")
    assert (patterns(family), family.order, family.trials[0].positioned) == ("a b", "first", True)


def test_what_is_no_family() -> None:
    assert families("A = re.compile('a')\nprint(1)\nB = re.compile('b')") == []
    assert families("APPLE = re.compile('a')\nPEAR = re.compile('b')") == []
    assert families("T = [re.compile('a'), re.compile(x)]") == []
    assert (
        families("A, B = re.compile('a'), re.compile('b')") == []
        or only("A, B = re.compile('a'), re.compile('b')").named
    )
