"""One walk over the syntax tree of a file: who binds which name, where names and attributes are read.

`build_index(tree)` gives an `Index`: the tree of scopes with their bindings and reads, the attributes
that are read and stored, the parent of every node. All questions of the package
(what is this name, what happens to this value) are answered from it without walking again.

The walk is iterative and flat, since it decides what the whole package costs: about one `ast.parse` for the
files that mention `re` at all, nothing for the others.
"""

from __future__ import annotations

import ast
from collections.abc import Callable
from dataclasses import dataclass, field

from patlint.source.scopes import Binding, Scope, bind_target

_SKIPPED = {
    "ctx", "op", "ops", "attr", "arg", "id", "name", "names", "module", "level", "kind", "type_comment",
    "conversion", "simple", "is_async", "asname", "rest", "kwd_attrs", "type_ignores", "cls", "tag",
}  # fmt: skip
_FIELDS: dict[type[ast.AST], tuple[str, ...]] = {
    kind: tuple(
        name for name in kind._fields if name not in _SKIPPED or (name, kind) == ("cls", ast.MatchClass)
    )
    for kind in vars(ast).values()
    if isinstance(kind, type) and issubclass(kind, ast.AST)
}
_FIELDS[ast.MatchSingleton] = ()
_FIELDS[ast.Constant] = ()
_FIELDS[ast.Name] = ()
_FIELDS[ast.keyword] = ("value",)
_FUNCTIONS = (ast.FunctionDef, ast.AsyncFunctionDef, ast.Lambda)
_COMPREHENSIONS = (ast.ListComp, ast.SetComp, ast.DictComp, ast.GeneratorExp)


@dataclass(frozen=True, slots=True)
class AttributeUse:
    """An attribute that is read or stored; `value` is what a plain assignment stores, else None."""

    node: ast.Attribute
    scope: Scope
    value: ast.expr | None = None


@dataclass(slots=True)
class Index:
    """What one walk found; see the module's docstring."""

    tree: ast.Module
    module: Scope
    parents: dict[ast.AST, ast.AST] = field(default_factory=dict)
    reads: dict[str, list[AttributeUse]] = field(default_factory=dict)
    stores: dict[str, list[AttributeUse]] = field(default_factory=dict)
    star_lines: list[int] = field(default_factory=list)
    """Lines of `from … import *`."""
    classes: dict[ast.ClassDef, Scope] = field(default_factory=dict)
    dynamic: bool = False
    """exec or globals() may rebind names of the module."""
    scopes: list[Scope] = field(default_factory=list)
    """All scopes, the module's first."""

    def release(self) -> None:
        """Cuts the circles between scopes, bindings and nodes, so that all is freed at once."""
        for scope in self.scopes:
            scope.parent = None
            scope.children.clear()
            scope.bindings.clear()
            scope.loads.clear()
        self.parents.clear()

    def statement(self, node: ast.AST) -> ast.stmt | None:
        """The innermost statement that holds `node`."""
        current: ast.AST | None = node
        while current is not None and not isinstance(current, ast.stmt):
            current = self.parents.get(current)
        return current


def build_index(tree: ast.Module) -> Index:
    """Cost: one visit of every node."""
    index = Index(tree, Scope("module", tree, None))
    index.module.pending = list(tree.body)
    for node in tree.body:
        index.parents[node] = tree
    queue = [index.module]
    everything = index.scopes = [index.module]
    while queue:
        scope = queue.pop()
        _walk_scope(scope, index, queue, everything)
    for scope in everything:
        scope.settle()
    index.dynamic = _is_dynamic(index, everything)
    return index


def _walk_scope(scope: Scope, index: Index, queue: list[Scope], everything: list[Scope]) -> None:
    stack = scope.pending
    parents = index.parents
    loads = scope.loads
    fields = _FIELDS
    handlers = _HANDLERS
    push = stack.append
    while stack:
        node = stack.pop()
        kind = node.__class__
        if kind is ast.Name:
            if node.ctx.__class__ is ast.Load:  # type: ignore[attr-defined]
                name = node.id  # type: ignore[attr-defined]
                if name in loads:
                    loads[name].append(node)  # type: ignore[arg-type]
                else:
                    loads[name] = [node]  # type: ignore[list-item]
            else:
                _bind_name(node, scope, parents)  # type: ignore[arg-type]
            continue
        handler = handlers.get(kind)
        if handler is not None:
            inner = handler(node, scope, index)
            if inner is not None:
                queue.append(inner)
                everything.append(inner)
                continue
        for name in fields[kind]:
            child = getattr(node, name, None)
            if child is None:
                continue
            if child.__class__ is list:
                for item in child:
                    if item is not None:
                        parents[item] = node
                        push(item)
            else:
                parents[child] = node
                push(child)


