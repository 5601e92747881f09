"""Runs of tests of one text: if/elif chains, tests one after the other, and `or` between tests.

    found = _DATE.match(text)
    if found:
        return date(found)
    if _TIME.match(text) or _HOUR.match(text):
        return time(text)
    elif _NOON.match(text): ...

These four are one family: no later one is tried where an earlier one has matched. A run ends where the text may
have become another one, and where a test that matched does not keep the lines below from being reached.

Limits: only names that this function alone binds are followed from statement to statement; attributes stay the
same within one condition or chain that calls nothing else.
"""

from __future__ import annotations

import ast
from collections.abc import Callable, Generator, Iterator
from dataclasses import dataclass, field

from patlint.source.index import Index
from patlint.source.places import Text
from patlint.source.scopes import Scope
from patlint.source.sites import Family, Member, Site, Trial
from patlint.source.trials import Asked, Conditions, Test, asked_by, has_calls, leaves, stored_names

_BLOCKS = ("body", "orelse", "finalbody")


@dataclass(slots=True)
class _Run:
    """Tests of one text so far, each with the number of its condition and whether it takes."""

    asked: Asked
    tests: list[tuple[Test, int, bool]] = field(default_factory=list)


class Chains:
    """The runs of tests of one file. `tests` are all calls that test by a known pattern, with their sites."""

    def __init__(self, index: Index, text: Text, tests: dict[ast.Call, tuple[Test, Site, Scope]]) -> None:
        self.index = index
        self.text = text
        self.tests = tests

    def find(self) -> Iterator[Family]:
        told: set[ast.AST] = set()
        for block, scope in self._blocks():
            for run in self._runs(block, scope):
                told.update(test.call for test, _, _ in run.tests)
                yield self._family(run)
        for node, scope in self._conditions():
            for run in self._or(node, scope):
                if not all(test.call in told for test, _, _ in run.tests):
                    yield self._family(run)

    def _family(self, run: _Run) -> Family:
        first = run.tests[0][0]
        members = tuple(
            Member(self.tests[test.call][1], (test.mode,), takes, step, None, self.text.place(test.call))
            for test, step, takes in run.tests
        )
        return Family(
            "tests", "first", members, (Trial(self.text.place(first.call), first.position is not None),)
        )

    def _known(self, node: ast.AST) -> Test | None:
        found = self.tests.get(node) if isinstance(node, ast.Call) else None
        return found[0] if found else None

    # if and elif, and statements one after the other

    def _blocks(self) -> Iterator[tuple[list[ast.stmt], Scope]]:
        """Every block that holds a test, once, with its scope."""
        seen: set[int] = set()
        for call, (_, _, scope) in self.tests.items():
            while scope.kind == "comprehension" and scope.parent is not None:
                scope = scope.parent
            statement = self.index.statement(call)
            while statement is not None:
                above = self.index.parents.get(statement)
                for name in _BLOCKS:
                    block = getattr(above, name, None)
                    if isinstance(block, list) and statement in block and id(block) not in seen:
                        seen.add(id(block))
                        if not (name == "orelse" and isinstance(above, ast.If) and _is_elif(above)):
                            yield block, scope
                if not (isinstance(above, ast.If) and statement in above.orelse and _is_elif(above)):
                    break
                statement = above

    def _runs(self, block: list[ast.stmt], scope: Scope) -> Iterator[_Run]:
        conditions = Conditions(self._known)
        runs: dict[str, _Run] = {}
        step = 0
        for statement in block:
            match statement:
                case ast.Assign(targets=[ast.Name(id=name)], value=value) if conditions.test_of(value):
                    test = conditions.test_of(value)
                    assert test is not None
                    yield from self._changed(runs, {name})
                    conditions.kept[name] = test
                    continue
                case ast.If():
                    stay = yield from self._chain(statement, scope, conditions, runs, step)
                    step += 1000
                    yield from self._changed(runs, stay)
                case _:
                    stay = stored_names([statement])
                    yield from self._changed(runs, stay)
            called = has_calls([statement], lambda call: call in self.tests)
            if called:
                yield from self._ended(runs, lambda run: not run.asked.plain)
            for name, kept in list(conditions.kept.items()):
                asked = asked_by(kept, scope)
                if name in stay or asked is None or asked.names & stay or (called and not asked.plain):
                    del conditions.kept[name]
        yield from self._ended(runs, lambda run: True)

    def _chain(
        self, statement: ast.If, scope: Scope, conditions: Conditions, runs: dict[str, _Run], step: int
    ) -> Generator[_Run, None, set[str]]:
        """Reads one if with its elifs into `runs`; gives the names that the lines below may find changed."""
        changed: set[str] = set()
        going_on: set[str] = set()
        calling = False
        part: ast.If | None = statement
        while part is not None:
            step += 1
            before = stored_names([part.test])
            yield from self._changed(runs, before)
            left = leaves(part.body, True)
            if not left:
                changed |= stored_names(part.body)
            calling = calling or has_calls([part.test], lambda call: call in self.tests)
            if calling:
                yield from self._ended(runs, lambda run: not run.asked.plain)
            for test, verdict in conditions.read(part.test):
                needed = asked_by(test, scope)
                if verdict == "refuses" or needed is None or needed.names & before:
                    continue
                if calling and not needed.plain:
                    continue
                run = runs.setdefault(test.key, _Run(needed))
                run.tests.append((test, step, verdict == "takes"))
                if verdict == "takes" and not left:
                    going_on.add(test.key)
            changed |= before
            rest = part.orelse
            part = rest[0] if _is_elif(part) and isinstance(rest[0], ast.If) else None
            if part is None and not leaves(rest, True):
                changed |= stored_names(rest)
        for key in going_on & runs.keys():
            yield from self._emit(runs.pop(key))
        return changed

    def _changed(self, runs: dict[str, _Run], names: set[str]) -> Iterator[_Run]:
        yield from self._ended(runs, lambda run: bool(run.asked.names & names))

    def _ended(self, runs: dict[str, _Run], over: Callable[[_Run], bool]) -> Iterator[_Run]:
        for key in [key for key, run in runs.items() if over(run)]:
            yield from self._emit(runs.pop(key))

    def _emit(self, run: _Run) -> Iterator[_Run]:
        if len(run.tests) > 1:
            yield run

    # `or`

    def _conditions(self) -> Iterator[tuple[ast.BoolOp, Scope]]:
        seen: set[ast.AST] = set()
        for call, (_, _, scope) in self.tests.items():
            node: ast.AST | None = call
            while isinstance(node, ast.expr):
                above = self.index.parents.get(node)
                if isinstance(above, ast.BoolOp) and isinstance(above.op, ast.Or) and above not in seen:
                    seen.add(above)
                    yield above, scope
                node = above

    def _or(self, node: ast.BoolOp, scope: Scope) -> Iterator[_Run]:
        conditions = Conditions(self._known)
        runs: dict[str, _Run] = {}
        for number, part in enumerate(node.values):
            test = conditions.test_of(part)
            if test is None:
                if has_calls([part], lambda call: call in self.tests):
                    yield from self._ended(runs, lambda run: not run.asked.plain)
                continue
            needed = asked_by(test, scope)
            if needed is not None:
                runs.setdefault(test.key, _Run(needed)).tests.append((test, number, True))
            yield from self._changed(runs, stored_names([part]))
        yield from self._ended(runs, lambda run: True)


def _is_elif(node: ast.If) -> bool:
    """Whether the else of an if is one more if and nothing else."""
    return len(node.orelse) == 1 and isinstance(node.orelse[0], ast.If)
