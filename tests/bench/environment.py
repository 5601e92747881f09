"""The code that is measured: packages installed into an environment of their own, and the standard library.

`install` makes the environment; a package that cannot be installed is told and left out. `python_files` lists
the files of both, in one order. Test packages of the standard library are left out: they hold patterns that
are wrong on purpose.
"""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
from collections.abc import Iterable, Iterator
from pathlib import Path

# fmt: off
PACKAGES = (
    "pygments", "django", "sphinx", "docutils", "setuptools", "babel", "nltk", "markdown", "mistune",
    "sqlparse", "dateparser", "bleach", "tornado", "aiohttp", "urllib3", "jinja2", "werkzeug", "click", "pip",
    "packaging", "textile", "feedparser", "validators",
)
# fmt: on
LEFT_OUT = frozenset({"test", "tests", "idle_test", "site-packages", "dist-packages", "__pycache__"})


def environment_python(folder: Path) -> Path:
    """The interpreter of the virtual environment in `folder`."""
    return folder / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def install(folder: Path, packages: Iterable[str]) -> list[str]:
    """Install `packages` into a virtual environment in `folder`, made if absent; returns those that failed.

    All at once first; if that fails, one by one. Raises CalledProcessError where no environment can be made.
    """
    python = environment_python(folder)
    if not python.exists():
        subprocess.run([sys.executable, "-m", "venv", str(folder)], check=True)
    wanted = list(packages)
    if _pip(python, wanted):
        return []
    return [each for each in wanted if not _pip(python, [each])]


def _pip(python: Path, packages: list[str]) -> bool:
    call = [str(python), "-m", "pip", "install", "--quiet", "--disable-pip-version-check", *packages]
    return subprocess.run(call, stderr=subprocess.DEVNULL).returncode == 0


def python_files(folder: Path) -> Iterator[Path]:
    """The standard library of the running Python, then the packages in the environment `folder`."""
    yield from _below(Path(sysconfig.get_paths()["stdlib"]), LEFT_OUT)
    for packages in sorted({*folder.glob("lib/python*/site-packages"), *folder.glob("Lib/site-packages")}):
        yield from _below(packages, frozenset({"__pycache__"}))


def _below(top: Path, left_out: frozenset[str]) -> Iterator[Path]:
    for base, folders, names in os.walk(top):
        folders[:] = sorted(each for each in folders if each not in left_out)
        yield from (Path(base, name) for name in sorted(names) if name.endswith(".py"))
