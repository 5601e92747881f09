"""Tables of patterns: displays and comprehensions that hold several, and the loops that go through them.

A *table* is a display (list, tuple, set, dict) or a comprehension whose elements, or the same part of each
element (a *column*), are made by `re.compile`. `Tables.find` gives one family for each column. How the family is
used is told from every place that reads the table in this file: where all of them are loops that are left at the
first match, the first match wins; where one is not understood, nothing is known.

    for kind, pattern in TABLE:            # the column is (1,); the trial is this loop
        found = pattern.match(text, at)
        if found:
            return kind, found.group()

Limits: a table that is passed on, indexed or returned is of unknown order. Loops over rows that were made elsewhere
(objects with a pattern in an attribute) are not followed.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator
from dataclasses import dataclass, field

from patlint.source.engine import FUNCTIONS, bind_arguments
from patlint.source.index import Index
from patlint.source.loops import UNKNOWN, Column, Found, Loops, bound
from patlint.source.names import Names
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.sites import Family, Member, Mode, Order, Site, Trial
from patlint.source.trials import stored_names

_COMPREHENSIONS = (ast.ListComp, ast.SetComp, ast.GeneratorExp, ast.DictComp)
_COPIES = frozenset({"tuple", "list", "iter"})
_ADDING = frozenset({"append", "extend", "insert"})
_KEY, _VALUE = "key", "value"


@dataclass(slots=True)
class Table:
    """One column of one container, its members in their order."""

    container: ast.expr
    column: Column
    members: list[tuple[ast.expr, Site, str | None]] = field(default_factory=list)
    """The element, its pattern and what else stands in the row."""
    named: bool = False
    method: str | None = None
    """The members are this method of their patterns."""


class Tables:
    """The tables of one file. `made` gives the sites of each call of `re.compile`."""

    def __init__(
        self, index: Index, text: Text, names: Names, made: dict[ast.Call, list[tuple[Site, Scope]]]
    ) -> None:
        self.index = index
        self.text = text
        self.names = names
        self.made = made
        self.loops = Loops(index, names.engine, made)

    def find(self) -> Iterator[Family]:
        for table, scope in self._tables():
            yield self._family(table, scope)
        for call, sites in self.made.items():
            if len(sites) > 1:
                family = self._called_in_loop(call, sites)
                if family is not None:
                    yield family

    # finding tables

    def _tables(self) -> list[tuple[Table, Scope]]:
        found: dict[tuple[ast.expr, Column, str | None], Table] = {}
        scopes: dict[ast.expr, Scope] = {}
        for call, sites in self.made.items():
            if sites[0][0].function != "compile":
                continue
            node: ast.expr = call
            above = self.index.parents.get(call)
            method = None
            if isinstance(above, ast.Attribute) and above.attr in METHOD_NAMES:
                node, method = above, above.attr
            for container, element, column in self._containers(node):
                key = (container, column, method)
                table = found.setdefault(key, Table(container, column, method=method))
                several = isinstance(container, _COMPREHENSIONS)
                rest = None if several else self._rest(element, node)
                if several and not column and _over_texts(container):
                    rest = ""
                if several:
                    if not _over_rows(container, call) or not self._is_one_table(container, sites):
                        continue
                elif len(sites) > 1:
                    continue  # one text or another, not one after the other
                table.members += [(element, site, rest) for site, _ in sites]
                scopes[container] = sites[0][1]
        tables = [table for table in found.values() if len(table.members) > 1]
        inner = {id(element) for table in tables if table.column for element, _, _ in table.members}
        kept = []
        for table in tables:
            if id(table.container) in inner:
                continue  # a row of another table
            scope = scopes[table.container]
            if (
                isinstance(table.container, _COMPREHENSIONS)
                and scope.node is table.container
                and scope.parent
            ):
                scope = scope.parent
            table.named = isinstance(table.container, (ast.Dict, ast.DictComp)) or self._is_record(table)
            kept.append((table, scope))
        return kept

    def _is_one_table(self, container: ast.expr, sites: list[tuple[Site, Scope]]) -> bool:
        """Whether a comprehension's patterns are the rows of one display, each once."""
        generators: list[ast.comprehension] = getattr(container, "generators", [])
        scope = sites[0][1]
        outer = scope.parent if scope.node is container and scope.parent else scope
        places = {site.place for site, _ in sites}
        return len(places) == len(sites) and self._is_display(generators[0].iter, outer)

    def _is_display(self, node: ast.expr, scope: Scope, depth: int = 0) -> bool:
        """Whether an iterable is one written-out sequence in its order, and no other."""
        match node:
            case ast.List() | ast.Tuple() | ast.Dict():
                return True
            case ast.Call(func=ast.Name(id="tuple" | "list" | "enumerate" | "iter"), args=[first, *_]):
                return self._is_display(first, scope, depth + 1)
            case ast.Call(func=ast.Attribute(attr="items" | "values" | "keys"), args=[]):
                assert isinstance(node.func, ast.Attribute)
                return self._is_display(node.func.value, scope, depth + 1)
            case ast.Name() | ast.Attribute() if depth < 10:
                try:
                    definitions = self.names.definitions(node, scope)
                except Opaque:
                    return False
                return len(definitions) == 1 and self._is_display(*definitions[0], depth + 1)
            case _:
                return False

    def _is_record(self, table: Table) -> bool:
        """Whether each member of a tuple has a meaning of its own: the tuple is unpacked, returned, or a row."""
        above = self.index.parents.get(table.container)
        if not isinstance(table.container, ast.Tuple):
            return False
        if isinstance(above, ast.Assign):
            return any(isinstance(target, (ast.Tuple, ast.List)) for target in above.targets)
        return not isinstance(above, (ast.AnnAssign, ast.For, ast.comprehension))

    def _containers(self, node: ast.expr) -> Iterator[tuple[ast.expr, ast.expr, Column]]:
        """The containers that `node` may be a member of, with the element and the column."""
        column: Column = ()
        for _ in range(3):
            above = self.index.parents.get(node)
            if isinstance(above, ast.keyword):
                call = self.index.parents.get(above)
                if isinstance(call, ast.Call) and above.arg:
                    node, column = call, (above.arg, *column)
                    continue
                return
            match above:
                case ast.Dict():
                    if isinstance(node, ast.List):
                        return  # a table for each key
                    side = _KEY if node in above.keys else _VALUE
                    yield above, node, (side, *column)
                    return
                case ast.DictComp():
                    if node in (above.key, above.value):
                        yield above, node, (_KEY if node is above.key else _VALUE, *column)
                    return
                case ast.ListComp() | ast.SetComp() | ast.GeneratorExp() if above.elt is node:
                    yield above, node, column
                    return
                case ast.List() | ast.Tuple() | ast.Set():
                    yield above, node, column
                    if isinstance(above, ast.Set):
                        return
                    node, column = above, (above.elts.index(node), *column)
                case ast.Call() if node in above.args and isinstance(above.func, (ast.Name, ast.Attribute)):
                    node, column = above, (f"{above.args.index(node)}", *column)
                case _:
                    return

    def _rest(self, element: ast.expr, node: ast.expr) -> str | None:
        """The spelling of an element without the pattern."""
        if element is node:
            return ""
        return self.text.segment(element).replace(self.text.segment(node), "\0", 1)

    # how they are used

    def _family(self, table: Table, scope: Scope) -> Family:
        found: list[tuple[Found, ast.AST]] = []
        known = not any(isinstance(part, str) and part not in (_KEY, _VALUE) for part in table.column)
        known = known and not isinstance(table.container, (ast.Set, ast.SetComp))
        if known:
            known = self._readings(table.container, scope, (), table, found, set())
        return self._made(table, found, known)

    def _made(self, table: Table, found: list[tuple[Found, ast.AST]], known: bool) -> Family:
        orders = {each.order for each, _ in found}
        order: Order = orders.pop() if known and len(orders) == 1 else "unknown"
        trials: list[Trial] = []
        modes: list[Mode] = []
        together = True
        if order == "first":
            for each, _ in found:
                assert each.test is not None
                trials.append(Trial(self.text.place(each.test.call), each.test.position is not None))
                modes.append(each.test.mode)
                together = together and each.together
        members = tuple(
            Member(site, tuple(modes), True, 0 if together and trials else number, rest)
            for number, (_, site, rest) in enumerate(table.members)
        )
        return Family("table", order, members, tuple(trials), table.named)

    def _readings(
        self,
        node: ast.expr,
        scope: Scope,
        wrapped: tuple[str, ...],
        table: Table,
        found: list[tuple[Found, ast.AST]],
        visited: set[tuple[Scope, str]],
    ) -> bool:
        """Adds how each place goes through the table that `node` stands for; False where one is not understood."""
        above = self.index.parents.get(node)
        again = (scope, wrapped, table, found, visited)
        match above:
            case ast.For() if above.iter is node:
                found.append((self._loop(above, scope, wrapped, table), above))
                return True
            case ast.comprehension() if above.iter is node:
                found.append((self._generator(above, scope, wrapped, table), above))
                return True
            case ast.Call(func=ast.Name(id=name), args=[first, *_]) if first is node:
                if name in _COPIES:
                    return self._readings(above, *again)
                if name == "enumerate":
                    return self._readings(above, scope, (*wrapped, name), table, found, visited)
                return name in ("len", "bool")
            case ast.Attribute(attr=attr):
                call = self.index.parents.get(above)
                if not (isinstance(call, ast.Call) and call.func is above):
                    return False
                if attr in ("items", "keys", "values") and not call.args:
                    return self._readings(call, scope, (*wrapped, attr), table, found, visited)
                return attr in _ADDING
            case ast.Assign() if above.value is node:
                return all(self._target(target, *again) for target in above.targets)
            case ast.AnnAssign() if above.value is node:
                return self._target(above.target, *again)
            case ast.Expr():
                return True
            case _:
                return False

    def _target(
        self,
        target: ast.expr,
        scope: Scope,
        wrapped: tuple[str, ...],
        table: Table,
        found: list[tuple[Found, ast.AST]],
        visited: set[tuple[Scope, str]],
    ) -> bool:
        match target:
            case ast.Name(id=name):
                owner = scope if scope.kind == "class" and name in scope.bindings else scope.find(name)
            case ast.Attribute(attr=name):
                owner = self.names.class_of(target.value, scope)
            case _:
                return False
        if owner is None:
            return False
        if (owner, name) in visited:
            return True
        visited.add((owner, name))
        values = [b for b in owner.bindings.get(name, ()) if not b.is_none and b.kind != "augmented"]
        if len(values) > 1 or any(binding.kind != "value" for binding in values):
            return False
        if owner.kind == "module" and self.index.dynamic:
            return False
        for read, inner in owner.reads(name):
            if not self._readings(read, inner, wrapped, table, found, visited):
                return False
        if owner.kind != "class":
            return True
        stores = [use for use in self.index.stores.get(name, ()) if use.node is not target]
        if stores:
            return False
        return all(
            self._readings(use.node, use.scope, wrapped, table, found, visited)
            for use in self.index.reads.get(name, ())
        )

    def _loop(self, loop: ast.For, scope: Scope, wrapped: tuple[str, ...], table: Table) -> Found:
        pattern = bound(loop.target, _path(table, wrapped))
        if pattern is None:
            return UNKNOWN
        return self.loops.through(loop, scope, *pattern, table.method)

    def _generator(
        self, part: ast.comprehension, scope: Scope, wrapped: tuple[str, ...], table: Table
    ) -> Found:
        pattern = bound(part.target, _path(table, wrapped))
        if pattern is None:
            return UNKNOWN
        return self.loops.through_generator(part, scope, {pattern}, table.method)

    # calls that give the loop's pattern to a function of `re`

    def _called_in_loop(self, call: ast.Call, sites: list[tuple[Site, Scope]]) -> Family | None:
        scope = sites[0][1]
        given = bind_arguments(call, FUNCTIONS.get(sites[0][0].function, ())).given.get("pattern")
        if not isinstance(given, ast.Name):
            return None
        if len({site.place for site, _ in sites}) < len(sites):
            return None
        members: list[tuple[ast.expr, Site, str | None]] = [(given, site, "") for site, _ in sites]
        name = given.id
        current: ast.AST | None = self.index.parents.get(call)
        while current is not None and not isinstance(current, ast.stmt | ast.comprehension):
            if isinstance(current, (ast.GeneratorExp, ast.ListComp, ast.SetComp)):
                break
            current = self.index.parents.get(current)
        if isinstance(current, ast.comprehension):
            current = self.index.parents.get(current)
        found = UNKNOWN
        if isinstance(current, (ast.GeneratorExp, ast.ListComp, ast.SetComp)):
            part = current.generators[0]
            outer = scope.parent if scope.node is current and scope.parent else scope
            if name in stored_names([part.target]) and self._is_display(part.iter, outer):
                found = self.loops.through_generator(part, outer, {(name, ())}, None)
        else:
            while current is not None and not isinstance(current, (ast.For, ast.FunctionDef, ast.Lambda)):
                current = self.index.parents.get(current)
            if (
                isinstance(current, ast.For)
                and name in stored_names([current.target])
                and self._is_display(current.iter, scope)
            ):
                found = self.loops.through(current, scope, name, (), None)
        if found.order != "first":
            return None
        return self._made(Table(call, (), members), [(found, call)], True)


