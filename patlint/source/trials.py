"""Tests of a text by a pattern: which call is one, when it holds a condition up, and what leaves a block.

`read_test` takes `p.match(text)` and `re.match(p, text)` apart. `Conditions.read` says what the truth of a
condition tells about the tests in it: whether a match makes it true whatever else is asked ("takes"), or
whether a match makes it false ("refuses"). `leaves` says whether a block goes on nowhere but out of its loop.

Everything errs towards not knowing: what is not one of the forms here takes nothing and leaves nothing.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import Literal, TypeAlias, cast

from patlint.source.engine import FUNCTIONS, METHODS, Engine, bind_arguments
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.sites import Mode

Verdict: TypeAlias = Literal["takes", "refuses", "asks"]
TESTING = ("match", "fullmatch", "search")
_PURE_METHODS = frozenset({"strip", "lstrip", "rstrip", "lower", "upper", "casefold", "decode", "encode"})
_UNCHANGING = (
    *(ast.Constant, ast.Slice, ast.BinOp, ast.UnaryOp, ast.operator, ast.unaryop, ast.expr_context),
    *(ast.JoinedStr, ast.FormattedValue),
)
_LOOPS = (ast.For, ast.AsyncFor, ast.While)
_SCOPES = (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda, ast.ClassDef)


@dataclass(frozen=True, slots=True)
class Test:
    """One call that asks whether a text matches: `pattern` is the pattern object, or the pattern of `re.match`."""

    call: ast.Call
    pattern: ast.expr
    subject: ast.expr
    mode: Mode
    position: ast.expr | None = None

    @property
    def key(self) -> str:
        """The spelling of the text that is tested, with the position."""
        spelled = ast.dump(self.subject)
        return spelled if self.position is None else f"{spelled} at {ast.dump(self.position)}"

    def asks(self) -> Iterator[ast.expr]:
        yield self.subject
        if self.position is not None:
            yield self.position


def read_test(node: ast.AST, scope: Scope, engine: Engine) -> Test | None:
    """`node` as a test, None for anything else."""
    if not isinstance(node, ast.Call):
        return None
    function = node.func
    name = function.attr if isinstance(function, ast.Attribute) else getattr(function, "id", "")
    try:
        denoted = engine.denotes(function, scope) if isinstance(function, (ast.Name, ast.Attribute)) else None
    except Opaque:
        return None
    if denoted is not None:
        name = denoted.removeprefix("re.")
        if name not in TESTING:
            return None
        given = bind_arguments(node, FUNCTIONS[name])
        pattern, subject = given.given.get("pattern"), given.given.get("string")
        if given.loose or pattern is None or subject is None:
            return None
        return Test(node, pattern, subject, cast(Mode, name))
    if not isinstance(function, ast.Attribute) or name not in TESTING:
        return None
    given = bind_arguments(node, METHODS[name])
    subject = given.given.get("string")
    if given.loose or subject is None or "endpos" in given.given:
        return None
    return Test(node, function.value, subject, cast(Mode, name), given.given.get("pos"))


@dataclass(slots=True)
class Conditions:
    """Reads conditions; `known` tells the tests that count, `kept` the names that hold the outcome of one."""

    known: Callable[[ast.AST], Test | None]
    kept: dict[str, Test] = field(default_factory=dict)

    def read(self, node: ast.expr) -> list[tuple[Test, Verdict]]:
        """The tests of a condition in their order, each with what its match does to the condition."""
        test = self.test_of(node)
        if test is not None:
            return [(test, "takes")]
        match node:
            case ast.BoolOp(op=ast.Or()):
                return [
                    (t, v if v == "takes" else "asks") for part in node.values for t, v in self.read(part)
                ]
            case ast.BoolOp():
                return [
                    (t, v if v == "refuses" else "asks") for part in node.values for t, v in self.read(part)
                ]
            case ast.UnaryOp(op=ast.Not()):
                return [(t, _NOT[v]) for t, v in self.read(node.operand)]
            case ast.Compare(ops=[ast.IsNot() | ast.NotEq()], comparators=[ast.Constant(value=None)]):
                return self.read(node.left) if self.test_of(node.left) else []
            case ast.Compare(ops=[ast.Is() | ast.Eq()], comparators=[ast.Constant(value=None)]):
                return [(t, _NOT[v]) for t, v in self.read(node.left)] if self.test_of(node.left) else []
            case ast.Call(func=ast.Name(id="bool"), args=[only]):
                return self.read(only)
            case _:
                return []

    def test_of(self, node: ast.AST) -> Test | None:
        """The test whose outcome the expression is."""
        match node:
            case ast.NamedExpr():
                return self.test_of(node.value)
            case ast.Name():
                return self.kept.get(node.id)
            case ast.Call():
                return self.known(node)
            case _:
                return None


_NOT: dict[Verdict, Verdict] = {"takes": "refuses", "refuses": "takes", "asks": "asks"}


def leaves(block: Sequence[ast.stmt], going_on: bool) -> bool:
    """Whether every way through the block leads out of the loop around it, or out of the function.

    `going_on`: `continue` counts as a way out, since only the rest of the block around is thought of.
    """
    for statement in block:
        match statement:
            case ast.Return() | ast.Raise() | ast.Break():
                return True
            case ast.Continue():
                return going_on
            case ast.If():
                if leaves(statement.body, going_on) and leaves(statement.orelse, going_on):
                    return True
            case ast.Try() if not statement.finalbody:
                tried = leaves(statement.body, going_on) or leaves(statement.orelse, going_on)
                if tried and all(leaves(handler.body, going_on) for handler in statement.handlers):
                    return True
        if not going_on and has_continue([statement]):
            return False
    return False


def has_continue(block: Sequence[ast.AST]) -> bool:
    """Whether a `continue` of the loop around the block stands in it."""
    for node in block:
        if isinstance(node, ast.Continue):
            return True
        if isinstance(node, _SCOPES):
            continue
        inner = node.orelse if isinstance(node, _LOOPS) else list(ast.iter_child_nodes(node))
        if not isinstance(node, ast.expr) and has_continue(inner):
            return True
    return False


def stored_names(nodes: Sequence[ast.AST]) -> set[str]:
    """The names that are bound anywhere in `nodes`, and `.name` for each attribute that is stored."""
    found: set[str] = set()
    for node in nodes:
        for each in ast.walk(node):
            if isinstance(each, ast.Name) and not isinstance(each.ctx, ast.Load):
                found.add(each.id)
            elif isinstance(each, ast.Attribute) and not isinstance(each.ctx, ast.Load):
                found.add(f".{each.attr}")
            elif isinstance(each, (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef)):
                found.add(each.name)
            elif isinstance(each, (ast.Import, ast.ImportFrom)):
                found |= {(alias.asname or alias.name).split(".")[0] for alias in each.names}
            elif isinstance(each, (ast.ExceptHandler, ast.MatchAs, ast.MatchStar)) and each.name:
                found.add(each.name)
            elif isinstance(each, ast.MatchMapping) and each.rest:
                found.add(each.rest)
    return found


@dataclass(frozen=True, slots=True)
class Asked:
    """What the text of a test depends on. `plain`: on local names and constants alone, which no call changes."""

    names: frozenset[str]
    plain: bool


def asked_by(test: Test, scope: Scope) -> Asked | None:
    """None where the text may be another one each time it is asked for."""
    names: set[str] = set()
    plain = True
    for expression in test.asks():
        for node in ast.walk(expression):
            match node:
                case ast.Name():
                    names.add(node.id)
                    plain = plain and _is_local(node.id, scope)
                case ast.Attribute():
                    parent_call = any(
                        isinstance(other, ast.Call) and other.func is node for other in ast.walk(expression)
                    )
                    if not parent_call:
                        names.add(f".{node.attr}")
                        plain = False
                case ast.Call(func=ast.Attribute(attr=attr)) if attr in _PURE_METHODS and not node.keywords:
                    pass
                case ast.Call(func=ast.Name(id="str" | "len" | "bytes")):
                    pass
                case ast.Subscript():
                    plain = plain and isinstance(node.slice, ast.Slice)
                case _ if not isinstance(node, _UNCHANGING):
                    return None
    return Asked(frozenset(names), plain)


def _is_local(name: str, scope: Scope) -> bool:
    """Whether only the lines of this very function bind the name."""
    owner = scope.find(name)
    if owner is None:
        return name in ("str", "len", "bytes")
    if owner.kind not in ("function", "comprehension"):
        return False
    return all(binding.scope is owner for binding in owner.bindings[name])


def has_calls(nodes: Sequence[ast.AST], besides: Callable[[ast.Call], bool]) -> bool:
    """Whether `nodes` call anything that may change what an attribute holds."""
    return any(
        isinstance(each, (ast.Call, ast.Await, ast.Yield, ast.YieldFrom))
        and not (isinstance(each, ast.Call) and besides(each))
        for node in nodes
        for each in ast.walk(node)
    )
