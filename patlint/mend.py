"""A file with its suggestions applied: what `patlint mend` shows and writes.

`mended(data, path, settings)` takes the suggestions of a file's findings one by one, one for each site: shorter
patterns, and such that match in less time. Each is written into the text (`patlint.rewrite.edits`), the text is
read again from its bytes, and the change is kept only where nothing but the literals differs, the site is found
again at its place with the suggested pattern, and every site whose pattern changed is proven to do the same.
What is left as it was is told with a reason. That a pattern matches in less time was found for this very text,
with these flags, in these uses, and is not asked again where they are found again.

>>> from patlint.config import Settings
>>> from patlint.target import running_target
>>> text = b"import re\\nre.match('(?:a|b)+c', input())\\n"
>>> mended(text, "x.py", Settings(running_target(), ("shorter-equivalent",))).data
b"import re\\nre.match('[ab]+c', input())\\n"
"""

from __future__ import annotations

import ast
import warnings
from collections.abc import Iterator
from dataclasses import dataclass

from patlint.config import Settings
from patlint.limits import LimitReached
from patlint.outcome import failed, internal, lint_module
from patlint.placed import PlacedFinding
from patlint.rewrite.edits import Edit, FileText, NoEdit, apply, edits_of
from patlint.rewrite.proof import Keeps, holds
from patlint.rewrite.reach import other_readers
from patlint.rules.shorter_equivalent import needed
from patlint.source import Module, SourceError, read_module
from patlint.source.engine import FUNCTIONS
from patlint.source.sinks import Sink
from patlint.source.sinks_builtin import builtin_table
from patlint.source.sinks_names import pick
from patlint.source.sites import Site
from patlint.syntax.parser import PatternError, parse

ORDER: dict[Keeps, int] = {"language": 0, "spans": 1, "groups": 2}


@dataclass(frozen=True, slots=True)
class Left:
    """A suggestion that was not applied, and why."""

    line: int
    column: int
    reason: str


@dataclass(frozen=True, slots=True)
class Claim:
    """What was proven of one site, told by its number in the file: its new pattern, and what it keeps."""

    number: int
    pattern: str | bytes
    keeps: Keeps


@dataclass(frozen=True, slots=True)
class Mended:
    """`data` is the new content of the file, the old one where nothing was applied. `problems` are lines for
    standard error: the file could not be read."""

    path: str
    old: bytes
    data: bytes
    claims: tuple[Claim, ...] = ()
    left: tuple[Left, ...] = ()
    problems: tuple[str, ...] = ()

    @property
    def changed(self) -> bool:
        return self.data != self.old


def mended(data: bytes, path: str, settings: Settings) -> Mended:
    """The file `path` with content `data`, mended. Raises nothing but KeyboardInterrupt."""
    try:
        return _mended(data, path, settings)
    except SourceError as error:
        return Mended(path, data, data, problems=failed(path, error.message, error.line).problems)
    except (RecursionError, MemoryError):
        return Mended(path, data, data, problems=(f"{path}: nested too deeply to be read",))
    except Exception as error:
        return Mended(path, data, data, problems=(f"{path}: {internal(error)}",))


