"""The configuration: `[tool.patlint]` of a pyproject.toml, or a TOML file of its own.

`Settings` is what a run needs, checked and complete; `load` finds, reads and checks the file. A wrong key, a
wrong type or an unknown rule is a `ConfigError` that names the file, the key and the nearest right word.

    [tool.patlint]
    target = "3.11"                 # 3.10 to 3.13; without it the lowest that requires-python allows
    fail-on = "warning"             # error, warning, note or never
    skip = ["final-newline"]        # rules that are off
    only = []                       # if not empty: the only rules that are on
    exclude = ["vendor", "tests/data/**"]
    ledger = "patlint.ledger"       # known findings, left out of the report
    levels = { nullable = "error", overlapping-siblings = "note", shorter-equivalent = "off" }
    limits = { states = 5000 }
    shorter = { characters = 2, percent = 10 }
    sinks = { "terminal.text.expect" = { argument = 0, mode = "search" }, "pytest.raises" = false }
    per-path = { "tests/**" = { skip = ["nullable"], levels = { final-newline = "off" } } }

Globs are relative to the file's directory (`patlint.globs`). Where several entries of `per-path` fit a file,
all apply in the order of the file.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any, Final, Literal, TypeAlias

from patlint.globs import fits
from patlint.limits import DEFAULT_LIMITS, DEFAULT_SAVING, Limits, Saving
from patlint.nearest import nearest
from patlint.target import Target, lowest_target, running_target, target_named, unknown_target

if TYPE_CHECKING:
    from patlint.source.sinks import SinkTable

LevelName: TypeAlias = Literal["error", "warning", "note", "off"]
FailOn: TypeAlias = Literal["error", "warning", "note", "never"]

LEVEL_NAMES: Final = ("error", "warning", "note", "off")
FAIL_ON: Final = ("error", "warning", "note", "never")
DEFAULT_FAIL_ON: Final = "warning"
OFF_BY_DEFAULT: Final = frozenset({"overlapping-siblings"})
"""Rules that run only where `levels` or `only` names them."""

_PYPROJECT_KEYS: Final = frozenset({"tool", "project", "build-system"})
_KEYS: Final = (
    "target",
    "fail-on",
    "only",
    "skip",
    "exclude",
    "ledger",
    "levels",
    "limits",
    "shorter",
    "sinks",
    "per-path",
)


class ConfigError(Exception):
    """A wrong configuration or call; the message is one line that names the file and the key."""


@dataclass(frozen=True, slots=True)
class PathSettings:
    """What one entry of `per-path` changes for the files that `glob` fits."""

    glob: str
    levels: tuple[tuple[str, LevelName], ...] = ()
    skip: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True)
class Settings:
    """A checked configuration. `root` is the directory that globs are relative to and the cache stands in.

    `rules` are the names of all rules, in the registry's order; `root` is None where no project was found.
    """

    target: Target
    rules: tuple[str, ...]
    root: str | None = None
    limits: Limits = DEFAULT_LIMITS
    saving: Saving = DEFAULT_SAVING
    fail_on: FailOn = DEFAULT_FAIL_ON
    only: frozenset[str] = frozenset()
    skip: frozenset[str] = frozenset()
    exclude: tuple[str, ...] = ()
    levels: tuple[tuple[str, LevelName], ...] = ()
    per_path: tuple[PathSettings, ...] = ()
    ledger: str | None = None
    sinks: SinkTable | None = None
    """Functions of other libraries that take patterns; None: the built-in ones."""

    def relative(self, path: str) -> str:
        """`path` as globs see it: relative to `root`, with `/`; as it is where it lies elsewhere."""
        full = os.path.abspath(path)
        base = os.path.abspath(self.root if self.root is not None else os.curdir)
        try:
            inner = os.path.relpath(full, base)
        except ValueError:  # another drive
            return full.replace(os.sep, "/")
        return (full if inner.startswith(os.pardir) else inner).replace(os.sep, "/")

    def excludes(self, path: str) -> bool:
        """Whether a glob of `exclude` fits `path` or a directory above it."""
        if not self.exclude:
            return False
        inner = self.relative(path)
        return any(fits(glob, inner) for glob in self.exclude)

    def for_path(self, path: str) -> tuple[frozenset[str], dict[str, LevelName]]:
        """The rules that are on in `path`, and the levels that the configuration gives there."""
        levels = dict(self.levels)
        skip = self.skip
        if self.per_path:
            inner = self.relative(path)
            for each in self.per_path:
                if fits(each.glob, inner):
                    levels |= dict(each.levels)
                    skip |= each.skip
        asked = self.only or (frozenset(self.rules) - OFF_BY_DEFAULT) | frozenset(levels)
        off = {rule for rule, level in levels.items() if level == "off"}
        return frozenset(self.rules) & asked - skip - off, levels

    def asks(self, path: str, rule: str) -> bool:
        """Whether a finding of `rule` in `path` would be told; a rule that does not exist has none to tell."""
        return rule not in self.rules or rule in self.for_path(path)[0]


def load(
    rules: Iterable[str], start: str | os.PathLike[str] = ".", config: str | os.PathLike[str] | None = None
) -> Settings:
    """The settings for files at `start`, a path that need not exist.

    `config` names the file; without it the nearest pyproject.toml with `[tool.patlint]` above `start` is
    read. Raises ConfigError.
    """
    project: dict[str, Any] = {}
    table: dict[str, Any] = {}
    root: Path | None = None
    path: Path | None = None
    for each in _project_files(Path(start)):
        data = _read(each)
        if root is None:
            root, project = each.parent, _project_table(data)
        if config is not None:
            break
        if _has_table(data):
            root, path, table = each.parent, each, _tool_table(each, data)
            project = _project_table(data) or project
            break
    if config is not None:
        path = Path(config)
        data = _read(path)
        root = path.parent
        table = _tool_table(path, data) if _PYPROJECT_KEYS & data.keys() else data
        project = _project_table(data) or project
    elif root is None:
        root = repository(Path(start))
    settings = Settings(_default_target(project), tuple(rules), None if root is None else str(root))
    return settings if path is None else _checked(settings, table, str(path))


def _default_target(project: dict[str, Any]) -> Target:
    requires = project.get("requires-python")
    lowest = lowest_target(requires) if isinstance(requires, str) else None
    return lowest or running_target()


def _project_files(start: Path) -> Iterator[Path]:
    """The pyproject.toml files from `start` upwards, nearest first, up to the top of the repository."""
    full = Path(os.path.abspath(start))
    for folder in (full, *full.parents):
        candidate = folder / "pyproject.toml"
        if candidate.is_file():
            yield candidate
        if (folder / ".git").exists():
            return


def repository(start: Path) -> Path | None:
    """The nearest directory from `start` upwards that is the top of a repository."""
    full = Path(os.path.abspath(start))
    return next((each for each in (full, *full.parents) if (each / ".git").exists()), None)


def _read(path: Path) -> dict[str, Any]:
    if sys.version_info >= (3, 11):
        import tomllib
    else:
        import tomli as tomllib
    try:
        with path.open("rb") as file:
            data: dict[str, Any] = tomllib.load(file)
            return data
    except OSError as error:
        raise ConfigError(f"{path}: cannot be read: {error.strerror or error}") from None
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise ConfigError(f"{path}: not TOML: {error}") from None
    except RecursionError:
        raise ConfigError(f"{path}: not TOML: nested too deeply") from None


def _has_table(data: dict[str, Any]) -> bool:
    tool = data.get("tool")
    return isinstance(tool, dict) and "patlint" in tool


def _tool_table(path: Path, data: dict[str, Any]) -> dict[str, Any]:
    tool = data.get("tool")
    table = tool.get("patlint", {}) if isinstance(tool, dict) else {}
    if not isinstance(table, dict):
        raise ConfigError(f"{path}: tool.patlint must be a table")
    return table


def _project_table(data: dict[str, Any]) -> dict[str, Any]:
    project = data.get("project")
    return project if isinstance(project, dict) else {}


def _checked(settings: Settings, table: dict[str, Any], path: str) -> Settings:
    for key in table:
        if key not in _KEYS:
            raise ConfigError(f"{path}: unknown key {key}{nearest(key, _KEYS)}")
    check = _Checker(path, settings.rules)
    changes: dict[str, Any] = {}
    if "target" in table:
        changes["target"] = check.target(table["target"])
    if "fail-on" in table:
        changes["fail_on"] = check.one_of(table["fail-on"], "fail-on", FAIL_ON)
    for key in ("only", "skip"):
        if key in table:
            changes[key] = check.rule_set(table[key], key)
    if "exclude" in table:
        changes["exclude"] = tuple(check.texts(table["exclude"], "exclude"))
    if "ledger" in table:
        changes["ledger"] = str(Path(path).parent / check.text(table["ledger"], "ledger"))
    if "levels" in table:
        changes["levels"] = check.level_table(table["levels"], "levels")
    if "limits" in table:
        changes["limits"] = check.limits(table["limits"])
    if "shorter" in table:
        changes["saving"] = check.saving(table["shorter"])
    if "sinks" in table:
        changes["sinks"] = check.sinks(table["sinks"])
    if "per-path" in table:
        changes["per_path"] = check.per_path(table["per-path"])
    return replace(settings, **changes)


@dataclass(frozen=True, slots=True)
class _Checker:
    """Checks of single values; every message begins with the file and the key."""

    path: str
    rules: tuple[str, ...]

    def wrong(self, key: str, what: str) -> ConfigError:
        return ConfigError(f"{self.path}: {key} {what}")

    def text(self, value: object, key: str) -> str:
        if not isinstance(value, str):
            raise self.wrong(key, f"must be a text, not {_kind(value)}")
        return value

    def texts(self, value: object, key: str) -> list[str]:
        if not isinstance(value, list):
            raise self.wrong(key, f"must be a list of texts, not {_kind(value)}")
        for each in value:
            if not isinstance(each, str):
                raise self.wrong(key, f"must be a list of texts; it holds {_kind(each)}")
        return value

    def table(self, value: object, key: str) -> dict[str, Any]:
        if not isinstance(value, dict):
            raise self.wrong(key, f"must be a table, not {_kind(value)}")
        return value

    def one_of(self, value: object, key: str, words: tuple[str, ...]) -> str:
        text = self.text(value, key)
        if text not in words:
            raise self.wrong(key, f"must be one of {', '.join(words)}, not {text!r}{nearest(text, words)}")
        return text

    def target(self, value: object) -> Target:
        name = self.text(value, "target")
        target = target_named(name)
        if target is None:
            raise ConfigError(f"{self.path}: {unknown_target(name)}")
        return target

    def rule(self, name: str, key: str) -> str:
        if name not in self.rules:
            raise self.wrong(key, f"names an unknown rule {name!r}{nearest(name, self.rules)}")
        return name

    def rule_set(self, value: object, key: str) -> frozenset[str]:
        return frozenset(self.rule(each, key) for each in self.texts(value, key))

    def level_table(self, value: object, key: str) -> tuple[tuple[str, str], ...]:
        return tuple(
            (self.rule(name, key), self.one_of(level, f"{key}.{name}", LEVEL_NAMES))
            for name, level in self.table(value, key).items()
        )

    def limits(self, value: object) -> Limits:
        names = [each.name for each in fields(Limits)]
        changes: dict[str, int] = {}
        for name, number in self.table(value, "limits").items():
            if name not in names:
                raise self.wrong("limits", f"has an unknown key {name}{nearest(name, names)}")
            if not isinstance(number, int) or isinstance(number, bool) or number < 1:
                raise self.wrong(f"limits.{name}", f"must be a whole number above 0, not {_kind(number)}")
            changes[name] = number
        return replace(DEFAULT_LIMITS, **changes)

    def saving(self, value: object) -> Saving:
        """What a shorter pattern has to save: at least one character, and at most all of them."""
        most = {"characters": None, "percent": 100}
        changes: dict[str, int] = {}
        for name, number in self.table(value, "shorter").items():
            if name not in most:
                raise self.wrong("shorter", f"has an unknown key {name}{nearest(name, list(most))}")
            least, high = int(name == "characters"), most[name]
            whole = isinstance(number, int) and not isinstance(number, bool)
            if not whole or number < least or (high is not None and number > high):
                allowed = f"from {least} to {high}" if high is not None else f"above {least - 1}"
                raise self.wrong(f"shorter.{name}", f"must be a whole number {allowed}, not {_kind(number)}")
            changes[name] = number
        return replace(DEFAULT_SAVING, **changes)

    def sinks(self, value: object) -> SinkTable:
        from patlint.source.sinks_config import SinkError, sink_table

        try:
            return sink_table(self.table(value, "sinks"))
        except SinkError as error:
            raise ConfigError(f"{self.path}: {error}") from None

    def per_path(self, value: object) -> tuple[PathSettings, ...]:
        out = []
        for glob, entry in self.table(value, "per-path").items():
            key = f"per-path.{glob!r}"
            inner = self.table(entry, key)
            for name in inner:
                if name not in ("levels", "skip"):
                    raise self.wrong(key, f"has an unknown key {name}{nearest(name, ('levels', 'skip'))}")
            levels = self.level_table(inner.get("levels", {}), f"{key}.levels")
            out.append(PathSettings(glob, levels, self.rule_set(inner.get("skip", []), f"{key}.skip")))  # type: ignore[arg-type]
        return tuple(out)


def _kind(value: object) -> str:
    match value:
        case bool():
            return "true" if value else "false"
        case str():
            return f"the text {value!r}"
        case int() | float():
            return f"the number {value}"
        case list():
            return "a list"
        case dict():
            return "a table"
        case _:
            return f"a {type(value).__name__}"
