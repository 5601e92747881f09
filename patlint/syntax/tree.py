"""The tree of a pattern, faithful to its text.

Every node carries `span`, the half-open range of offsets in the pattern that it was read from, so that a
finding can point and a rewrite can keep what it does not touch; how a literal was spelled is the slice of
the pattern at its span. Flags are resolved while parsing: each leaf whose meaning depends on flags carries
those in force where it stands (`flags`, the bits of `re`'s own constants without VERBOSE and DEBUG).

Canonical shape: no `Sequence` of one item, no `Alternation` of one branch, no `Sequence` directly in a
`Sequence`; the empty expression is `Sequence((0, 0), ())` with its own span. Comments, VERBOSE blanks and
global flag groups leave no node.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Literal as OneOf
from typing import TypeAlias

Span: TypeAlias = tuple[int, int]

# The values of re's flags; plain integers, because operations on re.RegexFlag are slow.
IGNORECASE = 2
LOCALE = 4
MULTILINE = 8
DOTALL = 16
UNICODE = 32
VERBOSE = 64
DEBUG = 128
ASCII = 256

FLAG_NAMES = {
    IGNORECASE: "IGNORECASE",
    LOCALE: "LOCALE",
    MULTILINE: "MULTILINE",
    DOTALL: "DOTALL",
    UNICODE: "UNICODE",
    VERBOSE: "VERBOSE",
    DEBUG: "DEBUG",
    ASCII: "ASCII",
}
FLAG_LETTERS = {
    "i": IGNORECASE,
    "L": LOCALE,
    "m": MULTILINE,
    "s": DOTALL,
    "u": UNICODE,
    "x": VERBOSE,
    "a": ASCII,
}

RepeatKind: TypeAlias = OneOf["greedy", "lazy", "possessive"]
AnchorKind: TypeAlias = OneOf["^", "$", r"\A", r"\Z", r"\b", r"\B"]
Category: TypeAlias = OneOf["d", "D", "s", "S", "w", "W"]


@dataclass(frozen=True, slots=True)
class Literal:
    """One character (`code`: code point or byte), outside or inside a set."""

    span: Span
    code: int
    flags: int = 0


@dataclass(frozen=True, slots=True)
class Dot:
    span: Span
    flags: int = 0


@dataclass(frozen=True, slots=True)
class ClassEscape:
    r"""`\d`, `\D`, `\s`, `\S`, `\w` or `\W`, outside or inside a set."""

    span: Span
    kind: Category
    flags: int = 0


@dataclass(frozen=True, slots=True)
class Range:
    """`low-high` in a set, both ends included."""

    span: Span
    low: int
    high: int


SetItem: TypeAlias = Literal | Range | ClassEscape


@dataclass(frozen=True, slots=True)
class Set:
    """`[...]`; the items in the order in which they are written."""

    span: Span
    items: tuple[SetItem, ...]
    negated: bool = False
    flags: int = 0


@dataclass(frozen=True, slots=True)
class Anchor:
    span: Span
    kind: AnchorKind
    flags: int = 0


@dataclass(frozen=True, slots=True)
class Sequence:
    span: Span
    items: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Alternation:
    span: Span
    branches: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Group:
    """`(...)` with `index` (and `name`), or `(?:...)` / `(?i-s:...)` with `index` None."""

    span: Span
    body: Node
    index: int | None = None
    name: str | None = None
    add_flags: int = 0
    del_flags: int = 0


@dataclass(frozen=True, slots=True)
class Repeat:
    """`body` from `minimum` to `maximum` times (None: without bound). The span takes in the body."""

    span: Span
    body: Node
    minimum: int
    maximum: int | None
    kind: RepeatKind = "greedy"


@dataclass(frozen=True, slots=True)
class Look:
    """Look-ahead or look-behind; `width` is the fixed width of a look-behind in characters."""

    span: Span
    body: Node
    ahead: bool
    negated: bool
    width: int = 0


@dataclass(frozen=True, slots=True)
class Atomic:
    span: Span
    body: Node


@dataclass(frozen=True, slots=True)
class BackReference:
    r"""`\1` or `(?P=name)`."""

    span: Span
    index: int
    name: str | None = None
    flags: int = 0


@dataclass(frozen=True, slots=True)
class Conditional:
    """`(?(index)yes|no)`; `name` where the group was named, `no` None where it is not written."""

    span: Span
    index: int
    name: str | None
    yes: Node
    no: Node | None


CharNode: TypeAlias = Literal | Dot | ClassEscape | Set
Node: TypeAlias = (
    Literal
    | Dot
    | ClassEscape
    | Set
    | Anchor
    | Sequence
    | Alternation
    | Group
    | Repeat
    | Look
    | Atomic
    | BackReference
    | Conditional
)


@dataclass(frozen=True, slots=True)
class Pattern:
    """A parsed pattern.

    `text` is what was parsed, `flags` the flags in force at the end (what `re.compile(...).flags` shows,
    UNICODE included for str), `inline` the part of them that global flag groups in the text gave and
    the caller did not, `groups` the number of capturing groups, `names` their names to indexes.
    """

    text: str | bytes
    root: Node
    flags: int
    inline: int = 0
    groups: int = 0
    names: dict[str, int] = field(default_factory=dict, hash=False)

    @property
    def is_bytes(self) -> bool:
        return isinstance(self.text, bytes)


def children(node: Node) -> tuple[Node, ...]:
    """The nodes directly below `node`, in the order of the text (items of a set are not nodes)."""
    match node:
        case Sequence():
            return node.items
        case Alternation():
            return node.branches
        case Group() | Repeat() | Look() | Atomic():
            return (node.body,)
        case Conditional():
            return (node.yes,) if node.no is None else (node.yes, node.no)
        case _:
            return ()


def walk(node: Node) -> Iterator[Node]:
    """`node` and everything below it, parents first, in the order of the text."""
    stack = [node]
    while stack:
        node = stack.pop()
        yield node
        stack.extend(reversed(children(node)))
