"""`python -m tests.bench.sinks`: does each built-in sink do with a pattern what patlint says of it?

Installs the libraries into an environment in `--dir`, hands every probe to every one of them in the way of the sink
(`tests.bench.libraries`), and compares with `re` under the sink's mode and flags. Of a text that becomes a
part of a larger pattern only this is asked: what the part takes as a whole, the library takes.

    python -m tests.bench.sinks --dir ../sinks-env
"""

from __future__ import annotations

import argparse
import json
import re
import subprocess
import sys
import tempfile
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import TypeAlias

from patlint.source.sinks import Sink
from patlint.source.sinks_builtin import BUILTIN
from patlint.source.sinks_parts import stands_alone
from tests.bench.environment import environment_python, install
from tests.bench.libraries import key

PACKAGES = (
    "pytest", "pygments", "numpy", "django", "aiohttp", "werkzeug", "tornado", "pandas", "attrs", "marshmallow",
    "wtforms",
)  # fmt: skip
UNCHECKED = frozenset({"compileall.compile_dir", "compileall.compile_file", "django.conf.urls.url"})
"""The first two take no texts (tests/source/test_sinks.py has them); the third went with Django 4."""

PATTERNS = (
    "b",
    "a",
    "abc",
    "ab",
    "abc$",
    "^abc$",
    "^b",
    "B",
    "A",
    "b$",
    "a c",
    "a.c",
    "x|abc",
    "abc|x",
    "a|b",
)
TEXTS = ("abc", "ab", "b", "abcd", "xabc", "ac", "a c", "axc", "ABC")
TWO_LINES = ("abc\n", "a\nc", "x\nabc")
FLAGS = (0, re.IGNORECASE, re.DOTALL, re.MULTILINE)
SHOWN = 20
Probe: TypeAlias = tuple[str, str, str, int]


def expected(sink: Sink, pattern: str, text: str, flags: int) -> bool | None:
    """What the sink's row says of a text; None where it says nothing."""
    function = sink.function
    if sink.embedded and sink.kind != "attribute" and sink.name != "re.Scanner":
        if pattern.endswith("$"):
            function = sink.dollar
        elif not sink.ends_open:
            function = None
    given = flags or sink.flags if sink.kind == "states" else flags | sink.flags
    if sink.name == "string.Template" and not flags:
        given |= re.IGNORECASE
    if function is None:
        whole = re.fullmatch(pattern, text, given) is not None
        return True if (sink.part or not sink.ends_open) and whole else None
    mode = {"match": re.match, "fullmatch": re.fullmatch}.get(function, re.search)
    return mode(pattern, text, given) is not None


def probes(sinks: Iterable[Sink]) -> Iterator[tuple[Sink, Probe]]:
    """Every probe of every row that is judged; the first member is the adapter's key."""
    for sink in sinks:
        if sink.refused is not None or sink.name in UNCHECKED:
            continue
        name = key(sink.name, sink.kind, sink.argument[-1])
        by_path = sink.kind == "route" or sink.name.startswith("werkzeug")
        texts = tuple(text for text in TEXTS if " " not in text) if by_path else TEXTS + TWO_LINES
        if sink.name == "string.Template" and sink.part:
            texts = ("abc", "ab", "b")
        for pattern in PATTERNS:
            if sink.part and not stands_alone(pattern, sink.flags):
                continue  # counted as unresolved
            for text in texts:
                for flags in FLAGS if sink.flags_argument else (0,):
                    yield sink, (name, pattern, text, int(flags))


def compare(asked: list[tuple[Sink, Probe]], answers: list[object]) -> tuple[dict[str, int], list[str]]:
    """How many answers each key has, and what contradicts its row."""
    counts: dict[str, int] = {}
    wrong: list[str] = []
    for (sink, (name, pattern, text, flags)), answer in zip(asked, answers, strict=True):
        counts.setdefault(name, 0)
        wanted = expected(sink, pattern, text, flags)
        if answer is None or wanted is None:
            continue
        counts[name] += 1
        if answer != wanted:
            wrong.append(f"{name}: {pattern!r} on {text!r} with flags {flags}: {answer}, not {wanted}")
    return counts, wrong


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.sinks", description=main.__doc__)
    default = Path(tempfile.gettempdir()) / "patlint-sinks"
    parser.add_argument("--dir", type=Path, default=default, help="the environment (default: %(default)s)")
    parser.add_argument("--no-install", action="store_true", help="take the environment as it is")
    given = parser.parse_args()
    failed = [] if given.no_install else install(given.dir, PACKAGES)
    if failed:
        print("not installed:", *failed, file=sys.stderr)
    asked = list(probes(BUILTIN))
    libraries = Path(__file__).parent / "libraries.py"
    ran = subprocess.run(
        [str(environment_python(given.dir)), "-W", "ignore", str(libraries)],
        input=json.dumps([probe for _, probe in asked]),
        stdout=subprocess.PIPE,
        text=True,
        check=True,
    )
    counts, wrong = compare(asked, json.loads(ran.stdout))
    for name, count in counts.items():
        print(f"{count:5}  {name}" if count else f"    -  {name}: not asked")
    print(*wrong[:SHOWN], sep="\n")
    print(f"{len(counts)} rows, {sum(counts.values())} answers, {len(wrong)} against what is said")
    return 1 if wrong or not all(counts.values()) else 0


if __name__ == "__main__":
    sys.exit(main())
