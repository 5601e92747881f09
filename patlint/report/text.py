"""The report for people: one block a finding, one summary line at the end.

    shop.py:4:20: error: exponential-ambiguity: matching time can multiply …
      pattern  ^(a+)+$
                =====
      text     'a' * 30 + '!'
      advice   ...

The first line has the form `path:line:column: level: rule: message`, which editors read (GNU coding
standards, "Formatting Error Messages"). Below stand the pattern with the part in question (`=`) and others it
is about (`-`; a place between two characters is `|`), the evidence, a text that can be pasted into Python,
what could stand instead, places elsewhere, advice. Of a long pattern the neighbourhood of the part is shown,
of a pattern over several lines (VERBOSE) the lines concerned. Of findings that are marked as brief one line
is told for each rule and file, with the lines of the others, so that they do not bury the rest.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from patlint.placed import PlacedFinding
from patlint.report.json import summary
from patlint.report.show import (
    cells,
    open_question,
    pattern_expression,
    printable,
    width,
    witness_expression,
)
from patlint.rules.finding import LEVELS

if TYPE_CHECKING:
    from patlint.outcome import Outcome
    from patlint.run import RunResult

LABEL: Final = 11
"""Columns before the text of a row: two blanks, a label, at least one blank."""
MOST_LINES: Final = 3
"""Lines that are shown of a pattern over several lines."""
MOST_ALIKE: Final = 10
"""Lines that are named of findings that are told in one."""
CUT: Final = "..."
_COLOURS: Final = {"error": "1;31", "warning": "1;33", "note": "1;34", "label": "2"}
_KEEPS: Final = {
    "language": "takes the same texts",
    "spans": "takes the same texts with the same spans",
    "groups": "takes the same texts with the same spans and groups",
}


@dataclass(frozen=True, slots=True)
class Style:
    """`columns` of the output, its `encoding`, and whether it shows colours."""

    columns: int = 80
    encoding: str = "utf-8"
    colour: bool = False

    def paint(self, text: str, kind: str) -> str:
        """`text` in the colour of a level or a label."""
        return f"\x1b[{_COLOURS[kind]}m{text}\x1b[0m" if self.colour and text else text


def lint_report(result: RunResult, style: Style, verbose: bool = False) -> Iterator[str]:
    """The report of a run as lines without line feeds."""
    short = False
    others = {} if verbose else _alike(result.findings)
    for index, finding in enumerate(result.findings):
        if finding.brief and not verbose and index not in others:
            continue  # told with the first of its rule in the file
        if short and index not in others:
            yield ""
        short = index in others
        if short:
            yield _first_line(finding, style) + _likewise(others[index])
        else:
            yield from finding_block(finding, style)
            yield ""
    if short:
        yield ""
    if verbose:
        remarks = [line for each in result.outcomes for line in _remarks(each)]
        if remarks:
            yield from remarks
            yield ""
    if result.gone:
        for entry in result.gone if verbose else ():
            shown = "" if entry.pattern is None else f": {pattern_expression(entry.pattern)}"
            yield f"{printable(entry.path)}: gone: {entry.rule}{shown}"
        one = len(result.gone) == 1
        many = "1 entry is" if one else f"{len(result.gone)} entries are"
        name = printable(result.ledger or "")
        yield f"{name}: {many} gone from the code; `patlint ledger prune` takes {'it' if one else 'them'} out"
        yield ""
    yield summary_line(result)


def _alike(findings: Sequence[PlacedFinding]) -> dict[int, list[int]]:
    """Findings of which one line is enough: the first of its rule in each file, with the lines of the others."""
    firsts: dict[tuple[str, str, str], int] = {}
    lines: dict[int, list[int]] = {}
    for index, finding in enumerate(findings):
        if finding.brief:
            first = firsts.setdefault((finding.path, finding.rule, finding.level), index)
            lines.setdefault(first, [])
            if first != index:
                lines[first].append(finding.line)
    return lines


def _likewise(lines: list[int]) -> str:
    if not lines:
        return ""
    shown = [str(line) for line in dict.fromkeys(lines)]
    rest = len(shown) - MOST_ALIKE
    named = ", ".join(shown[:MOST_ALIKE]) + (f" and {rest} more" if rest > 0 else "")
    return f"; likewise in {'line' if len(shown) == 1 else 'lines'} {named}"


def _first_line(finding: PlacedFinding, style: Style) -> str:
    """The finding in the form that GNU programs give messages in, so that editors find the place."""
    level = style.paint(finding.level, finding.level)
    place = f"{printable(finding.path)}:{finding.line}:{finding.column}"
    return f"{place}: {level}: {finding.rule}: {printable(finding.message)}"


def finding_block(finding: PlacedFinding, style: Style) -> Iterator[str]:
    """One finding as lines."""
    yield _first_line(finding, style)
    label = "pattern"
    for shown, under in _pattern_rows(finding, style):
        yield _row(label, shown, style)
        if under:
            yield " " * LABEL + style.paint(under, finding.level)
        label = ""
    evidence = finding.evidence or finding.proof
    if evidence:
        yield from _rows("evidence", printable(evidence), style)
    if finding.witness is not None:
        yield _row("text", witness_expression(finding.witness), style)
    if finding.suggestion is not None:
        yield _row("instead", pattern_expression(finding.suggestion.pattern), style)
        yield _row("", _KEEPS[finding.suggestion.keeps], style)
    for related in finding.related:
        # Not in the form of a first line: editors would take the label for a piece of the file's name.
        where = f"line {related.line}, column {related.column}"
        if related.path != finding.path:
            where += f" of {printable(related.path)}"
        yield _row("see", f"{where}: {printable(related.message)}", style)
    if finding.way_out:
        yield from _rows("advice", finding.way_out, style)


def explain(finding: PlacedFinding) -> str:
    """The finding as the text report shows it, for a notebook or a log; several lines without the last line feed."""
    return "\n".join(finding_block(finding, Style()))


def summary_line(result: RunResult) -> str:
    """The last line: what was looked at, what was found, what stayed open."""
    counts = summary(result)
    levels = [finding.level for finding in result.findings]
    looked = f"{_count(counts['files'], 'file')}, {_count(counts['patterns'], 'pattern')}"
    found = ", ".join(_count(levels.count(level), level) for level in LEVELS)
    rest = ["waived", "unresolved", "inexact", "undecided", "skipped"]
    if result.ledger is not None:
        rest.insert(0, "known")
    return f"{looked}: {found}; " + ", ".join(f"{counts[word]} {word}" for word in rest)


def _count(number: int, word: str) -> str:
    return f"{number} {word}" if number == 1 else f"{number} {word}s"


def _remarks(outcome: Outcome) -> Iterator[str]:
    groups = (
        ("unresolved", outcome.unresolved),
        ("inexact", outcome.inexact),
        ("undecided", outcome.undecided),
    )
    lines = [
        (
            each.line,
            each.column,
            f"{printable(outcome.path)}:{each.line}:{each.column}: {word}: {open_question(each.reason)}",
        )
        for word, remarks in groups
        for each in remarks
    ]
    yield from (line for _, _, line in sorted(lines))


def _row(label: str, text: str, style: Style) -> str:
    return "  " + style.paint(label, "label") + " " * (LABEL - 2 - len(label)) + text


def _rows(label: str, text: str, style: Style) -> Iterator[str]:
    """Prose in as many rows as it needs."""
    width = max(style.columns - LABEL, 30)
    for line in textwrap.wrap(text, width, break_long_words=False, break_on_hyphens=False):
        yield _row(label, line, style)
        label = ""


def _pattern_rows(finding: PlacedFinding, style: Style) -> Iterator[tuple[str, str]]:
    """(shown, underline) for the pattern, or for those of its lines that the finding is about."""
    pattern = finding.pattern
    if not pattern:
        return
    spans = [finding.span, *finding.marks]
    spans += [each.span for each in finding.related if each.span is not None]
    lines = [(0, len(pattern))]
    if "VERBOSE" in finding.flags:
        lines = [each for each in _lines(pattern) if any(_touches(span, each) for span in spans)] or lines
    for line in lines[:MOST_LINES]:
        yield _underlined(pattern, line, spans, style, finding.level)
    if len(lines) > MOST_LINES:
        yield f"({_count(len(lines) - MOST_LINES, 'more line')})", ""


def _lines(pattern: str | bytes) -> Iterator[tuple[int, int]]:
    """The spans of the lines of a pattern, without line feeds and the blanks around a line."""
    start = 0
    text = pattern.decode("latin-1") if isinstance(pattern, bytes) else pattern
    for line in text.split("\n"):
        left = len(line) - len(line.lstrip(" \t"))
        yield start + left, start + max(left, len(line.rstrip()))
        start += len(line) + 1


def _touches(span: tuple[int, int], line: tuple[int, int]) -> bool:
    if span[0] == span[1]:
        return line[0] <= span[0] <= line[1]
    return span[0] < line[1] and line[0] < span[1]


def _underlined(
    pattern: str | bytes, line: tuple[int, int], spans: list[tuple[int, int]], style: Style, level: str
) -> tuple[str, str]:
    """The characters of `line` that fit, and the row below them."""
    start, end = line
    shown = cells(pattern[start:end], style.encoding)
    main = (max(spans[0][0] - start, 0), min(max(spans[0][1] - start, 0), end - start))
    left, right = _window([width(each) for each in shown], main, style.columns - LABEL)
    first, last = min(max(main[0], left), right), max(min(main[1], right), left)
    last = max(first, last)
    part = style.paint("".join(shown[first:last]), level)
    above = "".join(shown[left:first]) + part + "".join(shown[last:right])
    under = " " * (len(CUT) if left > 0 else 0)
    for at in range(left, right):
        mark, size = _mark(at + start, spans), width(shown[at])
        under += mark + " " * (size - 1) if mark == "|" else mark * size
    if right == end - start and any(span[0] == span[1] == end for span in spans):
        under += "|"
    above = (CUT if left > 0 else "") + above + (CUT if right < end - start else "")
    return above, under.rstrip()


def _mark(at: int, spans: list[tuple[int, int]]) -> str:
    if spans[0][0] <= at < spans[0][1]:
        return "="
    if any(span[0] <= at < span[1] for span in spans[1:]):
        return "-"
    return "|" if any(span[0] == span[1] == at for span in spans) else " "


def _window(widths: list[int], main: tuple[int, int], room: int) -> tuple[int, int]:
    """The range of characters to show: everything if it fits, else as much around `main` as fits."""
    if sum(widths) <= room:
        return 0, len(widths)
    room -= 2 * len(CUT)
    left = right = min(main[0], len(widths))
    used = 0
    while right < main[1] and used + widths[right] <= room - 8:
        used += widths[right]
        right += 1
    while left > 0 or right < len(widths):
        grew = False
        if left > 0 and used + widths[left - 1] <= room:
            left -= 1
            used += widths[left]
            grew = True
        if right < len(widths) and used + widths[right] <= room:
            used += widths[right]
            right += 1
            grew = True
        if not grew:
            break
    return left, right
