r"""`Language`: the texts of a pattern, as an automaton that can be asked and combined.

>>> octet = Language("25[0-5]|2[0-4][0-9]|1[0-9]{2}|[1-9]?[0-9]")
>>> octet.total(), octet.shortest(), octet.accepts("256")
(256, '0', False)
>>> Language(r"[0-9]") <= Language(r"\d"), Language(r"[0-9]") == Language(r"\d")
(True, False)
>>> relate("a|b", "[a-c]").word
'within'

In mode "fullmatch" these are the texts that the pattern takes as a whole; in "match" and "search" those on
which that function succeeds. Where the pattern has constructs that are not said exactly (`inexact` lists them),
the automaton is a superset; an answer that a superset cannot give raises `Undecided`: it proves that a text is not
in the language, that nothing is, that two languages share nothing, that one lies within an exact other. What is
made of it by `&`, `|` and `-` is a superset again; `~` and subtracting it are undecided. Limits raise
`LimitReached`. Character classes are those of the running Python's Unicode data.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import islice
from typing import TypeAlias

from patlint.limits import DEFAULT_LIMITS, Limits
from patlint.machine import relations, words
from patlint.machine.determinise import Mode, language
from patlint.machine.dfa import Dfa, canonical
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Ambiguity, Manner, ambiguity_of
from patlint.syntax.parser import parse
from patlint.syntax.tree import Pattern

Target: TypeAlias = tuple[int, int]


class Undecided(Exception):
    """The question cannot be answered from a superset of the language; the text says what stood in the way."""


@dataclass(frozen=True, slots=True)
class Construct:
    """A construct that is not said exactly, with its span in the pattern."""

    reason: str
    span: tuple[int, int]


class Language:
    """A regular language of str or bytes texts; immutable.

    Built from a pattern, or from other languages by `&`, `|`, `-` and `~`. `exact` is False where the
    automaton is only a superset of the texts meant.
    """

    __slots__ = ("dfa", "inexact", "is_bytes", "limits", "__dict__")

    dfa: Dfa
    inexact: tuple[Construct, ...]
    is_bytes: bool
    limits: Limits

    def __init__(
        self,
        pattern: str | bytes | Pattern,
        flags: int = 0,
        mode: Mode = "fullmatch",
        target: Target | None = None,
        limits: Limits = DEFAULT_LIMITS,
    ) -> None:
        """Raises PatternError where `re` refuses the pattern, and LimitReached."""
        if mode not in ("match", "fullmatch", "search"):
            raise ValueError(f"mode must be match, fullmatch or search, not {mode!r}")
        parsed = pattern if isinstance(pattern, Pattern) else parse(pattern, flags, target, limits)
        self._of_nfa(Nfa(compile_tree(parsed, limits), limits), mode)

    def _of_nfa(self, nfa: Nfa, mode: Mode) -> None:
        self.dfa = language(nfa, mode)
        self.inexact = tuple(Construct(reason, span) for reason, span in nfa.inexact)
        self.is_bytes = nfa.program.is_bytes
        self.limits = nfa.limits

    @classmethod
    def of_nfa(cls, nfa: Nfa, mode: Mode) -> Language:
        """The language of a program whose positions are known already. Raises LimitReached."""
        made = object.__new__(cls)
        made._of_nfa(nfa, mode)
        return made

    @classmethod
    def of_automaton(
        cls, dfa: Dfa, is_bytes: bool, limits: Limits, inexact: tuple[Construct, ...] = ()
    ) -> Language:
        made = object.__new__(cls)
        made.dfa, made.inexact, made.is_bytes, made.limits = dfa, inexact, is_bytes, limits
        return made

    @property
    def exact(self) -> bool:
        return not self.inexact

    @cached_property
    def _canonical(self) -> Dfa:
        return canonical(self.dfa)

    @property
    def states(self) -> int:
        """The number of states of the minimal complete automaton."""
        return len(self.dfa)

    def _text(self, codes: tuple[int, ...]) -> str | bytes:
        return bytes(codes) if self.is_bytes else "".join(map(chr, codes))

    def _ask(self, answer: bool, sound: bool) -> bool:
        """`answer`, where `sound` says that a superset may give it."""
        if self.exact or sound:
            return answer
        reasons = ", ".join(dict.fromkeys(construct.reason for construct in self.inexact))
        raise Undecided(f"the automaton is only a superset: {reasons}")

    def accepts(self, text: str | bytes) -> bool:
        """Whether the text is in the language; TypeError where str meets bytes."""
        if isinstance(text, bytes) != self.is_bytes:
            raise TypeError("a bytes text needs a bytes pattern, a str text a str pattern")
        answer = self.dfa.accepts(text)
        return self._ask(answer, not answer)

    def is_empty(self) -> bool:
        answer = words.is_empty(self.dfa)
        return self._ask(answer, answer)

    def is_empty_for_sure(self) -> bool:
        """Whether the language is proven empty; never raises Undecided."""
        return words.is_empty(self.dfa)

    def is_universal(self) -> bool:
        """Whether every text is in the language."""
        answer = all(self.dfa.accepting)
        return self._ask(answer, not answer)

    def shortest(self) -> str | bytes | None:
        """A shortest text, None for the empty language."""
        codes = words.shortest(self.dfa)
        self._ask(True, codes is None)
        return None if codes is None else self._text(codes)

    def words(self, limit: int = 10) -> Iterator[str | bytes]:
        """Up to `limit` texts in the order of their length, one for each path of the automaton."""
        self._ask(True, False)
        return map(self._text, islice(words.words(self.dfa), limit))

    def samples(self, number: int, seed: int = 0) -> list[str | bytes]:
        """`number` random texts of the language (fewer only where it is empty)."""
        self._ask(True, False)
        return [self._text(codes) for codes in words.sample(self.dfa, seed, number)]

    def count(self, length: int) -> int:
        """How many texts of this length, in characters, are in the language."""
        self._ask(True, False)
        return words.count(self.dfa, length)

    def total(self) -> int | None:
        """How many texts are in the language, None where there is no end of them."""
        self._ask(True, False)
        return words.total(self.dfa)

    def relation(self, other: Language) -> Related:
        """How the two lie to each other. Raises Undecided unless both are exact."""
        self._same_kind(other)
        self._ask(True, False)
        other._ask(True, False)
        found = relations.relation(self.dfa, other.dfa, self.limits)
        texts = [
            None if codes is None else self._text(codes) for codes in (found.only_a, found.only_b, found.both)
        ]
        return Related(found.word, *texts)

    def _same_kind(self, other: Language) -> None:
        if self.is_bytes != other.is_bytes:
            raise TypeError("languages of str and of bytes cannot be compared")

    def difference_witness(self, other: Language) -> str | bytes | None:
        """A shortest text that one has and the other has not, None where they are equal.

        A text of an exact language that is not even in the other's superset is one too.
        """
        self._same_kind(other)
        found = relations.relation(self.dfa, other.dfa, self.limits, until_differs=self.exact and other.exact)
        # Of a difference between a language and a superset only the language's own texts are sure.
        sure = [
            codes
            for codes, owner in ((found.only_a, self), (found.only_b, other))
            if codes is not None and owner.exact
        ]
        if sure:
            return self._text(min(sure, key=len))
        nothing = found.only_a is None and found.only_b is None and found.both is None
        self._ask(True, nothing)
        other._ask(True, nothing)
        return None

    def __eq__(self, other: object) -> bool:
        """Whether both have the same texts; raises Undecided where a superset leaves that open."""
        if not isinstance(other, Language):
            return NotImplemented
        if self is other:
            return True
        if self.is_bytes != other.is_bytes:
            return False
        if self.exact and other.exact:
            return self._canonical == other._canonical
        return self.difference_witness(other) is None

    def __hash__(self) -> int:
        """Raises Undecided for a superset: sets and dictionaries would take it for different from its equals."""
        self._ask(True, False)
        return hash(self._canonical)

    def __le__(self, other: Language) -> bool:
        """Whether every text of this language is in `other`."""
        self._same_kind(other)
        inside = relations.relation(self.dfa, other.dfa, self.limits).only_a is None
        if inside:
            return other._ask(True, words.is_empty(self.dfa))
        return self._ask(False, False)

    def __lt__(self, other: Language) -> bool:
        return self <= other and self != other

    def isdisjoint(self, other: Language) -> bool:
        """Whether no text is in both."""
        self._same_kind(other)
        apart = relations.relation(self.dfa, other.dfa, self.limits).both is None
        self._ask(apart, apart)
        return other._ask(apart, apart)

    def __and__(self, other: Language) -> Language:
        self._same_kind(other)
        dfa = relations.combine(self.dfa, other.dfa, lambda a, b: a and b, self.limits)
        return self.of_automaton(dfa, self.is_bytes, self.limits, self.inexact + other.inexact)

    def __or__(self, other: Language) -> Language:
        self._same_kind(other)
        dfa = relations.combine(self.dfa, other.dfa, lambda a, b: a or b, self.limits)
        return self.of_automaton(dfa, self.is_bytes, self.limits, self.inexact + other.inexact)

    def __sub__(self, other: Language) -> Language:
        self._same_kind(other)
        other._ask(True, False)
        dfa = relations.combine(self.dfa, other.dfa, lambda a, b: a and not b, self.limits)
        return self.of_automaton(dfa, self.is_bytes, self.limits, self.inexact)

    def __invert__(self) -> Language:
        """All other texts; raises Undecided where this is only a superset."""
        self._ask(True, False)
        return self.of_automaton(relations.complement(self.dfa), self.is_bytes, self.limits)

    def __repr__(self) -> str:
        kind = "exact" if self.exact else "superset"
        return f"<Language: {len(self.dfa)} states, {kind}>"


@dataclass(frozen=True, slots=True)
class Related:
    """`word` is equal, within, covers, overlaps or disjoint; the texts (None: there is none) show it."""

    word: str
    only_first: str | bytes | None
    only_second: str | bytes | None
    both: str | bytes | None


def relate(
    first: str | bytes,
    second: str | bytes,
    flags: int = 0,
    mode: Mode = "fullmatch",
    target: Target | None = None,
) -> Related:
    """How the languages of two patterns lie to each other, as seen from the first.

    Raises PatternError, LimitReached, and Undecided where one is only a superset.
    """
    return Language(first, flags, mode, target).relation(Language(second, flags, mode, target))


def ambiguity(
    pattern: str | bytes,
    flags: int = 0,
    mode: Manner = "search",
    target: Target | None = None,
    limits: Limits = DEFAULT_LIMITS,
) -> Ambiguity:
    """How matching time can grow with the text: `growth` is None, "exponential" or a degree (2: square).

    `mode` may also be "scan", for findall, finditer, split and sub. None says that no growth beyond linear was
    confirmed; it is no proof where `undecided` names a limit. Raises PatternError, and LimitReached("nesting")
    or ("instructions").

    >>> found = ambiguity("(a+)+$", mode="match")
    >>> found.growth, found.slow.pump, found.slow.text(3)
    ('exponential', 'a', 'aaab')
    """
    return ambiguity_of(compile_tree(parse(pattern, flags, target, limits), limits), mode, limits)
