"""A family with everything that can be asked of its members, each answer computed once.

Family rules ask a `Kin`, as rules of single patterns ask a `Subject`. Its members are numbered in their order.
`verdict(k)` says whether the earlier members take all that member `k` matches, in every trial of the family;
`twin(k)` finds an earlier member that does the same where nothing is known of their order.

A trial that begins at a position within the text is judged once for each thing that may stand before it. What is
sound of a superset: all of it may be taken by others; it takes nothing for sure itself.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

from patlint.limits import LimitReached, Limits
from patlint.machine.agreement import same_spans
from patlint.machine.cover import Rivals
from patlint.machine.determinise import subset_table
from patlint.machine.dfa import Dfa, canonical, minimal
from patlint.machine.nfa import Nfa
from patlint.machine.words import Codes
from patlint.rules.finding import Related
from patlint.rules.never import is_spelled_never
from patlint.rules.subject import Subject
from patlint.source.sites import Family, Member, Mode
from patlint.syntax import tree as t

_BEFORE: tuple[str | None, ...] = (None, "\n", "a", "\u00e9", " ")
"""What may stand before a position, as far as `^` and `\\b` can tell it apart; None: nothing."""


@dataclass(frozen=True, slots=True)
class Verdict:
    """The earlier members `takers` take all that a member matches; the texts show it for each.

    `equal`: the only taker matches nothing else. `catch_all`: it takes every text. `together`: it is asked in
    the same breath, and their order does not matter.
    """

    takers: dict[int, str | bytes]
    equal: bool
    catch_all: bool
    together: bool
    text: str | bytes | None
    """A shortest text that the member matches, None where only a superset of them is known."""


class Kin:
    """`family` for the target version; `subject_of` gives the subject of a member, None where there is none."""

    def __init__(
        self, family: Family, subject_of: Callable[[Member], Subject | None], limits: Limits
    ) -> None:
        self.family = family
        self.members = family.members
        self.limits = limits
        self.subjects = [subject_of(member) for member in family.members]
        self.undecided: dict[int, str] = {}
        """Members of which a limit left a question open, with its name."""
        self._verdicts: dict[int, Verdict | None] = {}

    def text(self, member: int, codes: Codes) -> str | bytes:
        subject = self.subjects[member]
        assert subject is not None
        return subject.text(codes)

    def related(self, member: int, of: int, message: str) -> Related:
        """Another member than `of`, where its pattern stands; where that is the same, the test that asks it."""
        site, asked = self.members[member].site, self.members[member].asked
        place = site.place_of_span(0, len(site.pattern))
        if asked is not None and site is self.members[of].site:
            place = asked
        return Related(message, path=site.path, place=place)

    def mode(self, member: int) -> Mode | None:
        """The mode in which a member is tried, None where there are several."""
        modes = set(self.members[member].modes)
        return modes.pop() if len(modes) == 1 else None

    def line(self, member: int, of: int) -> int:
        """The line of another member's pattern; where it is the same pattern, of the test that asks it."""
        other = self.members[member]
        same = other.asked is not None and other.site is self.members[of].site
        return other.asked.line if same and other.asked else other.site.place.line

    # languages

    @cached_property
    def _columns(self) -> list[tuple[int, str | None]]:
        """Trials, each with what stands before the place where it begins."""
        columns: list[tuple[int, str | None]] = []
        for number, trial in enumerate(self.family.trials):
            before = _BEFORE if trial.positioned and self._asks_before else (None,)
            columns += [(number, each) for each in before]
        return columns

    @cached_property
    def _asks_before(self) -> bool:
        for subject in self.subjects:
            try:
                if subject is not None and subject.parsed is not None:
                    nfa = subject.nfa
                    if nfa.asks_start or nfa.asks_newline or nfa.words:
                        return True
            except LimitReached:
                pass
        return False

    def _dfa(self, member: int, column: int) -> Dfa | None:
        """The automaton of a member in a column; None where it has none or a limit was reached."""
        subject = self.subjects[member]
        if subject is None or subject.parsed is None:
            return None
        trial, before = self._columns[column]
        mode = self.members[member].modes[trial]
        try:
            if self.family.trials[trial].positioned and subject.nfa.trackers:
                return None  # a look-behind sees more than the one character before
            if before is None:
                return subject.language(mode).dfa
            return _language_after(subject.nfa, mode, before)
        except LimitReached as reached:
            self.undecided[member] = reached.limit
            return None

    @cached_property
    def _dfas(self) -> dict[int, list[Dfa]]:
        """The automata of each member, one for each column; members that lack one are left out."""
        found = {}
        for member in range(len(self.members)):
            own = [self._dfa(member, column) for column in range(len(self._columns))]
            whole = [dfa for dfa in own if dfa is not None]
            if len(whole) == len(own):
                found[member] = whole
        return found

    @cached_property
    def _rivals(self) -> dict[bool, list[Rivals]]:
        """For bytes and for texts, the automata of each column."""
        product = self.limits.product
        return {
            is_bytes: [
                Rivals(
                    {
                        each: own[column]
                        for each, own in self._dfas.items()
                        if self._is_bytes(each) == is_bytes
                    },
                    product,
                )
                for column in range(len(self._columns))
            ]
            for is_bytes in (False, True)
        }

    def _exact(self, member: int) -> bool:
        subject = self.subjects[member]
        return subject is not None and subject.parsed is not None and subject.exact

    def _is_bytes(self, member: int) -> bool:
        return isinstance(self.members[member].site.pattern, bytes)

    @cached_property
    def _takers(self) -> list[int]:
        """The members that take something for sure where they match."""
        return [each for each in self._dfas if self.members[each].takes and self._exact(each)]

    def _earlier(self, member: int) -> list[int]:
        """Those of them that stand before `member` and are asked about the same kind of text."""
        is_bytes = self._is_bytes(member)
        return [each for each in self._takers if each < member and self._is_bytes(each) == is_bytes]

    # questions

    def verdict(self, member: int) -> Verdict | None:
        """None where nothing is said of a member. Only for families in which the first match wins."""
        if member not in self._verdicts:
            found = None
            try:
                found = self._verdict(member)
            except LimitReached as reached:
                self.undecided[member] = reached.limit
            self._verdicts[member] = found
        return self._verdicts[member]

    def _verdict(self, member: int) -> Verdict | None:
        subject = self.subjects[member]
        earlier = self._earlier(member)
        if not earlier or member not in self._dfas or not self._columns or subject is None:
            return None
        columns = self._rivals[self._is_bytes(member)]
        shortest = columns[0].shortest(member)
        if shortest is None or is_spelled_never(subject.pattern.root):
            return None
        takers: dict[int, Codes] = {}
        for rivals in columns:
            # Those that have taken texts in another column come first, so that few are named.
            found = rivals.cover(member, [*takers, *(each for each in earlier if each not in takers)])
            if found.takers is None and found.text is not None:
                return None
            takers = (found.takers or {}) | takers
        exact = self._exact(member)
        catch_all = len(takers) == 1 and all(rivals.is_universal(next(iter(takers))) for rivals in columns)
        twin = None
        if exact:
            twin = next((each for each in earlier if all(r.equal(each, member) for r in columns)), None)
        if twin is not None:
            takers = {twin: shortest}
        step = self.members[member].step
        return Verdict(
            {each: self.text(member, codes) for each, codes in sorted(takers.items())},
            twin is not None,
            catch_all and twin is None,
            all(self.members[each].step == step for each in takers),
            self.text(member, shortest) if exact else None,
        )

    def overlaps(self, member: int, most: int) -> dict[int, str | bytes]:
        """Up to `most` earlier members that match some text which `member` matches, with such a text.

        Only texts that a trial may begin with, and not for `search`.
        """
        found: dict[int, str | bytes] = {}
        if member not in self._dfas or not self._exact(member):
            return found
        for column, (trial, before) in enumerate(self._columns):
            if before is not None or self.members[member].modes[trial] == "search":
                continue
            rivals = self._rivals[self._is_bytes(member)][column]
            for each in self._earlier(member):
                if len(found) >= most:
                    break
                if self.members[each].modes[trial] == "search" or each in found:
                    continue
                try:
                    both = rivals.shared(member, each)
                except LimitReached as reached:
                    self.undecided[member] = reached.limit
                    continue
                if both is not None:
                    found[each] = self.text(member, both)
        return found

    def twins(self) -> dict[int, int]:
        """Members that do the same as an earlier one whatever is asked of them, with that one.

        Only where the rest of their rows is the same too, and their flags are.
        """
        groups: dict[object, list[int]] = {}
        for number, member in enumerate(self.members):
            subject = self.subjects[number]
            if subject is not None and subject.parsed is not None and member.rest is not None:
                key = (member.rest, member.site.flags, self._is_bytes(number))
                groups.setdefault(key, []).append(number)
        found: dict[int, int] = {}
        for group in groups.values():
            if len(group) > 1:
                self._find_twins(group, found)
        return found

    def _find_twins(self, group: list[int], found: dict[int, int]) -> None:
        by_text: dict[str | bytes, int] = {}
        by_language: dict[Dfa, list[int]] = {}
        for number in group:
            subject = self.subjects[number]
            assert subject is not None
            if subject.site.pattern in by_text:
                found[number] = by_text[subject.site.pattern]
                continue
            by_text[subject.site.pattern] = number
            try:
                if not subject.exact or _has_groups(subject.pattern):
                    continue
                alike = by_language.setdefault(canonical(subject.language("fullmatch").dfa), [])
                for earlier in alike:
                    other = self.subjects[earlier]
                    assert other is not None
                    if same_spans(other.nfa, subject.nfa, self.limits, not_empty=True):
                        found[number] = earlier
                        break
                else:
                    alike.append(number)
            except LimitReached as reached:
                self.undecided[number] = reached.limit


def _has_groups(pattern: t.Pattern) -> bool:
    return any(isinstance(node, t.Group) and node.index is not None for node in t.walk(pattern.root))


def _language_after(nfa: Nfa, mode: Mode, before: str) -> Dfa:
    """The texts that match in `mode` from a place behind `before`. Raises LimitReached."""
    code = min(ord(before), 0xFF if nfa.program.is_bytes else ord(before))
    context = nfa.next_context(nfa.start_context, nfa.alphabet.classify(code))
    table, accepting = subset_table(nfa, mode, nfa.initial(context), context)
    return minimal(nfa.alphabet, table, accepting)
