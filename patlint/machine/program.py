"""The program of a pattern: the one form in which the meaning of each construct is written.

A program is a tuple of instructions with priorities; control goes to the targets that an instruction names,
the first before the second. The step-counting matcher runs it, the automata are built from it, ambiguity is
decided on it.

- One-character repeats are one instruction (`Run`), as in the engine.
- Longer repeats are copied: `minimum` copies of the body, then the optional ones. Where the body can be
  empty, `Iterate` is the fork with the engine's guard: it remembers where this loop last began an iteration
  and only leaves when it is still there. `Enter` forgets that place. Below the minimum there is no guard.
- The bodies of `Look` and `Atomic` are sub-programs that end in an `Accept` of their own.
- A possessive repeat is an `Atomic` around a greedy loop whose every iteration is `Atomic`: the first way
  through that loop takes an iteration wherever one is to be had, and nothing goes back into any of them.

>>> from patlint.syntax.parser import parse
>>> [type(instruction).__name__ for instruction in compile_tree(parse("ab*")).code]
['Accept', 'Run', 'Char']

Programs are built from the end: each instruction stands after those it leads to, except in loops.
Limit: `instructions`.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Literal, TypeAlias

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits
from patlint.machine.engine_tree import as_engine_runs
from patlint.syntax import tree as t
from patlint.syntax.charset import EMPTY, CharSet
from patlint.syntax.classes import char_set, is_locale_dependent, word_set

AssertKind: TypeAlias = Literal["start", "line-start", "end", "final", "line-end", "word", "not-word"]
Fold: TypeAlias = Literal["exact", "ascii", "unicode"]


@dataclass(frozen=True, slots=True)
class Char:
    """Read one character of `chars`."""

    chars: CharSet
    next: int


@dataclass(frozen=True, slots=True)
class Run:
    """Read `minimum` to `maximum` (None: any number) characters of `chars`."""

    chars: CharSet
    minimum: int
    maximum: int | None
    kind: t.RepeatKind
    next: int
    any_char: bool = False
    """`.` under DOTALL: the engine goes to the end without looking at the characters."""


@dataclass(frozen=True, slots=True)
class Fork:
    first: int
    second: int


@dataclass(frozen=True, slots=True)
class Enter:
    """Forget where `loop` last began an iteration."""

    loop: int
    next: int


@dataclass(frozen=True, slots=True)
class Iterate:
    """`Fork` between another iteration and the exit; only the exit where the last iteration began here."""

    loop: int
    body: int
    exit: int
    lazy: bool


@dataclass(frozen=True, slots=True)
class Save:
    """Store the place: slot 2 * group at a group's start, 2 * group + 1 at its end."""

    slot: int
    next: int


@dataclass(frozen=True, slots=True)
class Assert:
    """A condition on the characters beside the place; `words` are the word characters meant."""

    kind: AssertKind
    next: int
    words: CharSet = EMPTY


@dataclass(frozen=True, slots=True)
class Look:
    body: int
    end: int
    ahead: bool
    negated: bool
    width: int
    next: int


@dataclass(frozen=True, slots=True)
class Atomic:
    body: int
    end: int
    next: int


@dataclass(frozen=True, slots=True)
class Back:
    """The text of `group` again; fails where the group has none."""

    group: int
    fold: Fold
    next: int


@dataclass(frozen=True, slots=True)
class Test:
    """Whether `group` has matched."""

    group: int
    yes: int
    no: int


@dataclass(frozen=True, slots=True)
class Accept:
    pass


Instruction: TypeAlias = (
    Char | Run | Fork | Enter | Iterate | Save | Assert | Look | Atomic | Back | Test | Accept
)


@dataclass(frozen=True, slots=True)
class Program:
    """`code` with `start` and `end` (the outermost Accept); `spans[i]` is what instruction i was made from.

    `groups` counts capturing groups, `loops` guarded loops.
    """

    code: tuple[Instruction, ...]
    spans: tuple[t.Span, ...]
    start: int
    end: int
    groups: int
    loops: int
    is_bytes: bool
    locale: tuple[t.Span, ...] = ()
    """Parts that depend on the locale: the matcher takes them as ASCII, the automata as anything."""
    misread: tuple[t.Span, ...] = ()
    """Classes at the beginning under scoped ASCII or UNICODE: CPython's search looks for them under the flags
    outside the scope, and may pass over what match finds."""
    tree: t.Node | None = field(default=None, compare=False, repr=False)
    """What it was compiled from, as the engine rewrites it."""


