"""Configuration: what is read, what is refused (whole messages), where file and target come from."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path

import pytest

from patlint.config import ConfigError, Settings, load
from patlint.globs import fits
from patlint.limits import Limits, Saving
from patlint.nearest import nearest
from patlint.source.sinks import ENGINE, Sink
from patlint.source.sinks_builtin import BUILTIN
from patlint.target import TARGETS, lowest_target, running_target

RULES = ("nullable", "empty-language", "exponential-ambiguity", "overlapping-siblings", "stale-waiver")


def configured(folder: Path, table: str) -> Settings:
    (folder / "pyproject.toml").write_text("[tool.patlint]\n" + table, encoding="utf-8")
    return load(RULES, folder)


def test_every_key(tmp_path: Path) -> None:
    settings = configured(
        tmp_path,
        """
        target = "3.12"
        fail-on = "error"
        only = ["nullable", "empty-language"]
        skip = ["nullable"]
        exclude = ["vendor"]
        levels = { empty-language = "note" }
        limits = { states = 7 }
        shorter = { percent = 0 }
        per-path = { "tests/**" = { skip = ["empty-language"], levels = { nullable = "off" } } }
        """,
    )
    assert settings.target == (3, 12)
    assert settings.fail_on == "error"
    assert settings.limits == Limits(states=7)
    assert settings.saving == Saving(2, 0)
    assert settings.root == str(tmp_path)
    assert settings.for_path(str(tmp_path / "a.py")) == (
        frozenset({"empty-language"}),
        {"empty-language": "note"},
    )
    assert settings.for_path(str(tmp_path / "tests" / "b" / "a.py"))[0] == frozenset()
    assert settings.excludes(str(tmp_path / "lib" / "vendor" / "a.py"))
    assert not settings.excludes(str(tmp_path / "lib" / "vendors" / "a.py"))


def test_without_a_word(tmp_path: Path) -> None:
    (tmp_path / ".git").mkdir()
    settings = load(RULES, tmp_path)
    assert settings.root == str(tmp_path)
    assert settings.target == running_target()
    assert settings.fail_on == "warning"
    enabled, levels = settings.for_path("x.py")
    assert enabled == frozenset(RULES) - {"overlapping-siblings"}
    assert levels == {}


def test_a_level_turns_a_rule_on_that_is_off_by_default(tmp_path: Path) -> None:
    settings = configured(tmp_path, 'levels = { overlapping-siblings = "note", nullable = "off" }')
    assert settings.for_path("x.py")[0] == frozenset(RULES) - {"nullable"}
    assert configured(tmp_path, 'only = ["overlapping-siblings"]').for_path("x.py")[0] == frozenset(
        {"overlapping-siblings"}
    )


REFUSED = [
    ('targt = "3.12"', "unknown key targt; the nearest is target"),
    ("zzz = 1", "unknown key zzz"),
    ('target = "3.9"', "unknown target '3.9'; patlint knows 3.10, 3.11, 3.12, 3.13"),
    ("target = 3.12", "target must be a text, not the number 3.12"),
    (
        'fail-on = "warnings"',
        "fail-on must be one of error, warning, note, never, not 'warnings'; the nearest is warning",
    ),
    ("fail-on = true", "fail-on must be a text, not true"),
    ('only = "nullable"', "only must be a list of texts, not the text 'nullable'"),
    ("skip = [1]", "skip must be a list of texts; it holds the number 1"),
    ('skip = ["nulable"]', "skip names an unknown rule 'nulable'; the nearest is nullable"),
    ("exclude = {}", "exclude must be a list of texts, not a table"),
    ("levels = []", "levels must be a table, not a list"),
    ('levels = { nulable = "off" }', "levels names an unknown rule 'nulable'; the nearest is nullable"),
    (
        'levels = { nullable = "warn" }',
        "levels.nullable must be one of error, warning, note, off, not 'warn'; the nearest is warning",
    ),
    ("limits = { stats = 1 }", "limits has an unknown key stats; the nearest is states"),
    ("limits = { states = 0 }", "limits.states must be a whole number above 0, not the number 0"),
    ("limits = { states = true }", "limits.states must be a whole number above 0, not true"),
    ("shorter = { chars = 1 }", "shorter has an unknown key chars; the nearest is characters"),
    ("shorter = { characters = 0 }", "shorter.characters must be a whole number above 0, not the number 0"),
    ("shorter = { characters = true }", "shorter.characters must be a whole number above 0, not true"),
    (
        "shorter = { percent = 101 }",
        "shorter.percent must be a whole number from 0 to 100, not the number 101",
    ),
    ("shorter = { percent = -1 }", "shorter.percent must be a whole number from 0 to 100, not the number -1"),
    (
        "shorter = { percent = 0.5 }",
        "shorter.percent must be a whole number from 0 to 100, not the number 0.5",
    ),
    ("shorter = 2", "shorter must be a table, not the number 2"),
    ("limits = { states = 1.5 }", "limits.states must be a whole number above 0, not the number 1.5"),
    ("per-path = { a = 1 }", "per-path.'a' must be a table, not the number 1"),
    ("per-path = { a = { skp = [] } }", "per-path.'a' has an unknown key skp; the nearest is skip"),
    (
        'per-path = { a = { skip = ["nulable"] } }',
        "per-path.'a'.skip names an unknown rule 'nulable'; the nearest is nullable",
    ),
    (
        'per-path = { a = { levels = { nullable = "of" } } }',
        "per-path.'a'.levels.nullable must be one of error, warning, note, off, not 'of'; the nearest is off",
    ),
]


@pytest.mark.parametrize(("table", "message"), REFUSED)
def test_refused(tmp_path: Path, table: str, message: str) -> None:
    with pytest.raises(ConfigError) as caught:
        configured(tmp_path, table)
    assert str(caught.value) == f"{tmp_path / 'pyproject.toml'}: {message}"


def test_sinks(tmp_path: Path) -> None:
    table = configured(
        tmp_path,
        """
        [tool.patlint.sinks]
        "terminal.text.expect" = { argument = [1, "pattern"], mode = "match", looks-at = "truth", flags = ["I", "S"] }
        "terminal.text.Rule" = [
            { argument = 0, flags-argument = [1, "flags"], own-text = true },
            { argument = "until", part = true },
        ]
        ".str.must_fit" = { argument = 0, mode = "fullmatch", selects = true }
        "pytest.warns" = { argument = "pattern", engine = "other" }
        "pytest.raises" = false
        """,
    ).sinks
    assert table is not None
    assert table.sinks[len(table.sinks) - 5 :] == (
        Sink("terminal.text.expect", (1, "pattern"), "match", "truth", 2 | 16, seen=True, project=True),
        Sink("terminal.text.Rule", (0,), flags_argument=(1, "flags"), own=True, project=True),
        Sink("terminal.text.Rule", ("until",), part=True, project=True),
        Sink(
            ".str.must_fit",
            (0,),
            "fullmatch",
            kind="method",
            method=("str", "must_fit"),
            seen=True,
            selects=True,
            project=True,
        ),
        Sink("pytest.warns", ("pattern",), refused=ENGINE, project=True),
    )
    kept = tuple(sink for sink in BUILTIN if sink.name not in ("pytest.raises", "pytest.warns"))
    assert table.sinks[: len(table.sinks) - 5] == kept and len(kept) < len(BUILTIN)
    assert configured(tmp_path, "").sinks is None


@pytest.mark.parametrize(
    "table, message",
    [
        ("sinks = 1", "sinks must be a table, not the number 1"),
        (
            'sinks = { "f()" = false }',
            "sinks.'f()' is no name of a function: write package.function, or .method",
        ),
        (
            'sinks = { "pytest.raise" = false }',
            "sinks.'pytest.raise' is false, but no built-in one has this name; the nearest is pytest.raises",
        ),
        ('sinks = { "a.b" = true }', "sinks.'a.b' must be a table, a list of tables, or false"),
        ('sinks = { "a.b" = [] }', "sinks.'a.b' is an empty list: write false to switch a built-in one off"),
        ('sinks = { "a.b" = [1] }', "sinks.'a.b' must be a table, a list of tables, or false"),
        (
            'sinks = { "a.b" = {} }',
            "sinks.'a.b' does not say which argument: argument = 0, a keyword, or both in a list",
        ),
        (
            'sinks = { "a.b" = { argument = 0, modus = 1 } }',
            "sinks.'a.b' has an unknown key modus; the nearest is mode",
        ),
        (
            'sinks = { "a.b" = { argument = 0, mode = "serch" } }',
            "sinks.'a.b'.mode must be one of search, match, fullmatch, findall, finditer, split, sub, subn, "
            "not 'serch'; the nearest is search",
        ),
        (
            'sinks = { "a.b" = { argument = 0, looks-at = 1 } }',
            "sinks.'a.b'.looks-at must be one of truth, span, groups, unknown, not 1",
        ),
        ('sinks = { "a.b" = { argument = -1 } }', "sinks.'a.b'.argument must be a position from 0, not -1"),
        (
            'sinks = { "a.b" = { argument = true } }',
            "sinks.'a.b'.argument must be a position from 0, a keyword, or both in a list",
        ),
        (
            'sinks = { "a.b" = { argument = "a b" } }',
            "sinks.'a.b'.argument must be a position from 0 or a keyword, not 'a b'",
        ),
        ('sinks = { "a.b" = { argument = [] } }', "sinks.'a.b'.argument is empty"),
        (
            'sinks = { "a.b" = { argument = 0, flags-argument = 1.5 } }',
            "sinks.'a.b'.flags-argument must be a position from 0, a keyword, or both in a list",
        ),
        (
            'sinks = { "a.b" = { argument = 0, flags = ["IGNORCASE"] } }',
            "sinks.'a.b'.flags must be names of flags such as IGNORECASE, not 'IGNORCASE'; "
            "the nearest is IGNORECASE",
        ),
        (
            'sinks = { "a.b" = { argument = 0, flags = "I" } }',
            "sinks.'a.b'.flags must be a list of names of flags",
        ),
        (
            'sinks = { "a.b" = { argument = 0, flags = [2] } }',
            "sinks.'a.b'.flags must be names of flags such as IGNORECASE, not '2'",
        ),
        (
            'sinks = { "a.b" = { argument = 0, own-text = "yes" } }',
            "sinks.'a.b'.own-text must be true or false, not 'yes'",
        ),
        (
            'sinks = { "a.b" = { argument = 0, engine = "pcre" } }',
            "sinks.'a.b'.engine must be one of re, other, not 'pcre'; the nearest is re",
        ),
        (
            'sinks = { "a.b" = { argument = 0, mode = "search", part = true } }',
            "sinks.'a.b' is a part of a larger pattern, so it can have no mode of its own",
        ),
    ],
)
def test_refused_sinks(tmp_path: Path, table: str, message: str) -> None:
    with pytest.raises(ConfigError) as caught:
        configured(tmp_path, table)
    assert str(caught.value) == f"{tmp_path / 'pyproject.toml'}: {message}"


def test_every_field_of_limits_is_a_key(tmp_path: Path) -> None:
    names = [each.name for each in fields(Limits)]
    assert len(names) >= 6
    table = ", ".join(f"{name} = {index + 1}" for index, name in enumerate(names))
    settings = configured(tmp_path, f"limits = {{ {table} }}")
    assert [getattr(settings.limits, name) for name in names] == list(range(1, len(names) + 1))


def test_a_broken_file(tmp_path: Path) -> None:
    path = tmp_path / "pyproject.toml"
    path.write_text("[tool.patlint\n")
    with pytest.raises(ConfigError) as caught:
        load(RULES, tmp_path)
    assert str(caught.value).startswith(f"{path}: not TOML: ")
    assert "\n" not in str(caught.value)
    path.write_bytes(b"a = '\xff'\n")
    with pytest.raises(ConfigError, match="not TOML"):
        load(RULES, tmp_path)
    path.write_text("[tool]\npatlint = 1\n")
    with pytest.raises(ConfigError) as caught:
        load(RULES, tmp_path)
    assert str(caught.value) == f"{path}: tool.patlint must be a table"


def test_the_nearest_file_with_a_table_counts(tmp_path: Path) -> None:
    inner = tmp_path / "one" / "two"
    inner.mkdir(parents=True)
    (inner / "pyproject.toml").write_text('[project]\nname = "x"\nrequires-python = ">=3.12"\n')
    configured(tmp_path, 'skip = ["nullable"]')
    settings = load(RULES, inner / "missing.py")
    assert (settings.root, settings.skip) == (str(tmp_path), frozenset({"nullable"}))
    assert settings.target == (3, 12)


def test_the_search_ends_at_the_top_of_the_repository(tmp_path: Path) -> None:
    inner = tmp_path / "repository"
    (inner / ".git").mkdir(parents=True)
    configured(tmp_path, 'skip = ["nullable"]')
    assert load(RULES, inner).skip == frozenset()


def test_a_file_of_its_own(tmp_path: Path) -> None:
    (tmp_path / "pyproject.toml").write_text('[project]\nname = "x"\nrequires-python = ">=3.11"\n')
    own = tmp_path / "etc" / "patlint.toml"
    own.parent.mkdir()
    own.write_text('skip = ["nullable"]\n')
    settings = load(RULES, tmp_path, own)
    assert (settings.root, settings.skip, settings.target) == (
        str(own.parent),
        frozenset({"nullable"}),
        (3, 11),
    )
    own.write_text('[tool.patlint]\nskip = ["empty-language"]\n')
    assert load(RULES, tmp_path, own).skip == frozenset({"empty-language"})
    own.write_text('[build-system]\nrequires = ["x"]\n')
    assert load(RULES, tmp_path, own).skip == frozenset()
    own.write_text("skp = []\n")
    with pytest.raises(ConfigError) as caught:
        load(RULES, tmp_path, own)
    assert str(caught.value) == f"{own}: unknown key skp; the nearest is skip"
    with pytest.raises(ConfigError) as caught:
        load(RULES, tmp_path, tmp_path / "none.toml")
    assert str(caught.value) == f"{tmp_path / 'none.toml'}: cannot be read: No such file or directory"


# Source: PEP 440, "Version specifiers"; the outcome is held within 3.10 to 3.13.
SPECIFIERS = [
    (">=3.8", (3, 10)),
    (">=3.11", (3, 11)),
    (">= 3.11, <4", (3, 11)),
    (">3.10", (3, 10)),  # 3.10.1 is above 3.10
    (">3.10.99", (3, 11)),
    (">3.11.40", (3, 12)),
    ("~=3.11", (3, 11)),
    ("~=3.12.2", (3, 12)),
    ("==3.11.*", (3, 11)),
    ("==3.12.1", (3, 12)),
    ("!=3.10.*,>=3.10", (3, 11)),
    ("<3.12", (3, 10)),
    (">=2.7,!=3.0.*,!=3.1.*", (3, 10)),
    ("==3.9.*", (3, 10)),
    (">=3.14", (3, 13)),
    ("", (3, 10)),
    (">=3.13.0rc1", (3, 13)),
    ("^3.10", None),
    (">=4", None),
    ("three", None),
]


@pytest.mark.parametrize(("specifier", "target"), SPECIFIERS)
def test_requires_python(specifier: str, target: tuple[int, int] | None) -> None:
    assert lowest_target(specifier) == target


def test_requires_python_as_packaging_reads_it() -> None:
    specifiers = pytest.importorskip("packaging.specifiers")
    tried = 0
    for specifier, target in SPECIFIERS:
        if target is None:
            continue
        allowed = specifiers.SpecifierSet(specifier)
        minors = [minor for minor in range(60) if any(f"3.{minor}.{micro}" in allowed for micro in range(41))]
        assert min(max((3, minors[0]), TARGETS[0]), TARGETS[-1]) == target, specifier
        tried += 1
    assert tried == 17


# Globs: the reading of `patlint.globs`' own docstring.
GLOBS = [
    ("build", "build/x.py", True),
    ("build", "src/build/x.py", True),
    ("build", "src/builds/x.py", False),
    ("build/", "src/build/x.py", True),
    ("*_pb2.py", "src/a_pb2.py", True),
    ("*.py", "src/a.pyc", False),
    ("src/*.py", "src/a.py", True),
    ("src/*.py", "src/a/b.py", False),
    ("src/*.py", "lib/src/a.py", False),
    ("./src/*.py", "src/a.py", True),
    ("src/**/*.py", "src/a.py", True),
    ("src/**/*.py", "src/a/b/c.py", True),
    ("**/data/**", "data/x.py", True),
    ("**/data/**", "a/b/data/c/x.py", True),
    ("**/data/**", "a/datas/x.py", False),
    ("src/**", "src/a/b.py", True),
    ("a?.py", "ab.py", True),
    ("a?.py", "a/.py", False),
    ("[ab].py", "b.py", True),
    ("[!ab].py", "b.py", False),
    ("[!ab].py", "c.py", True),
    ("[a-c]x.py", "bx.py", True),
    ("a.py", "axpy", False),
    ("(a)+[", "(a)+[", True),
    ("a[^]b", "a^b", True),
]


@pytest.mark.parametrize(("glob", "path", "expected"), GLOBS)
def test_globs(glob: str, path: str, expected: bool) -> None:
    assert fits(glob, path) is expected


def test_nearest() -> None:
    assert nearest("nulable", RULES) == "; the nearest is nullable"
    assert nearest("xyzzy", RULES) == ""
