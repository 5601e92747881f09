"""What libraries really do with a pattern: one adapter for each built-in sink. Imports nothing of patlint.

An adapter is called with a pattern, a text and flags, hands the pattern to the library in the way of the sink, and
says whether the library takes the text. `adapters(name)` gives them by the sink's key; as a program, the module
reads `[[key, pattern, text, flags], …]` as JSON and writes the answers: true, false, or the error in words.
A library that is not installed gives null.
"""

from __future__ import annotations

import json
import re
import string
import sys
import unittest
import warnings
from collections.abc import Callable
from types import SimpleNamespace
from typing import Any

Adapter = Callable[[str, str, int], bool]

_CASE = unittest.TestCase()


def key(name: str, kind: str, argument: object) -> str:
    """The key of a sink: its name, its kind, and its last way to give the argument."""
    return f"{name} {kind} {argument}"


def _asserts(call: Callable[[str, str], object]) -> Adapter:
    def takes(pattern: str, text: str, flags: int) -> bool:
        try:
            call(pattern, text)
        except AssertionError:
            return False
        return True

    return takes


def _raising(text: str) -> None:
    raise ValueError(text)


def _warning(text: str) -> None:
    warnings.warn(text, UserWarning, stacklevel=1)


def _standard() -> dict[str, Adapter]:
    case: Any = _CASE

    def not_regex(pattern: str, text: str, flags: int) -> bool:
        return not _asserts(lambda p, t: case.assertNotRegex(t, p))(pattern, text, flags)

    def message(pattern: str, text: str, flags: int) -> bool:
        with warnings.catch_warnings():
            warnings.resetwarnings()
            warnings.simplefilter("ignore")
            warnings.filterwarnings("error", message=pattern)
            try:
                _warning(text)
            except UserWarning:
                return True
        return False

    def module(pattern: str, text: str, flags: int) -> bool:
        with warnings.catch_warnings():
            warnings.resetwarnings()
            warnings.simplefilter("ignore")
            warnings.filterwarnings("error", module=pattern)
            try:
                warnings.warn_explicit("said", UserWarning, "dock.py", 1, module=text)
            except UserWarning:
                return True
        return False

    def template(pattern: str, text: str, flags: int) -> bool:
        body: dict[str, Any] = {"pattern": pattern} | ({"flags": flags} if flags else {})
        made: Any = type("Made", (string.Template,), body)
        return made.pattern.search(text) is not None

    def name_of(attribute: str, before: str, after: str) -> Adapter:
        def takes(pattern: str, text: str, flags: int) -> bool:
            body: dict[str, Any] = {attribute: pattern} | ({"flags": flags} if flags else {})
            made: Any = type("Made", (string.Template,), body)
            try:
                return bool(made(before + text + after).substitute({text: "yes"}) == "yes")
            except (KeyError, ValueError):
                return False

        return takes

    def scanner(pattern: str, text: str, flags: int) -> bool:
        made = re.Scanner([(pattern, lambda _, found: found)], flags)  # type: ignore[attr-defined]
        return bool(made.scan(text)[0])

    raises = _asserts(lambda p, t: case.assertRaisesRegex(ValueError, p, _raising, t))
    warns = _asserts(lambda p, t: case.assertWarnsRegex(UserWarning, p, _warning, t))
    found: dict[str, Adapter] = {
        key("unittest.TestCase.assertRegex", "method", "expected_regex"): _asserts(
            lambda p, t: case.assertRegex(t, p)
        ),
        key("unittest.TestCase.assertNotRegex", "method", "unexpected_regex"): not_regex,
        key("unittest.TestCase.assertRaisesRegex", "method", "expected_regex"): raises,
        key("unittest.TestCase.assertWarnsRegex", "method", "expected_regex"): warns,
        key("warnings.filterwarnings", "call", "message"): message,
        key("warnings.filterwarnings", "call", "module"): module,
        key("string.Template", "attribute", "pattern"): template,
        key("string.Template", "attribute", "idpattern"): name_of("idpattern", "$", ""),
        key("string.Template", "attribute", "braceidpattern"): name_of("braceidpattern", "${", "}"),
        key("re.Scanner", "rows", "lexicon"): scanner,
    }
    if hasattr(case, "assertRegexpMatches"):  # to Python 3.11, deprecated

        def old(method: str, call: Callable[[str, str], object]) -> Adapter:
            def takes(pattern: str, text: str, flags: int) -> bool:
                with warnings.catch_warnings():
                    warnings.simplefilter("ignore")
                    return _asserts(call)(pattern, text, flags)

            return takes

        found[key("unittest.TestCase.assertRegexpMatches", "method", "expected_regex")] = old(
            "assertRegexpMatches", lambda p, t: case.assertRegexpMatches(t, p)
        )
        negated = old("assertNotRegexpMatches", lambda p, t: case.assertNotRegexpMatches(t, p))
        found[key("unittest.TestCase.assertNotRegexpMatches", "method", "unexpected_regex")] = (
            lambda p, t, f: not negated(p, t, f)
        )
        found[key("unittest.TestCase.assertRaisesRegexp", "method", "expected_regex")] = old(
            "assertRaisesRegexp", lambda p, t: case.assertRaisesRegexp(ValueError, p, _raising, t)
        )
    return found


