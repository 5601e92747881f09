"""vacuous-test: the truth of a match is tested, and every text passes."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.subject import Subject
from patlint.rules.used_here import used_here

_TESTED = {
    "match": "succeeds",
    "fullmatch": "succeeds",
    "search": "succeeds",
    "findall": "finds something",
    "finditer": "finds something",
}
"""Functions of which the truth may be asked, and what makes it true."""


def check(subject: Subject) -> Iterator[Finding]:
    if not subject.site.pattern or not subject.exact:
        return
    for use in subject.uses:
        if use.selects or use.looks_at != "truth" or use.positioned or use.function not in _TESTED:
            continue
        if not subject.language(use.mode).is_universal():
            continue
        text: str | bytes = b"" if subject.pattern.is_bytes else ""
        yield Finding(
            RULE.name,
            RULE.level,
            (0, len(subject.site.pattern)),
            f"this test always passes: every text matches in {use.mode}",
            mode=use.mode,
            witness=TextWitness(text),
            proof=f"the automaton of the pattern in {use.mode} accepts every text",
            evidence=f"on the empty text {use.function} {_TESTED[use.function]}, as on every other",
            way_out="demand at least one character, or anchor both ends",
            related=used_here(subject, use),
        )
        return


RULE = Rule(
    name="vacuous-test",
    level="error",
    summary="a match is tested that every text passes",
    page="""\
The program asks only whether there is a match, and there always is one, so
the test tests nothing. Most often everything in the pattern is optional
(`\\d*`), or search and match are content with an empty match at the start
where fullmatch was meant.

The empty literal "" as a pattern is the usual way to write "always" and is
not reported.
""",
    wrong=Example(
        'import re\n\n\ndef is_weight(text):\n    return bool(re.match(r"[0-9]*", text))\n',
        "every text begins with no digit at all",
    ),
    right=Example('import re\n\n\ndef is_weight(text):\n    return bool(re.fullmatch(r"[0-9]+", text))\n'),
    check=check,
)
