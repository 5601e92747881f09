"""A name or expression that is one text or another: the ways of an `if`, each on its own.

`Branches.chosen(node, scope)` answers for a name that every way of one `if` statement (or some of them, after
a first assignment in front of it) binds to an expression of its own; `Branches.way(node)` for `a if c else b`.
Texts that hang on the same `if` go together (`choices`). With two conditions in one pattern it could not be
told which texts meet, so that is given up.

Limits: a condition that constants or the rows of a table decide leaves ways that nothing takes; where it tells
versions apart, one of its texts may be none for the Python that is meant; where the call stands under a
condition on the same names, not every text comes to it. All of these are given up. The `if` and the read must
stand in one block, or the read deeper in it, or in a function while the `if` is the module's.
"""

from __future__ import annotations

import ast
import re
from typing import TYPE_CHECKING

from patlint.source import reasons
from patlint.source.index import Index
from patlint.source.reaching import reaching_value
from patlint.source.reasons import Opaque
from patlint.source.rows import Row
from patlint.source.scopes import Binding, Scope

if TYPE_CHECKING:
    from patlint.source.constants import Constants

_VERSIONED = re.compile(r"version|\bpy\d|python|pypy|\bre\b|implementation|platform", re.IGNORECASE)


class Branches:
    """The conditions of one file."""

    def __init__(self, constants: Constants, index: Index) -> None:
        self.constants = constants
        self.index = index
        self._told: dict[tuple[Scope, str], tuple[ast.If, list[ast.expr | None]] | None] = {}

    def chosen(self, node: ast.Name, scope: Scope) -> Row | None:
        """The expression of the way that is taken now; None where the name has no such ways. Errors: `Opaque`."""
        owner = scope.find(node.id)
        if owner is None or owner.kind not in ("module", "function") or len(owner.bindings[node.id]) < 2:
            return None
        key = owner, node.id
        if key not in self._told:
            self._told[key] = self._ways(owner, node.id)
        told = self._told[key]
        if told is None:
            return None
        statement, values = told
        if owner is scope and reaching_value(node, scope, self.index) is not None:
            return None
        if not self._follows(node, statement, owner, scope):
            return None
        tests = [each.test for each in ast.walk(statement) if isinstance(each, ast.If)]
        number = self._take(statement, len(values), tests, node, scope)
        value = values[number]
        if value is None:
            raise Opaque(reasons.ABSENT)
        return Row(value, owner)

    def way(self, node: ast.IfExp, scope: Scope) -> ast.expr:
        """The part of a conditional expression that is taken now. Errors: `Opaque`."""
        return (node.body, node.orelse)[self._take(node, 2, [node.test], node, scope)]

    def _take(self, key: object, size: int, tests: list[ast.expr], read: ast.AST, scope: Scope) -> int:
        said = " ".join(ast.dump(test) for test in tests) + " ".join(self._meant(tests, scope))
        if _VERSIONED.search(said):
            raise Opaque(reasons.EXPRESSION)
        asked = {name for test in tests for name in _mentioned(test)}
        if any(asked & _mentioned(test) for test in self._around(read)):
            raise Opaque(reasons.EXPRESSION)
        if not self._is_open(tests, scope):
            raise Opaque(reasons.EXPRESSION)
        return self.constants.choices.take_alone(key, size, reasons.EXPRESSION)

    def _is_open(self, tests: list[ast.expr], scope: Scope) -> bool:
        """Whether conditions ask for something that comes from outside, and for nothing that goes by rows."""
        outside = False
        for name in (each for test in tests for each in ast.walk(test)):
            owner = scope.find(name.id) if isinstance(name, ast.Name) else None
            if owner is None:
                continue
            assert isinstance(name, ast.Name)
            bindings = owner.bindings[name.id]
            if any(binding.kind == "loop" for binding in bindings):
                return False
            if any(binding.kind == "parameter" for binding in bindings):
                helpers = self.constants.helpers
                if helpers.inside or name.id in helpers.given_names(owner):
                    return False
            outside |= not all(isinstance(binding.value, ast.Constant) for binding in bindings)
        return outside

    def _meant(self, tests: list[ast.expr], scope: Scope) -> list[str]:
        """What the names in conditions are bound to, as far as that is written down."""
        found: list[str] = []
        for test in tests:
            for name in ast.walk(test):
                owner = scope.find(name.id) if isinstance(name, ast.Name) else None
                for binding in owner.bindings[name.id] if owner is not None else ():  # type: ignore[attr-defined]
                    if binding.value is not None:
                        found.append(ast.dump(binding.value))
                    if binding.module is not None:
                        found.append(f"{binding.module} {binding.member}")
        return found

    def _around(self, read: ast.AST) -> list[ast.expr]:
        """The conditions under which a read is reached."""
        found: list[ast.expr] = []
        below, current = read, self.index.parents.get(read)
        while current is not None:
            if isinstance(current, (ast.If, ast.IfExp, ast.While)) and below is not current.test:
                found.append(current.test)
            elif isinstance(current, ast.BoolOp):
                found += [each for each in current.values if each is not below]
            elif isinstance(current, ast.Match):
                found.append(current.subject)
            below, current = current, self.index.parents.get(current)
        return found

    def _ways(self, owner: Scope, name: str) -> tuple[ast.If, list[ast.expr | None]] | None:
        bindings = owner.bindings[name]
        for each in bindings:
            plain = isinstance(each.node, (ast.Assign, ast.AnnAssign)) and each.value is not None
            if each.kind != "value" or not plain or each.scope is not owner:
                return None
        if owner.kind == "module" and (self.index.dynamic or self.index.star_lines):
            return None
        inside: dict[ast.AST, ast.If] = {}
        for each in bindings:
            top = self._top(each.node)
            if top is not None:
                inside[each.node] = top
        statements = set(inside.values())
        first = [each for each in bindings if each.node not in inside]
        if len(statements) != 1 or len(first) > 1:
            return None
        (statement,) = statements
        default = first[0] if first else None
        if default is not None and not self._goes_before(default, statement):
            return None
        values: list[ast.expr | None] = []
        for block in _blocks(statement):
            own = [each for each in bindings if any(each.node is line for line in block)]
            if len(own) > 1:
                return None
            value = own[0].value if own else default.value if default is not None else None
            values.append(None if block and isinstance(block[-1], (ast.Raise, ast.Return)) else value)
        if len({ast.dump(value) for value in values if value is not None}) < 2:
            return None
        bound = sum(
            any(each.node is line for line in block) for block in _blocks(statement) for each in bindings
        )
        if bound != len(inside):
            return None  # one of them deeper within a way
        return statement, values

    def _top(self, node: ast.AST) -> ast.If | None:
        """The outermost of the `if`s, one in the other's `elif`, that a statement is a way of."""
        parent = self.index.parents.get(node)
        if not isinstance(parent, ast.If):
            return None
        while True:
            above = self.index.parents.get(parent)
            if not (isinstance(above, ast.If) and above.orelse == [parent]):
                return parent
            parent = above

    def _goes_before(self, default: Binding, statement: ast.If) -> bool:
        """The first assignment stands in the block of the `if`, before it."""
        above = self.index.parents.get(statement)
        if self.index.parents.get(default.node) is not above:
            return False
        for name in ("body", "orelse", "finalbody"):
            block = getattr(above, name, None)
            if isinstance(block, list) and statement in block and default.node in block:
                return block.index(default.node) < block.index(statement)
        return False

    def _follows(self, read: ast.Name, statement: ast.If, owner: Scope, scope: Scope) -> bool:
        """The read comes after the whole `if`."""
        above = self.index.parents.get(statement)
        below: ast.AST = read
        current = self.index.parents.get(read)
        while current is not None and current is not above:
            if current is statement:
                return False
            below, current = current, self.index.parents.get(current)
        if current is None:
            return False
        later = owner.kind == "module" and scope.function() is not None
        for name in ("body", "orelse", "finalbody"):
            block = getattr(above, name, None)
            if isinstance(block, list) and statement in block and below in block:
                return later or block.index(statement) < block.index(below)
        return False


def _blocks(statement: ast.If) -> list[list[ast.stmt]]:
    """The ways of an `if` with its `elif`s, the one without a block included."""
    found: list[list[ast.stmt]] = []
    while True:
        found.append(statement.body)
        if len(statement.orelse) == 1 and isinstance(statement.orelse[0], ast.If):
            statement = statement.orelse[0]
            continue
        found.append(statement.orelse)
        return found


def _mentioned(node: ast.AST) -> set[str]:
    names = {each.id for each in ast.walk(node) if isinstance(each, ast.Name)}
    return names | {each.attr for each in ast.walk(node) if isinstance(each, ast.Attribute)}
