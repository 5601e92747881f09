"""lopsided-anchor: an anchor binds one branch of an alternation, and all of them were most likely meant.

`|` binds less tightly than anything else, so that in `^a|b|c$` the `^` belongs to a alone and the `$` to c
alone. That this was not meant is likely, not certain; certain is only what the text shows that is given with it.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace

from patlint.language import Language
from patlint.machine.engine_tree import same
from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.subject import Subject
from patlint.rules.used_here import used_here
from patlint.source.sites import Mode, Use
from patlint.syntax import tree as t

STARTS = ("^", r"\A")
ENDS = ("$", r"\Z")
_LONGEST = 60
"""Characters of a pattern that is written out in the advice."""


def check(subject: Subject) -> Iterator[Finding]:
    root = _whole(subject.pattern.root)
    if not isinstance(root, t.Alternation):
        return
    for mode, use in _asked(subject):
        sides = lopsided(root, mode)
        if sides is None:
            continue
        first, last = sides
        if not subject.exact:
            return
        meant = replace(subject.pattern, root=_bound(root, first, last))
        other = Language(meant, mode=mode, limits=subject.limits)
        text = (subject.language(mode) - other).shortest()
        if text is None:
            continue
        yield _finding(subject, root, mode, use, sides, text)
        return


def _whole(root: t.Node) -> t.Node:
    """The pattern without groups around all of it."""
    while isinstance(root, t.Group) and not (root.add_flags or root.del_flags):
        root = root.body
    return root


def looks_lopsided(pattern: t.Pattern, modes: Iterable[Mode]) -> bool:
    """Whether a pattern has the form of which this rule speaks, in one of the modes."""
    root = _whole(pattern.root)
    return isinstance(root, t.Alternation) and any(
        lopsided(root, mode) for mode in modes if mode != "fullmatch"
    )


def _asked(subject: Subject) -> list[tuple[Mode, Use | None]]:
    """The modes to judge. Calls that act on every match (sub, split, findall) often trim, at the outer branches."""
    if not subject.uses:
        return [("search", None)]
    telling = [use for use in subject.uses if use.function in ("match", "search") and not use.positioned]
    return list({use.mode: (use.mode, use) for use in reversed(telling)}.values())


def lopsided(node: t.Alternation, mode: Mode) -> tuple[t.Anchor | None, t.Anchor] | None:
    """The anchors that bind the outer branches alone: at the beginning of the first (None in `match`, which
    needs none) and at the end of the last; None where the alternation is not lopsided."""
    starts = [_anchor(branch, 0, STARTS) for branch in node.branches]
    ends = [_anchor(branch, -1, ENDS) for branch in node.branches]
    first, last = starts[0], ends[-1]
    if any(starts[1:]) or any(ends[:-1]) or last is None:
        return None
    if any(isinstance(branch, t.Anchor) or _is_empty(branch) for branch in node.branches):
        return None
    if mode == "match":
        return first, last
    if first is None or len(node.branches) < 3:
        return None
    outer = [_inner(node.branches[0], first, last), _inner(node.branches[-1], first, last)]
    return None if same(*outer) else (first, last)  # the same thing at both ends: trimming


def _is_empty(node: t.Node) -> bool:
    return isinstance(node, t.Sequence) and not node.items


def _anchor(branch: t.Node, index: int, kinds: tuple[str, ...]) -> t.Anchor | None:
    item = branch.items[index] if isinstance(branch, t.Sequence) and branch.items else branch
    return item if isinstance(item, t.Anchor) and item.kind in kinds else None


def _inner(branch: t.Node, first: t.Anchor | None, last: t.Anchor) -> t.Node:
    """A branch without the anchors."""
    if not isinstance(branch, t.Sequence):
        return branch
    items = tuple(item for item in branch.items if item is not first and item is not last)
    return items[0] if len(items) == 1 else replace(branch, items=items)


def _bound(node: t.Alternation, first: t.Anchor | None, last: t.Anchor) -> t.Node:
    """The alternation as a group with the anchors around it."""
    inner = replace(node, branches=tuple(_inner(branch, first, last) for branch in node.branches))
    group = t.Group(node.span, inner)
    return t.Sequence(node.span, (group, last) if first is None else (first, group, last))


def _finding(
    subject: Subject,
    node: t.Alternation,
    mode: Mode,
    use: Use | None,
    sides: tuple[t.Anchor | None, t.Anchor],
    text: str | bytes,
) -> Finding:
    first, last = sides
    begin, end = (_written(subject, side.span) if side is not None else "" for side in sides)
    message = f"{end} binds only the last branch of the alternation"
    if first is not None:
        message = f"{begin} binds only the first branch of the alternation, {end} only the last"
    low, high = node.span
    branches = _written(subject, (first.span[1] if first else low, last.span[0]))
    if len(branches) > _LONGEST or subject.pattern.flags & t.VERBOSE:
        branches = "..."
    main, *others = [side.span for side in sides if side is not None]
    shown = "" if use is None else f" {use.function}"
    return Finding(
        RULE.name,
        RULE.level,
        main,
        message,
        mode=mode,
        witness=TextWitness(text),
        evidence=f"on this text{shown or ' search'} succeeds, and would not with all branches bound",
        way_out=f"write {begin}(?:{branches}){end} if all are meant, or else a group around each branch with "
        "its anchor",
        marks=tuple(others),
        related=used_here(subject, use),
    )


def _written(subject: Subject, span: t.Span) -> str:
    text = subject.site.pattern[slice(*span)]
    return text.decode("latin-1") if isinstance(text, bytes) else text


RULE = Rule(
    name="lopsided-anchor",
    level="warning",
    summary="an anchor binds one branch where all were meant",
    page="""\
A bar binds less tightly than anything else: in `^in|out|hold$` only `in` has
to stand at the beginning and only `hold` at the end; `search` finds `out`
anywhere. With `match`, which begins at the beginning, `in|out$` lets
everything pass that begins with `in`.

Reported for `search` where there are three branches or more, of which the
first has an anchor at its beginning, the last one at its end, and none has
another; for `match` where only the last branch has an anchor at its end. Quiet
in sub, split and findall, where such patterns trim, and where the outer
branches are the same.

Where each anchor is meant for its branch alone, a group says so:
`(?:^in)|out|(?:hold$)`.
""",
    wrong=Example(
        'import re\n\n\ndef is_state(text):\n    return re.search(r"^in|out|hold$", text) is not None\n',
        "takes shout and inland",
    ),
    right=Example(
        'import re\n\n\ndef is_state(text):\n    return re.fullmatch(r"in|out|hold", text) is not None\n'
    ),
    check=check,
)
