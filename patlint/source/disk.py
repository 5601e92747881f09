"""Other files beside the one that is read, found as Python would find them, with a record of what was asked.

`Files.find(path, module, level)` gives the file of a module that `path` imports; `Files.read(path)` its bytes.
`Files.relied_on` then holds everything that the answers depend on: what was kept of an outcome is good as
long as `unchanged(relied_on)` is true.

>>> files = Files()
>>> files.find("no/such/dock.py", "crane", 1), unchanged(files.relied_on)
(None, True)

A module is looked for where the file's own package begins and, within the project, in the directories above;
one that is found twice is not told. The standard library's modules are not looked for, except from within it.

Source: Python language reference, "The import system" (relative imports, packages with and without
`__init__.py`).
"""

from __future__ import annotations

import hashlib
import os
import sys

MOST_FILES = 30
"""Files read for one file."""
LARGEST = 2_000_000
"""Bytes of one of them. Modules of constants in real code have up to 500,000."""
_HIGHEST = 40


class Files:
    """What one file asks of the disk. `root`: the directory of the project, above which nothing is looked for."""

    def __init__(self, root: str | None = None) -> None:
        self.root = None if root is None else os.path.abspath(root)
        self.relied_on: dict[str, str] = {}
        """Path, relative where that is possible -> a hash of the content, "+" for a file, "-" for none."""
        self._read = 0

    def find(self, path: str, module: str, level: int) -> str | None:
        """The file of `module`, imported by the file at `path` with `level` leading dots."""
        folder = os.path.dirname(os.path.abspath(path))
        parts = [part for part in module.split(".") if part]
        if level:
            for _ in range(level - 1):
                folder = os.path.dirname(folder)
            return self.within(folder, parts)
        own = folder
        for _ in range(_HIGHEST):
            if not self.is_file(os.path.join(own, "__init__.py")) or os.path.dirname(own) == own:
                break
            own = os.path.dirname(own)
        if parts[0] in sys.stdlib_module_names and not self.is_file(os.path.join(own, "os.py")):
            return None
        found = {self.within(each, parts) for each in (own, *self._up_to_root(own))} - {None}
        return found.pop() if len(found) == 1 else None

    def within(self, folder: str, parts: list[str]) -> str | None:
        """The file of the module `parts`, whose first one stands in `folder`."""
        base = os.path.join(folder, *parts)
        for candidate in (os.path.join(base, "__init__.py"), base + ".py" if parts else ""):
            if candidate and self.is_file(candidate):
                return candidate
        return None

    def is_file(self, path: str) -> bool:
        found = os.path.isfile(path)
        self.relied_on.setdefault(_named(path), "+" if found else "-")
        return found

    def read(self, path: str) -> bytes | None:
        """The content of a file, None where it cannot be had."""
        self._read += 1
        if self._read > MOST_FILES:
            return None
        data = _content(path)
        self.relied_on[_named(path)] = "-" if data is None else hashlib.sha256(data).hexdigest()
        return data

    def _up_to_root(self, folder: str) -> list[str]:
        if self.root is None or self.root not in _above(folder):
            return []
        above = _above(folder)
        return above[: above.index(self.root) + 1]


def unchanged(relied_on: dict[str, str]) -> bool:
    """Whether every file is still as it was."""
    for path, state in relied_on.items():
        if state in "+-":
            if os.path.isfile(path) != (state == "+"):
                return False
        else:
            data = _content(path)
            if data is None or hashlib.sha256(data).hexdigest() != state:
                return False
    return True


def _content(path: str) -> bytes | None:
    try:
        if os.path.getsize(path) > LARGEST:
            return None
        with open(path, "rb") as file:
            return file.read()
    except OSError:
        return None


def _above(folder: str) -> list[str]:
    """The directories above, the nearest first."""
    found: list[str] = []
    while os.path.dirname(folder) != folder:
        folder = os.path.dirname(folder)
        found.append(folder)
    return found


def _named(path: str) -> str:
    try:
        return os.path.relpath(path)
    except (ValueError, OSError):
        return path