def _mended(data: bytes, path: str, settings: Settings) -> Mended:
    module = read_module(data, path, settings.sinks)
    outcome = lint_module(module, settings)
    wanted = [finding for finding in outcome.findings if finding.suggestion is not None]
    if not wanted:
        return Mended(path, data, data, problems=outcome.problems)
    if "".join(module.lines).encode(module.encoding, "replace") != data:
        reason = f"{module.encoding} text cannot be written back as it was"
        left = tuple(Left(finding.line, finding.column, reason) for finding in wanted)
        return Mended(path, data, data, left=left, problems=outcome.problems)
    left_out: list[Left] = []
    claims: dict[int, Claim] = {}
    now = data
    for finding in wanted:
        assert finding.suggestion is not None
        touched = False
        try:
            number = _site_of(finding, module, claims)
            if number is None:
                continue
            current = read_module(now, path, settings.sinks)
            touched = current.sites[number].pattern != module.sites[number].pattern
            claim = Claim(number, finding.suggestion.pattern, finding.suggestion.keeps)
            # Where a literal is shared, a part of the change may be done, or all of it.
            if current.sites[number].pattern != claim.pattern:
                now = _applied(now, current, (*claims.values(), claim), settings)
            claims[number] = claim
        except NoEdit as leave:
            if not touched:  # else one of its literals was mended for another site, in another way
                left_out.append(Left(finding.line, finding.column, str(leave)))
    made = tuple(claims[number] for number in sorted(claims))
    if made:
        unsure = unproven(data, now, path, made, settings)
        if unsure is not None:
            return Mended(path, data, data, problems=(f"{path}: left as it was: {unsure}",))
    return Mended(path, data, now, made, tuple(left_out), outcome.problems)


def unproven(old: bytes, new: bytes, path: str, claims: tuple[Claim, ...], settings: Settings) -> str | None:
    """Why the file with content `new` may not stand for `old`; None where all is proven.

    Nothing but literals may differ; every site must be found again, with the pattern that is claimed; and all
    that is claimed, and whatever the uses of other sites need, is proven from the texts that were read.
    """
    try:
        before = read_module(old, path, settings.sinks)
        after = read_module(new, path, settings.sinks)
    except SourceError as error:
        return f"it cannot be read again: {error.message}"
    if not _only_literals(old, new):
        return "something else than literals changed"
    if before.encoding != after.encoding or before.waivers and len(before.waivers) != len(after.waivers):
        return "its comments changed"
    if [each.function for each in before.sites] != [each.function for each in after.sites]:
        return "its patterns are not found again"
    if len(before.unresolved) != len(after.unresolved):
        return "its patterns are not found again"
    claimed = {claim.number: claim for claim in claims}
    for number, (one, other) in enumerate(zip(before.sites, after.sites, strict=True)):
        claim = claimed.get(number)
        if claim is not None and other.pattern != claim.pattern:
            return f"line {other.place.line}: the pattern is not the suggested one"
        if claim is None and other.pattern == one.pattern and other.flags == one.flags:
            continue
        if not _proven(one, other, None if claim is None else claim.keeps, settings):
            return f"line {one.place.line}: the pattern there is not proven to do the same"
    return None


def _site_of(finding: PlacedFinding, module: Module, claims: dict[int, Claim]) -> int | None:
    """The number of the site that a finding is about; None where it has its new pattern. Errors: `NoEdit`."""
    done = False
    for number, site in enumerate(module.sites):
        place = site.place_of_span(*finding.span)
        here = (place.line, place.column) == (finding.line, finding.column)
        if site.pattern == finding.pattern and here:
            if number not in claims:
                return number
            done = True
    if done:
        return None
    raise NoEdit("its place is not found")


def _applied(data: bytes, module: Module, claims: tuple[Claim, ...], settings: Settings) -> bytes:
    """`data` with the last of the claims made true, as the others are. Errors: `NoEdit`."""
    claim = claims[-1]
    site = module.sites[claim.number]
    if site.name is not None and _reads_pattern(module, site.name):
        raise NoEdit(f"the program reads {site.name}.pattern")
    file = FileText(module.lines)
    reason = "the new text cannot be spelled there"
    for edits in edits_of(site, claim.pattern, file):
        for start in _literal_starts(site, edits, file):
            told = _readers(module, start, settings)
            if told is not None:
                raise NoEdit(told)
        try:
            new = apply(file.text, edits).encode(module.encoding)
        except UnicodeEncodeError:
            continue
        found = unproven(data, new, module.path, claims, settings)
        if found is None:
            return new
        reason = found
    raise NoEdit(reason)


