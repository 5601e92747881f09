"""The patterns of the bench with every manner in which they are used, and the real `re` under the clock.

`asked` gives each (pattern, flags, manner) once; `in_process` runs a request in a process of its own, with a
limit on its CPU time, since `re` can neither be stopped nor trusted to come back. The process is `clock`.
"""

from __future__ import annotations

import json
import subprocess
import sys
import warnings
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

from patlint.rules.subject import manner_of
from patlint.source import SourceError, read_module
from patlint.source.sites import Site

CPU_SECONDS = 60


def sites_of(paths: Iterable[Path]) -> Iterator[Site]:
    for path in paths:
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                module = read_module(path.read_bytes(), str(path))
        except (SyntaxError, ValueError, RecursionError, SourceError):
            continue
        yield from module.sites


def asked(sites: Iterable[Site]) -> dict[tuple[str | bytes, int, str], Site]:
    """Each pattern with its flags in each manner that some site uses it in; `match` where no use is seen."""
    found: dict[tuple[str | bytes, int, str], Site] = {}
    for site in sites:
        for manner in {manner_of(use) for use in site.uses} or {"match"}:
            found.setdefault((site.pattern, site.flags, manner), site)
    return found


def in_process(
    request: dict[str, Any], cpu_seconds: int = CPU_SECONDS, python: str = sys.executable
) -> dict[str, Any]:
    """The answer to a request; {"stopped": True} where the process did not live to give it."""
    request = {"cpu": cpu_seconds, **request}
    done = subprocess.run(
        [python, str(Path(__file__).with_name("clock.py"))],
        input=json.dumps(request, default=_encode),
        capture_output=True,
        text=True,
    )
    if done.returncode:
        return {"stopped": True, "error": done.stderr[-300:]}
    answer: dict[str, Any] = json.loads(done.stdout)
    return answer


def _encode(value: object) -> object:
    assert isinstance(value, bytes)
    return {"bytes": value.decode("latin-1")}
