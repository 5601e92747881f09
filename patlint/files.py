"""Which files a run reads: paths as given, directories walked to the bottom, always in the same order.

A directory gives its `*.py` files. Not entered are directories that are hidden, named `__pycache__`,
`node_modules` or `__pypackages__`, hold a virtual environment (`pyvenv.cfg`) or fit `exclude`; a directory
named in the call is walked whatever it is called. Links to directories are not followed. A file named in the
call is read whatever its name, unless `exclude` fits it, so that a hook and a whole run agree.
"""

from __future__ import annotations

import os
import stat
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final

from patlint.config import Settings

STDIN: Final = "-"
NEVER_ENTERED: Final = frozenset({"__pycache__", "node_modules", "__pypackages__"})


@dataclass(frozen=True, slots=True)
class FileList:
    """`paths` to read, the number of files that `exclude` left out, and lines for standard error."""

    paths: tuple[str, ...]
    excluded: int
    problems: tuple[str, ...]


def find_files(paths: Iterable[str], settings: Settings, stdin_name: str | None = None) -> FileList:
    """The files at `paths`, each once. Problems: no such file, a directory without Python files."""
    found: dict[str, None] = {}
    problems: list[str] = []
    excluded = 0
    for path in paths:
        if path == STDIN:
            if stdin_name is not None and settings.excludes(stdin_name):
                excluded += 1
            else:
                found[STDIN] = None
            continue
        path = os.path.normpath(path)
        try:
            mode = os.stat(path).st_mode
        except OSError as error:
            problems.append(f"{path}: {_why(path, error)}")
            continue
        if not stat.S_ISDIR(mode):
            if settings.excludes(path):
                excluded += 1
            else:
                found[path] = None
            continue
        inside, left_out = _walk(path, settings, problems)
        excluded += left_out
        if not inside and not left_out:
            problems.append(f"{path}: no Python files in this directory")
        found |= dict.fromkeys(inside)
    return FileList(_once(found), excluded, tuple(problems))


def _once(paths: Iterable[str]) -> tuple[str, ...]:
    """`paths` without those that an earlier one names in another way (`a.py` and `/home/a.py`)."""
    told: dict[str, str] = {}
    for path in paths:
        told.setdefault(path if path == STDIN else os.path.abspath(path), path)
    return tuple(told.values())


def read_file(path: str) -> bytes | str:
    """The content of `path`, or what stands in the way as a text."""
    try:
        with open(path, "rb") as file:
            return file.read()
    except OSError as error:
        return _why(path, error)


def read_source(path: str, stdin_name: str | None) -> tuple[str, bytes | str]:
    """The name to report under, and the content or what stands in the way; `-` is standard input."""
    if path != STDIN:
        return path, read_file(path)
    try:
        return stdin_name or "<stdin>", sys.stdin.buffer.read()
    except AttributeError:
        return stdin_name or "<stdin>", "cannot be read: standard input is closed"
    except OSError as error:
        return stdin_name or "<stdin>", f"cannot be read: {error}"


def _walk(top: str, settings: Settings, problems: list[str]) -> tuple[list[str], int]:
    found: list[str] = []
    excluded = 0
    stack = [top]
    while stack:
        folder = stack.pop()
        try:
            with os.scandir(folder) as entries:
                inside = sorted(entries, key=lambda each: each.name)
        except OSError as error:
            problems.append(f"{folder}: {_why(folder, error)}")
            continue
        if folder != top and any(each.name == "pyvenv.cfg" for each in inside):
            continue
        below: list[str] = []
        for entry in inside:
            path = os.path.normpath(entry.path)
            if entry.is_dir(follow_symlinks=False):
                if not entry.name.startswith(".") and entry.name not in NEVER_ENTERED:
                    if settings.excludes(path):
                        excluded += 1
                    else:
                        below.append(path)
            elif entry.name.endswith(".py") and not entry.name.startswith(".#"):
                if settings.excludes(path):
                    excluded += 1
                elif os.path.isfile(path) or os.path.islink(path) and not os.path.exists(path):
                    found.append(path)
        stack.extend(reversed(below))
    return found, excluded


def _why(path: str, error: OSError) -> str:
    if os.path.islink(path) and not os.path.exists(path):
        return "cannot be read: the link leads nowhere"
    return f"cannot be read: {error.strerror or error}"
