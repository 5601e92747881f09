r"""Pattern text to tree: the whole dialect of `re`, for a chosen version of Python.

`parse` gives a `Pattern` or raises `PatternError` where `re.compile` of that version refuses, with the same
position. Groups nested deeper than `limits.nesting` raise `LimitReached`.

>>> pattern = parse("a|(b)+")
>>> pattern.root.branches[1].span, pattern.groups
((2, 6), 1)

The rules were taken from experiments and from reading the parsers of CPython 3.10 to 3.13; what differs
between versions is in `dialect`. Limits: character names and the letters that a group name may hold come
from the running version's Unicode data.
"""

from __future__ import annotations

from dataclasses import replace

from patlint.limits import DEFAULT_LIMITS, LimitReached, Limits

from .bracket import read_set
from .counts import read_counts
from .dialect import Dialect, dialect_of
from .escapes import Boundary, Category, escape_outside
from .flag_group import TEMPLATE, TYPE_FLAGS, flag_of, read_flags
from .group_name import read_condition, read_name
from .scanner import END, PatternError, Scanner
from .tree import (
    ASCII,
    DOTALL,
    IGNORECASE,
    LOCALE,
    MULTILINE,
    UNICODE,
    VERBOSE,
    Alternation,
    Anchor,
    Atomic,
    BackReference,
    ClassEscape,
    Conditional,
    Dot,
    Group,
    Literal,
    Look,
    Node,
    Pattern,
    Repeat,
    RepeatKind,
    Sequence,
)
from .width import Width, width

__all__ = ["PatternError", "parse"]

_LEAF_FLAGS = IGNORECASE | LOCALE | MULTILINE | DOTALL | UNICODE | ASCII
_BLANKS = frozenset(" \t\n\r\v\f")
_SPECIAL = frozenset(".[{()*+?^$|")


def parse(
    text: str | bytes,
    flags: int = 0,
    target: tuple[int, int] | None = None,
    limits: Limits = DEFAULT_LIMITS,
) -> Pattern:
    """The tree of `text` under `flags` (the bits of `re`'s constants) for Python `target`.

    `target` is (3, 10) to (3, 13), None for the running version. Raises `PatternError` and `LimitReached`.
    """
    dialect = dialect_of(target)
    flags = int(flags)
    parser = _Parser(text, flags, dialect, limits)
    try:
        pattern = parser.pattern()
    except _TurnedVerbose:
        parser = _Parser(text, flags | VERBOSE, dialect, limits)
        parser.inline = VERBOSE
        try:
            pattern = parser.pattern()
        except _TurnedVerbose:
            raise PatternError(
                "(?x) may not follow (?-x) in the same pattern", None, kind="Verbose"
            ) from None
    if parser.late_flags:
        # Flags given late hold from the beginning: once more, with the flags known beforehand.
        again = _Parser(text, flags | parser.inline & VERBOSE, dialect, limits)
        again.leaf_base = parser.flags
        pattern = replace(pattern, root=again.pattern().root)
    return replace(pattern, inline=pattern.inline & ~flags) if pattern.inline & flags else pattern


class _TurnedVerbose(Exception):
    """A late (?x): 3.10 starts anew with VERBOSE."""


