"""Who else reads a text that is to be changed.

A literal that stands in the call itself is read by that call alone. One that is the value of a name may be
read elsewhere, as something else than a pattern: `other_readers` says who, so that it can be left alone.

>>> tree = ast.parse("import re\\n_WORD = 'a|b'\\nre.match(_WORD, s)\\nprint(_WORD)\\n")
>>> other_readers(tree, (2, 8), lambda call, argument: call.lineno == 3)
'_WORD is read at line 4 too'

Limits: names are compared by their spelling, whatever the scope; getattr and globals() are not seen.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Iterator

_FUNCTIONS = (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda)
IsKnown = Callable[[ast.Call, ast.AST], bool]
"""Whether a call runs or makes a pattern that is known, and the node below it is its pattern."""


def other_readers(tree: ast.Module, start: tuple[int, int], is_known: IsKnown) -> str | None:
    """Why the literal at `start` (line from 1, column in bytes from 0) cannot be changed for its pattern
    alone; None where it can."""
    parents: dict[ast.AST, ast.AST] = {}
    for node in ast.walk(tree):
        for child in ast.iter_child_nodes(node):
            parents[child] = node
    for node in ast.walk(tree):
        if isinstance(node, (ast.Constant, ast.JoinedStr)) and _covers(node, start):
            return _Reach(tree, parents, is_known).of(node, frozenset())
    return "its literal was not found"


def _covers(node: ast.Constant | ast.JoinedStr, place: tuple[int, int]) -> bool:
    assert node.end_lineno is not None and node.end_col_offset is not None
    begin, end = (node.lineno, node.col_offset), (node.end_lineno, node.end_col_offset)
    return begin <= place < end


class _Reach:
    def __init__(self, tree: ast.Module, parents: dict[ast.AST, ast.AST], is_known: IsKnown) -> None:
        self.tree = tree
        self.parents = parents
        self.is_known = is_known

    def of(self, node: ast.AST, seen: frozenset[str]) -> str | None:
        """Who reads the value of `node` beside known calls."""
        below, statement = node, node
        while not isinstance(statement, ast.stmt):
            if isinstance(statement, ast.Call) and self.is_known(statement, below):
                return None
            if isinstance(statement, ast.NamedExpr):
                break
            below, statement = statement, self.parents[statement]
        match statement:
            case ast.Assign():
                targets = statement.targets
            case ast.AnnAssign() | ast.NamedExpr():
                targets = [statement.target]
            case _:
                return f"its text is read at line {statement.lineno} by other code"
        for target in targets:
            if not isinstance(target, (ast.Name, ast.Attribute)):
                return f"its text is read at line {statement.lineno} by other code"
            name = target.id if isinstance(target, ast.Name) else target.attr
            if name in seen:
                continue
            if not name.startswith("_") and not (isinstance(target, ast.Name) and self.is_local(statement)):
                return f"{name} is public: other modules may use its text"
            for reader in self.readers(name):
                if self.of(reader, seen | {name}) is not None:
                    return f"{name} is read at line {getattr(reader, 'lineno', '?')} too"
        return None

    def is_local(self, node: ast.AST) -> bool:
        current: ast.AST | None = node
        while current is not None and not isinstance(current, ast.ClassDef):
            if isinstance(current, _FUNCTIONS):
                return True
            current = self.parents.get(current)
        return False

    def readers(self, name: str) -> Iterator[ast.AST]:
        for node in ast.walk(self.tree):
            match node:
                case ast.Name(id=found, ctx=ast.Load()) | ast.Attribute(attr=found, ctx=ast.Load()):
                    if found == name:
                        yield node
                case ast.Global() | ast.Nonlocal() if name in node.names:
                    yield node
                case ast.Constant(value=str() as text) if text == name:
                    yield node  # in __all__, or for getattr
                case _:
                    pass