METHOD_NAMES = frozenset({"match", "fullmatch", "search"})


def _path(table: Table, wrapped: tuple[str, ...]) -> Column | None:
    """The way from what the loop's target gets to the pattern; None where the table's walk leads elsewhere."""
    path: Column = table.column
    is_dict = isinstance(table.container, (ast.Dict, ast.DictComp))
    walk = list(wrapped)
    if is_dict:
        side, path = path[0], path[1:]
        how = walk.pop(0) if walk and walk[0] in ("items", "keys", "values") else "keys"
        if how == "items":
            path = (0 if side == _KEY else 1, *path)
        elif (how == "keys") != (side == _KEY):
            return None
    for each in walk:
        if each != "enumerate":
            return None
        path = (1, *path)
    return path


def _over_rows(container: ast.expr, call: ast.Call) -> bool:
    """Whether the pattern that `call` compiles comes from the rows of the one loop of a comprehension."""
    generators = getattr(container, "generators", [])
    if len(generators) != 1 or not call.args:
        return False
    bound = stored_names([generators[0].target])
    return any(isinstance(each, ast.Name) and each.id in bound for each in ast.walk(call.args[0]))


def _over_texts(container: ast.expr) -> bool:
    """Whether a comprehension goes over single values, so that there is nothing else in a row."""
    generators = getattr(container, "generators", [])
    return len(generators) == 1 and isinstance(generators[0].target, ast.Name)
