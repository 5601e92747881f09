"""Reports as SARIF, the Static Analysis Results Interchange Format, version 2.1.0 (an OASIS standard).

One run with one tool. Every rule stands in it with its page; every finding is a result with its rule, level,
region, related locations and a partial fingerprint that survives moved lines (`patlint.identity`). Problems with
files are notifications of the invocation, with `verbose` also what is unresolved, inexact or undecided.

Columns count code points from 1, an end is after the last character (`columnKind`). Paths are URIs relative to
`%SRCROOT%`, the top of the repository that holds the working directory, else that directory itself; a file outside
of it has an absolute URI. Patterns and texts stand in `properties` as Python expressions in ASCII, since not every
reader of JSON takes lone surrogates.

Limits: no `fixes`, because an edit of the literal is proven only by `patlint mend`, which reads the file again.
"""

from __future__ import annotations

import os
import re
from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING, Any, Final
from urllib.parse import quote

from patlint import __version__
from patlint.identity import VERSION, content, fingerprint, ordinals
from patlint.placed import PlacedFinding, RelatedPlace
from patlint.report.json import dump, summary
from patlint.report.show import open_question, pattern_expression, printable, witness_expression
from patlint.rules.finding import Example, Rule, SlowWitness
from patlint.target import Target, target_name

if TYPE_CHECKING:
    from patlint.outcome import Outcome
    from patlint.run import RunResult

SCHEMA: Final = (
    "https://raw.githubusercontent.com/oasis-tcs/sarif-spec/master/Schemata/sarif-schema-2.1.0.json"
)
ROOT: Final = "%SRCROOT%"
FINGERPRINT: Final = f"patlintContent/v{VERSION}"
_LINK: Final = re.compile(r"\[[^\[\]]*\]\(")


def lint_report(
    result: RunResult,
    target: Target,
    rules: Sequence[Rule],
    status: int,
    *,
    off: frozenset[str] = frozenset(),
    root: str = ".",
    verbose: bool = False,
) -> str:
    """The report of a run that ends with exit `status`; `off` are rules that are off by default."""
    base = os.path.abspath(root)
    findings = result.findings
    uris = {path: _location(path, base) for path in _paths(result)}
    index = {path: number for number, path in enumerate(uris)}
    places = {path: uri | {"index": index[path]} for path, uri in uris.items()}
    lines = [content(each, uris[each.path]["uri"]) for each in findings]
    run = {
        "tool": {"driver": _driver(rules, off)},
        "invocations": [
            {
                "executionSuccessful": not result.problems,
                "exitCode": status,
                "toolExecutionNotifications": list(_notifications(result, places, verbose)),
            }
        ],
        "originalUriBaseIds": {ROOT: {"description": {"text": "The top of the source tree."}}},
        "artifacts": [{"location": uri, "sourceLanguage": "python"} for uri in uris.values()],
        "columnKind": "unicodeCodePoints",
        "newlineSequences": ["\r\n", "\n", "\r"],
        "defaultSourceLanguage": "python",
        "language": "en",
        "results": [
            _result(each, fingerprint(line, ordinal), rules, places)
            for each, line, ordinal in zip(findings, lines, ordinals(lines), strict=True)
        ],
        "properties": {"target": target_name(target), "summary": summary(result)},
    }
    return dump({"$schema": SCHEMA, "version": "2.1.0", "runs": [run]})


def _paths(result: RunResult) -> list[str]:
    """Every file that the report speaks of, each once, in the order of the run."""
    told: dict[str, None] = {}
    for outcome in result.outcomes:
        if outcome.findings or outcome.problems or outcome.unresolved or outcome.inexact or outcome.undecided:
            told[outcome.path] = None
        for finding in outcome.findings:
            told |= dict.fromkeys((finding.path, *(each.path for each in finding.related)))
    return list(told)


def _location(path: str, base: str) -> dict[str, Any]:
    full = os.path.abspath(path)
    try:
        inner = os.path.relpath(full, base)
    except ValueError:  # another drive
        inner = os.pardir
    if inner == os.pardir or inner.startswith(os.pardir + os.sep):
        return {"uri": "file://" + _quoted("/" + full.lstrip("/"))}
    return {"uri": _quoted(inner), "uriBaseId": ROOT}


def _quoted(path: str) -> str:
    return quote(os.fsencode(path.replace(os.sep, "/")), safe="/")


def _driver(rules: Sequence[Rule], off: frozenset[str]) -> dict[str, Any]:
    return {
        "name": "patlint",
        "version": __version__,
        "semanticVersion": __version__,
        "shortDescription": {"text": "Finds mistakes in the regular expressions of Python code."},
        "rules": [
            {
                "id": rule.name,
                "shortDescription": {"text": _sentence(rule.summary)},
                "fullDescription": {"text": _braced(_joined(rule.page.strip().split("\n\n")[0]))},
                "help": {"text": _braced("\n".join(_page(rule)))},
                "defaultConfiguration": {"enabled": rule.name not in off, "level": rule.level},
            }
            for rule in rules
        ],
    }


