r"""Islands: the parts of a pattern that may be replaced without a look at the rest.

An island is a run of neighbouring nodes (items of a sequence, branches of an alternation, or a single node)
without capturing groups, anchors, look-around, atomic groups and references. The text around it stays byte
for byte; the island's own text must hold no comment, and no blank under VERBOSE.

`expression_of` reads an island as an expression, `splice` puts new texts into the pattern, and `shape`
compares trees up to spans, plain groups and the nesting of sequences, so that a spliced text can be checked
to differ from the original in its islands only.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Literal, TypeAlias

from patlint.machine.algebra import Algebra
from patlint.machine.expr import Expr, Opaque
from patlint.syntax import tree as t
from patlint.syntax.classes import char_set

Place: TypeAlias = Literal["loose", "beside", "tight"]
Through: TypeAlias = Literal["plain", "anchors", "groups"]
"""What an island may hold beside what looks at nothing: nothing else, anchors, or unnamed groups."""
_TYPE_FLAGS = t.ASCII | t.LOCALE | t.UNICODE
_LEAF_FLAGS = t.IGNORECASE | t.LOCALE | t.MULTILINE | t.DOTALL | t.UNICODE | t.ASCII
_BLANKS = " \t\n\r\v\f#"


@dataclass(frozen=True, slots=True)
class Island:
    """`nodes` side by side, as items of a sequence or as branches (`branches`); `place` says how tightly a
    new text must hold together, `flags` hold there, `first` and `last` whether it touches the ends of the
    pattern."""

    nodes: tuple[t.Node, ...]
    branches: bool
    place: Place
    flags: int
    first: bool = False
    last: bool = False

    @property
    def span(self) -> t.Span:
        return self.nodes[0].span[0], self.nodes[-1].span[1]

    @property
    def node(self) -> t.Node:
        if len(self.nodes) == 1:
            return self.nodes[0]
        return t.Alternation(self.span, self.nodes) if self.branches else t.Sequence(self.span, self.nodes)


def is_pure(node: t.Node, is_bytes: bool, through: Through = "plain") -> bool:
    """Whether `node` neither looks outside itself nor sets groups, but for what is let `through`."""
    match node:
        case t.Literal() | t.Dot() | t.ClassEscape():
            return True
        case t.Set():
            return bool(char_set(node, is_bytes))
        case t.Sequence() | t.Alternation():
            return all(is_pure(part, is_bytes, through) for part in t.children(node))
        case t.Group():
            plain = node.index is None and not (node.add_flags | node.del_flags) & (t.VERBOSE | t.LOCALE)
            return (plain or (through == "groups" and node.name is None)) and is_pure(
                node.body, is_bytes, through
            )
        case t.Repeat():
            return node.kind != "possessive" and node.maximum != 0 and is_pure(node.body, is_bytes, through)
        case t.Anchor():
            return through == "anchors"
        case _:
            return False


def islands(pattern: t.Pattern, through: Through = "plain") -> Iterator[Island]:
    """The largest islands of `pattern`, from left to right."""
    flags = pattern.flags & _LEAF_FLAGS
    yield from _below(pattern.root, "loose", flags, True, True, pattern.is_bytes, through)


def inner_islands(island: Island, is_bytes: bool, through: Through = "plain") -> Iterator[Island]:
    """The islands directly below the nodes of `island`."""
    count = len(island.nodes)
    for index, node in enumerate(island.nodes):
        first = island.first and (island.branches or index == 0)
        last = island.last and (island.branches or index == count - 1)
        if count > 1:
            place: Place = "loose" if island.branches else "beside"
            yield Island((node,), False, place, island.flags, first, last)
        else:
            yield from _inside(node, island.place, island.flags, first, last, is_bytes, through)


def _below(
    node: t.Node, place: Place, flags: int, first: bool, last: bool, is_bytes: bool, through: Through
) -> Iterator[Island]:
    if is_pure(node, is_bytes, through):
        yield Island((node,), False, place, flags, first, last)
    else:
        yield from _inside(node, place, flags, first, last, is_bytes, through)


def _inside(
    node: t.Node, place: Place, flags: int, first: bool, last: bool, is_bytes: bool, through: Through
) -> Iterator[Island]:
    match node:
        case t.Sequence() | t.Alternation():
            parts = t.children(node)
            branches = isinstance(node, t.Alternation)
            whole_is_pure = is_pure(node, is_bytes, through)
            run: list[t.Node] = []
            begin = 0
            for index, part in enumerate((*parts, None)):
                if part is not None and not whole_is_pure and is_pure(part, is_bytes, through):
                    begin = begin if run else index
                    run.append(part)
                    continue
                if run:
                    at_start = first and (branches or begin == 0)
                    at_end = last and (branches or index == len(parts))
                    yield Island(
                        tuple(run), branches, "loose" if branches else "beside", flags, at_start, at_end
                    )
                    run = []
                if part is not None:
                    at_start = first and (branches or index == 0)
                    at_end = last and (branches or index == len(parts) - 1)
                    inner: Place = "loose" if branches else "beside"
                    yield from _below(part, inner, flags, at_start, at_end, is_bytes, through)
        case t.Group():
            if (node.add_flags | node.del_flags) & (t.VERBOSE | t.LOCALE):
                return
            if node.add_flags & _TYPE_FLAGS:
                flags &= ~_TYPE_FLAGS
            flags = (flags | node.add_flags) & ~node.del_flags & _LEAF_FLAGS
            first, last = first and node.index is None, last and node.index is None
            yield from _below(node.body, "loose", flags, first, last, is_bytes, through)
        case t.Repeat():
            yield from _below(node.body, "tight", flags, False, False, is_bytes, through)
        case t.Look() | t.Atomic():
            yield from _below(node.body, "loose", flags, False, False, is_bytes, through)
        case _:
            return


def mixes_cases(node: t.Node, is_bytes: bool) -> bool:
    """Whether the same letter is written in both cases where case does not count, so that the author's spelling
    cannot be kept."""
    codes: dict[object, int] = {}
    return any(
        codes.setdefault(char_set(each, is_bytes), each.code) != each.code
        for each in t.walk(node)
        if isinstance(each, t.Literal) and each.flags & t.IGNORECASE
    )


def has_comment(text: str, verbose: bool) -> bool:
    """Whether an island's text may hold a comment or, under VERBOSE, layout."""
    return "(?#" in text or (verbose and any(blank in text for blank in _BLANKS))


