"""Functions of Python whose outcome on constants is the same everywhere: `chr`, `range`, `textwrap.dedent` …

`call(constants, node, scope, env, depth)` gives the value of a call of one of them; `dotted(node, scope)` the
whole name of what an expression stands for, where imports alone tell it.
"""

from __future__ import annotations

import ast
import textwrap
from typing import TYPE_CHECKING, Any

from patlint.source import reasons
from patlint.source.names import MUTABLE
from patlint.source.reasons import Opaque
from patlint.source.rows import Item, Row
from patlint.source.scopes import Scope
from patlint.source.spelled import Listed, Spelled, cut, without_spelling

if TYPE_CHECKING:
    from patlint.source.constants import Constants
    from patlint.source.values import Environment, Value

_SEQUENCES = frozenset({"list", "tuple", "reversed", "sorted"})
_LONGEST_RANGE = 70_000
_MOST_ENTRIES = 400


def builtin(
    constants: Constants, name: str, node: ast.Call, scope: Scope, env: Environment | None, depth: int
) -> Value:
    """A call of one of Python's own functions. Errors: `Opaque`."""
    if not node.args or any(isinstance(argument, ast.Starred) for argument in node.args):
        raise Opaque(reasons.CALL)
    if name == "vars" and len(node.args) == 1 and not node.keywords:
        return _namespace(constants, node.args[0], scope, depth)
    if name in _SEQUENCES and len(node.args) == 1:
        items = sequence(constants, node.args[0], scope, env, depth)
        if name == "sorted":
            return _sorted(node, items)
        return tuple(items) if name == "tuple" else Listed(reversed(items) if name == "reversed" else items)
    if node.keywords:
        raise Opaque(reasons.CALL)
    values = [constants.evaluate(argument, scope, env, depth + 1) for argument in node.args]
    made: object
    match name, values:
        case "str", [Spelled(value=str()) as text]:
            return text
        case (("str" | "chr"), [int() as number]):
            try:
                made = str(number) if name == "str" else chr(number)
            except (ValueError, OverflowError):
                raise Opaque(reasons.CALL) from None
            return without_spelling(made, constants.text.place(node))
        case "ord", [Spelled(value=value)] if len(value) == 1:
            return ord(value)
        case "len", [Spelled(value=value)]:
            return len(value)
        case "range", [int(), *_] if len(values) <= 3 and all(isinstance(each, int) for each in values):
            try:
                numbers = range(*values)  # type: ignore[arg-type]
            except ValueError:
                raise Opaque(reasons.CALL) from None
            if len(numbers) > _LONGEST_RANGE:
                raise Opaque(reasons.TOO_LONG)
            return Listed(numbers)
    raise Opaque(reasons.CALL)


def imported(
    constants: Constants, name: str, node: ast.Call, scope: Scope, env: Environment | None, depth: int
) -> Value:
    """A call of a function of the standard library, named by its whole name. Errors: `Opaque`."""
    if any(isinstance(argument, ast.Starred) for argument in node.args) or node.keywords:
        raise Opaque(reasons.CALL)
    if name == "itertools.chain":
        parts = [sequence(constants, argument, scope, env, depth) for argument in node.args]
        return Listed(item for part in parts for item in part)
    if name == "textwrap.dedent" and len(node.args) == 1:
        text = constants.evaluate(node.args[0], scope, env, depth + 1)
        if isinstance(text, Spelled) and isinstance(text.value, str):
            made = textwrap.dedent(text.value)
            return text if made == text.value else without_spelling(made, constants.text.place(node))
    raise Opaque(reasons.CALL)


