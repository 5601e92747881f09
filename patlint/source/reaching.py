"""Which assignment a read of a name gets its value from, where straight-line code tells it.

A name that is assigned several times still has one value where an assignment and the read stand in the same
block, or the read deeper within it, and nothing between them can bind the name or jump. Two questions:
`reaching_value` (from a read back to its assignment) and `reached_reads` (from an assignment to its reads).

Method: the simplest case of reaching definitions (Aho, Lam, Sethi, Ullman, Compilers, 2nd ed., 9.2.4),
given up at every loop and try that binds the name.
"""

from __future__ import annotations

import ast

from patlint.source.index import Index
from patlint.source.scopes import Scope

_BLOCKS = ("body", "orelse", "finalbody", "handlers", "cases")
_FUNCTION_NODES = (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda, ast.Module, ast.ClassDef)
_JUMPS = (ast.Break, ast.Continue, ast.Lambda, ast.FunctionDef, ast.AsyncFunctionDef)


def reaching_value(read: ast.Name, scope: Scope, index: Index) -> ast.expr | None:
    """The expression that gives `read` its value, None where it cannot be told.

    `scope`: where the read stands; it must own the name itself, so that lines run in their order.
    """
    name = read.id
    bindings = scope.bindings.get(name, ())
    if scope.kind not in ("function", "module") or scope.find(name) is not scope:
        return None
    if any(binding.scope is not scope or binding.line == 0 for binding in bindings):
        return None
    binders = {binding.node for binding in bindings}
    statement = index.statement(read)
    if statement is None or not _read_first(statement, read, binders, index):
        return None
    while True:
        above = index.parents.get(statement)
        for earlier in reversed(_before(statement, above)):
            value = _plain_assignment(earlier, name)
            if value is not None:
                return value
            if _binds(earlier, binders, index):
                return None
        while isinstance(above, (ast.ExceptHandler, ast.match_case)):
            above = index.parents.get(above)
        if not isinstance(above, ast.stmt) or isinstance(above, _FUNCTION_NODES):
            return None
        if _binds(above, binders, index):
            return None  # a branch, a loop or a header that binds it: the order is not that of the lines
        statement = above


def _read_first(statement: ast.stmt, read: ast.Name, binders: set[ast.AST], index: Index) -> bool:
    """The statement that holds the read binds the name after it, if at all."""
    if any(isinstance(binder, ast.NamedExpr) and _binds(statement, {binder}, index) for binder in binders):
        return False
    if isinstance(statement, (ast.For, ast.AsyncFor)):
        return not _binds(statement, binders, index) or _binds(statement.iter, {read}, index)
    compound = hasattr(statement, "body") or isinstance(statement, ast.Match)
    return not compound or isinstance(statement, ast.If) or not _binds(statement, binders, index)


def _before(statement: ast.stmt, above: ast.AST | None) -> list[ast.stmt]:
    """The statements before `statement` in its block."""
    block = _block_of(statement, above)
    return block[: block.index(statement)] if block else []


def _block_of(statement: ast.stmt, above: ast.AST | None) -> list[ast.stmt] | None:
    for name in _BLOCKS:
        block = getattr(above, name, None)
        if isinstance(block, list) and statement in block:
            return block
    return None


def _plain_assignment(statement: ast.stmt, name: str) -> ast.expr | None:
    match statement:
        case ast.Assign(targets=[ast.Name(id=target)]) if target == name:
            return statement.value
        case ast.AnnAssign(target=ast.Name(id=target)) if target == name:
            return statement.value
        case _:
            return None


def _binds(statement: ast.AST, binders: set[ast.AST], index: Index) -> bool:
    """Whether one of the binders stands in `statement`."""
    for binder in binders:
        current: ast.AST | None = binder
        while current is not None:
            if current is statement:
                return True
            current = index.parents.get(current)
    return False


def reached_reads(name: str, statement: ast.stmt, owner: Scope, index: Index) -> set[ast.AST] | None:
    """The reads of `name` that an assignment reaches, where the next one in the same block ends its life.

    None where that cannot be told: the value may reach any read.
    """
    if len(owner.bindings.get(name, ())) < 2:
        return None
    above = index.parents.get(statement)
    current = above
    while current is not None and not isinstance(current, _FUNCTION_NODES):
        if isinstance(current, ast.Try) or type(current).__name__ == "TryStar":
            return None  # its ways out are many
        current = index.parents.get(current)
    block = _block_of(statement, above)
    if block is None:
        return None
    found: set[ast.AST] = set()
    for following in block[block.index(statement) + 1 :]:
        kills = _plain_assignment(following, name) is not None
        for inner in ast.walk(following):
            if isinstance(inner, _JUMPS):
                return None
            if isinstance(inner, ast.Name) and inner.id == name and isinstance(inner.ctx, ast.Load):
                found.add(inner)
        if kills:
            return found
    return None
