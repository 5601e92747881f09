r"""Expressions that are simplified while they are built.

`Algebra` has a constructor for each kind of expression that applies the laws at hand: `x|x` = x, `xx*` = x+,
`(x|)` = x?, `(x*)*` = x*, `x|xy` = xy?, `a|b` = [ab], `a(ba)*b` = (ab)+ and so on.

>>> made = Algebra(lambda chars: "".join(map(chr, chars)))
>>> a, b = (Chars(CharSet.of_chars(letter)) for letter in "ab")
>>> made.text(made.choice((made.chain((a, b)), a)))
'ab?'

With `ordered`, only laws are used that also keep the order in which a backtracking engine takes the ways
through an expression: alternatives keep their places. Without, any law that keeps the language may be used.

Laws are not trusted: whoever shows a result to a user proves it on automata.
Source: Kozen, A completeness theorem for Kleene algebras, 1994 (the laws); Owens, Reppy, Turon,
Regular-expression derivatives re-examined, 2009, section 4.1 (constructors that keep expressions similar to
canonical ones).
"""

from __future__ import annotations

from collections.abc import Callable, Iterable

from patlint.machine.expr import (
    EMPTY,
    LOOSE,
    NOTHING,
    Chain,
    Chars,
    Choice,
    Expr,
    Opaque,
    Times,
    Writer,
    nullable,
)
from patlint.machine.repeats import (
    as_times,
    folded,
    once,
    rolled_after,
    rolled_around,
    rolled_before,
    within,
)
from patlint.syntax.charset import CharSet

UNROLL = 6
"""Repeats of at least so many are not taken apart to find a common prefix."""


