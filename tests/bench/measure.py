"""One pass over files: what patlint finds, what it leaves open, and what each step costs.

`measure` reads each file, times `read_module` against `ast.parse` on the same bytes, and asks all rules about
each site. The time of a pattern is taken at the first site with the same pattern, flags and uses. All in this
process, one after the other; times are CPU seconds (`time.process_time`).
"""

from __future__ import annotations

import ast
import sys
import warnings
from collections import Counter
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from pathlib import Path
from time import process_time
from typing import TypeAlias

from patlint.config import OFF_BY_DEFAULT
from patlint.limits import DEFAULT_LIMITS
from patlint.outcome import site_flag_names
from patlint.placed import PlacedFinding, place_finding
from patlint.rules import check_site
from patlint.rules.registry import RULES
from patlint.source import SourceError, read_module
from patlint.source.sites import Site
from patlint.target import Target, running_target

Pattern: TypeAlias = tuple[str | bytes, int]


@dataclass(slots=True)
class Measured:
    """Everything that one pass gave; times are CPU seconds."""

    files: int = 0
    unreadable: list[str] = field(default_factory=list)
    sites: int = 0
    unresolved: Counter[str] = field(default_factory=Counter)
    sinks: Counter[str] = field(default_factory=Counter)
    """Patterns that other libraries take, by the library: not among `sites`."""
    sinks_unresolved: Counter[str] = field(default_factory=Counter)
    findings: list[PlacedFinding] = field(default_factory=list)
    patterns: set[Pattern] = field(default_factory=set)
    inexact: dict[Pattern, tuple[str, ...]] = field(default_factory=dict)
    undecided: dict[Pattern, tuple[str, ...]] = field(default_factory=dict)
    failures: list[str] = field(default_factory=list)
    times: list[tuple[float, str]] = field(default_factory=list)
    """Seconds of all rules together on one pattern, and where it stands."""
    parse_time: float = 0.0
    read_time: float = 0.0


def measure(
    paths: Iterable[Path], only: frozenset[str] = frozenset(), progress: Callable[[int], None] | None = None
) -> Measured:
    """Lint `paths` by the rules named in `only`; where it is empty, by those that are on by default."""
    rules = only or frozenset(rule.name for rule in RULES) - OFF_BY_DEFAULT
    target = running_target()
    measured = Measured()
    seen: set[object] = set()
    for path in paths:
        data = path.read_bytes()
        begin = process_time()
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                ast.parse(data)
            middle = process_time()
            module = read_module(data, str(path))
        except (SyntaxError, ValueError, RecursionError, SourceError) as error:
            measured.unreadable.append(f"{path}: {type(error).__name__}")
            continue
        measured.parse_time += middle - begin
        measured.read_time += process_time() - middle
        measured.files += 1
        for each in module.unresolved:
            counts = measured.sinks_unresolved if "." in each.function else measured.unresolved
            counts[each.reason] += 1
        for site in module.sites:
            _site(site, rules, target, measured, seen)
        if progress is not None:
            progress(measured.files)
    return measured


def _site(site: Site, rules: frozenset[str], target: Target, measured: Measured, seen: set[object]) -> None:
    if "." in site.function:
        measured.sinks[site.function.split(".")[0]] += 1
    else:
        measured.sites += 1
    where = f"{site.path}:{site.place.line}"
    begin = process_time()
    try:
        checked = check_site(site, target, DEFAULT_LIMITS, rules)
    except Exception as error:
        measured.failures.append(f"{where}: {type(error).__name__}: {error}")
        return
    spent = process_time() - begin
    pattern = (site.pattern, site.flags)
    measured.patterns.add(pattern)
    uses = frozenset((each.function, each.looks_at, each.positioned) for each in site.uses)
    key = (pattern, uses, site.uses_seen)
    if key not in seen:
        seen.add(key)
        measured.times.append((spent, where))
    if checked.inexact:
        measured.inexact[pattern] = tuple(checked.inexact)
    if checked.undecided:
        measured.undecided[pattern] = tuple(checked.undecided)
    if checked.findings:
        names = site_flag_names(site, target)
        for finding in checked.findings:
            measured.findings.append(place_finding(finding, site, finding.level, names))


def peak_memory() -> float | None:
    """The most memory that this process has held, in megabytes; None where the system does not tell."""
    try:
        import resource
    except ImportError:
        return None
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return peak / 2**20 if sys.platform == "darwin" else peak / 2**10