def _pytest() -> dict[str, Adapter]:
    import pytest

    def entered(make: Callable[[str], Any], act: Callable[[str], None]) -> Adapter:
        def takes(pattern: str, text: str, flags: int) -> bool:
            try:
                with warnings.catch_warnings(record=True):  # those that do not fit are given again
                    warnings.simplefilter("always")
                    with make(pattern):
                        act(text)
            except (AssertionError, pytest.fail.Exception, ValueError):
                return False
            return True

        return takes

    def result(pattern: str, text: str, flags: int) -> bool:
        with pytest.raises(ValueError) as caught:  # noqa: PT011
            raise ValueError(text)
        return _asserts(lambda p, _: caught.match(p))(pattern, text, flags)

    def deprecated(text: str) -> None:
        warnings.warn(text, DeprecationWarning, stacklevel=1)

    found = {
        key("pytest.raises", "call", "match"): entered(
            lambda p: pytest.raises(ValueError, match=p), _raising
        ),
        key("pytest.warns", "call", "match"): entered(lambda p: pytest.warns(UserWarning, match=p), _warning),
        key("pytest.deprecated_call", "call", "match"): entered(
            lambda p: pytest.deprecated_call(match=p), deprecated
        ),
        key("pytest.raises", "result", "regexp"): result,
    }
    if hasattr(pytest, "RaisesExc"):  # since 8.4
        exc: Any = pytest.RaisesExc
        group: Any = pytest.RaisesGroup

        def grouped(pattern: str, text: str, flags: int) -> bool:
            return bool(group(ValueError, match=pattern).matches(_group(text)))

        found[key("pytest.RaisesExc", "call", "match")] = entered(
            lambda p: exc(ValueError, match=p), _raising
        )
        if sys.version_info >= (3, 11):
            found[key("pytest.RaisesGroup", "call", "match")] = grouped
    return found


def _group(text: str) -> BaseException:
    """A group whose message is `text`; a group's own words ("(1 sub-exception)") are left out by pytest."""
    made: Any = ExceptionGroup  # noqa: F821
    return made(text, [ValueError("inner")])  # type: ignore[no-any-return]


def _numpy() -> dict[str, Adapter]:
    from numpy.testing import assert_raises_regex

    return {
        key("numpy.testing.assert_raises_regex", "call", "expected_regexp"): _asserts(
            lambda p, t: assert_raises_regex(ValueError, p, _raising, t)
        )
    }


def _django() -> dict[str, Adapter]:
    from django.conf import settings

    if not settings.configured:
        settings.configure()
    from django import forms
    from django.core.exceptions import ValidationError
    from django.core.validators import RegexValidator
    from django.urls import re_path
    from django.urls.resolvers import RegexPattern

    def view(request: object) -> None: ...

    def validated(make: Callable[[str, int], Callable[[str], object]]) -> Adapter:
        def takes(pattern: str, text: str, flags: int) -> bool:
            try:
                make(pattern, flags)(text)
            except ValidationError:
                return False
            return True

        return takes

    def derived(pattern: str, flags: int) -> Any:
        return type("Made", (RegexValidator,), {"regex": pattern, "flags": flags})()

    route: Adapter = lambda p, t, f: re_path(p, view).pattern.match(t) is not None  # noqa: E731
    field = validated(lambda p, f: forms.RegexField(regex=p, strip=False).clean)
    return {
        key("django.urls.re_path", "call", "route"): route,
        key("django.urls.conf.re_path", "call", "route"): route,
        key("django.urls.resolvers.RegexPattern", "call", "regex"): lambda p, t, f: (
            RegexPattern(p).match(t) is not None
        ),
        key("django.core.validators.RegexValidator", "call", "regex"): validated(
            lambda p, f: RegexValidator(p, None, None, None, f)
        ),
        key("django.core.validators.RegexValidator", "attribute", "regex"): validated(derived),
        key("django.forms.RegexField", "call", "regex"): field,
        key("django.forms.fields.RegexField", "call", "regex"): field,
    }


