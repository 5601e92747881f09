"""empty-language: nothing matches, in a mode in which the pattern is used."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Rule
from patlint.rules.never import is_spelled_never
from patlint.rules.subject import Subject
from patlint.rules.used_here import used_here
from patlint.source.sites import Mode, Use


def check(subject: Subject) -> Iterator[Finding]:
    if is_spelled_never(subject.pattern.root):
        return
    site = subject.site
    modes: dict[Mode, Use] = {}
    for use in subject.uses:
        modes.setdefault("search" if use.positioned else use.mode, use)
    # Where no use is seen only what holds in every use counts: search finds whatever any of them can.
    asked: tuple[Mode, ...] = tuple(modes) or ("search",)
    for mode in asked:
        if not subject.language(mode).is_empty_for_sure():
            continue
        shown = modes.get(mode)
        asked_by: Mode = mode if shown is None else shown.mode
        where = "in whatever way it is used" if shown is None else f"in {asked_by}"
        if shown is not None and shown.positioned:
            where += ", from whatever place"
        yield Finding(
            RULE.name,
            RULE.level,
            (0, len(site.pattern)),
            f"nothing matches this pattern {where}",
            mode=asked_by,
            proof=f"the automaton of the pattern in {mode} accepts no text",
            evidence="its automaton accepts no text at all",
            way_out="look for an anchor on the wrong side, or conditions that cannot hold together",
            related=used_here(subject, shown),
        )
        return


RULE = Rule(
    name="empty-language",
    level="error",
    summary="nothing matches in the mode that is used",
    page="""\
No text makes this call succeed: the automaton of the pattern, in the mode in
which it is used, accepts nothing. Usual causes are an anchor in the middle
(`x^y`, `$z`), a boundary between two characters that cannot have one, or a
look-ahead that contradicts what follows it.

`(?!)` and `[^\\s\\S]` are the usual ways to write "never" on purpose and are
not reported. A compiled pattern whose uses are not all seen is reported only
where it is empty in every mode and from every place in a text.
""",
    wrong=Example(
        'import re\n\n\ndef is_empty_slot(line):\n    return bool(re.match(r"slot$ free", line))\n',
        "the end of the text stands before more text",
    ),
    right=Example(
        'import re\n\n\ndef is_empty_slot(line):\n    return bool(re.fullmatch(r"slot free", line))\n'
    ),
    check=check,
)
