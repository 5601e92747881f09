r"""When a repeat of characters may be made possessive without any change, whatever the program looks at.

A greedy repeat offers its ends to the rest of the pattern, the longest first. A possessive one offers the
longest alone. Nothing changes, groups included, if the rest fails from every shorter end wherever it fails from
the longest one: then the engine takes the same way through the pattern, and only tries less.

`rests` gives what that is to be proven on: the repeat with all that can follow it, as it is and possessive. If
both match the same spans, whatever stands to the left, the rest never succeeds from a shorter end alone. What
follows a repeat inside a loop is the loop's next iterations too, as they were: each reads at least one
character, so that by induction on the text's length they may be changed all at once.

>>> from patlint.syntax.parser import parse
>>> len(rests(parse("(a*)b*", 0, (3, 12)), parse("(a*+)b*+", 0, (3, 12))))
2

Not judged: repeats in look-behind and in loops with a bound or with empty iterations.
"""

from __future__ import annotations

from dataclasses import replace

from patlint.machine.program import can_be_empty, one_character
from patlint.syntax import tree as t

END = t.Anchor((0, 0), r"\Z", 0)


def rests(old: t.Pattern, new: t.Pattern, whole: bool = False) -> list[tuple[t.Pattern, t.Pattern]] | None:
    """For each repeat that is possessive in `new` alone, the patterns from it on; None where they differ otherwise,
    or where what follows is not said.

    The repeats are changed one after the other. With `whole` the end of the text is asked for, as by fullmatch.
    """
    changed = _changed(old.root, new.root)
    out: list[tuple[t.Pattern, t.Pattern]] = []
    root = old.root
    for place, node in enumerate(changed or ()):
        if place:
            root = _made(root, changed[place - 1])  # type: ignore[index]
        after = None if one_character(node.body) is None else _after(root, node.span, (END,) if whole else ())
        if after is None:
            return None
        one, other = (t.Sequence((0, 0), (each, *after)) for each in (node, replace(node, kind="possessive")))
        out.append((replace(old, root=one), replace(old, root=other)))
    return out or None


def _made(node: t.Node, wanted: t.Repeat) -> t.Node:
    """The tree with one repeat made possessive."""
    if isinstance(node, t.Repeat) and node.span == wanted.span and node.kind == wanted.kind:
        return replace(node, kind="possessive")
    match node:
        case t.Sequence():
            return replace(node, items=tuple(_made(each, wanted) for each in node.items))
        case t.Alternation():
            return replace(node, branches=tuple(_made(each, wanted) for each in node.branches))
        case t.Group() | t.Repeat() | t.Look() | t.Atomic():
            return replace(node, body=_made(node.body, wanted))
        case t.Conditional():
            no = None if node.no is None else _made(node.no, wanted)
            return replace(node, yes=_made(node.yes, wanted), no=no)
        case _:
            return node


def _changed(old: t.Node, new: t.Node) -> list[t.Repeat] | None:
    """The greedy repeats that are possessive in `new`, from left to right; None where there is another
    difference."""
    if type(old) is not type(new):
        return None
    here: list[t.Repeat] = []
    if (
        isinstance(old, t.Repeat)
        and isinstance(new, t.Repeat)
        and (old.kind, new.kind) == ("greedy", "possessive")
    ):
        here = [old]
        new = replace(new, kind="greedy")
    below_old, below_new = t.children(old), t.children(new)
    if not below_old:
        return here if _bare(old) == _bare(new) else None
    if len(below_old) != len(below_new) or _head(old) != _head(new):
        return None
    for one, other in zip(below_old, below_new, strict=True):
        found = _changed(one, other)
        if found is None:
            return None
        here += found
    return here


def _head(node: t.Node) -> object:
    """What a node says beside its children."""
    match node:
        case t.Repeat():
            return node.minimum, node.maximum, node.kind
        case t.Group():
            return node.index, node.name, node.add_flags, node.del_flags
        case t.Look():
            return node.ahead, node.negated
        case t.Conditional():
            return node.index, node.name
        case _:
            return None


def _bare(leaf: t.Node) -> t.Node:
    """`leaf` without its places in the text."""
    if isinstance(leaf, t.Set):
        return replace(leaf, span=(0, 0), items=tuple(replace(item, span=(0, 0)) for item in leaf.items))
    return replace(leaf, span=(0, 0))


def _after(node: t.Node, wanted: t.Span, after: tuple[t.Node, ...]) -> tuple[t.Node, ...] | None:
    """What follows the repeat at `wanted` inside `node`, which `after` follows; None where it is not there, or
    that is not said."""
    if isinstance(node, t.Repeat) and node.span == wanted:
        return after
    match node:
        case t.Sequence():
            rows = [(item, (*node.items[place + 1 :], *after)) for place, item in enumerate(node.items)]
        case t.Alternation():
            rows = [(branch, after) for branch in node.branches]
        case t.Group():
            rows = [(node.body, after)]
        case t.Atomic() | t.Look(ahead=True):
            rows = [(node.body, ())]
        case t.Repeat(maximum=1):
            rows = [(node.body, after)]
        case t.Repeat(maximum=None, minimum=0 | 1) if node.kind != "possessive" and not can_be_empty(
            node.body
        ):
            rows = [(node.body, (replace(node, minimum=0), *after))]
        case t.Repeat(kind="possessive", maximum=None) if not can_be_empty(node.body):
            rows = [(node.body, ())]  # each iteration is an atomic group of its own
        case _:
            return None
    for below, behind in rows:
        found = _after(below, wanted, behind)
        if found is not None:
            return found
    return None
