"""From a pattern's text to the machine's parts, for the tests of this folder."""

from __future__ import annotations

from patlint.limits import DEFAULT_LIMITS, Limits
from patlint.machine.determinise import Mode, language
from patlint.machine.dfa import Dfa
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.priority import MARKER, spans
from patlint.machine.program import compile_tree
from patlint.syntax.parser import parse

MODES: tuple[Mode, ...] = ("match", "fullmatch", "search")


TARGET = (3, 13)
"""Our own parser reads the newest dialect on every Python; what `re` is compared on, `re` must accept as well."""


def matcher_of(pattern: str | bytes, flags: int = 0) -> Matcher:
    return Matcher(compile_tree(parse(pattern, flags, TARGET)))


def nfa_of(pattern: str | bytes, flags: int = 0, limits: Limits = DEFAULT_LIMITS) -> Nfa:
    return Nfa(compile_tree(parse(pattern, flags, TARGET, limits), limits), limits)


def dfa_of(pattern: str | bytes, mode: Mode = "fullmatch", flags: int = 0) -> Dfa:
    return language(nfa_of(pattern, flags), mode)


def span_automaton(nfa: Nfa, context: int | None = None, not_empty: bool = False) -> Dfa:
    """The automaton of the marked texts; without `context` for a match that begins at the text's start."""
    return spans(nfa, nfa.start_context if context is None else context, not_empty)


def ends(marked: Dfa, text: str | bytes) -> list[int]:
    """All places at which the marker may stand in `text`: where the match ends, if there is one."""
    codes = list(text) if isinstance(text, bytes) else [ord(char) for char in text]
    classes = [marked.alphabet.classify(code) for code in codes]
    marker = marked.alphabet.classify(MARKER)
    found = []
    before = 0
    for place in range(len(codes) + 1):
        state = marked.table[before][marker]
        for symbol in classes[place:]:
            state = marked.table[state][symbol]
        if marked.accepting[state]:
            found.append(place)
        if place < len(codes):
            before = marked.table[before][classes[place]]
    return found
