r"""Positions of a program, and what follows each of them: the automaton before it is made deterministic.

A position is a place that reads one character: a `Char`, one character of a `Run` (a bounded run has a position
for each character it may read), or an atomic group under way. A *thread* is a position with the obligations
that the rest of the text must meet (`obligations`). `after` and `initial` list threads in the engine's order of
priority, each once; the guard of loops whose body can be empty is respected.

The *context* is what may be asked of the text before a place: whether it begins there, whether the character
before is a line feed or a word character, and for each look-behind its *tracker*: the threads of its body, begun
at every place so far. Only what the program asks is kept. Trackers stand inner ones first, and a tracker sees
only those before it. Contexts are small integers (`contexts`); `next_context` steps them.

- Look-ahead is the obligation that its body matches the rest, or its complement.
- Look-behind holds where a thread of its tracker has ended here; the thread's own obligations become those of
  what goes on.
- An atomic group is one position whose state is the ordered list of its body's threads (`ordered`). It is left
  where one of them ends, under the obligation that none of the better ones ever ends.
- A possessive run is left where it is full or the next character is not one of its own.

What is not regular is widened to a superset: a back-reference reads anything, both sides of a conditional may
be taken, an atomic group around one of these gives back like a plain group, a look-around around one of these
is taken to hold (a look-ahead that is not negated keeps what is known of it). `inexact` lists these with their
spans, sets that depend on the locale, and classes that CPython's search reads under the wrong flags.
"""

from __future__ import annotations

from collections.abc import Iterator

from patlint.limits import LimitReached, Limits
from patlint.machine import program as p
from patlint.machine.alphabet import minterms, universe
from patlint.machine.contexts import AFTER_NEWLINE, AFTER_WORD, AT_START, Contexts
from patlint.machine.determinise import subset_table
from patlint.machine.obligations import ALL, FREE, NONE, Conjunction, Obligations, Thread
from patlint.machine.ordered import Threads, ends_here, prune, steps
from patlint.machine.widened import widened
from patlint.syntax.charset import NEWLINE, CharSet
from patlint.syntax.tree import Span


