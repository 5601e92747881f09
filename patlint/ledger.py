r"""The ledger: a file of findings that are known, so that they are not told and do not fail a run.

The file has one finding a line, as `patlint.identity.content` writes it, sorted, behind a line that tells the
version. Equal findings stand as often as there are such. Paths are relative to the ledger's directory:

    {"patlint-ledger": 1}
    {"path": "src/quay.py", "rule": "nullable", "pattern": "\\s*;?"}

`judge` compares a run with it. A finding is **known** if its line is there, once for each. What is left on
both sides is compared without the path: a finding that moved to another file is known only if it is gone
from the old one, so moving code is no news and copying it is. An entry that matched nothing is **gone**, but
only where the run could tell: its file was read and its rule was on, or its file is no more and the run walked
the directory where it was. A run over a few files says nothing about the others.

`entered` and `pruned` are the lines of a ledger after the run: with the new findings, or only without the gone
ones. `LedgerError` is one line about a file that cannot be read, written or trusted.
"""

from __future__ import annotations

import contextlib
import json
import os
from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Any, Final

from patlint.identity import VERSION, content
from patlint.outcome import Outcome
from patlint.whole import write_whole

HEAD: Final = "patlint-ledger"
_TEXT_KEYS: Final = ("path", "rule", "pattern", "message")


class LedgerError(Exception):
    """The ledger cannot be used; the message is one line that names the file."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of a ledger. `line` decides; `elsewhere` is the same without the path."""

    line: str
    path: str
    rule: str
    pattern: str | bytes | None
    elsewhere: str


@dataclass(frozen=True, slots=True)
class Ledger:
    """The entries of the file at `path`, in its order."""

    path: str
    entries: tuple[Entry, ...] = ()


@dataclass(frozen=True, slots=True)
class Judged:
    """A run beside a ledger. `outcomes` have only the findings that are `new`.

    `known` and `new` are lines at the places where the findings are now, `gone` are entries without a
    finding, `unjudged` those that the run says nothing about.
    """

    outcomes: tuple[Outcome, ...]
    known: tuple[str, ...]
    new: tuple[str, ...]
    gone: tuple[Entry, ...]
    unjudged: tuple[Entry, ...]


def load(path: str) -> Ledger:
    """The ledger at `path`. Raises LedgerError."""
    try:
        with open(path, "rb") as file:
            data = file.read()
    except OSError as error:
        raise LedgerError(f"{path}: cannot be read: {error.strerror or error}") from None
    lines = data.decode("ascii", "replace").splitlines()
    _check_head(path, lines[0] if lines else "")
    entries = []
    for number, line in enumerate(lines[1:], 2):
        if not line.strip():
            continue
        entry = _entry(line)
        if entry is None:
            merge = line.startswith(("<<<<<<<", "=======", ">>>>>>>"))
            what = "a merge left a conflict here" if merge else "not an entry of a ledger"
            raise LedgerError(f"{path}:{number}: {what}")
        entries.append(entry)
    return Ledger(path, tuple(entries))


def save(path: str, lines: Iterable[str]) -> None:
    """Write a ledger with these entries, as a whole or not at all. Raises LedgerError."""
    text = "".join(f"{line}\n" for line in (json.dumps({HEAD: VERSION}), *sorted(lines)))
    try:
        write_whole(path, text)
    except OSError as error:
        raise LedgerError(f"{path}: cannot be written: {error.strerror or error}") from None


