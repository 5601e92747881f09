"""Loops over written-out tables: what a loop variable stands for, row by row.

`Rows.chosen(read, scope)` answers for a name that is read in a loop or a comprehension: the part of the
table's row that the name gets. A table is a display in the loop's head or a constant that nothing changes;
`enumerate`, `zip`, `sorted`, `.items()` and the like are looked through. Rows are not evaluated before they
are asked for, since most tables hold more than texts.

Limits: a name that something else in the loop binds, a read in a function within the loop, and a read that
stands under a condition on the row itself (`conditions`) are not followed.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

from patlint.source import reasons
from patlint.source.conditions import depends_on_row
from patlint.source.index import Index
from patlint.source.names import MUTABLE, path_to
from patlint.source.reasons import Opaque
from patlint.source.scopes import Binding, Scope
from patlint.source.spelled import Spelled
from patlint.source.values import Environment, Value

if TYPE_CHECKING:
    from patlint.source.constants import Constants

_SAME_ROWS = frozenset({"list", "tuple", "set", "frozenset", "sorted", "reversed", "iter"})
_DISORDERED = frozenset({"set", "frozenset", "sorted", "reversed"})
_MOST_ROWS = 3_000
_DEEPEST = 12


@dataclass(frozen=True, slots=True)
class Row:
    """An expression of a table that is not evaluated yet, and where its names are read."""

    node: ast.expr
    scope: Scope
    env: Environment | None = None


@dataclass(frozen=True, slots=True)
class Ready:
    """A part of a row whose value is known without an expression of its own."""

    value: Value


@dataclass(frozen=True, slots=True)
class Pair:
    """What `enumerate`, `zip` and `.items()` put together."""

    parts: tuple[Item, ...]


Item: TypeAlias = Row | Ready | Pair


@dataclass(frozen=True, slots=True)
class Loop:
    """The loop that binds a name: its head, and where in each row the name's part stands."""

    node: ast.For | ast.comprehension
    scope: Scope
    """Where the head's names are read."""
    path: tuple[int, ...]


