"""stale-waiver: a waiver that waives nothing. Found where waivers are applied, `patlint.outcome`."""

from __future__ import annotations

from patlint.rules.finding import Example, Rule

RULE = Rule(
    name="stale-waiver",
    level="warning",
    summary="a waiver that waives nothing",
    page="""\
A waiver is a comment `# patlint: waive RULE -- reason` on the pattern's line,
on its statement's first line, or on the line above. When the finding that it
waives is gone, or its rule's name is not known, the comment says something
that is no longer true: delete it. A waiver that cannot be read (no rule, no
reason) is reported under this name too, for it waives nothing either.
""",
    wrong=Example(
        'import re\n\n# patlint: waive nullable -- blanks are optional here\nGATE = re.compile(r"gate [0-9]+")\n',
        "the pattern takes no empty text",
    ),
    right=Example('import re\n\nGATE = re.compile(r"gate [0-9]+")\n'),
)
