"""A stand-in for `re` that records what it is given, for running our own snippets and importing Python's library.

Linted code is never run by patlint; the standard library, which is imported here, the tests run anyway.
"""

from __future__ import annotations

import builtins
import json
import re
import subprocess
import sys
import types
from dataclasses import dataclass
from typing import Any

SIGNATURES = {
    "compile": lambda pattern, flags=0: (pattern, flags),
    "match": lambda pattern, string, flags=0: (pattern, flags),
    "fullmatch": lambda pattern, string, flags=0: (pattern, flags),
    "search": lambda pattern, string, flags=0: (pattern, flags),
    "findall": lambda pattern, string, flags=0: (pattern, flags),
    "finditer": lambda pattern, string, flags=0: (pattern, flags),
    "split": lambda pattern, string, maxsplit=0, flags=0: (pattern, flags),
    "sub": lambda pattern, repl, string, count=0, flags=0: (pattern, flags),
    "subn": lambda pattern, repl, string, count=0, flags=0: (pattern, flags),
}
"""The signatures of CPython 3.10 to 3.13 (Lib/re)."""


def recording_re(calls: list[tuple[str, str | bytes, int]]) -> types.ModuleType:
    """A module called `re` whose functions append (function, pattern, flags) to `calls`."""
    module = types.ModuleType("re")
    for name in dir(re):
        if not name.startswith("__"):
            setattr(module, name, getattr(re, name))

    def recorder(name: str) -> Any:
        def record(*args: Any, **kwargs: Any) -> Any:
            pattern, flags = SIGNATURES[name](*args, **kwargs)
            if isinstance(pattern, re.Pattern):
                return getattr(re, name)(*args, **kwargs)
            calls.append((name, pattern, int(flags)))
            return getattr(re, name)(*args, **kwargs)

        return record

    for name in SIGNATURES:
        setattr(module, name, recorder(name))
    module.__all__ = re.__all__  # type: ignore[attr-defined]
    return module


def run(source: str, names: dict[str, Any] | None = None) -> list[tuple[str, str | bytes, int]]:
    """What `re` is given while `source` runs; errors of the snippet end it and are no errors here."""
    calls: list[tuple[str, str | bytes, int]] = []
    fake = recording_re(calls)
    real_import = builtins.__import__

    def importing(name: str, *args: Any, **kwargs: Any) -> Any:
        return fake if name == "re" else real_import(name, *args, **kwargs)

    scope = {
        "__name__": "snippet",
        "__builtins__": {**vars(builtins), "__import__": importing},
        **(names or {}),
    }
    try:
        exec(compile(source, "snippet", "exec"), scope)
    except Exception as error:
        scope["error"] = error
    finally:
        assert sys.modules["re"] is re
    return calls


@dataclass(frozen=True, slots=True)
class Recorded:
    """A call of a function of `re` that an import made; `line` is the caller's at that moment."""

    path: str
    line: int
    function: str
    pattern: str | bytes
    flags: int


_IMPORTING = """
import importlib, json, re, sys, warnings

warnings.simplefilter("ignore")
calls = []

def recorder(name, place):
    real = getattr(re, name)

    def record(*args, **kwargs):
        pattern = args[0] if args else kwargs["pattern"]
        flags = kwargs.get("flags", args[place] if len(args) > place else 0)
        caller = sys._getframe(1)
        if isinstance(pattern, (str, bytes)):
            text = pattern if isinstance(pattern, str) else [pattern.decode("latin-1")]
            calls.append((caller.f_code.co_filename, caller.f_lineno, name, text, int(flags)))
        return real(*args, **kwargs)

    return record

for name, place in json.loads(sys.argv[1]).items():
    setattr(re, name, recorder(name, place))
for name in sys.argv[2:]:
    try:
        importlib.import_module(name)
    except ImportError:
        pass
print(json.dumps(calls))
"""


def recorded_imports(names: list[str]) -> list[Recorded]:
    """What `re` is given while the modules `names` of the standard library are imported, in a process of its own."""
    places = {"compile": 1, "split": 3, "sub": 4, "subn": 4}
    places |= dict.fromkeys(("match", "fullmatch", "search", "findall", "finditer"), 2)
    call = [sys.executable, "-I", "-c", _IMPORTING, json.dumps(places), *names]
    told = subprocess.run(call, capture_output=True, text=True, encoding="utf-8", check=True).stdout
    return [
        Recorded(path, line, function, text if isinstance(text, str) else text[0].encode("latin-1"), flags)
        for path, line, function, text, flags in json.loads(told.splitlines()[-1])
    ]
