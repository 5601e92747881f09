"""Patterns that people wrote: the literals given to `re` in the running Python's own library."""

from __future__ import annotations

import ast
import sysconfig
import warnings
from functools import lru_cache
from pathlib import Path

CALLS = frozenset(("compile", "match", "fullmatch", "search", "findall", "finditer", "split", "sub", "subn"))
SKIPPED = frozenset(("test", "tests", "idle_test", "site-packages", "__pycache__", "lib2to3", "encodings"))
LONGEST = 120


@lru_cache(maxsize=2)
def real_patterns(files: int) -> tuple[str | bytes, ...]:
    """The distinct pattern literals of the first `files` files that call `re`, by name of the file."""
    root = Path(sysconfig.get_paths()["stdlib"])
    found: dict[str | bytes, None] = {}
    for path in sorted((*root.glob("*.py"), *root.glob("*/*.py"))):
        if SKIPPED.intersection(path.relative_to(root).parts):
            continue
        source = path.read_bytes()
        if b"re." not in source or not any(f"re.{name}(".encode() in source for name in CALLS):
            continue
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            try:
                tree = ast.parse(source)
            except (SyntaxError, ValueError):
                continue
        for node in ast.walk(tree):
            pattern = _pattern(node)
            if pattern is not None and len(pattern) <= LONGEST:
                found[pattern] = None
        files -= 1
        if not files:
            break
    return tuple(found)


def _pattern(node: ast.AST) -> str | bytes | None:
    """The literal that a call of a function of `re` has as its pattern."""
    match node:
        case ast.Call(
            func=ast.Attribute(value=ast.Name(id="re"), attr=name),
            args=[ast.Constant(value=str() | bytes() as pattern), *_],
        ) if name in CALLS:
            return pattern
    return None
