"""Patterns that other libraries take: which calls are seen, what is said of them, and what the libraries really do.

What each built-in row says is compared with the library itself: here for the standard library and pytest, for
the others by `python -m tests.bench.sinks` (Django, pandas and the like are too heavy for a test run).
"""

from __future__ import annotations

import compileall
import itertools
import pickle
import re
import sys
import warnings
from pathlib import Path

import pytest

from patlint.limits import DEFAULT_LIMITS
from patlint.rules import check_site
from patlint.source import Site, find_patterns, read_module, reasons
from patlint.source.sinks import CONDITION, ENGINE, PART, Sink, SinkTable
from patlint.source.sinks_builtin import BUILTIN, builtin_table
from patlint.source.sinks_parts import stands_alone
from tests.bench import sinks as bench
from tests.bench.libraries import adapters

NONE = SinkTable(())
UNITTEST = "import unittest\nclass T(unittest.TestCase):\n def test(self):\n  "
TEMPLATE = "import string\nclass T(string.Template):\n "
VALIDATOR = "from django.core.validators import RegexValidator\n"
PANDAS = "import pandas as pd\n"
I, M, S, X = 2, 8, 16, 64  # noqa: E741

# source, pattern, flags, function of the use (None: none), looks at, all seen, embedded
SEEN: tuple[tuple[str, str, int, str | None, str, bool, bool], ...] = (
    (UNITTEST + "self.assertRegex(text, r'a+')", "a+", 0, "search", "truth", True, False),
    (UNITTEST + "self.assertRegex(text, expected_regex=r'a+')", "a+", 0, "search", "truth", True, False),
    (UNITTEST + "self.assertNotRegex(text, r'a+')", "a+", 0, "search", "truth", True, False),
    (UNITTEST + "self.assertRaisesRegex(E, 'a+', f, 1)", "a+", 0, "search", "truth", True, False),
    (UNITTEST + "with self.assertWarnsRegex(W, 'a+'): pass", "a+", 0, "search", "truth", True, False),
    (UNITTEST + "self.assertRegexpMatches(text, 'a+')", "a+", 0, "search", "truth", True, False),
    ("def helper(case):\n case.assertRegex(t, 'a+')", "a+", 0, "search", "truth", True, False),
    ("import warnings\nwarnings.filterwarnings('error', 'a+')", "a+", I, "match", "truth", True, False),
    ("import warnings as w\nw.filterwarnings('error', message='a')", "a", I, "match", "truth", True, False),
    (
        "from warnings import filterwarnings as f\nf('error', module='a')",
        "a",
        0,
        "match",
        "truth",
        True,
        False,
    ),
    ("import warnings\nwarnings.filterwarnings('x', '', W, 'a')", "a", 0, "match", "truth", True, False),
    (TEMPLATE + "pattern = 'a+'", "a+", I | X, "sub", "groups", False, False),
    (TEMPLATE + "pattern = 'a+'\n flags = 0", "a+", X, "sub", "groups", False, False),
    (TEMPLATE + "idpattern = 'a+'", "a+", I | X, None, "", False, True),
    (TEMPLATE + "braceidpattern = 'a+'", "a+", I | X, None, "", False, True),
    ("import re\nre.Scanner([('a+', None)], re.S)", "a+", S, "match", "unknown", False, True),
    ("import re\nROWS = [('a+', None)]\nre.Scanner(ROWS)", "a+", 0, "match", "unknown", False, True),
    ("import pytest\npytest.raises(E, match='a+')", "a+", 0, "search", "truth", True, False),
    ("import pytest\nwith pytest.warns(match='a+'): pass", "a+", 0, "search", "truth", True, False),
    ("from pytest import raises\nraises(E, match='a+')", "a+", 0, "search", "truth", True, False),
    ("from pytest import *\nraises(E, match='a+')", "a+", 0, "search", "truth", True, False),
    ("import pytest\npytest.deprecated_call(match='a')", "a", 0, "search", "truth", True, False),
    (
        "import pytest\nwith pytest.raises(E) as e:\n pass\ne.match('a+')",
        *("a+", 0, "search", "truth", True, False),
    ),
    (
        "from numpy.testing import assert_raises_regex\nassert_raises_regex(E, 'a', f)",
        *("a", 0, "search", "truth", True, False),
    ),
    ("from django.urls import re_path\nre_path('^a/', v)", "^a/", 0, "search", "groups", False, True),
    ("from django.urls import re_path\nre_path('^a/$', v)", "^a/$", 0, None, "", False, True),
    ("import django.urls\ndjango.urls.re_path(route='^a/')", "^a/", 0, "search", "groups", False, True),
    (
        "try:\n from django.urls import re_path\nexcept ImportError:\n"
        " from django.conf.urls import url as re_path\nre_path('^a/', v)",
        *("^a/", 0, "search", "groups", False, True),
    ),
    (VALIDATOR + "RegexValidator('^a$')", "^a$", 0, "search", "truth", True, False),
    (VALIDATOR + "import re\nRegexValidator(regex='a', flags=re.I)", "a", I, "search", "truth", True, False),
    (
        VALIDATOR + "class V(RegexValidator):\n regex = 'a'\n flags = 2",
        "a",
        I,
        "search",
        "truth",
        False,
        False,
    ),
    ("from django import forms\nforms.RegexField(regex='a')", "a", 0, "search", "truth", True, False),
    ("from aiohttp import web\nweb.get('/x/{n:a+}/{m}', h)", "a+", 0, None, "", False, True),
    ("from aiohttp import web\nweb.route('GET', '/x/{n:a{2}}', h)", "a{2}", 0, None, "", False, True),
    ("import aiohttp\napp.router.add_get('/x/{n:a+}', h)", "a+", 0, None, "", False, True),
    ("from aiohttp import web\n@routes.get('/x/{n:a+}')\ndef f(): pass", "a+", 0, None, "", False, True),
    (
        "from werkzeug.routing import BaseConverter\nclass C(BaseConverter):\n regex = 'a+'",
        *("a+", 0, None, "", False, True),
    ),
    (
        "from tornado.web import Application\nApplication([('/a$', H)])",
        "/a$",
        0,
        "match",
        "groups",
        False,
        True,
    ),
    ("from tornado.web import Application\nApplication([('/a', H)])", "/a", 0, None, "", False, True),
    (
        "from tornado import web\nweb.Application(handlers=A + [('/a', H)])\nA = []",
        "/a",
        0,
        None,
        "",
        False,
        True,
    ),
    ("from tornado.web import url\nurl('/a$', H)", "/a$", 0, "match", "groups", False, True),
    ("import tornado.web\napp.add_handlers(host, [('/a$', H)])", "/a$", 0, "match", "groups", False, True),
    (
        "from pygments.lexer import RegexLexer\nclass L(RegexLexer):\n tokens = {'root': [('a+', T), ('', D)]}",
        *("a+", M, "match", "groups", True, False),
    ),
    (
        "from pygments import lexer\nimport re\nclass L(lexer.ExtendedRegexLexer):\n flags = re.I\n"
        " tokens = {'root': [include('x'), ('a+', T, '#pop'), (words(('a',)), T)]}",
        *("a+", I, "match", "groups", True, False),
    ),
    (
        "from pygments.lexer import RegexLexer\nfrom pygments.token import Name\n"
        "class L(RegexLexer):\n tokens = {'root': [('a+', Name.Tag, '#pop')]}",
        *("a+", M, "match", "span", True, False),  # one kind of token: no group is read
    ),
    (
        "from pygments.lexer import RegexLexer\nclass L(RegexLexer):\n tokens = {'root': [('a+', None, 'b')]}",
        *("a+", M, "match", "span", True, False),
    ),
    (
        "from pygments.lexer import RegexLexer, bygroups\nfrom pygments.token import Name\n"
        "class L(RegexLexer):\n tokens = {'root': [('(a+)', bygroups(Name))]}",
        *("(a+)", M, "match", "groups", True, False),
    ),
    (
        "from pygments.lexer import RegexLexer\ndef act(lexer, found): ...\n"
        "class L(RegexLexer):\n tokens = {'root': [('a+', act)]}",
        *("a+", M, "match", "groups", True, False),
    ),
    (PANDAS + "s.str.contains('a+')", "a+", 0, "search", "truth", False, False),
    (PANDAS + "s.str.contains('a+', case=False)", "a+", I, "search", "truth", False, False),
    (PANDAS + "s.str.contains('a+', regex=True)", "a+", 0, "search", "truth", False, False),
    (PANDAS + "import re\ns.str.fullmatch('a', flags=re.I)", "a", I, "fullmatch", "truth", False, False),
    (PANDAS + "s.str.match('a+')", "a+", 0, "match", "truth", False, False),
    (PANDAS + "s.str.replace('a+', '', regex=True)", "a+", 0, "sub", "unknown", False, False),
    (PANDAS + "s.str.extract('(a)', expand=False)", "(a)", 0, "search", "groups", False, False),
    (PANDAS + "s.str.findall('a+')", "a+", 0, "findall", "unknown", False, False),
    (PANDAS + "s.str.split('a+')", "a+", 0, "split", "unknown", False, False),
    (PANDAS + "s.str.split('|', regex=True)", "|", 0, "split", "unknown", False, False),
    (PANDAS + "df.filter(regex='a+')", "a+", 0, "search", "truth", True, False),
    ("from attrs import validators\nvalidators.matches_re('a')", "a", 0, "fullmatch", "truth", True, False),
    ("import attr\nattr.validators.matches_re('a', 2)", "a", I, "fullmatch", "truth", True, False),
    ("import attr, re\nattr.validators.matches_re('a', func=re.match)", "a", 0, None, "", False, False),
    ("from wtforms.validators import Regexp\nRegexp('a', 2)", "a", I, "match", "truth", False, False),
    ("from marshmallow import validate\nvalidate.Regexp('a')", "a", 0, "match", "truth", True, False),
)


