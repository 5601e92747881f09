"""Two patterns on many texts: how their languages lie to each other, and whether their spans are equal.

Respects (the `kind` of a mismatch): pair (the relation of two languages, on texts and on its own witnesses);
alike (patterns whose spans are claimed equal).
"""

from __future__ import annotations

from typing import Any

from patlint.limits import LimitReached
from patlint.rewrite.proof import same_spans
from tests.oracle.compare import FAULT, LIMITS, MODES, Mismatch, Subject, Tally, finishes
from tests.oracle.worlds import Text, World


def compare_pair(a: Subject, b: Subject, world: World, tally: Tally) -> list[Mismatch]:
    """The relation of two languages in each mode, on the texts of the world and on its own witnesses.

    Needs `compare_languages` of both on the same world first.
    """
    out: list[Mismatch] = []
    for mode in MODES:
        if mode not in a.languages or mode not in b.languages or not (a.exact and b.exact):
            continue
        try:
            related = a.languages[mode].relation(b.languages[mode])
        except LimitReached as reached:
            tally.limits[reached.limit] += 1
            continue
        word = related.word
        tally.relations[word] += 1
        tally.comparisons["pair"] += len(world)
        ask_a, ask_b = getattr(a.right, mode), getattr(b.right, mode)

        for text, in_a, in_b in zip(world.texts, a.truths[mode], b.truths[mode]):  # noqa: B905
            if in_a is FAULT or in_b is FAULT:
                continue
            if in_a and not in_b:
                wrong = word in ("equal", "within")
            elif in_b and not in_a:
                wrong = word in ("equal", "covers")
            else:
                wrong = bool(in_a and in_b) and word == "disjoint"
            if wrong:
                out.append(_pair(a, b, mode, text, in_a, in_b, word))
                break
        witnesses = (
            (related.only_first, True, False),
            (related.only_second, False, True),
            (related.both, True, True),
        )
        for text, wanted_a, wanted_b in witnesses:
            if text is None or len(text) > 16 or not (finishes(a, text) and finishes(b, text)):
                continue
            tally.comparisons["witness"] += 1
            try:
                in_a, in_b = ask_a(text) is not None, ask_b(text) is not None
            except SystemError:
                continue
            if (in_a, in_b) != (wanted_a, wanted_b):
                out.append(_pair(a, b, mode, text, in_a, in_b, f"witness of {word}"))
    return out


def _pair(a: Subject, b: Subject, mode: str, text: Text, in_a: object, in_b: object, word: str) -> Mismatch:
    said = (mode, bool(in_a), bool(in_b))
    return Mismatch("pair", a.pattern, a.flags, text, said, (mode, word), b.pattern)


def compare_alike(a: Subject, b: Subject, texts: list[Text], tally: Tally) -> list[Mismatch]:
    """Where the span automata of two patterns agree in every context: the outcomes of all functions do."""
    if not a.modes == b.modes == MODES or not same_spans(a.tree, b.tree, True, LIMITS):
        return []
    tally.relations["same spans"] += 1
    out: list[Mismatch] = []
    dash = b"-" if isinstance(a.pattern, bytes) else "-"
    for text in texts:
        try:
            rows = []
            for right in (a.right, b.right):
                found = [getattr(right, mode)(text) for mode in MODES]
                row: list[Any] = [match and match.span() for match in (found[0], found[2])]
                row.append([match.span() for match in right.finditer(text)])
                row.append(right.sub(dash, text))
                if not (a.right.groups or b.right.groups):
                    row.append(right.split(text))
                rows.append(row)
        except SystemError:
            continue
        tally.comparisons["alike"] += 1
        if rows[0] != rows[1]:
            out.append(Mismatch("alike", a.pattern, a.flags, text, rows, "equal spans", b.pattern))
            break
    return out
