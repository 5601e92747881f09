"""Rows of an alternation that was joined from parts: `"|".join(WORDS)`, `f"{DATE}|{TIME}"`.

A row is a run of branches that were written together, in other places of the file than the bars around them. It is a
sibling of the other rows and is judged as one, at its own place.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from patlint.rules.subject import Subject
from patlint.source.sites import Place, Site
from patlint.syntax import tree as t


@dataclass(frozen=True, slots=True)
class Row:
    """The branches `first` to `last`, both included, of an alternation.

    `span` are the characters of the pattern that are the row's own: what all rows share (the `(?P<` and `)` of a
    template) is left out.
    """

    first: int
    last: int
    span: t.Span


def joined_rows(subject: Subject) -> Iterator[tuple[t.Alternation, list[Row]]]:
    """Every alternation of two or more rows, the outer ones first."""
    site = subject.site
    if len({piece.whole for piece in site.pieces}) < 3:
        return  # two rows and a bar between them
    for node in t.walk(subject.pattern.root):
        if isinstance(node, t.Alternation):
            rows = _rows(node, site)
            if len(rows) > 1:
                yield node, rows


def _rows(node: t.Alternation, site: Site) -> list[Row]:
    groups: list[list[int]] = [[0]]
    for number in range(1, len(node.branches)):
        bar = node.branches[number].span[0] - 1
        wholes = set(_wholes(site, node.branches[number - 1].span)) | set(
            _wholes(site, node.branches[number].span)
        )
        if site.whole_at(bar) in wholes:
            groups[-1].append(number)
        else:
            groups.append([number])
    if len(groups) < 2:
        return []
    spans = [(node.branches[group[0]].span[0], node.branches[group[-1]].span[1]) for group in groups]
    counted: dict[Place, int] = {}
    for span in spans:
        for whole in set(_wholes(site, span)):
            counted[whole] = counted.get(whole, 0) + 1
    rows = []
    for group, (start, end) in zip(groups, spans, strict=True):
        own = [at for at in range(start, end) if counted[site.whole_at(at)] == 1]
        rows.append(Row(group[0], group[-1], (own[0], own[-1] + 1) if own else (start, end)))
    return rows


def _wholes(site: Site, span: t.Span) -> list[Place]:
    return [site.whole_at(at) for at in range(*span)]
