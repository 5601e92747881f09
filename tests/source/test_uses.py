"""What a program does with a pattern: which functions run it, and what is looked at of the outcome."""

from __future__ import annotations

import pytest

from patlint.source import Site, find_patterns, read_module

LOOKS = [
    # condition contexts
    ("if re.match('a', s): pass", "truth"),
    ("if not re.match('a', s): pass", "truth"),
    ("while re.match('a', s): pass", "truth"),
    ("assert re.match('a', s), 'no'", "truth"),
    ("x = 1 if re.match('a', s) else 2", "truth"),
    ("x = bool(re.match('a', s))", "truth"),
    ("x = re.match('a', s) is None", "truth"),
    ("x = None is not re.match('a', s)", "truth"),
    ("x = re.match('a', s) == None", "truth"),
    ("x = not re.match('a', s)", "truth"),
    ("if re.match('a', s) and y: pass", "truth"),
    ("if y or re.match('a', s): pass", "truth"),
    ("x = re.match('a', s) and 5", "truth"),
    ("x = any(re.match('a', t) for t in s)", "truth"),
    ("x = all([re.match('a', t) for t in s])", "truth"),
    ("x = [t for t in s if re.match('a', t)]", "truth"),
    ("x = {t: 1 for t in s if not re.match('a', t)}", "truth"),
    ("x = list(filter(lambda t: re.match('a', t), s))", "truth"),
    ("self.assertTrue(re.match('a', s))", "truth"),
    ("self.assertIsNone(re.match('a', s), 'why')", "truth"),
    ("m = re.match('a', s)\nif m: pass", "truth"),
    ("m = re.match('a', s)\nif m is None: pass", "truth"),
    ("if (m := re.match('a', s)): pass", "truth"),
    ("if (m := re.match('a', s)) and m: pass", "truth"),
    ("def g():\n  return bool(re.match('a', s))", "truth"),
    ("def g():\n  return re.match('a', s) is not None", "truth"),
    ("x = 1 if re.findall('a', s) else 2", "truth"),
    # the whole match
    ("x = re.match('a', s).group()", "span"),
    ("x = re.match('a', s).group(0)", "span"),
    ("x = re.match('a', s)[0]", "span"),
    ("x = re.match('a', s).end()", "span"),
    ("x = re.match('a', s).span(0)", "span"),
    ("m = re.match('a', s)\nif m: print(m.group())", "span"),
    ("if (m := re.match('a', s)): print(m.start())", "span"),
    ("x = (re.match('a', s) or re.match('b', s)).group()", "span"),
    ("for m in re.finditer('a', s): print(m.group())", "span"),
    ("for m in re.finditer('a', s): pass", "span"),
    ("x = [m.span() for m in re.finditer('a', s)]", "span"),
    ("x = re.findall('a', s)", "span"),
    ("x = re.findall(r'(?:a)\\(', s)", "span"),
    ("x = re.split('a', s)", "span"),
    ("if re.split('a', s): pass", "span"),
    ("x = re.sub('a', r'\\0', s)", "span"),
    ("for m in re.finditer('a', s): print(m[0] if m else 1)", "span"),
    ("x = re.sub('a', 'b', s)", "span"),
    ("x = re.sub('a', r'\\g<0>', s)", "span"),
    ("x = re.sub('a', r'\\\\1', s)", "span"),
    # groups
    ("x = re.match('a', s).group(1)", "groups"),
    ("x = re.match('a', s).group(0, 1)", "groups"),
    ("x = re.match('a', s).group(n)", "groups"),
    ("x = re.match('a', s)['n']", "groups"),
    ("x = re.match('a', s).groups()", "groups"),
    ("x = re.match('a', s).groupdict()", "groups"),
    ("x = re.match('a', s).lastgroup", "groups"),
    ("x = re.match('a', s).lastindex", "groups"),
    ("x = re.match('a', s).expand('x')", "groups"),
    ("x = re.match('a', s).start(1)", "groups"),
    ("m = re.match('a', s)\nif m: print(m.group(), m[1])", "groups"),
    ("for m in re.finditer('a', s): print(m.group(1))", "groups"),
    ("x = re.findall('(a)', s)", "groups"),
    ("x = re.findall('(?P<n>a)', s)", "groups"),
    ("x = re.split('(a)', s)", "groups"),
    ("x = re.sub('(a)', r'\\1', s)", "groups"),
    ("x = re.sub('(a)', r'\\g<1>', s)", "groups"),
    # let go
    ("return re.match('a', s)", "unknown"),
    ("g(re.match('a', s))", "unknown"),
    ("global m\nif (m := re.match('a', s)): pass", "unknown"),
    ("x.y = re.match('a', s)", "unknown"),
    ("x = [re.match('a', s)]", "unknown"),
    ("x = [re.match('a', t) for t in s]", "unknown"),
    ("m = re.match('a', s)\nprint(m)", "unknown"),
    ("m = re.match('a', s)\nreturn m and m.group()", "span"),
    ("m = re.match('a', s)\nreturn m or 5", "unknown"),
    ("m = n = re.match('a', s)\nif m: return n", "unknown"),
    ("re.match('a', s)", "unknown"),
    ("x = re.match('a', s).group", "unknown"),
    ("x = re.match('a', s).re", "unknown"),
    ("x = re.match('a', s) == y", "unknown"),
    ("x = list(re.finditer('a', s))", "unknown"),
    ("x = re.sub('a', g, s)", "unknown"),
    ("x = re.sub('a', lambda m: 'x', s)", "unknown"),
    ("global m\nm = re.match('a', s)\nif m: pass", "unknown"),
    ("def g():\n  print(m)\nm = re.match('a', s)\nif m: pass", "unknown"),
    # several matches under one name
    ("m = re.match('a', s)\nif m: pass\nm = g()\nprint(m[1])", "truth"),
    ("m = re.match('a', s)\nif m: pass\nif y:\n  m = g()\nprint(m[1])", "groups"),
    ("for t in s:\n  m = re.match('a', t)\n  if m: continue\n  m = g()\nprint(m[1])", "groups"),
]


