"""A Python file -> `Module`: its patterns, the calls whose pattern cannot be told, its waivers.

>>> [(site.pattern, site.function) for site in find_patterns("import re\\nre.match('a+', text)", "a.py")]
[('a+', 'match')]

Order of work: decode, parse with `ast`, and only where the text imports `re` or mentions a sink: one
walk (`index`), the calls on `re` (`engine`) and those of other libraries (`sinks_calls`), the text and flags
of each (`constants`, `flags`), its uses (`usage`, `follow`).
"""

from __future__ import annotations

import ast
import gc
import re
from collections.abc import Iterator
from typing import cast

from patlint.source import reasons
from patlint.source.constants import Constants
from patlint.source.decode import decode, parse, split_lines
from patlint.source.disk import Files
from patlint.source.engine import FUNCTIONS, Arguments, Engine, bind_arguments
from patlint.source.families import Made, read_families
from patlint.source.flags import evaluate_flags
from patlint.source.follow import Follower
from patlint.source.held import put
from patlint.source.index import Index, build_index
from patlint.source.library import dotted
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.rows import Row
from patlint.source.scopes import Scope
from patlint.source.siblings import Shared, Siblings
from patlint.source.sinks import SinkTable
from patlint.source.sinks_builtin import builtin_table
from patlint.source.sinks_calls import SinkReader
from patlint.source.sites import Family, Function, Module, Place, Site, Unresolved, Use
from patlint.source.spelled import Spelled
from patlint.source.usage import Uses
from patlint.source.waivers import read_waivers

# Two searches that begin with a literal are many times faster than one with an alternation in front.
_IMPORT_RE = re.compile(r"import[ \t\f\\](?:[^#\n\r;]|(?<=\\)\r?\n|(?<=\\)\r)*?\bre\b")
_FROM_RE = re.compile(r"from[ \t\f\\\r\n]+re\b")


def read_module(
    data: bytes | str, path: str, sinks: SinkTable | None = None, files: Files | None = None
) -> Module:
    """Everything the source side knows of one file, which is never run.

    `sinks`: functions of other libraries that take patterns; None: the built-in ones. `files`: where constants
    that are imported are looked for; None: nowhere.

    Errors: `SourceError` for what cannot be decoded or parsed.
    """
    source = decode(data, path)
    collecting = gc.isenabled()
    gc.disable()  # a tree is many objects and no rubbish
    try:
        tree = parse(source.text, path)
        lines = split_lines(source.text)
        waivers, bad_waivers = read_waivers(source.text, lines)
        sites: tuple[Site, ...] = ()
        unresolved: tuple[Unresolved, ...] = ()
        families: tuple[Family, ...] = ()
        table = builtin_table() if sinks is None else sinks
        if mentions_re(source.text) or table.mentioned(source.text):
            reader = _Reader(tree, source.text, lines, path, table, files)
            try:
                reader.read()
                sites, unresolved = reader.results()
                families = read_families(
                    reader.index, reader.text, reader.constants, reader.made, reader.sinks, sites
                )
            finally:
                reader.release()
    finally:
        if collecting:
            gc.enable()
    return Module(
        path, sites, unresolved, waivers, lines, bad_waivers, source.encoding, families, _sorted(files)
    )


def find_patterns(
    text: bytes | str, path: str = "<text>", sinks: SinkTable | None = None
) -> tuple[Site, ...]:
    """The patterns of one file whose text can be told, in the order of the file. Errors: `SourceError`."""
    return read_module(text, path, sinks).sites


def mentions_re(text: str) -> bool:
    """Whether the file can have anything of `re` at all; cheap, and True too often rather than too seldom."""
    return _IMPORT_RE.search(text) is not None or _FROM_RE.search(text) is not None


def _sorted(files: Files | None) -> tuple[tuple[str, str], ...]:
    return tuple(sorted(files.relied_on.items())) if files is not None else ()


