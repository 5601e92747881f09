"""Constants that a file imports from other files of its project.

`Siblings.name(binding, place)` gives the value of `from .other import NAME`, `Siblings.attribute(...)` that
of `other.NAME` and of an attribute of an imported class. Of the other file only its text is read, and only
what it binds once, at the level of the module, to a constant counts. It may import the name in its turn.

The text of another file has no places in this one: as a whole it stands where it is used, so that findings
point at the use, and nothing is rewritten.

Limits: star imports are followed where one module alone can give the name; names that the other file gets by
loops are not told; a name of a package that its `__init__.py` binds goes before a module of that name.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from patlint.source import reasons
from patlint.source.decode import SourceError, decode, parse, split_lines
from patlint.source.disk import Files
from patlint.source.engine import Engine
from patlint.source.index import Index, build_index
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.scopes import Binding, Scope
from patlint.source.sites import Place
from patlint.source.spelled import Listed, Spelled, without_spelling
from patlint.source.values import Value

if TYPE_CHECKING:
    from patlint.source.constants import Constants


@dataclass(frozen=True, slots=True)
class Foreign:
    """Another file that was read; `name` None: the module itself."""

    path: str
    constants: Constants
    name: str | None = None


@dataclass(slots=True)
class Shared:
    """What all files that are read for one file have in common."""

    files: Files
    loaded: dict[str, Foreign | None] = field(default_factory=dict)
    active: set[tuple[str, str]] = field(default_factory=set)

    def release(self) -> None:
        for foreign in self.loaded.values():
            if foreign is not None:
                foreign.constants.index.release()
        self.loaded.clear()


class Siblings:
    """The imports of the file at `path`."""

    def __init__(self, index: Index, path: str, shared: Shared) -> None:
        self.index = index
        self.path = path
        self.shared = shared

    def name(self, binding: Binding, place: Place) -> Value:
        """The value of a name that an import binds. Errors: `Opaque`."""
        return moved(self._value(self._imported(binding)), place)

    def attribute(self, node: ast.Attribute, scope: Scope, place: Place) -> Value | None:
        """The value of an attribute of an imported module or class; None where it is none of these.

        Errors: `Opaque`.
        """
        base = self._denoted(node.value, scope)
        if base is None:
            return None
        if node.attr in self.index.stores:
            raise Opaque(reasons.ATTRIBUTE)
        if base.name is None:
            return moved(self._value(self._member(base, node.attr)), place)
        inner = ast.Attribute(ast.Name(base.name, ast.Load()), node.attr, ast.Load())
        ast.fix_missing_locations(inner)
        return moved(base.constants.evaluate(inner, base.constants.index.module), place)

    def _denoted(self, node: ast.expr, scope: Scope) -> Foreign | None:
        """The module or class of another file that an expression stands for."""
        if isinstance(node, ast.Attribute):
            base = self._denoted(node.value, scope)
            return self._member(base, node.attr) if base is not None and base.name is None else None
        if not isinstance(node, ast.Name):
            return None
        owner = scope.find(node.id)
        bindings = owner.bindings[node.id] if owner is not None else []
        if len(bindings) != 1 or bindings[0].kind != "import":
            return None
        found = self._imported(bindings[0])
        if found.name is not None:
            known = found.constants.index.module.bindings[found.name]
            if len(known) != 1 or not isinstance(known[0].node, ast.ClassDef):
                raise Opaque(reasons.ATTRIBUTE)
        return found

    def _imported(self, binding: Binding) -> Foreign:
        """What an import binds. Errors: `Opaque(reasons.IMPORTED)`."""
        dotted = binding.module or ""
        level = len(dotted) - len(dotted.lstrip("."))
        found = self._load(self.shared.files.find(self.path, dotted[level:], level))
        if binding.member is None:
            return found
        return self._member(found, binding.member)

    def _member(self, module: Foreign, name: str) -> Foreign:
        """A name of a module: where it is defined, through imports; or a module within a package."""
        key = module.path, name
        if key in self.shared.active or len(self.shared.active) > 20:
            raise Opaque(reasons.IMPORTED)
        self.shared.active.add(key)
        try:
            return self._of_module(module, name)
        finally:
            self.shared.active.discard(key)

    def _of_module(self, module: Foreign, name: str) -> Foreign:
        index = module.constants.index
        siblings = module.constants.siblings
        assert siblings is not None
        bindings = [each for each in index.module.bindings.get(name, ()) if each.kind != "deleted"]
        if len(bindings) == 1 and bindings[0].kind == "import":
            return siblings._imported(bindings[0])
        if bindings:
            return Foreign(module.path, module.constants, name)
        if index.module.stars:
            return siblings._starred(name)
        if module.path.endswith("__init__.py"):
            return self._load(self.shared.files.within(module.path[: -len("__init__.py")], [name]))
        raise Opaque(reasons.IMPORTED)

    def _starred(self, name: str) -> Foreign:
        """The one star import that gives `name`."""
        if name.startswith("_"):
            raise Opaque(reasons.IMPORTED)
        found: list[Foreign] = []
        for _, dotted in self.index.module.stars:
            level = len(dotted) - len(dotted.lstrip("."))
            module = self._load(self.shared.files.find(self.path, dotted[level:], level))
            if "__all__" in module.constants.index.module.bindings:
                raise Opaque(reasons.IMPORTED)
            if name in module.constants.index.module.bindings or module.constants.index.module.stars:
                found.append(self._member(module, name))
        if len(found) != 1:
            raise Opaque(reasons.IMPORTED)
        return found[0]

    def _value(self, found: Foreign) -> Value:
        if found.name is None:
            raise Opaque(reasons.NOT_TEXT)
        return found.constants.exported(found.name)

    def _load(self, path: str | None) -> Foreign:
        if path is None:
            raise Opaque(reasons.IMPORTED)
        if path not in self.shared.loaded:
            self.shared.loaded[path] = _read(path, self.shared)
        found = self.shared.loaded[path]
        if found is None:
            raise Opaque(reasons.IMPORTED)
        return found


def _read(path: str, shared: Shared) -> Foreign | None:
    from patlint.source.constants import Constants

    data = shared.files.read(path)
    if data is None:
        return None
    try:
        source = decode(data, path)
        index = build_index(parse(source.text, path))
    except SourceError:
        return None
    text = Text(split_lines(source.text))
    siblings = Siblings(index, path, shared)
    return Foreign(path, Constants(index, text, Engine(index), siblings))


def moved(value: Value, place: Place) -> Value:
    """A value of another file, for which `place` stands as a whole."""
    match value:
        case Spelled():
            return without_spelling(value.value, place) if value.value else Spelled(value.value, ())
        case Listed():
            return Listed(moved(each, place) for each in value)
        case tuple():
            return tuple(moved(each, place) for each in value)
        case dict():
            return {name: moved(each, place) for name, each in value.items()}
        case _:
            return value
