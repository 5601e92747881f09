"""The table `[tool.patlint.sinks]` -> a `SinkTable`: the built-in sinks without those switched off, and one's own.

    [tool.patlint.sinks]
    "terminal.text.expect" = { argument = [1, "pattern"], mode = "search", looks-at = "truth" }
    "terminal.text.Rule" = [{ argument = 0 }, { argument = "until", flags = ["IGNORECASE"] }]
    ".must_fit" = { argument = 0, mode = "fullmatch" }
    "pytest.raises" = false

A key is a qualified name, or a name after a dot: a method of that name, of any object. Without `mode` nothing
is known of the use, and only what holds in every use is said. Errors: `SinkError`, whose message begins with the key.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from typing import Any, Final, cast

from patlint.nearest import nearest
from patlint.source.flags import VALUES
from patlint.source.sinks import ENGINE, Sink, SinkTable, Where
from patlint.source.sinks_builtin import BUILTIN
from patlint.source.sites import Function, LooksAt

KEYS: Final = (
    "argument",
    "mode",
    "looks-at",
    "flags",
    "flags-argument",
    "part",
    "own-text",
    "selects",
    "engine",
)
_MODES: Final = ("search", "match", "fullmatch", "findall", "finditer", "split", "sub", "subn")
_LOOKS: Final = ("truth", "span", "groups", "unknown")
_NAME = re.compile(r"\.?[^\W\d]\w*(?:\.[^\W\d]\w*)*")


class SinkError(Exception):
    """A wrong entry; one line without the file's name."""


def sink_table(entries: dict[str, Any]) -> SinkTable:
    """The table for these entries. Raises SinkError."""
    off: set[str] = set()
    own: list[Sink] = []
    for name, value in entries.items():
        key = f"sinks.{name!r}"
        if not _NAME.fullmatch(name):
            raise SinkError(f"{key} is no name of a function: write package.function, or .method")
        if value is False:
            off.add(_known(name, key))
            continue
        off.add(name)
        several = value if isinstance(value, list) else [value]
        if not several:
            raise SinkError(f"{key} is an empty list: write false to switch a built-in one off")
        for entry in several:
            if not isinstance(entry, dict):
                raise SinkError(f"{key} must be a table, a list of tables, or false")
            own.append(_sink(name, entry, key))
    return SinkTable((*(sink for sink in BUILTIN if sink.name not in off), *own))


def _known(name: str, key: str) -> str:
    names = sorted({sink.name for sink in BUILTIN})
    if name not in names:
        raise SinkError(f"{key} is false, but no built-in one has this name{nearest(name, names)}")
    return name


def _sink(name: str, entry: dict[str, Any], key: str) -> Sink:
    for word in entry:
        if word not in KEYS:
            raise SinkError(f"{key} has an unknown key {word}{nearest(word, KEYS)}")
    if "argument" not in entry:
        raise SinkError(f"{key} does not say which argument: argument = 0, a keyword, or both in a list")
    engine = _word(entry.get("engine", "re"), f"{key}.engine", ("re", "other"))
    mode = entry.get("mode")
    function = None if mode is None else cast(Function, _word(mode, f"{key}.mode", _MODES))
    method = tuple(name[1:].split(".")) if name.startswith(".") else ()
    part = _truth(entry, "part", key)
    if part and function is not None:
        raise SinkError(f"{key} is a part of a larger pattern, so it can have no mode of its own")
    return Sink(
        name,
        _where(entry["argument"], f"{key}.argument"),
        function,
        cast(LooksAt, _word(entry.get("looks-at", "unknown"), f"{key}.looks-at", _LOOKS)),
        _flags(entry.get("flags", []), f"{key}.flags"),
        _where(entry["flags-argument"], f"{key}.flags-argument") if "flags-argument" in entry else (),
        kind="method" if method else "call",
        method=method,
        seen=function is not None,
        part=part,
        own=_truth(entry, "own-text", key),
        selects=_truth(entry, "selects", key),
        refused=ENGINE if engine == "other" else None,
        project=True,
    )


def _where(value: object, key: str) -> Where:
    several = value if isinstance(value, list) else [value]
    for each in several:
        if isinstance(each, bool) or not isinstance(each, (int, str)):
            raise SinkError(f"{key} must be a position from 0, a keyword, or both in a list")
        if isinstance(each, int) and each < 0:
            raise SinkError(f"{key} must be a position from 0, not {each}")
        if isinstance(each, str) and not each.isidentifier():
            raise SinkError(f"{key} must be a position from 0 or a keyword, not {each!r}")
    if not several:
        raise SinkError(f"{key} is empty")
    return tuple(several)


def _word(value: object, key: str, words: tuple[str, ...]) -> str:
    if not isinstance(value, str) or value not in words:
        close = nearest(value, words) if isinstance(value, str) else ""
        raise SinkError(f"{key} must be one of {', '.join(words)}, not {value!r}{close}")
    return value


def _truth(entry: dict[str, Any], word: str, key: str) -> bool:
    value = entry.get(word, False)
    if not isinstance(value, bool):
        raise SinkError(f"{key}.{word} must be true or false, not {value!r}")
    return value


def _flags(value: object, key: str) -> int:
    if not isinstance(value, list):
        raise SinkError(f"{key} must be a list of names of flags")
    return sum(_flag(name, key) for name in cast(Iterable[object], dict.fromkeys(map(_hashable, value))))


def _hashable(value: object) -> object:
    return value if isinstance(value, str) else repr(value)


def _flag(name: object, key: str) -> int:
    long = [word for word in VALUES if len(word) > 1 and word not in ("DEBUG", "TEMPLATE", "NOFLAG")]
    if not isinstance(name, str) or name not in VALUES or name in ("DEBUG", "TEMPLATE", "T"):
        close = nearest(name, long) if isinstance(name, str) else ""
        raise SinkError(f"{key} must be names of flags such as IGNORECASE, not {name!r}{close}")
    return VALUES[name]
