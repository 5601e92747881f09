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
from typing import TypeAlias

from patlint.source.engine import FUNCTIONS, bind_arguments
from patlint.source.index import Index
from patlint.source.names import Names
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.sites import Family, Member, Mode, Order, Site, Trial
from patlint.source.trials import (
    Conditions,
    Test,
    Verdict,
    asked_by,
    has_calls,
    has_continue,
    leaves,
    read_test,
    stored_names,
)

Column: TypeAlias = tuple[int | str, ...]
"""The way from an element of a table to the pattern: indexes, or keyword names of a call."""
_DISPLAYS = (ast.List, ast.Tuple, ast.Set, ast.Dict)
_COMPREHENSIONS = (ast.ListComp, ast.SetComp, ast.GeneratorExp, ast.DictComp)
_COPIES = frozenset({"tuple", "list", "iter"})
_ADDING = frozenset({"append", "extend", "insert"})
_APPLIED = frozenset({"sub", "subn", "findall", "finditer", "split"})
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


@dataclass(frozen=True, slots=True)
class Found:
    """How one place goes through a table; `together`: the members are asked together."""

    order: Order
    test: Test | None = None
    together: bool = False


_UNKNOWN = Found("unknown")
_APPLYING = Found("independent")


class Tables:
    """The tables of one file. `made` gives the sites of each call of `re.compile`."""

    def __init__(
        self, index: Index, text: Text, names: Names, made: dict[ast.Call, list[tuple[Site, Scope]]]
    ) -> None:
        self.index = index
        self.text = text
        self.names = names
        self.made = made

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
        pattern = _bound(loop.target, _path(table, wrapped))
        if pattern is None:
            return _UNKNOWN
        return self._through(loop, scope, *pattern, table.method)

    def _through(self, loop: ast.For, scope: Scope, name: str, path: Column, method: str | None) -> Found:
        """The loop binds `name` to an element, or a part of it, in which the pattern stands at `path`."""
        names = {(name, path)}
        engine = self.names.engine

        def known(node: ast.AST) -> Test | None:
            test = read_test(node, scope, engine) if method is None else _bound_test(node, method)
            if test is None:
                return None
            return (
                test
                if _is_part(test.pattern, names) or self._compiled_part(test.pattern, names, scope)
                else None
            )

        conditions = Conditions(known)
        quiet: list[ast.AST] = []
        applied = False
        for number, statement in enumerate(loop.body):
            if isinstance(statement, ast.Assign) and len(statement.targets) == 1:
                target, value = statement.targets[0], statement.value
                if isinstance(target, ast.Name) and conditions.test_of(value) is not None:
                    test = conditions.test_of(value)
                    assert test is not None
                    conditions.kept[target.id] = test
                    quiet.append(statement)
                    continue
                if isinstance(target, ast.Name) and self._compiled_part(value, names, scope):
                    names.add((target.id, ()))
                    continue
                if isinstance(target, ast.Tuple) and isinstance(value, ast.Name):
                    inner = [_bound(target, way) for start, way in names if start == value.id]
                    names |= {each for each in inner if each is not None}
                    quiet.append(statement)
                    continue
            if stored_names([statement]) & {start for start, _ in names} and not isinstance(
                statement, ast.If
            ):
                return _UNKNOWN
            if isinstance(statement, ast.If):
                asked = conditions.read(statement.test)
                if asked:
                    return self._decided(loop, scope, statement, number, asked, quiet, conditions)
            if has_continue([statement]) or any(conditions.test_of(each) for each in ast.walk(statement)):
                return _UNKNOWN
            applied = applied or _applies(statement, names)
            quiet.append(statement)
        return _APPLYING if applied else _UNKNOWN

    def _decided(
        self,
        loop: ast.For,
        scope: Scope,
        statement: ast.If,
        number: int,
        asked: list[tuple[Test, Verdict]],
        quiet: list[ast.AST],
        conditions: Conditions,
    ) -> Found:
        """The statement is the first of the loop that asks whether the pattern matches."""
        if len(asked) != 1:
            return _UNKNOWN
        test, verdict = asked[0]
        after = loop.body[number + 1 :]
        if verdict == "takes" and leaves(statement.body, False):
            quiet = [*quiet, statement.test, *statement.orelse, *after]
        elif (
            verdict == "refuses"
            and not statement.orelse
            and _only_continues(statement.body)
            and leaves(after, False)
        ):
            quiet = [*quiet, statement.test]
        elif verdict == "takes" and not has_jumps([*statement.body, *after]):
            return _APPLYING
        else:
            return _UNKNOWN
        needed = asked_by(test, scope)
        bound = stored_names([loop.target, *quiet])
        if needed is None or needed.names & bound:
            return _UNKNOWN
        if not needed.plain and has_calls(quiet, lambda call: call is test.call or _is_compile(call)):
            return _UNKNOWN
        return Found("first", test)

    def _generator(
        self, part: ast.comprehension, scope: Scope, wrapped: tuple[str, ...], table: Table
    ) -> Found:
        pattern = _bound(part.target, _path(table, wrapped))
        if pattern is None:
            return _UNKNOWN
        return self._through_generator(part, scope, {pattern}, table.method)

    def _through_generator(
        self, part: ast.comprehension, scope: Scope, names: set[tuple[str, Column]], method: str | None
    ) -> Found:
        holder = self.index.parents.get(part)
        if not isinstance(holder, (ast.GeneratorExp, ast.ListComp, ast.SetComp)):
            return _APPLYING if isinstance(holder, ast.DictComp) else _UNKNOWN
        inner = next((each for each in scope.children if each.node is holder), scope)
        engine = self.names.engine

        def known(node: ast.AST) -> Test | None:
            test = read_test(node, inner, engine) if method is None else _bound_test(node, method)
            if test is None:
                return None
            return (
                test
                if _is_part(test.pattern, names) or self._compiled_part(test.pattern, names, inner)
                else None
            )

        conditions = Conditions(known)
        call = self.index.parents.get(holder)
        called = call.func.id if isinstance(call, ast.Call) and isinstance(call.func, ast.Name) else ""
        if called == "filter" and isinstance(call, ast.Call):
            call = self.index.parents.get(call)
            outer = call.func.id if isinstance(call, ast.Call) and isinstance(call.func, ast.Name) else ""
            called = "next of filter" if outer == "next" else ""
        if len(holder.generators) != 1 or part.is_async or called not in ("any", "next", "next of filter"):
            return _UNKNOWN if called else _APPLYING
        asked: list[tuple[Test, Verdict]] = []
        if len(part.ifs) == 1 and called != "next of filter":
            asked = conditions.read(part.ifs[0])
            if called == "any" and not isinstance(holder.elt, ast.Constant):
                return _UNKNOWN
        elif not part.ifs and called != "next":
            asked = conditions.read(holder.elt)
        if len(asked) != 1 or asked[0][1] != "takes":
            return _UNKNOWN
        test = asked[0][0]
        needed = asked_by(test, inner)
        if needed is None or needed.names & stored_names([part.target]):
            return _UNKNOWN
        return Found("first", test, called == "any")

    def _compiled_part(self, node: ast.AST, names: set[tuple[str, Column]], scope: Scope) -> bool:
        """`re.compile(p)` of the loop's own pattern."""
        return (
            isinstance(node, ast.Call)
            and node in self.made
            and bool(node.args)
            and _is_part(node.args[0], names)
        )

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
        found = _UNKNOWN
        if isinstance(current, (ast.GeneratorExp, ast.ListComp, ast.SetComp)):
            part = current.generators[0]
            outer = scope.parent if scope.node is current and scope.parent else scope
            if name in stored_names([part.target]) and self._is_display(part.iter, outer):
                found = self._through_generator(part, outer, {(name, ())}, None)
        else:
            while current is not None and not isinstance(current, (ast.For, ast.FunctionDef, ast.Lambda)):
                current = self.index.parents.get(current)
            if (
                isinstance(current, ast.For)
                and name in stored_names([current.target])
                and self._is_display(current.iter, scope)
            ):
                found = self._through(current, scope, name, (), None)
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