def _bind_name(node: ast.Name, scope: Scope, parents: dict[ast.AST, ast.AST]) -> None:
    if isinstance(node.ctx, ast.Del):
        scope.bind(node.id, Binding("deleted", node, scope))
        return
    parent: ast.AST | None = parents.get(node)
    while isinstance(parent, (ast.Tuple, ast.List, ast.Starred)):
        parent = parents.get(parent)
    match parent:
        case ast.Assign() | ast.AnnAssign() | ast.NamedExpr() | ast.AugAssign():
            return  # bound when the statement was met
        case ast.For() | ast.AsyncFor() | ast.comprehension():
            scope.bind(node.id, Binding("loop", node, scope))
        case _:
            scope.bind(node.id, Binding("unpacked", node, scope))


def _adopt(node: ast.AST, children: list[ast.AST], index: Index) -> None:
    for child in children:
        index.parents[child] = node


def _present(*groups: object) -> list[ast.AST]:
    nodes: list[ast.AST] = []
    for group in groups:
        if isinstance(group, list):
            nodes.extend(item for item in group if item is not None)
        elif isinstance(group, ast.AST):
            nodes.append(group)
    return nodes


def _function(node: ast.AST, scope: Scope, index: Index) -> Scope:
    assert isinstance(node, _FUNCTIONS)
    inner = Scope("function", node, scope)
    arguments = node.args
    index.parents[arguments] = node
    listed = [*arguments.posonlyargs, *arguments.args, *arguments.kwonlyargs]
    for argument in _present(listed, arguments.vararg, arguments.kwarg):
        assert isinstance(argument, ast.arg)
        index.parents[argument] = arguments
        inner.bind(argument.arg, Binding("parameter", argument, inner))
        if argument.annotation is not None:
            index.parents[argument.annotation] = argument
            scope.pending.append(argument.annotation)
    defaults = _present(arguments.defaults, arguments.kw_defaults)
    _adopt(arguments, defaults, index)
    scope.pending.extend(defaults)
    if isinstance(node, ast.Lambda):
        inner.pending = [node.body]
    else:
        outside = _present(node.decorator_list, node.returns)
        _adopt(node, outside, index)
        scope.pending.extend(outside)
        inner.pending = list(node.body)
        scope.bind(node.name, Binding("definition", node, scope))
    inner.pending.extend(_present(getattr(node, "type_params", None)))
    _adopt(node, inner.pending, index)
    return inner


def _class(node: ast.AST, scope: Scope, index: Index) -> Scope:
    assert isinstance(node, ast.ClassDef)
    inner = Scope("class", node, scope)
    outside = _present(node.decorator_list, node.bases, node.keywords)
    _adopt(node, outside, index)
    scope.pending.extend(outside)
    inner.pending = [*node.body, *_present(getattr(node, "type_params", None))]
    _adopt(node, inner.pending, index)
    scope.bind(node.name, Binding("definition", node, scope))
    index.classes[node] = inner
    return inner


def _comprehension(node: ast.AST, scope: Scope, index: Index) -> Scope:
    assert isinstance(node, _COMPREHENSIONS)
    inner = Scope("comprehension", node, scope)
    first = node.generators[0]
    index.parents[first.iter] = first
    scope.pending.append(first.iter)
    for generator in node.generators:
        index.parents[generator] = node
        own = _present(generator.target, generator.ifs, generator.iter if generator is not first else None)
        _adopt(generator, own, index)
        inner.pending.extend(own)
    heads = _present([node.key, node.value] if isinstance(node, ast.DictComp) else node.elt)
    _adopt(node, heads, index)
    inner.pending.extend(heads)
    return inner


def _assign(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.Assign)
    for target in node.targets:
        bind_target(target, node.value, node, scope)
        if isinstance(target, ast.Attribute):
            use = AttributeUse(target, scope, node.value)
            index.stores.setdefault(target.attr, []).append(use)