def only(source: str) -> Site:
    (site,) = (each for each in find_patterns(source, "a.py") if each.pattern)
    return site


@pytest.mark.parametrize("source, pattern, flags, function, looks_at, seen, embedded", SEEN)
def test_seen(
    source: str, pattern: str, flags: int, function: str | None, looks_at: str, seen: bool, embedded: bool
) -> None:
    site = only(source)
    assert (site.pattern, site.flags, site.uses_seen) == (pattern, flags, seen)
    assert site.embedded is embedded
    assert [(use.function, use.looks_at) for use in site.uses] == ([(function, looks_at)] if function else [])
    assert any(site.function == sink.name for sink in BUILTIN)
    line = source.splitlines()[site.place.line - 1]
    assert pattern in line[site.place.column - 1 : site.place.end_column - 1]


def test_every_judged_row_is_met() -> None:
    met = {only(source).function for source, *_ in SEEN}
    families = {name.rpartition(".")[0] if name.startswith("aiohttp") else name for name in met}
    rows = {sink.name for sink in BUILTIN if sink.refused is None and not sink.objects_only}
    missed = {name for name in rows - met if not name.startswith("aiohttp")}
    assert missed == {
        *(f"pytest.{name}" for name in ("RaisesExc", "RaisesGroup")),
        *("unittest.TestCase.assertNotRegexpMatches", "unittest.TestCase.assertRaisesRegexp"),
        *("django.urls.conf.re_path", "django.urls.resolvers.RegexPattern"),
        "django.forms.fields.RegexField",
        *(f"werkzeug.routing.{name}" for name in ("UnicodeConverter", "PathConverter")),
        *(f"werkzeug.routing.converters.{n}Converter" for n in ("Base", "Unicode", "Path")),
        *("tornado.web.URLSpec", "tornado.routing.URLSpec", "tornado.routing.PathMatches"),
        *(
            "tornado.routing.HostMatches",
            "tornado.routing.RuleRouter",
            "tornado.routing.ReversibleRuleRouter",
        ),
        *("pandas.Series.str.extractall", "pandas.Series.str.count"),
        "wtforms.validators.regexp",
    }  # the same shape as a row that is met
    assert {"aiohttp.web", "aiohttp.web.RouteTableDef", "aiohttp.web.UrlDispatcher"} <= families