class Rows:
    """The loops of one file."""

    def __init__(self, constants: Constants, index: Index) -> None:
        self.constants = constants
        self.index = index
        self._loops: dict[ast.Name, Loop | None] = {}
        self._disordered = 0
        """How often rows were taken from something whose order is not that of the file."""
        self._tables: dict[ast.AST, list[Item]] = {}

    def chosen(self, read: ast.Name, scope: Scope) -> Item | None:
        """What `read` stands for in the row that is taken now; None where no table gives it.

        Errors: `Opaque` where the table cannot be told.
        """
        if read not in self._loops:
            self._loops[read] = loop_of(read, scope, self.index)
        loop = self._loops[read]
        if loop is None:
            return None
        choices = self.constants.choices
        table = self._tables.get(loop.node)
        if table is None:
            before = choices.consulted
            table = self.items(loop.node.iter, loop.scope)
            if choices.consulted == before:
                self._tables[loop.node] = table
        return self.part(table[choices.take(loop.node, len(table), reasons.LOOP_VARIABLE)], loop.path)

    def each(self, key: ast.AST, table: ast.expr, scope: Scope) -> tuple[Spelled, Row]:
        """The text of the row that is taken now, and where it stands. Errors: `Opaque`."""
        rows = self.items(table, scope)
        item = rows[self.constants.choices.take(key, len(rows), reasons.LOOP_VARIABLE)]
        value = self.value(item, 0)
        if not isinstance(value, Spelled):
            raise Opaque(reasons.NOT_TEXT)
        return value, item if isinstance(item, Row) else Row(table, scope)

    def value(self, item: Item, depth: int) -> Value:
        """Errors: `Opaque`."""
        match item:
            case Ready():
                return item.value
            case Pair():
                return tuple(self.value(part, depth) for part in item.parts)
            case Row(env=None):
                return self.constants.remembered(item.node, item.scope, depth)
            case Row():
                return self.constants.evaluate(item.node, item.scope, item.env, depth + 1)

    def part(self, item: Item, path: tuple[int, ...], depth: int = 0) -> Item:
        """The part of a row that a name in the loop's head gets. Errors: `Opaque`."""
        for number, index in enumerate(path):
            self.constants.step()
            match item:
                case Pair(parts=parts) if index < len(parts):
                    item = parts[index]
                case Ready(value=tuple() as values) if index < len(values):
                    item = Ready(values[index])
                case Row(node=ast.Tuple() | ast.List() as display) if index < len(display.elts):
                    if any(isinstance(each, ast.Starred) for each in display.elts):
                        raise Opaque(reasons.UNPACKED)
                    item = Row(display.elts[index], item.scope, item.env)
                case Row(node=ast.Name() | ast.Attribute()) if depth < _DEEPEST:
                    return self.part(self._named(item), path[number:], depth + 1)
                case _:
                    raise Opaque(reasons.UNPACKED)
        return item

    def _named(self, item: Row) -> Item:
        """What the name that `item` is stands for."""
        node = item.node
        assert isinstance(node, (ast.Name, ast.Attribute))
        if isinstance(node, ast.Name) and item.env and node.id in item.env:
            return Ready(item.env[node.id])
        chosen = self.constants.origin(node, item.scope)
        if chosen is not None:
            if isinstance(chosen, Row):
                self._check_unchanged(node, item.scope, chosen.node)
            return chosen
        definitions = self.constants.names.definitions(node, item.scope)
        if len(definitions) != 1:
            raise Opaque(reasons.REASSIGNED)
        expression, scope = definitions[0]
        self._check_unchanged(node, item.scope, expression)
        return Row(expression, scope)

    def _check_unchanged(self, node: ast.Name | ast.Attribute, scope: Scope, display: ast.expr) -> None:
        """Nothing changes the list or dict that `node` stands for, nor one within. Errors: `Opaque`."""
        names = self.constants.names
        mutable = isinstance(display, MUTABLE) or _gives_list(display)
        nested = any(isinstance(each, MUTABLE) for each in ast.walk(display) if each is not display)
        if not mutable and not nested:
            return
        if isinstance(node, ast.Attribute):
            if nested or not names.attribute_unchanged(node.attr):
                raise Opaque(reasons.CHANGED)
            return
        if mutable and not names.unchanged(node.id, scope):
            raise Opaque(reasons.CHANGED)
        if nested and not names.rows_unchanged(node.id, scope, display):
            raise Opaque(reasons.CHANGED)

    def items(
        self, node: ast.expr, scope: Scope, env: Environment | None = None, depth: int = 0
    ) -> list[Item]:
        """The rows of a table, in its order (that of `sorted` and of sets is not told). Errors: `Opaque`."""
        self.constants.step()
        if depth > _DEEPEST:
            raise Opaque(reasons.TOO_DEEP)
        found: list[Item] = []
        match node:
            case ast.Tuple() | ast.List() | ast.Set():
                self._disordered += isinstance(node, ast.Set)
                for each in node.elts:
                    if isinstance(each, ast.Starred):
                        found += self.items(each.value, scope, env, depth + 1)
                    else:
                        found.append(Row(each, scope, env))
            case ast.Dict():
                found = [Row(key, scope, env) for key, _ in self._entries(node)]
            case ast.Name() | ast.Attribute():
                found = self._inside(self._named(Row(node, scope, env)), depth)
            case ast.BinOp(op=ast.Add()):
                found = self.items(node.left, scope, env, depth + 1)
                found += self.items(node.right, scope, env, depth + 1)
            case ast.Call(func=ast.Attribute(attr="items" | "values" | "keys" as what), args=[], keywords=[]):
                found = self._of_dict(node.func.value, what, scope, env, depth)  # type: ignore[attr-defined]
            case ast.Call(func=ast.Name(id=name), args=[_, *_]) if scope.find(name) is None:
                found = self._looked_through(node, name, scope, env, depth)
            case _:
                found = self._inside(Ready(self.constants.evaluate(node, scope, env, depth)), depth)
        if len(found) > _MOST_ROWS:
            raise Opaque(reasons.TOO_MANY)
        return found

    def _inside(self, item: Item, depth: int) -> list[Item]:
        match item:
            case Row():
                return self.items(item.node, item.scope, item.env, depth + 1)
            case Pair():
                return list(item.parts)
            case Ready(value=tuple() as values):
                return [Ready(each) for each in values]
            case _:
                raise Opaque(reasons.LOOP_VARIABLE)

    def _looked_through(
        self, node: ast.Call, name: str, scope: Scope, env: Environment | None, depth: int
    ) -> list[Item]:
        if self.index.star_lines or any(isinstance(each, ast.Starred) for each in node.args):
            raise Opaque(reasons.LOOP_VARIABLE)
        self._disordered += name in _DISORDERED
        if name in _SAME_ROWS and len(node.args) == 1:
            return self.items(node.args[0], scope, env, depth + 1)
        if name == "enumerate" and len(node.args) <= 2:
            listed = self.items(node.args[0], scope, env, depth + 1)
            if len(node.args) == 1 and not node.keywords:
                return [Pair((Ready(number), each)) for number, each in enumerate(listed)]
        if name == "zip" and not node.keywords:
            columns = [self.items(each, scope, env, depth + 1) for each in node.args]
            return [Pair(tuple(parts)) for parts in zip(*columns, strict=False)]
        raise Opaque(reasons.LOOP_VARIABLE)

    def _of_dict(
        self, node: ast.expr, what: str, scope: Scope, env: Environment | None, depth: int
    ) -> list[Item]:
        item = self.display(Row(node, scope, env))
        match item:
            case Row(node=ast.Dict() as display):
                rows = [(Row(k, item.scope, item.env), Row(v, item.scope, item.env))
                            for k, v in self._entries(display)]  # fmt: skip
                if what == "items":
                    return [Pair(pair) for pair in rows]
                return [pair[what == "values"] for pair in rows]
        raise Opaque(reasons.LOOP_VARIABLE)

    def ordered(self, node: ast.expr, scope: Scope, env: Environment | None) -> list[Item]:
        """Like `items`, where their order counts. Errors: `Opaque`, also for what has no order of its own."""
        before = self._disordered
        found = self.items(node, scope, env)
        if self._disordered != before:
            raise Opaque(reasons.LOOP_VARIABLE)
        return found

    def display(self, item: Item) -> Item:
        """The expression that a name stands for, through names. Errors: `Opaque`."""
        for _ in range(_DEEPEST):
            if not (isinstance(item, Row) and isinstance(item.node, (ast.Name, ast.Attribute))):
                return item
            item = self._named(item)
        raise Opaque(reasons.TOO_DEEP)

    def _entries(self, node: ast.Dict) -> list[tuple[ast.expr, ast.expr]]:
        """Keys and values of a display, if no key can stand there twice."""
        entries: list[tuple[ast.expr, ast.expr]] = []
        constants: set[object] = set()
        for key, value in zip(node.keys, node.values, strict=True):
            if key is None:
                raise Opaque(reasons.ELEMENT)
            entries.append((key, value))
            if isinstance(key, ast.Constant):
                constants.add((key.value, isinstance(key.value, bytes)))
        if len(constants) != sum(isinstance(key, ast.Constant) for key, _ in entries):
            raise Opaque(reasons.ELEMENT)
        return entries


