"""unreachable-part: a part of the pattern that no match ever takes."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import pairwise

from patlint.language import Language
from patlint.limits import LimitReached
from patlint.machine.agreement import same_spans
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.priority import shown_used
from patlint.machine.program import compile_tree
from patlint.rules.equal_siblings import equal_branches, is_plain
from patlint.rules.finding import Example, Finding, Rule
from patlint.rules.joined import Row, joined_rows
from patlint.rules.never import is_spelled_never
from patlint.rules.subject import Subject
from patlint.source.sites import SCANNING, Mode
from patlint.syntax import tree as t
from patlint.syntax.width import width


@dataclass(frozen=True, slots=True)
class Part:
    """A branch, an optional part or a repeat."""

    node: t.Node
    kind: str
    cut: tuple[int, int]
    """What is to be deleted from the pattern."""


MOST_MOVED = 8
"""Dead parts up to which each dead branch is tried in front: the pattern is built anew for each."""


def check(subject: Subject) -> Iterator[Finding]:
    dead = dead_parts(subject)
    if not dead:
        return
    told = [node.branches[later].span for node, _, later in equal_branches(subject.pattern, subject.limits)]
    told += [span for _, _, span in dead_rows(subject, dead)]
    for part in dead:
        start, end = part.node.span
        if any(low <= start and end <= high for low, high in told):
            continue
        told.append(part.node.span)
        yield Finding(
            RULE.name,
            RULE.level if is_surprise(subject, part, len(dead) <= MOST_MOVED) else "note",
            part.node.span,
            f"no match ever takes this {part.kind}",
            mode=only_mode(subject),
            proof="no text has a match whose way leads through it; without it language and spans are the same",
            evidence="whatever the text, another way through the pattern succeeds first or this one fails",
            way_out=_way_out(part),
        )


def dead_parts(subject: Subject) -> list[Part]:
    """The parts that no match takes, outer ones before those in them. Raises LimitReached."""
    parts = list(_parts(subject.pattern.root))
    if not parts or subject.written.inexact:
        return []
    if any(use.positioned and use.mode == "fullmatch" for use in subject.uses):
        return []  # begun in the middle of a text, whose part before is not known
    shown = _shown(subject, parts)
    parts = [part for part in parts if not _is_read(part, shown)]
    if not parts:
        return []
    used = _used_spans(subject)
    return [part for part in parts if not _is_read(part, used) and not is_spelled_never(part.node)]


def is_surprise(subject: Subject, part: Part, moved: bool = True) -> bool:
    """Whether the author of a dead part must expect something else of the outcome than comes.

    A branch of which the earlier ones take only pieces, so that it would count if it were the first; a group that is
    never set, or that takes what the part behind it was written for; a lazy repeat that is left at once. What else
    is dead could be left out, and nobody is misled (`\\w*\\d*:`), nor is anybody where only the truth of a match is
    asked. Without `moved` a branch is not tried in front, and taken to count there.
    """
    uses, seen = subject.uses, subject.site.uses_seen and bool(subject.uses)
    if seen and all(use.looks_at == "truth" and use.function not in SCANNING for use in uses):
        return False
    node = part.node
    groups_read = not seen or any(use.looks_at in ("groups", "unknown") for use in uses)
    if part.kind == "branch":
        if _is_covered(subject, node):
            return False
        return (
            not moved
            or (groups_read and any(map(_captures, t.walk(node))))
            or _counts_in_front(subject, node)
        )
    if isinstance(node, t.Repeat) and node.kind == "lazy":
        return True
    if not groups_read:
        return False
    return any(_captures(inner) for inner in t.walk(node)) or _follows_group(subject.pattern.root, node)


def _is_covered(subject: Subject, branch: t.Node) -> bool:
    """Whether the branches before `branch` together take every text that it takes, as a whole."""
    for node in t.walk(subject.pattern.root):
        if isinstance(node, t.Alternation) and any(each is branch for each in node.branches):
            before = node.branches[: next(i for i, each in enumerate(node.branches) if each is branch)]
            earlier = tuple(filter(is_plain, before))
            if not earlier or not is_plain(branch):
                return False
            tree = earlier[0] if len(earlier) == 1 else t.Alternation(node.span, earlier)
            own = Language(replace(subject.pattern, root=branch), limits=subject.limits)
            text = own.shortest()
            if text is not None:  # a text tells most apart before the automaton of all the others is built
                others_run = Matcher(compile_tree(subject.pattern, subject.limits, root=tree))
                if others_run.run(text, "fullmatch").span is None:
                    return False
            others = Language(replace(subject.pattern, root=tree), limits=subject.limits)
            return own.exact and others.exact and own <= others
    return False


def _counts_in_front(subject: Subject, branch: t.Node) -> bool:
    """Whether other spans would match if `branch` were the first of its alternation; True where that is open."""
    root = _with_in_front(subject.pattern.root, branch)
    if root == subject.pattern.root or not subject.exact:
        return True
    try:
        moved = Nfa(compile_tree(subject.pattern, subject.limits, root=root), subject.limits)
        return bool(moved.inexact) or not same_spans(subject.nfa, moved, subject.limits, not_empty=True)
    except LimitReached:
        return True


def _with_in_front(node: t.Node, branch: t.Node) -> t.Node:
    """The tree in which `branch` is the first of its alternation; the same one where it is not found."""
    match node:
        case t.Alternation(branches=branches):
            if any(each is branch for each in branches):
                return replace(node, branches=(branch, *(each for each in branches if each is not branch)))
            return replace(node, branches=tuple(_with_in_front(each, branch) for each in branches))
        case t.Sequence(items=items):
            return replace(node, items=tuple(_with_in_front(each, branch) for each in items))
        case t.Group(body=body) | t.Repeat(body=body):
            return replace(node, body=_with_in_front(body, branch))
        case _:
            return node


def _captures(node: t.Node) -> bool:
    return isinstance(node, t.Group) and node.index is not None


def _follows_group(root: t.Node, part: t.Node) -> bool:
    """Whether `part` stands directly behind a group that captures."""
    for node in t.walk(root):
        if isinstance(node, t.Sequence):
            for before, after in pairwise(node.items):
                inner = before.body if isinstance(before, t.Repeat) else before
                if _captures(inner) and _begins_with(after, part):
                    return True
    return False


def _begins_with(node: t.Node, part: t.Node) -> bool:
    while node is not part:
        match node:
            case t.Sequence(items=(first, *_)):
                node = first
            case t.Group() | t.Repeat():
                node = node.body
            case _:
                return False
    return True


def dead_rows(subject: Subject, dead: list[Part]) -> list[tuple[t.Alternation, Row, t.Span]]:
    """The rows of joined alternations of which every branch is among the `dead` parts, with their whole spans."""
    if not any(part.kind == "branch" for part in dead):
        return []
    spans = {part.node.span for part in dead}
    found = []
    for node, rows in joined_rows(subject):
        for row in rows:
            branches = node.branches[row.first : row.last + 1]
            if all(branch.span in spans for branch in branches):
                found.append((node, row, (branches[0].span[0], branches[-1].span[1])))
    return found


def only_mode(subject: Subject) -> Mode | None:
    seen = subject.site.uses_seen and subject.uses
    modes: set[Mode] = {use.mode for use in subject.uses} if seen else {mode for mode, _ in _asked(subject)}
    return modes.pop() if len(modes) == 1 else None


def _is_read(part: Part, used: set[t.Span]) -> bool:
    start, end = part.node.span
    return any(low >= start and high <= end for low, high in used)


def _way_out(part: Part) -> str:
    if part.kind == "branch":
        return "delete it, or move it before the branch that always wins (the longer alternative first)"
    return "delete it, or say what has to follow it"


def _asked(subject: Subject) -> set[tuple[Mode, bool]]:
    """The modes in which the pattern may be used, and whether it goes on after an empty match."""
    site = subject.site
    asked: set[tuple[Mode, bool]] = set()
    for use in site.uses:
        mode: Mode = "search" if use.positioned and use.mode == "match" else use.mode
        asked.add((mode, use.function in SCANNING))
    if not site.uses_seen or not asked:
        asked |= {("search", True), ("fullmatch", False)}
    return asked


def _spans_of(subject: Subject, positions: set[int]) -> set[t.Span]:
    nfa = subject.written
    return {nfa.program.spans[nfa.pc_of[position]] for position in positions}


def _shown(subject: Subject, parts: list[Part]) -> set[t.Span]:
    """The spans of some characters that matches read: a quick look that mostly settles the question."""
    nfa = subject.written
    places = sorted((nfa.program.spans[pc], position) for pc, position in nfa.first.items())
    starts = [span for span, _ in places]
    wanted = []
    for part in parts:
        # The first position of the part; a longer span that begins there is a repeat around it.
        index = bisect_left(starts, part.node.span[0], key=lambda span: span[0])
        if index < len(places):
            wanted.append(places[index][1])
    # What match takes from a text's start search takes too.
    mode = "fullmatch" if all(mode == "fullmatch" for mode, _ in _asked(subject)) else "match"
    return _spans_of(subject, shown_used(nfa, mode, wanted))


def _used_spans(subject: Subject) -> set[t.Span]:
    """The spans of the characters that some winning match reads, over all uses that may be."""
    return _spans_of(
        subject, {q for mode, not_empty in _asked(subject) for q in subject.used(mode, not_empty)}
    )


def _parts(node: t.Node) -> Iterator[Part]:
    """Branches, optional parts and repeats that cannot be passed without reading, the outer ones first."""
    match node:
        case t.Alternation():
            for index, branch in enumerate(node.branches):
                if width(branch)[0] > 0 and _shows_reading(branch):
                    start, end = branch.span
                    yield Part(branch, "branch", (start - 1, end) if index else (start, end + 1))
                yield from _parts(branch)
        case t.Repeat():
            # Leaving out a possessive repeat would change what follows: it is left only where its body fails.
            can_go = node.minimum == 0 and node.maximum != 0 and node.kind != "possessive"
            if can_go and width(node.body)[0] > 0 and _shows_reading(node):
                kind = "optional part" if node.maximum == 1 else "repeat"
                yield Part(node, kind, node.span)
            if node.kind != "possessive":
                yield from _parts(node.body)
        case t.Look() | t.Atomic():
            return  # a look-around reads no part of the match; an atomic group is one position as a whole
        case _:
            for child in t.children(node):
                yield from _parts(child)


def _shows_reading(node: t.Node) -> bool:
    """Whether every way through the part reads a character of its own (not one of a look-around)."""
    return not any(isinstance(part, t.Look | t.BackReference | t.Conditional) for part in t.walk(node))


RULE = Rule(
    name="unreachable-part",
    level="warning",
    summary="a part of the pattern that no match takes",
    page="""\
The engine tries alternatives in order and stops at the first way that
succeeds. A branch behind one that always succeeds first is dead: in
`in|into` search and match never get to `into`. A lazy repeat at the end of
a pattern (`x.*?`) never takes anything, since nothing asks it to go on.

The verdict depends on the use: fullmatch does take the longer alternative.
Where not all uses of a compiled pattern are seen, a part is reported only
if none of the functions of re can take it. A part that is used but could be
left out (`[a-za]`) is not reported here.

A note where nobody is misled: only the truth of a match is asked, or the part
could simply be left out (`\\w*\\d*:`), or a branch would change nothing if it
were the first. A warning where the outcome is not what the author must
expect: a branch of which an earlier one takes a piece, a group that takes
what the part behind it was written for (`(.*)\\r?\\n`).
""",
    wrong=Example(
        'import re\n\n\ndef terminal(text):\n    return re.match(r"east|eastern", text).group()\n',
        "east always wins before eastern is tried",
    ),
    right=Example('import re\n\n\ndef terminal(text):\n    return re.match(r"eastern|east", text).group()\n'),
    check=check,
)
