"""equal-siblings: two branches of one alternation, or two patterns of a family, have the same language."""

from __future__ import annotations

from collections.abc import Iterator

from patlint.limits import Limits
from patlint.machine.determinise import language
from patlint.machine.dfa import Dfa, canonical
from patlint.machine.engine_tree import same
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree, one_character
from patlint.rules.finding import Example, Finding, Related, Rule, TextWitness
from patlint.rules.kin import Kin, Verdict
from patlint.rules.subject import Subject
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet
from patlint.syntax.classes import char_set
from patlint.syntax.width import width


def check(subject: Subject) -> Iterator[Finding]:
    text = subject.site.pattern
    for node, earlier, later in equal_branches(subject.pattern, subject.limits):
        a, b = node.branches[earlier], node.branches[later]
        disguised = text[a.span[0] : a.span[1]] != text[b.span[0] : b.span[1]]
        how = "in other words" if disguised else "again"
        yield Finding(
            RULE.name,
            RULE.level,
            b.span,
            f"this branch is branch {earlier + 1} of the same alternation {how}",
            proof="both branches have the same minimal automaton",
            evidence="both branches take exactly the same texts, and the earlier one is tried first",
            way_out="delete it, or write what was meant in its place",
            related=(Related("the branch that is tried first", a.span),),
        )


def check_family(kin: Kin) -> Iterator[tuple[int, Finding]]:
    if kin.family.order == "first":
        for number in range(1, len(kin.members)):
            verdict = kin.verdict(number)
            if verdict is not None and verdict.equal:
                (earlier,) = verdict.takers
                yield number, _family_finding(kin, number, earlier, verdict)
    elif not kin.family.named:
        for number, earlier in kin.twins().items():
            yield number, _family_finding(kin, number, earlier, None)


def _family_finding(kin: Kin, number: int, earlier: int, verdict: Verdict | None) -> Finding:
    site, other = kin.members[number].site, kin.members[earlier].site
    same = site.pattern == other.pattern and site.flags == other.flags
    line = kin.line(earlier, number)
    if site is other:
        message = "this pattern has been tried on the same text before"
    elif verdict is None and same:
        message = f"this pattern stands a second time among these, first in line {line}"
    else:
        message = f"this pattern is that of line {line} {'again' if same else 'in other words'}"
    evidence = "both take exactly the same texts"
    if verdict is not None and not verdict.together:
        evidence += f", and the one of line {line} is tried first"
    what = "the earlier test" if site is other else "the pattern that is tried first"
    related = kin.related(earlier, number, what if verdict else "the same pattern")
    return Finding(
        RULE.name,
        RULE.level,
        (0, len(site.pattern)),
        message,
        mode=kin.mode(number) if verdict else None,
        witness=None if verdict is None or verdict.text is None else TextWitness(verdict.text),
        proof="both patterns have the same minimal automaton"
        + ("" if verdict else ", and match the same spans"),
        evidence=evidence,
        way_out="delete it, or write what was meant in its place",
        related=(related,),
    )


def equal_branches(pattern: t.Pattern, limits: Limits) -> Iterator[tuple[t.Alternation, int, int]]:
    """Each alternation with the place of a branch and of a later one that has the same language."""
    for node in t.walk(pattern.root):
        if isinstance(node, t.Alternation):
            for earlier, later in _pairs(pattern, node, limits):
                yield node, earlier, later


def _pairs(pattern: t.Pattern, node: t.Alternation, limits: Limits) -> Iterator[tuple[int, int]]:
    rows = [fixed_sets(branch, pattern.is_bytes) for branch in node.branches]
    by_row: dict[tuple[CharSet, ...], int] = {}
    found: set[int] = set()
    for index, row in enumerate(rows):
        if row is None:
            continue
        if row in by_row:
            if row:  # two empty branches are one slip of the pen, not two patterns
                yield by_row[row], index
            found.add(index)
        else:
            by_row[row] = index
    others = [i for i, row in enumerate(rows) if row is None]
    if not others:
        return
    # Only branches whose widths could agree with one of the others need an automaton.
    widths = [width(branch) for branch in node.branches]
    wanted = {widths[i] for i in others}
    by_dfa: dict[Dfa, int] = {}
    for index, branch in enumerate(node.branches):
        if index in found or widths[index] not in wanted:
            continue
        twin = next((e for e in range(index) if e not in found and same(node.branches[e], branch)), None)
        if twin is not None:
            yield twin, index
        elif is_plain(branch):
            nfa = Nfa(compile_tree(pattern, limits, root=branch), limits)
            dfa = canonical(language(nfa, "fullmatch"))
            if not any(dfa.accepting):
                continue
            if dfa in by_dfa:
                yield by_dfa[dfa], index
            else:
                by_dfa[dfa] = index


def fixed_sets(node: t.Node, is_bytes: bool) -> tuple[CharSet, ...] | None:
    """The sets of a sequence of one-character nodes, None for anything else."""
    items = node.items if isinstance(node, t.Sequence) else (node,)
    row = []
    for item in items:
        one = one_character(item)
        if one is None:
            return None
        row.append(char_set(one, is_bytes))
    return tuple(row)


def is_plain(node: t.Node) -> bool:
    """Whether the language of a part does not depend on what stands around it."""
    return not any(
        isinstance(part, t.Anchor | t.Look | t.BackReference | t.Conditional | t.Atomic)
        or (isinstance(part, t.Repeat) and part.kind == "possessive")
        for part in t.walk(node)
    )


RULE = Rule(
    name="equal-siblings",
    level="warning",
    summary="two branches, or two of a family, are the same",
    page="""\
An alternation tries its branches in order, so a second branch that takes the
same texts as an earlier one is never of any use. It is either a leftover or
a slip: something else was meant. The two need not look alike: `[0-9][0-9]`
and `[0-9]{2}` are the same, and so are `jpe?g` and `jpg|jpeg` in a group.

The same is said of patterns that work side by side: in a table, in an
if/elif chain, in tests of one text after the other. Where the first match
wins, two are the same if they match the same texts in the mode in which they
are tried. Where they are all applied, or it is not known how they are used,
only a pattern that stands twice with the same flags and the same handler
counts, and none that is asked for by a name of its own.
""",
    wrong=Example(
        'import re\n\nUNIT = re.compile(r"kg|lb|stone|kg")\n',
        "kg stands twice",
    ),
    right=Example('import re\n\nUNIT = re.compile(r"kg|lb|stone")\n'),
    check=check,
    check_family=check_family,
)