def dotted(node: ast.expr, scope: Scope) -> str | None:
    """`itertools.chain` for what `import itertools` or `from itertools import chain` binds; None for others."""
    names: list[str] = []
    while isinstance(node, ast.Attribute):
        names.append(node.attr)
        node = node.value
    if not isinstance(node, ast.Name):
        return None
    owner = scope.find(node.id)
    bindings = owner.bindings[node.id] if owner is not None else []
    if len(bindings) != 1 or bindings[0].module is None:
        return None
    member = [bindings[0].member] if bindings[0].member is not None else []
    return ".".join([bindings[0].module, *member, *reversed(names)])


def sequence(
    constants: Constants, node: ast.expr, scope: Scope, env: Environment | None, depth: int
) -> tuple[Value, ...]:
    """What a loop over `node` gives, in its order. Errors: `Opaque`."""
    item: Item = Row(node, scope, env)
    if isinstance(node, (ast.Name, ast.Attribute, ast.Dict)):
        try:
            display = constants.rows.display(item)
        except Opaque:  # evaluated below, which says why
            display = item
        if isinstance(display, Row) and isinstance(display.node, ast.Dict):
            keys = constants.rows.items(display.node, display.scope, display.env)
            return tuple(constants.rows.value(key, depth + 1) for key in keys)
    if _is_view(node):
        return tuple(constants.rows.value(row, depth + 1) for row in constants.rows.ordered(node, scope, env))
    value = constants.evaluate(node, scope, env, depth + 1)
    match value:
        case tuple():
            return value
        case Spelled(value=str() as text):
            return tuple(cut(value, at, at + 1) for at in range(len(text)))
        case Spelled(value=bytes() as data):
            return tuple(data)
        case _:
            raise Opaque(reasons.CALL)


def _is_view(node: ast.expr) -> bool:
    """`table.items()` and its like."""
    match node:
        case ast.Call(func=ast.Attribute(attr="items" | "values" | "keys"), args=[], keywords=[]):
            return True
        case _:
            return False


def _sorted(node: ast.Call, items: tuple[Value, ...]) -> Value:
    options: dict[str, Any] = {}
    for keyword in node.keywords:
        match keyword:
            case ast.keyword(arg="reverse", value=ast.Constant(value=bool() as reverse)):
                options["reverse"] = reverse
            case ast.keyword(arg="key", value=ast.Name(id="len")):
                options["key"] = lambda item: len(item.value)
            case ast.keyword(
                arg="key",
                value=ast.Lambda(
                    args=ast.arguments(args=[ast.arg(arg=name)]),
                    body=ast.UnaryOp(
                        op=ast.USub(), operand=ast.Call(func=ast.Name(id="len"), args=[ast.Name(id=given)])
                    ),
                ),
            ) if name == given:
                options["key"] = lambda item: -len(item.value)
            case _:
                raise Opaque(reasons.CALL)
    options.setdefault("key", lambda item: item.value)
    texts = [item for item in items if isinstance(item, Spelled)]
    if len(texts) != len(items) or len({type(item.value) for item in texts}) > 1:
        raise Opaque(reasons.CALL)
    return Listed(sorted(texts, **options))


def _namespace(constants: Constants, node: ast.expr, scope: Scope, depth: int) -> Value:
    """`vars(Class)`: what the body of a class of this file binds, as far as it is constant."""
    owner = constants.names.class_of(node, scope) if isinstance(node, ast.Name) else None
    if (
        owner is None
        or not isinstance(owner.node, ast.ClassDef)
        or owner.node.name != getattr(node, "id", "")
    ):
        raise Opaque(reasons.CALL)
    if len(owner.bindings) > _MOST_ENTRIES:
        raise Opaque(reasons.TOO_MANY)
    entries: dict[str, Value] = {}
    for name, bindings in owner.bindings.items():
        if len(bindings) != 1 or bindings[0].value is None or isinstance(bindings[0].value, MUTABLE):
            continue
        attribute = ast.Attribute(node, name, ast.Load())
        ast.copy_location(attribute, node)
        try:
            entries[name] = constants.evaluate(attribute, scope, None, depth + 1)
        except Opaque:
            continue
    return entries
