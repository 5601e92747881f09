"""The names of a file -> which of its calls are which sinks, and which argument of a call a sink takes.

`SinkNames.calls()` gives each call beside its `Sink`: by a qualified name that the file imports, by the name of a
method of whatever object, and by what a `with` statement binds. `qualified(node, scope)` is the name behind an
expression, also of the base of a class. `pick(call, where)` is the argument, and says whether a star hides it.

>>> pick(ast.parse("expect(text, *more)", mode="eval").body, (1, "pattern"))
(None, True)

Limits: functions that are kept under another name or applied in part are not seen; a method is told by its
name, by what the file imports, and by not being one that the file writes itself.
"""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator
from typing import TypeAlias

from patlint.source.index import Index
from patlint.source.names import Names
from patlint.source.places import Text
from patlint.source.scopes import Binding, Scope
from patlint.source.sinks import Sink, SinkTable, Where

Found: TypeAlias = tuple[ast.Call, Scope, Sink]


class SinkNames:
    """The sinks of one file by their names."""

    def __init__(self, index: Index, text: Text, bound: Names, path: str, table: SinkTable) -> None:
        self._index = index
        self._text = text
        self._bound = bound
        self._table = table
        self._package = [part for part in re.split(r"[/\\]", path)[:-1] if part]
        self._imported: dict[str, bool] = {}

    def calls(self) -> Iterator[Found]:
        """Every call of a sink; one call may be of several."""
        yield from self._called()
        for attribute, several in self._table.methods.items():
            for use in self._index.reads.get(attribute, ()):
                call = self._index.parents.get(use.node)
                if isinstance(call, ast.Call) and call.func is use.node:
                    for sink in self._fitting(use.node, use.scope, several):
                        yield call, use.scope, sink
        yield from self._results()

    def lookups(self) -> Iterator[tuple[ast.expr, Sink]]:
        """Keywords that end like a lookup: `filter(name__regex=…)`."""
        if not self._table.lookups:
            return
        wanted = {
            ending: sink
            for ending, sink in self._table.lookups.items()
            if any(map(self._imports, sink.needs)) and any(ending in line for line in self._text.lines)
        }
        for node in self._index.parents if wanted else ():
            if isinstance(node, ast.keyword) and node.arg is not None:
                for ending, sink in wanted.items():
                    if node.arg.endswith(ending):
                        yield node.value, sink

    def of_call(self, call: ast.Call, scope: Scope) -> list[Sink]:
        """The sinks that a call may be of: by its qualified name, else by that of a method."""
        known = self._table.calls.get(self.qualified(call.func, scope) or "", [])
        if not known and isinstance(call.func, ast.Attribute):
            return self._fitting(call.func, scope, self._table.methods.get(call.func.attr, []))
        return known

    def qualified(self, node: ast.expr, scope: Scope) -> str | None:
        """The qualified name that an imported name or a member of it stands for, as far as the file tells."""
        names: list[str] = []
        while isinstance(node, ast.Attribute):
            names.append(node.attr)
            node = node.value
        if not isinstance(node, ast.Name):
            return None
        owner = scope.find(node.id)
        rest = "".join(f".{name}" for name in reversed(names))
        if owner is None:
            starred = [f"{module}.{node.id}{rest}" for _, module in self._index.module.stars]
            return next((name for name in starred if self._known(name)), None)
        bindings = [b for b in owner.bindings[node.id] if not b.is_none and b.kind != "deleted"]
        found = {self._imported_name(binding) for binding in bindings}
        if not found or None in found:
            return None
        whole = sorted(self._settled(f"{name}{rest}") for name in found)
        return whole[0] if len(whole) == 1 or all(map(self._known, whole)) else None

    def _known(self, name: str) -> bool:
        return name in self._table.calls or name in self._table.attributes or name in self._table.results

    def _imported_name(self, binding: Binding) -> str | None:
        if binding.kind != "import" or binding.module is None:
            return None
        module = binding.module
        if module.startswith("."):
            level = len(module) - len(module.lstrip("."))
            above = self._package[: len(self._package) - level + 1]
            module = ".".join([*above, *([module[level:]] if module[level:] else [])])
        return module if binding.member is None else f"{module}.{binding.member}"

    def _settled(self, name: str) -> str:
        """A project's own sink may lie in any folder: the end of its name decides."""
        for known in self._table.project:
            if name.endswith("." + known):
                return known
        return name

    def _called(self) -> Iterator[Found]:
        """Every call of a qualified name that is a sink, in whatever order."""
        parents = self._index.parents
        calls = self._table.calls
        if not calls and not self._table.results:
            return
        names = self._names()
        for scope in self._index.scopes:
            for name in names & scope.loads.keys():
                for node in scope.loads[name]:
                    whole: ast.expr = node
                    above = parents.get(whole)
                    while isinstance(above, ast.Attribute):
                        whole = above
                        above = parents.get(whole)
                    if not isinstance(above, ast.Call) or above.func is not whole:
                        continue
                    qualified = self.qualified(whole, scope)
                    if qualified in calls:
                        for sink in calls[qualified]:
                            yield above, scope, sink

    def _names(self) -> set[str]:
        """Names that an import binds to something of a library with sinks."""
        tops, members = self._table.tops, self._table.members
        starred = any(module.split(".")[0] in tops for _, module in self._index.module.stars)
        found: set[str] = set(members) if starred else set()
        for scope in self._index.scopes:
            for name, bindings in scope.bindings.items():
                for binding in bindings:
                    if binding.kind == "import" and binding.module is not None:
                        top = binding.module.split(".")[0]
                        if top in tops or (self._table.project and (not top or binding.member in members)):
                            found.add(name)
                            break
        return found

    def _fitting(self, node: ast.Attribute, scope: Scope, sinks: list[Sink]) -> list[Sink]:
        """The sinks of a method that this attribute may be."""
        chain: list[str] = []
        base: ast.expr = node
        while isinstance(base, ast.Attribute):
            chain.insert(0, base.attr)
            base = base.value
        fit = [
            sink
            for sink in sinks
            if tuple(chain[-len(sink.method) :]) == sink.method
            and (not sink.needs or any(map(self._imports, sink.needs)))
            and (not sink.decorator or self._decorates(node))
        ]
        if not fit:
            return []
        owner = self._bound.class_of(node.value, scope)
        if owner is not None and node.attr in owner.bindings:
            return []  # a method that the file writes itself
        if self.qualified(node, scope) in self._table.calls:
            return []
        if self.qualified(node.value, scope) is not None and not any(sink.needs for sink in fit):
            return []  # a function of a module, or a method with its object as an argument
        return [sink for sink in fit if sink.refused] or fit

    def _imports(self, module: str) -> bool:
        """Whether the file imports `module` or something of it, anywhere."""
        known = self._imported.get(module)
        if known is None:
            known = self._imported[module] = any(
                binding.kind == "import" and (binding.module or "").split(".")[0] == module
                for scope in self._index.scopes
                for bindings in scope.bindings.values()
                for binding in bindings
            )
        return known

    def _decorates(self, node: ast.Attribute) -> bool:
        call = self._index.parents.get(node)
        above = self._index.parents.get(call) if call is not None else None
        return isinstance(above, (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef)) and (
            call in above.decorator_list
        )

    def _results(self) -> Iterator[Found]:
        """Methods of what a `with` statement binds: `with pytest.raises(…) as caught: … caught.match(…)`."""
        methods = {sink.method[-1]: name for name, sinks in self._table.results.items() for sink in sinks}
        for attribute, name in methods.items():
            for use in self._index.reads.get(attribute, ()):
                call = self._index.parents.get(use.node)
                value = use.node.value
                if not (isinstance(call, ast.Call) and call.func is use.node and isinstance(value, ast.Name)):
                    continue
                owner = use.scope.find(value.id)
                bindings = owner.bindings[value.id] if owner is not None else []
                made = {self._entered(binding) for binding in bindings}
                if made == {name}:
                    for sink in self._table.results[name]:
                        yield call, use.scope, sink

    def _entered(self, binding: Binding) -> str | None:
        """The qualified name of the call that a `with` statement enters to bind a name."""
        item = self._index.parents.get(binding.node)
        if isinstance(item, ast.withitem) and item.optional_vars is binding.node:
            made = item.context_expr
            return self.qualified(made.func, binding.scope) if isinstance(made, ast.Call) else None
        return None


def pick(call: ast.Call, where: Where) -> tuple[ast.expr | None, bool]:
    """An argument of a call, and whether `*` or `**` may give it where it is not written out."""
    loose = False
    for key in where:
        if isinstance(key, int):
            starred = any(isinstance(argument, ast.Starred) for argument in call.args[: key + 1])
            if not starred and key < len(call.args):
                return call.args[key], False
            loose |= starred
        else:
            for keyword in call.keywords:
                if keyword.arg == key:
                    return keyword.value, False
            loose |= any(keyword.arg is None for keyword in call.keywords)
    return None, loose
