"""Where neighbouring items of a chain, or a repeat in a repeat, are one repeat.

>>> from patlint.machine.expr import Opaque
>>> x = Opaque("x")
>>> folded(Times(x, 0, 1), 3, 3, False) == Times(x, 0, 3)  # (x?){3} is x{0,3}
True
"""

from __future__ import annotations

from typing import TypeAlias

from patlint.machine.expr import Chain, Expr, Times

_Rolled: TypeAlias = tuple[int, Expr, int, Times]
"""How many items at the end of a chain are one repeat: its body, how often it is to be added to which
repeat."""


def rolled_before(stack: list[Expr]) -> _Rolled | None:
    """`ab(ab)*` is `(ab)+`."""
    loop = stack[-1]
    if isinstance(loop, Times) and isinstance(loop.body, Chain):
        width = len(loop.body.items)
        if tuple(stack[-width - 1 : -1]) == loop.body.items:
            return width + 1, loop.body, 1, loop
    return None


def rolled_after(stack: list[Expr]) -> _Rolled | None:
    """`(ab)*ab` is `(ab)+`."""
    for width in range(2, min(len(stack) - 1, 8) + 1):
        loop = stack[-width - 1]
        if (
            isinstance(loop, Times)
            and isinstance(loop.body, Chain)
            and loop.body.items == tuple(stack[-width:])
        ):
            return width + 1, loop.body, 1, loop
    return None


def rolled_around(stack: list[Expr]) -> _Rolled | None:
    """`a(ba)*b` is `(ab)+`."""
    for width in range(1, min(len(stack) - 2, 7) + 1):
        loop = stack[-width - 1]
        if not isinstance(loop, Times) or not isinstance(loop.body, Chain):
            continue
        items = loop.body.items
        front = len(items) - width
        if front < 1 or len(stack) < width + 1 + front or items[:width] != tuple(stack[-width:]):
            continue
        ahead = tuple(stack[-width - 1 - front : -width - 1])
        if ahead == items[width:]:
            return width + 1 + front, Chain(ahead + items[:width]), 1, loop
    return None


def as_times(expr: Expr) -> Times:
    return expr if isinstance(expr, Times) else Times(expr, 1, 1)


def once(expr: Expr) -> Times:
    return Times(expr, 1, 1)


def within(a: Times, b: Times) -> bool:
    return a.low >= b.low and (b.high is None or (a.high is not None and a.high <= b.high))


def folded(inner: Times, low: int, high: int | None, lazy: bool) -> Times | None:
    """A repeat of a repeat as one, where the counts leave no gap."""
    if inner.low != inner.high and low != high and inner.lazy != lazy:
        return None
    most = None if high is None or inner.high is None else inner.high * high
    if inner.high == 0 or (inner.low == inner.high and inner.low != 1 and low != high):
        return None
    # Between k and k + 1 iterations: the least of k + 1 must not lie above the most of k by more than one.
    if (
        low != high
        and inner.high is not None
        and inner.low > 1
        and inner.low * (low + 1) > inner.high * low + 1
    ):
        return None
    if low != high and inner.high is None and low == 0 and inner.low > 1:
        return None
    return Times(inner.body, inner.low * low, most, inner.lazy or lazy)