_TARGETS = frozenset({"next", "first", "second", "body", "end", "exit", "yes", "no"})
"""The fields of instructions that name other instructions."""

Shape: TypeAlias = tuple[tuple[object, ...], ...]


def shape(program: Program, entry: int) -> Shape:
    """What stands at `entry`, told without its place: equal shapes mean the same."""
    number = {entry: 0}
    order = [entry]
    rows: list[tuple[object, ...]] = []
    for pc in order:
        op = program.code[pc]
        row: list[object] = [type(op), program.spans[pc] in program.locale]
        for name in op.__dataclass_fields__:
            value = getattr(op, name)
            if name in _TARGETS:
                if value not in number:
                    number[value] = len(order)
                    order.append(value)
                value = number[value]
            row.append(value)
        rows.append(tuple(row))
    return tuple(rows)


@dataclass(slots=True)
class _Builder:
    is_bytes: bool
    limit: int
    code: list[Instruction] = field(default_factory=list)
    spans: list[t.Span] = field(default_factory=list)
    loops: int = 0

    def add(self, instruction: Instruction, span: t.Span) -> int:
        if len(self.code) >= self.limit:
            raise LimitReached("instructions", self.limit)
        self.code.append(instruction)
        self.spans.append(span)
        return len(self.code) - 1

    def emit(self, node: t.Node, then: int) -> int:
        """Instructions for `node` followed by what stands at `then`; the place of the first of them."""
        span = node.span
        match node:
            case t.Literal() | t.Dot() | t.ClassEscape() | t.Set():
                return self.add(Char(char_set(node, self.is_bytes), then), span)
            case t.Sequence():
                for item in reversed(node.items):
                    then = self.emit(item, then)
                return then
            case t.Alternation():
                entry = self.emit(node.branches[-1], then)
                for branch in reversed(node.branches[:-1]):
                    entry = self.add(Fork(self.emit(branch, then), entry), span)
                return entry
            case t.Group():
                if node.index is None:
                    return self.emit(node.body, then)
                close = self.add(Save(2 * node.index + 1, then), span)
                return self.add(Save(2 * node.index, self.emit(node.body, close)), span)
            case t.Repeat():
                return self.repeat(node, then)
            case t.Anchor():
                return self.add(self.assertion(node, then), span)
            case t.Look():
                end = self.add(Accept(), span)
                body = self.emit(node.body, end)
                return self.add(Look(body, end, node.ahead, node.negated, node.width, then), span)
            case t.Atomic():
                end = self.add(Accept(), span)
                return self.add(Atomic(self.emit(node.body, end), end, then), span)
            case t.BackReference():
                return self.add(Back(node.index, _fold(node.flags, self.is_bytes), then), span)
            case t.Conditional():
                no = then if node.no is None else self.emit(node.no, then)
                return self.add(Test(node.index, self.emit(node.yes, then), no), span)

    def assertion(self, node: t.Anchor, then: int) -> Assert:
        multiline = bool(node.flags & t.MULTILINE)
        match node.kind:
            case "^":
                return Assert("line-start" if multiline else "start", then)
            case "$":
                return Assert("line-end" if multiline else "final", then)
            case r"\A":
                return Assert("start", then)
            case r"\Z":
                return Assert("end", then)
            case r"\b":
                return Assert("word", then, word_set(node.flags, self.is_bytes))
            case r"\B":
                return Assert("not-word", then, word_set(node.flags, self.is_bytes))

    def repeat(self, node: t.Repeat, then: int) -> int:
        body = one_character(node.body)
        span = node.span
        if body is not None:
            any_char = isinstance(body, t.Dot) and bool(body.flags & t.DOTALL)
            chars = char_set(body, self.is_bytes)
            return self.add(Run(chars, node.minimum, node.maximum, node.kind, then, any_char), span)
        if node.maximum == 0:
            return then
        if node.kind != "possessive":
            return self.copies(node, node.body, node.kind == "lazy", then)
        end = self.add(Accept(), span)
        iteration = t.Atomic(node.body.span, node.body)
        return self.add(Atomic(self.copies(node, iteration, False, end), end, then), span)

    def copies(self, node: t.Repeat, body: t.Node, lazy: bool, then: int) -> int:
        span = node.span
        guarded = can_be_empty(body) and node.maximum != 1
        loop = self.loops
        if guarded:
            self.loops += 1
        if node.maximum is None:
            fork = self.add(Accept(), span)  # a stand-in: the loop leads back to this place
            self.code[fork] = self.choice(self.emit(body, fork), then, lazy, loop if guarded else None)
            entry = fork
        else:
            entry = then
            for _ in range(node.maximum - node.minimum):
                choice = self.choice(self.emit(body, entry), then, lazy, loop if guarded else None)
                entry = self.add(choice, span)
        if guarded and entry != then:
            entry = self.add(Enter(loop, entry), span)
        for _ in range(node.minimum):
            before = len(self.code)
            entry = self.emit(body, entry)
            if len(self.code) == before:
                break  # a body without instructions, such as (?:)
        return entry

    def choice(self, body: int, exit: int, lazy: bool, loop: int | None) -> Fork | Iterate:
        if loop is not None:
            return Iterate(loop, body, exit, lazy)
        return Fork(exit, body) if lazy else Fork(body, exit)


