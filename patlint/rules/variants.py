"""Comparing a pattern with one in which a part was changed."""

from __future__ import annotations

from dataclasses import replace

from patlint.language import Language
from patlint.rules.subject import Subject
from patlint.source.sites import Mode
from patlint.syntax import tree as t


def with_part(node: t.Node, old: t.Node, new: t.Node) -> t.Node:
    """The tree `node` with the part `old` (that very object) changed to `new`."""
    if node is old:
        return new
    match node:
        case t.Sequence():
            return replace(node, items=tuple(with_part(item, old, new) for item in node.items))
        case t.Alternation():
            return replace(node, branches=tuple(with_part(branch, old, new) for branch in node.branches))
        case t.Group() | t.Repeat() | t.Look() | t.Atomic():
            return replace(node, body=with_part(node.body, old, new))
        case t.Conditional():
            no = None if node.no is None else with_part(node.no, old, new)
            return replace(node, yes=with_part(node.yes, old, new), no=no)
        case _:
            return node


def difference_text(subject: Subject, old: t.Node, new: t.Node, mode: Mode) -> str | bytes | None:
    """A text on which the pattern and the changed one differ in `mode`; None where none is known.

    Raises LimitReached.
    """
    changed = replace(subject.pattern, root=with_part(subject.pattern.root, old, new))
    return text_between(subject, changed, mode)


def text_between(subject: Subject, changed: t.Pattern, mode: Mode) -> str | bytes | None:
    """As `difference_text`, for a whole pattern."""
    if not subject.exact:
        return None
    other = Language(changed, mode=mode, limits=subject.limits)
    if not other.exact:
        return None
    return subject.language(mode).difference_witness(other)
