"""A backtracking matcher that gives `re`'s spans and groups, and counts what the engine would walk.

It runs the program as CPython's engine does: ordered choices, no memory of failed places, look-around and
atomic bodies as runs of their own whose choices are dropped, the guard of loops whose body can be empty.

Steps are those of a plain ordered backtracker: one for each instruction, for each character that a
one-character repeat scans and for each place that it gives back (`.` under DOTALL is scanned in one step), for
each character that a back-reference compares. The growth of this count is the growth of the engine's time.
Turns are what this matcher itself does: it scans runs of characters by a table of their ends and skips places
that the next character rules out, so a turn can stand for thousands of steps. The limit is on turns.

>>> from patlint.machine.program import compile_tree
>>> from patlint.syntax.parser import parse
>>> matcher = Matcher(compile_tree(parse("(a+)+$")))
>>> matcher.run("aaab", "match").steps < matcher.run("aaaaab", "match").steps
True
>>> matcher.run("aaa", "match").spans
((0, 3), (0, 3))

LOCALE is taken as ASCII. Faults of CPython's own are not imitated.
"""

from __future__ import annotations

from dataclasses import dataclass

from patlint.machine import program as p
from patlint.machine.alphabet import minterms, universe
from patlint.syntax.casefold import folding
from patlint.syntax.charset import NEWLINE

NEVER = 1 << 62


@dataclass(frozen=True, slots=True)
class Outcome:
    """`spans` are those of the match and of each group (None: not matched), or None where nothing matches.

    `finished` is False where the limit on turns stopped the run; `spans` is None then, and means nothing.
    """

    spans: tuple[tuple[int, int] | None, ...] | None
    steps: int
    finished: bool = True
    turns_left: int = 0

    @property
    def span(self) -> tuple[int, int] | None:
        return None if self.spans is None else self.spans[0]


class _OutOfTurns(Exception):
    pass


class Matcher:
    """Runs one program on texts; holds nothing but tables made from the program."""

    def __init__(self, program: p.Program) -> None:
        self.program = program
        sets = [i.chars for i in program.code if isinstance(i, p.Char | p.Run)]
        sets += [i.words for i in program.code if isinstance(i, p.Assert)]
        distinct = tuple(dict.fromkeys([*sets, NEWLINE]))
        self.alphabet, masks = minterms(distinct, universe(program.is_bytes))
        width = len(self.alphabet)
        index = {chars: number for number, chars in enumerate(distinct)}
        self.members = [tuple(bool(mask >> i & 1) for i in range(width)) for mask in masks]
        """For each distinct set whether a minterm belongs to it."""
        self.set_of = [
            index[i.chars if isinstance(i, p.Char | p.Run) else i.words]
            if isinstance(i, p.Char | p.Run | p.Assert)
            else 0
            for i in program.code
        ]
        """The number of the set that an instruction asks for; 0 where it asks for none."""
        self.class_of: dict[int, int] = {}

    def classes(self, text: str | bytes) -> list[int]:
        codes = text if isinstance(text, bytes) else map(ord, text)
        class_of = self.class_of
        out = []
        for code in codes:
            found = class_of.get(code)
            if found is None:
                found = class_of[code] = self.alphabet.classify(code)
            out.append(found)
        return out

    def on(self, text: str | bytes) -> _Run:
        """The tables of one text."""
        return _Run(self, text, NEVER)

    def run(self, text: str | bytes, mode: str, turns: int = NEVER, pos: int = 0) -> Outcome:
        """The outcome of `match`, `fullmatch` or `search` on `text` from `pos`."""
        run = _Run(self, text, turns)
        try:
            return run.search(pos) if mode == "search" else run.at(pos, mode == "fullmatch")
        except _OutOfTurns:
            return Outcome(None, run.steps, False)

    def scan(
        self, text: str | bytes, turns: int = NEVER, maximum: int = 0
    ) -> tuple[list[Outcome], int, int, bool]:
        """What `finditer` finds (`maximum` matches at most, 0: all), steps, turns left, whether it finished."""
        run = _Run(self, text, turns)
        found: list[Outcome] = []
        start, not_empty = 0, False
        try:
            while start <= run.length and (not maximum or len(found) < maximum):
                outcome = run.search(start, not_empty)
                if outcome.span is None:
                    break
                found.append(outcome)
                begin, start = outcome.span
                not_empty = begin == start
        except _OutOfTurns:
            return found, run.steps, 0, False
        return found, run.steps, run.turns, True


