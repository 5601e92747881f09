"""Expressions whose value the text of the file tells: constants, and what is put together from them.

`Constants.evaluate(node, scope)` gives a `Spelled` text, an int, a tuple (any written-out sequence) or a dict
of them, or raises `Opaque` with the reason. A name counts only where everything that it may be bound to is
the same text; what is mutable counts only where nothing in the file could change it.

Values come from `ast`, spellings from libcst (`finder`), and where the two disagree about a literal the
value stays and its characters have no places of their own.
"""

from __future__ import annotations

import ast
import string
from collections.abc import Sequence
from typing import TypeAlias, Union

from patlint.source import calls, reasons
from patlint.source.engine import Engine
from patlint.source.finder import Hole, Unspelled, read_literal
from patlint.source.formatting import percent, replacement_field
from patlint.source.index import AttributeUse, Index
from patlint.source.literals import Run
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.scopes import Binding, Scope
from patlint.source.spelled import Spelled, join, repeat, without_spelling

Value: TypeAlias = Union[Spelled, int, tuple["Value", ...], dict[str, "Value"]]
Environment: TypeAlias = dict[str, Value]

DEEPEST = 80
"""Expressions inside expressions (chains of `+` count as one), names followed through names included."""
MOST_STEPS = 50_000
"""Expressions evaluated for one file's pattern. A table of 5,000 words takes 5,000."""
_STRING_MODULE = frozenset(
    "ascii_letters ascii_lowercase ascii_uppercase digits hexdigits octdigits punctuation whitespace printable".split()
)
_MUTABLE = (ast.List, ast.Dict, ast.Set, ast.ListComp)
_READING = frozenset({"join", "items", "keys", "values", "get", "copy", "index", "count"})
_HARMLESS = frozenset({"len", "sorted", "tuple", "list", "set", "frozenset", "map", "any", "all", "enumerate", "zip"})


