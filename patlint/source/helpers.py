"""Functions of the file that have a part in a pattern: those that build its text, and those that are given it.

Two questions. `Helpers.outcome(call, scope)`: the text that a call of a function of this file returns, where
the function is one straight way to one `return` of its parameters and constants. `Helpers.argument(...)`:
what a parameter stands for inside of the function, one call after the other (`choices`), where calls of it
are seen.

Limits: functions with decorators (other than those of `functools` that keep results), generators, coroutines,
methods other than static ones read by name, `**` in calls. A parameter of a function that others may call
has, beside the arguments that are seen, one that cannot be told.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

from patlint.source import reasons
from patlint.source.conditions import depends_on
from patlint.source.index import Index
from patlint.source.reasons import Opaque
from patlint.source.rows import Ready, Row
from patlint.source.scopes import Scope
from patlint.source.values import Environment, Value

if TYPE_CHECKING:
    from patlint.source.constants import Constants

Function: TypeAlias = ast.FunctionDef | ast.Lambda
_KEEPING = frozenset({"lru_cache", "cache"})
_DEEPEST_CALLS = 12


@dataclass(frozen=True, slots=True)
class Calls:
    """The calls of a function that the file shows; `all`: there can be no others."""

    seen: tuple[tuple[ast.Call, Scope], ...]
    all: bool


class Helpers:
    """The functions of one file."""

    def __init__(self, constants: Constants, index: Index) -> None:
        self.constants = constants
        self.index = index
        self._inside: dict[ast.AST, Scope] = {}
        self._calls: dict[ast.AST, Calls] = {}
        self._reached: dict[tuple[ast.AST, ast.AST], bool] = {}
        self._given_names: dict[Scope, frozenset[str] | None] = {}
        """None while it is being found: a function that calls itself hands its own parameters on."""
        self._frames: dict[ast.AST, Environment] = {}
        self._depth = 0

    @property
    def inside(self) -> bool:
        """A function is being called: its parameters have the values of that call."""
        return self._depth > 0

    def outcome(self, call: ast.Call, scope: Scope, env: Environment | None, depth: int) -> Value:
        """What `call` returns, a function of this file being called. Errors: `Opaque`."""
        function, owner = self._function(call.func, scope)
        frame = self._bound(call, function, owner, scope, env, depth)
        if self._depth >= _DEEPEST_CALLS:
            raise Opaque(reasons.TOO_DEEP)
        result = _result(function)
        before = self._frames.get(function)
        self._frames[function] = frame
        self._depth += 1
        try:
            return self.constants.evaluate(result, self._inner(function), None, depth + 1)
        finally:
            self._depth -= 1
            if before is None:
                del self._frames[function]
            else:
                self._frames[function] = before

    def argument(self, name: str, read: ast.Name, owner: Scope) -> Row | Ready:
        """What the parameter `name` of the function of `owner` stands for now. Errors: `Opaque`."""
        frame = self._frames.get(owner.node)
        if frame is None:
            return self._given(name, read, owner)
        self.constants.choices.consulted += 1
        if name in frame:
            return Ready(frame[name])
        raise Opaque(reasons.PARAMETER)

    def _given(self, name: str, read: ast.AST, owner: Scope) -> Row:
        """The expression that the call taken now gives for a parameter. Errors: `Opaque`."""
        function = owner.node
        if not isinstance(function, (ast.FunctionDef, ast.Lambda)) or function in self._frames:
            raise Opaque(reasons.PARAMETER)
        calls = self.calls(function, owner)
        if not calls.seen:
            raise Opaque(reasons.PARAMETER)
        size = len(calls.seen) + (not calls.all)
        number = self.constants.choices.take(function, size, reasons.PARAMETER)
        if number == len(calls.seen):
            raise Opaque(reasons.PARAMETER)
        self._check_reached(read, function, owner)
        call, scope = calls.seen[number]
        return _parameter(name, call, scope, function, owner)

    def calls(self, function: ast.AST, owner: Scope) -> Calls:
        """The calls of the function whose scope is `owner`."""
        if function not in self._calls:
            self._calls[function] = self._find_calls(function, owner)
        return self._calls[function]

    def taken(self, function: ast.AST) -> tuple[ast.Call, Scope] | None:
        """The call of `function` that is taken now."""
        number = self.constants.choices.taken(function)
        calls = self._calls.get(function)
        return (
            calls.seen[number]
            if calls is not None and number is not None and number < len(calls.seen)
            else None
        )

    def _find_calls(self, function: ast.AST, owner: Scope) -> Calls:
        names = self.constants.names
        nothing = Calls((), False)
        if not isinstance(function, ast.FunctionDef) or owner.parent is None:
            return nothing
        if not _is_plain(function, owner.parent) or owner.parent.find(function.name) is not owner.parent:
            return nothing
        bindings = owner.parent.bindings.get(function.name, [])
        if [each.node for each in bindings if each.kind != "deleted"] != [function]:
            return nothing
        if owner.parent.kind == "module" and (self.index.dynamic or self.index.star_lines):
            return nothing
        found: list[tuple[ast.Call, Scope]] = []
        complete = owner.parent.kind == "function" or names.is_private(function.name)
        for read, scope in owner.parent.reads(function.name):
            call = self.index.parents.get(read)
            if isinstance(call, ast.Call) and call.func is read:
                found.append((call, scope))
            else:
                complete = False
        if owner.parent.kind == "class" and self.index.reads.get(function.name):
            complete = False
        return Calls(tuple(found), complete)

    def _check_reached(self, read: ast.AST, function: Function, owner: Scope) -> None:
        """No condition on what the calls give stands before `read`."""
        known = self._reached.get((function, read))
        if known is None:
            names = self.given_names(owner)
            known = self._reached[function, read] = not depends_on(read, function, names, self.index, owner)
        if not known:
            raise Opaque(reasons.PARAMETER)

    def given_names(self, owner: Scope) -> frozenset[str]:
        """The parameters of a function for which one of its calls gives a constant.

        Errors: `Opaque` where that depends on itself.
        """
        if owner not in self._given_names:
            self._given_names[owner] = None
            try:
                self._given_names[owner] = self._find_given(owner)
            finally:
                if self._given_names[owner] is None:
                    del self._given_names[owner]
        found = self._given_names[owner]
        if found is None:
            raise Opaque(reasons.PARAMETER)
        return found

    def _find_given(self, owner: Scope) -> frozenset[str]:
        names = set()
        function = owner.node
        if not isinstance(function, (ast.FunctionDef, ast.Lambda)):
            return frozenset()
        calls = self.calls(function, owner)
        for name in owner.bindings:
            for call, scope in calls.seen:
                try:
                    row = _parameter(name, call, scope, function, owner)
                except Opaque:
                    continue
                if _is_constant(row, self.constants):
                    names.add(name)
        return frozenset(names)

    def _function(self, node: ast.expr, scope: Scope) -> tuple[Function, Scope]:
        """The one function that `node` stands for, and the scope that it is defined in."""
        if not isinstance(node, ast.Name):
            raise Opaque(reasons.CALL)
        owner = scope.find(node.id)
        if owner is None or owner.kind == "comprehension":
            raise Opaque(reasons.CALL)
        bindings = [binding for binding in owner.bindings[node.id] if binding.kind != "deleted"]
        if len(bindings) != 1:
            raise Opaque(reasons.CALL)
        if owner.kind == "module" and (self.index.dynamic or self.index.star_lines):
            raise Opaque(reasons.CALL)
        function = bindings[0].value if bindings[0].kind == "value" else bindings[0].node
        if isinstance(function, ast.Lambda) or (
            isinstance(function, ast.FunctionDef) and _is_plain(function, bindings[0].scope)
        ):
            return function, bindings[0].scope
        raise Opaque(reasons.CALL)

    def _inner(self, function: Function) -> Scope:
        if not self._inside:
            self._inside = {each.node: each for each in self.index.scopes if each.kind == "function"}
        return self._inside[function]

    def _bound(
        self,
        call: ast.Call,
        function: Function,
        owner: Scope,
        scope: Scope,
        env: Environment | None,
        depth: int,
    ) -> Environment:
        """The parameters with their values; those that cannot be told are left out."""
        arguments = function.args
        if arguments.kwarg is not None or any(keyword.arg is None for keyword in call.keywords):
            raise Opaque(reasons.CALL)
        given: list[Value | None] = []
        for each in call.args:
            if isinstance(each, ast.Starred):
                items = self.constants.evaluate(each.value, scope, env, depth + 1)
                if not isinstance(items, tuple):
                    raise Opaque(reasons.CALL)
                given.extend(items)
            else:
                given.append(self._maybe(each, scope, env, depth))
        positional = [each.arg for each in (*arguments.posonlyargs, *arguments.args)]
        frame: dict[str, Value | None] = dict(zip(positional, given, strict=False))
        if arguments.vararg is not None:
            rest = given[len(positional) :]
            frame[arguments.vararg.arg] = tuple(each for each in rest if each is not None)
            if None in rest:
                raise Opaque(reasons.CALL)
        elif len(given) > len(positional):
            raise Opaque(reasons.CALL)
        by_name = {*positional[len(arguments.posonlyargs) :], *(each.arg for each in arguments.kwonlyargs)}
        for keyword in call.keywords:
            if keyword.arg not in by_name or keyword.arg in frame:
                raise Opaque(reasons.CALL)
            frame[str(keyword.arg)] = self._maybe(keyword.value, scope, env, depth)
        for name, default in _defaults(arguments).items():
            if name not in frame:
                frame[name] = self._maybe(default, owner, None, depth)
        return {name: value for name, value in frame.items() if value is not None}

    def _maybe(self, node: ast.expr, scope: Scope, env: Environment | None, depth: int) -> Value | None:
        try:
            return self.constants.evaluate(node, scope, env, depth + 1)
        except Opaque as opaque:
            if opaque.reason == reasons.TOO_DEEP:
                raise
            return None


def _is_plain(function: ast.FunctionDef, scope: Scope) -> bool:
    """No decorator, or one that keeps results alone; no generator. `scope` is where it is defined."""
    for each in function.decorator_list:
        name = each.func if isinstance(each, ast.Call) else each
        last = name.attr if isinstance(name, ast.Attribute) else getattr(name, "id", "")
        if last not in _KEEPING:
            return False
        owner = scope.find(name.id) if isinstance(name, ast.Name) else None
        if owner is not None and any(each.kind != "import" for each in owner.bindings[last]):
            return False  # a function of the same name
    return not any(isinstance(each, (ast.Yield, ast.YieldFrom)) for each in ast.walk(function))


def _result(function: Function) -> ast.expr:
    """The expression that every call of the function returns. Errors: `Opaque`."""
    if isinstance(function, ast.Lambda):
        return function.body
    *before, last = function.body
    if not isinstance(last, ast.Return) or last.value is None:
        raise Opaque(reasons.CALL)
    stack: list[ast.AST] = list(before)
    while stack:
        node = stack.pop()
        if isinstance(node, ast.Return):
            raise Opaque(reasons.CALL)
        if not isinstance(node, (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef, ast.expr)):
            stack.extend(ast.iter_child_nodes(node))
    return last.value


def _defaults(arguments: ast.arguments) -> dict[str, ast.expr]:
    positional = [*arguments.posonlyargs, *arguments.args]
    late = positional[len(positional) - len(arguments.defaults) :]
    found = {each.arg: value for each, value in zip(late, arguments.defaults, strict=True)}
    for each, value in zip(arguments.kwonlyargs, arguments.kw_defaults, strict=True):
        if value is not None:
            found[each.arg] = value
    return found


def _parameter(name: str, call: ast.Call, scope: Scope, function: Function, owner: Scope) -> Row:
    """The expression that `call` gives for the parameter `name`, or its default. Errors: `Opaque`."""
    arguments = function.args
    loose = any(isinstance(each, ast.Starred) for each in call.args)
    if loose or any(keyword.arg is None for keyword in call.keywords):
        raise Opaque(reasons.STARRED)
    positional = [each.arg for each in (*arguments.posonlyargs, *arguments.args)]
    if name in positional and positional.index(name) < len(call.args):
        return Row(call.args[positional.index(name)], scope)
    by_name = any(each.arg == name for each in (*arguments.args, *arguments.kwonlyargs))
    for keyword in call.keywords:
        if keyword.arg == name and by_name:
            return Row(keyword.value, scope)
    default = _defaults(arguments).get(name)
    if default is not None and owner.parent is not None:
        return Row(default, owner.parent)
    raise Opaque(reasons.PARAMETER)


def _is_constant(row: Row, constants: Constants) -> bool:
    if isinstance(row.node, ast.Constant):
        return True
    try:
        with constants.choices.aside():
            constants.evaluate(row.node, row.scope)
    except Opaque as opaque:
        return opaque.reason == reasons.LOOP_VARIABLE
    return True