# Calls that look like a sink's and are none: nothing is seen and nothing is counted.
NEAR_MISSES = (
    "import pytest\npytest.raises(E)",
    "import pytest\npytest.raises(E, match=None)",
    "import pytest\npytest.fail('a+')",
    "def raises(e, match): pass\nraises(E, match='a+')",
    "from mine import raises\nraises(E, match='a+')",
    "import mine as pytest\npytest.raises(E, match='a+')",
    "import pytest\ndef f(pytest):\n pytest.raises(E, match='a+')",
    "import pytest\nwith open(p) as e:\n pass\ne.match('a+')\npytest.raises(E, match=None)",
    UNITTEST + "self.assertRegex(text)",
    UNITTEST + "self.assertEqual(text, 'a+')",
    "class T:\n def assertRegex(self, a, b): pass\n def f(self):\n  self.assertRegex(1, 'a+')",
    "import unittest\nunittest.TestCase.assertRegex(case, text, 'a+')",
    "import warnings\nwarnings.simplefilter('ignore', 'a+')",
    "import warnings\nwarnings.filterwarnings('ignore', category=W)",
    "from string import Template\nclass T(Template):\n delimiter = '%'",
    "class Template: pass\nclass T(Template):\n pattern = 'a+'",
    TEMPLATE + "idpattern = None",
    TEMPLATE + "@property\n def pattern(self): pass",
    "from django.urls import path\npath('a+', v)",
    "from django.urls import re_path\nre_path",
    "from aiohttp import web\nweb.get('/x/{n}', h)",
    "from aiohttp import web\nsession.get('/x/{n:a+}')",
    "app.router.add_get('/x/{n:a+}', h)",
    "from tornado.web import Application\nApplication([url('/a', H), Rule(m, H)])",
    "s.str.contains('a+')",
    PANDAS + "s.contains('a+')",
    PANDAS + "s.str.contains('a+', regex=False)",
    PANDAS + "s.str.replace('a+', '')",
    PANDAS + "s.str.replace(old, new)",
    PANDAS + "s.replace('a+', '')",
    PANDAS + "s.str.split(',')",
    PANDAS + "s.str.split('a+', regex=False)",
    PANDAS + "s.str.rsplit('a+')",
    PANDAS + "df.filter(like='a+')",
    "import pandas_like\ns.str.contains('a+')",
    "import re\nre.Scanner([])",
)


