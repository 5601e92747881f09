"""Another pattern for a site as edits of the file's text.

`edits_of(site, new, text)` yields ways to write `new`, the smallest change first; each is a tuple of `Edit`s.
Only what stands between the quotes of literals changes, where that can be; a literal is written anew, with
other quotes or without its `r`, where it cannot. A change that would cross from one literal into another has
no edits, nor has one in what was not written out (`re.escape`, `%d`): `NoEdit` says why.

The ways are proposals: the caller reads the edited text again and compares.
"""

from __future__ import annotations

import ast
import io
import tokenize
from bisect import bisect_right
from collections.abc import Iterator
from dataclasses import dataclass
from difflib import SequenceMatcher

from patlint.rewrite.literal import means, respelled, spelled
from patlint.source.sites import Piece, Place, Site


@dataclass(frozen=True, slots=True, order=True)
class Edit:
    """The characters `start` to `end` of the file's text (half-open) become `text`."""

    start: int
    end: int
    text: str


class NoEdit(Exception):
    """The pattern cannot be changed in place; the message is a reason, one line."""


@dataclass(frozen=True, slots=True)
class Token:
    """A string literal that is no f-string: its characters in the file and its text."""

    start: int
    end: int
    text: str


class FileText:
    """The text of a file by lines, with offsets for places."""

    def __init__(self, lines: tuple[str, ...]) -> None:
        self.lines = lines
        self.text = "".join(lines)
        self._starts = [0]
        for line in lines:
            self._starts.append(self._starts[-1] + len(line))
        self._tokens: list[Token] | None = None

    def span(self, place: Place) -> tuple[int, int]:
        """The offsets of a place, half-open."""
        return self.offset(place.line, place.column), self.offset(place.end_line, place.end_column)

    def offset(self, line: int, column: int) -> int:
        return self._starts[min(line, len(self._starts)) - 1] + column - 1

    def token_at(self, offset: int) -> Token | None:
        """The plain literal around `offset`."""
        if self._tokens is None:
            self._tokens = list(self._read_tokens())
        index = bisect_right(self._tokens, offset, key=lambda token: token.start) - 1
        if index >= 0 and self._tokens[index].start <= offset < self._tokens[index].end:
            return self._tokens[index]
        return None

    def _read_tokens(self) -> Iterator[Token]:
        plain = "".join(line.rstrip("\r\n") + "\n" for line in self.lines)
        try:
            for token in tokenize.generate_tokens(io.StringIO(plain).readline):
                if token.type == tokenize.STRING:
                    start = self.offset(token.start[0], token.start[1] + 1)
                    end = self.offset(token.end[0], token.end[1] + 1)
                    yield Token(start, end, self.text[start:end])
        except (tokenize.TokenError, SyntaxError):
            return  # the file was parsed before: what is left is its end


@dataclass(frozen=True, slots=True)
class _Change:
    """The pattern's characters `start` to `end`, which lie in `piece`, become `text`."""

    piece: Piece
    start: int
    end: int
    text: str


def edits_of(site: Site, new: str | bytes, file: FileText) -> Iterator[tuple[Edit, ...]]:
    """Ways to make `new` the pattern of `site`. Errors: `NoEdit`."""
    changes = list(_changes(site, new))
    here = tuple(_in_place(change, file) for change in changes)
    yield here
    spelling: list[list[Edit]] = [[]]
    tokens: dict[int, Token] = {}
    for change in changes:
        token = file.token_at(file.span(change.piece.whole)[0])
        if token is None:
            return
        tokens[token.start] = token
    for token in tokens.values():
        inside = [edit for edit in here if token.start <= edit.start < token.end]
        value = _new_value(site, changes, token, file)
        if value is None:
            return
        if means(_applied(token, inside), value):
            spelling = [[*rest, *inside] for rest in spelling]
            continue
        ways = [Edit(token.start, token.end, way) for way in respelled(token.text, value)]
        spelling = [[*rest, way] for rest in spelling for way in ways[:1]]
    for way_of_all in spelling:
        yield tuple(sorted(way_of_all))


