"""Files to findings: many files, several processes, a cache, one order.

`lint_paths` is a whole run; its `RunResult` holds the outcomes in the order in which the files were found,
which does not depend on the number of processes or on the cache. `lint_source` lints a text that is at hand.

>>> [each.rule for each in lint_source("import re\\nre.compile('(')\\n")]
['invalid-pattern']
"""

from __future__ import annotations

import contextlib
import os
import signal
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Final

from patlint.cache import fetch, fingerprint, folder_of, key_of, store
from patlint.config import Settings
from patlint.files import STDIN, find_files, read_file, read_source
from patlint.outcome import Outcome, failed, internal, lint_bytes
from patlint.placed import PlacedFinding
from patlint.target import Target, running_target

if TYPE_CHECKING:
    from patlint.ledger import Entry

FILES_PER_PROCESS: Final = 12
"""A second process is started for every so many files that the cache does not know: starting one costs about
as much as linting ten files."""

Progress = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class RunResult:
    """The outcomes of a run. `problems` are lines for standard error, those of the outcomes included.

    `skipped` counts files that were found but not linted: excluded, not readable, not Python. Beside a
    ledger, `known` counts the findings that are in it and not here, and `gone` are its entries without one.
    """

    outcomes: tuple[Outcome, ...]
    problems: tuple[str, ...]
    skipped: int
    ledger: str | None = None
    known: int = 0
    gone: tuple[Entry, ...] = ()

    @property
    def findings(self) -> tuple[PlacedFinding, ...]:
        return tuple(finding for each in self.outcomes for finding in each.findings)

    @property
    def files(self) -> int:
        return sum(each.linted for each in self.outcomes)


def lint_source(
    text: str | bytes, path: str = "<text>", target: Target | None = None, settings: Settings | None = None
) -> tuple[PlacedFinding, ...]:
    """The findings in the Python source `text`, in the order of their places.

    `path` is the name they are reported under. Without `settings` all rules are on that are on by default,
    for `target` (default: the running Python). Raises `patlint.source.SourceError` where
    `text` is not Python.
    """
    from patlint.outcome import lint_module
    from patlint.rules.registry import NAMES
    from patlint.source import read_module

    if settings is None:
        settings = Settings(target or running_target(), NAMES)
    elif target is not None:
        settings = replace(settings, target=target)
    return lint_module(read_module(text, path, settings.sinks), settings).findings


def lint_paths(
    paths: Iterable[str],
    settings: Settings,
    *,
    jobs: int | None = None,
    use_cache: bool = True,
    stdin_name: str | None = None,
    progress: Progress | None = None,
) -> RunResult:
    """Lint the files at `paths`. `jobs` None: as many processes as pay; 1: this one alone."""
    listed = find_files(paths, settings, stdin_name)
    folder = folder_of(settings) if use_cache else None
    made_by = fingerprint(settings) if folder is not None else ""
    outcomes: dict[str, Outcome] = {}
    missing: list[str] = []
    for path in listed.paths:
        if path == STDIN or path.startswith(("/dev/", "/proc/")):  # open in this process alone
            name, data = read_source(path, stdin_name)
            outcomes[path] = failed(name, data) if isinstance(data, str) else lint_bytes(data, name, settings)
        elif folder is not None and (known := _known(path, folder, made_by)) is not None:
            outcomes[path] = known
        else:
            missing.append(path)
    total = len(listed.paths)
    job = _Job(settings, folder, made_by)
    for path, outcome in _lint_missing(missing, job, _processes(jobs, len(missing))):
        outcomes[path] = outcome
        if progress is not None:
            progress(len(outcomes), total)
    ordered = tuple(outcomes[path] for path in listed.paths)
    problems = listed.problems + tuple(line for each in ordered for line in each.problems)
    unread = sum(not each.linted for each in ordered)
    return RunResult(ordered, problems, listed.excluded + unread + len(listed.problems))


@dataclass(frozen=True, slots=True)
class _Job:
    """What a worker needs beside the paths."""

    settings: Settings
    folder: str | None
    made_by: str


def _known(path: str, folder: str, made_by: str) -> Outcome | None:
    if not os.path.isfile(path):
        return None  # a pipe can be read only once
    data = read_file(path)
    return None if isinstance(data, str) else fetch(folder, path, key_of(data, path, made_by))


def _lint_file(path: str, job: _Job) -> Outcome:
    data = read_file(path)
    if isinstance(data, str):
        return failed(path, data)
    outcome = lint_bytes(data, path, job.settings)
    if job.folder is not None and outcome.linted and not outcome.problems:
        store(job.folder, path, key_of(data, path, job.made_by), outcome)
    return outcome


def _lint_several(paths: list[str], job: _Job) -> list[Outcome]:
    return [_lint_file(path, job) for path in paths]


def _processes(jobs: int | None, files: int) -> int:
    if jobs is not None:
        return max(1, min(jobs, files))
    return max(1, min(_cores(), files // FILES_PER_PROCESS))


def _cores() -> int:
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def _lint_missing(paths: list[str], job: _Job, processes: int) -> Iterator[tuple[str, Outcome]]:
    if processes == 1:
        for path in paths:
            yield path, _lint_file(path, job)
        return
    import multiprocessing
    from concurrent.futures import ProcessPoolExecutor, as_completed

    size = max(1, min(32, len(paths) // (processes * 4)))
    batches = [paths[at : at + size] for at in range(0, len(paths), size)]
    pool = ProcessPoolExecutor(
        processes, mp_context=multiprocessing.get_context("spawn"), initializer=_ignore_interrupt
    )
    try:
        with _held_interrupt():  # a process begins with it, and would say so before `_ignore_interrupt`
            running = {pool.submit(_lint_several, batch, job): batch for batch in batches}
        for future in as_completed(running):
            batch = running[future]
            try:
                yield from zip(batch, future.result(), strict=True)
            except Exception as error:  # a worker died: too little memory, or ended from outside
                for path in batch:
                    yield path, failed(path, internal(error))
    except BaseException:
        for each in multiprocessing.active_children():
            each.terminate()
        pool.shutdown(wait=False, cancel_futures=True)
        raise
    pool.shutdown()


@contextlib.contextmanager
def _held_interrupt() -> Iterator[None]:
    """Ctrl-C comes after the block, and never to processes that are started in it (not on Windows)."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _ignore_interrupt() -> None:
    """Ctrl-C reaches all processes of a terminal; the first one ends the others."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
