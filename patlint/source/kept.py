"""Whether lists and dicts still hold, where a name is read, what they were made with.

`Kept.by_name(name, scope, value)` looks at every read of the name: one that could change the list or dict that
it stands for, or one of those within (`TABLE["dock"].append(...)`), makes its value unknown.
`Kept.as_attribute` asks the same of an attribute, whatever object it is read of.

Method: each read is followed outwards through subscripts, `get` and loops, counting how many containers lie
behind it; deeper than the innermost list or dict there is nothing that could be changed.

Limit: a list that has a second name which is bound in the same expression (`A = (B := [...])`).
"""

from __future__ import annotations

import ast
from collections.abc import Iterable

from patlint.source.index import Index
from patlint.source.names import Names
from patlint.source.scopes import Scope
from patlint.source.spelled import Listed
from patlint.source.values import Value

_DEEPEST = 8
_SAME = frozenset({"list", "tuple", "sorted", "reversed", "set", "iter"})
"""Functions that give the same items one by one, or a container of them."""
_PAIRING = frozenset({"enumerate", "zip"})
_COUNTING = frozenset({"len", "any", "all", "bool"})


class Kept:
    """The reads of one file."""

    def __init__(self, names: Names, index: Index) -> None:
        self.names = names
        self.index = index

    def by_name(self, name: str, scope: Scope, value: Value) -> bool:
        """`name`, read in `scope`, stands for `value` where nothing changes it."""
        deepest = _innermost(value)
        if deepest is None:
            return True
        owner = scope.find(name)
        if owner is None or (isinstance(value, (Listed, dict)) and not self.names.unchanged(name, scope)):
            return owner is None
        return deepest == 0 or self._all_keep(owner.reads(name), 0, deepest, 0)

    def as_attribute(self, name: str, value: Value) -> bool:
        deepest = _innermost(value)
        if deepest is None:
            return True
        if isinstance(value, (Listed, dict)) and not self.names.attribute_unchanged(name):
            return False
        uses = self.index.reads.get(name, ())
        return deepest == 0 or self._all_keep([(use.node, use.scope) for use in uses], 0, deepest, 0)

    def _all_keep(
        self, reads: Iterable[tuple[ast.expr, Scope]], level: int, deepest: int, depth: int
    ) -> bool:
        return all(self._keeps(read, scope, level, deepest, depth) for read, scope in reads)

    def _keeps(self, node: ast.expr, scope: Scope, level: int, deepest: int, depth: int) -> bool:
        """`node` is what lies behind `level` containers. Whether nothing is changed by this read of it."""
        parents = self.index.parents
        while level <= deepest:
            parent = parents.get(node)
            above = parents.get(parent) if parent is not None else None
            match parent:
                case ast.Subscript(ctx=ast.Load()) if parent.value is node:
                    level += not isinstance(parent.slice, ast.Slice)
                    node = parent
                case ast.Attribute(attr="get") if isinstance(above, ast.Call) and above.func is parent:
                    level += 1
                    node = above
                case ast.Attribute(attr="keys" | "index" | "count"):
                    return True
                case ast.Attribute(attr="values" | "copy") if isinstance(above, ast.Call):
                    node = above
                case ast.Attribute(attr="items") if isinstance(above, ast.Call):
                    level -= 1  # the pairs are one container more
                    node = above
                case ast.Call(func=ast.Attribute(attr="join" | "escape")) | ast.Compare():
                    return True
                case ast.Call(func=ast.Name(id=function)) if function in _COUNTING:
                    return True
                case ast.Call(func=ast.Name(id=function)) if function in _SAME:
                    node = parent
                case ast.Call(func=ast.Name(id=function)) if function in _PAIRING:
                    level -= 1
                    node = parent
                case ast.For() | ast.comprehension() if parent.iter is node and depth < _DEEPEST:
                    return self._head_keeps(parent, scope, level, deepest, depth)
                case _:
                    return False
        return True

    def _head_keeps(
        self, loop: ast.For | ast.comprehension, scope: Scope, level: int, deepest: int, depth: int
    ) -> bool:
        inner = self.names.comprehension_scope(loop, scope) if isinstance(loop, ast.comprehension) else scope
        stack = [(loop.target, level + 1)]
        while stack:
            target, at = stack.pop()
            if at > deepest:
                continue
            if isinstance(target, (ast.Tuple, ast.List)):
                stack += [(each, at + 1) for each in target.elts]
                continue
            owner = inner.find(target.id) if isinstance(target, ast.Name) else None
            if owner is None or not self._all_keep(owner.reads(target.id), at, deepest, depth + 1):  # type: ignore[attr-defined]
                return False
        return True


def _innermost(value: Value) -> int | None:
    """Behind how many containers the innermost list or dict lies; None where there is none."""
    stack: list[tuple[Value, int]] = [(value, 0)]
    found: int | None = None
    while stack:
        each, level = stack.pop()
        if isinstance(each, (Listed, dict)):
            found = level if found is None else max(found, level)
        if isinstance(each, dict):
            stack += [(inner, level + 1) for inner in each.values()]
        elif isinstance(each, tuple):
            stack += [(inner, level + 1) for inner in each if isinstance(inner, (tuple, dict))]
    return found
