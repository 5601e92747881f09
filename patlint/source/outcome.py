"""What the program looks at of a match: only whether there is one, where it is, or what its groups hold.

`Outcomes.of_match(node, scope)` follows the value of one expression through its context and through the
names it is given, and takes together all that is read of it. Whatever is not understood counts as "unknown",
which is the weakest claim: truth < span < groups < unknown.

Limits: a match object is followed through plain names of one scope; stored in a container or an attribute,
returned or passed to a function it is lost.
"""

from __future__ import annotations

import ast
from dataclasses import dataclass, field

from patlint.source.index import Index
from patlint.source.reaching import reached_reads
from patlint.source.scopes import Scope
from patlint.source.sites import LooksAt

_ORDER: tuple[LooksAt, ...] = ("truth", "span", "groups", "unknown")
_GROUP_ATTRIBUTES = frozenset({"groups", "groupdict", "expand", "lastgroup", "lastindex", "regs"})
_SPAN_ATTRIBUTES = frozenset({"string", "pos", "endpos"})
_BY_GROUP = frozenset({"group", "start", "end", "span"})
_UNITTEST = frozenset({"assertTrue", "assertFalse", "assertIsNone", "assertIsNotNone"})
"""Methods of the standard library's `unittest.TestCase` that test a truth."""
_DEEPEST = 40


@dataclass(slots=True)
class Outcome:
    """What was seen so far; `ends` are the places that read where the match ends."""

    level: int = -1
    ends: list[ast.AST] = field(default_factory=list)
    tests: list[ast.AST] = field(default_factory=list)
    """The expressions whose truth is asked."""

    def saw(self, looks_at: LooksAt) -> None:
        self.level = max(self.level, _ORDER.index(looks_at))

    @property
    def looks_at(self) -> LooksAt:
        """ "unknown" also where nothing at all is looked at: such a call tells nothing about its author."""
        return _ORDER[self.level] if self.level >= 0 else "unknown"


