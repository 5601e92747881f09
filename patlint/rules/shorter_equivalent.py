"""shorter-equivalent: a shorter pattern has the same language, and what the program looks at stays."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rewrite.proof import holds
from patlint.rewrite.shorten import Proposal, suggest
from patlint.rules.finding import Example, Finding, Keeps, Rule, Suggestion
from patlint.rules.lopsided_anchor import looks_lopsided
from patlint.rules.subject import Subject
from patlint.source.sites import SCANNING, Mode, Site
from patlint.syntax.parser import parse


def check(subject: Subject) -> Iterator[Finding]:
    if not subject.exact or subject.site.embedded:
        return
    modes, keeps = needed(subject.site)
    proposal = _proposal(subject, modes, keeps)
    if proposal is None:
        return
    before, after = subject.site.pattern, proposal.pattern
    new = parse(after, subject.site.flags, subject.target, subject.limits)
    if looks_lopsided(new, modes) and not looks_lopsided(subject.pattern, modes):
        return  # groups that say for which branch an anchor is meant
    start, end = changed_part(before, after)
    yield Finding(
        RULE.name,
        RULE.level,
        (start, end),
        f"{len(before) - len(after)} characters shorter with the same {_KEPT[proposal.keeps]}",
        mode=next(mode for mode in ("search", "match", "fullmatch") if mode in modes),
        proof="both patterns have the same minimal automata",
        evidence="proven by comparing minimal automata",
        suggestion=Suggestion(after, proposal.keeps),
    )


_KEPT = {"language": "language", "spans": "language and spans", "groups": "language, spans and groups"}


def needed(site: Site) -> tuple[set[Mode], Keeps]:
    """The modes in which the pattern may be used, and what has to stay."""
    modes: set[Mode] = set()
    keeps: Keeps = "language"
    for use in site.uses:
        # A match from a place inside the text needs equal matches in every surrounding: spans in search.
        modes.add("search" if use.positioned and use.mode == "match" else use.mode)
        if use.looks_at in ("groups", "unknown"):
            keeps = "groups"
        elif (use.looks_at == "span" or use.function in SCANNING or use.positioned) and keeps == "language":
            keeps = "spans"
    if not site.uses_seen or not modes:
        return modes | {"search", "fullmatch"}, "groups"
    return modes, keeps


def _proposal(subject: Subject, modes: set[Mode], keeps: Keeps) -> Proposal | None:
    """A proposal that is proven for each of `modes`; it is made for the one that asks most."""
    mode: Mode = next(mode for mode in ("search", "match", "fullmatch") if mode in modes)
    # The same language in one mode says nothing about another; the same spans in search do.
    for kept in dict.fromkeys((keeps, "spans" if len(modes) > 1 and keeps == "language" else keeps)):
        found = suggest(
            subject.pattern,
            mode,
            kept,
            subject.target,
            subject.limits,
            saving=subject.saving,
            fences=fences(subject.site),
        )
        if found is not None:
            new = parse(found.pattern, subject.site.flags, subject.target, subject.limits)
            if holds(subject.pattern, new, modes, found.keeps, subject.limits):
                return found
    return None


def fences(site: Site) -> tuple[int, ...]:
    """Offsets in the pattern at which what one reads there jumps to another place of the file: from a
    constant to the next, from one text of a join to another. Literals side by side are one."""
    whole = site.place
    inside = [
        bool(piece.places)
        and (whole.line, whole.column) <= (piece.whole.line, piece.whole.column)
        and (piece.whole.end_line, piece.whole.end_column) <= (whole.end_line, whole.end_column)
        for piece in site.pieces
    ]
    out = []
    for index in range(1, len(site.pieces)):
        before, after = site.pieces[index - 1], site.pieces[index]
        rising = (before.whole.end_line, before.whole.end_column) < (after.whole.line, after.whole.column)
        if not (inside[index - 1] and inside[index] and rising):
            out.append(after.start)
    return tuple(out)


def changed_part(before: str | bytes, after: str | bytes) -> tuple[int, int]:
    """The part of `before` that differs from `after`, without their common beginning and end."""
    most = min(len(before), len(after))
    start = next((i for i in range(most) if before[i] != after[i]), most)
    left = most - start
    tail = next((i for i in range(left) if before[-1 - i] != after[-1 - i]), left)
    return start, len(before) - tail


RULE = Rule(
    name="shorter-equivalent",
    level="note",
    summary="a shorter pattern does the same",
    page="""\
The suggestion was made from the pattern's minimal automaton or by algebra on
its parts, and then proven: both patterns have the same minimal automaton in
every mode in which the pattern is used. Where the program looks at spans or
groups, these are proven to stay as well; what is not proven is not suggested.
""",
    wrong=Example(
        "import re\n\n\ndef is_code(text):\n"
        '    return re.fullmatch(r"(?:[a-z]|[A-Z])(?:[a-z]|[A-Z])*", text) is not None\n',
        "one class with a repeat says the same",
    ),
    right=Example(
        'import re\n\n\ndef is_code(text):\n    return re.fullmatch(r"[a-zA-Z]+", text) is not None\n'
    ),
    check=check,
)
