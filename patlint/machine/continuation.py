"""What must follow the pumps so that the engine walks every way through them.

The engine goes back into a loop only where everything that it tried after the loop has failed: not the whole
pattern, but all that stands before the loop's own last choice in the order of priority, at each place where the
loop can stop. `failing` follows the engine's ordered list of threads through prefix and pumps, takes its part up
to the node at which the ways part, and looks for a shortest text that this part refuses. Where there is none
(`(?:a|aa)*`, `(?:a|aa)*.*` under match), no text makes the engine go back.

A search walks the attempt at each place, so the attempts begun before must have failed too; where the search's
own beginning afresh is one of the two ways, all of every attempt must fail. A scan goes on after a match, so
there it is enough that each attempt fails up to the node.

Limit: `CONTINUATIONS` states for each suspicion.
"""

from __future__ import annotations

from typing import Literal, TypeAlias

from patlint.machine.ambiguity import Codes, Letters, Suspect
from patlint.machine.nfa import Nfa
from patlint.machine.obligations import FREE, Thread
from patlint.machine.ordered import Threads, prune, steps
from patlint.machine.program import Accept, Atomic, Fork, Iterate, Look, Test

Verdict: TypeAlias = Codes | Literal["none", "unknown"]
"""A suffix; "none": no text makes the engine walk all ways; "unknown": not decided here."""

CONTINUATIONS = 200
PUMPS = 12
"""Pumps after which a set of threads must have come back to one that it was before."""

State: TypeAlias = tuple[frozenset[Thread], int]
"""Threads of which none has matched, and the context."""


