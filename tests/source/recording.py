"""A stand-in for `re` that records what it is given, for running our own snippets.

Linted code is never run, by the tests neither.
"""

from __future__ import annotations

import builtins
import re
import sys
import types
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
