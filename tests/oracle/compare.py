"""One pattern on many texts: what patlint says against what `re` says.

`subject_of` prepares a pattern once; each `compare_*` function is one respect in which the two are compared and
gives the `Mismatch`es. A comparison that a limit cuts short is counted, never silently dropped.

Respects (the `kind` of a mismatch): parse; match, fullmatch, search (languages); span (end of the match by the
span automaton); scan (what finditer finds, put together from the span automata of every context); groups (the
matcher's four ways to run); crash (an exception that is no answer).
"""

from __future__ import annotations

import re
import warnings
from collections import Counter
from dataclasses import dataclass, field
from typing import Any

from patlint.language import Language
from patlint.limits import LimitReached, Limits
from patlint.machine.determinise import Mode
from patlint.machine.dfa import Dfa
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.priority import MARKER, spans
from patlint.machine.program import compile_tree
from patlint.syntax.parser import PatternError, parse
from patlint.syntax.tree import Pattern
from tests.corpus.cpython import known_fault, spans_of
from tests.oracle.faults import search_fault
from tests.oracle.worlds import Text, World

MODES: tuple[Mode, ...] = ("match", "fullmatch", "search")
LIMITS = Limits(states=600, work=60_000)
"""Smaller than the defaults: an oracle gets further with many patterns than with large ones."""
TURNS = 20_000
MOST_CONTEXTS = 12
SAYS_MOST = 3


class Fault:
    """Stands for an answer of `re` that is CPython's own fault."""

    def __repr__(self) -> str:
        return "SystemError"


FAULT = Fault()


@dataclass(frozen=True, slots=True)
class Mismatch:
    """`other` is the second pattern of a pair; `theirs` is what `re` says."""

    kind: str
    pattern: str | bytes
    flags: int
    text: Text | None
    theirs: object
    ours: object
    other: str | bytes | None = None

    def row(self) -> str:
        """A row for `cases.CASES`; the cause is for a person to say."""
        parts = (self.kind, self.pattern, self.flags, self.text, self.other)
        return f"({', '.join(map(ascii, parts))}, 'cause?'),  # re: {self.theirs!r:.60}, patlint: {self.ours!r:.60}"


@dataclass(slots=True)
class Tally:
    """What was done. `trials` counts pairs of a pattern and a text, `comparisons` answers by kind."""

    trials: int = 0
    patterns: int = 0
    refused: int = 0
    compared: int = 0
    exact: int = 0
    comparisons: Counter[str] = field(default_factory=Counter)
    inexact: Counter[str] = field(default_factory=Counter)
    limits: Counter[str] = field(default_factory=Counter)
    faults: Counter[str] = field(default_factory=Counter)
    relations: Counter[str] = field(default_factory=Counter)
    mismatches: list[Mismatch] = field(default_factory=list)


@dataclass(slots=True)
class Subject:
    pattern: str | bytes
    flags: int
    right: re.Pattern[Any]
    tree: Pattern
    nfa: Nfa
    matcher: Matcher
    fault: str | None
    modes: tuple[Mode, ...]
    """Without "search" where CPython's is at fault."""
    languages: dict[str, Language] = field(default_factory=dict)
    truths: dict[str, list[Any]] = field(default_factory=dict)
    marked: dict[tuple[int, bool], Dfa | None] = field(default_factory=dict)

    @property
    def exact(self) -> bool:
        return not self.nfa.inexact

    def differs(self, kind: str, text: Text | None, theirs: object, ours: object) -> Mismatch:
        return Mismatch(kind, self.pattern, self.flags, text, theirs, ours)


