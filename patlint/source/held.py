"""A pattern object within lists, tuples and dicts -> where it comes out again.

`Held(method, path)` says what an expression holds: the pattern object (or a bound method of it) lies in its
value at `path`, a step for each container around: "each" for a place that is not told (an element of a list,
a round of a loop), a number for a place in a tuple, "value" for a value of a dict. `flow` goes on from an
expression to whatever takes the container: names, loops, subscripts, `enumerate`, `.items()`, and back to the
pattern object alone where the last step is undone.

Limits: a container that is handed to a function, returned or unpacked in an unknown order is lost, and with it the
claim that all uses are seen. A use under a condition on the row itself (`conditions`) may be another row's.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, TypeAlias

from patlint.source.conditions import depends_on_row
from patlint.source.scopes import Binding, Scope

if TYPE_CHECKING:
    from patlint.source.follow import Followed, Follower

Step: TypeAlias = int | Literal["each", "value"]
_SAME = frozenset({"list", "tuple", "sorted", "reversed", "set", "frozenset", "iter"})
_ADDING = frozenset(
    {"append", "add", "extend", "insert", "index", "count", "sort", "reverse", "update", "keys"}
)
_TAKING = frozenset({"pop", "get", "setdefault"})
_DEEPEST = 6


@dataclass(frozen=True, slots=True)
class Held:
    method: str | None
    path: tuple[Step, ...]


Way: TypeAlias = str | None | Held
"""What an expression is: the pattern object (None), a method of it, or a container of one of these."""


def put(step: Step, way: Way) -> Held:
    return Held(way.method, (step, *way.path)) if isinstance(way, Held) else Held(way, (step,))


def taken(way: Held) -> Way:
    """What lies at the first step."""
    return Held(way.method, way.path[1:]) if len(way.path) > 1 else way.method


def enclose(
    follower: Follower, node: ast.expr, parent: ast.AST, scope: Scope, way: Way, found: Followed
) -> bool:
    """Goes on where `node` is put into a container; False where `parent` is none."""
    if isinstance(way, Held) and len(way.path) >= _DEEPEST:
        return False
    match parent:
        case ast.Tuple():
            place = parent.elts.index(node)
            if any(isinstance(each, ast.Starred) for each in parent.elts[:place]):
                return False  # it lies further on
            follower.flow(parent, scope, put(place, way), found)
        case ast.List() | ast.Set():
            follower.flow(parent, scope, put("each", way), found)
        case ast.Dict() if any(node is value for value in parent.values):
            follower.flow(parent, scope, put("value", way), found)
        case ast.ListComp() | ast.SetComp() | ast.GeneratorExp() if parent.elt is node and scope.parent:
            follower.flow(parent, scope.parent, put("each", way), found)
        case ast.DictComp() if parent.value is node and scope.parent:
            follower.flow(parent, scope.parent, put("value", way), found)
        case _:
            return False
    return True


def flow(follower: Follower, node: ast.expr, scope: Scope, way: Held, found: Followed) -> bool:
    """Goes on from a container; False where it is lost."""
    parent = follower.index.parents.get(node)
    first = way.path[0]
    match parent:
        case ast.For() if parent.iter is node:
            return first == "value" or _into_loop(follower, parent, parent.target, scope, taken(way), found)
        case ast.comprehension() if parent.iter is node:
            inner = follower.names.comprehension_scope(parent, scope)
            return first == "value" or _into_loop(follower, parent, parent.target, inner, taken(way), found)
        case ast.Subscript(value=value, ctx=ast.Load()) if value is node:
            return _by_index(follower, parent, scope, way, found)
        case ast.Subscript(value=value) if value is node:
            return True  # another one is put in
        case ast.Attribute(value=value) if value is node:
            return _by_method(follower, parent, scope, way, found)
        case ast.Call(func=ast.Name(id=name)) if scope.find(name) is None and node in parent.args:
            return _through_call(follower, node, parent, name, scope, way, found)
        case ast.BinOp(op=ast.Add()):
            follower.flow(parent, scope, put("each", taken(way)), found)
            return True
        case ast.Compare() | ast.Expr() | ast.If() | ast.While() | ast.UnaryOp(op=ast.Not()):
            return True
        case ast.AugAssign(target=ast.Name()) if parent.value is node:
            follower.into_target(parent.target, parent, scope, put("each", taken(way)), found)
            return True
        case _:
            return False


def _by_index(follower: Follower, node: ast.Subscript, scope: Scope, way: Held, found: Followed) -> bool:
    first = way.path[0]
    match node.slice:
        case ast.Slice():
            follower.flow(node, scope, put("each", taken(way)), found)
        case ast.Constant(value=int() as index) if isinstance(first, int) and index != first:
            pass  # another place
        case _:
            follower.flow(node, scope, taken(way), found)
    return True


def _by_method(follower: Follower, node: ast.Attribute, scope: Scope, way: Held, found: Followed) -> bool:
    call = follower.index.parents.get(node)
    if not isinstance(call, ast.Call) or call.func is not node:
        return False
    if node.attr in _ADDING:
        return True
    if way.path[0] == "value" and node.attr in ("items", "values"):
        inner = taken(way)
        follower.flow(call, scope, put("each", put(1, inner) if node.attr == "items" else inner), found)
        return True
    if node.attr in _TAKING:
        follower.flow(call, scope, taken(way), found)
        return True
    if node.attr == "copy":
        follower.flow(call, scope, way, found)
        return True
    return False


def _through_call(
    follower: Follower, node: ast.expr, call: ast.Call, name: str, scope: Scope, way: Held, found: Followed
) -> bool:
    if name == "len":
        return True
    if way.path[0] == "value":
        return name in _SAME or name == "enumerate"
    if name in _SAME and call.args[0] is node:
        follower.flow(call, scope, put("each", taken(way)), found)
    elif name == "enumerate" and call.args[0] is node:
        follower.flow(call, scope, put("each", put(1, taken(way))), found)
    elif name == "zip":
        follower.flow(call, scope, put("each", put(call.args.index(node), taken(way))), found)
    else:
        return False
    return True


def _into_loop(
    follower: Follower,
    loop: ast.For | ast.comprehension,
    target: ast.expr,
    scope: Scope,
    way: Way,
    found: Followed,
) -> bool:
    """The names in the head of a loop get what lies in the container."""
    if isinstance(target, (ast.Tuple, ast.List)):
        if not isinstance(way, Held) or any(isinstance(each, ast.Starred) for each in target.elts):
            return False
        first = way.path[0]
        if not isinstance(first, int) or first >= len(target.elts):
            return False
        return _into_loop(follower, loop, target.elts[first], scope, taken(way), found)
    if not isinstance(target, ast.Name):
        return False
    owner = scope.find(target.id)
    if owner is None or owner.kind == "class" or (owner.kind == "module" and follower.index.dynamic):
        return False
    parents = follower.index.parents
    around = parents[loop] if isinstance(loop, ast.comprehension) else loop
    complete = not any(
        each.node is not target and _within(each.node, around, parents) for each in owner.bindings[target.id]
    )
    for read, inner in owner.reads(target.id):
        lines = loop.body if isinstance(loop, ast.For) else [around]
        if not any(_within(read, line, parents) for line in lines):
            complete = complete and _is_elsewhere(read, owner.bindings[target.id], target, parents)
        elif depends_on_row(read, around, follower.index, owner):
            complete = False
        else:
            follower.flow(read, inner, way, found)
    return complete


def _is_elsewhere(
    read: ast.AST, bindings: list[Binding], target: ast.Name, parents: dict[ast.AST, ast.AST]
) -> bool:
    """Whether a read of a loop's variable outside of the loop stands in another loop that binds it."""
    for each in bindings:
        current: ast.AST | None = each.node if each.node is not target and each.kind == "loop" else None
        while current is not None and not isinstance(current, (ast.For, ast.stmt)):
            current = parents.get(current)
        if isinstance(current, ast.For) and any(_within(read, line, parents) for line in current.body):
            return True
    return False


def is_fresh(follower: Follower, name: ast.expr, scope: Scope, kind: Literal["list", "dict"]) -> bool:
    """Whether a name stands for lists and sets, or for dicts, that are made in this file alone."""
    owner = scope.find(name.id) if isinstance(name, ast.Name) else None
    if owner is None or owner.kind == "class":
        return False
    displays = (ast.Dict, ast.DictComp) if kind == "dict" else (ast.List, ast.Set, ast.ListComp, ast.SetComp)
    makers = ("dict",) if kind == "dict" else ("list", "set")
    for binding in owner.bindings[name.id]:  # type: ignore[attr-defined]
        match binding.value:
            case ast.Call(func=ast.Name(id=maker)) if maker in makers and scope.find(maker) is None:
                pass
            case value if not isinstance(value, displays):
                return False
    return True


def _within(node: ast.AST, outer: ast.AST, parents: dict[ast.AST, ast.AST]) -> bool:
    current: ast.AST | None = node
    while current is not None and current is not outer:
        current = parents.get(current)
    return current is outer
