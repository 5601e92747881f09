"""Whether a test of a match validates its text, and whether the text can end in a line feed at all.

`refuses(test, index)`: the text that fails the test is refused: an exception, `return False`, or a function that
returns the outcome. A test that only tells cases apart (`if P.match(line): ...`) is none, nor is an `assert`,
which states what is taken to be so.

`end_is_settled(subject, scope, index)`: what stands at the end of the text is plain to see. It was stripped,
or it is a line of a file, whose author knows of its line feed.

Limits: names are followed through assignments and loops of one scope, the outcome of a test through `not`,
`and`, `or`, `bool()` and comparisons with None. What is not understood is neither refused nor settled.
"""

from __future__ import annotations

import ast

from patlint.source.index import Index
from patlint.source.reaching import reaching_value
from patlint.source.scopes import Scope

_STRIPPING = frozenset({"strip", "rstrip"})
_KEEPING = frozenset({"lower", "upper", "title", "casefold", "capitalize", "swapcase", "lstrip"})
"""Methods that give a text with the same end."""
_LINES = frozenset({"readlines", "splitlines", "open"})
_READERS = frozenset({"open", "fdopen", "reader"})
_STREAMS = frozenset({"stdin", "stdout", "stderr"})
_DEEPEST = 8


def refuses(test: ast.AST, index: Index) -> bool:
    """`test` is an expression whose truth, or whose being None, is asked."""
    node, positive = test, True
    while True:
        parent = index.parents.get(node)
        match parent:
            case ast.UnaryOp(op=ast.Not()):
                positive = not positive
            case ast.Compare(ops=[ast.Is() | ast.Eq()]):
                positive = not positive
            case ast.Compare() | ast.BoolOp() | ast.NamedExpr():
                pass
            case ast.IfExp() if parent.test is not node:
                pass
            case ast.Call(func=ast.Name(id="bool")):
                pass
            case ast.Return():
                return True
            case ast.If() if parent.test is node:
                return _refused(parent, positive, index)
            case _:
                return False
        node = parent


def _refused(choice: ast.If, positive: bool, index: Index) -> bool:
    """Whether `choice` refuses the text where its test comes to the opposite of `positive`."""
    if not positive:
        return _is_refusal(choice.body, inside=True)
    last: ast.stmt = choice
    while isinstance(last, ast.If) and last.orelse:
        if len(last.orelse) > 1 or not isinstance(last.orelse[0], ast.If):
            return _is_refusal(last.orelse, inside=True)
        last = last.orelse[0]  # elif: one case among several
    if last is not choice:
        return False
    return isinstance(choice.body[-1], ast.Return) and _is_refusal(_following(choice, index)[:1])


def _following(statement: ast.stmt, index: Index) -> list[ast.stmt]:
    """The statements after `statement` in its block."""
    above = index.parents.get(statement)
    for name in ("body", "orelse", "finalbody"):
        block = getattr(above, name, None)
        if isinstance(block, list) and statement in block:
            return block[block.index(statement) + 1 :]
    return []


def _is_refusal(block: list[ast.stmt], inside: bool = False) -> bool:
    """Whether a block raises, or ends the function with False; `inside`: in some case, seen by a choice at its end."""
    if not block:
        return False
    match block[-1]:
        case ast.Raise():
            return True
        case ast.Return(value=ast.Constant(value=False)):
            return True
        case ast.If(body=body, orelse=orelse) if inside:
            return _is_refusal(body, True) or _is_refusal(orelse, True)
        case _:
            return False


def end_is_settled(subject: ast.expr | None, scope: Scope, index: Index, depth: int = 0) -> bool:
    """`subject` is the expression of the text, read in `scope`."""
    if depth > _DEEPEST:
        return False
    match subject:
        case ast.Call(func=ast.Attribute(attr=method, value=inner), args=arguments):
            if method in _STRIPPING:
                return not arguments or _takes_line_feeds(arguments[0])
            if method in _KEEPING:
                return end_is_settled(inner, scope, index, depth + 1)
            if method in ("encode", "decode"):
                return end_is_settled(inner, scope, index, depth + 1)
            if method == "replace" and len(arguments) == 2:
                return _is_line_feed(arguments[0])
            if method == "removesuffix" and arguments:
                return _is_line_feed(arguments[0])
            return method == "readline"
        case ast.IfExp(body=body, orelse=orelse):
            return all(end_is_settled(each, scope, index, depth + 1) for each in (body, orelse))
        case ast.Constant(value=str() as text):
            return not text.endswith("\n")
        case ast.BinOp(op=ast.Add(), right=ast.Constant(value=str() as text)) if text:
            return not text.endswith("\n")
        case ast.JoinedStr(values=[*_, ast.Constant(value=str() as text)]) if text:
            return not text.endswith("\n")
        case ast.Call(func=ast.Name(id="input")):
            return True
        case ast.Subscript(value=inner, slice=ast.Slice(upper=None, step=None)):
            return end_is_settled(inner, scope, index, depth + 1)
        case ast.Subscript(value=inner, slice=ast.Slice()):
            return False
        case ast.Subscript(value=inner):
            return _gives_lines(inner, scope, index, depth + 1)
        case ast.NamedExpr(value=inner):
            return end_is_settled(inner, scope, index, depth + 1)
        case ast.Name():
            return _name_is_settled(subject, scope, index, depth + 1)
        case _:
            return False