def expression_of(node: t.Node, algebra: Algebra, is_bytes: bool) -> Expr:
    """The expression of a pure node; capturing groups count as plain ones, anchors as texts that stay."""
    match node:
        case t.Literal() | t.Dot() | t.ClassEscape() | t.Set():
            return algebra.chars(char_set(node, is_bytes))
        case t.Sequence():
            return algebra.chain([expression_of(item, algebra, is_bytes) for item in node.items])
        case t.Alternation():
            return algebra.choice([expression_of(branch, algebra, is_bytes) for branch in node.branches])
        case t.Group():
            return expression_of(node.body, algebra, is_bytes)
        case t.Repeat():
            body = expression_of(node.body, algebra, is_bytes)
            return algebra.times(body, node.minimum, node.maximum, node.kind == "lazy")
        case t.Anchor():
            return Opaque(node.kind)
    raise ValueError(f"{type(node).__name__} belongs to no island")


def splice(text: str, edits: list[tuple[t.Span, str]]) -> str:
    """`text` with the spans, which must not overlap, replaced."""
    for (start, end), new in sorted(edits, reverse=True):
        text = text[:start] + new + text[end:]
    return text


Shape: TypeAlias = tuple[object, ...]


def shape(node: t.Node, swaps: Mapping[int, tuple[int, t.Node]] | None = None) -> Shape:
    """`node` up to spans, plain groups and nesting; `swaps` puts another node in the place of so many
    neighbours (told by the `id` of the first)."""
    swaps = swaps or {}
    if id(node) in swaps:
        return shape(swaps[id(node)][1])
    match node:
        case t.Sequence() | t.Alternation():
            kind = type(node).__name__
            parts: list[object] = []
            skip = 0
            for part in t.children(node):
                if skip:
                    skip -= 1
                    continue
                if id(part) in swaps:
                    count, other = swaps[id(part)]
                    skip = count - 1
                    below = shape(other)
                else:
                    below = shape(part, swaps)
                parts.extend(below[1:] if below[0] == kind else (below,))
            only = parts[0] if len(parts) == 1 else (kind, *parts)
            assert isinstance(only, tuple)
            return only
        case t.Group(index=None, add_flags=0, del_flags=0):
            return shape(node.body, swaps)
        case t.Group():
            return ("Group", node.index, node.name, node.add_flags, node.del_flags, shape(node.body, swaps))
        case t.Repeat():
            return ("Repeat", node.minimum, node.maximum, node.kind, shape(node.body, swaps))
        case t.Look():
            return ("Look", node.ahead, node.negated, shape(node.body, swaps))
        case t.Atomic():
            return ("Atomic", shape(node.body, swaps))
        case t.Conditional():
            no = None if node.no is None else shape(node.no, swaps)
            return ("Conditional", node.index, node.name, shape(node.yes, swaps), no)
        case t.Set():
            items = tuple(replace(item, span=(0, 0)) for item in node.items)
            return ("Leaf", replace(node, span=(0, 0), items=items))
        case _:
            return ("Leaf", replace(node, span=(0, 0)))


def complexity(node: t.Node) -> tuple[int, int]:
    """How deep brackets are nested, and the number of operators: bars, repeats, sets (a lazy repeat counts
    twice)."""
    match node:
        case t.Literal():
            return 0, 0
        case t.Set(items=(t.Literal(),), negated=False):
            return 0, 0
        case t.Dot() | t.ClassEscape() | t.Set() | t.Anchor() | t.BackReference():
            return 0, 1
    parts = [complexity(part) for part in t.children(node)]
    depth = max((part[0] for part in parts), default=0)
    operators = sum(part[1] for part in parts)
    match node:
        case t.Alternation():
            operators += len(node.branches) - 1
        case t.Repeat():
            operators += 2 if node.kind == "lazy" else 1
        case t.Group() | t.Look() | t.Atomic() | t.Conditional():
            depth += 1
    return depth, operators