def one_character(node: t.Node) -> t.CharNode | None:
    """The one-character node that `node` is, through groups that do not capture, else None."""
    while isinstance(node, t.Group) and node.index is None:
        node = node.body
    match node:
        case t.Literal() | t.Dot() | t.ClassEscape() | t.Set():
            return node
        case _:
            return None


def can_be_empty(node: t.Node) -> bool:
    """Whether `node` may match without reading; True in doubt (a back-reference, an assertion)."""
    match node:
        case t.Literal() | t.Dot() | t.ClassEscape() | t.Set():
            return False
        case t.Sequence():
            return all(can_be_empty(item) for item in node.items)
        case t.Alternation():
            return any(can_be_empty(branch) for branch in node.branches)
        case t.Group() | t.Atomic():
            return can_be_empty(node.body)
        case t.Repeat():
            return node.minimum == 0 or can_be_empty(node.body)
        case t.Conditional():
            return can_be_empty(node.yes) or node.no is None or can_be_empty(node.no)
        case t.Anchor() | t.Look() | t.BackReference():
            return True


def _fold(flags: int, is_bytes: bool) -> Fold:
    if not flags & t.IGNORECASE:
        return "exact"
    return "ascii" if is_bytes or flags & t.ASCII else "unicode"


def compile_tree(
    pattern: t.Pattern, limits: Limits = DEFAULT_LIMITS, *, engine: bool = True, root: t.Node | None = None
) -> Program:
    """The program of `pattern`, or of `root`, a part of it.

    With `engine` the tree is first rewritten as the engine does (`engine_tree`); without, each instruction
    stands for a node of the tree as written. Language and spans are the same.
    Raises LimitReached("instructions").
    """
    node = pattern.root if root is None else root
    node = as_engine_runs(node) if engine else node
    program = compile_node(node, pattern.groups, pattern.is_bytes, limits)
    misread = _misread(node, pattern.flags)
    return replace(program, misread=misread) if misread else program


def compile_node(node: t.Node, groups: int, is_bytes: bool, limits: Limits) -> Program:
    """The program of a tree as it is. Raises LimitReached("instructions")."""
    builder = _Builder(is_bytes, limits.instructions)
    end = builder.add(Accept(), node.span)
    start = builder.emit(node, end)
    return Program(
        tuple(builder.code),
        tuple(builder.spans),
        start,
        end,
        groups,
        builder.loops,
        is_bytes,
        _locale_spans(node) if is_bytes else (),
        tree=node,
    )


def _misread(node: t.Node, flags: int) -> tuple[t.Span, ...]:
    match node:
        case t.Group():
            return _misread(node.body, flags)
        case t.Sequence() if node.items:
            return _misread(node.items[0], flags)
        case t.Alternation():
            return tuple(span for branch in node.branches for span in _misread(branch, flags))
        case t.ClassEscape() | t.Set() if (node.flags ^ flags) & t.ASCII:
            items = node.items if isinstance(node, t.Set) else (node,)
            return (node.span,) if any(isinstance(item, t.ClassEscape) for item in items) else ()
        case _:
            return ()


def _locale_spans(node: t.Node) -> tuple[t.Span, ...]:
    found = []
    for part in t.walk(node):
        one = one_character(part.body) if isinstance(part, t.Repeat) else None
        if is_locale_dependent(part) or (one is not None and is_locale_dependent(one)):
            found.append(part.span)
    return tuple(found)