def judge(
    ledger: Ledger, outcomes: Sequence[Outcome], paths: Sequence[str], is_on: Callable[[str, str], bool]
) -> Judged:
    """The run over `paths` that gave `outcomes`, beside `ledger`.

    `is_on(path, rule)`: whether the rule was asked in that file.
    """
    base = os.path.dirname(os.path.abspath(ledger.path))
    left = Counter(entry.line for entry in ledger.entries)
    rows = [
        [(each, content(each, _relative(each.path, base))) for each in outcome.findings]
        for outcome in outcomes
    ]
    at_home = [[_take(left, line) for _, line in row] for row in rows]
    unmatched = [entry for entry in ledger.entries if _take(left, entry.line)]
    read = {_relative(each.path, base): each for each in outcomes}
    free = [entry for entry in unmatched if _is_free(entry, read, base, is_on)]

    movable = Counter(entry.elsewhere for entry in free)
    kept: list[Outcome] = []
    known: list[str] = []
    new: list[str] = []
    for outcome, row, found in zip(outcomes, rows, at_home, strict=True):
        shown = []
        for (finding, line), is_known in zip(row, found, strict=True):
            if is_known or _take(movable, content(finding, "")):
                known.append(line)
            else:
                new.append(line)
                shown.append(finding)
        kept.append(outcome if len(shown) == len(row) else replace(outcome, findings=tuple(shown)))

    walked = [os.path.abspath(path) for path in paths]
    lost = [entry for entry in free if _take(movable, entry.elsewhere)]
    gone = [
        entry
        for entry in lost
        if entry.path in read or any(_is_within(_full(entry, base), top) for top in walked)
    ]
    apart = {id(entry) for entry in free} - {id(entry) for entry in lost} | {id(entry) for entry in gone}
    unjudged = tuple(entry for entry in unmatched if id(entry) not in apart)
    return Judged(tuple(kept), tuple(known), tuple(new), tuple(gone), unjudged)


def _take(counts: Counter[str], line: str) -> bool:
    """Whether one is left of `line`, which is then used up."""
    if counts[line] <= 0:
        return False
    counts[line] -= 1
    return True


def _is_free(entry: Entry, read: dict[str, Outcome], base: str, is_on: Callable[[str, str], bool]) -> bool:
    """Whether it is certain that no finding stands where the entry says."""
    outcome = read.get(entry.path)
    if outcome is None:
        return not os.path.lexists(_full(entry, base))
    return outcome.linted and not outcome.problems and is_on(outcome.path, entry.rule)


def entered(judged: Judged) -> list[str]:
    """The lines of a ledger that knows everything which was found."""
    return [*judged.known, *judged.new, *(entry.line for entry in judged.unjudged)]


def pruned(judged: Judged) -> list[str]:
    """The lines of the ledger without what is gone; what moved is entered at its new place."""
    return [*judged.known, *(entry.line for entry in judged.unjudged)]


def _relative(path: str, base: str) -> str:
    full = os.path.abspath(path)
    with contextlib.suppress(ValueError):  # another drive
        full = os.path.relpath(full, base)
    return full.replace(os.sep, "/")


def _full(entry: Entry, base: str) -> str:
    return os.path.normpath(os.path.join(base, entry.path))


def _is_within(full: str, top: str) -> bool:
    return full == top or full.startswith(os.path.join(top, ""))


def _check_head(path: str, line: str) -> None:
    try:
        head = json.loads(line)
    except (ValueError, RecursionError):
        head = None
    if not isinstance(head, dict) or list(head) != [HEAD]:
        raise LedgerError(f"{path}: not a ledger: its first line is not {json.dumps({HEAD: VERSION})}")
    if head[HEAD] != VERSION:
        raise LedgerError(f"{path}: a ledger of version {head[HEAD]!r}; this patlint knows {VERSION}")


def _entry(line: str) -> Entry | None:
    """An entry, None where the line is something else. Spaces and the order of keys are as one likes."""
    try:
        said: Any = json.loads(line)
    except (ValueError, RecursionError):
        return None
    if not isinstance(said, dict):
        return None
    texts = {key for key in _TEXT_KEYS if isinstance(said.get(key), str)}
    rest = set(said) - texts
    if texts not in ({"path", "rule", "pattern"}, {"path", "rule", "message"}):
        return None
    if "message" in texts and rest or rest - {"bytes", "flags"} or said.get("bytes", True) is not True:
        return None
    flags = said.get("flags", [])
    if not isinstance(flags, list) or not all(isinstance(flag, str) for flag in flags):
        return None
    order = [key for key in (*_TEXT_KEYS, "bytes", "flags") if key in said]
    ordered = {key: said[key] for key in order}
    text: str | None = said.get("pattern")
    pattern = text.encode("latin-1", "replace") if text is not None and "bytes" in said else text
    elsewhere = json.dumps(ordered | {"path": ""})
    return Entry(json.dumps(ordered), said["path"], said["rule"], pattern, elsewhere)