class Constants:
    """The constants of one file."""

    def __init__(self, index: Index, text: Text, engine: Engine) -> None:
        self.index = index
        self.text = text
        self.engine = engine
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
                return self._joined(node, scope, env, depth)
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
                body = self.evaluate(node.body, scope, env, depth + 1)
                if _same(body, self.evaluate(node.orelse, scope, env, depth + 1)):
                    return body
                raise Opaque(reasons.EXPRESSION)
            case ast.NamedExpr():
                return self.evaluate(node.value, scope, env, depth + 1)
            case ast.Tuple() | ast.List():
                return self._items(node.elts, scope, env, depth)
            case ast.Dict():
                return self._dict(node, scope, env, depth)
            case ast.ListComp() | ast.GeneratorExp():
                return self._comprehension(node, scope, env, depth)
            case ast.Call():
                return calls.evaluate_call(self, node, scope, env, depth)
            case ast.Attribute():
                return self._attribute(node, scope, depth)
            case ast.UnaryOp(op=ast.USub()):
                value = self.evaluate(node.operand, scope, env, depth + 1)
                if isinstance(value, int):
                    return -value
                raise Opaque(reasons.EXPRESSION)
            case ast.Subscript():
                raise Opaque(reasons.ELEMENT)
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

    # literals

    def _constant(self, node: ast.Constant) -> Value:
        match node.value:
            case str() | bytes():
                known = self._literals.get(node)
                if known is None:
                    known = self._literals[node] = self._literal(node, node.value)
                return known
            case int():
                return int(node.value)
            case _:
                raise Opaque(reasons.NOT_TEXT)

    def _literal(self, node: ast.Constant, value: str | bytes) -> Spelled:
        try:
            parts = read_literal(self.text.segment(node), self.text.start(node))
        except Unspelled:
            return without_spelling(value, self.text.place(node))
        runs = tuple(part for part in parts if isinstance(part, Run))
        texts = [run.text for run in runs]
        joined = b"".join(texts) if isinstance(value, bytes) else "".join(texts)  # type: ignore[arg-type]
        if joined != value:
            return without_spelling(value, self.text.place(node))
        kept = tuple(run for run in runs if run.text)
        return Spelled(value, kept or runs[:1])

    def _joined(self, node: ast.JoinedStr, scope: Scope, env: Environment | None, depth: int) -> Spelled:
        place = self.text.place(node)
        said: list[str | Spelled] = [""]  # texts and fields in turn
        for part in node.values:
            if isinstance(part, ast.Constant):
                text = said[-1]
                assert isinstance(text, str)
                said[-1] = text + str(part.value)
            else:
                assert isinstance(part, ast.FormattedValue)
                spec = _constant_spec(part.format_spec)
                value = self.evaluate(part.value, scope, env, depth + 1)
                at_field = without_spelling("x", place)
                said += [replacement_field(at_field, value, part.conversion, spec), ""]
        try:
            parts = read_literal(self.text.segment(node), self.text.start(node))
        except Unspelled:
            parts = []
        runs: list[list[Run]] = [[]]
        holes: list[Hole] = []
        for spelled in parts:
            if isinstance(spelled, Hole):
                holes.append(spelled)
                runs.append([])
            else:
                runs[-1].append(spelled)
        texts = said[::2]
        told = ["".join(str(run.text) for run in group) for group in runs]
        if told != texts:
            return without_spelling("".join(t if isinstance(t, str) else str(t.value) for t in said), place)
        result: list[Spelled] = []
        for number, group in enumerate(runs):
            result.append(Spelled(told[number], tuple(run for run in group if run.text)))
            if number < len(holes):
                field = said[2 * number + 1]
                assert isinstance(field, Spelled)
                result.append(self._in_hole(node.values, number, field, holes[number]))
        return join(result)

    def _in_hole(self, values: Sequence[ast.expr], number: int, field: Spelled, hole: Hole) -> Spelled:
        """A field's text: with its own places where it comes from a name, else standing at its braces."""
        expression = [part for part in values if isinstance(part, ast.FormattedValue)][number].value
        named = isinstance(expression, (ast.Name, ast.Attribute))
        if named and all(run.places for run in field.runs):
            return field
        return without_spelling(field.value, hole.place) if field.value else field

    # names

    def definitions(self, node: ast.Name | ast.Attribute, scope: Scope) -> list[tuple[ast.expr, Scope]]:
        """Every expression that the name may stand for, with the scope to read it in.

        Errors: `Opaque` where one of them is not known, or not a plain assignment.
        """
        if isinstance(node, ast.Attribute):
            return self._class_attribute(node, scope)
        owner = scope.find(node.id)
        if owner is None:
            raise Opaque(reasons.IMPORTED if self.index.star_lines else reasons.UNBOUND)
        return self._owned(owner, node.id)

    def _owned(self, owner: Scope, name: str) -> list[tuple[ast.expr, Scope]]:
        bindings = owner.bindings[name]
        if not bindings:
            raise Opaque(reasons.UNBOUND)
        for binding in bindings:
            reason = _KIND_REASONS.get(binding.kind)
            if reason:
                raise Opaque(reason if len(bindings) == 1 else reasons.REASSIGNED)
        if owner.kind == "module":
            self._check_module_name(bindings)
        if owner.kind == "class" and name in self.index.module.bindings:
            raise Opaque(reasons.REASSIGNED)  # which of the two is read depends on the order
        return [(binding.value, binding.scope) for binding in bindings if binding.value is not None]

    def _check_module_name(self, bindings: list[Binding]) -> None:
        if self.index.dynamic:
            raise Opaque(reasons.DYNAMIC)
        for binding in bindings:
            for line in self.index.star_lines:
                if line > binding.line or binding.scope.kind not in ("module", "class"):
                    raise Opaque(reasons.STAR_IMPORT)

    def _definition(self, node: ast.Name, scope: Scope, depth: int) -> Value:
        values: list[Value] = []
        definitions = self.definitions(node, scope)
        for expression, inner in definitions:
            if isinstance(expression, _MUTABLE) and not self._unchanged(node.id, scope):
                raise Opaque(reasons.ELEMENT)
            values.append(self._remembered(expression, inner, depth))
            if not _same(values[0], values[-1]):
                raise Opaque(reasons.REASSIGNED)
        return values[0]

    def _remembered(self, expression: ast.expr, scope: Scope, depth: int) -> Value:
        known = self._known.get(expression)
        if known is None:
            if expression in self._active:
                raise Opaque(reasons.REASSIGNED)  # defined by itself
            self._active.add(expression)
            try:
                known = self.evaluate(expression, scope, None, depth + 1)
            except Opaque as opaque:
                if opaque.reason == reasons.TOO_DEEP:
                    raise
                known = opaque
            finally:
                self._active.discard(expression)
            self._known[expression] = known
        if isinstance(known, Opaque):
            raise Opaque(known.reason)
        return known

    def _unchanged(self, name: str, scope: Scope) -> bool:
        """No read of the name in the file could change the list or dict that it stands for."""
        owner = scope.find(name)
        assert owner is not None
        parents = self.index.parents
        for read, _ in owner.reads(name):
            parent = parents.get(read)
            match parent:
                case ast.Attribute() if parent.attr in _READING:
                    continue
                case ast.Call(func=ast.Attribute(attr="join" | "escape")):
                    continue
                case ast.Call(func=ast.Name(id=function)) if function in _HARMLESS:
                    continue
                case ast.comprehension() | ast.For() | ast.Compare() | ast.BinOp() | ast.Starred():
                    continue
                case ast.Subscript(ctx=ast.Load()) if isinstance(parents.get(parent), ast.expr):
                    continue
                case _:
                    return False
        return True

    def _attribute(self, node: ast.Attribute, scope: Scope, depth: int) -> Value:
        denoted = self.engine.denotes(node, scope)
        if denoted is not None:
            raise Opaque(reasons.NOT_TEXT)
        if node.attr == "pattern":
            made = self.maker(node.value, scope)
            if made is not None:
                argument = calls.pattern_argument(made[0])
                return self._remembered(argument, made[1], depth) if argument else self._fail()
        if isinstance(node.value, ast.Name) and node.attr in _STRING_MODULE:
            owner = scope.find(node.value.id)
            bindings = owner.bindings[node.value.id] if owner else []
            if bindings and all(b.module == "string" and b.member is None for b in bindings):
                return without_spelling(str(getattr(string, node.attr)), self.text.place(node))
        definitions = self._class_attribute(node, scope)
        values = [self._remembered(expression, inner, depth) for expression, inner in definitions]
        if all(_same(values[0], value) for value in values):
            return values[0]
        raise Opaque(reasons.REASSIGNED)

    def _fail(self) -> Value:
        raise Opaque(reasons.CALL)

    def maker(self, node: ast.expr, scope: Scope) -> tuple[ast.Call, Scope] | None:
        """The one call of `re.compile` that a name or attribute stands for, if it is that."""
        try:
            match node:
                case ast.Call():
                    return (node, scope) if self.engine.denotes(node.func, scope) == "re.compile" else None
                case ast.Name():
                    definitions = self.definitions(node, scope)
                case ast.Attribute():
                    definitions = self._self_attribute(node, scope) or self._class_attribute(node, scope)
                case _:
                    return None
        except Opaque:
            return None
        made = [(value, inner) for value, inner in definitions if not _is_none(value)]
        if len(made) == 1 and isinstance(made[0][0], ast.Call):
            call, inner = made[0]
            assert isinstance(call, ast.Call)
            try:
                if self.engine.denotes(call.func, inner) == "re.compile":
                    return call, inner
            except Opaque:
                return None
        return None

    def _self_attribute(self, node: ast.Attribute, scope: Scope) -> list[tuple[ast.expr, Scope]]:
        """What the class stores in an attribute of its own object, and nothing else stores there."""
        owner = self.class_of(node.value, scope)
        if owner is None:
            return []
        found = [(b.value, b.scope) for b in owner.bindings.get(node.attr, ()) if b.value is not None]
        for use in self.index.stores.get(node.attr, ()):
            if use.value is None or self.class_of(use.node.value, use.scope) is not owner:
                return []
            found.append((use.value, use.scope))
        return found

    def class_of(self, node: ast.expr, scope: Scope) -> Scope | None:
        """The class whose object (`self`), or which itself (`cls`, its name), `node` is."""
        match node:
            case ast.Name():
                owner = scope.find(node.id)
                if owner is None:
                    return None
                bindings = owner.bindings[node.id]
                if len(bindings) != 1:
                    return None
                if isinstance(bindings[0].node, ast.ClassDef):
                    return self.index.classes.get(bindings[0].node)
                function = owner.node
                if not isinstance(function, (ast.FunctionDef, ast.AsyncFunctionDef)):
                    return None
                arguments = [*function.args.posonlyargs, *function.args.args]
                if not arguments or arguments[0].arg != node.id or owner.parent is None:
                    return None
                static = any(isinstance(d, ast.Name) and d.id == "staticmethod" for d in function.decorator_list)
                return owner.parent if owner.parent.kind == "class" and not static else None
            case ast.Attribute(attr="__class__"):
                return self.class_of(node.value, scope)
            case ast.Call(func=ast.Name(id="type"), args=[argument]):
                return self.class_of(argument, scope)
            case _:
                return None

    def _class_attribute(self, node: ast.Attribute, scope: Scope) -> list[tuple[ast.expr, Scope]]:
        """`Name.attribute` of a plain class of this file, or a private `self.__attribute`."""
        owner = self.class_of(node.value, scope)
        if owner is None:
            raise Opaque(reasons.ATTRIBUTE)
        assert isinstance(owner.node, ast.ClassDef)
        definition = owner.node
        named = isinstance(node.value, ast.Name) and node.value.id == definition.name
        private = node.attr.startswith("__") and not node.attr.endswith("__")
        bases = [base for base in definition.bases if not (isinstance(base, ast.Name) and base.id == "object")]
        if not (named and not bases and not definition.decorator_list or private) or definition.keywords:
            raise Opaque(reasons.ATTRIBUTE)
        stores: list[AttributeUse] = self.index.stores.get(node.attr, [])
        if stores or node.attr not in owner.bindings:
            raise Opaque(reasons.ATTRIBUTE)
        for binding in owner.bindings[node.attr]:
            if binding.kind != "value":
                raise Opaque(reasons.ATTRIBUTE)
        return [(b.value, b.scope) for b in owner.bindings[node.attr] if b.value is not None]

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
        if len(sequences) == len(values):
            return tuple(item for sequence in sequences for item in sequence)
        raise Opaque(reasons.MIXED)

    def _product(self, node: ast.BinOp, scope: Scope, env: Environment | None, depth: int) -> Value:
        left = self.evaluate(node.left, scope, env, depth + 1)
        right = self.evaluate(node.right, scope, env, depth + 1)
        match left, right:
            case (Spelled(), int()):
                return repeat(left, right)
            case (int(), Spelled()):
                return repeat(right, left)
        raise Opaque(reasons.EXPRESSION)

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
        for key, value in zip(node.keys, node.values):
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
        if not isinstance(generator.target, ast.Name):
            raise Opaque(reasons.EXPRESSION)
        items = self.evaluate(generator.iter, scope, env, depth + 1)
        if not isinstance(items, tuple):
            raise Opaque(reasons.EXPRESSION)
        name = generator.target.id
        return tuple(
            self.evaluate(node.elt, scope, {**(env or {}), name: item}, depth + 1) for item in items
        )


_KIND_REASONS = {
    "import": reasons.IMPORTED,
    "parameter": reasons.PARAMETER,
    "loop": reasons.LOOP_VARIABLE,
    "augmented": reasons.REASSIGNED,
    "deleted": reasons.REASSIGNED,
    "definition": reasons.NOT_TEXT,
    "unpacked": reasons.UNPACKED,
}


def _same(left: Value, right: Value) -> bool:
    match left, right:
        case (Spelled(), Spelled()):
            return type(left.value) is type(right.value) and left.value == right.value
        case (tuple(), tuple()):
            return len(left) == len(right) and all(map(_same, left, right))
        case (int(), int()):
            return left == right
    return False


def _is_none(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value is None


def _constant_spec(spec: ast.expr | None) -> str:
    if spec is None:
        return ""
    assert isinstance(spec, ast.JoinedStr)
    if not all(isinstance(part, ast.Constant) for part in spec.values):
        raise Opaque(reasons.FORMATTED)
    return "".join(str(part.value) for part in spec.values if isinstance(part, ast.Constant))