class Continuations:
    """Asks for the suffixes of one program in one manner."""

    def __init__(self, nfa: Nfa, manner: str, letters: Letters) -> None:
        self.nfa, self.manner = nfa, manner
        self.full = manner == "fullmatch"
        self.outer = _outer_positions(nfa)
        self.order = sorted(range(len(nfa.alphabet)), key=lambda minterm: _pleasant(letters.letters[minterm]))
        self.letters = letters.letters
        self.but_last = False

    def minterms(self, codes: Codes) -> list[int]:
        return [self.nfa.alphabet.classify(code) for code in codes]

    def failing(self, suspect: Suspect, prefix: Codes, pump: Codes, but_last: bool = False) -> Verdict:
        """What to put behind many pumps; `pump` is one reading of the suspect's.

        With `but_last` the last of the ways need not fail: a lazy repeat comes behind all that it leads to.
        """
        nfa = self.nfa
        if but_last and (len(suspect.positions) < 2 or suspect.by_restart):
            return "none"
        self.but_last = but_last
        wanted = suspect.positions
        if nfa.inexact or any(place not in self.outer and place < nfa.accept for place in wanted):
            return "unknown"
        lead, pumped = self.minterms(prefix), self.minterms(pump)
        if self.manner in ("match", "fullmatch"):
            part = self.part(lead, pumped, 0, wanted)
            return "none" if part is None else self.refused([part], None, pumped, pump)
        if suspect.by_restart:
            everything = self.afresh(lead, pumped)
            if everything is not None:
                found = self.refused([], everything, pumped, pump)
                if found != "none":
                    return found
            if self.manner == "search":
                return "none"
            for begin in range(len(lead) + len(pumped), len(lead) + 2 * len(pumped)):
                for not_empty in (False, True):
                    part = self.part(lead, pumped, begin, wanted, not_empty)
                    found = "none" if part is None else self.refused([part], None, pumped, pump)
                    if found != "none":
                        return found
            return "none"
        before: list[State] = []
        for begin in range(len(lead) + len(pumped) + 1):
            part = self.part(lead, pumped, begin, wanted)
            if part is not None:
                found = self.refused([*before, part], None, pumped, pump)
                if found == "none" and before and self.manner == "scan":
                    found = self.refused([part], None, pumped, pump)
                return found
            whole = self.part(lead, pumped, begin, None)
            if whole is None:
                return "unknown" if self.manner == "scan" else "none"
            before.append(whole)
        return "none"

    def contexts(self, text: list[int]) -> list[int]:
        out = [self.nfa.start_context]
        for minterm in text:
            out.append(self.nfa.next_context(out[-1], minterm))
        return out

    def part(
        self,
        lead: list[int],
        pumped: list[int],
        begin: int,
        wanted: frozenset[int] | None,
        not_empty: bool = False,
    ) -> State | None:
        """The engine's threads, from an attempt at `begin`, up to the last of those wanted, after three pumps.

        None where they are not there (what is preferred has matched by then). Without `wanted` all threads,
        None where the attempt has matched. `not_empty`: an attempt after an empty match at its place.
        """
        nfa = self.nfa
        text = lead + pumped * 3
        contexts = self.contexts(text)
        threads: Threads
        initial = nfa.initial(contexts[begin])
        if not_empty:
            initial = tuple(thread for thread in initial if thread[0] != nfa.accept)
        threads, _ = prune(nfa, ((thread, 0) for thread in initial), cut=not self.full)
        for place in range(begin, len(text)):
            moves = steps(nfa, threads, text[place], contexts[place + 1], stays=not self.full)
            threads, _ = prune(nfa, moves, cut=not self.full)
        if wanted is None:
            if not self.full and any(
                position in (nfa.accept, nfa.pending) and not duty for position, duty in threads
            ):
                return None
            return frozenset(threads), contexts[-1]
        found: dict[int, int] = {}
        for index, (position, _) in enumerate(threads):
            if position in wanted:
                found.setdefault(position, index)
        if len(found) < len(wanted):
            return None
        part = threads[: max(found.values()) + (not self.but_last)]
        return frozenset(part), contexts[-1]

    def afresh(self, lead: list[int], pumped: list[int]) -> State | None:
        """The threads of all attempts after three pumps, None where one of them has matched."""
        state: State | None = self.settle(self.nfa.initial(self.nfa.start_context), self.nfa.start_context)
        for minterm in lead + pumped * 3:
            if state is None:
                return None
            state = self.move(state, minterm, True)
        return state

    def settle(self, threads: tuple[Thread, ...], context: int) -> State | None:
        kept = frozenset(threads)
        if not self.full and (self.nfa.accept, FREE) in kept:
            return None
        return kept, context

    def move(self, state: State, minterm: int, afresh: bool) -> State | None:
        """A set of threads after a character; None where one of them has matched whatever follows."""
        nfa = self.nfa
        threads, before = state
        context = nfa.next_context(before, minterm)
        readers = nfa.readers[minterm]
        after: set[Thread] = set(nfa.initial(context)) if afresh else set()
        for position, duty in threads:
            if position == nfa.accept or position == nfa.pending:
                rest = None if self.full else nfa.obligations.step(duty, minterm)
                if rest is not None:
                    after.add((nfa.accept, rest))
            elif readers >> position & 1:
                rest = nfa.obligations.step(duty, minterm)
                if rest is not None:
                    for target, more in nfa.after(position, minterm, context):
                        after.add((target, rest | more))
        return self.settle(tuple(after), context)

    def refused(
        self, parts: list[State], everything: State | None, pumped: list[int], pump: Codes
    ) -> Verdict:
        """A shortest text that none of the parts takes behind any number of pumps."""
        states: tuple[State | None, ...] = tuple(parts) if everything is None else (everything,)
        afresh = everything is not None
        seen = {states}
        for _ in range(PUMPS):
            for minterm in pumped:
                before = states
                states = tuple(None if s is None else self.move(s, minterm, afresh) for s in before)
                if None in states:
                    return "none"
            if states in seen:
                break
            seen.add(states)
        if afresh:  # an attempt behind the pumps may succeed: those within have been walked by then
            states = tuple(None if s is None else self.move(s, pumped[-1], False) for s in before)
        order = sorted(self.order, key=lambda minterm: self.letters[minterm] in pump)
        paths: dict[tuple[State | None, ...], Codes] = {states: ()}
        queue = [states]
        for states in queue:
            if not any(state is not None and self.accepts(state) for state in states):
                return paths[states]
            for minterm in order:
                targets = tuple(None if s is None else self.move(s, minterm, False) for s in states)
                if None in targets or targets in paths:
                    continue
                if len(paths) >= CONTINUATIONS:
                    return "unknown"
                paths[targets] = (*paths[states], self.letters[minterm])
                queue.append(targets)
        return "none"

    def accepts(self, state: State) -> bool:
        """Whether one of the threads matches where the text ends."""
        nfa = self.nfa
        return any(
            position in (nfa.accept, nfa.pending) and nfa.obligations.holds_at_end(duty)
            for position, duty in state[0]
        )


def _pleasant(code: int) -> tuple[bool, bool, int]:
    return (not 32 < code < 127, chr(code).isalnum(), code)


def _outer_positions(nfa: Nfa) -> frozenset[int]:
    """The positions outside the bodies of look-around and atomic groups."""
    code = nfa.program.code
    stack, seen = [nfa.program.start], set()
    while stack:
        pc = stack.pop()
        if pc in seen:
            continue
        seen.add(pc)
        op = code[pc]
        match op:
            case Fork():
                stack += (op.first, op.second)
            case Iterate():
                stack += (op.body, op.exit)
            case Test():
                stack += (op.yes, op.no)
            case Accept():
                pass
            case Look() | Atomic():
                stack.append(op.next)
            case _:
                stack.append(op.next)
    return frozenset(position for position in range(nfa.accept) if nfa.pc_of[position] in seen)
