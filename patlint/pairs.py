r"""In what two patterns agree: the texts, the part of a text that `match` takes, the places that a scan finds.

>>> found = agreement("a|ab", "ab?")
>>> found.language.holds, found.spans.holds, found.spans.text
(True, False, 'ab')

Each answer is yes with a proof, no with a text that shows it on `re`, or undecided with a reason: a limit, or a
construct of which only a superset is known. Two supersets are equal for sure only where they are empty; that two
patterns differ may be seen on single texts even so.
"""

from __future__ import annotations

from dataclasses import dataclass

from patlint.language import Target
from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine import relations
from patlint.machine.agreement import scan_difference, span_differences
from patlint.machine.determinise import Mode, language
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.syntax.parser import parse


@dataclass(frozen=True, slots=True)
class Answer:
    """`holds` is True (proven), False or None (undecided, for `reason`); `text` shows a False."""

    holds: bool | None
    text: str | bytes | None = None
    reason: str | None = None


@dataclass(frozen=True, slots=True)
class Agreement:
    """Whether two patterns take the same texts, whether `match` takes the same part of each, and whether search,
    finditer, sub with a constant and split without groups find the same places. Groups are not compared.
    """

    language: Answer
    spans: Answer
    scans: Answer


def agreement(
    first: str | bytes,
    second: str | bytes,
    flags: int = 0,
    mode: Mode = "fullmatch",
    target: Target | None = None,
    limits: Limits = DEFAULT_LIMITS,
) -> Agreement:
    """In what two patterns agree; `language` is that of `mode`. Spans are of texts from their beginning.

    A False is certain: where `re` runs both on its text, the outcomes differ. Raises PatternError, and
    TypeError where str meets bytes.

    >>> found = agreement("(?:)", "(?:|a)")
    >>> found.spans.holds, found.scans.holds, found.scans.text
    (True, False, 'a')
    """
    if isinstance(first, bytes) != isinstance(second, bytes):
        raise TypeError("languages of str and of bytes cannot be compared")
    yes = Answer(True)
    try:
        trees = parse(first, flags, target, limits), parse(second, flags, target, limits)
        if first == second:
            return Agreement(yes, yes, yes)
        pair = _Pair.of(*(Nfa(compile_tree(tree, limits), limits) for tree in trees))
    except LimitReached as reached:
        never = Answer(None, None, str(reached))
        return Agreement(never, never, never)
    return Agreement(pair.language(mode), pair.spans(), pair.scans())


@dataclass(frozen=True, slots=True)
class _Pair:
    """Two programs, and what runs them; a superset proves nothing, but the matcher shows differences."""

    nfas: tuple[Nfa, Nfa]
    matchers: tuple[Matcher, Matcher]

    @classmethod
    def of(cls, first: Nfa, second: Nfa) -> _Pair:
        return cls((first, second), (Matcher(first.program), Matcher(second.program)))

    def text(self, codes: tuple[int, ...]) -> str | bytes:
        return bytes(codes) if self.nfas[0].program.is_bytes else "".join(map(chr, codes))

    def undecided(self) -> Answer:
        reasons = dict.fromkeys(reason for nfa in self.nfas for reason, _ in nfa.inexact)
        return Answer(None, None, f"only a superset is known: {', '.join(reasons)}")

    def outcomes_differ(self, text: str | bytes, mode: Mode, truth: bool) -> bool:
        """Whether the matcher shows a difference; never where the locale has a say."""
        if any(nfa.program.locale for nfa in self.nfas):
            return False
        one, other = (each.run(text, mode, self.nfas[0].limits.turns) for each in self.matchers)
        if not one.finished or not other.finished:
            return False
        return (one.span is None) != (other.span is None) if truth else one.span != other.span

    def language(self, mode: Mode) -> Answer:
        try:
            one, other = (language(nfa, mode) for nfa in self.nfas)
            found = relations.relation(one, other, self.nfas[0].limits)
        except LimitReached as reached:
            return Answer(None, None, str(reached))
        exact = not any(nfa.inexact for nfa in self.nfas)
        if found.only_a is None and found.only_b is None and (exact or found.both is None):
            return Answer(True)
        for codes in (found.only_a, found.only_b, None if exact else found.both):
            if codes is not None and (exact or self.outcomes_differ(self.text(codes), mode, True)):
                return Answer(False, self.text(codes))
        return self.undecided()

    def spans(self) -> Answer:
        if any(nfa.inexact for nfa in self.nfas):
            truth = self.language("match")
            return truth if truth.holds is not None else self.undecided()
        try:
            for found in span_differences(*self.nfas, self.nfas[0].limits, left=False, not_empty=False):
                return Answer(False, self.text(found.text))
        except LimitReached as reached:
            return Answer(None, None, str(reached))
        return Answer(True)

    def scans(self) -> Answer:
        if any(nfa.inexact for nfa in self.nfas):
            truth = self.language("search")
            return truth if truth.holds is not None else self.undecided()
        limits = self.nfas[0].limits
        texts: list[str | bytes] = []
        reason = "spans differ behind some texts, where the engine may never begin"
        try:
            for found in span_differences(*self.nfas, limits, left=True, not_empty=True):
                texts.append(self.text(found.text))
                shown = scan_difference(*self.matchers, texts[-1:], limits)
                if shown is not None:
                    return Answer(False, shown)
        except LimitReached as reached:
            reason = str(reached)
            texts = texts or [""]
        return Answer(None, None, reason) if texts else Answer(True)