def _literal_starts(site: Site, edits: tuple[Edit, ...], file: FileText) -> Iterator[tuple[int, int]]:
    """Where the pieces begin that are edited, as `ast` counts."""
    for piece in site.pieces:
        start, end = file.span(piece.whole)
        if piece.places and any(edit.start <= end and start <= edit.end for edit in edits):
            line = file.lines[piece.whole.line - 1]
            yield piece.whole.line, len(line[: piece.whole.column - 1].encode())


def _readers(module: Module, start: tuple[int, int], settings: Settings) -> str | None:
    tree = _tree("".join(module.lines))
    modules: set[str] = set()
    functions: set[str] = set()
    for node in ast.walk(tree):
        match node:
            case ast.Import():
                modules |= {alias.asname or alias.name for alias in node.names if alias.name == "re"}
            case ast.ImportFrom(module="re"):
                functions |= {alias.asname or alias.name for alias in node.names if alias.name in FUNCTIONS}
            case _:
                pass
    lines = FileText(module.lines)
    refused = {(each.place.line, each.place.column) for each in module.unresolved}
    taken = _taken(module, settings)

    def is_known(call: ast.Call, below: ast.AST) -> bool:
        match call.func:
            case ast.Name(id=name):
                known = name in functions
            case ast.Attribute(value=ast.Name(id=name), attr=attribute):
                known = name in modules and attribute in FUNCTIONS
            case _:
                known = False
        column = len(lines.lines[call.lineno - 1].encode()[: call.col_offset].decode("utf-8", "ignore")) + 1
        if (call.lineno, column) in refused:
            return False
        argument = below.value if isinstance(below, ast.keyword) else below
        if any(pick(call, sink.argument)[0] is argument for sink in taken.get((call.lineno, column), ())):
            return True
        if not known:
            return False
        if call.args and call.args[0] is below:
            return True
        return any(each is below and each.arg == "pattern" for each in call.keywords)

    return other_readers(tree, start, is_known)


def _taken(module: Module, settings: Settings) -> dict[tuple[int, int], list[Sink]]:
    """What the calls of other libraries' functions take, by the places of the calls."""
    table = builtin_table() if settings.sinks is None else settings.sinks
    found: dict[tuple[int, int], list[Sink]] = {}
    for site in module.sites:
        for use in site.uses:
            sinks = [sink for sink in table.sinks if sink.name == site.function]
            found.setdefault((use.place.line, use.place.column), []).extend(sinks)
    return found


def _reads_pattern(module: Module, name: str) -> bool:
    """Whether the file reads `.pattern` of a compiled pattern called `name`."""
    if not any(".pattern" in line for line in module.lines):
        return False
    for node in ast.walk(_tree("".join(module.lines))):
        match node:
            case ast.Attribute(attr="pattern", value=ast.Name(id=found) | ast.Attribute(attr=found)):
                if found == name.rpartition(".")[2]:
                    return True
            case _:
                pass
    return False


def _proven(one: Site, other: Site, keeps: Keeps | None, settings: Settings) -> bool:
    if one.flags != other.flags or [_manner(use) for use in one.uses] != [_manner(use) for use in other.uses]:
        return False
    modes, least = needed(one)
    wanted = least if keeps is None else max(keeps, least, key=lambda each: ORDER[each])
    try:
        a, b = (parse(site.pattern, site.flags, settings.target, settings.limits) for site in (one, other))
    except (PatternError, LimitReached):
        return False
    return holds(a, b, modes, wanted, settings.limits)


def _manner(use: object) -> tuple[object, ...]:
    names = ("function", "positioned", "replacement", "maximum", "in_loop", "validates")
    return tuple(getattr(use, name) for name in names)


def _only_literals(old: bytes, new: bytes) -> bool:
    """Whether the syntax trees agree in everything but the values of string literals."""
    return _outline(_tree(old)) == _outline(_tree(new))


def _tree(text: str | bytes) -> ast.Module:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        return ast.parse(text)


def _outline(tree: ast.Module) -> str:
    for node in ast.walk(tree):
        if isinstance(node, ast.Constant) and isinstance(node.value, (str, bytes)):
            node.value = type(node.value)()
            node.kind = None
    return ast.dump(tree)
