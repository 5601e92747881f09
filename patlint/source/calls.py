"""Calls whose outcome is a constant: `re.escape`, `"|".join`, `.format` and other pure methods of texts.

Only calls that give the same on every Python and every machine are made, on constants alone.
"""

from __future__ import annotations

import ast
import re
from typing import TYPE_CHECKING

from patlint.source import library, reasons
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
            if name == "map":
                return _mapped(constants, node, scope, env, depth)
            return library.builtin(constants, name, node, scope, env, depth)
        case ast.Name() | ast.Attribute() if (known := library.dotted(node.func, scope)) is not None:
            return library.imported(constants, known, node, scope, env, depth)
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


def _mapped(constants: Constants, node: ast.Call, scope: Scope, env: Environment | None, depth: int) -> Value:
    """`map(re.escape, …)`."""
    if len(node.args) != 2 or constants.engine.denotes(node.args[0], scope) != "re.escape":
        raise Opaque(reasons.CALL)
    return Listed(_escape(item) for item in library.sequence(constants, node.args[1], scope, env, depth))


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
    if name == "join" and len(node.args) == 1 and not node.keywords:
        return _join(base, library.sequence(constants, node.args[0], scope, env, depth))
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
        raise Opaque(reasons.CALL)
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