def _aiohttp() -> dict[str, Adapter]:
    import asyncio

    from aiohttp import web
    from aiohttp.test_utils import make_mocked_request

    async def handler(request: object) -> None: ...

    def resolved(register: Callable[[Any, str], None], method: str = "GET") -> Adapter:
        def takes(pattern: str, text: str, flags: int) -> bool:
            app = web.Application()
            register(app, "/x/{name:" + pattern + "}")

            async def ask() -> bool:
                found = await app.router.resolve(make_mocked_request(method, "/x/" + text))
                return found.http_exception is None

            return asyncio.new_event_loop().run_until_complete(ask())

        return takes

    class View(web.View):
        async def get(self) -> None: ...

    found = {}
    for verb in ("get", "post", "put", "patch", "delete", "head", "view"):
        target: Any = View if verb == "view" else handler
        method = "GET" if verb == "view" else verb.upper()

        def row(app: Any, path: str, verb: str = verb, target: Any = target) -> None:
            app.router.add_routes([getattr(web, verb)(path, target)])

        def table(app: Any, path: str, verb: str = verb, target: Any = target) -> None:
            routes = web.RouteTableDef()
            getattr(routes, verb)(path)(target)
            app.router.add_routes(routes)

        def add(app: Any, path: str, verb: str = verb, target: Any = target) -> None:
            getattr(app.router, f"add_{verb}")(path, target)

        found[key(f"aiohttp.web.{verb}", "route", "path")] = resolved(row, method)
        found[key(f"aiohttp.web.RouteTableDef.{verb}", "route", "path")] = resolved(table, method)
        found[key(f"aiohttp.web.UrlDispatcher.add_{verb}", "route", "path")] = resolved(add, method)
    found[key("aiohttp.web.route", "route", "path")] = resolved(
        lambda app, path: app.router.add_routes([web.route("GET", path, handler)])
    )
    found[key("aiohttp.web.UrlDispatcher.add_route", "route", "path")] = resolved(
        lambda app, path: app.router.add_route("GET", path, handler)
    )
    found[key("aiohttp.web.UrlDispatcher.add_resource", "route", "path")] = resolved(
        lambda app, path: app.router.add_resource(path).add_route("GET", handler)
    )
    return found


def _werkzeug() -> dict[str, Adapter]:
    from werkzeug import routing
    from werkzeug.exceptions import HTTPException

    def converted(base: Any) -> Adapter:
        def takes(pattern: str, text: str, flags: int) -> bool:
            made = type("Made", (base,), {"regex": pattern})
            rules = routing.Map([routing.Rule("/x/<made:name>", endpoint="x")], converters={"made": made})
            try:
                rules.bind("dock.example").match("/x/" + text)
            except HTTPException:
                return False
            return True

        return takes

    return {
        key(f"{module}.{name}", "attribute", "regex"): converted(getattr(routing, name))
        for module in ("werkzeug.routing", "werkzeug.routing.converters")
        for name in ("BaseConverter", "UnicodeConverter", "PathConverter")
    }


def _tornado() -> dict[str, Adapter]:
    from tornado import routing, web

    class Handler(web.RequestHandler): ...

    def by_path(make: Callable[[str], Any]) -> Adapter:
        return lambda p, t, f: make(p).match(SimpleNamespace(path=t, host_name=t)) is not None

    def row_of(router: Any) -> Any:
        return router.rules[0].matcher

    def added(pattern: str, rows: bool) -> Any:
        app = web.Application()
        app.add_handlers("h" if rows else pattern, [(pattern if rows else "/", Handler)])
        rule = app.default_router.rules[0]
        return row_of(rule.target) if rows else rule.matcher

    spec = by_path(lambda p: web.url(p, Handler).matcher)
    return {
        key("tornado.web.url", "call", "pattern"): spec,
        key("tornado.web.URLSpec", "call", "pattern"): spec,
        key("tornado.routing.URLSpec", "call", "pattern"): spec,
        key("tornado.routing.PathMatches", "call", "path_pattern"): by_path(routing.PathMatches),
        key("tornado.routing.HostMatches", "call", "host_pattern"): by_path(routing.HostMatches),
        key("tornado.web.Application", "rows", "handlers"): by_path(
            lambda p: row_of(web.Application([(p, Handler)]).wildcard_router)
        ),
        key("tornado.routing.RuleRouter", "rows", "rules"): by_path(
            lambda p: row_of(routing.RuleRouter([(p, Handler)]))
        ),
        key("tornado.routing.ReversibleRuleRouter", "rows", "rules"): by_path(
            lambda p: row_of(routing.ReversibleRuleRouter([(p, Handler)]))
        ),
        key("tornado.web.Application.add_handlers", "method", "host_pattern"): by_path(
            lambda p: added(p, rows=False)
        ),
        key("tornado.web.Application.add_handlers", "rows", "host_handlers"): by_path(
            lambda p: added(p, rows=True)
        ),
    }


