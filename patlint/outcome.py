"""One file's bytes to its outcome: findings at their levels, what was waived, and what stayed open.

`lint_bytes` reads the file, asks every enabled rule about every site, gives each finding the level that the
configuration wants, and takes out what a waiver waives. A waiver that waives nothing becomes a `stale-waiver`
finding, but only where that is certain: all of its rules were on and no limit cut a question short beside it.

An error inside patlint itself is held to the one pattern that caused it and told in `problems`.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Final

from patlint.config import LevelName, Settings
from patlint.nearest import nearest
from patlint.placed import PlacedFinding, decode, encode, gathered, place_finding
from patlint.rules.finding import Level

if TYPE_CHECKING:
    from patlint.source.sites import Family, Module, Place, Site, Waiver

STALE: Final = "stale-waiver"


@dataclass(frozen=True, slots=True)
class Remark:
    """Something about one place that is no finding: unresolved, inexact or undecided, and why."""

    line: int
    column: int
    reason: str


@dataclass(frozen=True, slots=True)
class Outcome:
    """What linting one file gave.

    `problems` are whole lines for standard error; they make the run exit with 2.
    `linted` is False where the file could not be read or parsed.
    """

    path: str
    findings: tuple[PlacedFinding, ...] = ()
    patterns: int = 0
    waived: int = 0
    unresolved: tuple[Remark, ...] = ()
    inexact: tuple[Remark, ...] = ()
    undecided: tuple[Remark, ...] = ()
    problems: tuple[str, ...] = ()
    linted: bool = True
    relied_on: tuple[tuple[str, str], ...] = ()
    """Other files that the outcome depends on, and their state (`patlint.source.disk`)."""


@dataclass(slots=True)
class _Tally:
    """One file in the making."""

    placed: list[tuple[PlacedFinding, Site]] = field(default_factory=list)
    of_families: list[tuple[PlacedFinding, Site]] = field(default_factory=list)
    inexact: list[Remark] = field(default_factory=list)
    undecided: list[Remark] = field(default_factory=list)
    undecided_lines: set[int] = field(default_factory=set)
    problems: list[str] = field(default_factory=list)


def lint_bytes(data: bytes, path: str, settings: Settings) -> Outcome:
    """The outcome of a file with content `data`, named `path`. Raises nothing but KeyboardInterrupt."""
    from patlint.source import SourceError, read_module  # libcst is slow to import
    from patlint.source.disk import Files

    try:
        module = read_module(data, path, settings.sinks, Files(settings.root))
    except SourceError as error:
        return failed(path, error.message, error.line)
    except (RecursionError, MemoryError):
        return failed(path, "nested too deeply to be read")
    except Exception as error:
        return failed(path, internal(error))
    return lint_module(module, settings)


def lint_module(module: Module, settings: Settings) -> Outcome:
    """The outcome of a file that has been read."""
    enabled, levels = settings.for_path(module.path)
    tally = _Tally()
    shared = {id(member.site) for family in module.families for member in family.members}
    subjects: dict[int, Any] = {}
    for site in module.sites:
        _check(site, settings, enabled, levels, tally, subjects if id(site) in shared else None)
    for family in module.families:
        _check_family(family, settings, enabled, levels, tally, subjects)
    kept, waived, used = _waive(_settled(tally, module), module.waivers)
    stale, stale_waived = _stale_waivers(module, settings, enabled, levels, used, tally.undecided_lines)
    return Outcome(
        path=module.path,
        findings=tuple(sorted(gathered(kept) + stale, key=lambda each: each.sort_key)),
        patterns=len(module.sites),
        waived=waived + stale_waived,
        unresolved=tuple(
            Remark(each.place.line, each.place.column, f"{each.function}: {each.reason}")
            for each in module.unresolved
        ),
        inexact=tuple(tally.inexact),
        undecided=tuple(tally.undecided),
        problems=tuple(tally.problems),
        relied_on=module.relied_on,
    )


def _settled(tally: _Tally, module: Module) -> list[tuple[PlacedFinding, Site]]:
    """All findings; those of families once for each pattern and rule, and without what they make idle about it."""
    from patlint.rules.registry import SILENCES

    quiet: dict[int, frozenset[str]] = {}
    told: dict[tuple[int, str], tuple[PlacedFinding, Site]] = {}
    for finding, site in tally.of_families:
        told.setdefault((id(site), finding.rule), (finding, site))
        quiet[id(site)] = quiet.get(id(site), frozenset()) | SILENCES.get(finding.rule, frozenset())
    single = [(each, site) for each, site in tally.placed if each.rule not in quiet.get(id(site), ())]
    return [*_agreed(single, module), *told.values()]


def _agreed(placed: list[tuple[PlacedFinding, Site]], module: Module) -> list[tuple[PlacedFinding, Site]]:
    """The findings without those on a text that others share: each is told once, and a part is called dead only
    where it is dead at every site that reads the text."""
    readers: dict[Place, set[int]] = {}
    for site in module.sites:
        for piece in site.pieces:
            readers.setdefault(piece.whole, set()).add(id(site))
    agreeing: dict[tuple[str, int, int], set[int]] = {}
    for finding, site in placed:
        agreeing.setdefault((finding.rule, finding.line, finding.column), set()).add(id(site))
    told: set[tuple[str, int, int, int, int]] = set()
    kept = []
    for finding, site in placed:
        spot = (finding.rule, finding.line, finding.column)
        here = (finding.line, finding.column)
        shared: set[int] = set()
        for piece in site.pieces:
            whole = piece.whole
            if (whole.line, whole.column) <= here < (whole.end_line, whole.end_column):
                shared |= readers[whole]
        if len(shared) > 1:
            if finding.rule in ("unreachable-part", "covered-sibling") and not shared <= agreeing[spot]:
                continue
            once = (*spot, finding.end_line, finding.end_column)
            if once in told:
                continue
            told.add(once)
        kept.append((finding, site))
    return kept


def failed(path: str, message: str, line: int | None = None) -> Outcome:
    """The outcome of a file that could not be read or parsed."""
    where = f"{path}:{line}" if line else path
    return Outcome(path, problems=(f"{where}: {message}",), linted=False)


def internal(error: BaseException) -> str:
    """One line about an error of patlint's own: what and where in the code."""
    trace = error.__traceback__
    while trace is not None and trace.tb_next is not None:
        trace = trace.tb_next
    where = ""
    if trace is not None:
        code = trace.tb_frame.f_code
        where = f" at {code.co_filename.replace(chr(92), '/').rpartition('/')[2]}:{trace.tb_lineno}"
    said = " ".join(str(error).split())
    return f"patlint itself failed here ({type(error).__name__}{where}{': ' + said if said else ''})"


