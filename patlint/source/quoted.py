"""Literals and f-strings -> texts whose characters know where they stand.

Values come from `ast`, spellings from libcst (`finder`), and where the two disagree about a literal the
value stays and its characters have no places of their own.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Sequence

from patlint.source import reasons
from patlint.source.finder import Hole, Unspelled, read_literal
from patlint.source.formatting import replacement_field
from patlint.source.literals import Run
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.spelled import Spelled, join, without_spelling
from patlint.source.values import Value

LONGEST_FIELDS = 20_000
"""Characters of an f-string that is spelled out; what is written in its fields may be nested deeply."""


def literal(node: ast.Constant, value: str | bytes, text: Text) -> Spelled:
    """A text that stands in the file as one literal, or several side by side."""
    try:
        parts = read_literal(text.segment(node), text.start(node))
    except Unspelled:
        return without_spelling(value, text.place(node))
    runs = tuple(part for part in parts if isinstance(part, Run))
    texts = [run.text for run in runs]
    joined = b"".join(texts) if isinstance(value, bytes) else "".join(texts)  # type: ignore[arg-type]
    if joined != value:
        return without_spelling(value, text.place(node))
    kept = tuple(run for run in runs if run.text)
    return Spelled(value, kept or runs[:1])


def f_string(node: ast.JoinedStr, text: Text, evaluate: Callable[[ast.expr], Value]) -> Spelled:
    """An f-string; `evaluate` gives the values of its fields. Errors: `Opaque`, also those of `evaluate`."""
    place = text.place(node)
    said: list[str | Spelled] = [""]  # texts and fields in turn
    for part in node.values:
        if isinstance(part, ast.Constant):
            before = said[-1]
            assert isinstance(before, str)
            said[-1] = before + str(part.value)
        else:
            assert isinstance(part, ast.FormattedValue)
            spec = _constant_spec(part.format_spec)
            value = evaluate(part.value)
            at_field = without_spelling("x", place)
            said += [replacement_field(at_field, value, part.conversion, spec), ""]
    runs, holes = _spelled(node, text)
    texts = said[::2]
    told = ["".join(str(run.text) for run in group) for group in runs]
    if told != texts:
        return without_spelling("".join(t if isinstance(t, str) else str(t.value) for t in said), place)
    result: list[Spelled] = []
    for number, group in enumerate(runs):
        result.append(Spelled(told[number], tuple(run for run in group if run.text)))
        if number < len(holes):
            field = said[2 * number + 1]
            assert isinstance(field, Spelled)
            result.append(_in_hole(node.values, number, field, holes[number]))
    return join(result)


def _spelled(node: ast.JoinedStr, text: Text) -> tuple[list[list[Run]], list[Hole]]:
    """The runs between the fields, and the fields, as the file spells them."""
    try:
        segment = text.segment(node)
        parts = read_literal(segment, text.start(node)) if len(segment) < LONGEST_FIELDS else []
    except Unspelled:
        parts = []
    runs: list[list[Run]] = [[]]
    holes: list[Hole] = []
    for spelled in parts:
        if isinstance(spelled, Hole):
            holes.append(spelled)
            runs.append([])
        else:
            runs[-1].append(spelled)
    return runs, holes


def _in_hole(values: Sequence[ast.expr], number: int, field: Spelled, hole: Hole) -> Spelled:
    """A field's text: with its own places where it comes from a name, else standing at its braces."""
    expression = [part for part in values if isinstance(part, ast.FormattedValue)][number].value
    named = isinstance(expression, (ast.Name, ast.Attribute))
    if named and all(run.places for run in field.runs):
        return field
    return without_spelling(field.value, hole.place) if field.value else field


def _constant_spec(spec: ast.expr | None) -> str:
    if spec is None:
        return ""
    assert isinstance(spec, ast.JoinedStr)
    if not all(isinstance(part, ast.Constant) for part in spec.values):
        raise Opaque(reasons.FORMATTED)
    return "".join(str(part.value) for part in spec.values if isinstance(part, ast.Constant))
