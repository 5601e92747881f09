"""Calls whose outcome is a constant: `re.escape`, `"|".join`, `.format` and other pure methods of texts.

Only calls that give the same on every Python and every machine are made, on constants alone.
"""

from __future__ import annotations

import ast
import re
from typing import TYPE_CHECKING, Any

from patlint.source import reasons
from patlint.source.engine import FUNCTIONS, bind_arguments
from patlint.source.formatting import braces, plain
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.spelled import Listed, Spelled, join, without_spelling

if TYPE_CHECKING:
    from patlint.source.constants import Constants
    from patlint.source.values import Environment, Value

_PURE_METHODS = frozenset(
    {"strip", "lstrip", "rstrip", "replace", "lower", "upper", "encode", "decode"}
    | {"removeprefix", "removesuffix"}
)
_TO_SEQUENCE = frozenset({"list", "tuple", "reversed", "sorted"})


def pattern_argument(call: ast.Call) -> ast.expr | None:
    """The pattern of a call of `re.compile`, None where it is not written out."""
    return bind_arguments(call, FUNCTIONS["compile"]).given.get("pattern")


def evaluate_call(
    constants: Constants, node: ast.Call, scope: Scope, env: Environment | None, depth: int
) -> Value:
    """Errors: `Opaque`; `reasons.COMPILED` where the call makes a pattern object."""
    denoted = constants.engine.denotes(node.func, scope)
    if denoted == "re.compile":
        raise Opaque(reasons.COMPILED)
    if denoted == "re.escape" and len(node.args) == 1 and not node.keywords:
        return _escape(constants.evaluate(node.args[0], scope, env, depth + 1))
    if denoted is not None:
        raise Opaque(reasons.CALL)
    match node.func:
        case ast.Name(id=name) if scope.find(name) is None and not constants.index.star_lines:
            return _builtin(constants, name, node, scope, env, depth)
        case ast.Name():
            return constants.helpers.outcome(node, scope, env, depth)
        case ast.Attribute():
            return _method(constants, node.func, node, scope, env, depth)
    raise Opaque(reasons.CALL)


def _escape(value: Value) -> Spelled:
    if not isinstance(value, Spelled):
        raise Opaque(reasons.CALL)
    if _escaped(value.value) == value.value:
        return value
    return join(without_spelling(_escaped(run.text), run.whole) for run in value.runs)


def _escaped(text: str | bytes) -> str | bytes:
    return re.escape(text) if isinstance(text, str) else re.escape(text)


def _builtin(
    constants: Constants, name: str, node: ast.Call, scope: Scope, env: Environment | None, depth: int
) -> Value:
    if not node.args or any(isinstance(argument, ast.Starred) for argument in node.args):
        raise Opaque(reasons.CALL)
    if name == "map" and len(node.args) == 2:
        if constants.engine.denotes(node.args[0], scope) != "re.escape":
            raise Opaque(reasons.CALL)
        items = constants.evaluate(node.args[1], scope, env, depth + 1)
        if not isinstance(items, tuple):
            raise Opaque(reasons.CALL)
        return Listed(_escape(item) for item in items)
    if len(node.args) != 1:
        raise Opaque(reasons.CALL)
    if name in _TO_SEQUENCE:
        items = constants.evaluate(node.args[0], scope, env, depth + 1)
        if not isinstance(items, tuple):
            raise Opaque(reasons.CALL)
        if name == "sorted":
            return _sorted(node, items)
        return tuple(items) if name == "tuple" else Listed(reversed(items) if name == "reversed" else items)
    if node.keywords:
        raise Opaque(reasons.CALL)
    value = constants.evaluate(node.args[0], scope, env, depth + 1)
    if name == "str" and isinstance(value, Spelled) and isinstance(value.value, str):
        return value
    if name in ("str", "chr") and isinstance(value, int) and not isinstance(value, bool):
        try:
            made = str(value) if name == "str" else chr(value)
        except (ValueError, OverflowError):
            raise Opaque(reasons.CALL) from None
        return without_spelling(made, constants.text.place(node))
    raise Opaque(reasons.CALL)


def _sorted(node: ast.Call, items: tuple[Value, ...]) -> tuple[Value, ...]:
    texts = [item for item in items if isinstance(item, Spelled)]
    options: dict[str, Any] = {}
    for keyword in node.keywords:
        match keyword:
            case ast.keyword(arg="reverse", value=ast.Constant(value=bool() as reverse)):
                options["reverse"] = reverse
            case ast.keyword(arg="key", value=ast.Name(id="len")):
                options["key"] = lambda item: len(item.value)
            case _:
                raise Opaque(reasons.CALL)
    options.setdefault("key", lambda item: item.value)
    if len(texts) != len(items) or len({type(item.value) for item in texts}) > 1:
        raise Opaque(reasons.CALL)
    return Listed(sorted(texts, **options))


def _method(
    constants: Constants,
    function: ast.Attribute,
    node: ast.Call,
    scope: Scope,
    env: Environment | None,
    depth: int,
) -> Value:
    name = function.attr
    if name not in _PURE_METHODS and name not in ("join", "format"):
        raise Opaque(reasons.CALL)
    base = constants.evaluate(function.value, scope, env, depth + 1)
    if not isinstance(base, Spelled):
        raise Opaque(reasons.CALL)
    if any(isinstance(a, ast.Starred) for a in node.args) or any(k.arg is None for k in node.keywords):
        raise Opaque(reasons.STARRED)
    positional = [constants.evaluate(argument, scope, env, depth + 1) for argument in node.args]
    named = {
        str(keyword.arg): constants.evaluate(keyword.value, scope, env, depth + 1)
        for keyword in node.keywords
    }
    if name in ("lower", "upper") and not base.value.isascii():
        raise Opaque(reasons.CALL)  # differs with the version of Unicode
    if name == "format":
        return braces(base, positional, named)
    if name == "join":
        if len(positional) != 1 or named or not isinstance(positional[0], tuple):
            raise Opaque(reasons.CALL)
        return _join(base, positional[0])
    try:
        made = getattr(base.value, name)(*map(plain, positional), **{k: plain(v) for k, v in named.items()})
    except Exception:  # whatever a method makes of these arguments
        raise Opaque(reasons.CALL) from None
    if not isinstance(made, (str, bytes)):
        raise Opaque(reasons.CALL)
    unchanged = type(made) is type(base.value) and made == base.value
    return base if unchanged else without_spelling(made, constants.text.place(node))


def _join(separator: Spelled, items: tuple[Value, ...]) -> Spelled:
    parts: list[Spelled] = []
    for number, item in enumerate(items):
        if not isinstance(item, Spelled):
            raise Opaque(reasons.CALL)
        if number:
            parts.append(separator)
        parts.append(item)
    if not parts:
        return Spelled(separator.value[:0], ())
    return join(parts)