def flag_names(flags: int, explicit: int) -> tuple[str, ...]:
    """The names of `flags`; UNICODE, which every text pattern has, only if `explicit` holds it."""
    from patlint.syntax.tree import FLAG_NAMES, UNICODE

    shown = flags & ~UNICODE | explicit & UNICODE
    return tuple(name for bit, name in FLAG_NAMES.items() if shown & bit)


def site_flag_names(site: Site, target: tuple[int, int]) -> tuple[str, ...]:
    """The names of the flags that `site`'s pattern has under `target`, inline ones included."""
    from patlint.limits import LimitReached
    from patlint.syntax.parser import PatternError, parse

    try:
        parsed = parse(site.pattern, site.flags, target)
    except (PatternError, LimitReached):
        return flag_names(site.flags, site.flags)
    return flag_names(parsed.flags, site.flags | parsed.inline)


def _check(
    site: Site,
    settings: Settings,
    enabled: frozenset[str],
    levels: dict[str, LevelName],
    tally: _Tally,
    subjects: dict[int, Any] | None,
) -> None:
    """`subjects` keeps what `_check_family` will ask again; None where the site has no siblings."""
    from patlint.rules import check_site

    line, column = site.place.line, site.place.column
    try:
        checked = check_site(site, settings.target, settings.limits, enabled, subjects, settings.saving)
        flags = site_flag_names(site, settings.target) if checked.findings else ()
        for finding in checked.findings:
            level = _level(finding.rule, finding.level, levels)
            tally.placed.append((place_finding(finding, site, level, flags), site))
    except Exception as error:
        tally.problems.append(f"{site.path}:{line}:{column}: {internal(error)}")
        tally.undecided_lines |= _lines(site)
        return
    if checked.inexact:
        tally.inexact.append(Remark(line, column, "; ".join(checked.inexact)))
    if checked.undecided:
        tally.undecided.append(Remark(line, column, "; ".join(checked.undecided)))
        tally.undecided_lines |= _lines(site)


def _check_family(
    family: Family,
    settings: Settings,
    enabled: frozenset[str],
    levels: dict[str, LevelName],
    tally: _Tally,
    subjects: dict[int, Any],
) -> None:
    from patlint.rules import check_family

    try:
        checked = check_family(family, settings.target, settings.limits, enabled, subjects)
        for member, finding in checked.findings:
            site = member.site
            level = _level(finding.rule, finding.level, levels)
            flags = site_flag_names(site, settings.target)
            tally.of_families.append((place_finding(finding, site, level, flags), site))
    except Exception as error:
        place = family.members[0].site.place
        tally.problems.append(f"{family.members[0].site.path}:{place.line}:{place.column}: {internal(error)}")
        for member in family.members:
            tally.undecided_lines |= _lines(member.site)
        return
    for member, limit in checked.undecided:
        _leave_open(member.site, limit, tally)


