"""How many characters a node can match: the minimum and the maximum, as `re` computes them.

`re` needs them to refuse look-behinds without a fixed width, and to give up early on short texts. They are
bounds, not exact for every tree: look-around counts nothing, and a branch that can never match counts.

>>> from patlint.syntax.parser import parse
>>> width(parse("a{2,3}|b*").root)
(0, None)
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TypeAlias

from .tree import (
    Alternation,
    Anchor,
    Atomic,
    BackReference,
    Conditional,
    Group,
    Look,
    Node,
    Repeat,
    Sequence,
)

Width: TypeAlias = tuple[int, int | None]


def width(node: Node, groups: Mapping[int, Width] | None = None) -> Width:
    """Least and greatest length in characters; None where there is no greatest.

    `groups` are the widths of the groups outside `node` that it refers back to; a reference to a group that
    is neither there nor in `node` counts as anything from nothing on.
    """
    return _measure(node, dict(groups or {}))


def _measure(node: Node, groups: dict[int, Width]) -> Width:
    """The width; notes those of the groups, which are closed before the text can refer to them."""
    match node:
        case Sequence():
            total: Width = (0, 0)
            for item in node.items:
                total = _plus(total, _measure(item, groups))
            return total
        case Alternation():
            return _either([_measure(branch, groups) for branch in node.branches])
        case Group():
            inner = _measure(node.body, groups)
            if node.index is not None:
                groups[node.index] = inner
            return inner
        case Atomic():
            return _measure(node.body, groups)
        case Repeat():
            return _times(_measure(node.body, groups), node.minimum, node.maximum)
        case Look():
            _measure(node.body, groups)
            return 0, 0
        case Anchor():
            return 0, 0
        case BackReference():
            return groups.get(node.index, (0, None))
        case Conditional():
            yes = _measure(node.yes, groups)
            return _either([yes, (0, 0) if node.no is None else _measure(node.no, groups)])
        case _:
            return 1, 1


def _plus(a: Width, b: Width) -> Width:
    return a[0] + b[0], None if a[1] is None or b[1] is None else a[1] + b[1]


def _times(a: Width, minimum: int, maximum: int | None) -> Width:
    if a[1] == 0 or maximum == 0:
        return a[0] * minimum, 0
    return a[0] * minimum, None if a[1] is None or maximum is None else a[1] * maximum


def _either(widths: list[Width]) -> Width:
    highs = [high for _, high in widths]
    bounded = [high for high in highs if high is not None]
    return min(low for low, _ in widths), max(bounded) if len(bounded) == len(highs) else None
