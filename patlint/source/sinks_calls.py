"""The calls of one file that hand a pattern to another library -> sites, and what stays unresolved.

`SinkReader.read()` takes up the calls that `SinkNames` finds and the attributes of classes by their bases; each
argument becomes a `Site` whose `function` is the qualified name of what takes it. What a library does to the text
(a `$` added, a place within a larger pattern) never makes another pattern of it here: where it may change the
meaning, the site has no uses, and only what holds in every use is said of it.

Limits: a class that a file derives from one of its own is not followed to a library's; of a sequence only the
first `_MOST_ROWS` rows are read.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Callable, Iterator
from dataclasses import replace

from patlint.source import reasons
from patlint.source.constants import Constants
from patlint.source.flags import evaluate_flags
from patlint.source.index import Index
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.sinks import CONDITION, ENGINE, SCANNER, Sink, SinkTable
from patlint.source.sinks_names import SinkNames, pick
from patlint.source.sinks_parts import objection
from patlint.source.sites import Function, Place, Site, Unresolved, Use
from patlint.source.spelled import Spelled, cut

_ROUTE = re.compile(r"\{[_a-zA-Z][^{}]*(?:\{[^{}]*\}[^{}]*)*\}")
_PIECE = re.compile(r"\{[_a-zA-Z][_a-zA-Z0-9]*:(.+)\}", re.DOTALL)
_IGNORECASE = 2
_MOST_ROWS = 2_000

EVERYTHING = (".*", "(?s).*", ".*?")
"""What everybody reads as "any text"."""

Locate = Callable[[ast.expr, Scope, Spelled], tuple[Place, int]]


class SinkReader:
    """One file while its sinks are read."""

    def __init__(
        self, index: Index, text: Text, constants: Constants, path: str, table: SinkTable, locate: Locate
    ) -> None:
        self.index = index
        self.text = text
        self.constants = constants
        self.path = path
        self.table = table
        self.locate = locate
        self.sites: list[Site] = []
        self.unresolved: list[Unresolved] = []
        self.rows: list[list[Site]] = []
        """The sites of each sequence of rows that is tried in its order."""
        self.made: dict[ast.Call, Site] = {}
        """The site of each call of a function or class that takes one pattern."""
        self._names = SinkNames(index, text, constants.names, path, table)

    def read(self) -> None:
        for call, scope, sink in self._names.calls():
            self.call(call, scope, sink)
        for value, sink in self._names.lookups():
            self._refuse(value, sink, sink.refused or ENGINE)
        if self.table.attributes:
            for definition, inner in self.index.classes.items():
                self._class(definition, inner)

    def use_of(self, call: ast.Call, node: ast.expr, scope: Scope) -> tuple[Use | None, bool] | None:
        """What a call does with the pattern object `node`, one of its arguments; None if it is no sink's.

        The use (None where it is not known), and whether it is all that happens to the object.
        """
        for sink in self._names.of_call(call, scope):
            if sink.kind in ("call", "method") and pick(call, sink.argument)[0] is node:
                function = None if pick(call, sink.unless)[0] is not None else sink.function
                if sink.embedded or sink.part or function is None:
                    return None, False
                sense = pick(call, sink.inverted) == (None, False)
                return self._use(sink, function, self.text.place(call), validates=sense), sink.seen
        return None

    # calls

    def call(self, call: ast.Call, scope: Scope, sink: Sink) -> None:
        """Takes up one argument of one call."""
        self.constants.restart()
        argument, loose = pick(call, sink.argument)
        if argument is None:
            if loose and sink.kind != "rows" and any(isinstance(key, int) for key in sink.argument):
                self._refuse(call, sink, reasons.STARRED)
            return
        if isinstance(argument, ast.Constant) and argument.value is None:
            return
        if sink.refused:
            self._refuse(call, sink, sink.refused)
            return
        flags_node, flags_loose = pick(call, sink.flags_argument)
        try:
            if flags_loose and flags_node is None:
                raise Opaque(reasons.FLAGS)
            flags = sink.flags | self._flags(flags_node, scope) | self._case(call, scope, sink)
        except Opaque as opaque:
            self._refuse(call, sink, opaque.reason)
            return
        if sink.kind == "rows":
            self._rows(argument, scope, sink, flags, call)
            return
        before = len(self.sites)
        self._text(argument, scope, sink, flags, call)
        if sink.kind == "call" and len(self.sites) == before + 1:
            self.made[call] = self.sites[before]

    def _flags(self, node: ast.expr | None, scope: Scope) -> int:
        if isinstance(node, ast.Constant) and node.value is None:
            return 0
        return evaluate_flags(node, scope, self.constants)

    def _case(self, call: ast.Call, scope: Scope, sink: Sink) -> int:
        node, loose = pick(call, sink.case)
        match node:
            case None if not loose:
                return 0
            case ast.Constant(value=False):
                return _IGNORECASE
            case ast.Constant(value=True | None):
                return 0
        raise Opaque(reasons.FLAGS)

    def _is_pattern(self, call: ast.Call, sink: Sink, pattern: Spelled) -> bool:
        """Whether the text is a pattern and not taken as it is. Errors: `Opaque`."""
        node, loose = pick(call, sink.regex)
        decided: object = sink.regex_default
        if node is not None:
            if not isinstance(node, ast.Constant):
                raise Opaque(CONDITION)
            decided = sink.regex_default if node.value is None else node.value
        elif loose:
            raise Opaque(CONDITION)
        return len(pattern.value) > 1 if decided == "long" else bool(decided)

    def _text(self, argument: ast.expr, scope: Scope, sink: Sink, flags: int, call: ast.Call) -> None:
        if self.constants.names.maker(argument, scope) is not None or self._taken_as_it_is(call, sink):
            return  # the site of a pattern object is where it is made
        known = pick(call, sink.unless) == (None, False)
        sense = pick(call, sink.inverted) == (None, False)
        refused: str | None = None
        for pattern in self.constants.choices.each(lambda: self._told(argument, scope, sink, call)):
            if pattern is None:
                continue
            if not isinstance(pattern, Opaque):
                if sink.kind == "route":
                    self._route(argument, scope, sink, pattern, call)
                else:
                    self._site(argument, scope, sink, pattern, flags, self.text.place(call), known, sense)
            elif pattern.reason != reasons.COMPILED:
                refused = refused or pattern.reason
            elif not isinstance(argument, (ast.Name, ast.Attribute)):
                refused = refused or reasons.NOT_TEXT
        if refused is not None:
            self._refuse(call, sink, refused)

    def _told(self, argument: ast.expr, scope: Scope, sink: Sink, call: ast.Call) -> Spelled | None:
        """The text of an argument, None where it is no pattern. Errors: `Opaque`."""
        pattern = self.constants.text_of(argument, scope)
        if sink.objects_only:
            raise Opaque(reasons.NOT_TEXT)
        return pattern if self._is_pattern(call, sink, pattern) else None

    def _taken_as_it_is(self, call: ast.Call, sink: Sink) -> bool:
        """Whether what is given is no pattern, whatever its text."""
        node, loose = pick(call, sink.regex)
        if node is None:
            return not loose and sink.regex_default is False
        return isinstance(node, ast.Constant) and node.value is False

    def _route(self, argument: ast.expr, scope: Scope, sink: Sink, pattern: Spelled, call: ast.Call) -> None:
        if not isinstance(pattern.value, str):
            return
        for found in _ROUTE.finditer(pattern.value):
            piece = _PIECE.fullmatch(found[0])
            if piece is not None:
                part = cut(pattern, found.start() + piece.start(1), found.start() + piece.end(1))
                self._site(argument, scope, sink, part, 0, self.text.place(call))

    def _rows(self, argument: ast.expr, scope: Scope, sink: Sink, flags: int, call: ast.expr) -> None:
        made: list[Site] = []
        self.rows.append(made)
        for row, inner in self._items(argument, scope, sink, call, 0):
            if isinstance(row, (ast.Tuple, ast.List)) and row.elts:
                first = row.elts[0]
            elif isinstance(row, ast.Call) or sink.kind == "states":
                continue  # a call that makes a row is a sink of its own, or none
            else:
                self._refuse(row, sink, reasons.ELEMENT)
                continue
            if isinstance(first, ast.Call) and (sink.kind == "states" or self._names.of_call(first, inner)):
                continue  # a list of words, made by a call
            self.constants.restart()
            try:
                if self.constants.names.maker(first, inner) is not None:
                    continue
                pattern = self.constants.text_of(first, inner)
            except Opaque as opaque:
                self._refuse(first, sink, opaque.reason)
                continue
            before = len(self.sites)
            plain = sink.kind == "states" and self._is_token(row, inner)
            read = replace(sink, looks_at="span") if plain else sink
            self._site(first, inner, read, pattern, flags, self.text.place(call))
            made += self.sites[before:]

    def _is_token(self, row: ast.expr, scope: Scope) -> bool:
        """Whether a lexer's rule gives all that it matches one kind of token, or none: no group is read."""
        match row:
            case ast.Tuple(elts=[_, ast.Constant(value=None), *_]):
                return True
            case ast.Tuple(elts=[_, ast.Name() | ast.Attribute() as action, *_]):
                return (self._names.qualified(action, scope) or "").startswith("pygments.token.")
            case _:
                return False

    def _items(
        self, node: ast.expr, scope: Scope, sink: Sink, call: ast.expr, depth: int
    ) -> Iterator[tuple[ast.expr, Scope]]:
        """The rows of a written-out sequence."""
        match node:
            case ast.List(elts=rows) | ast.Tuple(elts=rows):
                for row in rows[:_MOST_ROWS]:
                    if isinstance(row, ast.Starred):
                        yield from self._items(row.value, scope, sink, call, depth + 1)
                    else:
                        yield row, scope
                return
            case ast.BinOp(op=ast.Add()) if depth < 20:
                yield from self._items(node.left, scope, sink, call, depth + 1)
                yield from self._items(node.right, scope, sink, call, depth + 1)
                return
            case ast.Name() | ast.Attribute() if depth < 20:
                try:
                    definitions = self.constants.names.definitions(node, scope)
                except Opaque as opaque:
                    self._refuse(call, sink, opaque.reason)
                    return
                for value, inner in definitions:
                    yield from self._items(value, inner, sink, call, depth + 1)
                return
        self._refuse(call, sink, reasons.SCANNER if sink.name == SCANNER else reasons.EXPRESSION)

    # classes

    def _class(self, definition: ast.ClassDef, inner: Scope) -> None:
        outer = inner.parent
        for base in definition.bases:
            name = self._names.qualified(base, outer) if outer is not None else None
            for sink in self.table.attributes.get(name or "", ()):
                if sink.kind == "states":
                    if len(definition.bases) == 1:  # another base might give the flags
                        self._states(inner, sink)
                else:
                    self._attribute(definition, inner, sink)

    def _attribute(self, definition: ast.ClassDef, inner: Scope, sink: Sink) -> None:
        (name,) = sink.argument
        bindings = inner.bindings.get(str(name), [])
        if not bindings:
            return
        if len(bindings) != 1 or bindings[0].value is None:
            return  # a method or a property makes it
        value = bindings[0].value
        self.constants.restart()
        try:
            if isinstance(value, ast.Constant) and value.value is None:
                return
            flags = sink.flags | self._class_flags(inner, sink)
            if self.constants.names.maker(value, inner) is not None:
                return
            pattern = self.constants.text_of(value, inner)
        except Opaque as opaque:
            if opaque.reason != reasons.COMPILED:
                self._refuse(value, sink, opaque.reason)
            return
        sense = not any(isinstance(key, str) and inner.bindings.get(key) for key in sink.inverted)
        self._site(value, inner, sink, pattern, flags, self.text.place(value), sense=sense)

    def _states(self, inner: Scope, sink: Sink) -> None:
        """A dict of sequences of rows, all with the flags that the class gives."""
        bindings = inner.bindings.get(str(sink.argument[0]), [])
        if len(bindings) != 1 or not isinstance(bindings[0].value, ast.Dict):
            return
        self.constants.restart()
        try:
            flags = self._class_flags(inner, sink)
        except Opaque as opaque:
            self._refuse(bindings[0].value, sink, opaque.reason)
            return
        for rows in bindings[0].value.values:
            if isinstance(rows, (ast.List, ast.Tuple, ast.BinOp)):
                self._rows(rows, inner, sink, flags, rows)

    def _class_flags(self, inner: Scope, sink: Sink) -> int:
        if not sink.flags_argument:
            return 0
        bindings = inner.bindings.get(str(sink.flags_argument[0]), [])
        if not bindings:
            return _IGNORECASE if sink.name == "string.Template" else sink.flags
        if len(bindings) != 1 or bindings[0].value is None:
            raise Opaque(reasons.FLAGS)
        return self._flags(bindings[0].value, inner)

    # sites

    def _refuse(self, node: ast.expr, sink: Sink, reason: str) -> None:
        self.unresolved.append(Unresolved(self.path, self.text.place(node), sink.name, reason))

    def _use(
        self, sink: Sink, function: Function, place: Place, everything: bool = False, validates: bool = True
    ) -> Use:
        return Use(
            function,
            sink.looks_at,
            place,
            positioned=sink.kind == "states" or (sink.kind == "rows" and sink.name == SCANNER),
            own=sink.own,
            selects=sink.selects or (sink.narrows and everything),
            validates=sink.validates and validates,
        )

    def _site(
        self,
        argument: ast.expr,
        scope: Scope,
        sink: Sink,
        pattern: Spelled,
        flags: int,
        call: Place,
        known: bool = True,
        sense: bool = True,
    ) -> None:
        function = sink.function if known else None
        part = sink.part
        if sink.embedded and sink.kind != "attribute" and sink.name != SCANNER:
            dollar: str | bytes = b"$" if isinstance(pattern.value, bytes) else "$"
            if pattern.value.endswith(dollar):  # type: ignore[arg-type]
                function = sink.dollar
            elif not sink.ends_open:
                function, part = None, True
        refused = objection(sink, part, pattern.value, flags)
        if refused is not None:
            self._refuse(argument, sink, refused)
            return
        everything = pattern.value in EVERYTHING
        place, statement = self.locate(argument, scope, pattern)
        self.sites.append(
            Site(
                path=self.path,
                pattern=pattern.value,
                flags=flags,
                function=sink.name,
                place=place,
                statement=statement,
                pieces=pattern.pieces(),
                uses=() if function is None else (self._use(sink, function, call, everything, sense),),
                uses_seen=function is not None and sink.seen,
                embedded=sink.embedded or part,
            )
        )
