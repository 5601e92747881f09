"""The cache: what linting a file gave, kept beside the configuration in `.patlint-cache`.

An entry is one file per linted path, named by the path's hash; its lines are the key it was made under, the
outcome, and a hash of that. The key is a hash of the file's content and path and of everything else that
decides the outcome: patlint's own source files (sizes and times), the Python that runs it, the settings, the
working directory (paths are told and globs asked from there). What
other files had a part in it (constants that are imported) stands in the outcome, with hashes of their content.
An entry that is missing, of another key, damaged, or made beside other files is as good as none. A cache that
cannot be written is not an error. The directory ignores itself in git.
"""

from __future__ import annotations

import contextlib
import hashlib
import os
import sys
import tempfile
from pathlib import Path
from typing import Final

from patlint.config import Settings
from patlint.outcome import Outcome, from_values, to_values
from patlint.placed import read, write

FOLDER: Final = ".patlint-cache"


def fingerprint(settings: Settings) -> str:
    """Everything but the file itself that an outcome depends on, as one text."""
    package = Path(__file__).parent
    sources = sorted(package.rglob("*.py"))
    parts = [sys.version, os.getcwd(), repr(_plain(settings))]
    for source in sources:
        state = source.stat()
        parts.append(f"{source.relative_to(package)}:{state.st_size}:{state.st_mtime_ns}")
    return hashlib.sha256("\n".join(parts).encode("utf-8", "surrogatepass")).hexdigest()


def key_of(data: bytes, path: str, made_by: str) -> str:
    """The key of a file with content `data` under the fingerprint `made_by`."""
    digest = hashlib.sha256(made_by.encode())
    digest.update(path.encode("utf-8", "surrogateescape") + b"\0")
    digest.update(data)
    return digest.hexdigest()


def folder_of(settings: Settings) -> str | None:
    """Where the cache stands; None outside of a project."""
    return None if settings.root is None else os.path.join(os.path.abspath(settings.root), FOLDER)


def fetch(folder: str, path: str, key: str) -> Outcome | None:
    """The outcome kept for `path` under `key`, if there is one and it can be read."""
    try:
        with open(_entry(folder, path), encoding="ascii") as file:
            if file.readline().rstrip("\n") != key:
                return None
            body, checksum = file.readline().rstrip("\n"), file.readline().rstrip("\n")
        if hashlib.sha256(body.encode("ascii")).hexdigest() != checksum:
            return None
        outcome = from_values(read(body))
        return outcome if not outcome.relied_on or _stands(outcome) else None
    except (OSError, ValueError, TypeError, KeyError, SyntaxError, MemoryError, RecursionError):
        return None


def store(folder: str, path: str, key: str, outcome: Outcome) -> None:
    """Keep `outcome`; nothing happens where the folder cannot be written."""
    body = write(to_values(outcome))
    checksum = hashlib.sha256(body.encode("ascii")).hexdigest()
    with contextlib.suppress(OSError):
        _prepare(folder)
        handle, name = tempfile.mkstemp(dir=folder, prefix="new-")
        try:
            with open(handle, "w", encoding="ascii") as file:
                file.write(f"{key}\n{body}\n{checksum}\n")
            os.replace(name, _entry(folder, path))
        except BaseException:
            with contextlib.suppress(OSError):
                os.unlink(name)
            raise


def _stands(outcome: Outcome) -> bool:
    """Whether the other files that had a part in `outcome` are as they were."""
    from patlint.source.disk import unchanged

    return unchanged(dict(outcome.relied_on))


def _prepare(folder: str) -> None:
    ignore = os.path.join(folder, ".gitignore")
    if not os.path.exists(ignore):
        os.makedirs(folder, exist_ok=True)
        with open(ignore, "w", encoding="ascii") as file:
            file.write("*\n")


def _entry(folder: str, path: str) -> str:
    return os.path.join(folder, hashlib.sha256(path.encode("utf-8", "surrogateescape")).hexdigest()[:32])


def _plain(settings: Settings) -> tuple[object, ...]:
    """Settings in a form whose text is the same in every process (frozensets print in any order)."""
    return (
        settings.target,
        settings.rules,
        settings.limits,
        settings.saving,
        sorted(settings.only),
        sorted(settings.skip),
        settings.levels,
        [(each.glob, each.levels, sorted(each.skip)) for each in settings.per_path],
        None if settings.sinks is None else settings.sinks.sinks,
    )
