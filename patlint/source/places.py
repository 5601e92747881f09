"""Positions of `ast` (bytes of UTF-8) -> positions of the report (code points, 1-based), and segments.

`Text` holds the lines of one file and answers both. A position inside the package is a pair (line, column),
the line 1-based and the column 0-based in code points; a `Place` is made at the end.
"""

from __future__ import annotations

import ast
from typing import TypeAlias

from patlint.source.sites import Place

Position: TypeAlias = tuple[int, int]


class Text:
    """The lines of one file, with their ends."""

    __slots__ = ("lines",)

    def __init__(self, lines: tuple[str, ...]) -> None:
        self.lines = lines

    def column(self, line: int, offset: int) -> int:
        """The column, in code points from 0, of the byte `offset` of UTF-8 in the 1-based `line`."""
        if line > len(self.lines):
            return offset
        text = self.lines[line - 1]
        if text.isascii():
            return offset
        return len(text.encode("utf-8")[:offset].decode("utf-8", "ignore"))

    def start(self, node: ast.expr | ast.stmt) -> Position:
        return node.lineno, self.column(node.lineno, node.col_offset)

    def end(self, node: ast.expr | ast.stmt) -> Position:
        assert node.end_lineno is not None and node.end_col_offset is not None
        return node.end_lineno, self.column(node.end_lineno, node.end_col_offset)

    def place(self, node: ast.expr | ast.stmt) -> Place:
        line, column = self.start(node)
        end_line, end_column = self.end(node)
        return Place(line, column + 1, end_line, end_column + 1)

    def between(self, start: Position, end: Position) -> str:
        """The text from `start` to `end`, line ends as in the file."""
        (line, column), (end_line, end_column) = start, end
        if line == end_line:
            return self.lines[line - 1][column:end_column]
        middle = self.lines[line : end_line - 1]
        return "".join((self.lines[line - 1][column:], *middle, self.lines[end_line - 1][:end_column]))

    def segment(self, node: ast.expr | ast.stmt) -> str:
        return self.between(self.start(node), self.end(node))


def advance(position: Position, text: str) -> Position:
    """Where one stands after `text`, having begun at `position`."""
    line, column = position
    if "\n" not in text and "\r" not in text:
        return line, column + len(text)
    ends = text.count("\n") + text.count("\r") - text.count("\r\n")
    tail = max(text.rfind("\n"), text.rfind("\r"))
    return line + ends, len(text) - tail - 1


def place_between(start: Position, end: Position) -> Place:
    return Place(start[0], start[1] + 1, end[0], end[1] + 1)
