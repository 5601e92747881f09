r"""The deliberate ways of writing "nothing": `(?!)`, `[^\s\S]` and their like."""

from __future__ import annotations

from patlint.syntax import tree as t


def is_spelled_never(node: t.Node) -> bool:
    """Whether a part of the pattern says "never" on purpose, so that emptiness is no surprise."""
    for part in t.walk(node):
        match part:
            case t.Look(negated=True, body=t.Sequence(items=())):
                return True
            case t.Set(negated=True, items=(t.ClassEscape() as one, t.ClassEscape() as two)):
                if one.kind.swapcase() == two.kind:
                    return True
            case t.Set(negated=True, items=(t.Range(low=0, high=high),)) if high in (0xFF, 0x10FFFF):
                return True
            case _:
                pass
    return False
