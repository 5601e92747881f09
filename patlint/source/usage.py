"""One call that runs a pattern -> a `Use`: function, what is looked at, and what bounds or steers it."""

from __future__ import annotations

import ast
import re

from patlint.source.constants import Constants
from patlint.source.engine import FUNCTIONS, METHODS, Arguments, bind_arguments
from patlint.source.filtering import drops_empty
from patlint.source.flags import evaluate_flags
from patlint.source.index import Index
from patlint.source.outcome import Outcome, Outcomes
from patlint.source.places import Text
from patlint.source.reasons import Opaque
from patlint.source.scopes import Scope
from patlint.source.sites import Function, LooksAt, Use
from patlint.source.spelled import Spelled
from patlint.source.validation import end_is_settled, refuses

_GROUP_REFERENCE = re.compile(r"\\(?:[1-9]|g<(?!0+>))")
_OPEN_GROUP = re.compile(r"\\.|\[\^?\]?(?:\\.|[^\]\\])*\]|(\()(?!\?(?!P<))", re.DOTALL)


def has_groups(pattern: str | bytes) -> bool:
    """Whether the pattern seems to capture: an opening parenthesis that is neither escaped nor extended.

    Errs towards True only in VERBOSE comments and in sets that are written in an odd way.
    """
    text = pattern.decode("latin-1") if isinstance(pattern, bytes) else pattern
    return "(" in text and any(found[1] for found in _OPEN_GROUP.finditer(text))


class Uses:
    """Makes the uses of one file."""

    def __init__(self, index: Index, text: Text, constants: Constants) -> None:
        self.index = index
        self.text = text
        self.constants = constants
        self.outcomes = Outcomes(index)

    def call(
        self, call: ast.Call, scope: Scope, function: Function, method: bool, pattern: str | bytes
    ) -> Use:
        """`call` runs `pattern` by a function of `re` or, with `method`, by one of a pattern object."""
        arguments = bind_arguments(call, METHODS[function] if method else FUNCTIONS[function])
        given = arguments.given
        movable = method and "pos" in METHODS[function]
        positioned = movable and ("pos" in given or "endpos" in given or arguments.loose)
        replacement, looks_at, outcome = self._outcome(call, scope, function, given, arguments, pattern)
        limit = given.get("maxsplit") if function == "split" else given.get("count")
        return Use(
            function=function,
            looks_at=looks_at,
            place=self.text.place(call),
            positioned=positioned,
            replacement=replacement,
            maximum=self._number(limit, scope),
            bounded=self._bound(given.get("string"), scope),
            in_loop=self._in_loop(call, outcome),
            validates=outcome is not None and any(refuses(test, self.index) for test in outcome.tests),
            end_settled=end_is_settled(given.get("string"), scope, self.index),
            drops_empty=function in ("findall", "finditer") and drops_empty(call, self.index),
        )

    def tested_by(self, node: ast.expr, function: Function, looks_at: LooksAt) -> Use:
        """A bound method that `filter` or `any(map(...))` calls."""
        return Use(function, looks_at, self.text.place(node))

    def _outcome(
        self,
        call: ast.Call,
        scope: Scope,
        function: Function,
        given: dict[str, ast.expr],
        arguments: Arguments,
        pattern: str | bytes,
    ) -> tuple[str | bytes | None, LooksAt, Outcome | None]:
        match function:
            case "match" | "fullmatch" | "search":
                outcome = self.outcomes.of_match(call, scope)
            case "finditer":
                outcome = self.outcomes.of_matches(call, scope)
            case "findall" | "split":
                outcome = self.outcomes.of_list(call, has_groups(pattern), function == "split")
            case "sub" | "subn":
                replacement = self._text(given.get("repl"), scope)
                return replacement, _replacement_looks_at(replacement), None
            case _:
                return None, "unknown", None
        return None, outcome.looks_at, outcome

    def _text(self, node: ast.expr | None, scope: Scope) -> str | bytes | None:
        if node is None:
            return None
        try:
            value = self.constants.evaluate(node, scope)
        except Opaque:
            return None
        return value.value if isinstance(value, Spelled) else None

    def _number(self, node: ast.expr | None, scope: Scope) -> int | None:
        if node is None:
            return None
        try:
            return evaluate_flags(node, scope, self.constants)
        except Opaque:
            return None

    def _bound(self, node: ast.expr | None, scope: Scope) -> int | None:
        """The length of a subject that is visibly bounded."""
        match node:
            case ast.Subscript(slice=ast.Slice(lower=lower, upper=upper, step=None)):
                first = 0 if lower is None else _integer(lower)
                last = _integer(upper)
                if upper is None:
                    return -first if first is not None and first < 0 else None
                if first is None or last is None or (first < 0) != (last < 0):
                    return None
                return max(last - first, 0)
            case ast.Constant(value=str() | bytes() as value):
                return len(value)
            case ast.Name() | ast.BinOp() | ast.JoinedStr():
                known = self._text(node, scope)
                return len(known) if known is not None else None
            case _:
                return None

    def _in_loop(self, call: ast.Call, outcome: Outcome | None) -> bool:
        if outcome is None or not outcome.ends:
            return False
        loop = self._loop(call)
        if loop is None or not any(self._within(end, loop) for end in outcome.ends):
            return False
        # Only where nothing but the match decides whether the loop goes on.
        if not self._within(call, loop.test) and not isinstance(loop.test, ast.Name):
            return False
        ways_out = (ast.Break, ast.Return, ast.Raise)
        return not any(isinstance(each, ways_out) for line in loop.body for each in ast.walk(line))

    def _loop(self, node: ast.AST) -> ast.While | None:
        """The innermost `while` around `node` in the same function."""
        current = self.index.parents.get(node)
        while current is not None:
            if isinstance(current, ast.While):
                return current
            if isinstance(current, (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda, ast.ClassDef)):
                return None
            current = self.index.parents.get(current)
        return None

    def _within(self, node: ast.AST, outer: ast.AST) -> bool:
        current: ast.AST | None = node
        while current is not None and current is not outer:
            current = self.index.parents.get(current)
        return current is outer


def _integer(node: ast.expr | None) -> int | None:
    match node:
        case ast.Constant(value=int() as value):
            return int(value)
        case ast.UnaryOp(op=ast.USub(), operand=ast.Constant(value=int() as value)):
            return -int(value)
        case _:
            return None


def _replacement_looks_at(replacement: str | bytes | None) -> LooksAt:
    if replacement is None:
        return "unknown"
    text = replacement.decode("latin-1") if isinstance(replacement, bytes) else replacement
    return "groups" if _GROUP_REFERENCE.search(text.replace("\\\\", "")) else "span"