def of_body(body: str) -> Site:
    lines = "".join(f"  {line}\n" for line in body.split("\n"))
    return find_patterns(f"import re\ndef f(s, y, n, self):\n{lines}", "a.py")[0]


@pytest.mark.parametrize("body, looks_at", LOOKS)
def test_looks_at(body: str, looks_at: str) -> None:
    assert of_body(body).uses[0].looks_at == looks_at


SEEN = [
    # module level, private
    ("_r = re.compile('a')\ndef f(s): return bool(_r.match(s))", ["match"], True),
    ("_r = re.compile('a')", [], True),
    ("_r = re.compile('a')\n_q = _r\n_q.match(s)", ["match"], True),
    ("_m = re.compile('a').match\nif _m(s): pass", ["match"], True),
    (
        "_r = None\ndef f(s):\n global _r\n if _r is None: _r = re.compile('a')\n _r.search(s)",
        ["search"],
        True,
    ),
    ("_r = re.compile('a')\nre.match(_r, s)", ["match"], True),
    ("_r = re.compile('a')\nx = list(filter(_r.match, s))", ["match"], True),
    ("_r = re.compile('a')\nx = any(map(_r.search, s))", ["search"], True),
    ("_r, _q = re.compile('a'), re.compile('b')\n_r.match(s)", ["match"], True),
    ("if (_r := re.compile('a')).match(s): _r.search(s)", ["match", "search"], True),
    # module level, known elsewhere
    ("R = re.compile('a')\nR.match(s)", ["match"], False),
    ("_r = re.compile('a')\n__all__ = ['_r']\n_r.match(s)", ["match"], False),
    ("_r = re.compile('a')\ngetattr(m, '_r')\n_r.match(s)", ["match"], False),
    ("__r__ = re.compile('a')\n__r__.match(s)", ["match"], False),
    # let go
    ("_r = re.compile('a')\ng(_r)", [], False),
    ("_r = re.compile('a')\nx = [_r]\n_r.match(s)", ["match"], False),
    ("_r = re.compile('a')\ndef f(): return _r", [], False),
    ("_r = re.compile('a')\ndef f(s, m=_r.match): return bool(m(s))", [], False),
    ("_r = re.compile('a')\nx = _r.pattern", [], False),
    ("_r = re.compile('a')\nx = map(_r.match, s)", [], False),
    ("T = [re.compile('a')]", [], False),
    ("g(re.compile('a'))", [], False),
    ("_r = re.compile('a')\nif x: _r = re.compile('b')\n_r.match(s)", ["match"], False),
    # at once, and in functions
    ("re.compile('a').match(s)", ["match"], True),
    ("re.match(re.compile('a'), s)", ["match"], True),
    ("re.compile('a')", [], True),
    ("def f(s):\n r = re.compile('a')\n return r.match(s) is None", ["match"], True),
    ("def f(s):\n r = re.compile('a')\n r.match(s)\n r = re.compile('b')\n r.search(s)", ["match"], True),
    ("def f(s):\n r = re.compile('a')\n def g(): return r.match(s)\n return g", ["match"], True),
    ("def f(s):\n r = re.compile('a')\n return r", [], False),
    ("def f(s):\n re.match('a', s)", ["match"], True),
    # classes
    ("class A:\n _r = re.compile('a')\n def f(self, s): self._r.match(s)", ["match"], True),
    ("class A:\n _r = re.compile('a')\n @classmethod\n def f(cls, s): cls._r.match(s)", ["match"], True),
    ("class A:\n _r = re.compile('a')\nA._r.match(s)", ["match"], True),
    (
        "class A:\n def __init__(self): self._r = re.compile('a')\n def f(self, s): self._r.match(s)",
        ["match"],
        True,
    ),
    ("class A:\n _r = re.compile('a')\n def f(self, s): type(self)._r.match(s)", ["match"], True),
    ("class A:\n r = re.compile('a')\n def f(self, s): self.r.match(s)", ["match"], False),
    ("class A:\n _r = re.compile('a')\nx._r.match(s)", [], False),
    ("class A:\n _r = re.compile('a')\n @staticmethod\n def f(x): x._r.match(s)", [], False),
    ("class A:\n _r = re.compile('a')\nclass B(A):\n def f(self): self._r.match(s)", ["match"], True),
    ("_r = re.compile('a')\n_r.match(s)\nexec(s)", ["match"], False),
    (
        "class A:\n _r = re.compile('a')\n def f(self): self._r.match(s)\n"
        "class B:\n _r = 5\n def f(self): self._r.search(s)",
        ["match"],
        True,
    ),
]


