"""The flags of a call -> an integer, where the text of the file tells them.

Flags are `re`'s names (`re.I`, `re.IGNORECASE`, `re.RegexFlag.I`, also imported by name), integers, names
of constants, and unions, sums and intersections of them. Inline flags stay in the pattern.
"""

from __future__ import annotations

import ast

from patlint.source import reasons
from patlint.source.constants import Constants
from patlint.source.reasons import Opaque
from patlint.source.rows import Ready, Row
from patlint.source.scopes import Scope

_LETTERS = {"I": 2, "L": 4, "M": 8, "S": 16, "U": 32, "X": 64, "A": 256, "T": 1}
_NAMES = {
    "TEMPLATE": 1,
    "IGNORECASE": 2,
    "LOCALE": 4,
    "MULTILINE": 8,
    "DOTALL": 16,
    "UNICODE": 32,
    "VERBOSE": 64,
    "DEBUG": 128,
    "ASCII": 256,
    "NOFLAG": 0,
}
VALUES = _NAMES | _LETTERS
"""Every name of a flag -> its bits, as on the Pythons from 3.10 on."""
_DEEPEST = 60


def evaluate_flags(node: ast.expr | None, scope: Scope, constants: Constants, depth: int = 0) -> int:
    """Errors: `Opaque(reasons.FLAGS)`."""
    if node is None:
        return 0
    constants.step()
    if depth > _DEEPEST:
        raise Opaque(reasons.FLAGS)
    match node:
        case ast.Constant(value=int() as number):
            return int(number)
        case ast.BinOp(op=ast.BitOr() | ast.BitAnd() | ast.Add() | ast.BitXor() | ast.Sub()):
            left = evaluate_flags(node.left, scope, constants, depth + 1)
            right = evaluate_flags(node.right, scope, constants, depth + 1)
            match node.op:
                case ast.BitOr():
                    return left | right
                case ast.BitAnd():
                    return left & right
                case ast.BitXor():
                    return left ^ right
                case ast.Add():
                    return left + right
                case _:
                    return left - right
        case ast.IfExp():
            body = evaluate_flags(node.body, scope, constants, depth + 1)
            if body == evaluate_flags(node.orelse, scope, constants, depth + 1):
                return body
        case ast.NamedExpr():
            return evaluate_flags(node.value, scope, constants, depth + 1)
        case ast.Name() | ast.Attribute():
            return _named(node, scope, constants, depth)
        case ast.Subscript(value=ast.Attribute() | ast.Name(), slice=ast.Constant(value=str() as key)):
            if constants.engine.denotes(node.value, scope) == "re.RegexFlag" and key in VALUES:
                return VALUES[key]
    raise Opaque(reasons.FLAGS)


def _named(node: ast.Name | ast.Attribute, scope: Scope, constants: Constants, depth: int) -> int:
    try:
        denoted = constants.engine.denotes(node, scope)
    except Opaque:  # a flag on one way, a number on another
        denoted = None
    if denoted is not None:
        parts = denoted.split(".")
        if parts[:2] == ["re", "RegexFlag"] and len(parts) == 3:
            parts = ["re", parts[2]]
        if len(parts) == 2 and parts[1] in VALUES:
            return VALUES[parts[1]]
        raise Opaque(reasons.FLAGS)
    try:
        item = constants.origin(node, scope)
        if isinstance(item, Row):
            return evaluate_flags(item.node, item.scope, constants, depth + 1)
        if isinstance(item, Ready) and isinstance(item.value, int):
            return item.value
        definitions = constants.names.definitions(node, scope)
    except Opaque:
        raise Opaque(reasons.FLAGS) from None
    found = {evaluate_flags(value, inner, constants, depth + 1) for value, inner in definitions}
    if len(found) != 1:
        raise Opaque(reasons.FLAGS)
    return found.pop()