def _is_line_feed(argument: ast.expr) -> bool:
    return isinstance(argument, ast.Constant) and argument.value in ("\n", b"\n")


def _takes_line_feeds(argument: ast.expr) -> bool:
    """Whether `strip(argument)` takes line feeds away."""
    match argument:
        case ast.Constant(value=str() as text):
            return "\n" in text
        case ast.Constant(value=bytes() as data):
            return b"\n" in data
        case ast.Constant(value=None):
            return True
        case _:
            return False


def _name_is_settled(name: ast.Name, scope: Scope, index: Index, depth: int) -> bool:
    value = reaching_value(name, scope, index)
    if value is not None:
        return end_is_settled(value, scope, index, depth)
    owner = scope.find(name.id)
    bindings = owner.bindings.get(name.id, []) if owner is not None else []
    for binding in bindings:
        if binding.kind == "value" and binding.value is not None:
            # `line = line.strip()` says nothing of what `line` was before: the other bindings do.
            if not end_is_settled(binding.value, binding.scope, index, depth):
                return False
        elif binding.kind == "loop" and isinstance(binding.node, ast.Name):
            if not _loop_gives_lines(binding.node, binding.scope, index, depth):
                return False
        else:
            return False
    return bool(bindings)


def _loop_gives_lines(target: ast.Name, scope: Scope, index: Index, depth: int) -> bool:
    node: ast.AST = target
    last = True
    parent = index.parents.get(node)
    while isinstance(parent, ast.Tuple):
        last = last and parent.elts[-1] is node
        node, parent = parent, index.parents.get(parent)
    if not isinstance(parent, (ast.For, ast.AsyncFor, ast.comprehension)):
        return False
    given = parent.iter
    if node is not target:
        match given:  # for number, line in enumerate(lines)
            case ast.Call(func=ast.Name(id="enumerate"), args=[inner, *_]) if last:
                given = inner
            case _:
                return False
    return _gives_lines(given, scope, index, depth + 1)


def _gives_lines(node: ast.expr, scope: Scope, index: Index, depth: int) -> bool:
    """Whether `node` is a sequence of lines, or of texts that were stripped."""
    if depth > _DEEPEST:
        return False
    match node:
        case ast.Call(func=ast.Attribute(attr="split" | "rsplit"), args=arguments):
            return not arguments or _takes_line_feeds(arguments[0])
        case ast.Call(func=ast.Attribute(attr=method)):
            return method in _LINES
        case ast.Call(func=ast.Name(id="sorted" | "list" | "tuple" | "reversed" | "iter"), args=[inner, *_]):
            return _gives_lines(inner, scope, index, depth + 1)
        case ast.Call(func=ast.Name(id=function)):
            return function in _READERS
        case ast.Subscript(value=inner, slice=ast.Slice()):
            return _gives_lines(inner, scope, index, depth + 1)
        case ast.Attribute(attr=name):
            return name in _STREAMS
        case ast.ListComp(elt=element) | ast.GeneratorExp(elt=element):
            inner_scope = next((each for each in scope.children if each.node is node), None)
            return inner_scope is not None and end_is_settled(element, inner_scope, index, depth + 1)
        case ast.Name():
            return _name_gives_lines(node, scope, index, depth + 1)
        case _:
            return False


def _name_gives_lines(name: ast.Name, scope: Scope, index: Index, depth: int) -> bool:
    value = reaching_value(name, scope, index)
    if value is not None:
        return _gives_lines(value, scope, index, depth)
    owner = scope.find(name.id)
    bindings = owner.bindings.get(name.id, []) if owner is not None else []
    for binding in bindings:
        if binding.kind == "value" and binding.value is not None:
            if not _gives_lines(binding.value, binding.scope, index, depth):
                return False
        elif binding.kind == "unpacked" and isinstance(index.parents.get(binding.node), ast.withitem):
            item = index.parents[binding.node]
            assert isinstance(item, ast.withitem)
            if not _gives_lines(item.context_expr, binding.scope, index, depth):
                return False
        else:
            return False
    return bool(bindings)
