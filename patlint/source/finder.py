r"""A literal expression -> its tokens, read by libcst from that expression alone.

`ast` tells what a literal says and where it begins and ends, but not how the parts of it are spelled: which
token of `"a" r"\d"` a character came from, what an f-string's braces look like. libcst keeps all of that, and
reading only the expressions that hold a pattern costs microseconds each, where a whole file costs seconds.

>>> [part.text for part in read_literal('"a" r"\\d"', (1, 0))]
['a', '\\d']

Limits: more than `MOST_TOKENS` adjacent literals are given up (`Unspelled`), since libcst nests them.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import libcst as cst

from patlint.source.literals import BadLiteral, Run, read_body, read_token
from patlint.source.places import Position, advance, place_between
from patlint.source.sites import Place

MOST_TOKENS = 1_000
"""Adjacent literals of one expression; each is a level of nesting for libcst. Long ones have hundreds."""


class Unspelled(Exception):
    """libcst, or the reading of a token, cannot follow this literal."""


@dataclass(frozen=True, slots=True)
class Hole:
    """A replacement field of an f-string."""

    place: Place


Part: TypeAlias = Run | Hole


def read_literal(segment: str, start: Position) -> list[Part]:
    """The parts of a literal in the order of the file; `segment` is its source, standing at `start`."""
    if segment.count('"') + segment.count("'") > 2 * MOST_TOKENS:
        raise Unspelled
    try:
        if "\n" in segment or "\r" in segment or " " in segment:
            expression = cst.parse_expression(f"({segment})")
            begin = -1
        else:
            expression = cst.parse_expression(segment)
            begin = 0
        finder = _Finder(segment, start, begin)
        expression.visit(finder)
    except (cst.ParserSyntaxError, cst.CSTValidationError, BadLiteral, RecursionError, ValueError):
        raise Unspelled from None
    if finder.offset < len(segment):
        raise Unspelled
    return finder.parts


class _Finder(cst.CSTVisitor):
    """Walks the literals of one expression in their order, counting the characters of the file."""

    def __init__(self, segment: str, start: Position, offset: int) -> None:
        super().__init__()
        self.segment = segment
        self.position = start
        self.offset = max(offset, 0)
        self.parts: list[Part] = []
        ends = [end for end in ("\r\n", "\n", "\r") if end in segment]
        first = min(ends, key=segment.index, default="\n")
        self.module = cst.Module(body=[], default_newline=first)

    def visit_SimpleString(self, node: cst.SimpleString) -> bool:
        self.parts.append(read_token(node.value, self.position))
        self._pass(node.value)
        return False

    def visit_FormattedString(self, node: cst.FormattedString) -> bool:
        raw = "r" in node.start.lower()
        self._pass(node.start)
        for part in node.parts:
            if isinstance(part, cst.FormattedStringText):
                self.parts.append(read_body(part.value, self.position, raw=raw, is_bytes=False, doubled=True))
                self._pass(part.value)
            else:
                before = self.position
                self._pass(self.module.code_for_node(part))
                self.parts.append(Hole(place_between(before, self.position)))
        self._pass(node.end)
        return False

    def visit_ConcatenatedString(self, node: cst.ConcatenatedString) -> bool:
        rest: cst.BaseExpression = node
        while isinstance(rest, cst.ConcatenatedString):  # nested to the right: no recursion
            rest.left.visit(self)
            self._pass(self.module.code_for_node(rest.whitespace_between))
            rest = rest.right
        rest.visit(self)
        return False

    def _pass(self, text: str) -> None:
        if not self.segment.startswith(text, self.offset):
            raise Unspelled
        self.offset += len(text)
        self.position = advance(self.position, text)
