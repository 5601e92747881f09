"""nullable: the empty text matches between characters, in a call whose outcome that changes."""

from __future__ import annotations

import re
from collections.abc import Iterator

from patlint.machine.alphabet import representative
from patlint.machine.dfa import Dfa
from patlint.machine.priority import MARKER
from patlint.machine.words import distances
from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.subject import Subject
from patlint.rules.used_here import used_here
from patlint.source.sites import Use

SPLITTING = ("split", "findall", "finditer")
_ONLY_GROUPS = re.compile(r"(?:\\(?:[1-9][0-9]?|g<\w+>))*")
_ONLY_GROUPS_BYTES = re.compile(rb"(?:\\(?:[1-9][0-9]?|g<\w+>))*")


def check(subject: Subject) -> Iterator[Finding]:
    uses = [use for use in subject.uses if _outcome_changes(use)]
    if not uses or not subject.exact:
        return
    text = between_characters(subject)
    if text is None:
        return
    use = uses[0]
    found, _, _, _ = subject.matcher.scan(text, turns=subject.limits.turns)
    places = [outcome.span[0] for outcome in found if outcome.span and outcome.span[0] == outcome.span[1]]
    if len(places) < 2:
        return
    shown = ", ".join(map(str, places[:3]))
    if use.in_loop and use.function not in (*SPLITTING, "sub", "subn"):
        message = "the empty text matches, so a loop that goes on from the end of the match can stand still"
    else:
        message = f"the empty text matches between characters, which changes what {use.function} gives"
    yield Finding(
        RULE.name,
        RULE.level,
        (0, len(subject.site.pattern)),
        message,
        mode="search",
        witness=TextWitness(text),
        evidence=f"on this text there are empty matches at {shown}",
        way_out=_WAYS.get(use.function, "demand at least one character, with + in place of *"),
        related=used_here(subject, use),
    )


_WAYS = {
    "split": "demand at least one character, with + in place of *: the text is cut at every empty match",
    "sub": "demand at least one character, with + in place of *: every empty match is replaced too",
    "subn": "demand at least one character, with + in place of *: every empty match is replaced too",
    "findall": "demand at least one character, with + in place of *, or the list has empty entries",
    "finditer": "demand at least one character, with + in place of *, or the loop sees empty matches",
}


def _outcome_changes(use: Use) -> bool:
    if use.maximum == 1:
        return False
    match use.function:
        case "split":
            return True
        case "findall" | "finditer":
            # Where only the truth is asked, vacuous-test speaks.
            return not use.drops_empty and use.looks_at != "truth"
        case "sub" | "subn":
            # Where the replacement is not constant, an empty match may well be what it expects.
            text = use.replacement
            if isinstance(text, bytes):
                return _ONLY_GROUPS_BYTES.fullmatch(text) is None
            return text is not None and _ONLY_GROUPS.fullmatch(text) is None
        case "match" | "search":
            return use.in_loop
        case _:
            return False


def between_characters(subject: Subject) -> str | bytes | None:
    """A text with an empty match between two characters, for a pattern that matches more than nothing."""
    nfa = subject.nfa
    letters = [representative(chars) for chars in nfa.alphabet.classes]
    line_feed = nfa.alphabet.classify(10)
    matches_empty: tuple[int, ...] | None = None
    matches_some = False
    before: dict[int, tuple[int, ...]] = {}
    order: list[tuple[int, tuple[int, ...]]] = [(nfa.start_context, ())]
    for context, codes in order:
        for minterm, letter in enumerate(letters):
            if minterm == line_feed:
                continue  # after a line feed an empty match may be meant: (?m)^
            after = nfa.next_context(context, minterm)
            if after in before:
                continue
            before[after] = (*codes, letter)
            order.append((after, before[after]))
            dfa = subject.spans(after)
            if matches_empty is None:
                rest = _after_empty_match(dfa)
                matches_empty = None if rest is None else before[after] + rest
            matches_some = matches_some or _reads_something(dfa)
            if matches_empty is not None and matches_some:
                return subject.text(matches_empty)
    return None


def _after_empty_match(dfa: Dfa) -> tuple[int, ...] | None:
    """Two characters and more that may follow an empty match, or None."""
    state = dfa.table[0][dfa.alphabet.classify(MARKER)]
    left = distances(dfa)
    letters = [
        (representative(chars), minterm)
        for minterm, chars in enumerate(dfa.alphabet.classes)
        if chars.bounds[0] != MARKER
    ]
    letters.sort(key=lambda pair: (not 32 < pair[0] < 127, pair[0]))
    for first, minterm in letters:
        middle = dfa.table[state][minterm]
        for second, other in letters:
            end = dfa.table[middle][other]
            if left[end] is None:
                continue
            codes = [first, second]
            while left[end]:
                codes.append(next(c for c, m in letters if left[dfa.table[end][m]] == (left[end] or 0) - 1))
                end = next(
                    dfa.table[end][m] for _, m in letters if left[dfa.table[end][m]] == (left[end] or 0) - 1
                )
            return tuple(codes)
    return None


def _reads_something(dfa: Dfa) -> bool:
    """Whether some match is longer than nothing."""
    left = distances(dfa)
    marker = dfa.alphabet.classify(MARKER)
    return any(left[target] is not None for minterm, target in enumerate(dfa.table[0]) if minterm != marker)


RULE = Rule(
    name="nullable",
    level="warning",
    summary="the empty text matches where that matters",
    page="""\
split, sub, findall and finditer act on empty matches too, since Python 3.7
between all characters: `re.split(r",?", "ab")` is ['', 'a', 'b', '']. A loop
that goes on from the end of the last match stands still on an empty one.

Reported where the pattern matches empty and other texts, in the middle of a
text, and the call's outcome depends on it. Quiet: a replacement that leaves
the empty match as it is (`sub(r"\\s*", "", s)`), an anchored pattern
(`sub(r"^\\s*", "> ", s)`), patterns that match only the empty text
(zero-width splits), and empty texts that are taken out on the spot
(`[x for x in re.findall(r"\\d*", s) if x]`).
""",
    wrong=Example(
        'import re\n\n\ndef fields(line):\n    return re.split(r"\\s*;?\\s*", line)\n',
        "cuts between all characters",
    ),
    right=Example('import re\n\n\ndef fields(line):\n    return re.split(r"\\s*;\\s*", line)\n'),
    check=check,
)