class Algebra:
    """Constructors and text of expressions, for one way to spell sets of characters.

    `braces` prefers `x{2}` to `xx` for what is longer than a character; with `words`, branches that are
    words (three letters or more) are only merged where no alternative is left between them.
    """

    def __init__(
        self,
        spell: Callable[[CharSet], str],
        ordered: bool = False,
        braces: bool = False,
        words: bool = False,
    ) -> None:
        self.writer = Writer(spell, braces)
        self.ordered = ordered
        self.words = words
        self._sets: dict[CharSet, CharSet] = {}

    def text(self, expr: Expr, binding: int = LOOSE) -> str:
        return self.writer.text(expr, binding)

    def size(self, expr: Expr) -> int:
        return self.writer.size(expr)

    def chars(self, chars: CharSet) -> Chars:
        """One character of a set; equal sets are kept as one object, which makes comparisons quick."""
        return Chars(self._sets.setdefault(chars, chars))

    def chain(self, items: Iterable[Expr]) -> Expr:
        stack: list[Expr] = []
        for item in items:
            for part in item.items if isinstance(item, Chain) else (item,):
                if part == NOTHING:
                    return NOTHING
                self._push(stack, part)
        return stack[0] if len(stack) == 1 else Chain(tuple(stack))

    def _push(self, stack: list[Expr], item: Expr) -> None:
        if stack:
            merged = self._merged(stack[-1], item)
            if merged is not None:
                stack.pop()
                self._push(stack, merged)
                return
        stack.append(item)
        for rolled in (rolled_before, rolled_after, rolled_around):
            found = rolled(stack)
            if found is not None:
                width, body, added, loop = found
                del stack[-width:]
                high = None if loop.high is None else loop.high + added
                self._push(stack, self.times(body, loop.low + added, high, loop.lazy))
                return

    def _merged(self, a: Expr, b: Expr) -> Expr | None:
        """`ab` as one repeat, where both repeat the same."""
        if isinstance(a, Chars) and isinstance(b, Chars):
            return self.times(a, 2, 2) if a == b else None
        for first, second in (
            (as_times(a), as_times(b)),
            (once(a), as_times(b)),
            (as_times(a), once(b)),
        ):
            if first.body != second.body or isinstance(first.body, Opaque):
                continue
            fixed_a, fixed_b = first.low == first.high, second.low == second.high
            if not fixed_a and not fixed_b and first.lazy != second.lazy:
                continue
            lazy = second.lazy if fixed_a else first.lazy
            high = None if first.high is None or second.high is None else first.high + second.high
            return self.times(first.body, first.low + second.low, high, lazy)
        return None

    def counted(self, expr: Expr) -> Expr:
        """`expr` with runs of several items written once and counted, where that is shorter: `(?:a.){3}`."""
        match expr:
            case Chain():
                items = [self.counted(item) for item in expr.items]
                for width in range(2, min(6, len(items) // 2) + 1):
                    items = self._counted_runs(items, width)
                return self.chain(items)
            case Choice():
                return Choice(tuple(map(self.counted, expr.branches)))
            case Times():
                return Times(self.counted(expr.body), expr.low, expr.high, expr.lazy)
            case _:
                return expr

    def _counted_runs(self, items: list[Expr], width: int) -> list[Expr]:
        out: list[Expr] = []
        place = 0
        while place < len(items):
            block = items[place : place + width]
            count = 1
            while items[place + count * width : place + (count + 1) * width] == block:
                count += 1
            run = Times(Chain(tuple(block)), count, count)
            if count > 1 and self.size(run) < self.size(Chain(tuple(block))) * count:
                out.append(run)
                place += width * count
            else:
                out.append(items[place])
                place += 1
        return out

    def star(self, body: Expr) -> Expr:
        return self.times(body, 0, None)

    def optional(self, body: Expr, lazy: bool = False) -> Expr:
        return self.times(body, 0, 1, lazy)

    def times(self, body: Expr, low: int, high: int | None, lazy: bool = False) -> Expr:
        if low == high:
            lazy = False
        if high == 0 or body == EMPTY:
            return EMPTY
        if body == NOTHING:
            return NOTHING if low else EMPTY
        if low == high == 1 or ((low, high, lazy) == (0, 1, False) and nullable(body)):
            return body
        if isinstance(body, Times):
            once_only = folded(body, low, high, lazy)
            if once_only is not None:
                return self.times(once_only.body, once_only.low, once_only.high, once_only.lazy)
        if not self.ordered and nullable(body):
            if low and high is not None:
                return self.times(body, 0, high, lazy)  # an empty iteration may stand for a missing one
            if low:
                low = 0
        if high is None and low <= 1:
            inner = self._starred(body)
            if inner != body:
                empty = low == 0 or nullable(body)
                return self.times(inner, 0 if empty else 1, None, lazy)
        return Times(body, low, high, lazy)

    def _starred(self, body: Expr) -> Expr:
        """A simpler expression with the same repetition without bound, where there is one."""
        match body:
            case Choice():
                inner = tuple(self._starred_branch(branch) for branch in body.branches)
                if inner != body.branches:
                    return self.choice(inner)
            case Times(low=0, high=1) if not self.ordered:
                return body.body
            case Chain() if not self.ordered and all(map(nullable, body.items)):
                return self.choice(self._starred_branch(item) for item in body.items)
            case Chain():
                # `(a+b?)*` is `(ab?)*`: an iteration without b stands for a repetition of a.
                firm = [item for item in body.items if not nullable(item)]
                if len(firm) == 1 and isinstance(firm[0], Times) and firm[0].low == 1 and not firm[0].lazy:
                    return self.chain([firm[0].body if item is firm[0] else item for item in body.items])
        return body

    def _starred_branch(self, branch: Expr) -> Expr:
        if isinstance(branch, Times) and branch.low <= 1 and (not branch.lazy or not self.ordered):
            return branch.body if branch.low or not self.ordered else branch
        return branch

    def choice(self, branches: Iterable[Expr]) -> Expr:
        flat = self._flat(branches)
        if EMPTY in flat:
            place = flat.index(EMPTY)
            before, after = flat[:place], flat[place + 1 :]
            if not self.ordered or not after:
                return self.optional(self.choice(before + after))
            return self.choice([*before, self.optional(self.choice(after), lazy=True)])
        flat = self._absorbed(flat)
        if len(flat) < 2:
            return flat[0] if flat else NOTHING
        best: Expr = Choice(tuple(flat))
        if len(flat) <= 64:
            for at_end in (False, True):
                other = self._factored(flat, at_end)
                if other is not None and self.size(other) < self.size(best):
                    best = other
        return best

    def _flat(self, branches: Iterable[Expr]) -> list[Expr]:
        """Branches without repetitions, single characters put together."""
        flat: dict[Expr, None] = {}
        chars_at: Chars | None = None
        for branch in branches:
            for part in branch.branches if isinstance(branch, Choice) else (branch,):
                if isinstance(part, Chars):
                    before = next(reversed(flat), None) if self.ordered else chars_at
                    if isinstance(before, Chars):
                        joined = self.chars(before.chars | part.chars)
                        flat = {(joined if each == before else each): None for each in flat}
                        chars_at = joined
                        continue
                    chars_at = part
                flat[part] = None
        return list(flat)

    def _absorbed(self, flat: list[Expr]) -> list[Expr]:
        """Repeats of the same body put together: `x|x*` is `x*`, `x{2}|x{3}` is `x{2,3}`."""
        kept: list[Expr] = []
        for branch in flat:
            here = as_times(branch)
            for place, other in enumerate(kept):
                there = as_times(other)
                if here.body != there.body:
                    continue
                if within(here, there):
                    break
                if self.ordered:
                    continue
                if within(there, here):
                    kept[place] = branch
                    break
                if here.lazy == there.lazy or here.low == here.high or there.low == there.high:
                    first, last = sorted((here, there), key=lambda each: each.low)
                    if first.high is not None and last.low <= first.high + 1:
                        high = None if last.high is None else max(first.high, last.high)
                        kept[place] = self.times(here.body, first.low, high, here.lazy or there.lazy)
                        break
            else:
                kept.append(branch)
        return kept

    def _factored(self, flat: list[Expr], at_end: bool) -> Expr | None:
        """The choice with prefixes (or suffixes) that several branches share taken out."""
        if self.ordered and at_end:
            return self._common_end(flat)
        groups: list[tuple[Expr, list[list[Expr]], list[Expr]]] = []
        for branch in flat:
            row = _elements(branch)
            if at_end:
                row.reverse()
            for index, (head, rows, members) in enumerate(groups):
                if row[0] == head and (not self.ordered or index == len(groups) - 1):
                    rows.append(row)
                    members.append(branch)
                    break
            else:
                groups.append((row[0], [row], [branch]))
        if len(groups) == len(flat):
            return None
        out = []
        for _, rows, members in groups:
            if len(rows) == 1:
                out.append(members[0])
                continue
            joined = self._joined(rows, at_end)
            if (
                self.words
                and len(flat) > 2
                and sum(map(_is_word, members)) > 1
                and _has_choice_or_set(joined, members)
            ):
                out.extend(members)
            elif self.size(joined) <= self.size(Choice(tuple(members))):
                out.append(joined)
            else:
                out.extend(members)
        if len(out) == len(flat):
            return None
        return out[0] if len(out) == 1 else self.choice(out)

    def _common_end(self, flat: list[Expr]) -> Expr | None:
        """Only a suffix that all branches share may go behind them without a change of order."""
        rows = [_elements(branch)[::-1] for branch in flat]
        if any(row[0] != rows[0][0] for row in rows):
            return None
        if self.words and len(flat) > 2 and sum(map(_is_word, flat)) > 1:
            return None
        return self._joined(rows, True)

    def _joined(self, rows: list[list[Expr]], at_end: bool) -> Expr:
        common = 0
        while all(len(row) > common and row[common] == rows[0][common] for row in rows):
            common += 1
        rests = [row[common:] for row in rows]
        shared = rows[0][:common]
        if at_end:
            rest = self.choice([self.chain(reversed(row)) for row in rests])
            return self.chain([rest, *reversed(shared)])
        return self.chain([*shared, self.choice([self.chain(row) for row in rests])])


def reverse(expr: Expr, algebra: Algebra) -> Expr:
    """The expression of the texts read backwards."""
    match expr:
        case Chars() | Opaque():
            return expr
        case Chain():
            return algebra.chain([reverse(item, algebra) for item in reversed(expr.items)])
        case Choice():
            return algebra.choice([reverse(branch, algebra) for branch in expr.branches])
        case Times():
            return algebra.times(reverse(expr.body, algebra), expr.low, expr.high, expr.lazy)


def _elements(expr: Expr) -> list[Expr]:
    """The items of a chain, short repeats taken apart: `a{1,3}` is `a`, `a{,2}`."""
    out: list[Expr] = []
    for item in expr.items if isinstance(expr, Chain) else (expr,):
        if isinstance(item, Times) and 0 < item.low < UNROLL:
            out += [item.body] * item.low
            if item.high != item.low:
                high = None if item.high is None else item.high - item.low
                out.append(Times(item.body, 0, high, item.lazy))
        else:
            out.append(item)
    return out


def _is_word(expr: Expr) -> bool:
    items = _elements(expr)
    return len(items) >= 3 and all(
        isinstance(item, Chars) and item.chars.size() <= 4 and chr(item.chars.bounds[0]).isalpha()
        for item in items
    )


def _has_choice_or_set(joined: Expr, members: list[Expr]) -> bool:
    """Whether words were merged into something other than a word with one optional part."""
    items = _elements(joined)
    kept = [item for item in items if isinstance(item, Chars)]
    known = {item for member in members for item in _elements(member)}
    return len(items) - len(kept) > 1 or any(item not in known for item in kept) or len(members) > 2
