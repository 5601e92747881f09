"""The sinks that are known without being told: the standard library's own, and well-known general libraries.

Each row was checked against the library's own code and documentation; `tests/bench/sinks.py` calls the
libraries themselves and compares. Where versions of a library differ, the row says only what holds in all
of them, or nothing of the use (`function` None).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from patlint.source.sinks import ENGINE, SCANNER, Sink, SinkTable
from patlint.source.sites import Function, LooksAt

_IGNORECASE = 2
_MULTILINE = 8
_VERBOSE = 64


def _unittest() -> Iterator[Sink]:
    """All of them search; what is searched is what the test itself makes."""
    for names in (
        ("assertRegex", "expected_regex"),
        ("assertNotRegex", "unexpected_regex"),
        ("assertRaisesRegex", "expected_regex"),
        ("assertWarnsRegex", "expected_regex"),
        ("assertRegexpMatches", "expected_regex"),  # the older names, to Python 3.11
        ("assertNotRegexpMatches", "unexpected_regex"),
        ("assertRaisesRegexp", "expected_regex"),
    ):
        method, keyword = names
        yield Sink(
            f"unittest.TestCase.{method}",
            (1, keyword),
            "search",
            "truth",
            kind="method",
            method=(method,),
            seen=True,
            own=True,
            narrows="Raises" in method or "Warns" in method,
        )


def _warnings() -> Iterator[Sink]:
    for argument, flags in (((1, "message"), _IGNORECASE), ((3, "module"), 0)):
        yield Sink(
            "warnings.filterwarnings", argument, "match", "truth", flags, seen=True, own=True, selects=True
        )


def _standard() -> Iterator[Sink]:
    yield from _unittest()
    yield from _warnings()
    yield Sink("string.Template", ("pattern",), "sub", "groups", _VERBOSE, ("flags",), "attribute")
    for name in ("idpattern", "braceidpattern"):
        yield Sink("string.Template", (name,), None, "unknown", _VERBOSE, ("flags",), "attribute", part=True)
    for name, position in (("compile_dir", 4), ("compile_file", 3)):
        yield Sink(
            f"compileall.{name}",
            (position, "rx"),
            "search",
            "truth",
            seen=True,
            own=True,
            selects=True,
            objects_only=True,
        )
    yield Sink(
        SCANNER, (0, "lexicon"), "match", "unknown", 0, (1, "flags"), "rows", seen=False, embedded=True
    )


def _pytest() -> Iterator[Sink]:
    for name in ("raises", "warns", "deprecated_call", "RaisesExc", "RaisesGroup"):
        yield Sink(f"pytest.{name}", ("match",), "search", "truth", seen=True, own=True, narrows=True)
    yield Sink(
        "pytest.raises",
        (0, "regexp"),
        "search",
        "truth",
        kind="result",
        method=("match",),
        seen=True,
        own=True,
    )


def _numpy() -> Iterator[Sink]:
    for name in ("numpy.testing.assert_raises_regex",):
        yield Sink(name, (1, "expected_regexp"), "search", "truth", seen=True, own=True, narrows=True)


def _django() -> Iterator[Sink]:
    # A route of an end point that ends in $ is asked of fullmatch, any other of search.
    for name, keyword in (
        ("django.urls.re_path", "route"),
        ("django.urls.conf.re_path", "route"),
        ("django.conf.urls.url", "regex"),
        ("django.urls.resolvers.RegexPattern", "regex"),
    ):
        yield Sink(name, (0, keyword), "search", "groups", embedded=True, selects=True)
    yield Sink(
        "django.core.validators.RegexValidator",
        (0, "regex"),
        "search",
        "truth",
        flags_argument=(4, "flags"),
        seen=True,
        validates=True,
        inverted=(3, "inverse_match"),
    )
    yield Sink(
        "django.core.validators.RegexValidator",
        ("regex",),
        "search",
        "truth",
        flags_argument=("flags",),
        kind="attribute",
        validates=True,
        inverted=("inverse_match",),
    )
    for name in ("django.forms.RegexField", "django.forms.fields.RegexField"):
        yield Sink(name, (0, "regex"), "search", "truth", seen=True, validates=True)


def _lookups() -> Iterator[Sink]:
    # What the data base understands, by its own engine: `filter(name__regex=…)`.
    for name in ("regex", "iregex"):
        yield Sink(
            f"django.db.models.lookups.{name}",
            (name,),
            kind="lookup",
            method=(f"__{name}",),
            needs=("django",),
            refused=ENGINE,
        )


def _aiohttp() -> Iterator[Sink]:
    verbs = ("get", "post", "put", "patch", "delete", "head", "options", "view")
    for verb in verbs:
        if verb != "options":
            yield Sink(f"aiohttp.web.{verb}", (0, "path"), kind="route", part=True)
            yield Sink(
                f"aiohttp.web.RouteTableDef.{verb}",
                (0, "path"),
                kind="route",
                method=(verb,),
                needs=("aiohttp",),
                part=True,
                decorator=True,
            )
            yield Sink(
                f"aiohttp.web.UrlDispatcher.add_{verb}",
                (0, "path"),
                kind="route",
                method=(f"add_{verb}",),
                needs=("aiohttp",),
                part=True,
            )
    yield Sink("aiohttp.web.route", (1, "path"), kind="route", part=True)
    for method, position in (("add_route", 1), ("add_resource", 0)):
        yield Sink(
            f"aiohttp.web.UrlDispatcher.{method}",
            (position, "path"),
            kind="route",
            method=(method,),
            needs=("aiohttp",),
            part=True,
        )


def _werkzeug() -> Iterator[Sink]:
    for module in ("werkzeug.routing", "werkzeug.routing.converters"):
        for name in ("BaseConverter", "UnicodeConverter", "PathConverter"):
            yield Sink(f"{module}.{name}", ("regex",), kind="attribute", part=True)


def _tornado() -> Iterator[Sink]:
    # To a text that does not end in $, one is added.
    for name, keyword in (
        ("tornado.web.url", "pattern"),
        ("tornado.web.URLSpec", "pattern"),
        ("tornado.routing.URLSpec", "pattern"),
        ("tornado.routing.PathMatches", "path_pattern"),
        ("tornado.routing.HostMatches", "host_pattern"),
    ):
        yield _tornado_row(name, (0, keyword))
    for name, keyword in (
        ("tornado.web.Application", "handlers"),
        ("tornado.routing.RuleRouter", "rules"),
        ("tornado.routing.ReversibleRuleRouter", "rules"),
    ):
        yield _tornado_row(name, (0, keyword), rows=True)
    rows = replace(
        _tornado_row("tornado.web.Application.add_handlers", (1, "host_handlers"), rows=True),
        method=("add_handlers",),
        needs=("tornado",),
    )
    yield rows
    yield replace(rows, argument=(0, "host_pattern"), looks_at="truth", kind="method")


def _tornado_row(name: str, argument: tuple[int | str, ...], rows: bool = False) -> Sink:
    return Sink(
        name,
        argument,
        "match",
        "groups",
        kind="rows" if rows else "call",
        embedded=True,
        dollar="match",
        ends_open=False,
        selects=True,
    )


def _pandas() -> Iterator[Sink]:
    # `seen` is False throughout: a column that is kept by an Arrow library is searched by another engine.
    rows: tuple[tuple[str, Function, LooksAt, tuple[int, str] | None, tuple[int, str] | None], ...] = (
        ("contains", "search", "truth", (2, "flags"), (1, "case")),
        ("match", "match", "truth", (2, "flags"), (1, "case")),
        ("fullmatch", "fullmatch", "truth", (2, "flags"), (1, "case")),
        ("replace", "sub", "unknown", (4, "flags"), (3, "case")),
        ("extract", "search", "groups", (1, "flags"), None),
        ("extractall", "findall", "groups", (1, "flags"), None),
        ("findall", "findall", "unknown", (1, "flags"), None),
        ("count", "findall", "span", (1, "flags"), None),
        ("split", "split", "unknown", None, None),
    )
    for method, function, looks_at, flags, case in rows:
        yield Sink(
            f"pandas.Series.str.{method}",
            (0, "pat"),
            function,
            looks_at,
            flags_argument=flags or (),
            kind="method",
            method=("str", method),
            needs=("pandas",),
            selects=True,
            elsewhere=True,
            case=case or (),
            regex={"contains": (4, "regex"), "replace": (5, "regex"), "split": ("regex",)}.get(method, ()),
            regex_default={"replace": False, "split": "long"}.get(method, True),  # type: ignore[arg-type]
        )
    yield Sink(
        "pandas.DataFrame.filter",
        ("regex",),
        "search",
        "truth",
        kind="method",
        method=("filter",),
        needs=("pandas",),
        seen=True,
        selects=True,
    )


def _validation() -> Iterator[Sink]:
    """Validators of forms and schemas that compile with `re`."""
    for top in ("attr", "attrs"):
        yield Sink(
            f"{top}.validators.matches_re",
            (0, "regex"),
            "fullmatch",
            "truth",
            flags_argument=(1, "flags"),
            seen=True,
            unless=(2, "func"),
        )
    for name in ("wtforms.validators.Regexp", "wtforms.validators.regexp"):
        yield Sink(name, (0, "regex"), "match", "truth", flags_argument=(1, "flags"), validates=True)
    for name in ("marshmallow.validate.Regexp",):
        yield Sink(
            name, (0, "regex"), "match", "truth", flags_argument=(1, "flags"), seen=True, validates=True
        )


def _other_engines() -> Iterator[Sink]:
    for module in ("regex", "re2", "pcre2"):
        for name in (
            "compile",
            "match",
            "fullmatch",
            "search",
            "findall",
            "finditer",
            "split",
            "sub",
            "subn",
        ):
            yield Sink(f"{module}.{name}", (0, "pattern"), refused=ENGINE)
    for name in ("Field", "constr", "StringConstraints", "types.constr", "types.StringConstraints"):
        yield Sink(f"pydantic.{name}", ("pattern",), refused=ENGINE)
    for name in ("Query", "Path", "Header", "Cookie", "Body", "Form"):
        yield Sink(f"fastapi.{name}", ("pattern",), refused=ENGINE)
        yield Sink(f"fastapi.{name}", ("regex",), refused=ENGINE)
    for method in ("regexp_match", "regexp_replace"):
        yield Sink(
            f"sqlalchemy.ColumnOperators.{method}",
            (0, "pattern"),
            kind="method",
            method=(method,),
            needs=("sqlalchemy",),
            refused=ENGINE,
        )
    for method in ("contains", "replace", "replace_all", "extract", "extract_all", "count_matches", "find"):
        yield Sink(
            f"polars.Series.str.{method}",
            (0, "pattern"),
            kind="method",
            method=("str", method),
            needs=("polars",),
            refused=ENGINE,
        )
    for name in ("rlike", "regexp_extract", "regexp_extract_all", "regexp_replace", "regexp_like"):
        yield Sink(f"pyspark.sql.functions.{name}", (1, "pattern", "regexp"), refused=ENGINE)
    yield Sink(
        "pyspark.sql.Column.rlike",
        (0, "other"),
        kind="method",
        method=("rlike",),
        needs=("pyspark",),
        refused=ENGINE,
    )


def _pygments() -> Iterator[Sink]:
    """A state's rules are tried in their order at a position, by match; MULTILINE unless the class gives flags."""
    for name in ("pygments.lexer.RegexLexer", "pygments.lexer.ExtendedRegexLexer"):
        yield Sink(
            name,
            ("tokens",),
            "match",
            "groups",
            _MULTILINE,
            ("flags",),
            "states",
            seen=True,
        )


BUILTIN: tuple[Sink, ...] = (
    *_standard(),
    *_pygments(),
    *_pytest(),
    *_numpy(),
    *_django(),
    *_aiohttp(),
    *_werkzeug(),
    *_tornado(),
    *_pandas(),
    *_validation(),
    *_other_engines(),
    *_lookups(),
)

_table: SinkTable | None = None


def builtin_table() -> SinkTable:
    """The table of the built-in sinks, made once."""
    global _table
    if _table is None:
        _table = SinkTable(BUILTIN)
    return _table