def apply(text: str, edits: tuple[Edit, ...]) -> str:
    """`text` with the edits, which do not overlap, made."""
    for edit in sorted(edits, reverse=True):
        text = text[: edit.start] + edit.text + text[edit.end :]
    return text


def _changes(site: Site, new: str | bytes) -> Iterator[_Change]:
    old_text, new_text = _as_text(site.pattern), _as_text(new)
    matcher = SequenceMatcher(None, old_text, new_text, autojunk=False)
    for tag, start, end, new_start, new_end in matcher.get_opcodes():
        if tag == "equal":
            continue
        text = new_text[new_start:new_end]
        # What is put in stands beside a character of the literal that it belongs to.
        piece = _piece(site, max(start - 1, 0) if start == end else start)
        if not piece.places:
            piece = _piece(site, min(start, len(old_text) - 1))
        if not piece.places:
            raise NoEdit("the part to change is not written out here")
        if end > piece.start + len(piece.places) or start < piece.start:
            raise NoEdit("the change goes over more than one literal")
        yield _Change(piece, start, end, text)


def _as_text(pattern: str | bytes) -> str:
    return pattern if isinstance(pattern, str) else pattern.decode("latin-1")


def _piece(site: Site, offset: int) -> Piece:
    index = bisect_right(site.pieces, offset, key=lambda piece: piece.start) - 1
    if index < 0:
        raise NoEdit("the pattern is not written out here")
    return site.pieces[index]


def _in_place(change: _Change, file: FileText) -> Edit:
    piece = change.piece
    low, high = change.start - piece.start, change.end - piece.start
    at_end = low == len(piece.places)
    start = file.span(piece.places[low - at_end])[at_end]
    end = file.span(piece.places[high - 1])[1] if high > low else start
    known: dict[str, str] = {}
    for char, written in zip(_chars(piece, file), piece.spellings, strict=False):
        if len(written) > 1:
            known.setdefault(char, written)
    # Where the author lets backslashes stand alone, so does the new text.
    lone = not piece.raw and any(written == "\\" for written in piece.spellings)
    doubled = "{{" in piece.spellings or "}}" in piece.spellings or file.token_at(start) is None
    token = file.token_at(start)
    quote = "" if token is None else token.text[-1]
    return Edit(
        start,
        end,
        spelled(change.text, piece.raw, known=known, quote=quote, doubled=doubled, lone=lone),
    )


def _chars(piece: Piece, file: FileText) -> Iterator[str]:
    """The characters that the spellings of a piece stand for."""
    for written in piece.spellings:
        if len(written) == 1:
            yield written
        elif written in ("{{", "}}"):
            yield written[0]
        elif written.startswith("\\"):
            try:
                yield str(ast.literal_eval(f'"{written}"')) if written != '\\"' else '"'
            except (SyntaxError, ValueError):
                yield written
        else:
            yield "\n"  # a line end of two characters


def _new_value(site: Site, changes: list[_Change], token: Token, file: FileText) -> str | bytes | None:
    """What the literal must say after all changes in it; None where the pattern holds only a part of it."""
    piece = next(
        (each.piece for each in changes if token.start <= file.span(each.piece.whole)[0] < token.end), None
    )
    if piece is None:
        return None
    old = _as_text(site.pattern)[piece.start : piece.start + len(piece.places)]
    try:
        value = ast.literal_eval(token.text)
    except (SyntaxError, ValueError, MemoryError):
        return None
    if not isinstance(value, (str, bytes)) or _as_text(value) != old:
        return None
    for change in sorted(changes, key=lambda each: each.start, reverse=True):
        if change.piece is piece:
            low, high = change.start - piece.start, change.end - piece.start
            old = old[:low] + change.text + old[high:]
    return old.encode("latin-1") if isinstance(value, bytes) else old


def _applied(token: Token, edits: list[Edit]) -> str:
    moved = tuple(Edit(each.start - token.start, each.end - token.start, each.text) for each in edits)
    return apply(token.text, moved)