class Outcomes:
    """Follows the outcomes of calls in one file."""

    def __init__(self, index: Index) -> None:
        self.index = index

    def of_match(self, node: ast.expr, scope: Scope) -> Outcome:
        """`node` gives a match object or None."""
        outcome = Outcome()
        self._match(node, scope, outcome, frozenset(), 0)
        return outcome

    def of_matches(self, node: ast.expr, scope: Scope) -> Outcome:
        """`node` gives an iterator of match objects."""
        outcome = Outcome()
        parent = self.index.parents.get(node)
        match parent:
            case ast.For(target=ast.Name(id=name)) if parent.iter is node:
                outcome.saw("span")
                owner = scope.find(name)
                if owner is None or owner.kind == "class":
                    outcome.saw("unknown")
                else:
                    self._name(name, owner, outcome, frozenset(), 0)
            case ast.comprehension(target=ast.Name(id=name)) if parent.iter is node:
                outcome.saw("span")
                holder = self.index.parents.get(parent)
                for inner in scope.children:
                    if inner.node is holder:
                        self._name(name, inner, outcome, frozenset(), 0)
                        break
                else:
                    outcome.saw("unknown")
            case ast.Call(func=ast.Name(id="any"), args=[only]) if only is node:
                outcome.saw("truth")
            case _:
                outcome.saw("unknown")
        return outcome

    def of_list(self, node: ast.expr, has_groups: bool, always_some: bool) -> Outcome:
        """`node` gives the list of findall, or of split, which is never empty."""
        outcome = Outcome()
        if not always_some and self._is_test(node, self.index.parents.get(node)):
            outcome.saw("truth")
            outcome.tests.append(node)
        else:
            outcome.saw("groups" if has_groups else "span")
        return outcome

    def _is_test(self, node: ast.AST, parent: ast.AST | None) -> bool:
        match parent:
            case ast.If() | ast.While() | ast.IfExp() | ast.Assert():
                return parent.test is node
            case ast.UnaryOp(op=ast.Not()):
                return True
            case ast.Call(func=ast.Name(id="bool"), args=[only]):
                return only is node
            case ast.Call(func=ast.Attribute(attr=method), args=[first, *_]):
                return first is node and method in _UNITTEST
            case ast.comprehension():
                return node in parent.ifs
            case _:
                return False

    def _match(
        self, node: ast.AST, scope: Scope, outcome: Outcome, seen: frozenset[tuple[Scope, str]], depth: int
    ) -> None:
        parent = self.index.parents.get(node)
        if depth > _DEEPEST or parent is None:
            outcome.saw("unknown")
            return
        if self._is_test(node, parent):
            outcome.saw("truth")
            outcome.tests.append(node)
            return
        match parent:
            case ast.Compare():
                self._comparison(node, parent, outcome)
            case ast.BoolOp():
                last = node is parent.values[-1]
                if not last:
                    outcome.saw("truth")
                    outcome.tests.append(node)
                if last or isinstance(parent.op, ast.Or):
                    self._match(parent, scope, outcome, seen, depth + 1)
            case ast.IfExp():
                self._match(parent, scope, outcome, seen, depth + 1)
            case ast.Expr():
                pass
            case ast.Attribute():
                self._attribute(parent, outcome)
            case ast.Subscript() if parent.value is node:
                outcome.saw("span" if _is_zero(parent.slice) else "groups")
                if _is_zero(parent.slice):
                    self._length(parent, outcome)
            case ast.NamedExpr():
                self._target(parent.target, None, scope, outcome, seen, depth)
                self._match(parent, scope, outcome, seen, depth + 1)
            case ast.Assign() if parent.value is node:
                for target in parent.targets:
                    self._target(target, parent, scope, outcome, seen, depth)
            case ast.AnnAssign() if parent.value is node:
                self._target(parent.target, parent, scope, outcome, seen, depth)
            case ast.GeneratorExp() | ast.ListComp() | ast.SetComp() if parent.elt is node:
                self._element(parent, outcome)
            case ast.Lambda() if parent.body is node:
                above = self.index.parents.get(parent)
                filtered = (
                    isinstance(above, ast.Call) and _is_called(above, ("filter",)) and above.args[0] is parent
                )
                outcome.saw("truth" if filtered else "unknown")
            case _:
                outcome.saw("unknown")

    def _comparison(self, node: ast.AST, parent: ast.Compare, outcome: Outcome) -> None:
        sides = [parent.left, *parent.comparators]
        simple = len(sides) == 2 and isinstance(parent.ops[0], (ast.Is, ast.IsNot, ast.Eq, ast.NotEq))
        other = [side for side in sides if side is not node]
        none = len(other) == 1 and isinstance(other[0], ast.Constant) and other[0].value is None
        outcome.saw("truth" if simple and none else "unknown")
        if simple and none:
            outcome.tests.append(node)

    def _attribute(self, attribute: ast.Attribute, outcome: Outcome) -> None:
        name = attribute.attr
        if name in _GROUP_ATTRIBUTES:
            outcome.saw("groups")
        elif name in _SPAN_ATTRIBUTES:
            outcome.saw("span")
        elif name in _BY_GROUP:
            call = self.index.parents.get(attribute)
            if not (isinstance(call, ast.Call) and call.func is attribute):
                outcome.saw("unknown")
                return
            whole = not call.keywords and len(call.args) <= 1 and all(map(_is_zero, call.args))
            outcome.saw("span" if whole else "groups")
            if name in ("end", "span"):
                outcome.ends.append(call)
            elif name == "group" and whole:
                self._length(call, outcome)
        else:
            outcome.saw("unknown")

    def _length(self, text: ast.AST, outcome: Outcome) -> None:
        """`len(m.group())` is as good as `m.end()` for going on."""
        above = self.index.parents.get(text)
        if isinstance(above, ast.Call) and _is_called(above, ("len",)):
            outcome.ends.append(text)

    def _element(self, comprehension: ast.AST, outcome: Outcome) -> None:
        above = self.index.parents.get(comprehension)
        tested = isinstance(above, ast.Call) and _is_called(above, ("any", "all"))
        outcome.saw("truth" if tested else "unknown")

    def _target(
        self,
        target: ast.expr,
        statement: ast.stmt | None,
        scope: Scope,
        outcome: Outcome,
        seen: frozenset[tuple[Scope, str]],
        depth: int,
    ) -> None:
        if not isinstance(target, ast.Name):
            outcome.saw("unknown")
            return
        owner = scope.find(target.id)
        if owner is None or owner.kind != "function":
            outcome.saw("unknown")  # a global or class name: others may read it
            if owner is None:
                return
        reached = reached_reads(target.id, statement, owner, self.index) if statement else None
        self._name(target.id, owner, outcome, seen, depth, reached)

    def _name(
        self,
        name: str,
        owner: Scope,
        outcome: Outcome,
        seen: frozenset[tuple[Scope, str]],
        depth: int,
        only: set[ast.AST] | None = None,
    ) -> None:
        """Every read of a name that holds the match; `only`: those that this value reaches."""
        if (owner, name) in seen:
            return
        for read, scope in owner.reads(name):
            if only is None or read in only:
                self._match(read, scope, outcome, seen | {(owner, name)}, depth + 1)


def _is_zero(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and type(node.value) is int and node.value == 0


def _is_called(call: ast.Call, names: tuple[str, ...]) -> bool:
    return isinstance(call.func, ast.Name) and call.func.id in names and bool(call.args)
