"""The call that is meant, for findings on patterns that stand elsewhere: a compiled one, or a constant."""

from __future__ import annotations

from patlint.rules.finding import Related
from patlint.rules.subject import Subject
from patlint.source.sites import Use


def used_here(subject: Subject, use: Use | None) -> tuple[Related, ...]:
    """The place of `use`, unless the pattern stands in that very call."""
    if use is None:
        return ()
    whole, call = subject.site.place, use.place
    inside = (call.line, call.column) <= (whole.line, whole.column) and (
        whole.end_line,
        whole.end_column,
    ) <= (
        call.end_line,
        call.end_column,
    )
    return () if inside else (Related(f"used here with {use.function}", place=call),)
