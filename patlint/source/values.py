"""The values that the evaluation of expressions works with, and what is reckoned with them.

A `Value` is a `Spelled` text, an int, a tuple (any written-out sequence; `Listed` where it is no tuple for
`%`) or a dict of them.
"""

from __future__ import annotations

import ast
from typing import TypeAlias

from patlint.source import reasons
from patlint.source.reasons import Opaque
from patlint.source.spelled import Spelled

Value: TypeAlias = Spelled | int | tuple["Value", ...] | dict[str, "Value"]
Environment: TypeAlias = dict[str, Value]


def arithmetic(op: ast.operator, left: Value, right: Value) -> Value:
    """Errors: `Opaque` for what is no whole number of a size that a pattern can hold."""
    if isinstance(left, int) and isinstance(right, int):
        match op:
            case ast.Sub():
                return small(left - right)
            case ast.Pow() if 0 <= right <= 64 and abs(left) < 1 << 16:
                return small(left**right)
            case ast.LShift() if 0 <= right <= 64:
                return small(left << right)
            case ast.FloorDiv() if right:
                return left // right
    raise Opaque(reasons.EXPRESSION)


def small(number: int) -> int:
    """Numbers of a size that a pattern can hold; others would only cost time."""
    if abs(number) >> 128:
        raise Opaque(reasons.TOO_LONG)
    return number


def same(left: Value, right: Value) -> bool:
    """Whether two values are equal, wherever they were written."""
    match left, right:
        case (Spelled(), Spelled()):
            return type(left.value) is type(right.value) and left.value == right.value
        case (tuple(), tuple()):
            return type(left) is type(right) and len(left) == len(right) and all(map(same, left, right))
        case (int(), int()):
            return left == right
        case (dict(), dict()):
            return left.keys() == right.keys() and all(same(left[key], right[key]) for key in left)
    return False
