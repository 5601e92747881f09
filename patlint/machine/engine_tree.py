r"""The tree as CPython's engine runs it: two rewritings that its parser makes of alternations.

In this order: a prefix that all branches share is taken out in front; then branches of one character each
(literals and sets that are not negated, categories included) become one set. So `(?:a|b|a)*` and `(?:\w|\d)*`
are not ambiguous for the engine, while `(?:ab|ab)*` is: its branches are empty behind the common prefix.

Source: experiments with `re.compile(..., re.DEBUG)` on CPython 3.10 to 3.13.
"""

from __future__ import annotations

from dataclasses import replace

from patlint.syntax import tree as t


def as_engine_runs(node: t.Node) -> t.Node:
    """`node` rewritten; spans are kept, a merged set carries the span of the alternation."""
    match node:
        case t.Sequence():
            return sequence(node.span, [as_engine_runs(item) for item in node.items])
        case t.Alternation():
            return _alternation(node.span, [as_engine_runs(branch) for branch in node.branches])
        case t.Group():
            body = as_engine_runs(node.body)
            if node.index is None and not node.add_flags and not node.del_flags:
                return body
            return replace(node, body=body)
        case t.Repeat() | t.Look() | t.Atomic():
            return replace(node, body=as_engine_runs(node.body))
        case t.Set(items=(t.Literal() as only,), negated=False):
            return t.Literal(node.span, only.code, node.flags)
        case t.Conditional():
            no = None if node.no is None else as_engine_runs(node.no)
            return replace(node, yes=as_engine_runs(node.yes), no=no)
        case _:
            return node


def sequence(span: t.Span, items: list[t.Node]) -> t.Node:
    """The canonical sequence of `items`: nested sequences opened, a single item alone."""
    flat: list[t.Node] = []
    for item in items:
        flat.extend(item.items if isinstance(item, t.Sequence) else (item,))
    return flat[0] if len(flat) == 1 else t.Sequence(span, tuple(flat))


def _items(node: t.Node) -> list[t.Node]:
    return list(node.items) if isinstance(node, t.Sequence) else [node]


_SHARED = (t.Literal, t.Dot, t.Set, t.ClassEscape, t.Anchor, t.BackReference)
"""What the engine takes out as a shared prefix: nothing that holds a pattern of its own, such as a repeat.

Nor would that be the same: `b?\\b|b?` comes to the empty match before it tries `b` by its second branch.
"""


def _alternation(span: t.Span, branches: list[t.Node]) -> t.Node:
    rows = [_items(branch) for branch in branches]
    prefix: list[t.Node] = []
    while all(rows) and isinstance(rows[0][0], _SHARED) and all(same(row[0], rows[0][0]) for row in rows[1:]):
        prefix.append(rows[0][0])
        rows = [row[1:] for row in rows]
    merged = _one_set(span, rows)
    if merged is not None:
        return sequence(span, [*prefix, merged])
    rest = t.Alternation(span, tuple(sequence(span, row) for row in rows))
    return sequence(span, [*prefix, rest])


def _one_set(span: t.Span, rows: list[list[t.Node]]) -> t.Node | None:
    items: list[t.SetItem] = []
    flags = None
    for row in rows:
        if len(row) != 1:
            return None
        match row[0]:
            case t.Literal() | t.ClassEscape() as node:
                members: tuple[t.SetItem, ...] = (node,)
            case t.Set(negated=False) as node:
                members = node.items
            case _:
                return None
        if flags not in (None, node.flags):
            return None
        flags = node.flags
        items.extend(members)
    return t.Set(span, tuple(items), False, flags or 0)


def same(a: t.Node | t.SetItem, b: t.Node | t.SetItem) -> bool:
    """Whether two trees are equal but for their spans."""
    match a, b:
        case t.Literal(), t.Literal():
            return a.code == b.code and a.flags == b.flags
        case t.Range(), t.Range():
            return (a.low, a.high) == (b.low, b.high)
        case t.ClassEscape(), t.ClassEscape():
            return a.kind == b.kind and a.flags == b.flags
        case t.Anchor(), t.Anchor():
            return a.kind == b.kind and a.flags == b.flags
        case t.Dot(), t.Dot():
            return a.flags == b.flags
        case t.Set(), t.Set():
            return (a.negated, a.flags, len(a.items)) == (b.negated, b.flags, len(b.items)) and all(
                map(same, a.items, b.items)
            )
        case t.Sequence(), t.Sequence():
            return len(a.items) == len(b.items) and all(map(same, a.items, b.items))
        case t.Alternation(), t.Alternation():
            return len(a.branches) == len(b.branches) and all(map(same, a.branches, b.branches))
        case t.Group(), t.Group():
            outside_a = (a.index, a.name, a.add_flags, a.del_flags)
            return outside_a == (b.index, b.name, b.add_flags, b.del_flags) and same(a.body, b.body)
        case t.Repeat(), t.Repeat():
            counts_a = (a.minimum, a.maximum, a.kind)
            return counts_a == (b.minimum, b.maximum, b.kind) and same(a.body, b.body)
        case t.Look(), t.Look():
            return (a.ahead, a.negated) == (b.ahead, b.negated) and same(a.body, b.body)
        case t.Atomic(), t.Atomic():
            return same(a.body, b.body)
        case t.BackReference(), t.BackReference():
            return a.index == b.index and a.flags == b.flags
        case t.Conditional(), t.Conditional():
            no = a.no is b.no if a.no is None or b.no is None else same(a.no, b.no)
            return a.index == b.index and same(a.yes, b.yes) and no
        case _:
            return False