class _Run:
    """One text under way. `slots` are group places (2 * group, 2 * group + 1), then the loops' places."""

    def __init__(self, matcher: Matcher, text: str | bytes, turns: int) -> None:
        self.matcher = matcher
        self.code = matcher.program.code
        self.text = text
        self.classes = matcher.classes(text)
        self.length = len(text)
        self.turns = turns
        self.steps = 0
        self.first_loop = 2 * matcher.program.groups + 2
        self.slots = [-1] * (self.first_loop + matcher.program.loops)
        self.trail: list[tuple[int, int]] = []
        self.run_ends: list[list[int] | None] = [None] * len(matcher.members)
        self.last_places: list[list[int] | None] = [None] * len(matcher.members)
        self.next_places: list[list[int] | None] = [None] * len(matcher.members)

    def at(self, pos: int, full: bool = False, not_empty: bool = False) -> Outcome:
        self.slots = [-1] * len(self.slots)
        self.trail.clear()
        end = self.attempt(self.matcher.program.start, pos, full, pos if not_empty else -1)
        if end < 0:
            return Outcome(None, self.steps, True, self.turns)
        slots = self.slots
        groups = [
            (slots[2 * g], slots[2 * g + 1]) if slots[2 * g + 1] >= 0 else None
            for g in range(1, self.matcher.program.groups + 1)
        ]
        return Outcome(((pos, end), *groups), self.steps, True, self.turns)

    def search(self, pos: int, not_empty: bool = False) -> Outcome:
        """Leftmost match from `pos`; with `not_empty` the one at `pos` itself may not be empty."""
        outcome = self.at(pos, False, not_empty)
        while outcome.spans is None and pos < self.length:
            pos += 1
            outcome = self.at(pos)
        return outcome

    def run_end(self, chars: int) -> list[int]:
        """For each place the first one from there whose character is not in the set of that number."""
        inside = self.matcher.members[chars]
        ends = [self.length] * (self.length + 1)
        end = self.length
        for place in range(self.length - 1, -1, -1):
            if not inside[self.classes[place]]:
                end = place
            ends[place] = end
        self.run_ends[chars] = ends
        return ends

    def last_place(self, chars: int) -> list[int]:
        """For each place the last one up to there whose character is in the set of that number, else -1."""
        inside = self.matcher.members[chars]
        places, last = [], -1
        for place, cls in enumerate(self.classes):
            if inside[cls]:
                last = place
            places.append(last)
        places.append(last)
        self.last_places[chars] = places
        return places

    def next_place(self, chars: int) -> list[int]:
        """For each place the first one from there whose character is in the set of that number, else the end."""
        inside = self.matcher.members[chars]
        places = [self.length] * (self.length + 1)
        following = self.length
        for place in range(self.length - 1, -1, -1):
            if inside[self.classes[place]]:
                following = place
            places[place] = following
        self.next_places[chars] = places
        return places

    def attempt(self, pc: int, pos: int, full: bool, forbidden: int) -> int:
        """The end of the first successful path from `pc`, or -1.

        `full`: only the text's end will do; `forbidden`: an end that will not do. Choices open at success
        are dropped, slots stay; at failure the slots are as before.

        A choice is (pc, place, bound, trail). Bound -1: go on at pc; -2: begin an iteration of the lazy loop
        at pc; else pc is a Run that may also end anywhere from place to bound.
        """
        code, classes, length = self.code, self.classes, self.length
        members, set_of = self.matcher.members, self.matcher.set_of
        run_ends, last_places, slots, trail = self.run_ends, self.last_places, self.slots, self.trail
        choices: list[tuple[int, int, int, int]] = []
        base = len(trail)
        turns, steps = self.turns, self.steps  # written back wherever this frame is left
        while True:
            turns -= 1
            if turns < 0:
                self.steps = steps
                raise _OutOfTurns
            steps += 1
            op = code[pc]
            match op:
                case p.Char():
                    if pos < length and members[set_of[pc]][classes[pos]]:
                        pos += 1
                        pc = op.next
                        continue
                case p.Fork():
                    choices.append((op.second, pos, -1, len(trail)))
                    pc = op.first
                    continue
                case p.Run():
                    chars = set_of[pc]
                    end = (run_ends[chars] or self.run_end(chars))[pos]
                    if op.maximum is not None and end - pos > op.maximum:
                        end = pos + op.maximum
                    least = pos + op.minimum
                    lazy = op.kind == "lazy"
                    steps += min(least, end) - pos if lazy else 0 if op.any_char else end - pos
                    if least <= end:
                        if least < end and op.kind != "possessive":
                            choices.append(
                                (pc, least + 1, end, len(trail)) if lazy else (pc, least, end - 1, len(trail))
                            )
                        pos, pc = least if lazy else end, op.next
                        continue
                case p.Accept():
                    if (not full or pos == length) and pos != forbidden:
                        self.turns, self.steps = turns, steps
                        return pos
                case p.Save():
                    trail.append((op.slot, slots[op.slot]))
                    slots[op.slot] = pos
                    pc = op.next
                    continue
                case p.Enter():
                    slot = self.first_loop + op.loop
                    trail.append((slot, slots[slot]))
                    slots[slot] = -1
                    pc = op.next
                    continue
                case p.Iterate():
                    slot = self.first_loop + op.loop
                    if slots[slot] == pos:
                        pc = op.exit
                    elif op.lazy:
                        choices.append((pc, pos, -2, len(trail)))
                        pc = op.exit
                    else:
                        choices.append((op.exit, pos, -1, len(trail)))
                        trail.append((slot, slots[slot]))
                        slots[slot] = pos
                        pc = op.body
                    continue
                case p.Assert():
                    if self.holds(pc, op, pos):
                        pc = op.next
                        continue
                case p.Look():
                    start = pos if op.ahead else pos - op.width
                    self.turns, self.steps = turns, steps
                    end = self.attempt(op.body, start, False, -1) if start >= 0 else -1
                    turns, steps = self.turns, self.steps
                    if (end >= 0) != op.negated:
                        pc = op.next
                        continue
                case p.Atomic():
                    self.turns, self.steps = turns, steps
                    end = self.attempt(op.body, pos, False, -1)
                    turns, steps = self.turns, self.steps
                    if end >= 0:
                        pos, pc = end, op.next
                        continue
                case p.Back():
                    end, compared = self.same_text(op, pos)
                    steps += compared
                    if end >= 0:
                        pos, pc = end, op.next
                        continue
                case p.Test():
                    pc = op.yes if slots[2 * op.group + 1] >= 0 else op.no
                    continue
            while True:  # failed: go back to the last choice
                if not choices:
                    self.turns, self.steps = turns, steps
                    self.undo(base)
                    return -1
                pc, pos, bound, mark = choices.pop()
                if len(trail) > mark:
                    self.undo(mark)
                if bound == -1:
                    break
                op = code[pc]
                if isinstance(op, p.Iterate):
                    slot = self.first_loop + op.loop
                    trail.append((slot, slots[slot]))
                    slots[slot] = pos
                    pc = op.body
                    break
                assert isinstance(op, p.Run)
                follow = code[op.next]
                if op.kind == "lazy":
                    place = pos
                    if isinstance(follow, p.Char):
                        chars = set_of[op.next]
                        place = (self.next_places[chars] or self.next_place(chars))[pos]
                        if place > bound or place == length:
                            steps += bound - pos + 1
                            continue
                    steps += place - pos + 1
                    if place < bound:
                        choices.append((pc, place + 1, bound, mark))
                    pc, pos = op.next, place
                    break
                place = bound
                if isinstance(follow, p.Char):
                    chars = set_of[op.next]
                    place = (last_places[chars] or self.last_place(chars))[bound]
                    if place < pos:
                        steps += bound - pos + 1
                        continue
                steps += bound - place + 1
                if place > pos:
                    choices.append((pc, pos, place - 1, mark))
                pc, pos = op.next, place
                break

    def undo(self, mark: int) -> None:
        trail, slots = self.trail, self.slots
        while len(trail) > mark:
            slot, old = trail.pop()
            slots[slot] = old

    def holds(self, pc: int, op: p.Assert, pos: int) -> bool:
        length = self.length
        match op.kind:
            case "start":
                return pos == 0
            case "end":
                return pos == length
            case "final":
                return pos == length or (pos == length - 1 and self.is_newline(pos))
            case "line-start":
                return pos == 0 or self.is_newline(pos - 1)
            case "line-end":
                return pos == length or self.is_newline(pos)
            case _:
                if not length:
                    return False  # both \b and \B fail on the empty text
                inside = self.matcher.members[self.matcher.set_of[pc]]
                before = pos > 0 and inside[self.classes[pos - 1]]
                after = pos < length and inside[self.classes[pos]]
                return (before != after) == (op.kind == "word")

    def is_newline(self, pos: int) -> bool:
        return self.text[pos] in (10, "\n")

    def same_text(self, op: p.Back, pos: int) -> tuple[int, int]:
        """The end of the group's text read again at `pos`, or -1, and how many characters were compared."""
        start, end = self.slots[2 * op.group], self.slots[2 * op.group + 1]
        if end < 0:
            return -1, 0
        size = end - start
        text = self.text
        if op.fold == "exact":
            if text[pos : pos + size] == text[start:end]:
                return pos + size, size
            low, high = 0, min(size, self.length - pos)  # the first `low` are equal
            while low < high:
                middle = (low + high + 1) // 2
                if text[pos : pos + middle] == text[start : start + middle]:
                    low = middle
                else:
                    high = middle - 1
            return -1, low
        ascii_only = op.fold == "ascii"
        for offset in range(size):
            if pos + offset >= self.length or (
                _lowered(text[start + offset], ascii_only) != _lowered(text[pos + offset], ascii_only)
            ):
                return -1, offset
        return pos + size, size


def _lowered(char: int | str, ascii_only: bool) -> int:
    code = char if isinstance(char, int) else ord(char)
    return folding(ascii_only).low.get(code, code)