def _page(rule: Rule) -> Iterator[str]:
    yield rule.page.strip()
    for title, example in (("Found:", rule.wrong), ("Not found:", rule.right)):
        yield ""
        yield from _example(title, example)


def _example(title: str, example: Example) -> Iterator[str]:
    yield f"{title} {example.says}".rstrip()
    yield ""
    for line in example.source.strip("\n").split("\n"):
        yield f"    {line}".rstrip()


def _result(
    finding: PlacedFinding, mark: str, rules: Sequence[Rule], places: dict[str, dict[str, Any]]
) -> dict[str, Any]:
    said = [_sentence(each) for each in (finding.message, finding.evidence or finding.proof) if each]
    if finding.witness is not None:
        said += _quoting("Text", witness_expression(finding.witness))
    if finding.suggestion is not None:
        said += _quoting("Instead", pattern_expression(finding.suggestion.pattern))
    if finding.way_out:
        said.append(_sentence(finding.way_out))
    made: dict[str, Any] = {
        "ruleId": finding.rule,
        "ruleIndex": [rule.name for rule in rules].index(finding.rule),
        "level": finding.level,
        "message": {"text": " ".join(said)},
        "locations": [{"physicalLocation": _physical(finding, places)}],
        "partialFingerprints": {FINGERPRINT: mark},
    }
    if finding.related:
        made["relatedLocations"] = [
            {
                "id": number,
                "physicalLocation": _physical(each, places),
                "message": {"text": _sentence(each.message)},
            }
            for number, each in enumerate(finding.related)
        ]
    properties = dict(_properties(finding))
    if properties:
        made["properties"] = properties
    return made


def _physical(place: PlacedFinding | RelatedPlace, places: dict[str, dict[str, Any]]) -> dict[str, Any]:
    return {
        "artifactLocation": places[place.path],
        "region": {
            "startLine": place.line,
            "startColumn": place.column,
            "endLine": place.end_line,
            "endColumn": place.end_column,
        },
    }


def _properties(finding: PlacedFinding) -> Iterator[tuple[str, Any]]:
    if finding.pattern is not None:
        yield "pattern", pattern_expression(finding.pattern)
        yield "flags", list(finding.flags)
    if finding.mode is not None:
        yield "mode", finding.mode
    if finding.witness is not None:
        yield "text", witness_expression(finding.witness)
        if isinstance(finding.witness, SlowWitness):
            yield "growth", finding.witness.growth
    if finding.proof:
        yield "proof", printable(finding.proof)
    if finding.suggestion is not None:
        yield "suggestion", pattern_expression(finding.suggestion.pattern)
        yield "keeps", finding.suggestion.keeps


def _notifications(
    result: RunResult, places: dict[str, dict[str, Any]], verbose: bool
) -> Iterator[dict[str, Any]]:
    told: set[str] = set()
    for outcome in result.outcomes:
        for line in outcome.problems:
            told.add(line)
            yield _notification("error", line, {"artifactLocation": places[outcome.path]})
        if verbose:
            yield from _open(outcome, places)
    for line in result.problems:
        if line not in told:
            yield _notification("error", line, None)


def _open(outcome: Outcome, places: dict[str, dict[str, Any]]) -> Iterator[dict[str, Any]]:
    groups = (
        ("unresolved", outcome.unresolved),
        ("inexact", outcome.inexact),
        ("undecided", outcome.undecided),
    )
    for word, remarks in groups:
        for each in remarks:
            region = {"startLine": each.line, "startColumn": each.column}
            where = {"artifactLocation": places[outcome.path], "region": region}
            yield _notification("note", f"{word}: {open_question(each.reason)}", where)


def _notification(level: str, text: str, where: dict[str, Any] | None) -> dict[str, Any]:
    made: dict[str, Any] = {"level": level, "message": {"text": _braced(printable(_joined(text)))}}
    if where is not None:
        made["locations"] = [{"physicalLocation": where}]
    return made


def _sentence(text: str) -> str:
    """`text` as a sentence of a SARIF message: a capital, a full stop, and what has a meaning there escaped."""
    text = printable(_joined(text))
    end = "" if text.endswith((".", "!", "?")) else "."
    return _braced(text[:1].upper() + text[1:] + end)


def _quoting(label: str, expression: str) -> list[str]:
    """A Python expression as a sentence; none where a reader would take a piece of it for a link."""
    return [] if _LINK.search(expression) else [f"{label}: {_braced(expression)}."]


def _braced(text: str) -> str:
    """Braces doubled, as placeholders have single ones (SARIF 3.11.5), and nothing that reads as a link (3.11.6:
    `[text](destination)`; there is no way to escape one)."""
    return _LINK.sub(lambda found: f"{found[0][:-1]} (", text.replace("{", "{{").replace("}", "}}"))


def _joined(text: str) -> str:
    return " ".join(_lines(text.split("\n")))


def _lines(lines: Iterable[str]) -> Iterator[str]:
    return (line.strip() for line in lines)
