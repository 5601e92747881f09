"""Positions of a program, and what follows each of them: the automaton before it is made deterministic.

A position is a place that reads one character: a `Char`, or one character of a `Run` (a bounded run has a
position for each character it may read). A *thread* is a position with the obligations that the rest of the
text must meet (`obligations`); position `accept` stands for the program's end. `after(position, context)` and
`initial(context)` list threads in the engine's order of priority, each once; the guard of loops whose body can
be empty is respected.

The *context* is what assertions may ask of the character before a place: whether the text begins there,
whether that character is a line feed, whether it is a word character; only as far as the program asks.

What is not regular, or not yet said exactly, is widened to a superset: a back-reference reads anything, both
sides of a conditional may be taken, look-behind is taken to hold, an atomic group gives back like a plain one.
`inexact` lists these with their spans. A negated look-ahead whose body is widened is taken to hold.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import TypeAlias

from patlint.limits import LimitReached, Limits
from patlint.machine import program as p
from patlint.machine.alphabet import minterms, universe
from patlint.machine.obligations import ALL, NONE, Obligations
from patlint.syntax.charset import NEWLINE, CharSet
from patlint.syntax.tree import Span

Conjunction: TypeAlias = frozenset[int]
Thread: TypeAlias = tuple[int, Conjunction]
FREE: Conjunction = frozenset()

AT_START = 1
AFTER_NEWLINE = 2
AFTER_WORD = 4  # shifted by the index of the set of word characters

CLOSURE_LIMIT_FACTOR = 20


class Nfa:
    """The positions of `program` and their threads; everything is computed when asked and remembered."""

    def __init__(self, program: p.Program, limits: Limits) -> None:
        self.program = program
        self.limits = limits
        whole = universe(program.is_bytes)
        self.first: dict[int, int] = {}
        reads: list[CharSet] = []
        self.pc_of: list[int] = []
        asserts: set[str] = set()
        words: dict[CharSet, None] = {}
        self.inexact: list[tuple[str, Span]] = []
        self.leads: dict[int, int] = {}
        for pc, op in enumerate(program.code):
            width = 0
            match op:
                case p.Char():
                    width, chars = 1, op.chars
                case p.Run():
                    width, chars = max(op.minimum, 1) if op.maximum is None else op.maximum, op.chars
                    if op.kind == "possessive":
                        self._widened("possessive repeat", pc)
                case p.Back():
                    width, chars = 1, whole
                    self._widened("back-reference", pc)
                case p.Test():
                    self._widened("conditional", pc)
                case p.Atomic():
                    self.leads[op.end] = op.next
                    self._widened("atomic group or possessive repeat", pc)
                case p.Look(ahead=False):
                    self._widened("look-behind", pc)
                case p.Assert():
                    asserts.add(op.kind)
                    if op.kind in ("word", "not-word"):
                        words[op.words] = None
            if width:
                if len(reads) + width > limits.instructions:
                    raise LimitReached("instructions", limits.instructions)
                self.first[pc] = len(reads)
                reads += [chars] * width
                self.pc_of += [pc] * width
        self.accept = len(reads)
        self.words = tuple(words)
        self.asks_start = bool(words) or not asserts.isdisjoint(("start", "line-start"))
        self.asks_newline = "line-start" in asserts
        self.asks_end = not asserts.isdisjoint(("final", "line-end"))
        distinct = tuple(dict.fromkeys(reads))
        extra = (NEWLINE,) if self.asks_newline or self.asks_end else ()
        self.alphabet, masks = minterms((*distinct, *self.words, *extra), whole)
        width = len(self.alphabet)
        mask_of = dict(zip((*distinct, *self.words, *extra), masks, strict=True))
        self.reads: list[int] = [mask_of[chars] for chars in reads]
        self.newline = mask_of.get(NEWLINE, 0)
        self.word_masks = [mask_of[chars] for chars in self.words]
        self.readers: list[int] = [0] * width
        for position, mask in enumerate(self.reads):
            while mask:
                low = mask & -mask
                self.readers[low.bit_length() - 1] |= 1 << position
                mask ^= low
        self.contexts: list[int] = [self._context(minterm) for minterm in range(width)]
        self.start_context = AT_START if self.asks_start else 0
        self.obligations = Obligations(width)
        self._closures: dict[tuple[int, int], tuple[Thread, ...]] = {}
        self._after: dict[tuple[int, int], tuple[Thread, ...]] = {}
        self._looks: dict[tuple[int, int], int] = {}

    def _widened(self, reason: str, pc: int) -> None:
        self.inexact.append((reason, self.program.spans[pc]))

    def _context(self, minterm: int) -> int:
        context = AFTER_NEWLINE if self.asks_newline and self.newline >> minterm & 1 else 0
        for index, mask in enumerate(self.word_masks):
            if mask >> minterm & 1:
                context |= AFTER_WORD << index
        return context

    def all_contexts(self) -> tuple[int, ...]:
        """The text's start and after each kind of character."""
        return tuple(dict.fromkeys([self.start_context, *self.contexts]))

    def initial(self, context: int) -> tuple[Thread, ...]:
        return self.closure(self.program.start, context)

    def after(self, position: int, context: int) -> tuple[Thread, ...]:
        """The threads once `position` has read a character that leaves `context` behind it."""
        key = (position, context)
        found = self._after.get(key)
        if found is None:
            found = self._after[key] = tuple(self._follow(position, context))
        return found

    def _follow(self, position: int, context: int) -> Iterator[Thread]:
        pc = self.pc_of[position]
        op = self.program.code[pc]
        match op:
            case p.Char():
                yield from self.closure(op.next, context)
            case p.Run():
                count = position - self.first[pc] + 1
                again: int | None
                if op.maximum is None:
                    again = position if count >= op.minimum else position + 1
                else:
                    again = position + 1 if count < op.maximum else None
                leave = self.closure(op.next, context) if count >= op.minimum else ()
                if op.kind == "lazy":
                    yield from leave
                if again is not None:
                    yield again, FREE
                if op.kind != "lazy":
                    yield from leave
            case p.Back():
                yield position, FREE
                yield from self.closure(op.next, context)

    def closure(self, entry: int, context: int) -> tuple[Thread, ...]:
        """The threads that are reached from instruction `entry` without reading."""
        key = (entry, context)
        found = self._closures.get(key)
        if found is None:
            found = self._closures[key] = self._close(entry, context)
        return found

    def _close(self, entry: int, context: int) -> tuple[Thread, ...]:
        threads: dict[Thread, None] = {}
        stack: list[tuple[int, frozenset[int], Conjunction]] = [(entry, FREE, FREE)]
        seen = set()
        limit = self.limits.instructions * CLOSURE_LIMIT_FACTOR
        while stack:
            item = stack.pop()
            if item in seen:
                continue
            seen.add(item)
            if len(seen) > limit:
                raise LimitReached("instructions", self.limits.instructions)
            pc, marks, duty = item
            if pc < 0:
                threads[self.first[~pc], duty] = None
                continue
            op = self.program.code[pc]
            match op:
                case p.Char():
                    threads[self.first[pc], duty] = None
                case p.Run():
                    reads = op.maximum != 0
                    if op.minimum:
                        threads[self.first[pc], duty] = None
                    elif op.kind == "lazy":
                        if reads:
                            stack.append((~pc, marks, duty))
                        stack.append((op.next, marks, duty))
                    else:
                        if reads:
                            threads[self.first[pc], duty] = None
                        stack.append((op.next, marks, duty))
                case p.Fork():
                    stack.append((op.second, marks, duty))
                    stack.append((op.first, marks, duty))
                case p.Save():
                    stack.append((op.next, marks, duty))
                case p.Enter():
                    stack.append((op.next, marks - {op.loop}, duty))
                case p.Iterate():
                    if op.loop in marks:
                        stack.append((op.exit, marks, duty))
                    else:
                        body = (op.body, marks | {op.loop}, duty)
                        leave = (op.exit, marks, duty)
                        stack += (body, leave) if op.lazy else (leave, body)
                case p.Accept():
                    if pc in self.leads:
                        stack.append((self.leads[pc], marks, duty))
                    else:
                        threads[self.accept, duty] = None
                case p.Assert():
                    asked = self.asked(op, context)
                    if asked != NONE:
                        stack.append((op.next, marks, duty if asked == ALL else duty | {asked}))
                case p.Look():
                    asked = self.look(pc, op, context) if op.ahead else ALL
                    if asked != NONE:
                        stack.append((op.next, marks, duty if asked == ALL else duty | {asked}))
                case p.Atomic():
                    stack.append((op.body, marks, duty))
                case p.Back():
                    threads[self.first[pc], duty] = None
                    stack.append((op.next, marks, duty))
                case p.Test():
                    stack.append((op.no, marks, duty))
                    stack.append((op.yes, marks, duty))
        return tuple(threads)

    def asked(self, op: p.Assert, context: int) -> int:
        """What an assertion asks of the rest of the text, as an obligation."""
        table = self.obligations
        match op.kind:
            case "start":
                return ALL if context & AT_START else NONE
            case "line-start":
                return ALL if context & (AT_START | AFTER_NEWLINE) else NONE
            case "end":
                return table.next_in(0, True)
            case "final":
                return table.final(self.newline)
            case "line-end":
                return table.next_in(self.newline, True)
            case _:
                index = self.words.index(op.words)
                mask = self.word_masks[index]
                after_word = bool(context & AFTER_WORD << index)
                if after_word != (op.kind == "word"):
                    return table.next_in(mask, False)
                others = (1 << len(self.alphabet)) - 1 ^ mask
                # `\B` fails on the empty text, so at the start it asks for a character.
                return table.next_in(others, op.kind == "word" or not context & AT_START)

    def look(self, pc: int, op: p.Look, context: int) -> int:
        from patlint.machine.determinise import subset_table

        key = (pc, context)
        found = self._looks.get(key)
        if found is None:
            if op.negated and self._is_widened(op.body):
                found = ALL
            else:
                table, accepting = subset_table(self, "match", self.closure(op.body, context))
                found = self.obligations.intern(table, accepting)[0]
                if op.negated:
                    found = self.obligations.complement(found)
            self._looks[key] = found
        return found

    def _is_widened(self, entry: int) -> bool:
        """Whether anything that is reached from `entry` before its Accept is not said exactly."""
        stack, seen = [entry], set()
        while stack:
            pc = stack.pop()
            if pc in seen:
                continue
            seen.add(pc)
            op = self.program.code[pc]
            match op:
                case p.Back() | p.Test() | p.Atomic() | p.Run(kind="possessive") | p.Look(ahead=False):
                    return True
                case p.Look():
                    stack += (op.body, op.next)
                case p.Fork():
                    stack += (op.first, op.second)
                case p.Iterate():
                    stack += (op.body, op.exit)
                case p.Accept():
                    pass
                case _:
                    stack.append(op.next)
        return False
