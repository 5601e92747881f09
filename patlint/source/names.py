"""Names and attributes of one file -> the expressions that they may stand for.

`Names.definitions(node, scope)` gives every expression that a name may be bound to, or is `Opaque` with the
reason why they are not all known. A name assigned several times has one value where straight-line code
tells which assignment a read gets it from (`reaching`). `del` takes a value away and gives none: it does not
count.

Limits: attributes count only where nothing outside of the file could change them: those of a plain class of
the file read through its name, and private ones (`self.__name`). Attributes set from other files are not
thought of.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Iterable

from patlint.source import reasons
from patlint.source.engine import Engine
from patlint.source.index import AttributeUse, Index
from patlint.source.places import Text
from patlint.source.reaching import reaching_value
from patlint.source.reasons import Opaque
from patlint.source.scopes import Binding, Scope

_READING = frozenset({"join", "items", "keys", "values", "get", "copy", "index", "count"})
_HARMLESS = frozenset(
    {"len", "sorted", "tuple", "list", "set", "frozenset", "map", "any", "all", "enumerate", "zip"}
)
MUTABLE = (ast.List, ast.Dict, ast.Set, ast.ListComp, ast.SetComp, ast.DictComp)
"""Displays whose value may change after they are written."""
_KIND_REASONS = {
    "import": reasons.IMPORTED,
    "parameter": reasons.PARAMETER,
    "loop": reasons.LOOP_VARIABLE,
    "augmented": reasons.REASSIGNED,
    "definition": reasons.NOT_TEXT,
    "unpacked": reasons.UNPACKED,
}


class Names:
    """The names of one file."""

    def __init__(self, index: Index, engine: Engine, text: Text) -> None:
        self.index = index
        self.engine = engine
        self.text = text
        self._quoted: dict[str, bool] = {}

    def definitions(self, node: ast.Name | ast.Attribute, scope: Scope) -> list[tuple[ast.expr, Scope]]:
        """Every expression that the name may stand for, with the scope to read it in.

        Errors: `Opaque` where one of them is not known, or not a plain assignment.
        """
        if isinstance(node, ast.Attribute):
            return self.class_attribute(node, scope)
        owner = scope.find(node.id)
        if owner is None:
            raise Opaque(reasons.IMPORTED if self.index.star_lines else reasons.UNBOUND)
        if owner is scope and len(owner.bindings[node.id]) > 1:
            value = reaching_value(node, scope, self.index)
            if value is not None and not (
                owner.kind == "module" and (self.index.dynamic or self.index.star_lines)
            ):
                return [(value, scope)]
        return self.owned(owner, node.id)

    def owned(self, owner: Scope, name: str) -> list[tuple[ast.expr, Scope]]:
        """Every expression that the `name` of `owner` may stand for, whoever reads it. Errors: `Opaque`."""
        bindings = [binding for binding in owner.bindings[name] if binding.kind != "deleted"]
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

    def is_private(self, name: str) -> bool:
        """Whether a name is taken for known in this file alone: by its first letter, and not spelled in a text."""
        if not name.startswith("_") or (name.startswith("__") and name.endswith("__")):
            return False
        if name not in self._quoted:
            # Spelled in a text, whole or as its beginning (f"_{kind}"), it may be reached by getattr.
            heads = "|".join(re.escape(name[:end]) for end in range(1, len(name)))
            spelled = rf"""["'](?:{re.escape(name)}["']|(?:{heads})(?:\{{|["']\s*[+%]))"""
            self._quoted[name] = re.search(spelled, "".join(self.text.lines)) is not None
        return not self._quoted[name]

    def unchanged(self, name: str, scope: Scope) -> bool:
        """No read of the name in the file could change the list or dict that it stands for."""
        owner = scope.find(name)
        assert owner is not None
        return self._harmless(read for read, _ in owner.reads(name))

    def attribute_unchanged(self, name: str) -> bool:
        """The same for an attribute, whatever object it is read of."""
        return self._harmless(use.node for use in self.index.reads.get(name, ()))

    def rows_unchanged(self, name: str, scope: Scope, display: ast.expr) -> bool:
        """No read of the name could change a list or dict within `display`, which it stands for."""
        owner = scope.find(name)
        assert owner is not None
        for read, inner in owner.reads(name):
            parent: ast.AST | None = read
            while isinstance(parent, (ast.expr, ast.keyword)) and not isinstance(parent, ast.Compare):
                parent = self.index.parents.get(parent)
            if isinstance(parent, ast.Compare):
                continue
            if not isinstance(parent, (ast.For, ast.comprehension)):
                return False
            for each in ast.walk(parent.target):
                if isinstance(each, ast.Name) and _may_hold_mutable(each, parent, read, display):
                    if isinstance(parent, ast.comprehension):
                        inner = self.comprehension_scope(parent, inner)
                    if not self.unchanged(each.id, inner):
                        return False
        return True

    def comprehension_scope(self, generator: ast.comprehension, scope: Scope) -> Scope:
        """The scope of the comprehension that `generator` is a part of, which stands in `scope`."""
        node = self.index.parents.get(generator)
        return next((child for child in scope.children if child.node is node), scope)

    def _harmless(self, reads: Iterable[ast.expr]) -> bool:
        parents = self.index.parents
        for read in reads:
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

    def maker(self, node: ast.expr, scope: Scope) -> tuple[ast.Call, Scope] | None:
        """The one call of `re.compile` that a name or attribute stands for, if it is that."""
        try:
            match node:
                case ast.Call():
                    return (node, scope) if self.engine.denotes(node.func, scope) == "re.compile" else None
                case ast.Name():
                    definitions = self.definitions(node, scope)
                case ast.Attribute():
                    definitions = self._self_attribute(node, scope) or self.class_attribute(node, scope)
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
                static = any(
                    isinstance(d, ast.Name) and d.id == "staticmethod" for d in function.decorator_list
                )
                return owner.parent if owner.parent.kind == "class" and not static else None
            case ast.Attribute(attr="__class__"):
                return self.class_of(node.value, scope)
            case ast.Call(func=ast.Name(id="type"), args=[argument]):
                return self.class_of(argument, scope)
            case _:
                return None

    def class_attribute(self, node: ast.Attribute, scope: Scope) -> list[tuple[ast.expr, Scope]]:
        """`Name.attribute` of a plain class of this file, or a private `self.__attribute`."""
        owner = self.class_of(node.value, scope)
        if owner is None:
            raise Opaque(reasons.ATTRIBUTE)
        assert isinstance(owner.node, ast.ClassDef)
        definition = owner.node
        named = isinstance(node.value, ast.Name) and node.value.id == definition.name
        private = node.attr.startswith("__") and not node.attr.endswith("__")
        bases = [
            base for base in definition.bases if not (isinstance(base, ast.Name) and base.id == "object")
        ]
        if not (named and not bases and not definition.decorator_list or private) or definition.keywords:
            raise Opaque(reasons.ATTRIBUTE)
        stores: list[AttributeUse] = self.index.stores.get(node.attr, [])
        if stores or node.attr not in owner.bindings:
            raise Opaque(reasons.ATTRIBUTE)
        for binding in owner.bindings[node.attr]:
            if binding.kind != "value":
                raise Opaque(reasons.ATTRIBUTE)
        return [(b.value, b.scope) for b in owner.bindings[node.attr] if b.value is not None]


def _may_hold_mutable(
    name: ast.Name, loop: ast.For | ast.comprehension, read: ast.Name, display: ast.expr
) -> bool:
    """Whether a name in the head of a loop over `display` may get one of its inner lists or dicts."""
    path = path_to(name, loop.target)
    if path is None or loop.iter is not read or not isinstance(display, (ast.List, ast.Tuple)):
        return True
    for row in display.elts:
        part = row
        for index in path:
            if not isinstance(part, (ast.List, ast.Tuple)) or index >= len(part.elts):
                break
            part = part.elts[index]
        if any(isinstance(each, MUTABLE) for each in ast.walk(part)):
            return True
    return False


def path_to(name: ast.AST, target: ast.expr) -> tuple[int, ...] | None:
    """Where `name` stands in the targets of a loop: () for the target itself; None beside or after a star."""
    if target is name:
        return ()
    if isinstance(target, (ast.Tuple, ast.List)):
        for number, each in enumerate(target.elts):
            if isinstance(each, ast.Starred):
                return None
            found = path_to(name, each)
            if found is not None:
                return (number, *found)
    return None


def _is_none(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value is None
