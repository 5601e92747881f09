"""What was measured, as text for reading and as an object for comparing two runs."""

from __future__ import annotations

import random
from collections import Counter, defaultdict
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

from patlint.placed import PlacedFinding
from patlint.report.show import witness_expression
from tests.bench.measure import Measured, peak_memory

SLOWEST = 10
CONTEXT = 6
"""Source lines shown around a finding."""


def summary(measured: Measured) -> dict[str, Any]:
    """The numbers of a run; times in milliseconds of CPU, memory in megabytes."""
    calls = measured.sites + measured.unresolved.total()
    unique = len(measured.patterns)
    times = sorted(each[0] for each in measured.times)
    return {
        "files": measured.files,
        "unreadable": measured.unreadable,
        "calls": calls,
        "resolved": measured.sites,
        "resolved_share": _share(measured.sites, calls),
        "unresolved": dict(measured.unresolved.most_common()),
        "sinks": dict(measured.sinks.most_common()),
        "sinks_unresolved": dict(measured.sinks_unresolved.most_common()),
        "findings": {
            rule: dict(Counter(each.level for each in measured.findings if each.rule == rule))
            for rule in sorted({each.rule for each in measured.findings})
        },
        "unique_patterns": unique,
        "exact_share": _share(unique - len(measured.inexact), unique),
        "inexact": _reasons(measured.inexact.values()),
        "undecided_patterns": len(measured.undecided),
        "undecided": _reasons(measured.undecided.values()),
        "failures": measured.failures,
        "rules_ms": {
            "patterns": len(times),
            "total": 1000 * sum(times),
            "median": 1000 * _rank(times, 0.5),
            "99th percentile": 1000 * _rank(times, 0.99),
            "max": 1000 * _rank(times, 1.0),
        },
        "slowest": [
            {"ms": 1000 * spent, "where": where}
            for spent, where in sorted(measured.times, reverse=True)[:SLOWEST]
        ],
        "ast_parse_ms": 1000 * measured.parse_time,
        "read_module_ms": 1000 * measured.read_time,
        "read_module_to_ast_parse": measured.read_time / measured.parse_time if measured.parse_time else None,
        "peak_memory_mb": peak_memory(),
    }


def lines(numbers: dict[str, Any]) -> Iterator[str]:
    """`numbers`, as `summary` gives them, one line a number."""
    yield f"files            {numbers['files']}, unreadable {len(numbers['unreadable'])}"
    yield from (f"    {each}" for each in numbers["unreadable"])
    share = f"({numbers['resolved_share']:.1%})"
    yield f"calls            {numbers['calls']}, resolved {numbers['resolved']} {share}"
    yield from _counts(numbers["unresolved"])
    taken, open_ = numbers["sinks"], numbers["sinks_unresolved"]
    yield f"other libraries  {sum(taken.values())} patterns taken, {sum(open_.values())} unresolved"
    yield from _counts(taken)
    yield from _counts(open_)
    yield f"unique patterns  {numbers['unique_patterns']}, exact {numbers['exact_share']:.2%}"
    yield from _counts(numbers["inexact"])
    yield f"undecided        {numbers['undecided_patterns']} patterns"
    yield from _counts(numbers["undecided"])
    yield f"failures         {len(numbers['failures'])}"
    yield from (f"    {each}" for each in numbers["failures"])
    yield f"findings         {sum(sum(each.values()) for each in numbers['findings'].values())}"
    for rule, levels in numbers["findings"].items():
        yield f"{sum(levels.values()):7}  {rule} ({', '.join(f'{level} {n}' for level, n in levels.items())})"
    rules = numbers["rules_ms"]
    yield (
        f"rules, ms        median {rules['median']:.2f}, 99th percentile {rules['99th percentile']:.1f}, "
        f"max {rules['max']:.0f}, total {rules['total']:.0f} for {rules['patterns']} patterns with their uses"
    )
    yield from (f"{each['ms']:9.0f} ms  {each['where']}" for each in numbers["slowest"])
    ratio = numbers["read_module_to_ast_parse"]
    yield (
        f"source, ms       read_module {numbers['read_module_ms']:.0f}, "
        f"ast.parse {numbers['ast_parse_ms']:.0f}" + (f", ratio {ratio:.2f}" if ratio is not None else "")
    )
    memory = numbers["peak_memory_mb"]
    yield "peak memory      " + (f"{memory:.0f} MB" if memory is not None else "not known")


def sample(findings: list[PlacedFinding], size: int, seed: int) -> list[PlacedFinding]:
    """`size` findings, spread evenly over the rules; the same for the same seed and findings."""
    by_rule: defaultdict[str, list[PlacedFinding]] = defaultdict(list)
    for each in findings:
        by_rule[each.rule].append(each)
    chance = random.Random(seed)
    for rule in sorted(by_rule):
        chance.shuffle(by_rule[rule])
    out: list[PlacedFinding] = []
    while len(out) < size and any(by_rule.values()):
        out += [by_rule[rule].pop() for rule in sorted(by_rule) if by_rule[rule]]
    return sorted(out[:size], key=lambda each: (each.rule, each.path, each.line))


def for_reading(finding: PlacedFinding) -> Iterator[str]:
    """A finding with the source around it."""
    yield f"== {finding.rule} ({finding.level}) {finding.path}:{finding.line}:{finding.column}"
    yield f"   {finding.message}"
    yield f"   pattern {finding.pattern!r} flags {' '.join(finding.flags) or 'none'} mode {finding.mode}"
    if finding.witness is not None:
        yield f"   witness {witness_expression(finding.witness)}"
    for name in ("evidence", "proof", "way_out"):
        if getattr(finding, name):
            yield f"   {name}: {getattr(finding, name)}"
    if finding.suggestion is not None:
        yield f"   suggestion {finding.suggestion.pattern!r} keeps {finding.suggestion.keeps}"
    for related in finding.related:
        yield f"   related {related.path}:{related.line}:{related.column}: {related.message}"
    source = Path(finding.path).read_bytes().decode("utf-8", "replace").splitlines()
    first = max(0, finding.line - CONTEXT)
    for number, line in enumerate(source[first : finding.end_line + CONTEXT - 1], first + 1):
        mark = ">" if finding.line <= number <= finding.end_line else " "
        yield f"   {mark}{number:5} {line[:160]}"


def _counts(counts: dict[str, int]) -> Iterator[str]:
    return (f"{count:7}  {reason}" for reason, count in counts.items())


def _reasons(several: Iterable[tuple[str, ...]]) -> dict[str, int]:
    return dict(Counter(reason for each in several for reason in set(each)).most_common())


def _share(part: int, whole: int) -> float:
    return part / whole if whole else 1.0


def _rank(times: list[float], share: float) -> float:
    """The time at `share` of the sorted list, nearest rank; 0 of an empty list."""
    return times[min(len(times) - 1, int(share * len(times)))] if times else 0.0
