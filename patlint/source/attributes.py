"""Attributes of classes and of their objects -> the expressions that they may stand for.

`Attributes.chosen(node, scope)` answers for `Name.attribute`, `self.attribute` and `cls.attribute`: what the
body of the class binds, or one of the classes of this file that it is derived from; for an object whose class
is derived further in this file, one text for each of these classes (`choices`), since the call in the base
class is reached with all of them. An attribute that only `__init__` sets, once, counts as well.

Sources: Python language reference, "Custom classes"; M. Simionato, The Python 2.3 Method Resolution Order,
for the cases that are given up.

Limits: an attribute that is set anywhere else, or may be by `setattr`, `vars` or `__dict__`, is not followed, nor is
one under a test of itself. That `setattr` with an unknown object and an unknown name could mean it is not
thought of, nor are classes derived in other files. Fields of classes with decorators and annotated fields of
classes with unknown bases are set when an object is made; members of an enumeration are no texts.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator
from typing import TYPE_CHECKING

from patlint.source import reasons
from patlint.source.index import AttributeUse, Index
from patlint.source.names import MUTABLE
from patlint.source.reasons import Opaque
from patlint.source.rows import Row
from patlint.source.scopes import Binding, Scope

if TYPE_CHECKING:
    from patlint.source.constants import Constants

_MOST_CLASSES = 300
_DEEPEST = 20


class Attributes:
    """The classes of one file."""

    def __init__(self, constants: Constants, index: Index) -> None:
        self.constants = constants
        self.index = index
        self._derived: dict[Scope, list[Scope]] | None = None
        self._setters: list[tuple[AttributeUse | None, str | None]] | None = None

    def chosen(self, node: ast.Attribute, scope: Scope) -> Row:
        """Errors: `Opaque`."""
        names = self.constants.names
        owner = names.class_of(node.value, scope)
        if owner is None or not isinstance(owner.node, ast.ClassDef) or _is_special(node.attr):
            raise Opaque(reasons.ATTRIBUTE)
        named = isinstance(node.value, ast.Name) and node.value.id == owner.node.name
        private = node.attr.startswith("__")
        related = [owner] if named or private else self._family(owner)
        self._check_untested(node)
        stores = [use for use in self.index.stores.get(node.attr, ()) if self._concerns(use, related)]
        if self._may_be_set_by_name(node.attr, related):
            raise Opaque(reasons.ATTRIBUTE)
        if stores:
            return self._of_init(node.attr, stores, related, named)
        found = [self._bound(each, node.attr, named or private) for each in related]
        self._skip_place_holders(found)
        if not any(found):
            raise Opaque(reasons.ATTRIBUTE)
        present = [each for each in found if each is not None]
        if len({id(each) for each in present}) > 1 or len(present) < len(found):
            row = self._of_class(owner, found, scope, related)  # a class that has none is left out
        else:
            row = present[0]
        if isinstance(row, Opaque):
            raise row
        assert row.value is not None
        if isinstance(row.value, MUTABLE) and not names.attribute_unchanged(node.attr):
            raise Opaque(reasons.CHANGED)
        return Row(row.value, row.scope)

    def _of_class(
        self, owner: Scope, found: list[Binding | Opaque | None], scope: Scope, related: list[Scope]
    ) -> Binding | Opaque:
        """What the class has that is taken now; those that never come to the call have none."""
        method = _method(scope, owner)
        reaching = [
            number
            for number, each in enumerate(related)
            if each is owner or method is None or not self._overrides(each, owner, method)
        ]
        number = self.constants.choices.take(owner, len(reaching), reasons.ATTRIBUTE)
        binding = found[reaching[number]]
        return Opaque(reasons.ABSENT) if binding is None else binding

    def _skip_place_holders(self, found: list[Binding | Opaque | None]) -> None:
        """None, and an empty text that derived classes write over, say "to be given by a derived class"."""
        distinct = {id(each) for each in found if each is not None}
        for number, each in enumerate(found):
            if isinstance(each, Binding) and isinstance(each.value, ast.Constant):
                value = each.value.value
                if value is None or (value in ("", b"") and len(distinct) > 1):
                    found[number] = None

    def _of_init(self, name: str, stores: list[AttributeUse], related: list[Scope], named: bool) -> Row:
        """An attribute that `__init__` sets, once, and nothing else does."""
        use = stores[0]
        function = use.scope.function()
        if (
            len(stores) > 1
            or use.value is None
            or named
            or function is None
            or isinstance(use.value, MUTABLE)
        ):
            raise Opaque(reasons.ATTRIBUTE)
        if not isinstance(function.node, ast.FunctionDef) or function.node.name != "__init__":
            raise Opaque(reasons.ATTRIBUTE)
        if not isinstance(self.index.parents.get(self.index.parents[use.node]), ast.FunctionDef):
            raise Opaque(reasons.ATTRIBUTE)  # under a condition
        owner = self.constants.names.class_of(use.node.value, use.scope)
        for each in {*related, *(self._ancestors(related[0]) or ())}:
            if any(not binding.is_none for binding in each.bindings.get(name, ())):
                raise Opaque(reasons.ATTRIBUTE)
        if owner is None or owner not in (self._ancestors(related[0]) or ()):
            raise Opaque(reasons.ATTRIBUTE)
        return Row(use.value, use.scope)

    def _bound(self, owner: Scope, name: str, alone: bool) -> Binding | Opaque | None:
        """What `owner` or the nearest class above binds `name` to; None where no known class does."""
        try:
            definer = self._definer(owner, name, 0)
        except Opaque as opaque:
            return opaque
        if definer is None:
            return None
        bindings = [binding for binding in definer.bindings[name] if binding.kind != "deleted"]
        if len(bindings) != 1 or bindings[0].kind != "value":
            return Opaque(reasons.ATTRIBUTE)
        assert isinstance(definer.node, ast.ClassDef)
        if definer.node.decorator_list or _is_enumeration(definer.node):
            return Opaque(reasons.ATTRIBUTE)
        known = self._ancestors(owner) is not None
        if not known and not alone and isinstance(bindings[0].node, ast.AnnAssign):
            return Opaque(reasons.ATTRIBUTE)
        return bindings[0]

    def _definer(self, owner: Scope, name: str, depth: int) -> Scope | None:
        """The class whose body gives `owner` its `name`. Errors: `Opaque` where that cannot be told."""
        if depth > _DEEPEST:
            raise Opaque(reasons.TOO_DEEP)
        if owner.bindings.get(name):
            return owner
        bases = self._bases(owner)
        if bases is None:
            raise Opaque(reasons.ATTRIBUTE)
        found = [each for base in bases if (each := self._definer(base, name, depth + 1)) is not None]
        if len(set(found)) > 1 and any(found[0] in (self._ancestors(each) or ()) for each in found[1:]):
            raise Opaque(reasons.ATTRIBUTE)  # what is derived from the first one goes before it
        return found[0] if found else None

    def _bases(self, owner: Scope) -> list[Scope] | None:
        """The classes of this file that a class is derived from; None where one is unknown."""
        node = owner.node
        assert isinstance(node, ast.ClassDef)
        found: list[Scope] = []
        for base in node.bases:
            if isinstance(base, ast.Name) and base.id == "object":
                continue
            known = self.constants.names.class_of(base, owner.parent or owner)
            if known is None or known is owner:
                return None
            found.append(known)
        return found

    def _ancestors(self, owner: Scope) -> set[Scope] | None:
        """A class and all that it is derived from; None where one is unknown."""
        found: set[Scope] = set()
        stack = [owner]
        while stack:
            each = stack.pop()
            if each in found:
                continue
            found.add(each)
            bases = self._bases(each)
            if bases is None:
                return None
            stack.extend(bases)
        return found

    def _family(self, owner: Scope) -> list[Scope]:
        """A class and those of this file that are derived from it."""
        if self._derived is None:
            self._derived = {}
            for scope in self.index.classes.values():
                assert isinstance(scope.node, ast.ClassDef)
                for base in scope.node.bases:
                    known = self.constants.names.class_of(base, scope.parent or scope)
                    if known is not None and known is not scope:
                        self._derived.setdefault(known, []).append(scope)
        found = [owner]
        for each in found:
            found += [scope for scope in self._derived.get(each, ()) if scope not in found]
            if len(found) > _MOST_CLASSES:
                raise Opaque(reasons.TOO_MANY)
        return found

    def _overrides(self, derived: Scope, owner: Scope, method: str) -> bool:
        """Whether a class between `derived` and `owner` has a method of its own in the place of `method`."""
        try:
            return self._definer(derived, method, 0) is not owner
        except Opaque:
            return False

    def _concerns(self, use: AttributeUse, related: list[Scope]) -> bool:
        """Whether an attribute that is set may be that of one of the classes or their objects."""
        owner = self.constants.names.class_of(use.node.value, use.scope)
        if owner is None or owner in related:
            return True
        above = self._ancestors(related[0])
        return above is None or owner in above

    def _may_be_set_by_name(self, name: str, related: list[Scope]) -> bool:
        """Whether `setattr` or a `__dict__` may set the attribute on one of the classes or their objects."""
        if self._setters is None:
            self._setters = list(self._find_setters())
        return any(
            given in (None, name) and (where is None or self._concerns(where, related))
            for where, given in self._setters
        )

    def _find_setters(self) -> Iterator[tuple[AttributeUse | None, str | None]]:
        """What may be set by name: on which object, None for any; by which name, None for any."""
        for use in self.index.reads.get("__dict__", ()):
            yield use, None
        for use in self.index.reads.get("__setattr__", ()):
            match self.index.parents.get(use.node):
                case ast.Call(func=function, args=[target, ast.Constant(value=str(given)), _]):
                    if function is use.node:  # object.__setattr__(target, "name", value)
                        yield AttributeUse(ast.Attribute(target, "", ast.Load()), use.scope), given
        for scope in self.index.scopes:
            for read in scope.loads.get("vars", ()):
                match self.index.parents.get(read):
                    case ast.Call(func=function, args=[target]) if function is read:
                        if self._is_stored_into(read):
                            yield AttributeUse(ast.Attribute(target, "", ast.Load()), scope), None
            for read in scope.loads.get("setattr", ()):
                match self.index.parents.get(read):
                    case ast.Call(func=function, args=[target, name, *_]) if function is read:
                        known = isinstance(name, ast.Constant) and isinstance(name.value, str)
                        if not known and self.constants.names.class_of(target, scope) is None:
                            continue  # some object and some name
                        use = AttributeUse(ast.Attribute(target, "", ast.Load()), scope)
                        yield use, str(name.value) if known else None  # type: ignore[attr-defined]
                    case _:
                        yield None, None

    def _is_stored_into(self, read: ast.AST) -> bool:
        """Whether the dict that `vars(...)` gives is written to on the spot; `read` is the name `vars`."""
        match self.index.parents.get(self.index.parents[read]):
            case ast.Subscript(ctx=ast.Store() | ast.Del()):
                return True
            case ast.Attribute(attr="update" | "setdefault" | "pop" | "__setitem__"):
                return True
            case _:
                return False

    def _check_untested(self, node: ast.Attribute) -> None:
        """Where the text itself decides whether the call is reached, not every text may reach it."""
        below: ast.AST = node
        current = self.index.parents.get(node)
        while current is not None and not isinstance(current, (ast.FunctionDef, ast.ClassDef, ast.Module)):
            tests: list[ast.expr] = []
            if isinstance(current, (ast.If, ast.IfExp, ast.While)) and below is not current.test:
                tests = [current.test]
            elif isinstance(current, ast.BoolOp):
                tests = [each for each in current.values if each is not below]
            for test in tests:
                if any(isinstance(each, ast.Attribute) and each.attr == node.attr for each in ast.walk(test)):
                    raise Opaque(reasons.ATTRIBUTE)
            below, current = current, self.index.parents.get(current)


def _method(scope: Scope, owner: Scope) -> str | None:
    """The name of the method of `owner` that `scope` stands in."""
    current: Scope | None = scope
    while current is not None:
        if current.parent is owner and isinstance(current.node, (ast.FunctionDef, ast.AsyncFunctionDef)):
            return current.node.name
        current = current.parent
    return None


def _is_enumeration(node: ast.ClassDef) -> bool:
    for base in node.bases:
        last = base.attr if isinstance(base, ast.Attribute) else getattr(base, "id", "")
        if last.endswith(("Enum", "Flag")):
            return True
    return False


def _is_special(name: str) -> bool:
    return name.startswith("__") and name.endswith("__")
