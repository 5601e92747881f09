"""swallowed-escape: Python consumed an escape that was meant for `re`."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.limits import LimitReached
from patlint.machine.engine_tree import same
from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.subject import Subject
from patlint.rules.variants import text_between
from patlint.syntax.parser import PatternError, parse

_HARMLESS = ("\\\\", "\\'", '\\"', "\\\n", "\\\r")


def check(subject: Subject) -> Iterator[Finding]:
    site = subject.site
    pattern = site.pattern
    for offset in range(len(pattern)):
        spelled = site.spelling(offset)
        if spelled is None or not spelled.startswith("\\") or spelled.startswith(_HARMLESS):
            continue
        if site.is_raw(offset) or _is_escaped(pattern, offset):
            continue
        finding = _judge(subject, offset, spelled)
        if finding is not None:
            yield finding


def _is_escaped(pattern: str | bytes, offset: int) -> bool:
    before = pattern[:offset]
    slash: str | bytes = b"\\" if isinstance(before, bytes) else "\\"
    return (len(before) - len(before.rstrip(slash))) % 2 == 1  # type: ignore[arg-type]


def _judge(subject: Subject, offset: int, spelled: str) -> Finding | None:
    site = subject.site
    pattern = site.pattern
    meant: str | bytes
    if isinstance(pattern, bytes):
        meant = pattern[:offset] + spelled.encode("ascii", "replace") + pattern[offset + 1 :]
    else:
        meant = pattern[:offset] + spelled + pattern[offset + 1 :]
    try:
        other = parse(meant, site.flags, subject.target, subject.limits)
    except (PatternError, LimitReached):
        # re would have refused it, so the author cannot have meant it for re: \v is fine, \1 without a group.
        return None
    if same(subject.pattern.root, other.root):
        return None
    if spelled == "\\b" and not _beside_word(pattern, offset):
        return None
    mode = subject.uses[0].mode if subject.uses else "search"
    try:
        text = text_between(subject, other, mode)
        if (
            text is None
            and subject.exact
            and other.groups == subject.pattern.groups
            and spelled[1] not in "1234567"
        ):
            return None  # written differently, but the same language
    except LimitReached:
        text = None
    code = pattern[offset] if isinstance(pattern, bytes) else ord(pattern[offset])
    return Finding(
        RULE.name,
        RULE.level,
        (offset, offset + 1),
        f"Python turns {spelled} into {_name(code)} before re sees it",
        mode=mode,
        witness=None if text is None else TextWitness(text),
        proof=f"with {spelled} left for re the pattern has another meaning",
        evidence="on this text the outcome would be another with the escape left for re"
        if text is not None
        else "",
        way_out="write the pattern as a raw literal, or double the backslash",
    )


def _beside_word(pattern: str | bytes, offset: int) -> bool:
    """Whether a word boundary would make sense here: beside a letter, a digit, a group or a class escape.

    Overstriking is undone with a real backspace, as in `sub(".\\b", "", text)` and `"_\\b"`.
    """
    text = pattern.decode("latin-1") if isinstance(pattern, bytes) else pattern
    before, after = text[:offset][-1:], text[offset + 1 :][:1]
    return before.isalnum() or after.isalnum() or after in ("(", "[", "\\") or before in (")", "]", "+", "*")


def _name(code: int) -> str:
    names = {
        7: "a bell",
        8: "a backspace",
        9: "a tab",
        10: "a line feed",
        11: "a vertical tab",
        12: "a form feed",
    }
    names |= {13: "a carriage return", 32: "a blank", 0: "a null character"}
    return names.get(code) or (
        f"the character {chr(code)}" if 32 < code < 127 else f"the character U+{code:04X}"
    )


RULE = Rule(
    name="swallowed-escape",
    level="warning",
    summary="Python consumed an escape meant for re",
    page="""\
In a literal without the prefix r Python reads escapes before re does. For
most of them the outcome is the same, a tab is a tab. For some it is not:
"\\b" is a backspace, not a word boundary; "\\1" is the character U+0001, not a
reference to group 1; "\\x2e" is a full stop, which re takes as "any
character"; and under VERBOSE a tab or line feed written "\\t" or "\\n" is
layout, which re ignores.

Reported only where the text that re receives means something else than the
escape would have meant.
""",
    wrong=Example(
        'import re\n\nGROSS = re.compile("\\bGROSS\\b")\n',
        "looks for the word between two backspaces",
    ),
    right=Example('import re\n\nGROSS = re.compile(r"\\bGROSS\\b")\n'),
    check=check,
)