@pytest.mark.parametrize("source", NEAR_MISSES)
def test_near_misses(source: str) -> None:
    module = read_module(source, "a.py")
    assert module.sites == () and module.unresolved == ()


# source, function, reason
UNRESOLVED = (
    ("import pytest\ndef f(m):\n pytest.raises(E, match=m)", "pytest.raises", reasons.PARAMETER),
    ("import pytest\npytest.raises(E, match=f())", "pytest.raises", reasons.CALL),
    (UNITTEST + "self.assertRegex(*both)", "unittest.TestCase.assertRegex", reasons.STARRED),
    (PANDAS + "s.str.replace('a', 'b', regex=how)", "pandas.Series.str.replace", CONDITION),
    (PANDAS + "s.str.contains('a', case=how)", "pandas.Series.str.contains", reasons.FLAGS),
    (VALIDATOR + "RegexValidator('a', flags=f)", "django.core.validators.RegexValidator", reasons.FLAGS),
    (TEMPLATE + "idpattern = '(?a:a+)$'", "string.Template", PART),
    (TEMPLATE + "idpattern = 'a)|(b'", "string.Template", PART),
    ("from aiohttp import web\nweb.get('/{n:a(?=b)}', h)", "aiohttp.web.get", PART),
    (
        "from tornado.web import Application\nApplication([(p, H)])",
        "tornado.web.Application",
        reasons.UNBOUND,
    ),
    (
        "from tornado.web import Application\nApplication(rows())",
        "tornado.web.Application",
        reasons.EXPRESSION,
    ),
    ("import re\nre.Scanner(rows())", "re.Scanner", reasons.SCANNER),
    ("import re\nre.Scanner([('(?i)a', 1)])", "re.Scanner", PART),
    ("import regex\nregex.compile('a')", "regex.compile", ENGINE),
    ("import regex as re\nre.match('a', s)", "regex.match", ENGINE),
    ("import polars as pl\ncol.str.contains('a')", "polars.Series.str.contains", ENGINE),
    (PANDAS + r"s.str.contains(r'\p{Lu}')", "pandas.Series.str.contains", ENGINE),
    ("import pandas, polars\ncol.str.contains('a')", "polars.Series.str.contains", ENGINE),
    ("from pydantic import Field\nField(pattern='a')", "pydantic.Field", ENGINE),
    ("from fastapi import Query\nQuery(None, pattern='a')", "fastapi.Query", ENGINE),
    ("import sqlalchemy\ncolumn.regexp_match('a')", "sqlalchemy.ColumnOperators.regexp_match", ENGINE),
    ("from pyspark.sql import functions as F\nF.rlike(c, 'a')", "pyspark.sql.functions.rlike", ENGINE),
    (
        "from compileall import compile_dir\ncompile_dir(d, rx='a')",
        "compileall.compile_dir",
        reasons.NOT_TEXT,
    ),
    ("from django.db import models\nf(name__regex='a')", "django.db.models.lookups.regex", ENGINE),
    ("import django\nf(name__iregex='a')", "django.db.models.lookups.iregex", ENGINE),
)


