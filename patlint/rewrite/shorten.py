r"""Shorter patterns that may stand for another, proven.

>>> shorten("(?:0[0-9]|1[0-9]|2[0-3]):[0-5][0-9]")
'(?:[01][0-9]|2[0-3]):[0-5][0-9]'
>>> shorten("x(a|a)y", keeps="groups") is None  # the group's text is kept, its inside may change
False
>>> shorten("[0-9]{4}-[0-9]{2}") is None
True

Candidates come from `search`. None is trusted: each is parsed again, must differ from the original in its
islands only, must have the same groups, must not be deeper nested or have more operators, must not be
slower to match, and

- keeps="groups": each island ends at the same places in the same order (`proof.ends`), so that nothing
  changes at all;
- keeps="spans": that, or the spans of the whole pattern are proven equal;
- keeps="language": that, or the languages in `mode` are proven equal. Then optional parts at the ends may
  go too, where they decide nothing, and unnamed groups with the island in which they stand.

Limits: patterns up to `LONGEST` characters; automata up to `search.ATTEMPTS` islands. A limit that is met gives
no suggestion.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from patlint.limits import DEFAULT_LIMITS, DEFAULT_SAVING, LimitReached, Limits, Saving
from patlint.machine.determinise import Mode
from patlint.machine.program import compile_tree
from patlint.machine.slow_text import Growth, ambiguity_of
from patlint.rewrite.islands import shape, splice
from patlint.rewrite.proof import Keeps as Keeps
from patlint.rewrite.proof import same_language, spans_stay
from patlint.rewrite.search import Change, Search
from patlint.rewrite.worth import worth_a_try
from patlint.syntax import tree as t
from patlint.syntax.parser import PatternError, parse

LONGEST = 300
"""Characters of a pattern for which a shorter one is looked for."""
_SMALL = {"states": 300, "work": 30_000, "turns": 20_000}


@dataclass(frozen=True, slots=True)
class Proposal:
    """`pattern` may stand for the original; `keeps` is what is proven to stay the same."""

    pattern: str | bytes
    keeps: Keeps
    saved: int


def shorten(
    pattern: str | bytes,
    flags: int = 0,
    mode: Mode = "fullmatch",
    keeps: Keeps = "language",
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
) -> str | bytes | None:
    """A shorter pattern for use in `mode` that keeps the language, spans or groups; None where none was
    found.

    Raises PatternError where `re` refuses the pattern.
    """
    found = suggest(parse(pattern, flags, target, limits), mode, keeps, target, limits)
    return None if found is None else found.pattern


def suggest(
    parsed: t.Pattern,
    mode: Mode = "fullmatch",
    keeps: Keeps = "language",
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
    *,
    saving: Saving = DEFAULT_SAVING,
    fences: tuple[int, ...] = (),
) -> Proposal | None:
    """As `shorten`, for a parsed pattern. No change goes over an offset of `fences`: what stands on either
    side was written in different places. What saves less than `saving` is only suggested where it is of lower
    growth (`(?:[a-z] ?)+` for `(?:[a-z]+ ?)+`)."""
    if not saving.characters < len(parsed.text) <= LONGEST or parsed.flags & t.LOCALE:
        return None
    truth = keeps == "language" and mode != "fullmatch"
    if not worth_a_try(parsed, truth):
        return None
    search = Search(parsed, mode, keeps, target, limited(limits), fences)
    least = saving.of(len(parsed.text))
    for changes in search.ways():
        saved = sum(change.saved for change in changes)
        suspicious = any(change.gives_up_runs for change in changes)
        if saved < 1 or (saved < least and not suspicious):
            continue
        found = proven(search, changes, suspicious)
        if found is not None:
            return found
    return None


def limited(limits: Limits) -> Limits:
    """`limits` cut down to what one suggestion may cost."""
    return replace(limits, **{name: min(value, getattr(limits, name)) for name, value in _SMALL.items()})


def spliced(search: Search, changes: list[Change]) -> t.Pattern | None:
    """The pattern with `changes`; None where it is not the original but for its islands."""
    old = search.parsed
    text = splice(search.text, [(change.island.span, change.text) for change in changes])
    try:
        new = parse(search.typed(text), old.flags & ~old.inline, search.target, search.limits)
    except (PatternError, LimitReached):
        return None
    swaps = {id(each.island.nodes[0]): (len(each.island.nodes), each.node) for each in changes}
    if new.flags != old.flags or new.inline != old.inline or shape(new.root) != shape(old.root, swaps):
        return None
    return new


def proven(search: Search, changes: list[Change], suspicious: bool) -> Proposal | None:
    """The pattern with `changes`, if it is proven; where `suspicious`, also that it is quicker to match."""
    old, new = search.parsed, spliced(search, changes)
    if new is None:
        return None
    same_groups = (new.groups, new.names) == (old.groups, old.names)
    keeps: Keeps
    if same_groups and all(change.certain for change in changes):
        keeps = "groups"
    elif same_groups and search.keeps == "spans" and spans_stay(old, new, search.mode, search.limits):
        keeps = "spans"
    elif search.keeps == "language" and same_language(old, new, search.mode, search.limits):
        keeps = "language"
    else:
        return None
    if not new.text or _is_slower(search, new, suspicious):
        return None
    return Proposal(new.text, keeps, len(old.text) - len(new.text))


def _is_slower(search: Search, new: t.Pattern, suspicious: bool) -> bool:
    """Whether matching may take longer; where `suspicious`, unless it is certainly quicker."""
    now = ambiguity_of(compile_tree(new, search.limits), search.mode, search.limits)
    if now.growth is None and now.undecided is None and not suspicious:
        return False
    before = ambiguity_of(compile_tree(search.parsed, search.limits), search.mode, search.limits)
    if now.undecided is not None and (suspicious or before.undecided is None):
        return True
    return _degree(now.growth) + suspicious > _degree(before.growth)


def _degree(growth: Growth | None) -> int:
    return 1 if growth is None else 1_000 if growth == "exponential" else growth
