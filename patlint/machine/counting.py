"""How many steps a backtracking engine takes on a text, counted without walking them one by one.

The engine remembers nothing of failed places, so it walks the same places again and again. What it does from
an instruction at a place depends on these two only (and on the loops that began an iteration just there), so
each is reckoned once and its steps are added wherever it is reached: a text on which `re` would run for years
is counted in milliseconds, to the last step. The counts are those of `matcher.Matcher`, which walks every
step; the tests compare them.

>>> from patlint.machine.program import compile_tree
>>> from patlint.syntax.parser import parse
>>> counter = Counter(compile_tree(parse("(a+)+$")))
>>> counter.steps("a" * 64 + "!", "match", 10_000)[0] > 2 ** 64
True

Cost: one turn for each instruction and place that is reckoned; places that a one-character repeat gives back
are summed up once for all places at which the repeat can begin. Limit: `turns`.
What depends on the texts of groups (back-references, conditionals) is not counted here: `countable`.
"""

from __future__ import annotations

from typing import TypeAlias

from patlint.machine import program as p
from patlint.machine.matcher import Matcher

Marks: TypeAlias = frozenset[int]
"""Loops that began an iteration at the present place; NOT_EMPTY: a match may not end here."""
State: TypeAlias = tuple[int, int, Marks]
Value: TypeAlias = tuple[int, int]
"""Where the match ends (-1: no match) and the steps to find that out."""

NO_MARKS: Marks = frozenset()
NOT_EMPTY = -1
FORBIDDEN: Marks = frozenset((NOT_EMPTY,))


class OutOfTurns(Exception):
    pass


def countable(program: p.Program) -> bool:
    return not any(isinstance(op, p.Back | p.Test) for op in program.code)


class Counter:
    """Counts for one program; texts are counted one after the other."""

    def __init__(self, program: p.Program) -> None:
        self.matcher = Matcher(program)
        self.program = program

    def steps(self, text: str | bytes, manner: str, turns: int) -> tuple[int | None, int]:
        """Steps of the manner on `text` (None: the turns did not suffice), and the turns that are left."""
        count = _Count(self.matcher, text, manner == "fullmatch", turns)
        try:
            return count.whole(manner), count.turns
        except OutOfTurns:
            return None, 0


class _Frame:
    """A state under way: its steps so far, and what it will try next."""

    __slots__ = ("key", "op", "place", "stage", "steps", "tried")

    def __init__(self, key: State, op: p.Instruction) -> None:
        self.key = key
        self.op = op
        self.steps = 0
        self.stage = 0
        self.place = 0
        self.tried: list[tuple[int, int]] = []