@pytest.mark.parametrize("source, function, reason", UNRESOLVED)
def test_unresolved(source: str, function: str, reason: str) -> None:
    module = read_module(source, "a.py")
    assert module.sites == ()
    assert [(call.function, call.reason) for call in module.unresolved] == [(function, reason)]


# A pattern object that is handed to a sink: its use, and whether it is the only one.
HANDED_ON: tuple[tuple[str, list[str], bool], ...] = (
    (UNITTEST + "self.assertRegex(t, re.compile('a'))", ["search"], True),
    ("import pytest\npytest.raises(E, match=re.compile('a'))", ["search"], True),
    (VALIDATOR + "RegexValidator(regex=re.compile('a'))", ["search"], True),
    ("from django.urls import re_path\nre_path(re.compile('a'), v)", [], False),
    (PANDAS + "s.str.contains(re.compile('a'))", ["search"], False),
    ("import compileall\ncompileall.compile_dir(d, rx=re.compile('a'))", ["search"], True),
    (
        "import pytest\n_P = re.compile('a')\npytest.raises(E, match=_P)\n_P.match(s)",
        ["match", "search"],
        True,
    ),
    ("mine(re.compile('a'))", [], False),
    ("mine(key=re.compile('a'))", [], False),
)


@pytest.mark.parametrize("source, functions, seen", HANDED_ON)
def test_pattern_objects(source: str, functions: list[str], seen: bool) -> None:
    (site,) = find_patterns("import re\n" + source, "a.py")
    assert (sorted(use.function for use in site.uses), site.uses_seen) == (functions, seen)
    assert site.function == "compile" and site.embedded is ("re_path" in source)


