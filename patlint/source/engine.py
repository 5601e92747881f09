"""What belongs to `re`: its names in a file, and the arguments of its functions.

`Engine.denotes(node, scope)` answers "re" for the module, "re.match" for a member, None for anything else.
Imports under other names, from-imports, imports in functions and in try blocks, and plain aliases
(`search = re.search`) are followed; a name that is sometimes `re` and sometimes something else is `Opaque`.

The signatures are those of CPython 3.10 to 3.13, the deprecated positional `count`, `maxsplit` and `flags`
included.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass

from patlint.source import reasons
from patlint.source.index import Index
from patlint.source.reasons import Opaque
from patlint.source.scopes import Binding, Scope

FUNCTIONS: dict[str, tuple[str, ...]] = {
    "compile": ("pattern", "flags"),
    "match": ("pattern", "string", "flags"),
    "fullmatch": ("pattern", "string", "flags"),
    "search": ("pattern", "string", "flags"),
    "findall": ("pattern", "string", "flags"),
    "finditer": ("pattern", "string", "flags"),
    "split": ("pattern", "string", "maxsplit", "flags"),
    "sub": ("pattern", "repl", "string", "count", "flags"),
    "subn": ("pattern", "repl", "string", "count", "flags"),
}
METHODS: dict[str, tuple[str, ...]] = {
    "match": ("string", "pos", "endpos"),
    "fullmatch": ("string", "pos", "endpos"),
    "search": ("string", "pos", "endpos"),
    "findall": ("string", "pos", "endpos"),
    "finditer": ("string", "pos", "endpos"),
    "scanner": ("string", "pos", "endpos"),
    "split": ("string", "maxsplit"),
    "sub": ("repl", "string", "count"),
    "subn": ("repl", "string", "count"),
}
STARRED_NAMES = frozenset(FUNCTIONS) | {
    *("purge", "escape", "error", "Pattern", "Match", "RegexFlag", "A", "I", "L", "M", "S", "X", "U"),
    *("ASCII", "IGNORECASE", "LOCALE", "MULTILINE", "DOTALL", "VERBOSE", "UNICODE", "NOFLAG"),
}
"""What `from re import *` gives."""
_MOST_ALIASES = 20


@dataclass(frozen=True, slots=True)
class Arguments:
    """A call's arguments by parameter; `loose`: `*` or `**` may fill in more of them."""

    given: dict[str, ast.expr]
    loose: bool


def bind_arguments(call: ast.Call, parameters: tuple[str, ...]) -> Arguments:
    """In step with `parameters`; what cannot be assigned to one is left out."""
    given: dict[str, ast.expr] = {}
    loose = False
    for position, argument in enumerate(call.args):
        if isinstance(argument, ast.Starred):
            loose = True
            break
        if position < len(parameters):
            given[parameters[position]] = argument
    for keyword in call.keywords:
        if keyword.arg is None:
            loose = True
        elif keyword.arg in parameters:
            given.setdefault(keyword.arg, keyword.value)
    return Arguments(given, loose)


class Engine:
    """Names that stand for `re` and its members, in one file."""

    def __init__(self, index: Index) -> None:
        self.index = index
        self._known: dict[tuple[Scope, str], str | None | Opaque] = {}

    def denotes(self, node: ast.expr, scope: Scope, depth: int = 0) -> str | None:
        """Errors: `Opaque` where the name is `re`'s on some ways through the program only."""
        match node:
            case ast.Name():
                return self._name(node.id, scope, depth)
            case ast.Attribute():
                names = [node.attr]
                base = node.value
                while isinstance(base, ast.Attribute) and len(names) < 4:
                    names.append(base.attr)
                    base = base.value
                if not isinstance(base, ast.Name):
                    return None
                inner = self._name(base.id, scope, depth)
                return None if inner is None else ".".join((inner, *reversed(names)))
            case _:
                return None

    def _name(self, name: str, scope: Scope, depth: int) -> str | None:
        owner = scope.find(name)
        if owner is None:
            starred = any(module == "re" for _, module in self.index.module.stars)
            return f"re.{name}" if starred and name in STARRED_NAMES else None
        key = owner, name
        if key not in self._known:
            self._known[key] = None  # a name defined by itself is nothing of re
            try:
                self._known[key] = self._owned(owner, name, depth)
            except Opaque as opaque:
                self._known[key] = opaque
        known = self._known[key]
        if isinstance(known, Opaque):
            raise known
        return known

    def _owned(self, owner: Scope, name: str, depth: int) -> str | None:
        bindings = [b for b in owner.bindings[name] if not b.is_none and b.kind != "deleted"]
        found = {self._binding(binding, depth) for binding in bindings}
        if len(found) == 1:
            return found.pop()
        if any(found):
            raise Opaque(reasons.OTHER_ENGINE)
        return None

    def _binding(self, binding: Binding, depth: int) -> str | None:
        if binding.kind == "import":
            if binding.module != "re":
                return None
            return "re" if binding.member is None else f"re.{binding.member}"
        if isinstance(binding.value, (ast.Name, ast.Attribute)) and depth < _MOST_ALIASES:
            return self.denotes(binding.value, binding.scope, depth + 1)
        return None