def loop_of(read: ast.Name, scope: Scope, index: Index) -> Loop | None:
    """The loop whose row `read` surely gets its value from, for every row; None where there is none."""
    owner = scope.find(read.id)
    if owner is None or owner.kind == "class":
        return None
    bindings = owner.bindings[read.id]
    if not any(binding.kind == "loop" for binding in bindings):
        return None
    inner: Scope | None = scope
    while inner is not owner:
        if inner is None or inner.kind != "comprehension":
            return None  # a function within the loop runs later
        inner = inner.parent
    if any(binding.scope is not owner for binding in bindings) or owner.kind == "module" and index.dynamic:
        return None
    if owner.kind == "comprehension":
        return _of_comprehension(read, owner, bindings, index)
    current: ast.AST | None = index.parents.get(read)
    below: ast.AST = read
    while current is not None and current is not owner.node:
        if isinstance(current, ast.For) and any(below is each for each in current.body):
            loop = _of_loop(read, current, owner, bindings, index)
            if loop is not None:
                return loop
            if any(_within(binding.node, current, index) for binding in bindings):
                return None
        below, current = current, index.parents.get(current)
    return None


def _of_loop(
    read: ast.Name, node: ast.For, owner: Scope, bindings: list[Binding], index: Index
) -> Loop | None:
    own = [binding for binding in bindings if _within(binding.node, node.target, index)]
    if len(own) != 1 or own[0].kind != "loop":
        return None
    if any(_within(binding.node, node, index) for binding in bindings if binding is not own[0]):
        return None
    path = path_to(own[0].node, node.target)
    if path is None or depends_on_row(read, node, index, owner):
        return None
    return Loop(node, owner, path)


def _of_comprehension(read: ast.Name, owner: Scope, bindings: list[Binding], index: Index) -> Loop | None:
    if len(bindings) != 1:
        return None
    node = owner.node
    assert isinstance(node, (ast.ListComp, ast.SetComp, ast.DictComp, ast.GeneratorExp))
    for number, generator in enumerate(node.generators):
        path = path_to(bindings[0].node, generator.target)
        if path is None:
            continue
        if generator.is_async or depends_on_row(read, node, index, owner):
            return None
        scope = owner if number else owner.parent
        return Loop(generator, scope, path) if scope is not None else None
    return None


def _gives_list(node: ast.expr) -> bool:
    """Whether a call may give a list or dict that can be changed afterwards."""
    if not isinstance(node, ast.Call):
        return False
    return not (isinstance(node.func, ast.Name) and node.func.id in ("tuple", "frozenset"))


def _within(node: ast.AST, outer: ast.AST, index: Index) -> bool:
    current: ast.AST | None = node
    while current is not None and current is not outer:
        current = index.parents.get(current)
    return current is outer
