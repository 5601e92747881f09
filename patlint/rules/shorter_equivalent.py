"""shorter-equivalent: a shorter pattern has the same language, and what the program looks at stays."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Keeps, Rule, Suggestion
from patlint.rules.subject import Subject
from patlint.source.sites import SCANNING, Mode


def check(subject: Subject) -> Iterator[Finding]:
    if not subject.exact:
        return
    try:
        from patlint.rewrite.shorten import suggest
    except ImportError:
        return
    modes: dict[Mode, None] = {}
    keeps: Keeps = "language"
    for use in subject.uses:
        modes["search" if use.positioned and use.mode == "match" else use.mode] = None
        if use.looks_at in ("groups", "unknown"):
            keeps = "groups"
        elif (use.looks_at == "span" or use.function in SCANNING) and keeps == "language":
            keeps = "spans"
    if not subject.site.uses_seen or not modes:
        keeps = "groups"
        modes |= dict.fromkeys(("search", "fullmatch"))
    proposal = suggest(subject.pattern, tuple(modes), keeps, subject.target, subject.limits)
    if proposal is None:
        return
    before, after = len(subject.site.pattern), len(proposal.pattern)
    kept = {"language": "language", "spans": "language and spans", "groups": "language, spans and groups"}
    yield Finding(
        RULE.name,
        RULE.level,
        proposal.span,
        f"{before - after} characters shorter with the same {kept[proposal.keeps]}: {_shown(proposal.pattern)}",
        mode=next(iter(modes)),
        proof="both patterns have the same minimal automata",
        evidence="both have the same minimal automaton",
        way_out="",
        suggestion=Suggestion(proposal.pattern, proposal.keeps),
    )


def _shown(pattern: str | bytes) -> str:
    text = pattern.decode("latin-1") if isinstance(pattern, bytes) else pattern
    return text if text.isprintable() else ascii(text)[1:-1]


RULE = Rule(
    name="shorter-equivalent",
    level="note",
    summary="a shorter pattern has the same language, and the same spans where the program looks at them",
    page="""\
The suggestion was made from the pattern's minimal automaton or by algebra on
its parts, and then proven: both patterns have the same minimal automaton in
every mode in which the pattern is used. Where the program looks at spans or
groups, these are proven to stay as well; what is not proven is not suggested.
""",
    wrong=Example(
        'import re\n\n\ndef is_code(text):\n    return re.fullmatch(r"(?:[a-z]|[A-Z]|[0-9])(?:[a-z]|[A-Z]|[0-9])*", text) is not None\n',
        "one class with a repeat says the same",
    ),
    right=Example(
        'import re\n\n\ndef is_code(text):\n    return re.fullmatch(r"[a-zA-Z0-9]+", text) is not None\n'
    ),
    check=check,
)
