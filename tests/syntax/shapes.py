"""What two trees must share to mean the same: structure without spans and without plain groups.

A leaf counts as the characters it matches (or what its flags make of it), not as the flags themselves.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from patlint.syntax.classes import char_set, is_locale_dependent, word_set
from patlint.syntax.tree import (
    ASCII,
    IGNORECASE,
    LOCALE,
    MULTILINE,
    Alternation,
    Anchor,
    Atomic,
    BackReference,
    ClassEscape,
    Conditional,
    Dot,
    Group,
    Literal,
    Look,
    Node,
    Range,
    Repeat,
    Sequence,
    Set,
)


def shape(node: Node, is_bytes: bool) -> Any:
    match node:
        case Literal() | Dot() | ClassEscape() | Set():
            kind: Any = type(node).__name__
            if isinstance(node, Set):
                kind = [
                    (item.low, item.high)
                    if isinstance(item, Range)
                    else getattr(item, "kind", None) or item.code
                    for item in node.items
                ]
            return "leaf", kind, char_set(node, is_bytes).bounds, is_locale_dependent(node)
        case Anchor(kind="^" | "$"):
            return "anchor", node.kind, node.flags & MULTILINE
        case Anchor(kind=r"\b" | r"\B"):
            return "anchor", node.kind, word_set(node.flags, is_bytes).bounds, node.flags & LOCALE
        case Anchor():
            return "anchor", node.kind
        case BackReference():
            mask = IGNORECASE
            if node.flags & IGNORECASE:
                mask |= LOCALE if is_bytes else ASCII
            return "reference", node.index, node.name, node.flags & mask
        case Group(index=None):
            return shape(node.body, is_bytes)
        case Group():
            return "group", node.index, node.name, shape(node.body, is_bytes)
        case Sequence():
            return _flat("sequence", [shape(item, is_bytes) for item in node.items])
        case Alternation():
            return _flat("alternation", [shape(branch, is_bytes) for branch in node.branches])
        case Repeat():
            return "repeat", node.minimum, node.maximum, node.kind, shape(node.body, is_bytes)
        case Look():
            return "look", node.ahead, node.negated, node.width, shape(node.body, is_bytes)
        case Atomic():
            return "atomic", shape(node.body, is_bytes)
        case Conditional():
            no = None if node.no is None else shape(node.no, is_bytes)
            return "conditional", node.index, node.name, shape(node.yes, is_bytes), no


def _flat(kind: str, parts: list[Any]) -> Any:
    found: list[Any] = []
    for part in parts:
        found += part[1] if part[0] == kind else [part]
    return found[0] if len(found) == 1 else (kind, found)


def without_spans(node: Node) -> Node:
    """The same tree with every span at (0, 0), as a tree that was built and not read."""
    return _rebuilt(replace(node, span=(0, 0)), without_spans)


def without_plain_groups(node: Node) -> Node:
    """The same tree without groups that only hold together or set flags; leaves keep their flags."""
    if isinstance(node, Group) and node.index is None:
        return without_plain_groups(node.body)
    return _rebuilt(node, without_plain_groups)


def _rebuilt(node: Node, change: Any) -> Node:
    match node:
        case Sequence():
            return replace(node, items=tuple(map(change, node.items)))
        case Alternation():
            return replace(node, branches=tuple(map(change, node.branches)))
        case Group() | Repeat() | Look() | Atomic():
            return replace(node, body=change(node.body))
        case Conditional():
            return replace(node, yes=change(node.yes), no=node.no and change(node.no))
        case _:
            return node
