"""overlapping-siblings: two patterns of a family match the same text. Off unless asked for."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.kin import Kin

MOST_NAMED = 3
"""Earlier members that are named in one finding."""


def check_family(kin: Kin) -> Iterator[tuple[int, Finding]]:
    if kin.family.order != "first":
        return
    for number in range(1, len(kin.members)):
        verdict = kin.verdict(number)
        if verdict is not None:
            continue  # told as equal or covered
        shared = kin.overlaps(number, MOST_NAMED)
        if not shared:
            continue
        site = kin.members[number].site
        first, text = next(iter(shared.items()))
        yield (
            number,
            Finding(
                RULE.name,
                RULE.level,
                (0, len(site.pattern)),
                "this pattern and an earlier one of its family match the same texts",
                mode=kin.mode(number),
                witness=TextWitness(text),
                evidence=f"this text is matched by the pattern of line {kin.line(first, number)} as well",
                way_out="let no text fit both, or be content that the order decides",
                related=tuple(
                    kin.related(each, number, f"matches {shown!a}") for each, shown in shared.items()
                ),
            ),
        )


RULE = Rule(
    name="overlapping-siblings",
    level="note",
    summary="two patterns of a family share texts",
    page="""\
Where the patterns of a table are meant to exclude each other, so that their
order does not matter, a text that two of them match shows that it does. This
is common and mostly meant, so the rule is off: ask for it with
`--only overlapping-siblings`, or give it a level in the configuration. Only
match and fullmatch are looked at; two searches nearly always share texts.
""",
    wrong=Example(
        "import re\n\n\ndef kind(text):\n"
        '    if re.fullmatch(r"[0-9]+", text):\n        return "number"\n'
        '    elif re.fullmatch(r"[0-9]{4}|today", text):\n        return "year"\n    return None\n',
        "1900 is a number as well as a year",
    ),
    right=Example(
        "import re\n\n\ndef kind(text):\n"
        '    if re.fullmatch(r"[0-9]{5,}", text):\n        return "number"\n'
        '    elif re.fullmatch(r"[0-9]{4}|today", text):\n        return "year"\n    return None\n'
    ),
    check_family=check_family,
)
