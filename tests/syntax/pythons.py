"""The other Python versions at hand: on PATH, and where pyenv keeps them. Tests skip what is absent."""

from __future__ import annotations

import os
import re
import shutil
import sys
from functools import lru_cache
from pathlib import Path

VERSIONS = [(3, 10), (3, 11), (3, 12), (3, 13)]


@lru_cache(maxsize=1)
def interpreters() -> dict[tuple[int, int], str]:
    """Version to the path of an interpreter, the running one included."""
    found = {sys.version_info[:2]: sys.executable}
    root = Path(os.environ.get("PYENV_ROOT") or os.path.expanduser("~/.pyenv")) / "versions"
    for folder in sorted(root.glob("3.*")):
        named = re.fullmatch(r"3\.(\d+)\.\d+", folder.name)
        program = folder / "bin" / "python"
        if named and program.exists():
            found.setdefault((3, int(named[1])), str(program))
    for version in VERSIONS:
        on_path = shutil.which(f"python{version[0]}.{version[1]}")
        if on_path and "shims" not in on_path:
            found.setdefault(version, on_path)
    return {version: path for version, path in found.items() if version in VERSIONS}
