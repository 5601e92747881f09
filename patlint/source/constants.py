"""Expressions whose value the text of the file tells: constants, and what is put together from them.

`Constants.evaluate(node, scope)` gives a `Value`, or raises `Opaque` with the reason. A name counts only
where everything that it may be bound to is the same text, or where it goes through the rows of a table one by
one (`choices`); what is mutable counts only where nothing in the file could change it.
"""

from __future__ import annotations

import ast
import string
from collections.abc import Sequence

from patlint.source import calls, library, reasons
from patlint.source.attributes import Attributes
from patlint.source.branches import Branches
from patlint.source.choices import Choices
from patlint.source.engine import Engine
from patlint.source.formatting import percent
from patlint.source.helpers import Helpers
from patlint.source.index import Index
from patlint.source.kept import Kept
from patlint.source.names import MUTABLE, Names, path_to
from patlint.source.places import Text
from patlint.source.quoted import f_string, literal
from patlint.source.reasons import Opaque
from patlint.source.rows import Item, Ready, Rows
from patlint.source.scopes import Binding, Scope
from patlint.source.siblings import Siblings
from patlint.source.spelled import Listed, Spelled, cut, join, repeat, without_spelling
from patlint.source.values import Environment, Value, arithmetic, same, small

DEEPEST = 80
"""Expressions inside expressions (chains of `+` count as one), names followed through names included."""
MOST_STEPS = 50_000
"""Expressions evaluated for one file's pattern. A table of 5,000 words takes 5,000."""
_STRING_MODULE = frozenset(
    {"ascii_letters", "ascii_lowercase", "ascii_uppercase", "digits", "hexdigits", "octdigits", "punctuation"}
    | {"whitespace", "printable"}
)