def test_a_table_goes_to_another_process() -> None:
    copy = pickle.loads(pickle.dumps(OWN))
    assert copy.sinks == OWN.sinks and copy.mentioned("expect") and not copy.mentioned("import re")


def test_without_sinks_nothing_is_seen() -> None:
    for source, *_ in SEEN:
        assert not [site for site in read_module(source, "a.py", NONE).sites if "." in site.function]


def test_files_with_sinks_are_read_at_all() -> None:
    table = builtin_table()
    sources = [source for source, *_ in SEEN] + [source for source, *_ in UNRESOLVED]
    assert all(table.mentioned(source) or "import re" in source for source in sources)
    assert not table.mentioned(
        "import unittest, string, os\nclass T: pattern = 'a'\nx = match = contains = 1"
    )
    assert not table.mentioned("regex = compile(match)\nself.contains(raises)")


@pytest.mark.parametrize(
    "source",
    [
        "import os, \\\n pytest\npytest.raises(E, match='a')",
        "from \\\n pytest \\\n import raises\nraises(E, match='a')",
        "if 1: import os; import pytest\npytest.raises(E, match='a')",
        "def f():\r\n\timport pytest as p\r\n\tp.raises(E, match='a')\r\n",
        "from pytest import (\n  fail,\n  raises,\n)\nraises(E, match='a')",
        "import pytest\rpytest.raises(E, match='a')",
        "x = 1\nimport pytest; pytest.raises(E, match='a')",
    ],
)
def test_imports_in_odd_places(source: str) -> None:
    assert only(source).function == "pytest.raises"


def test_one_text_for_two_takers_is_one_site() -> None:
    source = f"import re\nP = 'x+y'\nre.match(P, s)\n{UNITTEST}self.assertRegex(s, P)"
    (site,) = find_patterns(source, "a.py")
    assert [(use.function, use.own) for use in site.uses] == [("match", False), ("search", True)]


def test_rows_of_a_loop_are_seen_one_by_one() -> None:
    source = "import pytest\nfor text in ('a', 'b'):\n pytest.raises(E, match=text)"
    assert [site.pattern for site in find_patterns(source, "a.py")] == ["a", "b"]


# What the rules say: source -> (rule, level)
SAID = (
    (UNITTEST + "self.assertRegex(text, '.*')", [("vacuous-test", "error")]),
    (UNITTEST + "self.assertRaisesRegex(E, 'a*')", [("vacuous-test", "error")]),
    (UNITTEST + "self.assertRaisesRegex(E, '.*')", []),
    ("import pytest\npytest.raises(E, match='.*')", []),
    (UNITTEST + "self.assertRegex(text, 'x$y')", [("empty-language", "error")]),
    (UNITTEST + r"self.assertRegex(text, r'(a+)+\Z')", [("exponential-ambiguity", "note")]),
    (UNITTEST + r"self.assertRegex(text, r'[ab]*[bc]*[cd]*;')", []),
    (UNITTEST + "self.assertRegex(text, '(')", [("invalid-pattern", "error")]),
    (UNITTEST + "self.assertRegex(text, '.*late')", [("shorter-equivalent", "note")]),
    ("import warnings\nwarnings.filterwarnings('ignore', '.*')", []),
    ("from django.urls import re_path\nre_path('^', v)", []),
    ("from django.urls import re_path\nre_path('^(?:a|a)/', v)", [("equal-siblings", "warning")]),
    ("from django.urls import re_path\nre_path('^[ab]*[bc]*/', v)", [("polynomial-ambiguity", "note")]),
    ("from tornado.web import url\nurl('/.*$', v)", []),
    (VALIDATOR + "RegexValidator('^[a-z]+$')", [("final-newline", "note")]),
    (VALIDATOR + "RegexValidator('^[a-z]+$', inverse_match=True)", []),
    (VALIDATOR + "class V(RegexValidator):\n regex = '^[a-z]+$'", [("final-newline", "note")]),
    (VALIDATOR + "class V(RegexValidator):\n regex = '^[a-z]+$'\n inverse_match = True", []),
    ("from attrs import validators\nvalidators.matches_re('[a-z]+$')", []),
    ("from wtforms.validators import Regexp\nRegexp('[a-z]+$')", [("final-newline", "note")]),
    (VALIDATOR + "RegexValidator('[a-z]*')", [("vacuous-test", "error")]),
    (VALIDATOR + r"RegexValidator(r'^(?:\w+-?)+\Z')", [("exponential-ambiguity", "error")]),
    ("from aiohttp import web\nweb.get('/{n:(?:a+)+b}', h)", [("exponential-ambiguity", "error")]),
    ("from aiohttp import web\nweb.get('/{n:[a-z}', h)", [("invalid-pattern", "error")]),
    (PANDAS + "df.filter(regex='')", []),
)
ASKED = frozenset(
    {"vacuous-test", "empty-language", "invalid-pattern", "equal-siblings", "shorter-equivalent"}
    | {"exponential-ambiguity", "polynomial-ambiguity", "unreachable-part", "final-newline"}
)