class _Count:
    def __init__(self, matcher: Matcher, text: str | bytes, full: bool, turns: int) -> None:
        self.code = matcher.program.code
        self.end = matcher.program.end
        self.start = matcher.program.start
        self.members, self.set_of = matcher.members, matcher.set_of
        self.helper = matcher.on(text)
        self.classes = self.helper.classes
        self.length = len(text)
        self.full = full
        self.turns = turns
        self.known: dict[State, Value] = {}
        self.given_back: dict[tuple[int, int], tuple[dict[int, Value], list[int]]] = {}
        self.windows: dict[int, list[int]] = {}
        self.totals: dict[int, dict[int, int]] = {}

    def whole(self, manner: str) -> int:
        if manner in ("match", "fullmatch"):
            return self.value((self.start, 0, NO_MARKS))[1]
        total, pos, marks = 0, 0, NO_MARKS
        while pos <= self.length:
            end, steps = self.value((self.start, pos, marks))
            total += steps
            self.turns -= 1
            if end < 0:
                pos, marks = pos + 1, NO_MARKS
                continue
            if manner == "search":
                break
            marks = FORBIDDEN if end == pos else NO_MARKS
            pos = end
        return total

    def value(self, state: State) -> Value:
        """The outcome of a state, by a stack of those that wait for others."""
        known = self.known
        steps, at = self.follow(state)
        if isinstance(at, int):
            return at, steps
        waiting = [self.frame(at)] if at not in known else []
        while waiting:
            missing = self.advance(waiting[-1])
            if missing is None:
                waiting.pop()
            else:
                waiting.append(self.frame(missing))
        end, more = known[at]
        return end, steps + more

    def frame(self, state: State) -> _Frame:
        self.turns -= 1
        if self.turns < 0:
            raise OutOfTurns
        return _Frame(state, self.code[state[0]])

    def follow(self, state: State) -> tuple[int, State | int]:
        """Steps along instructions without a choice, and the choice they lead to or the end that they reach."""
        code, classes, length = self.code, self.classes, self.length
        pc, pos, marks = state
        steps = 0
        while True:
            op = code[pc]
            if isinstance(op, p.Char):
                steps += 1
                if pos >= length or not self.members[self.set_of[pc]][classes[pos]]:
                    return steps, -1
                pos, pc, marks = pos + 1, op.next, NO_MARKS
            elif isinstance(op, p.Save):
                steps += 1
                pc = op.next
            elif isinstance(op, p.Enter):
                steps += 1
                pc = op.next
                if marks:
                    marks -= {op.loop}
            elif isinstance(op, p.Assert):
                steps += 1
                if not self.helper.holds(pc, op, pos):
                    return steps, -1
                pc = op.next
            elif isinstance(op, p.Accept):
                steps += 1
                if pc == self.end and ((self.full and pos != length) or NOT_EMPTY in marks):
                    return steps, -1
                return steps, pos
            elif isinstance(op, p.Iterate) and op.loop in marks:
                steps += 1
                pc = op.exit
            else:
                return steps, (pc, pos, marks)

    def look_up(self, state: State) -> tuple[Value | None, State | None]:
        """The outcome of a state, or the choice that must be reckoned first."""
        steps, at = self.follow(state)
        if isinstance(at, int):
            return (at, steps), None
        found = self.known.get(at)
        if found is None:
            return None, at
        return (found[0], steps + found[1]), None

    def advance(self, frame: _Frame) -> State | None:
        """Go on with a frame until it is done (None) or needs a state that is not known yet."""
        pc, pos, marks = frame.key
        op = frame.op
        match op:
            case p.Fork():
                ways: tuple[State, ...] = ((op.first, pos, marks), (op.second, pos, marks))
                return self.either(frame, ways)
            case p.Iterate():
                body, leave = (op.body, pos, marks | {op.loop}), (op.exit, pos, marks)
                return self.either(frame, (leave, body) if op.lazy else (body, leave))
            case p.Run():
                return self.run(frame, op)
            case p.Look():
                return self.look(frame, op)
            case p.Atomic():
                return self.atomic(frame, op)
        raise AssertionError(op)

    def either(self, frame: _Frame, ways: tuple[State, ...]) -> State | None:
        while frame.stage < 2:
            found, missing = self.look_up(ways[frame.stage])
            if found is None:
                return missing
            frame.stage += 1
            frame.steps += found[1]
            if found[0] >= 0:
                self.done(frame, found[0])
                return None
        self.done(frame, -1)
        return None

    def done(self, frame: _Frame, end: int) -> None:
        self.known[frame.key] = (end, frame.steps + 1)

    def look(self, frame: _Frame, op: p.Look) -> State | None:
        _, pos, marks = frame.key
        start = pos if op.ahead else pos - op.width
        if frame.stage == 0:
            found: Value | None = (-1, 0)
            if start >= 0:
                found, missing = self.look_up((op.body, start, marks - FORBIDDEN if op.ahead else NO_MARKS))
                if found is None:
                    return missing
            assert found is not None
            frame.steps += found[1]
            frame.stage = 1
            if (found[0] >= 0) == op.negated:
                self.done(frame, -1)
                return None
        return self.last(frame, (op.next, pos, marks))

    def atomic(self, frame: _Frame, op: p.Atomic) -> State | None:
        _, pos, marks = frame.key
        if frame.stage == 0:
            found, missing = self.look_up((op.body, pos, marks - FORBIDDEN))
            if found is None:
                return missing
            frame.steps += found[1]
            frame.stage = 1
            frame.place = found[0]
            if found[0] < 0:
                self.done(frame, -1)
                return None
        return self.last(frame, (op.next, frame.place, marks if frame.place == pos else NO_MARKS))

    def last(self, frame: _Frame, state: State) -> State | None:
        found, missing = self.look_up(state)
        if found is None:
            return missing
        frame.steps += found[1]
        self.done(frame, found[0])
        return None

    # One-character repeats

    def run(self, frame: _Frame, op: p.Run) -> State | None:
        pc, pos, marks = frame.key
        chars = self.set_of[pc]
        end = (self.helper.run_ends[chars] or self.helper.run_end(chars))[pos]
        if op.maximum is not None and end - pos > op.maximum:
            end = pos + op.maximum
        least = pos + op.minimum
        lazy = op.kind == "lazy"
        scanned = min(least, end) - pos if lazy else 0 if op.any_char else end - pos
        if least > end:
            frame.steps = scanned
            self.done(frame, -1)
            return None
        if op.kind == "possessive" or least == end:
            frame.steps = scanned
            return self.last(frame, (op.next, end, marks if end == pos else NO_MARKS))
        if frame.stage == 0:
            frame.place = least if lazy else end
            frame.stage = 1
        if lazy:
            return self.lazily(frame, op, least, end, scanned)
        return self.greedily(frame, op, least, end, scanned)

    def fits(self, op: p.Run, place: int) -> bool:
        """Whether the engine goes on at a place that is given back: the next literal must stand there."""
        follow = self.code[op.next]
        if not isinstance(follow, p.Char):
            return True
        return place < self.length and self.members[self.set_of[op.next]][self.classes[place]]

    def tried(self, op: p.Run, place: int) -> Value | State:
        """The outcome of going on at a place other than the first, or the choice that must be reckoned first."""
        self.turns -= 1
        if self.turns < 0:
            raise OutOfTurns
        if not self.fits(op, place):
            return -1, 1
        found, missing = self.look_up((op.next, place, NO_MARKS))
        if found is None:
            assert missing is not None
            return missing
        return found[0], found[1] + 1

    def greedily(self, frame: _Frame, op: p.Run, least: int, end: int, scanned: int) -> State | None:
        """Places from `end` down to `least`; `sums[place]` is what all down to it cost, and where it ended."""
        pc, pos, marks = frame.key
        low = least + 1 if least == pos else least  # at `pos` itself the marks still hold
        if op.maximum is not None and end == pos + op.maximum and frame.stage == 1:
            first, missing = self.look_up((op.next, end, NO_MARKS))
            if first is None:
                return missing
            rest = (0, 0) if first[0] >= 0 else self.window(pc, op, low, end)
            if len(rest) == 3:
                return rest
            if rest[0] < 0:
                return self.at_last(frame, op, low > least, scanned + first[1] + rest[1])
            frame.stage = 2
        sums, floor = self.given_back.setdefault((pc, end), ({}, [end + 1]))
        while floor[0] > low and (floor[0] > end or sums[floor[0]][0] < 0):
            place = floor[0] - 1
            if place == end:
                found, missing = self.look_up((op.next, end, NO_MARKS))
                if found is None:
                    return missing
                sums[place] = found
            else:
                value = self.tried(op, place)
                if len(value) == 3:
                    return value
                sums[place] = (value[0], sums[place + 1][1] + value[1])
            floor[0] = place
        total = sums[max(low, floor[0])] if low <= end else (-1, 0)
        if total[0] >= 0:
            frame.steps = scanned + total[1]
            self.done(frame, total[0])
            return None
        return self.at_last(frame, op, low > least, scanned + total[1])

    def at_last(self, frame: _Frame, op: p.Run, nothing_too: bool, steps: int) -> State | None:
        """All places but the run's own have failed; `nothing_too`: that is still to be tried."""
        found = (-1, -1)
        if nothing_too:
            found = (-1, 0)
            if self.fits(op, frame.key[1]):
                result, missing = self.look_up((op.next, *frame.key[1:]))
                if result is None:
                    return missing
                found = result
        frame.steps = steps + 1 + found[1]
        self.done(frame, found[0])
        return None

    def window(self, pc: int, op: p.Run, low: int, high: int) -> Value | State:
        """(-1, steps) of the places from `low` to below `high` if all fail, (0, 0) if one does not.

        Kept as sums from a beginning, so that a run with a bound that begins one character later costs one
        more place.
        """
        held = self.windows.get(pc)
        if held is None or low > held[1] or high < held[0]:
            held = self.windows[pc] = [low, low]
            self.totals[pc] = {low: 0}
        totals = self.totals[pc]
        while held[1] < high:
            value = self.tried(op, held[1])
            if len(value) == 3:
                return value
            if value[0] >= 0:
                return 0, 0
            totals[held[1] + 1] = totals[held[1]] + value[1]
            held[1] += 1
        while held[0] > low:
            value = self.tried(op, held[0] - 1)
            if len(value) == 3:
                return value
            if value[0] >= 0:
                return 0, 0
            totals[held[0] - 1] = totals[held[0]] - value[1]
            held[0] -= 1
        return -1, totals[high] - totals[low]

    def lazily(self, frame: _Frame, op: p.Run, least: int, end: int, scanned: int) -> State | None:
        """Places from `least` up to `end`; `sums[place]` is what that place and those behind it cost."""
        pc, pos, marks = frame.key
        first, missing = self.look_up((op.next, least, marks if least == pos else NO_MARKS))
        if first is None:
            return missing
        if first[0] >= 0:
            frame.steps = scanned + first[1]
            self.done(frame, first[0])
            return None
        if op.maximum is not None and end == pos + op.maximum and frame.stage == 1:
            rest = self.window(pc, op, least + 1, end + 1)
            if len(rest) == 3:
                return rest
            if rest[0] < 0:
                frame.steps = scanned + first[1] + rest[1]
                self.done(frame, -1)
                return None
            frame.stage = 2
        sums, _ = self.given_back.setdefault((pc, end), ({}, [0]))
        place = max(frame.place, least + 1)
        total: Value = (-1, 0)
        while place <= end:
            known = sums.get(place)
            if known is not None:
                total = known
                break
            value = self.tried(op, place)
            if len(value) == 3:
                frame.place = place
                return value
            if value[0] >= 0:
                total = sums[place] = value
                break
            frame.tried.append((place, value[1]))
            place += 1
        for place, cost in reversed(frame.tried):
            total = sums[place] = (total[0], cost + total[1])
        frame.steps = scanned + first[1] + total[1]
        self.done(frame, total[0])
        return None