def _annotated(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.AnnAssign)
    if isinstance(node.target, ast.Attribute):
        use = AttributeUse(node.target, scope, node.value)
        index.stores.setdefault(node.target.attr, []).append(use)
    elif isinstance(node.target, ast.Name):
        if node.value is None:
            scope.declare(node.target.id)
        else:
            bind_target(node.target, node.value, node, scope)


def _augmented(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.AugAssign)
    if isinstance(node.target, ast.Name):
        scope.bind(node.target.id, Binding("augmented", node, scope))


def _walrus(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.NamedExpr)
    owner = scope
    while owner.kind == "comprehension" and owner.parent is not None:
        owner = owner.parent
    owner.bind(node.target.id, Binding("value", node, scope, node.value))


def _import(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.Import)
    for alias in node.names:
        if alias.asname:
            scope.bind(alias.asname, Binding("import", node, scope, module=alias.name))
        else:
            top = alias.name.split(".")[0]
            scope.bind(top, Binding("import", node, scope, module=top))


def _import_from(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.ImportFrom)
    module = "." * node.level + (node.module or "")
    for alias in node.names:
        if alias.name == "*":
            index.star_lines.append(node.lineno)
            scope.stars.append((node.lineno, module))
        else:
            name = alias.asname or alias.name
            scope.bind(name, Binding("import", node, scope, module=module, member=alias.name))


def _type_alias(node: ast.AST, scope: Scope, index: Index) -> None:
    name = getattr(node, "name", None)
    if isinstance(name, ast.Name):
        scope.bind(name.id, Binding("definition", node, scope))


def _global(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.Global)
    scope.globals.update(node.names)


def _nonlocal(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.Nonlocal)
    scope.nonlocals.update(node.names)


def _attribute(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.Attribute)
    use = AttributeUse(node, scope)
    if node.ctx.__class__ is ast.Load:
        index.reads.setdefault(node.attr, []).append(use)
    elif not isinstance(index.parents.get(node), (ast.Assign, ast.AnnAssign)):
        index.stores.setdefault(node.attr, []).append(use)


def _except(node: ast.AST, scope: Scope, index: Index) -> None:
    assert isinstance(node, ast.ExceptHandler)
    if node.name:
        scope.bind(node.name, Binding("unpacked", node, scope))


def _capture(node: ast.AST, scope: Scope, index: Index) -> None:
    name = getattr(node, "rest", None) if isinstance(node, ast.MatchMapping) else getattr(node, "name", None)
    if name:
        scope.bind(name, Binding("unpacked", node, scope))


_HANDLERS: dict[type[ast.AST], Callable[[ast.AST, Scope, Index], Scope | None]] = {
    ast.FunctionDef: _function,
    ast.AsyncFunctionDef: _function,
    ast.Lambda: _function,
    ast.ClassDef: _class,
    **{kind: _comprehension for kind in _COMPREHENSIONS},
    ast.Assign: _assign,
    ast.AnnAssign: _annotated,
    ast.AugAssign: _augmented,
    ast.NamedExpr: _walrus,
    ast.Import: _import,
    ast.ImportFrom: _import_from,
    ast.Global: _global,
    ast.Nonlocal: _nonlocal,
    ast.Attribute: _attribute,
    ast.ExceptHandler: _except,
    ast.MatchAs: _capture,
    ast.MatchStar: _capture,
    ast.MatchMapping: _capture,
}
if hasattr(ast, "TypeAlias"):  # since Python 3.12
    _HANDLERS[ast.TypeAlias] = _type_alias


def _is_dynamic(index: Index, everything: list[Scope]) -> bool:
    """Whether names of the module may be rebound where no assignment shows it."""
    for scope in everything:
        for node in scope.loads.get("exec", ()):
            call = index.parents.get(node)
            if isinstance(call, ast.Call) and call.func is node and len(call.args) == 1:
                return True
        for name in ("globals", "vars", "locals"):
            for node in scope.loads.get(name, ()):
                call = index.parents.get(node)
                above = index.parents.get(call) if call is not None else None
                stored = isinstance(above, ast.Subscript) and not isinstance(above.ctx, ast.Load)
                if stored or (
                    isinstance(above, ast.Attribute) and above.attr in ("update", "setdefault", "pop")
                ):
                    return True
    return False