def findings(site: Site) -> list[tuple[str, str]]:
    found = check_site(site, (3, 11), DEFAULT_LIMITS, ASKED).findings
    assert not site.embedded or all(finding.suggestion is None for finding in found)
    return [(finding.rule, finding.level) for finding in found]


@pytest.mark.parametrize("source, said", SAID)
def test_said(source: str, said: list[tuple[str, str]]) -> None:
    found = [each for site in find_patterns(source, "a.py") for each in findings(site)]
    asked = {rule for rule, _ in said} | (ASKED - {"shorter-equivalent"})
    assert [(rule, level) for rule, level in found if rule in asked] == said


def test_growth_of_a_text_from_outside_comes_first() -> None:
    source = f"import re\nP = '[ab]*[bc]*[cd]*;'\nre.match(P, s)\n{UNITTEST}self.assertRegex(s, P)"
    (site,) = find_patterns(source, "a.py")
    assert ("polynomial-ambiguity", "warning") in findings(site)


# One's own sinks

OWN = SinkTable(
    (
        Sink("terminal.text.expect", (1, "pattern"), "match", "truth", seen=True, project=True),
        Sink(".must_fit", (0,), "fullmatch", kind="method", method=("must_fit",), seen=True, project=True),
    )
)


@pytest.mark.parametrize(
    "path, source",
    [
        ("a.py", "from terminal.text import expect\nexpect(1, 'a+')"),
        ("a.py", "import terminal.text as t\nt.expect(1, pattern='a+')"),
        ("src/terminal/gate.py", "from .text import expect\nexpect(1, 'a+')"),
        ("src/terminal/gate.py", "from . import text\ntext.expect(1, 'a+')"),
        ("src/terminal/sea/gate.py", "from ..text import expect\nexpect(1, 'a+')"),
        ("a.py", "anything().must_fit('a+')"),
    ],
)
def test_own_sinks(path: str, source: str) -> None:
    (site,) = read_module(source, path, OWN).sites
    assert site.pattern == "a+" and site.uses_seen and len(site.uses) == 1


@pytest.mark.parametrize(
    "path, source",
    [
        ("a.py", "from other.text import expect\nexpect(1, 'a+')"),
        ("src/harbour/gate.py", "from .text import expect\nexpect(1, 'a+')"),
        ("src/terminal/gate.py", "from ..text import expect\nexpect(1, 'a+')"),
        ("a.py", "must_fit('a+')"),
    ],
)
def test_not_own_sinks(path: str, source: str) -> None:
    module = read_module(source, path, OWN)
    assert module.sites == () and module.unresolved == ()


# The libraries themselves