def _pandas() -> dict[str, Adapter]:
    import pandas

    def strings(text: str) -> Any:
        return pandas.Series([text], dtype=object).str

    def split(pattern: str, text: str, flags: int) -> bool:
        return len(strings(text).split(pattern)[0]) > 1

    found: dict[str, Adapter] = {
        "contains": lambda p, t, f: bool(strings(t).contains(p, flags=f)[0]),
        "match": lambda p, t, f: bool(strings(t).match(p, flags=f)[0]),
        "fullmatch": lambda p, t, f: bool(strings(t).fullmatch(p, flags=f)[0]),
        "replace": lambda p, t, f: strings(t).replace(p, "\0", flags=f, regex=True)[0] != t,
        "extract": lambda p, t, f: bool(strings(t).extract(f"({p})", f).notna().iloc[0, 0]),
        "extractall": lambda p, t, f: len(strings(t).extractall(f"({p})", f)) > 0,
        "findall": lambda p, t, f: len(strings(t).findall(p, f)[0]) > 0,
        "count": lambda p, t, f: bool(strings(t).count(p, f)[0] > 0),
        "split": split,
    }
    rows = {key(f"pandas.Series.str.{name}", "method", "pat"): made for name, made in found.items()}

    def filtered(pattern: str, text: str, flags: int) -> bool:
        return len(pandas.DataFrame({text: [1]}).filter(regex=pattern).columns) > 0

    return rows | {key("pandas.DataFrame.filter", "method", "regex"): filtered}


def _validation() -> dict[str, dict[str, Adapter]]:
    def attrs_made(top: str) -> Callable[[], dict[str, Adapter]]:
        def make() -> dict[str, Adapter]:
            from importlib import import_module

            validators: Any = import_module(f"{top}.validators")

            def takes(pattern: str, text: str, flags: int) -> bool:
                try:
                    validators.matches_re(pattern, flags)(None, SimpleNamespace(name="name"), text)
                except ValueError:
                    return False
                return True

            return {key(f"{top}.validators.matches_re", "call", "regex"): takes}

        return make

    def marshmallow_made() -> dict[str, Adapter]:
        from marshmallow import ValidationError, validate

        def takes(pattern: str, text: str, flags: int) -> bool:
            try:
                validate.Regexp(pattern, flags)(text)
            except ValidationError:
                return False
            return True

        return {key("marshmallow.validate.Regexp", "call", "regex"): takes}

    def wtforms_made() -> dict[str, Adapter]:
        from wtforms import validators

        def takes(pattern: str, text: str, flags: int) -> bool:
            field: Any = SimpleNamespace(data=text, gettext=str)
            try:
                validators.Regexp(pattern, flags)(None, field)
            except validators.ValidationError:
                return False
            return True

        return {key(f"wtforms.validators.{name}", "call", "regex"): takes for name in ("Regexp", "regexp")}

    makers = {
        "attr": attrs_made("attr"),
        "attrs": attrs_made("attrs"),
        "marshmallow": marshmallow_made,
        "wtforms": wtforms_made,
    }
    return {name: _made(make) for name, make in makers.items()}


def _made(make: Callable[[], dict[str, Adapter]]) -> dict[str, Adapter]:
    try:
        return make()
    except ImportError:
        return {}


def _pygments() -> dict[str, Adapter]:
    from pygments import lexer, token

    def by_class(base: Any, context: bool) -> Adapter:
        def takes(pattern: str, text: str, flags: int) -> bool:
            rules = [(pattern, token.Name), (r"[\s\S]", token.Error)]
            body: dict[str, Any] = {"tokens": {"root": rules}} | ({"flags": flags} if flags else {})
            made = type("Made", (base,), body)()
            given = {"context": lexer.LexerContext(text, 0)} if context else {"text": text}
            return next(made.get_tokens_unprocessed(**given))[1] is token.Name

        return takes

    return {
        key("pygments.lexer.RegexLexer", "states", "tokens"): by_class(lexer.RegexLexer, False),
        key("pygments.lexer.ExtendedRegexLexer", "states", "tokens"): by_class(
            lexer.ExtendedRegexLexer, True
        ),
    }


def adapters(libraries: bool = True) -> dict[str, Adapter]:
    """All adapters that can be made here; without `libraries`, those of the standard library and pytest."""
    found = _standard() | _made(_pytest)
    if libraries:
        for make in (_pygments, _numpy, _django, _aiohttp, _werkzeug, _tornado, _pandas):
            found |= _made(make)
        for made in _validation().values():
            found |= made
    return found


def main() -> int:
    known = adapters()
    answers: list[object] = []
    for name, pattern, text, flags in json.load(sys.stdin):
        adapter = known.get(name)
        try:
            answers.append(None if adapter is None else bool(adapter(pattern, text, flags)))
        except Exception as error:
            answers.append(f"{type(error).__name__}: {error}")
    json.dump(answers, sys.stdout)
    return 0


if __name__ == "__main__":
    sys.exit(main())
