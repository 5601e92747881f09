"""A compiled pattern -> its uses in the same file, and whether these are all that there can be.

`Follower.follow(call, scope, pattern)` begins at the expression that makes the pattern object and goes with
the value: through methods called on it at once, names, attributes of `self` and of the class, and bound
methods kept under a name. Where it goes where it cannot be followed, or where it is bound to a name that
other files may use, the uses that were found are not all.

A name that begins with `_` is taken for private to its file, unless the file also spells it in a string.
"""

from __future__ import annotations

import ast
import re
from dataclasses import dataclass, field
from typing import cast

from patlint.source.constants import Constants
from patlint.source.engine import METHODS, Engine
from patlint.source.held import Held, Way, enclose, flow, is_fresh, put, taken
from patlint.source.index import Index
from patlint.source.places import Text
from patlint.source.reaching import reached_reads
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.sinks_calls import SinkReader
from patlint.source.sites import Function, Use
from patlint.source.usage import Uses

_MAKERS = frozenset({"match", "fullmatch", "search", "findall", "finditer", "split", "sub", "subn"})


_DEEPEST = 10
"""Classes derived from each other in one file."""


@dataclass(slots=True)
class Followed:
    """What was found: the uses, whether they are all, the first name that the pattern is bound to."""

    pattern: str | bytes
    uses: list[Use] = field(default_factory=list)
    seen: bool = True
    name: str | None = None
    embedded: bool = False
    """A library that takes it may read its text."""
    visited: set[tuple[Scope, str, Way]] = field(default_factory=set)