def _leave_open(site: Site, limit: str, tally: _Tally) -> None:
    """A question about `site` was cut short, and perhaps not the first one."""
    line, column = site.place.line, site.place.column
    tally.undecided_lines |= _lines(site)
    for index, remark in enumerate(tally.undecided):
        if (remark.line, remark.column) == (line, column):
            if limit not in remark.reason.split("; "):
                tally.undecided[index] = Remark(line, column, f"{remark.reason}; {limit}")
            return
    tally.undecided.append(Remark(line, column, limit))


def _level(rule: str, own: Level, levels: dict[str, LevelName]) -> Level:
    given = levels.get(rule)
    return own if given is None or given == "off" else given


def _lines(site: Site) -> set[int]:
    """The lines at which a waiver of this site's findings may aim."""
    return {site.statement, *range(site.place.line, site.place.end_line + 1)}


def _waive(
    placed: Iterable[tuple[PlacedFinding, Site]], waivers: tuple[Waiver, ...]
) -> tuple[list[tuple[PlacedFinding, Site]], int, set[tuple[int, str]]]:
    """The findings that stay, the number of those that do not, the (waiver, rule) pairs that were of use."""
    kept: list[tuple[PlacedFinding, Site]] = []
    used: set[tuple[int, str]] = set()
    waived = 0
    for finding, site in placed:
        lines = _lines(site) | {finding.line}
        hits = {
            (index, finding.rule)
            for index, waiver in enumerate(waivers)
            if finding.rule in waiver.rules and not lines.isdisjoint(waiver.target_lines)
        }
        used |= hits
        if hits:
            waived += 1
        else:
            kept.append((finding, site))
    return kept, waived, used


def _stale_waivers(
    module: Module,
    settings: Settings,
    enabled: frozenset[str],
    levels: dict[str, LevelName],
    used: set[tuple[int, str]],
    undecided: set[int],
) -> tuple[list[PlacedFinding], int]:
    if STALE not in enabled:
        return [], 0
    out: list[PlacedFinding] = []
    waived = 0
    for place, problem in module.bad_waivers:
        unread = f"this waiver counts for nothing: {problem}"
        out.append(_stale(module.path, place, unread, levels, "mend the comment"))
    for index, waiver in enumerate(module.waivers):
        message = _staleness(index, waiver, settings, enabled, used, undecided)
        if message is None:
            continue
        if STALE in waiver.rules:
            waived += 1
            continue
        known = all(rule in settings.rules for rule in waiver.rules)
        advice = "delete the comment, or the rule from it" if known else "correct the name"
        out.append(_stale(module.path, waiver.place, message, levels, advice))
    return out, waived


def _stale(path: str, place: Place, message: str, levels: dict[str, LevelName], advice: str) -> PlacedFinding:
    return PlacedFinding(
        rule=STALE,
        level=_level(STALE, "warning", levels),
        path=path,
        line=place.line,
        column=place.column,
        end_line=place.end_line,
        end_column=place.end_column,
        message=message,
        way_out=advice,
    )


def _staleness(
    index: int,
    waiver: Waiver,
    settings: Settings,
    enabled: frozenset[str],
    used: set[tuple[int, str]],
    undecided: set[int],
) -> str | None:
    """What is wrong with a waiver, None where it is of use or that cannot be told."""
    if not waiver.rules:
        return "this waiver names no rule"
    for rule in waiver.rules:
        if rule not in settings.rules:
            return f"this waiver names an unknown rule {rule!r}{nearest(rule, settings.rules)}"
    if not undecided.isdisjoint(waiver.target_lines):
        return None
    idle = [rule for rule in waiver.rules if rule in enabled and rule != STALE and (index, rule) not in used]
    if not idle:
        return None
    return f"nothing here needs the waiver of {' and '.join(idle)}"


def to_values(outcome: Outcome) -> tuple[Any, ...]:
    """`outcome` as nested tuples of plain values, for the cache."""
    remarks = (outcome.unresolved, outcome.inexact, outcome.undecided)
    return (
        outcome.path,
        tuple(encode(each) for each in outcome.findings),
        outcome.patterns,
        outcome.waived,
        *(tuple((each.line, each.column, each.reason) for each in group) for group in remarks),
        outcome.relied_on,
    )


def from_values(values: tuple[Any, ...]) -> Outcome:
    """The inverse of `to_values`; TypeError or ValueError where `values` is something else."""
    path, findings, patterns, waived, *groups, relied_on = values
    unresolved, inexact, undecided = (tuple(Remark(*each) for each in group) for group in groups)
    return Outcome(
        path,
        tuple(decode(each) for each in findings),
        patterns,
        waived,
        unresolved,
        inexact,
        undecided,
        relied_on=tuple((str(name), str(state)) for name, state in relied_on),
    )