class _Reader:
    """One file while it is read."""

    def __init__(
        self,
        tree: ast.Module,
        source: str,
        lines: tuple[str, ...],
        path: str,
        table: SinkTable,
        files: Files | None,
    ) -> None:
        self.path = path
        self.index: Index = build_index(tree)
        self.text = Text(lines)
        self.engine = Engine(self.index)
        self.others = Shared(files) if files is not None else None
        siblings = Siblings(self.index, path, self.others) if self.others is not None else None
        self.constants = Constants(self.index, self.text, self.engine, siblings)
        self.uses = Uses(self.index, self.text, self.constants)
        self.sinks = SinkReader(self.index, self.text, self.constants, path, table, self._where)
        self.follower = Follower(
            self.index, self.text, source, self.engine, self.constants, self.uses, self.sinks
        )
        self.sites: list[Site] = []
        self.unresolved: list[Unresolved] = []
        self.made: Made = {}

    def release(self) -> None:
        self.index.release()
        if self.others is not None:
            self.others.release()

    def results(self) -> tuple[tuple[Site, ...], tuple[Unresolved, ...]]:
        sites = sorted(merge(self.sites + self.sinks.sites), key=lambda site: site.place)
        unresolved = sorted(self.unresolved + self.sinks.unresolved, key=lambda call: call.place)
        return tuple(sites), tuple(unresolved)

    def read(self) -> None:
        members = sorted(self._members(), key=lambda member: (member[0].lineno, member[0].col_offset))
        for node, scope in members:
            try:
                denoted = self.engine.denotes(node, scope)
            except Opaque as opaque:
                self._doubtful(node, opaque)
                continue
            name = denoted.removeprefix("re.") if denoted else ""
            call = self.index.parents.get(node)
            called = isinstance(call, ast.Call) and call.func is node
            if name == "Scanner" and called:
                assert isinstance(call, ast.Call)
                for sink in self.sinks.table.scanners:
                    self.sinks.call(call, scope, sink)
                if not self.sinks.table.scanners:
                    self._refuse(call, name, reasons.SCANNER)
            elif name in FUNCTIONS:
                if called:
                    assert isinstance(call, ast.Call)
                    self._call(call, scope, name)
                elif not self._is_alias(node) and not self._handed(node, call, scope, name):
                    self._refuse(node, name, reasons.PASSED_ON)
        self.sinks.read()

    def _members(self) -> Iterator[tuple[ast.expr, Scope]]:
        """Every expression that may be a member of `re`: `x.match`, or a name from a from-import or alias."""
        parents = self.index.parents
        stack = [self.index.module]
        starred = any(module == "re" for _, module in self.index.module.stars)
        names = self._names()
        while stack:
            scope = stack.pop()
            stack.extend(scope.children)
            for name in sorted(scope.loads.keys() if starred else names & scope.loads.keys()):
                for node in scope.loads[name]:
                    parent = parents.get(node)
                    if isinstance(parent, ast.Attribute) and parent.value is node:
                        if parent.attr in FUNCTIONS or parent.attr == "Scanner":
                            yield parent, scope
                    elif name in names or name in FUNCTIONS:
                        yield node, scope

    def _names(self) -> set[str]:
        """Names that are bound to `re` or to a member of it somewhere in the file."""
        found: set[str] = set()
        scopes = [self.index.module]
        aliases: list[tuple[str, str]] = []
        while scopes:
            scope = scopes.pop()
            scopes.extend(scope.children)
            for name, bindings in scope.bindings.items():
                for binding in bindings:
                    if binding.module == "re":
                        found.add(name)
                    else:
                        value = binding.value
                        while isinstance(value, ast.Attribute):
                            value = value.value
                        if isinstance(value, ast.Name):
                            aliases.append((value.id, name))
        grown = True
        while grown:
            grown = False
            for origin, name in aliases:
                if origin in found and name not in found:
                    found.add(name)
                    grown = True
        return found

    def _is_alias(self, node: ast.expr) -> bool:
        """`search = re.search`: the calls of the name are looked at where they stand."""
        parent = self.index.parents.get(node)
        match parent:
            case ast.Assign(targets=targets):
                return parent.value is node and all(isinstance(target, ast.Name) for target in targets)
            case ast.Compare() | ast.Attribute():
                return True
            case _:
                return False

    def _handed(self, node: ast.expr, call: ast.AST | None, scope: Scope, function: str) -> bool:
        """`map(re.compile, TABLE)` and `partial(re.sub, PATTERN, …)`: calls that others make."""
        if not isinstance(call, ast.Call) or not call.args or call.args[0] is not node:
            return False
        if dotted(call.func, scope) == "functools.partial" and len(call.args) > 1:
            made = ast.Call(node, call.args[1:], call.keywords)
            ast.copy_location(made, call)
            self._call(made, scope, function, handed=True)
            return True
        by_name = isinstance(call.func, ast.Name) and call.func.id == "map" and scope.find("map") is None
        if function != "compile" or not by_name or len(call.args) != 2:
            return False
        self.constants.restart()
        refused: str | None = None
        for told in self.constants.choices.each(lambda: self.constants.rows.each(call, call.args[1], scope)):
            if isinstance(told, Opaque):
                refused = refused or told.reason
            else:
                value, row = told
                self._site(call, scope, function, row.node, value, 0, row=row)
        if refused is not None:
            self._refuse(node, function, refused)
        return True

    def _doubtful(self, node: ast.expr, opaque: Opaque) -> None:
        call = self.index.parents.get(node)
        name = node.attr if isinstance(node, ast.Attribute) else getattr(node, "id", "")
        if isinstance(call, ast.Call) and call.func is node and name in FUNCTIONS:
            self._refuse(call, name, opaque.reason)

    def _refuse(self, node: ast.expr, function: str, reason: str) -> None:
        self.unresolved.append(Unresolved(self.path, self.text.place(node), function, reason))

    def _call(self, call: ast.Call, scope: Scope, function: str, handed: bool = False) -> None:
        """A call of a function of `re`; `handed`: others make it, so that its uses are not seen."""
        self.constants.restart()
        arguments = bind_arguments(call, FUNCTIONS[function])
        argument = arguments.given.get("pattern")
        if argument is None:
            self._refuse(call, function, reasons.STARRED if arguments.loose else reasons.MISSING)
            return
        if self.constants.names.maker(argument, scope) is not None:
            return  # a pattern object: its site is where it is made
        refused: str | None = None
        for told in self.constants.choices.each(lambda: self._told(argument, arguments, scope)):
            if not isinstance(told, Opaque):
                self._site(call, scope, function, argument, *told, handed=handed)
            elif told.reason != reasons.COMPILED:
                refused = refused or told.reason
            elif not _may_be_object(argument):
                refused = refused or reasons.NOT_TEXT
        if refused is not None:
            self._refuse(call, function, refused)

    def _told(self, argument: ast.expr, arguments: Arguments, scope: Scope) -> tuple[Spelled, int]:
        """The text and the flags of a call. Errors: `Opaque`."""
        pattern = self.constants.text_of(argument, scope)
        if arguments.loose and "flags" not in arguments.given:
            raise Opaque(reasons.FLAGS)
        return pattern, evaluate_flags(arguments.given.get("flags"), scope, self.constants)

    def _site(
        self,
        call: ast.Call,
        scope: Scope,
        function: str,
        argument: ast.expr,
        pattern: Spelled,
        flags: int,
        handed: bool = False,
        row: Row | None = None,
    ) -> None:
        """`row`: `call` is `map` over a table, and makes a container of pattern objects."""
        uses: tuple[Use, ...]
        embedded = False
        if handed:
            uses, seen, name = (), False, None
        elif function == "compile":
            found = self.follower.follow(call, scope, pattern.value, put("each", None) if row else None)
            uses = tuple(sorted(found.uses, key=lambda use: use.place))
            seen, name = found.seen and not self.follower.leads_back, found.name
            embedded = found.embedded
        else:
            uses = (self.uses.call(call, scope, cast(Function, function), False, pattern.value),)
            seen, name = True, None
        place, statement = self._where(argument, row.scope if row is not None else scope, pattern)
        self.sites.append(
            Site(
                path=self.path,
                pattern=pattern.value,
                flags=flags,
                function=function,
                place=place,
                statement=statement,
                pieces=pattern.pieces(),
                uses=uses,
                uses_seen=seen,
                name=name,
                embedded=embedded,
            )
        )
        self.made.setdefault(call, []).append((self.sites[-1], scope))

    def _where(self, argument: ast.expr, scope: Scope, pattern: Spelled) -> tuple[Place, int]:
        """The whole expression that gives the text: a name's definition, or the argument itself."""
        for _ in range(20):
            if not isinstance(argument, (ast.Name, ast.Attribute)):
                break
            try:
                item = self.constants.origin(argument, scope)
                if isinstance(item, Row):
                    argument, scope = item.node, item.scope
                elif item is not None:
                    break
                else:
                    argument, scope = self.constants.names.definitions(argument, scope)[0]
            except Opaque:  # a part of a pattern object, or of the `string` module
                break
        statement = self.index.statement(argument)
        line = statement.lineno if statement is not None else argument.lineno
        return self.text.place(argument), line


def _may_be_object(node: ast.expr) -> bool:
    """Whether the argument as a whole may be the pattern object that was met in it."""
    return isinstance(node, (ast.Name, ast.Attribute)) or (
        isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
    )


def merge(sites: list[Site]) -> list[Site]:
    """One site for the same constant with the same flags, so that nothing is reported twice."""
    merged: dict[tuple[Place, str | bytes, int], Site] = {}
    for site in sites:
        key = site.place, site.pattern, site.flags
        known = merged.get(key)
        if known is None:
            merged[key] = site
            continue
        uses = known.uses + tuple(use for use in site.uses if use not in known.uses)
        merged[key] = Site(
            path=known.path,
            pattern=known.pattern,
            flags=known.flags,
            function=known.function,
            place=known.place,
            statement=known.statement,
            pieces=known.pieces,
            uses=tuple(sorted(uses, key=lambda use: use.place)),
            uses_seen=known.uses_seen and site.uses_seen,
            name=known.name or site.name,
            embedded=known.embedded or site.embedded,
        )
    return list(merged.values())


__all__ = ["find_patterns", "mentions_re", "parse", "read_module"]
