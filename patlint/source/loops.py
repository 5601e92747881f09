"""Loops and generators that go through patterns: are they left at the first match?

`Loops.through` reads a `for`, `Loops.through_generator` the generator of `next`, `any` or `filter`; both are told how
the loop names the pattern. `bound` finds that name from the loop's target.

    for row in TABLE:                      # the pattern is row[1]
        found = row[1].match(text)
        if not found:
            continue
        return row[0], found

The first match wins where the pattern's test is the first that the loop asks, where nothing else decides with it,
where every way behind it leads out of the loop, and where the text is the same for all. Anything else is either
applied to every pattern, or not known.
"""

from __future__ import annotations

import ast
from collections.abc import Container
from dataclasses import dataclass
from typing import TypeAlias

from patlint.source.engine import Engine
from patlint.source.index import Index
from patlint.source.scopes import Scope
from patlint.source.sites import Order
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
_APPLIED = frozenset({"sub", "subn", "findall", "finditer", "split"})


@dataclass(frozen=True, slots=True)
class Found:
    """How one place goes through a table; `together`: the members are asked together."""

    order: Order
    test: Test | None = None
    together: bool = False


UNKNOWN = Found("unknown")
APPLYING = Found("independent")


class Loops:
    """The loops of one file. `made` are the calls that compile a known pattern."""

    def __init__(self, index: Index, engine: Engine, made: Container[ast.AST]) -> None:
        self.index = index
        self.engine = engine
        self.made = made

    def through(self, loop: ast.For, scope: Scope, name: str, path: Column, method: str | None) -> Found:
        """The loop binds `name` to an element, or a part of it, in which the pattern stands at `path`."""
        names = {(name, path)}
        engine = self.engine

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
                    inner = [bound(target, way) for start, way in names if start == value.id]
                    names |= {each for each in inner if each is not None}
                    quiet.append(statement)
                    continue
            if stored_names([statement]) & {start for start, _ in names} and not isinstance(
                statement, ast.If
            ):
                return UNKNOWN
            if isinstance(statement, ast.If):
                asked = conditions.read(statement.test)
                if asked:
                    return self._decided(loop, scope, statement, number, asked, quiet, conditions)
            if has_continue([statement]) or any(conditions.test_of(each) for each in ast.walk(statement)):
                return UNKNOWN
            applied = applied or _applies(statement, names)
            quiet.append(statement)
        return APPLYING if applied else UNKNOWN

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
            return UNKNOWN
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
        elif verdict == "takes" and not _has_jumps([*statement.body, *after]):
            return APPLYING
        else:
            return UNKNOWN
        needed = asked_by(test, scope)
        rebound = stored_names([loop.target, *quiet])
        if needed is None or needed.names & rebound:
            return UNKNOWN
        if not needed.plain and has_calls(quiet, lambda call: call is test.call or _is_compile(call)):
            return UNKNOWN
        return Found("first", test)

    def through_generator(
        self, part: ast.comprehension, scope: Scope, names: set[tuple[str, Column]], method: str | None
    ) -> Found:
        holder = self.index.parents.get(part)
        if not isinstance(holder, (ast.GeneratorExp, ast.ListComp, ast.SetComp)):
            return APPLYING if isinstance(holder, ast.DictComp) else UNKNOWN
        inner = next((each for each in scope.children if each.node is holder), scope)
        engine = self.engine

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
            return UNKNOWN if called else APPLYING
        asked: list[tuple[Test, Verdict]] = []
        if len(part.ifs) == 1 and called != "next of filter":
            asked = conditions.read(part.ifs[0])
            if called == "any" and not isinstance(holder.elt, ast.Constant):
                return UNKNOWN
        elif not part.ifs and called != "next":
            asked = conditions.read(holder.elt)
        if len(asked) != 1 or asked[0][1] != "takes":
            return UNKNOWN
        test = asked[0][0]
        needed = asked_by(test, inner)
        if needed is None or needed.names & stored_names([part.target]):
            return UNKNOWN
        return Found("first", test, called == "any")

    def _compiled_part(self, node: ast.AST, names: set[tuple[str, Column]], scope: Scope) -> bool:
        """`re.compile(p)` of the loop's own pattern."""
        return (
            isinstance(node, ast.Call)
            and node in self.made
            and bool(node.args)
            and _is_part(node.args[0], names)
        )


def bound(target: ast.expr, path: Column | None) -> tuple[str, Column] | None:
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


def _has_jumps(block: list[ast.stmt]) -> bool:
    return any(
        isinstance(each, (ast.Return, ast.Raise, ast.Break, ast.Continue))
        for statement in block
        for each in ast.walk(statement)
    )


def _is_compile(call: ast.Call) -> bool:
    name = call.func.attr if isinstance(call.func, ast.Attribute) else getattr(call.func, "id", "")
    return name in ("compile", "len", "isinstance")
