"""Whether a program takes the empty texts out of what findall or finditer gives.

`drops_empty(call, index)` knows the usual ways: `[x for x in re.findall(...) if x]`, the same with `x.group()` of
finditer, a loop that begins with `if not x: continue` or is nothing but `if x:`, and `filter(None, ...)`.

Limits: only where the outcome is used on the spot; a list that is kept under a name is not followed.
"""

from __future__ import annotations

import ast

from patlint.source.index import Index

_PASSING = frozenset({"list", "tuple", "iter", "set", "sorted"})
"""Functions that hand on the same items."""


def drops_empty(call: ast.Call, index: Index) -> bool:
    """`call` gives a list of texts or an iterator of matches."""
    node: ast.expr = call
    parent = index.parents.get(node)
    while isinstance(parent, ast.Call) and isinstance(parent.func, ast.Name) and parent.func.id in _PASSING:
        node, parent = parent, index.parents.get(parent)
    match parent:
        case ast.Call(func=ast.Name(id="filter"), args=[ast.Constant(value=None), given]):
            return given is node
        case ast.Call(func=ast.Name(id="filter"), args=[ast.Name(id="bool" | "len"), given]):
            return given is node
        case ast.comprehension(target=ast.Name(id=name)) if parent.iter is node:
            return any(_asks(test, name) for test in parent.ifs)
        case ast.For(target=ast.Name(id=name), body=[ast.If() as first, *rest]) if parent.iter is node:
            if _asks_not(first.test, name):
                return isinstance(first.body[-1], ast.Continue)
            return not rest and not first.orelse and _asks(first.test, name)
        case _:
            return False


def _asks(test: ast.expr, name: str) -> bool:
    """Whether `test` fails where what `name` stands for is empty."""
    match test:
        case ast.BoolOp(op=ast.And(), values=values):
            return any(_asks(value, name) for value in values)
        case ast.Compare(left=left, ops=[ast.NotEq()], comparators=[ast.Constant(value="" | b"")]):
            return _is_whole(left, name)
        case ast.Call(func=ast.Name(id="len" | "bool"), args=[inner]):
            return _is_whole(inner, name)
        case ast.Call(func=ast.Attribute(value=inner, attr="strip" | "lstrip" | "rstrip")):
            return _is_whole(inner, name)
        case _:
            return _is_whole(test, name)


def _asks_not(test: ast.expr, name: str) -> bool:
    match test:
        case ast.UnaryOp(op=ast.Not(), operand=inner):
            return _asks(inner, name)
        case ast.Compare(left=left, ops=[ast.Eq()], comparators=[ast.Constant(value="" | b"")]):
            return _is_whole(left, name)
        case _:
            return False


def _is_whole(node: ast.expr, name: str) -> bool:
    """`x` itself, or the whole text of a match `x`."""
    match node:
        case ast.Name(id=found):
            return found == name
        case ast.Call(
            func=ast.Attribute(value=ast.Name(id=found), attr="group"), args=arguments, keywords=[]
        ):
            whole = not arguments or (len(arguments) == 1 and _is_zero(arguments[0]))
            return found == name and whole
        case ast.Subscript(value=ast.Name(id=found), slice=index):
            return found == name and _is_zero(index)
        case _:
            return False


def _is_zero(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and type(node.value) is int and node.value == 0
