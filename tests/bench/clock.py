"""A process that times the real `re`: one JSON object in, one out. Imports nothing of patlint.

With "texts": the time of each of them. Without: the times of prefix + pump * n + suffix (with "more" pumps between)
at the "sizes" given, or at such as suit "growth", from a run of "least" seconds on. Times are CPU seconds; "cpu" is
the limit of the whole process.
"""

from __future__ import annotations

import json
import re
import sys
import warnings
from collections import deque
from collections.abc import Callable
from time import perf_counter, process_time
from typing import Any

MEASURED = 0.08
"""Seconds of each measurement."""
RUNS = 3


def _decoded(value: Any) -> Any:
    if isinstance(value, dict) and set(value) == {"bytes"}:
        return value["bytes"].encode("latin-1")
    return value


def runner(pattern: str | bytes, flags: int, manner: str) -> Callable[[Any], object]:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        compiled = re.compile(pattern, flags)
    if manner == "scan":
        return lambda text: deque(compiled.finditer(text), maxlen=0)
    found: Callable[[Any], object] = getattr(compiled, manner)
    return found


def seconds(
    run: Callable[[Any], object], text: str | bytes, runs: int = RUNS, measured: float = MEASURED
) -> float:
    """CPU seconds of one run, the middle of several; a short one is repeated until it can be measured.

    Some systems count CPU time in ticks of 4 ms, so each measurement takes some of them.
    """
    repeat = 1
    while True:
        begin = process_time()
        for _ in range(repeat):
            run(text)
        spent = process_time() - begin
        if spent > measured or repeat > 1 << 16:
            break
        repeat = max(2 * repeat, min(int(repeat * 1.2 * measured / max(spent, 4e-3)), 16 * repeat))
    taken = [spent / repeat]
    for _ in range(runs - 1 if spent < 0.5 else 0):
        begin = process_time()
        for _ in range(repeat):
            run(text)
        taken.append((process_time() - begin) / repeat)
    return sorted(taken)[len(taken) // 2]


def _times(request: dict[str, Any]) -> dict[str, Any]:
    """Times of a text at sizes that suit its growth: [[n, seconds], …]."""
    run = runner(_decoded(request["pattern"]), request["flags"], request["manner"])
    prefix, pump, suffix = (_decoded(request[key]) for key in ("prefix", "pump", "suffix"))
    more = [(_decoded(between), _decoded(each)) for between, each in request.get("more", ())]

    def text_at(n: int) -> Any:
        text = prefix + pump * n
        for between, each in more:
            text += between + each * n
        return text + suffix

    def time_at(n: int, runs: int = RUNS) -> float:
        return seconds(run, text_at(n), runs, request.get("measured", MEASURED))

    def roughly(n: int) -> float:
        text = text_at(n)
        begin = perf_counter()
        run(text)
        return perf_counter() - begin

    growth = request["growth"]
    rows: list[list[float]] = []
    if "sizes" in request:
        rows = [[n, time_at(n, request["runs"])] for n in request["sizes"]]
    elif growth == "exponential":
        n = 1
        while roughly(n) < request["least"] and n < 2_000:
            n += 1 if n < 60 else n // 8
        last = 0.0
        while len(rows) < 13 and last < 0.8:
            last = time_at(n)
            rows.append([n, last])
            n += 1 if n < 60 else n // 16
    else:
        n = 16 if growth < 4 else 4
        while roughly(n) < request["least"] and n < (1 << 22 if growth else 1 << 18):
            n *= 2
        factor = 2.0 if growth < 4 else 1.5
        for _ in range(3):
            rows.append([n, time_at(n)])
            n = int(n * factor)
    return {"times": rows}


def _single(request: dict[str, Any]) -> dict[str, Any]:
    """The time of each of several texts: one run each."""
    run = runner(_decoded(request["pattern"]), request["flags"], request["manner"])
    return {"times": [seconds(run, _decoded(text), 1) for text in request["texts"]]}


def main() -> int:
    request = json.loads(sys.stdin.read())
    try:
        import resource

        resource.setrlimit(resource.RLIMIT_CPU, (request["cpu"], request["cpu"] + 1))
    except ImportError:
        pass
    answer = _single(request) if "texts" in request else _times(request)
    json.dump(answer, sys.stdout)
    return 0


if __name__ == "__main__":
    sys.exit(main())