def test_the_libraries_do_what_the_rows_say() -> None:
    known = adapters(libraries=False)
    asked = [(sink, probe) for sink, probe in bench.probes(BUILTIN) if probe[0] in known]
    answers: list[object] = []
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        for _, (name, pattern, text, flags) in asked:
            answers.append(known[name](pattern, text, flags))
    counts, wrong = bench.compare(asked, answers)
    assert wrong == []
    assert len(counts) >= 14 and all(count >= 30 for count in counts.values())
    outcomes = {(name, answer) for (_, (name, *_)), answer in zip(asked, answers, strict=True)}
    assert len(outcomes) == 2 * len(counts)  # each one takes some texts and refuses others


def test_a_scanner_loses_the_flags_of_a_row() -> None:
    """By experiment, on 3.10 to 3.13: why such rows are not judged."""
    scanner = re.Scanner([("(?i)a", "row")])  # type: ignore[attr-defined]
    assert scanner.scan("a") == (["row"], "") and scanner.scan("A") == ([], "A")


def test_compileall_searches_the_path(tmp_path: Path) -> None:
    (tmp_path / "quay.py").write_text("x = 1\n", encoding="utf-8")
    made = tmp_path / "__pycache__"
    compileall.compile_dir(str(tmp_path), quiet=2, rx=re.compile("quay"))  # a search: left out
    assert not made.exists()
    compileall.compile_file(str(tmp_path / "quay.py"), quiet=2, rx=re.compile("uay"))
    assert not made.exists()
    compileall.compile_dir(str(tmp_path), quiet=2, rx=re.compile(r"\Aquay"))
    assert made.exists()
    with pytest.raises((AttributeError, TypeError)):
        compileall.compile_file(str(tmp_path / "quay.py"), quiet=2, rx="quay")


# Parts of larger patterns


def test_what_is_dead_in_a_part_is_dead_in_every_larger_pattern() -> None:
    """Brute force: a branch that is called dead may be deleted, whatever stands around the part."""
    words = ("a", "b", "ab", "ba", "a?", "b*", "(?:a|ab)", "ab?")
    around = ("{}", "(?P<n>{})b", "a(?P<n>{})", "(?P<n>{})$", "^(?P<n>{})/?\\Z", "(?:{})+b")
    texts = ["".join(each) for size in range(5) for each in itertools.product("ab", repeat=size)]
    told = 0
    for branches in itertools.product(words, repeat=3):
        part = "|".join(branches)
        assert stands_alone(part, 0)
        (site,) = find_patterns(f"from aiohttp import web\nweb.get('/{{n:{part}}}', h)", "a.py")
        found = check_site(
            site, sys.version_info[:2], DEFAULT_LIMITS, frozenset({"unreachable-part"})
        ).findings
        for finding in found:
            start, end = finding.span
            if "branch" not in finding.message or part[start:end].strip("|") not in branches:
                continue
            told += 1
            without = part[:start] + part[start:end].replace(part[start:end].strip("|"), "(?!)") + part[end:]
            for larger in around:
                before, after = re.compile(larger.format(part)), re.compile(larger.format(without))
                for text in texts:
                    one, other = before.search(text), after.search(text)
                    assert (one and one.span()) == (other and other.span()), (
                        part,
                        finding.span,
                        larger,
                        text,
                    )
    assert told > 20


@pytest.mark.parametrize("pattern", ["a", "a|b", "(a)(?P<n>b)", "[", "a{2,1}", "(?i:a)", "a++"])
def test_stands_alone(pattern: str) -> None:
    assert stands_alone(pattern, 0) or sys.version_info < (3, 11)


@pytest.mark.parametrize(
    "pattern", ["^a", "a$", r"\ba", "a(?=b)", "(?<!a)b", r"(a)\1", "(?i)a", "a)(b", "(a"]
)
def test_does_not_stand_alone(pattern: str) -> None:
    assert not stands_alone(pattern, 0)