@pytest.mark.parametrize("text, functions, seen", SEEN)
def test_following(text: str, functions: list[str], seen: bool) -> None:
    site = find_patterns("import re\n" + text, "a.py")[0]
    assert site.pattern == "a"
    assert [use.function for use in site.uses] == functions
    assert site.uses_seen is seen


def test_a_pattern_object_is_no_unresolved_call() -> None:
    text = "import re\n_r = re.compile('a')\nclass A:\n def __init__(self): self.q = re.compile('b')\n"
    text += " def f(self, s): return re.match(self.q, s), re.search(_r, s)\n"
    module = read_module(text, "a.py")
    assert module.unresolved == ()
    assert [[use.function for use in site.uses] for site in module.sites] == [["search"], ["match"]]


DETAILS = [
    ("_r.match(s, 5)", {"positioned": True}),
    ("_r.match(s, pos=5)", {"positioned": True}),
    ("_r.search(s, endpos=5)", {"positioned": True}),
    ("_r.match(*s)", {"positioned": True}),
    ("_r.sub('x', s)", {"replacement": "x", "maximum": None, "positioned": False}),
    ("_r.sub('x', s, 1)", {"replacement": "x", "maximum": 1, "positioned": False}),
    ("_r.sub(repl=r'\\1', string=s, count=2)", {"replacement": "\\1", "maximum": 2, "looks_at": "groups"}),
    ("_r.sub(*y)", {"replacement": None, "looks_at": "unknown", "positioned": False}),
    ("_r.sub(y, s)", {"replacement": None, "looks_at": "unknown"}),
    ("_r.split(s, maxsplit=1)", {"maximum": 1}),
    ("_r.split(s, n)", {"maximum": None}),
    ("_r.match(s[:10])", {"bounded": 10}),
    ("_r.match(s[5:15])", {"bounded": 10}),
    ("_r.match(s[-7:])", {"bounded": 7}),
    ("_r.match(s[-7:-3])", {"bounded": 4}),
    ("_r.match(s[1:-3])", {"bounded": None}),
    ("_r.match(s[7:])", {"bounded": None}),
    ("_r.match(s[:n])", {"bounded": None}),
    ("_r.match(s[::2])", {"bounded": None}),
    ("_r.match('abc')", {"bounded": 3}),
    ("_r.match(K)", {"bounded": 2}),
    ("_r.match(s)", {"bounded": None}),
    ("while (m := _r.match(s, n)): n = m.end()", {"in_loop": True, "positioned": True}),
    ("while True:\n m = _r.match(s)\n if not m: break\n s = s[m.end():]", {"in_loop": False}),
    ("while True:\n m = _r.match(s)\n s = s[len(m.group()):]", {"in_loop": False}),
    ("m = _r.match(s)\nwhile m: m = g(m.end())", {"in_loop": False}),
    ("while _r.match(s): s = g(s)", {"in_loop": False}),
    ("for t in s:\n m = _r.match(t)\n x = m.end()", {"in_loop": False}),
]


@pytest.mark.parametrize("call, expected", DETAILS)
def test_details(call: str, expected: dict[str, object]) -> None:
    body = "".join(f"  {line}\n" for line in call.split("\n"))
    text = f"import re\nK = 'kk'\n_r = re.compile('(a)')\ndef f(s, n, y):\n{body}"
    (use,) = find_patterns(text, "a.py")[0].uses
    assert {name: getattr(use, name) for name in expected} == expected


def test_a_replacement_given_as_a_constant() -> None:
    (site,) = find_patterns("import re\nR = 'x' 'y'\nre.sub('a', R, s, count=1)\n", "a.py")
    assert (site.uses[0].replacement, site.uses[0].maximum) == ("xy", 1)
    assert site.uses[0].place.column == 1
