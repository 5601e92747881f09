"""Repeats with a bound, judged by the steps that they can take.

A bound makes growth flat in the end, but the end may be out of reach: `(a{1,30}){1,30}$` takes more steps on 40
characters than a machine does in a year. So the pattern is looked at as if the bounds were not there (`opened`):
what is suspected of that graph gives prefixes and pumps. They are then counted on the pattern itself, at more
and more pumps, until the steps pass the limit `bounded_steps` or the text has LONGEST characters. The growth told
is the one that is seen below that length.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

from patlint.machine.ambiguity import Letters, Suspect
from patlint.machine.candidates import Text
from patlint.machine.fit import Growth, rising
from patlint.machine.program import can_be_empty, one_character
from patlint.syntax import tree as t

LONGEST = 4_000
"""Characters of the longest text that is counted."""
MANY = 4
"""Bounds from which on a repeat is opened; lower ones are walked as they are."""
FIRST = 8
STRETCHES = (20, 100)
"""Characters that lie between the pumps of a stretched text."""


def opened(node: t.Node) -> t.Node:
    """The tree without the bounds of its repeats; the same node where there is none."""
    match node:
        case t.Sequence():
            items = tuple(map(opened, node.items))
            return (
                node
                if all(a is b for a, b in zip(items, node.items, strict=True))
                else replace(node, items=items)
            )
        case t.Alternation():
            branches = tuple(map(opened, node.branches))
            same = all(a is b for a, b in zip(branches, node.branches, strict=True))
            return node if same else replace(node, branches=branches)
        case t.Group() | t.Look(ahead=True) | t.Atomic():
            body = opened(node.body)
            return node if body is node.body else replace(node, body=body)
        case t.Conditional():
            no = None if node.no is None else opened(node.no)
            yes = opened(node.yes)
            return node if yes is node.yes and no is node.no else replace(node, yes=yes, no=no)
        case t.Repeat():
            return _repeat(node)
        case _:
            return node


def _repeat(node: t.Repeat) -> t.Node:
    body = opened(node.body)
    most = node.maximum
    if most is None or most < MANY or (one_character(body) is not None and most - node.minimum < MANY):
        return node if body is node.body else replace(node, body=body)
    if one_character(body) is not None:
        return replace(node, body=body, maximum=None)
    # Below the minimum there is no guard: a body that can be empty may be taken twice in one place.
    twice = t.Sequence(node.span, (body, body)) if node.minimum > 1 else body
    return replace(node, body=twice, minimum=min(node.minimum, 1), maximum=None)


def repeats_nothing(node: t.Node) -> bool:
    """Whether something that can be empty must be taken many times: then ways grow without any text."""
    return any(
        isinstance(part, t.Repeat) and part.minimum >= MANY and can_be_empty(part.body)
        for part in t.walk(node)
    )


def stretched(text: Text, suspect: Suspect, letters: Letters) -> Iterator[Text]:
    """The text, then the same with longer pumps: what a part can take again and again stands before each.

    `(.*a){20}` can have twenty pumps at most, but between them there is room.
    """
    yield text
    mask = suspect.loops
    if mask:
        used = {letters(each) for each in suspect.pump}
        others = [code for bit, code in enumerate(letters.letters) if mask >> bit & 1 and code not in used]
        code = min(others, key=lambda code: (not 32 < code < 127, code), default=letters(mask))
        for many in STRETCHES:
            yield replace(text, pump=(code,) * many + text.pump)


def passes(
    count: Callable[[int], int | None], fixed: int, pump: int, threshold: int
) -> tuple[int | None, bool]:
    """The pumps at which the steps pass the threshold (None: they do not), and whether turns were wanting.

    `fixed`: characters of prefix and suffix; `pump`: those of one pump.
    """
    n = FIRST
    before = 0
    while True:
        n = min(n, max((LONGEST - fixed) // pump, 1))
        steps = count(n)
        if steps is None:
            return None, True
        if steps >= threshold:
            return _least(count, n, threshold), False
        last = fixed + (n + 1) * pump > LONGEST
        # Flat already, or even the cube of what is left to grow does not get there.
        reach = (LONGEST / (fixed + n * pump)) ** 4
        if last or steps <= before or (n > 64 and steps * reach < threshold):
            return None, False
        before = steps
        n *= 2


def _least(count: Callable[[int], int | None], n: int, threshold: int) -> int:
    """About the fewest pumps that pass it, so that the growth is told of what leads there and not of what follows."""
    few = n // 2
    while n - few > max(n // 16, 1):
        middle = (few + n) // 2
        steps = count(middle)
        if steps is None or steps < threshold:
            few = middle
        else:
            n = middle
    return n


def growth_below(count: Callable[[int], int | None], n: int) -> Growth:
    """What the counts look like up to n pumps, where the steps are already too many; at least 1."""
    parts = min(n, 9)
    sizes = sorted({max(n * part // parts, 1) for part in range(1, parts + 1)})
    rows = [(size, steps) for size in sizes if (steps := count(size)) is not None]
    return rising([size for size, _ in rows], [steps for _, steps in rows])
