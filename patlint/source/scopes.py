"""Scopes and bindings: what a name may stand for, by Python's own rules of visibility.

A `Scope` collects, while the file is walked, every binding of a name and every place where it is read.
`Scope.find` then says which scope a name belongs to: classes are not seen from the functions in them,
`global` and `nonlocal` are followed, a walrus in a comprehension binds outside of it.

Nothing here knows the order in which code runs: a name has all of its bindings at once.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal, TypeAlias

BindingKind: TypeAlias = Literal[
    "value", "import", "parameter", "loop", "augmented", "deleted", "definition", "unpacked"
]
ScopeKind: TypeAlias = Literal["module", "class", "function", "comprehension"]


@dataclass(frozen=True, slots=True)
class Binding:
    """One way in which a name gets a value.

    `value` (kind "value") is the expression it gets, read in `scope`; `module` and `member` (kind "import")
    are what is imported, `member` None for the module itself.
    """

    kind: BindingKind
    node: ast.AST
    scope: Scope
    value: ast.expr | None = None
    module: str | None = None
    member: str | None = None

    @property
    def line(self) -> int:
        return getattr(self.node, "lineno", 0)

    @property
    def is_none(self) -> bool:
        """The name only gets None here: a place holder."""
        return isinstance(self.value, ast.Constant) and self.value.value is None


class Scope:
    """The names of one module, class, function or comprehension."""

    __slots__ = (
        "kind", "node", "parent", "children", "bindings", "loads", "globals", "nonlocals", "stars", "pending"
    )  # fmt: skip

    def __init__(self, kind: ScopeKind, node: ast.AST, parent: Scope | None) -> None:
        self.kind = kind
        self.node = node
        self.parent = parent
        self.children: list[Scope] = []
        self.bindings: dict[str, list[Binding]] = {}
        self.loads: dict[str, list[ast.Name]] = {}
        self.globals: set[str] = set()
        self.nonlocals: set[str] = set()
        self.stars: list[tuple[int, str]] = []
        self.pending: list[ast.AST] = []
        if parent is not None:
            parent.children.append(self)

    def __repr__(self) -> str:
        return f"Scope({self.kind}, line {getattr(self.node, 'lineno', 0)})"

    def bind(self, name: str, binding: Binding) -> None:
        self.bindings.setdefault(name, []).append(binding)

    def declare(self, name: str) -> None:
        """The name belongs to this scope, without a value so far."""
        self.bindings.setdefault(name, [])

    def settle(self) -> None:
        """Hands the bindings of global and nonlocal names to the scopes that own them."""
        for name in self.globals & self.bindings.keys():
            moved = self.bindings.pop(name)
            self.module.bindings.setdefault(name, []).extend(moved)
        for name in self.nonlocals & self.bindings.keys():
            moved = self.bindings.pop(name)
            owner = self.parent.find(name, inside=True) if self.parent is not None else None
            if owner is not None:
                owner.bindings.setdefault(name, []).extend(moved)

    @property
    def module(self) -> Scope:
        scope = self
        while scope.parent is not None:
            scope = scope.parent
        return scope

    def find(self, name: str, inside: bool = False) -> Scope | None:
        """The scope that `name`, read here, belongs to; `inside`: read from a function within this scope."""
        scope: Scope | None = self
        while scope is not None:
            if not (scope.kind == "class" and inside):
                if name in scope.globals:
                    return scope.module if name in scope.module.bindings else None
                if name in scope.bindings and name not in scope.nonlocals:
                    return scope
            inside = True
            scope = scope.parent
        return None

    def reads(self, name: str) -> Iterator[tuple[ast.Name, Scope]]:
        """Every read of this scope's own `name`, here and in the scopes within."""
        stack = [self]
        while stack:
            scope = stack.pop()
            for node in scope.loads.get(name, ()):
                if scope.find(name) is self:
                    yield node, scope
            stack.extend(scope.children)

    def function(self) -> Scope | None:
        """The innermost function around, this scope included; None at module and class level."""
        scope: Scope | None = self
        while scope is not None and scope.kind != "function":
            if scope.kind == "class":
                return None
            scope = scope.parent
        return scope


def bind_target(target: ast.expr, value: ast.expr, node: ast.AST, scope: Scope) -> None:
    """Binds the names of an assignment's target, in step with the parts of a written-out tuple."""
    match target:
        case ast.Name():
            scope.bind(target.id, Binding("value", node, scope, value))
        case ast.Tuple(elts=targets) | ast.List(elts=targets):
            starred = any(isinstance(item, ast.Starred) for item in targets)
            if (
                isinstance(value, (ast.Tuple, ast.List))
                and len(value.elts) == len(targets)
                and not starred
                and not any(isinstance(item, ast.Starred) for item in value.elts)
            ):
                for inner, part in zip(targets, value.elts, strict=True):
                    bind_target(inner, part, node, scope)
            else:
                for inner in targets:
                    _bind_unpacked(inner, node, scope)


def _bind_unpacked(target: ast.expr, node: ast.AST, scope: Scope) -> None:
    match target:
        case ast.Name():
            scope.bind(target.id, Binding("unpacked", node, scope))
        case ast.Starred():
            _bind_unpacked(target.value, node, scope)
        case ast.Tuple() | ast.List():
            for item in target.elts:
                _bind_unpacked(item, node, scope)