class Nfa:
    """The positions of `program` and their threads; everything is computed when asked and remembered.

    Positions below `accept` read one character each; `accept` is the program's end, `pending` stands for it in
    ordered lists; atomic groups under way are numbered from there on as they are met. Minterms that a position
    reads are the bits of `reads[position]`; `readers[minterm]` is that table turned round.
    """

    def __init__(self, program: p.Program, limits: Limits) -> None:
        self.program = program
        self.limits = limits
        whole = universe(program.is_bytes)
        self.first: dict[int, int] = {}
        self.pc_of: list[int] = []
        self.inexact: list[tuple[str, Span]] = [("locale", span) for span in program.locale]
        self.inexact += [("scoped class at the beginning", span) for span in program.misread]
        self.atomic_ends: dict[int, int] = {}
        self.body_of: dict[int, int] = {}
        """For each look-around the first body that says the same as its own."""
        self.behind: dict[int, int] = {}
        self.trackers: list[int] = []
        self.up = 0
        """Positions that lead to the next position and nowhere else: inside a run, below its minimum."""
        self.down = 0
        """Positions that lead to the position before and nowhere else: one letter of a word after another."""
        reads: list[CharSet] = []
        asserts: set[str] = set()
        words: dict[CharSet, None] = {}
        bodies: dict[p.Shape, int] = {}
        for pc, op in enumerate(program.code):
            width = 0
            match op:
                case p.Char():
                    width, chars = 1, op.chars
                case p.Run():
                    width, chars = max(op.minimum, 1) if op.maximum is None else op.maximum, op.chars
                case p.Back():
                    width, chars = 1, whole
                    self.inexact.append(("back-reference", program.spans[pc]))
                case p.Test():
                    self.inexact.append(("conditional", program.spans[pc]))
                case p.Atomic():
                    self.atomic_ends[op.end] = op.next
                case p.Look():
                    body = bodies.setdefault(p.shape(program, op.body), op.body)
                    self.body_of[pc] = body
                    if not op.ahead and body not in self.behind:
                        self.behind[body] = len(self.trackers)
                        self.trackers.append(body)
                case p.Assert():
                    asserts.add(op.kind)
                    if op.kind in ("word", "not-word"):
                        words[op.words] = None
            if width:
                if program.spans[pc] in program.locale:
                    chars = whole
                if len(reads) + width > limits.instructions:
                    raise LimitReached("instructions", limits.instructions)
                place = len(reads)
                self.first[pc] = place
                if isinstance(op, p.Char):
                    if self.first.get(op.next) == place - 1 and _reads_at_once(program.code[op.next]):
                        self.down |= 1 << place
                elif isinstance(op, p.Run) and op.minimum > 1:
                    self.up |= (1 << op.minimum - 1) - 1 << place
                reads += [chars] * width
                self.pc_of += [pc] * width
        self.accept = len(reads)
        self.pending = self.accept + 1
        self.widened = widened(program)
        self.leads = {end: then for end, then in self.atomic_ends.items() if end in self.widened}
        self.words = tuple(words)
        self.asks_start = bool(words) or not asserts.isdisjoint(("start", "line-start"))
        self.asks_newline = "line-start" in asserts
        asks_end = not asserts.isdisjoint(("final", "line-end"))
        distinct = tuple(dict.fromkeys(reads))
        extra = (NEWLINE,) if self.asks_newline or asks_end else ()
        self.alphabet, masks = minterms((*distinct, *self.words, *extra), whole)
        width = len(self.alphabet)
        mask_of = dict(zip((*distinct, *self.words, *extra), masks, strict=True))
        self.reads: list[int] = [mask_of[chars] for chars in reads] + [0, 0]
        self.pc_of += [program.end, program.end]
        self.newline = mask_of.get(NEWLINE, 0)
        self.word_masks = [mask_of[chars] for chars in self.words]
        self.readers: list[int] = [0] * width
        self._minterms_of: dict[int, tuple[int, ...]] = {}
        for position in range(self.accept):
            self._add_reader(position)
        self._spent = 0
        self.vetoes: dict[tuple[Threads, int], int] = {}
        self.obligations = Obligations(width, self.charge)
        self._atomics: dict[tuple[int, Threads], int] = {}
        self._lists: dict[int, Threads] = {}
        self._entered: dict[tuple[int, int], tuple[tuple[Conjunction, int | None], ...]] = {}
        self._closures: dict[tuple[int, int], tuple[Thread, ...]] = {}
        self._after: dict[tuple[int, int, int], tuple[Thread, ...]] = {}
        self._looks: dict[tuple[Threads, int], int] = {}
        self.context_table = Contexts(self)
        self.contexts = self.context_table.plain
        """The context after a character of each minterm, without trackers."""
        self.plain_start = self.context_table.plain_start
        self.start_context = self.context_table.with_trackers(AT_START if self.asks_start else 0, None, 0)

    def _add_reader(self, position: int) -> None:
        bit = 1 << position
        for minterm in self.minterms_of(self.reads[position]):
            self.readers[minterm] |= bit

    def minterms_of(self, mask: int) -> tuple[int, ...]:
        """The minterms whose bits are in `mask`, rising."""
        found = self._minterms_of.get(mask)
        if found is None:
            found = self._minterms_of[mask] = tuple(
                minterm for minterm in range(mask.bit_length()) if mask >> minterm & 1
            )
        return found

    def charge(self, steps: int) -> None:
        """Count what all closures, trackers, look-arounds, vetoes and obligations of this program cost together.

        Raises LimitReached("work").
        """
        self._spent += steps
        if self._spent > self.limits.work:
            raise LimitReached("work", self.limits.work)

    # Contexts

    def next_context(self, context: int, minterm: int) -> int:
        """The context after reading a character in `context`."""
        return self.context_table.next(context, minterm)

    def all_contexts(self) -> tuple[int, ...]:
        """All contexts that some text leads to, the start's first. Raises LimitReached("states")."""
        return self.context_table.all()

    # Threads

    def initial(self, context: int) -> tuple[Thread, ...]:
        return self.closure(self.program.start, context)

    def after(self, position: int, minterm: int, context: int) -> tuple[Thread, ...]:
        """The threads once `position` has read a character of `minterm`, which leaves `context` behind it."""
        key = (position, context, minterm if position > self.pending else -1)
        found = self._after.get(key)
        if found is None:
            found = self._after[key] = tuple(self._follow(position, minterm, context))
        return found

    def _follow(self, position: int, minterm: int, context: int) -> Iterator[Thread]:
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
                if op.kind == "possessive" and again is not None:
                    leave = self._under(self._not_in(pc), leave)
                if op.kind == "lazy":
                    yield from leave
                if again is not None:
                    yield again, FREE
                if op.kind != "lazy":
                    yield from leave
            case p.Back():
                yield position, FREE
                yield from self.closure(op.next, context)
            case p.Atomic():
                for duty, goes_on in self.atomic_after(position, minterm, context):
                    if goes_on is not None:
                        yield goes_on, FREE
                    else:
                        yield from self._under_all(duty, self.closure(op.next, context))

    def _not_in(self, pc: int) -> int:
        """The obligation that the next character, if any, is none of those of a run."""
        everything = (1 << len(self.alphabet)) - 1
        return self.obligations.next_in(everything ^ self.reads[self.first[pc]], True)

    def _under(self, asked: int, threads: tuple[Thread, ...]) -> tuple[Thread, ...]:
        if asked == NONE:
            return ()
        return self._under_all(FREE if asked == ALL else frozenset((asked,)), threads)

    def _under_all(self, duty: Conjunction, threads: tuple[Thread, ...]) -> tuple[Thread, ...]:
        return tuple((position, more | duty) for position, more in threads) if duty else threads

    def _atomic(self, pc: int, threads: Threads, context: int) -> Iterator[tuple[Conjunction, int | None]]:
        """The ways out of an atomic group here, by their obligations, and the position under way (last)."""
        for duty in ends_here(self, threads, context):
            yield duty, None
        if any(self.reads[position] for position, _ in threads):
            yield FREE, self._position_of(pc, threads)

    def atomic_after(
        self, position: int, minterm: int, context: int
    ) -> Iterator[tuple[Conjunction, int | None]]:
        """The same for an atomic group under way that has read a character."""
        moves = steps(self, self._lists[position], minterm, context, stays=True)
        yield from self._atomic(self.pc_of[position], prune(self, moves, cut=True)[0], context)

    def stopping(self, pc: int) -> Conjunction:
        """The obligation under which a possessive run is left before it is full."""
        op = self.program.code[pc]
        if not (isinstance(op, p.Run) and op.kind == "possessive"):
            return FREE
        asked = self._not_in(pc)
        return FREE if asked == ALL else frozenset((asked,))

    def atomic_at(self, pc: int, op: p.Atomic, context: int) -> tuple[tuple[Conjunction, int | None], ...]:
        """The ways out of an atomic group that begins here, as `_atomic` gives them."""
        key = (pc, context)
        found = self._entered.get(key)
        if found is None:
            threads, _ = prune(self, ((thread, 0) for thread in self.closure(op.body, context)), cut=True)
            found = self._entered[key] = tuple(self._atomic(pc, threads, context))
        self.charge(len(found))
        return found

    def _position_of(self, pc: int, threads: Threads) -> int:
        key = (pc, threads)
        found = self._atomics.get(key)
        if found is None:
            if len(self._atomics) >= self.limits.states:
                raise LimitReached("states", self.limits.states)
            found = self._atomics[key] = len(self.reads)
            self._lists[found] = threads
            mask = 0
            for position, _ in threads:
                mask |= self.reads[position]
            self.reads.append(mask)
            self.pc_of.append(pc)
            self._add_reader(found)
        return found

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

        def go_on(pc: int, marks: frozenset[int], duty: Conjunction, asked: int) -> None:
            if asked != NONE:
                stack.append((pc, marks, duty if asked == ALL else duty | {asked}))

        while stack:
            item = stack.pop()
            if item in seen:
                continue
            seen.add(item)
            pc, marks, duty = item
            self.charge(1 + len(marks) // 4)
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
                        go_on(
                            op.next,
                            marks,
                            duty,
                            self._not_in(pc) if reads and op.kind == "possessive" else ALL,
                        )
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
                    go_on(op.next, marks, duty, self.asked(pc, op, context))
                case p.Look():
                    go_on(op.next, marks, duty, self.look(pc, op, context))
                case p.Atomic():
                    if op.end in self.leads:
                        stack.append((op.body, marks, duty))
                        continue
                    for more, goes_on in self.atomic_at(pc, op, context):
                        if goes_on is not None:
                            threads[goes_on, duty] = None
                        else:
                            stack.append((op.next, marks, duty | more))
                case p.Back():
                    threads[self.first[pc], duty] = None
                    stack.append((op.next, marks, duty))
                case p.Test():
                    stack.append((op.no, marks, duty))
                    stack.append((op.yes, marks, duty))
        return tuple(threads)

    # What is asked of the rest

    def asked(self, pc: int, op: p.Assert, context: int) -> int:
        """What an assertion asks of the rest of the text, as an obligation."""
        if self.program.spans[pc] in self.program.locale:
            return ALL
        table = self.obligations
        bits = self.context_table.parts[context][0]
        match op.kind:
            case "start":
                return ALL if bits & AT_START else NONE
            case "line-start":
                return ALL if bits & (AT_START | AFTER_NEWLINE) else NONE
            case "end":
                return table.next_in(0, True)
            case "final":
                return table.final(self.newline)
            case "line-end":
                return table.next_in(self.newline, True)
            case _:
                index = self.words.index(op.words)
                mask = self.word_masks[index]
                after_word = bool(bits & AFTER_WORD << index)
                if after_word != (op.kind == "word"):
                    return table.next_in(mask, False)
                others = (1 << len(self.alphabet)) - 1 ^ mask
                # `\B` fails on the empty text, so at the start it asks for a character.
                return table.next_in(others, op.kind == "word" or not bits & AT_START)

    def look(self, pc: int, op: p.Look, context: int) -> int:
        """What a look-around asks of the rest of the text, as an obligation."""
        body = self.body_of[pc]
        if op.body in self.widened and (op.negated or not op.ahead):
            return ALL
        if op.ahead:
            threads = self.closure(body, context)
            key = (threads, context if self.trackers else 0)  # else the context has said its all
            found = self._looks.get(key)
            if found is None:
                table, accepting = subset_table(self, "match", threads, context)
                self.charge(len(table))
                found = self._looks[key] = self.obligations.intern(table, accepting)[0]
        else:
            index = self.behind[body]
            trackers = self.context_table.parts[context][1]
            if index >= len(trackers):
                return ALL  # a context without trackers: nothing is known of the text before
            found = self.obligations.union(trackers[index][2])
        return self.obligations.complement(found) if op.negated else found


def _reads_at_once(op: p.Instruction) -> bool:
    """Whether one position stands for `op` and nothing is passed on the way to it."""
    return isinstance(op, p.Char) or (isinstance(op, p.Run) and op.minimum == 1)
