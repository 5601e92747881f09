"""straddling-range: a range such as `A-z` takes in characters between two alphabets."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from patlint.limits import LimitReached
from patlint.rules.finding import Example, Finding, Rule, TextWitness
from patlint.rules.subject import Subject
from patlint.rules.variants import difference_text
from patlint.syntax import tree as t
from patlint.syntax.charset import CharSet
from patlint.syntax.classes import char_set

ALPHABETS = ((48, 57), (65, 90), (97, 122))


def check(subject: Subject) -> Iterator[Finding]:
    pattern = subject.pattern
    for node in t.walk(pattern.root):
        if not isinstance(node, t.Set):
            continue
        for item in node.items:
            if not isinstance(item, t.Range):
                continue
            pieces = _split(item)
            if pieces is None:
                continue
            others = tuple(other for other in node.items if other is not item)
            meant = replace(node, items=(*others, *pieces))
            extra = _difference(char_set(node, pattern.is_bytes), char_set(meant, pattern.is_bytes))
            if not extra:
                continue
            yield _finding(subject, node, item, meant, extra)


def _finding(subject: Subject, node: t.Set, item: t.Range, meant: t.Set, extra: CharSet) -> Finding:
    shown = "".join(map(chr, list(extra)[:8]))
    written = subject.site.pattern[item.span[0] : item.span[1]]
    name = written.decode("latin-1") if isinstance(written, bytes) else written
    verb = "leaves out" if node.negated else "takes in"
    mode = subject.uses[0].mode if subject.uses else "search"
    try:
        text = difference_text(subject, node, meant, mode)
    except LimitReached:
        text = None
    fixed = "".join(f"{chr(low)}-{chr(high)}" for low, high in _alphabet_ranges(item))
    return Finding(
        RULE.name,
        RULE.level,
        item.span,
        f"the range {name} also {verb} {shown}",
        mode=mode,
        witness=None if text is None else TextWitness(text),
        proof=f"{extra.size()} characters lie in the range and in neither alphabet",
        evidence="on this text the outcome would be another without them" if text is not None else "",
        way_out=f"write {fixed} if letters and digits were meant",
    )


def _difference(a: CharSet, b: CharSet) -> CharSet:
    return (a - b) | (b - a)


def _alphabet(code: int) -> int | None:
    return next((i for i, (low, high) in enumerate(ALPHABETS) if low <= code <= high), None)


def _alphabet_ranges(item: t.Range) -> list[tuple[int, int]]:
    return [
        (max(low, item.low), min(high, item.high))
        for low, high in ALPHABETS
        if low <= item.high and item.low <= high
    ]


def _split(item: t.Range) -> tuple[t.Range, ...] | None:
    """The parts of a range that lie in the alphabets where its ends lie in two of them, else None."""
    first, last = _alphabet(item.low), _alphabet(item.high)
    if first is None or last is None or first == last:
        return None
    return tuple(t.Range(item.span, low, high) for low, high in _alphabet_ranges(item))


RULE = Rule(
    name="straddling-range",
    level="warning",
    summary="a range takes in signs between two alphabets",
    page="""\
In the order of code points, `[`, `\\`, `]`, `^`, `_` and the grave accent stand
between Z and a, and `:`, `;`, `<`, `=`, `>`, `?` and `@` between 9 and A. A
range from one alphabet to the next takes them in: `[A-z]` is not "letters".

Quiet where the set has these characters anyway.
""",
    wrong=Example('import re\n\nBERTH = re.compile(r"[A-z][0-9]{2}")\n', "takes _07 for a berth"),
    right=Example('import re\n\nBERTH = re.compile(r"[A-Za-z][0-9]{2}")\n'),
    check=check,
)