def _bound(target: ast.expr, path: Column | None) -> tuple[str, Column] | None:
    """The name that `target` binds to what stands at `path`, or to something around it, with the rest of the way."""
    if path is None:
        return None
    rest = path
    while isinstance(target, (ast.Tuple, ast.List)):
        if (
            not rest
            or not isinstance(rest[0], int)
            or any(isinstance(each, ast.Starred) for each in target.elts)
        ):
            return None
        if rest[0] >= len(target.elts):
            return None
        target, rest = target.elts[rest[0]], rest[1:]
    return (target.id, rest) if isinstance(target, ast.Name) else None


def _is_part(node: ast.AST, names: set[tuple[str, Column]]) -> bool:
    """Whether `node` reads the pattern: a name, or `row[1]`."""
    path: list[int | str] = []
    while isinstance(node, ast.Subscript):
        if not isinstance(node.slice, ast.Constant) or not isinstance(node.slice.value, int):
            return False
        path.insert(0, node.slice.value)
        node = node.value
    return isinstance(node, ast.Name) and (node.id, tuple(path)) in names


def _bound_test(node: ast.AST, method: str) -> Test | None:
    """`matcher(text)`, where the loop gets bound methods."""
    match node:
        case ast.Call(func=ast.Name() | ast.Subscript() as function, args=[subject], keywords=[]):
            return Test(node, function, subject, method)  # type: ignore[arg-type]
        case ast.Call(func=ast.Name() | ast.Subscript() as function, args=[subject, position], keywords=[]):
            return Test(node, function, subject, method, position)  # type: ignore[arg-type]
        case _:
            return None


def _applies(statement: ast.stmt, names: set[tuple[str, Column]]) -> bool:
    """Whether the statement uses the pattern in a way that ends nothing."""
    for each in ast.walk(statement):
        match each:
            case ast.Call(func=ast.Attribute(attr=attr, value=value)) if attr in _APPLIED:
                if _is_part(value, names) or (each.args and _is_part(each.args[0], names)):
                    return True
    return False


def _only_continues(block: list[ast.stmt]) -> bool:
    return len(block) == 1 and isinstance(block[0], ast.Continue)


def has_jumps(block: list[ast.stmt]) -> bool:
    return any(
        isinstance(each, (ast.Return, ast.Raise, ast.Break, ast.Continue))
        for statement in block
        for each in ast.walk(statement)
    )


def _is_compile(call: ast.Call) -> bool:
    name = call.func.attr if isinstance(call.func, ast.Attribute) else getattr(call.func, "id", "")
    return name in ("compile", "len", "isinstance")


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