class _Parser:
    """One run over the text. `flags` are the global ones so far, `inline` those of them from the text."""

    def __init__(self, text: str | bytes, flags: int, dialect: Dialect, limits: Limits) -> None:
        self.text = text
        self.scanner = Scanner(text, dialect)
        self.dialect = dialect
        self.limits = limits
        self.flags = flags
        self.inline = 0
        self.leaf_base: int | None = None
        self.late_flags = False
        self.names: dict[str, int] = {}
        self.bodies: list[Node | None] = [None]
        self.widths: dict[int, Width] = {}
        self.first_inner_group: int | None = None
        self.conditions: dict[int, int] = {}
        self.has_repeat = False
        self.late_refusal: PatternError | None = None

    def pattern(self) -> Pattern:
        flags = self.flags
        root = self.alternation(self.leaf_flags(), bool(flags & VERBOSE), 0)
        self.check_flags()
        if self.scanner.next:
            raise self.scanner.error("this parenthesis closes nothing")
        for index, position in self.conditions.items():
            if index >= len(self.bodies):
                raise PatternError(f"there is no group {index}", position)
        if self.dialect.template_flag and self.flags & TEMPLATE and self.has_repeat:
            raise PatternError("the TEMPLATE flag forbids repeats")
        if self.late_refusal is not None:
            raise self.late_refusal
        return Pattern(self.text, root, self.flags, self.inline, len(self.bodies) - 1, self.names)

    def check_flags(self) -> None:
        if isinstance(self.text, str):
            if self.flags & LOCALE:
                raise PatternError("LOCALE is for bytes patterns only", None, "ValueError")
            if not self.flags & ASCII:
                self.flags |= UNICODE
            elif self.flags & UNICODE:
                raise PatternError("ASCII and UNICODE exclude each other", None, "ValueError")
        elif self.flags & UNICODE:
            raise PatternError("UNICODE is for str patterns only", None, "ValueError")
        elif self.flags & LOCALE and self.flags & ASCII:
            raise PatternError("ASCII and LOCALE exclude each other", None, "ValueError")

    def leaf_flags(self) -> int:
        """The flags of leaves outside scoped groups."""
        flags = self.flags if self.leaf_base is None else self.leaf_base
        if isinstance(self.text, str) and not flags & ASCII:
            flags |= UNICODE
        return flags & _LEAF_FLAGS

    def alternation(self, flags: int, verbose: bool, depth: int) -> Node:
        branches: list[Node] = []
        while True:
            branches.append(self.sequence(flags, verbose, depth, first=depth == 0 and not branches))
            if not self.scanner.skip("|"):
                break
            if depth == 0:
                flags, verbose = self.leaf_flags(), bool(self.flags & VERBOSE)
        if len(branches) == 1:
            return branches[0]
        return Alternation((branches[0].span[0], branches[-1].span[1]), tuple(branches))

    def sequence(self, flags: int, verbose: bool, depth: int, first: bool = False) -> Node:
        scanner = self.scanner
        begin = scanner.position
        items: list[Node] = []
        while True:
            token = scanner.next
            if token == END or token == "|" or token == ")":
                break
            start = scanner.position
            scanner.take()
            if verbose:
                if token in _BLANKS:
                    continue
                if token == "#":
                    while scanner.next and scanner.next != "\n":
                        scanner.take()
                    scanner.take()
                    continue
            if token[0] == "\\":
                items.append(self.escape(token, start, flags))
            elif token not in _SPECIAL:
                items.append(Literal((start, start + 1), ord(token), flags))
            elif token == ".":
                items.append(Dot((start, start + 1), flags))
            elif token == "[":
                items.append(read_set(scanner, start, flags))
            elif token == "(":
                node = self.group(start, flags, verbose, depth, first and not items)
                if node is not None:
                    items.append(node)
                elif depth == 0 and not self.dialect.late_flags:
                    flags, verbose = self.leaf_flags(), bool(self.flags & VERBOSE)
            elif token == "^":
                items.append(Anchor((start, start + 1), "^", flags))
            elif token == "$":
                items.append(Anchor((start, start + 1), "$", flags))
            else:
                counts = read_counts(scanner, token, start)
                if counts is None:
                    items.append(Literal((start, start + 1), ord(token), flags))
                else:
                    self.repeat(items, start, counts)
        if len(items) == 1:
            return items[0]
        if not items:
            return Sequence((begin, begin), ())
        return Sequence((items[0].span[0], items[-1].span[1]), tuple(items))

    def repeat(self, items: list[Node], start: int, counts: tuple[int, int | None]) -> None:
        """Put a repeat around the last item."""
        if not items or isinstance(items[-1], Anchor):
            raise PatternError("there is nothing to repeat", start)
        if isinstance(items[-1], Repeat):
            raise PatternError("a repeat cannot be repeated without a group", start)
        kind: RepeatKind = "greedy"
        if self.scanner.skip("?"):
            kind = "lazy"
        elif self.dialect.atomic and self.scanner.skip("+"):
            kind = "possessive"
        self.has_repeat = True
        body = items[-1]
        items[-1] = Repeat((body.span[0], self.scanner.position), body, *counts, kind)

    def escape(self, token: str, start: int, flags: int) -> Node:
        scanner = self.scanner
        meaning = escape_outside(scanner, token)
        span = (start, scanner.position)
        if isinstance(meaning, int):
            return Literal(span, meaning, flags)
        if isinstance(meaning, Category):
            return ClassEscape(span, meaning.kind, flags)
        if isinstance(meaning, Boundary):
            return Anchor(span, meaning.kind, flags)
        index = meaning.number
        if index >= len(self.bodies):
            raise scanner.error(f"there is no group {index}", meaning.length - 1)
        if self.bodies[index] is None:
            raise scanner.error(f"group {index} is still open", meaning.length)
        self.check_look_behind_reference(index)
        return BackReference(span, index, None, flags)

    def check_look_behind_reference(self, index: int) -> None:
        if self.first_inner_group is not None:
            if index >= len(self.bodies) or self.bodies[index] is None:
                raise self.scanner.error(f"group {index} is still open")
            if index >= self.first_inner_group:
                raise self.scanner.error(f"group {index} belongs to the same look-behind")

    def group(self, start: int, flags: int, verbose: bool, depth: int, first: bool) -> Node | None:
        """What the parenthesis at `start` begins; None for comments and global flags."""
        scanner = self.scanner
        if not scanner.skip("?"):
            return self.capture(start, None, flags, verbose, depth)
        letter = scanner.take()
        if letter == END:
            raise scanner.error("the pattern ends in the middle of a group's opening")
        if letter == "P":
            return self.named(start, flags, verbose, depth)
        if letter == "#":
            while scanner.next != ")":
                if not scanner.take():
                    raise PatternError("the comment has no closing parenthesis", start)
            scanner.take()
            return None
        if letter in ("=", "!", "<"):
            return self.look(start, letter, flags, verbose, depth)
        if letter == "(":
            return self.conditional(start, flags, verbose, depth)
        if letter == ":":
            body = self.body(start, flags, verbose, depth)
            return Group((start, scanner.position), body)
        if letter == ">" and self.dialect.atomic:
            body = self.body(start, flags, verbose, depth)
            return Atomic((start, scanner.position), body)
        if letter == "-" or flag_of(letter, self.dialect):
            change = read_flags(scanner, letter)
            if change.whole:
                self.global_flags(change.add, start, verbose, first)
                return None
            if change.add & TYPE_FLAGS:
                flags &= ~TYPE_FLAGS
            flags = (flags | change.add) & ~change.remove & _LEAF_FLAGS
            verbose = (verbose or bool(change.add & VERBOSE)) and not change.remove & VERBOSE
            body = self.body(start, flags, verbose, depth)
            return Group((start, scanner.position), body, None, None, change.add, change.remove)
        raise scanner.error(f"?{letter} begins no kind of group", len(letter) + 1)

    def body(self, start: int, flags: int, verbose: bool, depth: int) -> Node:
        """The inside of a group and its closing parenthesis."""
        self.check_depth(depth)
        node = self.alternation(flags, verbose, depth + 1)
        self.close(start)
        return node

    def check_depth(self, depth: int) -> None:
        if depth >= self.limits.nesting:
            raise LimitReached("nesting", self.limits.nesting)

    def close(self, start: int) -> None:
        if not self.scanner.skip(")"):
            raise PatternError("the group has no closing parenthesis", start)

    def capture(self, start: int, name: str | None, flags: int, verbose: bool, depth: int) -> Node:
        index = len(self.bodies)
        self.bodies.append(None)
        if name is not None:
            if name in self.names:
                message = f"the name {name!r} belongs to group {self.names[name]} already"
                raise self.scanner.error(message, len(name) + 1)
            self.names[name] = index
        body = self.body(start, flags, verbose, depth)
        self.bodies[index] = body
        return Group((start, self.scanner.position), body, index, name)

    def named(self, start: int, flags: int, verbose: bool, depth: int) -> Node:
        """After `(?P`."""
        scanner = self.scanner
        if scanner.skip("<"):
            return self.capture(start, read_name(scanner, ">"), flags, verbose, depth)
        if scanner.skip("="):
            name = read_name(scanner, ")")
            index = self.names.get(name)
            if index is None:
                raise scanner.error(f"no group is named {name!r}", len(name) + 1)
            if self.bodies[index] is None:
                raise scanner.error(f"group {name!r} is still open", len(name) + 1)
            self.check_look_behind_reference(index)
            return BackReference((start, scanner.position), index, name, flags)
        letter = scanner.take()
        if letter == END:
            raise scanner.error("the pattern ends in the middle of a group's opening")
        raise scanner.error(f"?P{letter} begins no kind of group", len(letter) + 2)

    def look(self, start: int, letter: str, flags: int, verbose: bool, depth: int) -> Node:
        scanner = self.scanner
        ahead = letter != "<"
        if not ahead:
            letter = scanner.take()
            if letter == END:
                raise scanner.error("the pattern ends in the middle of a group's opening")
            if letter not in ("=", "!"):
                raise scanner.error(f"?<{letter} begins no kind of group", len(letter) + 2)
        self.check_depth(depth)
        outermost = not ahead and self.first_inner_group is None
        if outermost:
            self.first_inner_group = len(self.bodies)
        body = self.alternation(flags, verbose, depth + 1)
        if outermost:
            self.first_inner_group = None
        self.close(start)
        characters = 0 if ahead else self.look_behind_width(body)
        return Look((start, scanner.position), body, ahead, letter == "!", characters)

    def look_behind_width(self, body: Node) -> int:
        for index, group in enumerate(self.bodies):
            if group is not None and index not in self.widths:
                self.widths[index] = width(group, self.widths)
        low, high = width(body, self.widths)
        # `re` finds this only after it has read the whole pattern.
        if low != high:
            self.late_refusal = PatternError("a look-behind needs a fixed width")
        elif low > self.dialect.widest_look_behind and self.late_refusal is None:
            kind = "RuntimeError" if low <= self.dialect.faulty_look_behind else "error"
            self.late_refusal = PatternError("a look-behind is too wide", None, kind)
        return low

    def conditional(self, start: int, flags: int, verbose: bool, depth: int) -> Node:
        scanner = self.scanner
        named = read_condition(scanner)
        if isinstance(named, int):
            index, name = named, None
            self.conditions.setdefault(index, start + len("(?("))
        elif named in self.names:
            index, name = self.names[named], named
        else:
            raise scanner.error(f"no group is named {named!r}", len(named) + 1)
        self.check_look_behind_reference(index)
        self.check_depth(depth)
        yes = self.sequence(flags, verbose, depth + 1)
        no = None
        if scanner.skip("|"):
            no = self.sequence(flags, verbose, depth + 1)
            if scanner.next == "|":
                raise scanner.error("a condition has at most two branches")
        self.close(start)
        return Conditional((start, scanner.position), index, name, yes, no)

    def global_flags(self, add: int, start: int, verbose: bool, first: bool) -> None:
        """`(?i)` and the like."""
        self.flags |= add
        self.inline |= add
        if self.dialect.late_flags:
            if self.flags & VERBOSE and not verbose:
                raise _TurnedVerbose
            self.late_flags = True
        elif not first:
            raise PatternError("flags for the whole pattern must stand at its start", start)
