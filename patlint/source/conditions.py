"""Whether a place in a loop is reached with every row, or only with those that pass a condition.

In `for kind, text in TABLE: if kind == "re": re.compile(text)` most rows never come to `re`. What may depend
on the row alone is told by its names: a condition that mentions what the loop binds, and besides that only
constants, makes rows differ; one that also asks something of the outside (`if name in wanted`) may let each
row pass.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator

from patlint.source.index import Index
from patlint.source.scopes import Scope

_JUMPS = (ast.Continue, ast.Break, ast.Return, ast.Raise)


def depends_on_row(read: ast.AST, loop: ast.AST, index: Index, scope: Scope) -> bool:
    """Whether a condition on the row of `loop` stands between the head of the loop and `read` in it."""
    rows = _row_names(loop, scope)
    return any(_asks_only(atom, rows, scope) for test in _tests(read, loop, index) for atom in _atoms(test))


def depends_on(read: ast.AST, function: ast.AST, names: frozenset[str], index: Index, scope: Scope) -> bool:
    """The same for the `names` of a function's parameters and what is made from them."""
    rows = _derived(set(names), getattr(function, "body", []), scope)
    return any(
        _asks_only(atom, rows, scope) for test in _tests(read, function, index) for atom in _atoms(test)
    )


def _row_names(loop: ast.AST, scope: Scope) -> set[str]:
    """The names that a loop binds, and those that are made from them in its body."""
    if not isinstance(loop, ast.For):
        generators: list[ast.comprehension] = getattr(loop, "generators", [])
        return {each.id for part in generators for each in _names(part.target)}
    return _derived({each.id for each in _names(loop.target)}, loop.body, scope)


def _derived(names: set[str], body: list[ast.stmt], scope: Scope) -> set[str]:
    grown = True
    while grown:
        grown = False
        for statement in body:
            for node in ast.walk(statement):
                match node:
                    case ast.Assign(targets=targets, value=value):
                        bound = {each.id for target in targets for each in _names(target)}
                    case ast.NamedExpr(target=target, value=value):
                        bound = {target.id}
                    case _:
                        continue
                if bound <= names or _is_outcome(value) or not _asks_only(value, names, scope):
                    continue
                names |= bound
                grown = True
    return names


def _is_outcome(value: ast.expr) -> bool:
    """A call that runs or makes a pattern: its outcome is that of a text, not that of the row."""
    return isinstance(value, ast.Call) and (
        isinstance(value.func, ast.Attribute)
        and value.func.attr
        in ("match", "fullmatch", "search", "findall", "finditer", "compile", "sub", "split")
    )


def _tests(read: ast.AST, loop: ast.AST, index: Index) -> Iterator[ast.expr]:
    """The conditions that hold at `read`: those around it, and those that would have left the loop before."""
    below, current = read, index.parents.get(read)
    while current is not None:
        match current:
            case ast.If() | ast.While() | ast.IfExp() if below is not current.test:
                yield current.test
            case ast.BoolOp():
                for value in current.values:
                    if value is below:
                        break
                    yield value
            case ast.comprehension():
                for test in current.ifs:
                    if test is below:
                        break
                    yield test
            case ast.ListComp() | ast.SetComp() | ast.DictComp() | ast.GeneratorExp():
                for generator in current.generators:
                    if generator is below:
                        break
                    yield from generator.ifs
            case ast.Match():
                yield current.subject
            case _:
                pass
        for block in ("body", "orelse", "finalbody"):
            listed = getattr(current, block, None)
            if isinstance(listed, list) and below in listed:
                yield from _left_before(listed[: listed.index(below)])
        if current is loop:
            return
        below, current = current, index.parents.get(current)


def _left_before(statements: list[ast.stmt]) -> Iterator[ast.expr]:
    for statement in statements:
        for node in ast.walk(statement):
            if isinstance(node, ast.If):
                if any(
                    isinstance(inner, _JUMPS)
                    for part in (*node.body, *node.orelse)
                    for inner in ast.walk(part)
                ):
                    yield node.test
            elif isinstance(node, ast.Assert):
                yield node.test
            elif isinstance(node, ast.Match):
                yield node.subject


def _atoms(test: ast.expr) -> Iterator[ast.expr]:
    stack = [test]
    while stack:
        node = stack.pop()
        match node:
            case ast.BoolOp():
                stack.extend(node.values)
            case ast.UnaryOp(op=ast.Not()):
                stack.append(node.operand)
            case _:
                yield node


def _asks_only(node: ast.expr, rows: set[str], scope: Scope) -> bool:
    """Whether `node` mentions a row's name, and nothing else that the program gets from outside."""
    mentioned = False
    for name in _names(node):
        if name.id in rows:
            mentioned = True
        elif _is_outside(name, scope):
            return False
    return mentioned


def _is_outside(name: ast.Name, scope: Scope) -> bool:
    owner = scope.find(name.id)
    if owner is None:
        return False
    bindings = owner.bindings[name.id]
    if owner.kind == "comprehension":
        return True
    if owner.kind == "function":
        return any(binding.kind != "value" for binding in bindings) or len(bindings) != 1
    return False


def _names(node: ast.AST) -> Iterator[ast.Name]:
    for each in ast.walk(node):
        if isinstance(each, ast.Name):
            yield each
