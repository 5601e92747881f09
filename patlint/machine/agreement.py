r"""Whether two programs match the same spans, and a text on which they do not.

The spans of one match are a regular language of marked texts (`priority.spans`), given what is known of the
text to the left of it. `span_differences` compares them for each pair of contexts to which some text to the
left leads, and where asked once more with the empty match forbidden, as it is behind an empty match in finditer,
sub and split.

- No difference anywhere: every match and fullmatch from any place, search, finditer, sub with a constant and
  split without groups have the same outcome.
- A difference where the text begins is one of `match` and of `search`.
- A difference behind a text to the left need not show: the engine may never begin there. `scan_difference` asks
  the matcher on the texts found, and is sure only of those on which it sees one.

>>> from patlint.machine.program import compile_tree
>>> from patlint.syntax.parser import parse
>>> from patlint.limits import DEFAULT_LIMITS
>>> a, b = (Nfa(compile_tree(parse(text)), DEFAULT_LIMITS) for text in ("(?:)", "(?:|a)"))
>>> found = next(span_differences(a, b, DEFAULT_LIMITS, left=True, not_empty=True))
>>> found.left, found.rest, found.not_empty
((), (97,), True)

Cost: two automata and one comparison for each pair of contexts. Limits: `contexts`, `states`, `work`, `product`.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from patlint.limits import LimitReached, Limits
from patlint.machine.alphabet import common, representative
from patlint.machine.dfa import canonical
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.priority import MARKER, spans
from patlint.machine.relations import Codes, relation


@dataclass(frozen=True, slots=True)
class SpanDifference:
    """Matches that begin behind `left` end at different places of `rest`, or only one of both is a match.

    `not_empty`: the empty match is forbidden there.
    """

    left: Codes
    rest: Codes
    not_empty: bool

    @property
    def text(self) -> Codes:
        return self.left + self.rest


def span_differences(
    a: Nfa, b: Nfa, limits: Limits, *, left: bool, not_empty: bool
) -> Iterator[SpanDifference]:
    """One difference for each pair of contexts in which the spans differ, those that begin the text first.

    Without `left` only matches at the beginning of the text are compared. `not_empty`: also those that may not
    be empty. Both programs must be exact. Raises LimitReached.
    """
    if a.inexact or b.inexact:
        raise ValueError("spans of a pattern that is not said exactly are not known")
    pairs = _context_pairs(a, b, limits) if left else {(a.start_context, b.start_context): ()}
    for forbidden in (False, True) if not_empty else (False,):
        for (context_a, context_b), before in pairs.items():
            one, other = spans(a, context_a, forbidden), spans(b, context_b, forbidden)
            if one == other or canonical(one) == canonical(other):
                continue
            found = relation(one, other, limits, until_differs=True)
            marked = found.only_a if found.only_a is not None else found.only_b
            assert marked is not None
            yield SpanDifference(before, tuple(code for code in marked if code != MARKER), forbidden)


def _context_pairs(a: Nfa, b: Nfa, limits: Limits) -> dict[tuple[int, int], Codes]:
    """The pairs of contexts to which a text can lead, each with a shortest such text."""
    alphabet, of_a, of_b = common(a.alphabet, b.alphabet)
    letters = [representative(chars) for chars in alphabet.classes]
    start = (a.start_context, b.start_context)
    pairs: dict[tuple[int, int], Codes] = {start: ()}
    order = [start]
    for pair in order:
        for letter, minterm_a, minterm_b in zip(letters, of_a, of_b, strict=True):
            after = a.next_context(pair[0], minterm_a), b.next_context(pair[1], minterm_b)
            if after not in pairs:
                if len(pairs) >= limits.contexts:
                    raise LimitReached("contexts", limits.contexts)
                pairs[after] = (*pairs[pair], letter)
                order.append(after)
    return pairs


def same_spans(a: Nfa, b: Nfa, limits: Limits, *, not_empty: bool) -> bool:
    """Whether both match the same spans, whatever stands to the left. Raises LimitReached."""
    return next(span_differences(a, b, limits, left=True, not_empty=not_empty), None) is None


def scan_difference(a: Matcher, b: Matcher, texts: list[str | bytes], limits: Limits) -> str | bytes | None:
    """The first of `texts` on which finditer finds other spans for `a` than for `b`, None where none shows it."""
    for text in texts:
        found_a, _, _, done_a = a.scan(text, limits.turns)
        found_b, _, _, done_b = b.scan(text, limits.turns)
        if done_a and done_b and [each.span for each in found_a] != [each.span for each in found_b]:
            return text
    return None