class Constants:
    """The constants of one file."""

    def __init__(self, index: Index, text: Text, engine: Engine, siblings: Siblings | None = None) -> None:
        self.siblings = siblings
        self.index = index
        self.text = text
        self.engine = engine
        self.names = Names(index, engine, text)
        self.kept = Kept(self.names, index)
        self.choices = Choices()
        self.rows = Rows(self, index)
        self.helpers = Helpers(self, index)
        self.attributes = Attributes(self, index)
        self.branches = Branches(self, index)
        self._steps = 0
        self._active: set[ast.AST] = set()
        self._known: dict[ast.AST, Value | Opaque] = {}
        self._literals: dict[ast.AST, Spelled] = {}

    def restart(self) -> None:
        """A new pattern begins: its steps are counted from zero."""
        self._steps = 0
        self._active.clear()

    def step(self) -> None:
        self._steps += 1
        if self._steps > MOST_STEPS:
            raise Opaque(reasons.TOO_DEEP)

    def evaluate(self, node: ast.expr, scope: Scope, env: Environment | None = None, depth: int = 0) -> Value:
        """Errors: `Opaque` with the reason why the value cannot be told."""
        self.step()
        if depth > DEEPEST:
            raise Opaque(reasons.TOO_DEEP)
        match node:
            case ast.Constant():
                return self._constant(node)
            case ast.JoinedStr():
                return f_string(node, self.text, lambda part: self.evaluate(part, scope, env, depth + 1))
            case ast.Name():
                if env and node.id in env:
                    return env[node.id]
                return self._definition(node, scope, depth)
            case ast.BinOp(op=ast.Add()):
                return self._sum(node, scope, env, depth)
            case ast.BinOp(op=ast.Mult()):
                return self._product(node, scope, env, depth)
            case ast.BinOp(op=ast.Mod()):
                template = self.evaluate(node.left, scope, env, depth + 1)
                if isinstance(template, Spelled):
                    return percent(template, self.evaluate(node.right, scope, env, depth + 1))
                raise Opaque(reasons.EXPRESSION)
            case ast.IfExp():
                return self._one_or_other(node, scope, env, depth)
            case ast.NamedExpr():
                return self.evaluate(node.value, scope, env, depth + 1)
            case ast.Tuple():
                return self._items(node.elts, scope, env, depth)
            case ast.List():
                return Listed(self._items(node.elts, scope, env, depth))
            case ast.Dict():
                return self._dict(node, scope, env, depth)
            case ast.ListComp() | ast.GeneratorExp():
                return self._comprehension(node, scope, env, depth)
            case ast.Call():
                return calls.evaluate_call(self, node, scope, env, depth)
            case ast.Attribute():
                return self._attribute(node, scope, depth)
            case ast.BinOp():
                return arithmetic(
                    node.op,
                    self.evaluate(node.left, scope, env, depth + 1),
                    self.evaluate(node.right, scope, env, depth + 1),
                )
            case ast.UnaryOp(op=ast.USub()):
                value = self.evaluate(node.operand, scope, env, depth + 1)
                if isinstance(value, int):
                    return -value
                raise Opaque(reasons.EXPRESSION)
            case ast.Subscript():
                return self._subscript(node, scope, env, depth)
            case ast.Lambda():
                raise Opaque(reasons.NOT_TEXT)
            case _:
                raise Opaque(reasons.EXPRESSION)

    def text_of(self, node: ast.expr, scope: Scope) -> Spelled:
        """Like `evaluate`, for a text alone."""
        value = self.evaluate(node, scope)
        if isinstance(value, Spelled):
            return value
        raise Opaque(reasons.NOT_TEXT)

    def _constant(self, node: ast.Constant) -> Value:
        match node.value:
            case str() | bytes() as value:
                known = self._literals.get(node)
                if known is None:
                    known = self._literals[node] = literal(node, value, self.text)
                return known
            case int() if not isinstance(node.value, bool):
                return node.value
            case _:
                raise Opaque(reasons.NOT_TEXT)

    def _one_or_other(self, node: ast.IfExp, scope: Scope, env: Environment | None, depth: int) -> Value:
        with self.choices.aside():
            try:
                body = self.evaluate(node.body, scope, env, depth + 1)
                if same(body, self.evaluate(node.orelse, scope, env, depth + 1)):
                    return body
            except Opaque as opaque:
                if opaque.reason == reasons.TOO_DEEP:
                    raise
        if env:
            raise Opaque(reasons.EXPRESSION)
        return self.evaluate(self.branches.way(node, scope), scope, env, depth + 1)

    # names

    def origin(self, node: ast.Name | ast.Attribute, scope: Scope) -> Item | None:
        """What a loop's variable, a parameter or an attribute stands for in the row, call or class that is
        taken now; None for other names. Errors: `Opaque`."""
        if isinstance(node, ast.Attribute):
            if self.siblings is not None:
                value = self.siblings.attribute(node, scope, self.text.place(node))
                if isinstance(value, (Listed, dict)) and not self.names.attribute_unchanged(node.attr):
                    raise Opaque(reasons.CHANGED)
                if value is not None:
                    return Ready(value)
            return self.attributes.chosen(node, scope)
        owner = scope.find(node.id)
        if owner is not None and len(owner.bindings[node.id]) == 1:
            binding = owner.bindings[node.id][0]
            if binding.kind == "parameter" and owner.kind == "function":
                return self.helpers.argument(node.id, node, owner)
            if binding.kind == "import" and self.siblings is not None:
                return Ready(self._imported(binding, node, scope))
        elif owner is not None:
            row = self.branches.chosen(node, scope)
            if row is not None:
                return row
        return self.rows.chosen(node, scope)

    def _imported(self, binding: Binding, node: ast.Name, scope: Scope) -> Value:
        assert self.siblings is not None
        value = self.siblings.name(binding, self.text.place(node))
        if isinstance(value, (Listed, dict)) and not self.names.unchanged(node.id, scope):
            raise Opaque(reasons.CHANGED)
        if binding.scope.module is binding.scope and (self.index.dynamic or self.index.star_lines):
            raise Opaque(reasons.IMPORTED)
        return value

    def exported(self, name: str) -> Value:
        """What another file gets that imports `name` from this one. Errors: `Opaque`."""
        module = self.index.module
        values: list[Value] = []
        for expression, scope in self.names.owned(module, name):
            if isinstance(expression, MUTABLE) and not self.names.unchanged(name, module):
                raise Opaque(reasons.CHANGED)
            values.append(self.remembered(expression, scope, 0))
            if not same(values[0], values[-1]):
                raise Opaque(reasons.REASSIGNED)
        return values[0]

    def _definition(self, node: ast.Name, scope: Scope, depth: int) -> Value:
        item = self.origin(node, scope)
        if item is not None:
            value = self.rows.value(item, depth)
            if not self.kept.by_name(node.id, scope, value):
                raise Opaque(reasons.CHANGED)
            return value
        values: list[Value] = []
        definitions = self.names.definitions(node, scope)
        for expression, inner in definitions:
            if isinstance(expression, MUTABLE) and not self.names.unchanged(node.id, scope):
                raise Opaque(reasons.CHANGED)
            values.append(self.remembered(expression, inner, depth))
            if not same(values[0], values[-1]):
                raise Opaque(reasons.REASSIGNED)
        if not self.kept.by_name(node.id, scope, values[0]):
            raise Opaque(reasons.CHANGED)
        return values[0]

    def remembered(self, expression: ast.expr, scope: Scope, depth: int) -> Value:
        """Like `evaluate`, kept for the next time where no row of a table has a part in it."""
        known = self._known.get(expression)
        if known is None:
            if expression in self._active:
                raise Opaque(reasons.REASSIGNED)  # defined by itself
            self._active.add(expression)
            before = self.choices.consulted
            try:
                known = self.evaluate(expression, scope, None, depth + 1)
            except Opaque as opaque:
                if opaque.reason == reasons.TOO_DEEP:
                    raise
                known = opaque
            finally:
                self._active.discard(expression)
            if self.choices.consulted == before:
                self._known[expression] = known
        if isinstance(known, Opaque):
            raise Opaque(known.reason)
        return known

    def _attribute(self, node: ast.Attribute, scope: Scope, depth: int) -> Value:
        denoted = self.engine.denotes(node, scope)
        if denoted is not None:
            raise Opaque(reasons.NOT_TEXT)
        if node.attr == "pattern":
            made = self.names.maker(node.value, scope)
            if made is not None:
                argument = calls.pattern_argument(made[0])
                return self.remembered(argument, made[1], depth) if argument else self._fail()
        if isinstance(node.value, ast.Name) and node.attr in _STRING_MODULE:
            owner = scope.find(node.value.id)
            bindings = owner.bindings[node.value.id] if owner else []
            if bindings and all(b.module == "string" and b.member is None for b in bindings):
                return without_spelling(str(getattr(string, node.attr)), self.text.place(node))
        item = self.origin(node, scope)
        assert item is not None
        value = self.rows.value(item, depth)
        if not self.kept.as_attribute(node.attr, value):
            raise Opaque(reasons.CHANGED)
        return value

    def _fail(self) -> Value:
        raise Opaque(reasons.CALL)

    # putting together

    def _sum(self, node: ast.BinOp, scope: Scope, env: Environment | None, depth: int) -> Value:
        terms: list[ast.expr] = []
        rest: ast.expr = node
        while isinstance(rest, ast.BinOp) and isinstance(rest.op, ast.Add):  # leans to the left: no recursion
            terms.append(rest.right)
            rest = rest.left
        terms.append(rest)
        values = [self.evaluate(term, scope, env, depth + 1) for term in reversed(terms)]
        texts = [value for value in values if isinstance(value, Spelled)]
        if len(texts) == len(values):
            return join(texts)
        numbers = [value for value in values if isinstance(value, int)]
        if len(numbers) == len(values):
            return sum(numbers)
        sequences = [value for value in values if isinstance(value, tuple)]
        kinds = {type(value) for value in sequences}
        if len(sequences) == len(values) and len(kinds) == 1:
            return kinds.pop()(item for sequence in sequences for item in sequence)
        raise Opaque(reasons.MIXED)

    def _product(self, node: ast.BinOp, scope: Scope, env: Environment | None, depth: int) -> Value:
        left = self.evaluate(node.left, scope, env, depth + 1)
        right = self.evaluate(node.right, scope, env, depth + 1)
        match left, right:
            case (Spelled(), int()):
                return repeat(left, right)
            case (int(), Spelled()):
                return repeat(right, left)
            case (int(), int()):
                return small(left * right)
        raise Opaque(reasons.EXPRESSION)

    def _subscript(self, node: ast.Subscript, scope: Scope, env: Environment | None, depth: int) -> Value:
        base = self.evaluate(node.value, scope, env, depth + 1)
        match base, node.slice:
            case (Spelled() | tuple(), ast.Slice(step=None)):
                bounds = [
                    self._bound(part, scope, env, depth) for part in (node.slice.lower, node.slice.upper)
                ]
                start, end, _ = slice(*bounds).indices(len(base.value if isinstance(base, Spelled) else base))
                return (
                    cut(base, start, max(start, end))
                    if isinstance(base, Spelled)
                    else type(base)(base[start:end])
                )
            case (_, ast.Slice()):
                raise Opaque(reasons.ELEMENT)
        key = self.evaluate(node.slice, scope, env, depth + 1)
        try:
            match base, key:
                case (tuple(), int()):
                    return base[key]
                case (dict(), Spelled(value=str() as name)):
                    return base[name]
                case (Spelled(value=str() as text), int()):
                    at = range(len(text))[key]
                    return cut(base, at, at + 1)
        except LookupError:
            pass
        raise Opaque(reasons.ELEMENT)

    def _bound(self, node: ast.expr | None, scope: Scope, env: Environment | None, depth: int) -> int | None:
        value = self.evaluate(node, scope, env, depth + 1) if node is not None else None
        if value is None or isinstance(value, int):
            return value
        raise Opaque(reasons.ELEMENT)

    def _items(
        self, nodes: Sequence[ast.expr], scope: Scope, env: Environment | None, depth: int
    ) -> tuple[Value, ...]:
        items: list[Value] = []
        for node in nodes:
            if isinstance(node, ast.Starred):
                inner = self.evaluate(node.value, scope, env, depth + 1)
                if not isinstance(inner, tuple):
                    raise Opaque(reasons.EXPRESSION)
                items.extend(inner)
            else:
                items.append(self.evaluate(node, scope, env, depth + 1))
        return tuple(items)

    def _dict(self, node: ast.Dict, scope: Scope, env: Environment | None, depth: int) -> Value:
        entries: dict[str, Value] = {}
        for key, value in zip(node.keys, node.values, strict=True):
            if not (isinstance(key, ast.Constant) and isinstance(key.value, str)):
                raise Opaque(reasons.EXPRESSION)
            entries[key.value] = self.evaluate(value, scope, env, depth + 1)
        return entries

    def _comprehension(
        self, node: ast.ListComp | ast.GeneratorExp, scope: Scope, env: Environment | None, depth: int
    ) -> Value:
        generator = node.generators[0]
        if len(node.generators) != 1 or generator.ifs or generator.is_async:
            raise Opaque(reasons.EXPRESSION)
        if isinstance(generator.target, ast.Name):
            name = generator.target.id
            items = library.sequence(self, generator.iter, scope, env, depth)
            return Listed(
                self.evaluate(node.elt, scope, {**(env or {}), name: item}, depth + 1) for item in items
            )
        read = {each.id for each in ast.walk(node.elt) if isinstance(each, ast.Name)}
        targets = [
            each for each in ast.walk(generator.target) if isinstance(each, ast.Name) and each.id in read
        ]
        paths = {each.id: path_to(each, generator.target) for each in targets}
        made: list[Value] = []
        for row in self.rows.ordered(generator.iter, scope, env):
            inner = dict(env or {})
            for name, path in paths.items():
                if path is None:
                    raise Opaque(reasons.UNPACKED)
                inner[name] = self.rows.value(self.rows.part(row, path), depth)
            made.append(self.evaluate(node.elt, scope, inner, depth + 1))
        return Listed(made)
