"""Reports of `lint` and `list` as JSON. Their shapes are in the README; consumers may rely on them.

Everything is ASCII: characters outside are `\\u` escapes, so that lone surrogates survive. Bytes patterns and
their texts are given as text, one character for each byte (latin-1), with `"bytes": true` beside them.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from patlint import __version__
from patlint.placed import PlacedFinding
from patlint.rules.finding import SlowWitness, TextWitness, Witness
from patlint.target import Target, target_name

if TYPE_CHECKING:
    from patlint.inventory import Inventory
    from patlint.run import RunResult


def lint_report(result: RunResult, target: Target) -> str:
    """The report of a run, ending in a line feed."""
    return dump(
        {
            "patlint": __version__,
            "target": target_name(target),
            "summary": summary(result),
            "findings": [finding_object(each) for each in result.findings],
            "gone": [
                {
                    "rule": each.rule,
                    "path": each.path,
                    "pattern": None if each.pattern is None else as_text(each.pattern),
                    "bytes": isinstance(each.pattern, bytes),
                }
                for each in result.gone
            ],
        }
    )


def list_report(inventories: Sequence[Inventory]) -> str:
    """The patterns of files, ending in a line feed."""
    patterns = [
        {
            "path": each.path,
            "line": each.line,
            "column": each.column,
            "end_line": each.end_line,
            "end_column": each.end_column,
            "pattern": as_text(each.pattern),
            "bytes": isinstance(each.pattern, bytes),
            "flags": list(each.flags),
            "modes": list(each.modes),
            "looks_at": each.looks_at,
            "function": each.function,
        }
        for inventory in inventories
        for each in inventory.patterns
    ]
    unresolved = [
        {"path": inventory.path, "line": each.line, "column": each.column, "reason": each.reason}
        for inventory in inventories
        for each in inventory.unresolved
    ]
    return dump({"patterns": patterns, "unresolved": unresolved})


def summary(result: RunResult) -> dict[str, int]:
    """Counts of a run: files linted and skipped; patterns found, unresolved, inexact and undecided; findings
    that a waiver or the ledger holds back."""
    return {
        "files": result.files,
        "skipped": result.skipped,
        "patterns": sum(each.patterns for each in result.outcomes),
        "unresolved": sum(len(each.unresolved) for each in result.outcomes),
        "inexact": sum(len(each.inexact) for each in result.outcomes),
        "undecided": sum(len(each.undecided) for each in result.outcomes),
        "waived": sum(each.waived for each in result.outcomes),
        "known": result.known,
    }


def finding_object(finding: PlacedFinding) -> dict[str, Any]:
    """One finding as an object."""
    suggestion = finding.suggestion
    return {
        "rule": finding.rule,
        "level": finding.level,
        "path": finding.path,
        "line": finding.line,
        "column": finding.column,
        "end_line": finding.end_line,
        "end_column": finding.end_column,
        "message": finding.message,
        "pattern": None if finding.pattern is None else as_text(finding.pattern),
        "bytes": isinstance(finding.pattern, bytes),
        "flags": list(finding.flags),
        "mode": finding.mode,
        "evidence": finding.evidence,
        "proof": finding.proof,
        "advice": finding.way_out,
        "witness": witness_object(finding.witness),
        "suggestion": None
        if suggestion is None
        else {"pattern": as_text(suggestion.pattern), "keeps": suggestion.keeps},
        "related": [
            {
                "path": each.path,
                "line": each.line,
                "column": each.column,
                "end_line": each.end_line,
                "end_column": each.end_column,
                "message": each.message,
            }
            for each in finding.related
        ],
    }


def witness_object(witness: Witness | None) -> dict[str, Any] | None:
    """A witness as an object."""
    match witness:
        case TextWitness():
            return {"text": as_text(witness.text)}
        case SlowWitness():
            shown: dict[str, Any] = {
                "prefix": as_text(witness.prefix),
                "pump": as_text(witness.pump),
                "suffix": as_text(witness.suffix),
                "growth": witness.growth,
            }
            if witness.more:
                shown["more"] = [
                    {"between": as_text(between), "pump": as_text(pump)} for between, pump in witness.more
                ]
            if witness.bounded:
                shown["bounded"] = True
            return shown
        case None:
            return None


def as_text(text: str | bytes) -> str:
    """Bytes as the characters of the same numbers, text as it is."""
    return text.decode("latin-1") if isinstance(text, bytes) else text


def dump(value: object) -> str:
    """`value` as indented JSON, ending in a line feed."""
    return json.dumps(value, ensure_ascii=True, indent=2) + "\n"
