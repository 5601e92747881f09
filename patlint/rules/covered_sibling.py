"""covered-sibling: everything that a pattern matches is taken by patterns that are tried before it."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.language import Language
from patlint.limits import LimitReached
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.rules.equal_siblings import equal_branches, is_plain
from patlint.rules.finding import Example, Finding, Related, Rule, TextWitness
from patlint.rules.joined import Row, joined_rows
from patlint.rules.kin import Kin, Verdict
from patlint.rules.subject import Subject
from patlint.rules.unreachable_part import dead_parts, dead_rows, only_mode
from patlint.syntax import tree as t

MOST_NAMED = 6
"""Earlier members that are named in one finding."""


def check_family(kin: Kin) -> Iterator[tuple[int, Finding]]:
    if kin.family.order != "first":
        return
    caught: dict[int, int] = {}
    for number in range(1, len(kin.members)):
        verdict = kin.verdict(number)
        if verdict is None or verdict.equal:
            continue
        if verdict.catch_all:
            (taker,) = verdict.takers
            caught[taker] = caught.get(taker, 0) + 1
            if caught[taker] > 1:
                continue  # one cause, one finding
        yield number, _finding(kin, number, verdict)


def _finding(kin: Kin, number: int, verdict: Verdict) -> Finding:
    site = kin.members[number].site
    alone = len(verdict.takers) == 1
    mode = kin.mode(number)
    shown = list(verdict.takers.items())[:MOST_NAMED]
    if verdict.catch_all:
        message = "an earlier pattern of the family takes every text, so this one never gets its turn"
    elif verdict.together:
        message = "everything that this pattern matches is matched by another one that is asked with it"
    elif alone:
        message = "everything that this pattern matches is taken by an earlier one of its family"
    else:
        message = (
            f"everything that this pattern matches is taken by {len(verdict.takers)} earlier ones together"
        )
    if alone:
        evidence = (
            f"this text is taken by the pattern of line {kin.line(shown[0][0], number)}, like all others"
        )
    else:
        evidence = "; ".join(
            f"{text!a} is taken by the one of line {kin.line(each, number)}" for each, text in shown
        )
        evidence += "; …" if len(shown) < len(verdict.takers) else ""
    return Finding(
        RULE.name,
        "note" if verdict.together else RULE.level,
        (0, len(site.pattern)),
        message,
        mode=mode,
        witness=None if verdict.text is None else TextWitness(verdict.text),
        proof=f"its texts lie within those of the {'pattern' if alone else 'patterns'} before it, in every trial",
        evidence=evidence,
        way_out="delete it, or move it before the more general one",
        related=tuple(
            kin.related(each, number, f"takes {text!a}" if not alone else "takes everything that it matches")
            for each, text in shown
        ),
    )


def check(subject: Subject) -> Iterator[Finding]:
    """The rows of alternations that were joined from parts."""
    if len({piece.whole for piece in subject.site.pieces}) < 3:
        return
    rows = dead_rows(subject, dead_parts(subject))
    if not rows:
        return
    equal = {node.branches[later].span for node, _, later in equal_branches(subject.pattern, subject.limits)}
    spans_of = {node.span: _row_spans(rows) for node, rows in joined_rows(subject)}
    for node, row, _ in rows:
        spans = spans_of[node.span]
        if all(branch.span in equal for branch in node.branches[row.first : row.last + 1]):
            continue
        takers = _takers(subject, node, row)
        yield Finding(
            RULE.name,
            RULE.level,
            row.span,
            "earlier rows of this alternation take everything that this one matches",
            mode=only_mode(subject),
            proof="no text has a match whose way leads through this row",
            evidence="; ".join(f"{text!a} is taken by branch {each + 1}" for each, text in takers.items())
            or "whatever the text, another row succeeds first or this one fails",
            way_out="delete it, or move it before the rows that always win (the longer one first)",
            related=tuple(Related(f"takes {text!a}", spans[each]) for each, text in takers.items()),
        )


def _row_spans(rows: list[Row]) -> dict[int, t.Span]:
    """For each branch of an alternation the span of its row."""
    return {branch: row.span for row in rows for branch in range(row.first, row.last + 1)}


def _takers(subject: Subject, node: t.Alternation, row: Row) -> dict[int, str | bytes]:
    """Earlier branches that begin some shortest text of the row, with that text; none where that is not plain."""
    found: dict[int, str | bytes] = {}
    for branch in node.branches[row.first : row.last + 1]:
        if not is_plain(branch):
            continue
        try:
            text = _language(subject, branch, "fullmatch").shortest()
            for number in range(row.first):
                earlier = node.branches[number]
                if (
                    text is not None
                    and is_plain(earlier)
                    and _language(subject, earlier, "match").accepts(text)
                ):
                    found.setdefault(number, text)
                    break
        except LimitReached:
            continue
    return found


def _language(subject: Subject, node: t.Node, mode: str) -> Language:
    nfa = Nfa(compile_tree(subject.pattern, subject.limits, root=node), subject.limits)
    return Language.of_nfa(nfa, mode)  # type: ignore[arg-type]


RULE = Rule(
    name="covered-sibling",
    level="warning",
    summary="earlier patterns take all that this one matches",
    page="""\
Where patterns are tried in order and the first that matches wins (a table in
a loop that is left by return or break, an if/elif chain on one text, `next`,
an alternation joined from parts), a pattern behind a more general one never
gets its turn. It may take several earlier ones together to cover it.

The mode decides: with match, `[a-z]+` takes every text that `in\\b` matches;
with fullmatch it does not take "in 5". Only what is proven is said: the
texts of the pattern lie within those of the patterns before it. Where a match
may still be declined (a `continue`, one more condition) no pattern takes
anything. Under `any`, where order does not matter, it is a note.
""",
    wrong=Example(
        "import re\n\n"
        '_KINDS = [\n    ("word", re.compile(r"[a-z]+")),\n    ("keyword", re.compile(r"load|unload")),\n]\n\n\n'
        "def kind(text):\n    for name, pattern in _KINDS:\n        if pattern.match(text):\n"
        "            return name\n    return None\n",
        "every keyword is a word, and words come first",
    ),
    right=Example(
        "import re\n\n"
        '_KINDS = [\n    ("keyword", re.compile(r"load|unload")),\n    ("word", re.compile(r"[a-z]+")),\n]\n\n\n'
        "def kind(text):\n    for name, pattern in _KINDS:\n        if pattern.match(text):\n"
        "            return name\n    return None\n"
    ),
    check=check,
    check_family=check_family,
)
