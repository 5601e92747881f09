"""Which growth a row of counted steps shows: a power, a base, or neither.

Steps counted at equal distances lie exactly on a polynomial where the engine's work is one (its differences of
some order are all equal), so the degree is read off, not estimated. Where they do not (a pump of which several
belong together), the slope on doubling sizes is taken. Exponential counts rise by a factor that does not sink.

>>> fit(lambda n: n * n + 3 * n + 2, False)
2
>>> fit(lambda n: 2**n + n, False)
'exponential'
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Literal, TypeAlias

Growth: TypeAlias = int | Literal["exponential"]
Count: TypeAlias = Callable[[int], int | None]
"""Steps at n pumps; None where the limit on turns was met."""

LEAST_BASE = 1.08
"""Growth per pump from which it counts as exponential; `(?:aa|aaa)*` on single a has 1.15."""
SIZES = 9
SINKS = 0.8
"""How far the logarithm of the factor may sink from the middle of the row to its end;
that of a power n ** d sinks to 0.6."""
HIGH = 6
"""Powers above this one need more sizes to be read off,"""
HIGHEST = 24
"""and above this one are only compared with the slope at the largest sizes."""


def fit(count: Count, long_pump: bool, expected: int = 0, multiplies: bool = True) -> Growth | None:
    """The growth that `count` shows from some pumps on; None where too few sizes can be counted.

    `expected`: the power that is suspected, if it is one. Without `multiplies` it cannot be exponential.
    """
    many = expected + 3 if HIGH < expected <= HIGHEST else SIZES
    sizes, values = _row(count, *((4, 2) if long_pump else (12, 6)), many)
    if len(values) < 5:
        found = _order(values)
        if found is not None:
            return found
        sizes, values = _row(count, 1, 1, many)
    found = _order(values)
    if found is not None:
        return found
    if long_pump:  # counts may come round every few pumps
        found = _order(_row(count, 6, 6, SIZES)[1])
        if found is not None:
            return found
    if not multiplies and expected > HIGH:
        return expected if settled(count, expected) else None
    if len(values) < 5:
        return _steep(values) if multiplies else None
    if multiplies and _multiplies(sizes, values):
        return "exponential"
    return _slope(count, sizes[-1])


def settled(count: Count, power: int) -> bool:
    """Whether the slope at the largest sizes that can be counted comes to this power from above, or is near it."""
    counts: list[int] = []
    size = 16
    while len(counts) < 8:
        steps = count(size)
        if steps is None:
            break
        counts.append(steps)
        size *= 2
    slopes = [math.log2(b / a) for a, b in zip(counts, counts[1:], strict=False)]
    return len(slopes) > 1 and slopes[-1] <= slopes[-2] + 0.1 and 0.9 * power <= slopes[-1] <= 1.25 * power


def rising(sizes: list[int], values: list[int]) -> Growth:
    """What a row of counts at about equal distances looks like, if it is not to be followed further; at least 1."""
    if len(values) > 4 and _multiplies(sizes, values):
        return "exponential"
    if len(values) < 2:
        return 1
    first = len(values) // 2 - 1
    slope = math.log(values[-1] / values[first]) / math.log(sizes[-1] / sizes[first])
    return max(round(slope), 1)


def _multiplies(sizes: list[int], values: list[int]) -> bool:
    """Whether counts at about equal distances rise by a factor that does not sink."""
    logs = [math.log(value) for value in values]
    rises = [b - a for a, b in zip(logs, logs[1:], strict=False)]
    part = max(len(rises) // 3, 2)
    begin = max(len(rises) // 2 - part // 2 - 1, 0)
    late = sum(rises[-part:]) / part
    middle = sum(rises[begin : begin + part]) / part
    return late > math.log(LEAST_BASE) * (sizes[-1] - sizes[-2]) and late > SINKS * middle


def _row(count: Count, start: int, step: int, many: int) -> tuple[list[int], list[int]]:
    """Counts at equal distances, until their differences settle or the turns run out."""
    sizes: list[int] = []
    values: list[int] = []
    for size in range(start, start + many * step, step):
        steps = count(size)
        if steps is None:
            break
        sizes.append(size)
        values.append(steps)
        if len(values) > 3 and _order(values) is not None:
            break
    return sizes, values


def _order(values: list[int]) -> int | None:
    """The degree of the polynomial on which counts at equal distances lie, None where there is none."""
    degree = 0
    if len(values) < 4:
        return None
    while len(values) > (1 if degree < 2 else 2):
        if len(set(values)) == 1:
            return degree if values[0] > 0 else None  # falling differences: a bound is near
        values = [b - a for a, b in zip(values, values[1:], strict=False)]
        degree += 1
    return None


def _steep(values: list[int]) -> Growth | None:
    """A great base leaves few sizes within the turns; a power's second ratio is at most 3/4 of its first."""
    ratios = [b / a for a, b in zip(values, values[1:], strict=False)]
    if len(ratios) >= 2 and min(ratios[-2:]) > 3 and ratios[-1] > 0.9 * ratios[-2]:
        return "exponential"
    return None


def _slope(count: Count, size: int) -> int | None:
    """The power that doubling the size shows; lower powers still hold it down or up."""
    counts: list[int] = []
    while len(counts) < 4:
        steps = count(size)
        if steps is None:
            break
        counts.append(steps)
        size *= 2
    slopes = [math.log2(b / a) for a, b in zip(counts, counts[1:], strict=False)]
    if not slopes:
        return None
    return round(slopes[-1]) if len(slopes) == 1 else round(2 * slopes[-1] - slopes[-2])
