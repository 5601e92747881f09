"""final-newline: a `$` lets a validated text end in a line feed that the author did not mean.

What the author meant is the pattern with `\\Z` in place of each `$`. If that one is bound at both ends (what it
finds is the whole text) and takes no text that ends in a line feed, the line feed that `$` lets pass is a
surprise. Both are asked of automata, so that it does not matter how the bounds are written.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from patlint.language import Language
from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.subject import Subject
from patlint.rules.used_here import used_here
from patlint.rules.variants import with_part
from patlint.source.sites import Mode
from patlint.syntax import tree as t


def check(subject: Subject) -> Iterator[Finding]:
    uses = subject.uses
    ends = [node for node in t.walk(subject.pattern.root) if _is_soft_end(node)]
    if not ends or not uses or any(use.looks_at != "truth" or use.positioned for use in uses):
        return
    telling = [use for use in uses if use.validates and not use.end_settled and use.mode != "fullmatch"]
    if not telling or not subject.exact:
        return
    use = telling[0]
    text = surprise(subject, ends, use.mode)
    if text is None:
        return
    hard = r"\Z" if subject.target is None or subject.target < (3, 14) else r"\z"
    last, *others = reversed(ends)
    yield Finding(
        RULE.name,
        RULE.level,
        last.span,
        f"a text passes with a line feed at its end: {ascii(text)}",
        mode=use.mode,
        witness=TextWitness(text),
        evidence=f"on this text {use.function} succeeds, as it does without the line feed",
        way_out=f"write {hard} in place of $"
        + ("" if "." in subject.site.function else f", or take fullmatch in place of {use.function}"),
        marks=tuple(other.span for other in others),
        related=used_here(subject, use),
        brief=True,
    )


def _is_soft_end(node: t.Node) -> bool:
    """A `$` that also holds before a line feed at the end of the text, and not before every one."""
    return isinstance(node, t.Anchor) and node.kind == "$" and not node.flags & t.MULTILINE


def surprise(subject: Subject, ends: list[t.Node], mode: Mode) -> str | bytes | None:
    """A text with a line feed at its end that passes because of `ends` alone. Raises LimitReached."""
    hard = subject.pattern.root
    for end in ends:
        assert isinstance(end, t.Anchor)
        hard = with_part(hard, end, replace(end, kind=r"\Z"))

    def texts(root: t.Node, mode: Mode) -> Language:
        return Language(replace(subject.pattern, root=root), mode=mode, limits=subject.limits)

    def like(text: str) -> Language:
        return Language(text.encode() if subject.pattern.is_bytes else text, limits=subject.limits)

    found = texts(hard, mode)
    if found.is_empty() or found != texts(hard, "fullmatch"):
        return None  # not bound at both ends
    if not found.isdisjoint(like(r"(?s).*\n")):
        return None  # the author thought of line feeds
    more, bare = t.Dot((0, 0)), _without(hard, "^", r"\A", r"\Z")
    for longer in ((more, bare), (bare, more)):
        if texts(t.Sequence((0, 0), longer), "fullmatch") <= found:
            return None  # it may begin or end with anything: a suffix or a prefix is looked for
    text = ((subject.language(mode) - found) & like(r"(?s).+\n")).shortest()
    return text if text is not None and subject.language(mode).accepts(text[:-1]) else None


def _without(root: t.Node, *kinds: str) -> t.Node:
    """The tree without its anchors of some kinds."""
    for node in t.walk(root):
        if isinstance(node, t.Anchor) and node.kind in kinds:
            root = with_part(root, node, t.Sequence(node.span, ()))
    return root


RULE = Rule(
    name="final-newline",
    level="note",
    summary="$ lets a validated text end in a line feed",
    page="""\
`$` holds at the end of the text and also before a line feed that ends it. So
`re.match(r"^[a-z]+$", name)` lets "admin\\n" pass, which is another name, and
another line in a log, a header or a file. `\\Z` holds at the very end only,
and fullmatch needs no sign at the end.

Reported where a text that fails is refused (an exception, `return False`, the
outcome is what a function returns), nothing but the truth of the match is
read, the pattern is bound at both ends, and no part of it could take the line
feed itself. Quiet where the end of the text is plain to see: it was stripped,
or it is a line of a file.
""",
    wrong=Example(
        'import re\n\n\ndef is_seal(text):\n    return re.match(r"[A-Z]{2}[0-9]{6}$", text) is not None\n',
        "takes AB123456 with a line feed behind it",
    ),
    right=Example(
        'import re\n\n\ndef is_seal(text):\n    return re.fullmatch(r"[A-Z]{2}[0-9]{6}", text) is not None\n'
    ),
    check=check,
)