def asked(pattern: str | bytes, flags: int) -> re.Pattern[Any] | Exception:
    """What `re.compile` says."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            return re.compile(pattern, flags)
        except Exception as refusal:  # whatever it raises is what is compared
            return refusal


def compare_parse(
    pattern: str | bytes, flags: int, said: re.Pattern[Any] | Exception, tally: Tally
) -> tuple[Pattern | None, list[Mismatch]]:
    """The tree where both accept, and a mismatch unless both accept alike or refuse at the same place."""
    tree = None
    ours: tuple[object, ...]
    try:
        tree = parse(pattern, flags)
        ours = ("accepted", tree.flags, tree.groups, tree.names)
    except PatternError as refusal:
        ours = ("refused", refusal.kind, refusal.position)
    except LimitReached as reached:
        tally.limits[reached.limit] += 1
        return None, []
    theirs: tuple[object, ...]
    if isinstance(said, Exception):
        kind = "error" if isinstance(said, re.error) else type(said).__name__
        theirs = ("refused", kind, getattr(said, "pos", None))
    else:
        theirs = ("accepted", int(said.flags), said.groups, dict(said.groupindex))
    tally.comparisons["parse"] += 1
    if theirs != ours:
        return None, [Mismatch("parse", pattern, flags, None, theirs, ours)]
    return tree, []


def subject_of(
    pattern: str | bytes, flags: int, right: re.Pattern[Any], tree: Pattern, limits: Limits = LIMITS
) -> Subject:
    """Raises LimitReached."""
    program = compile_tree(tree, limits)
    fault = known_fault(pattern, flags) if right.groups else None
    scoped = b"(?" in pattern if isinstance(pattern, bytes) else "(?" in pattern
    modes = MODES[:2] if scoped and search_fault(pattern, flags) else MODES
    return Subject(pattern, flags, right, tree, Nfa(program, limits), Matcher(program), fault, modes)


def answers(subject: Subject, mode: str, world: World, tally: Tally) -> list[Any]:
    """What `re` gives for each text: a match, None or FAULT."""
    ask = getattr(subject.right, mode)
    try:
        return [ask(text) for text in world.texts]
    except SystemError:
        found: list[Any] = []
        for text in world.texts:
            try:
                found.append(ask(text))
            except SystemError:
                found.append(FAULT)
                tally.faults[subject.fault or "SystemError without a known cause"] += 1
        return found


def compare_languages(subject: Subject, world: World, tally: Tally) -> list[Mismatch]:
    """Truth of match, fullmatch and search; leaves what `re` said in `subject.truths`."""
    out: list[Mismatch] = []
    classes = [subject.nfa.alphabet.classify(code) for code in world.letters]
    if len(subject.modes) < len(MODES):
        tally.faults["search"] += 1
    for mode in subject.modes:
        theirs = subject.truths[mode] = answers(subject, mode, world, tally)
        language = subject.languages.get(mode)
        if language is None:
            try:
                language = subject.languages[mode] = Language.of_nfa(subject.nfa, mode)
            except LimitReached as reached:
                tally.limits[reached.limit] += 1
                continue
        table, accepting = language.dfa.table, language.dfa.accepting
        states = [0]
        add = states.append
        for parent, symbol in zip(world.parents[1:], world.symbols[1:]):  # noqa: B905 (equal; this is hot)
            add(table[states[parent]][classes[symbol]])
        ours = [accepting[state] for state in states]
        tally.comparisons[mode] += len(ours)
        if ours == [match is not None for match in theirs]:
            continue
        exact = language.exact
        for text, match, accepted in zip(world.texts, theirs, ours):  # noqa: B905
            if match is not FAULT and accepted != (match is not None) and (exact or not accepted):
                out.append(subject.differs(mode, text, match is not None, accepted))
                if len(out) >= SAYS_MOST:
                    break
    return out


def marked_of(subject: Subject, context: int, not_empty: bool, tally: Tally) -> Dfa | None:
    """The span automaton of a context, None where a limit was met."""
    key = context, not_empty
    if key not in subject.marked:
        try:
            subject.marked[key] = spans(subject.nfa, context, not_empty)
        except LimitReached as reached:
            tally.limits[reached.limit] += 1
            subject.marked[key] = None
    return subject.marked[key]


def compare_spans(subject: Subject, world: World, tally: Tally) -> list[Mismatch]:
    """The end of `match`; needs `compare_languages` on the same world first."""
    if not subject.exact:
        return []
    marked = marked_of(subject, subject.nfa.start_context, False, tally)
    if marked is None:
        return []
    out = []
    table, accepting = marked.table, marked.accepting
    classes = [marked.alphabet.classify(code) for code in world.letters]
    marker = marked.alphabet.classify(MARKER)
    dead = _dead(marked)
    first = table[0][marker]
    befores, marks = [0], [((0, first),) if first != dead else ()]
    for text, parent, symbol in zip(world.texts[1:], world.parents[1:], world.symbols[1:]):  # noqa: B905
        letter = classes[symbol]
        before = table[befores[parent]][letter]
        held = marks[parent]
        if held:
            held = tuple([(place, state) for place, old in held if (state := table[old][letter]) != dead])
        if before != dead and (ended := table[before][marker]) != dead:
            held = (*held, (len(text), ended))
        befores.append(before)
        marks.append(held)
    theirs = subject.truths["match"]
    tally.comparisons["span"] += len(theirs)
    for text, match, held in zip(world.texts, theirs, marks):  # noqa: B905
        ours = [place for place, state in held if accepting[state]]
        if ours != ([] if match is None else [match.end()] if match is not FAULT else ours):
            out.append(subject.differs("span", text, match and match.end(), ours))
            if len(out) >= SAYS_MOST:
                break
    return out


def _dead(dfa: Dfa) -> int:
    """The state from which nothing is accepted, -1 where there is none."""
    for state, row in enumerate(dfa.table):
        if not dfa.accepting[state] and all(target == state for target in row):
            return state
    return -1


def compare_scan(subject: Subject, texts: list[Text], tally: Tally) -> list[Mismatch]:
    """`finditer` by the span automata of every context, and once more with the empty match forbidden."""
    if not subject.exact or subject.modes != MODES:
        return []
    for text in texts:
        codes = list(text) if isinstance(text, bytes) else [ord(char) for char in text]
        ours = _scanned(subject, codes, tally)
        if ours is None:
            return []
        try:
            theirs = [match.span() for match in subject.right.finditer(text)]
        except SystemError:
            continue
        tally.comparisons["scan"] += 1
        if ours != theirs:
            return [subject.differs("scan", text, theirs, ours)]
    return []


def _scanned(subject: Subject, codes: list[int], tally: Tally) -> list[tuple[int, int]] | None:
    nfa = subject.nfa
    classes = [nfa.alphabet.classify(code) for code in codes]
    contexts = [nfa.start_context]
    for symbol in classes:
        contexts.append(nfa.next_context(contexts[-1], symbol))
    found: list[tuple[int, int]] = []
    place, after_empty = 0, False
    while place <= len(codes):
        for start in range(place, len(codes) + 1):
            if len(subject.marked) > 2 * MOST_CONTEXTS:
                tally.limits["contexts"] += 1
                return None
            marked = marked_of(subject, contexts[start], after_empty and start == place, tally)
            if marked is None:
                return None
            ends = _ends(marked, classes[start:])
            if ends:
                break
        else:
            break
        # More than one end is a fault of its own: it shows as a span that `re` has not.
        found += [(start, start + end) for end in ends]
        place, after_empty = start + ends[0], not ends[0]
    return found


def _ends(marked: Dfa, classes: list[int]) -> list[int]:
    table, accepting = marked.table, marked.accepting
    marker = len(marked.alphabet) - 1
    found = []
    before = 0
    for place in range(len(classes) + 1):
        state = table[before][marker]
        for symbol in classes[place:]:
            state = table[state][symbol]
        if accepting[state]:
            found.append(place)
        if place < len(classes):
            before = table[before][classes[place]]
    return found


def compare_groups(subject: Subject, texts: list[Text], tally: Tally) -> list[Mismatch]:
    """The spans of the match and of all groups, in the four ways in which the matcher runs."""
    matcher, right = subject.matcher, subject.right
    if subject.fault is not None:
        tally.faults[subject.fault] += 1
        if not subject.exact:
            return []
    if matcher.program.locale:
        return []
    keep = 1 if subject.fault is not None else None
    for text in texts:
        for mode in ("finditer", *MODES) if subject.modes == MODES else subject.modes:
            if mode == "finditer":
                found, _, _, finished = matcher.scan(text, TURNS)
                if not finished:
                    tally.limits["turns"] += 1
                    break  # `re` would walk as far
                rows = [outcome.spans for outcome in found]
            else:
                outcome = matcher.run(text, mode, TURNS)
                if not outcome.finished:
                    tally.limits["turns"] += 1
                    continue
                rows = [outcome.spans]
            try:
                if mode == "finditer":
                    wanted = [spans_of(match) for match in right.finditer(text)]
                else:
                    wanted = [spans_of(getattr(right, mode)(text))]
            except SystemError:
                continue
            tally.comparisons["groups"] += 1
            if keep:
                rows, wanted = ([row and row[:keep] for row in each] for each in (rows, wanted))
            if rows != wanted:
                return [subject.differs("groups", text, (mode, wanted), (mode, rows))]
    return []


def finishes(subject: Subject, text: Text) -> bool:
    """Whether the matcher gets through `text` in few turns, so that `re` does."""
    matcher = subject.matcher
    return matcher.scan(text, TURNS)[3] and matcher.run(text, "fullmatch", TURNS).finished
