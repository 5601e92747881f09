"""A finding at its place in a file: the form that reports read and the cache keeps.

`PlacedFinding` is a `Finding` joined with what the report needs of its site, so that nothing later has to
know of sites, trees or automata. `encode` and `decode` turn it into plain values and back, `write` and `read`
those into one line of text; the text is a Python literal, because JSON would merge two lone surrogates into
one character and has no bytes.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING, Any

from patlint.rules.finding import Finding, Level, Related, SlowWitness, Suggestion, TextWitness, Witness

if TYPE_CHECKING:
    from patlint.source.sites import Place, Site


MOST_ALIKE = 3
"""Findings that say the same of parts of one pattern; more of them are told as one."""
MOST_RELATED = 6
"""Of those the parts that are named."""


@dataclass(frozen=True, slots=True)
class RelatedPlace:
    """Another place that a finding is about; `span` is set where it is a part of the same pattern."""

    message: str
    path: str
    line: int
    column: int
    end_line: int
    end_column: int
    span: tuple[int, int] | None = None


@dataclass(frozen=True, slots=True)
class PlacedFinding:
    """One finding. Lines and columns are 1-based, columns count code points, the end is after the last one.

    `pattern` is None for a finding about something else than a pattern (a waiver). `flags` are the names of
    all flags in force, inline ones too, without the UNICODE that every text pattern has. `span` and `marks`
    are offsets in `pattern`: the part underlined and further ones.
    """

    rule: str
    level: Level
    path: str
    line: int
    column: int
    end_line: int
    end_column: int
    message: str
    pattern: str | bytes | None = None
    flags: tuple[str, ...] = ()
    mode: str | None = None
    witness: Witness | None = None
    suggestion: Suggestion | None = None
    related: tuple[RelatedPlace, ...] = ()
    proof: str = ""
    evidence: str = ""
    way_out: str = ""
    span: tuple[int, int] = (0, 0)
    marks: tuple[tuple[int, int], ...] = ()
    brief: bool = False

    @property
    def sort_key(self) -> tuple[int, int, str, str]:
        return (self.line, self.column, self.rule, self.message)


def place_finding(finding: Finding, site: Site, level: Level, flags: tuple[str, ...]) -> PlacedFinding:
    """`finding` of `site` at `level`."""
    place = site.place_of_span(*finding.span) if finding.span[0] < finding.span[1] else _point(site, finding)
    return PlacedFinding(
        rule=finding.rule,
        level=level,
        path=site.path,
        line=place.line,
        column=place.column,
        end_line=place.end_line,
        end_column=place.end_column,
        message=finding.message,
        pattern=site.pattern,
        flags=flags,
        mode=finding.mode,
        witness=finding.witness,
        suggestion=finding.suggestion,
        related=tuple(_related(each, site) for each in finding.related),
        proof=finding.proof,
        evidence=finding.evidence,
        way_out=finding.way_out,
        span=finding.span,
        marks=finding.marks,
        brief=finding.brief,
    )


def _point(site: Site, finding: Finding) -> Place:
    return site.place if not site.pattern else site.place_of_span(*finding.span)


def _related(related: Related, site: Site) -> RelatedPlace:
    if related.place is not None:
        place = related.place
    elif related.span is not None:
        place = site.place_of_span(*related.span)
    else:
        place = site.place
    path = related.path or site.path
    return RelatedPlace(
        related.message, path, place.line, place.column, place.end_line, place.end_column, related.span
    )


def gathered(placed: list[tuple[PlacedFinding, Site]]) -> list[PlacedFinding]:
    """The findings, but what is said of more than a few parts of one pattern in the same words as one of them."""
    alike: dict[object, list[PlacedFinding]] = {}
    for finding, site in placed:
        alike.setdefault(_said(finding, site), []).append(finding)
    kept = []
    for finding, site in placed:
        group = alike[_said(finding, site)]
        if len(group) <= MOST_ALIKE:
            kept.append(finding)
        elif finding is group[0]:
            others = tuple(
                RelatedPlace("the same holds of this part", each.path, *_lines(each), each.span)
                for each in group[1 : MOST_RELATED + 1]
            )
            message = (
                f"{finding.message}, and the same holds of {len(group) - 1} further parts of the pattern"
            )
            kept.append(replace(finding, message=message, related=(*finding.related, *others)))
    return kept


def _said(finding: PlacedFinding, site: Site) -> object:
    """Equal for findings that say the same of parts of one pattern; what has a text to show stands alone."""
    if finding.witness is not None or finding.suggestion is not None or finding.span[0] == finding.span[1]:
        return id(finding)
    return id(site), finding.rule, finding.level, finding.mode, finding.message


def _lines(finding: PlacedFinding) -> tuple[int, int, int, int]:
    return finding.line, finding.column, finding.end_line, finding.end_column


def encode(finding: PlacedFinding) -> tuple[Any, ...]:
    """`finding` as nested tuples of plain values, which `ascii` writes and `ast.literal_eval` reads."""
    witness: tuple[Any, ...] | None
    match finding.witness:
        case TextWitness():
            witness = (finding.witness.text,)
        case SlowWitness():
            witness = _values(finding.witness)
        case None:
            witness = None
    suggestion = None if finding.suggestion is None else _values(finding.suggestion)
    values = {each.name: getattr(finding, each.name) for each in fields(finding)}
    values |= {
        "witness": witness,
        "suggestion": suggestion,
        "related": tuple(_values(each) for each in finding.related),
    }
    return tuple(values.values())


def decode(values: tuple[Any, ...]) -> PlacedFinding:
    """The inverse of `encode`; TypeError, ValueError or KeyError where `values` is something else."""
    named = dict(zip((each.name for each in fields(PlacedFinding)), values, strict=True))
    witness = named["witness"]
    if witness is not None:
        named["witness"] = TextWitness(*witness) if len(witness) == 1 else SlowWitness(*witness)
    if named["suggestion"] is not None:
        named["suggestion"] = Suggestion(*named["suggestion"])
    named["related"] = tuple(RelatedPlace(*each) for each in named["related"])
    return PlacedFinding(**named)


def write(value: object) -> str:
    """Nested tuples of plain values as one line of ASCII."""
    return ascii(value)


def read(text: str) -> Any:
    """The inverse of `write`; ValueError, SyntaxError, MemoryError or RecursionError for anything else."""
    return ast.literal_eval(text)


def _values(instance: Any) -> tuple[Any, ...]:
    return tuple(getattr(instance, each.name) for each in fields(instance))