class Follower:
    """Follows the compiled patterns of one file."""

    def __init__(
        self,
        index: Index,
        text: Text,
        source: str,
        engine: Engine,
        constants: Constants,
        uses: Uses,
        sinks: SinkReader,
    ) -> None:
        self.index = index
        self.text = text
        self.source = source
        self.engine = engine
        self.names = constants.names
        self.helpers = constants.helpers
        self.choices = constants.choices
        self.uses = uses
        self.sinks = sinks
        self.leads_back = re.search(r"\.re\b", self.source) is not None
        """`found.re` is the pattern of a match: where it is asked for, a pattern has uses that are not seen."""

    def follow(self, call: ast.Call, scope: Scope, pattern: str | bytes, way: Way = None) -> Followed:
        """`call` makes the pattern object, whose text is `pattern`, or a container that holds it."""
        found = Followed(pattern)
        self.flow(call, scope, way, found)
        return found

    def flow(self, node: ast.expr, scope: Scope, method: Way, found: Followed) -> None:
        """`node` is the pattern object or, with `method`, that method of it, or a container of these."""
        parent = self.index.parents.get(node)
        if isinstance(method, Held) and flow(self, node, scope, method, found):
            return
        match parent:
            case ast.Attribute() if method is None:
                if parent.attr in METHODS and isinstance(parent.ctx, ast.Load):
                    self.flow(parent, scope, parent.attr, found)
                elif parent.attr != "flags":
                    found.seen = False
            case ast.Call() if isinstance(method, str) and parent.func is node:
                function = cast(Function, method)
                found.uses.append(self.uses.call(parent, scope, function, True, found.pattern))
            case ast.Call() if not isinstance(method, Held):
                self._argument(node, parent, scope, method, found)
            case ast.keyword() if method is None:
                call = self.index.parents.get(parent)
                if not (isinstance(call, ast.Call) and self._to_library(node, call, scope, found)):
                    found.seen = False
            case ast.Assign() if parent.value is node:
                for target in parent.targets:
                    self.into_target(target, parent, scope, method, found)
            case ast.AnnAssign() if parent.value is node:
                self.into_target(parent.target, parent, scope, method, found)
            case ast.NamedExpr():
                self.into_target(parent.target, parent, scope, method, found)
                self.flow(parent, scope, method, found)
            case ast.Expr() | ast.If() | ast.While() | ast.UnaryOp(op=ast.Not()):
                pass
            case ast.Compare(ops=[ast.Is() | ast.IsNot()]):
                pass
            case ast.Tuple() if self._parallel(node, parent, scope, method, found):
                pass
            case ast.Return() | ast.Lambda():
                self._returned(scope, method, found)
            case _:
                if parent is None or not enclose(self, node, parent, scope, method, found):
                    found.seen = False

    def _returned(self, scope: Scope, method: Way, found: Followed) -> None:
        """The function around gives the value back to its callers: to that one alone whose text is meant."""
        owner = scope.function()
        if (
            owner is None
            or not isinstance(owner.node, ast.FunctionDef)
            or (owner, "return", method) in found.visited
        ):
            found.seen = False
            return
        found.visited.add((owner, "return", method))
        taken = self.helpers.taken(owner.node)
        calls = self.helpers.calls(owner.node, owner)
        if taken is None and not calls.all:
            found.seen = False
        for call, outside in calls.seen if taken is None else [taken]:
            self.flow(call, outside, method, found)

    def _argument(self, node: ast.expr, call: ast.Call, scope: Scope, method: Way, found: Followed) -> None:
        if method is None:
            denoted = self._denotes(call.func, scope)
            name = denoted.removeprefix("re.") if denoted else ""
            if name in _MAKERS and call.args and call.args[0] is node:
                use = self.uses.call(call, scope, cast(Function, name), False, found.pattern)
                found.uses.append(use)
                return
            if self._to_library(node, call, scope, found):
                return
            match call:
                case ast.Call(func=ast.Attribute(attr="append" | "add") as adding, args=[_], keywords=[]):
                    if is_fresh(self, adding.value, scope, "list"):
                        self.into_target(adding.value, call, scope, put("each", method), found)
                        return
        elif isinstance(call.func, ast.Name) and call.args and call.args[0] is node:
            above = self.index.parents.get(call)
            tested = call.func.id == "filter" or (
                call.func.id == "map"
                and isinstance(above, ast.Call)
                and isinstance(above.func, ast.Name)
                and above.func.id in ("any", "all")
            )
            if tested and method in ("match", "fullmatch", "search"):
                found.uses.append(self.uses.tested_by(node, cast(Function, method), "truth"))
                return
        found.seen = False

    def _to_library(self, node: ast.expr, call: ast.Call, scope: Scope, found: Followed) -> bool:
        """Whether the pattern object `node` is handed to a function that is known."""
        taken = self.sinks.use_of(call, node, scope)
        if taken is None:
            return False
        use, alone = taken
        found.uses += [use] if use is not None else []
        found.embedded |= use is None
        found.seen &= alone
        return True

    def _denotes(self, node: ast.expr, scope: Scope) -> str | None:
        try:
            return self.engine.denotes(node, scope)
        except Opaque:
            return None

    def _parallel(
        self, node: ast.expr, parent: ast.Tuple, scope: Scope, method: Way, found: Followed
    ) -> bool:
        """`a, b = re.compile(…), re.compile(…)`."""
        above = self.index.parents.get(parent)
        if isinstance(above, ast.Assign) and above.value is parent and len(above.targets) == 1:
            targets = above.targets[0]
            if isinstance(targets, ast.Tuple) and len(targets.elts) == len(parent.elts):
                self.into_target(targets.elts[parent.elts.index(node)], above, scope, method, found)
                return True
        return False

    def into_target(
        self, target: ast.expr, statement: ast.AST, scope: Scope, method: Way, found: Followed
    ) -> None:
        match target:
            case ast.Name():
                found.name = found.name or target.id
                owner = (
                    scope if scope.kind == "class" and target.id in scope.bindings else scope.find(target.id)
                )
                if owner is None:
                    found.seen = False
                elif owner.kind == "class":
                    self._attributes(owner, target.id, method, found)
                else:
                    self._name(owner, target.id, statement, method, found)
            case ast.Attribute():
                found.name = found.name or target.attr
                owner = self.names.class_of(target.value, scope)
                if owner is None:
                    found.seen = False
                else:
                    self._attributes(owner, target.attr, method, found)
            case ast.Tuple() if isinstance(method, Held) and isinstance(method.path[0], int):
                place = method.path[0]
                if place < len(target.elts) and not any(
                    isinstance(each, ast.Starred) for each in target.elts
                ):
                    self.into_target(target.elts[place], statement, scope, taken(method), found)
                else:
                    found.seen = False
            case ast.Subscript() if is_fresh(self, target.value, scope, "dict"):
                self.into_target(target.value, statement, scope, put("value", method), found)
            case _:
                found.seen = False

    def _name(self, owner: Scope, name: str, statement: ast.AST, method: Way, found: Followed) -> None:
        if (owner, name, method) in found.visited:
            return
        found.visited.add((owner, name, method))
        if owner.kind == "module" and (self.index.dynamic or not self.names.is_private(name)):
            found.seen = False
        others = [binding for binding in owner.bindings.get(name, ()) if not binding.is_none]
        reached = None
        if len(others) > 1:
            if isinstance(statement, ast.stmt) and owner.kind == "function":
                reached = reached_reads(name, statement, owner, self.index)
            if reached is None:
                found.seen = False
        loops = self._loops(statement) if not isinstance(method, Held) else []
        for read, scope in owner.reads(name):
            if not all(self._within(read, loop) for loop in loops):
                found.seen = False  # after the loop, what the last row gave
            elif reached is None or read in reached:
                self.flow(read, scope, method, found)

    def _loops(self, statement: ast.AST) -> list[ast.For]:
        """The loops around a statement whose row is taken now."""
        found: list[ast.For] = []
        current = self.index.parents.get(statement)
        while current is not None:
            if isinstance(current, ast.For) and self.choices.taken(current) is not None:
                found.append(current)
            current = self.index.parents.get(current)
        return found

    def _within(self, node: ast.AST, outer: ast.AST) -> bool:
        current: ast.AST | None = node
        while current is not None and current is not outer:
            current = self.index.parents.get(current)
        return current is outer

    def _attributes(self, owner: Scope, name: str, method: Way, found: Followed) -> None:
        """A name of the class or of its objects: read by name in its body, by attribute anywhere."""
        if (owner, name, method) in found.visited:
            return
        found.visited.add((owner, name, method))
        stores = [
            use for use in self.index.stores.get(name, ()) if self._may_be(use.node, use.scope, owner, name)
        ]
        values = [use.value for use in stores if not _is_none(use.value)]
        values += [b.value for b in owner.bindings.get(name, ()) if not b.is_none]
        if not self.names.is_private(name) or len(values) > 1:
            found.seen = False
        for read, scope in owner.reads(name):
            self.flow(read, scope, method, found)
        for use in self.index.reads.get(name, ()):
            if self._is_of(self.names.class_of(use.node.value, use.scope), owner, name, 0):
                self.flow(use.node, use.scope, method, found)
            elif self._may_be(use.node, use.scope, owner, name):
                found.seen = False

    def _is_of(self, other: Scope | None, owner: Scope, name: str, depth: int) -> bool:
        """Whether the class `other` has its `name` from `owner`, which it is or is derived from."""
        if other is None or other is owner:
            return other is owner
        if depth > _DEEPEST or name in other.bindings or not isinstance(other.node, ast.ClassDef):
            return False
        bases = [self.names.class_of(base, other.parent or other) for base in other.node.bases]
        return any(self._is_of(base, owner, name, depth + 1) for base in bases)

    def _may_be(self, node: ast.Attribute, scope: Scope, owner: Scope, name: str) -> bool:
        """Whether an attribute may be that of `owner`: not where it is another class's own."""
        other = self.names.class_of(node.value, scope)
        if other is None or other is owner:
            return True
        if name in other.bindings:
            return False
        return not any(
            self.names.class_of(use.node.value, use.scope) is other for use in self.index.stores.get(name, ())
        )


def _is_none(node: ast.expr | None) -> bool:
    return isinstance(node, ast.Constant) and node.value is None
