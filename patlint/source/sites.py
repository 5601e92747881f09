"""What the source side hands on: sites (a pattern where it stands), their uses, and what stayed unresolved.

A `Site` is one pattern at one call of `re` (or of a compiled pattern's maker). Its `uses` say in which modes
it runs and what the program looks at; `uses_seen` says whether these are all of its uses, so that a rule
may judge by them alone. Its `pieces` map offsets in the pattern to characters of the file.

Lines and columns are 1-based; columns count code points, as an editor shows them. A `Place` ends after its
last character (half-open).
"""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass
from typing import Literal, TypeAlias

Mode: TypeAlias = Literal["match", "fullmatch", "search"]
Function: TypeAlias = Literal[
    "match", "fullmatch", "search", "findall", "finditer", "split", "sub", "subn", "scanner"
]
FamilyKind: TypeAlias = Literal["table", "tests", "constants"]
Order: TypeAlias = Literal["first", "independent", "unknown"]
LooksAt: TypeAlias = Literal["truth", "span", "groups", "unknown"]

SCANNING: frozenset[str] = frozenset({"findall", "finditer", "split", "sub", "subn", "scanner"})


def mode_of(function: Function) -> Mode:
    """The mode of a call: the scanning functions find what `search` finds, again and again."""
    match function:
        case "match" | "fullmatch":
            return function
        case _:
            return "search"


@dataclass(frozen=True, slots=True, order=True)
class Place:
    line: int
    column: int
    end_line: int
    end_column: int


@dataclass(frozen=True, slots=True)
class Use:
    """One call that runs the pattern.

    `looks_at`: what the program reads of the outcome: only whether there is one ("truth"), where or which
    text ("span": also `group()`/`group(0)`, and all that findall, split, sub and finditer give where the
    pattern has no groups), captured groups ("groups"), or not known ("unknown").
    `positioned`: the call gives `pos` or `endpos` (a method of a compiled pattern), so the text may begin
    in the middle. `replacement`: the constant replacement of sub/subn, None where it is not constant.
    `maximum`: the constant `count`/`maxsplit` that is given, else None. `bounded`: the subject is
    visibly bounded (a slice with constant bounds, a constant text): its length in characters, else None.
    """

    function: Function
    looks_at: LooksAt
    place: Place
    positioned: bool = False
    replacement: str | bytes | None = None
    maximum: int | None = None
    bounded: int | None = None
    in_loop: bool = False
    """The outcome steers a `while` loop that goes on from the end of the match."""
    validates: bool = False
    """A text without an outcome is refused: an exception, `return False`, or the truth is what a function returns."""
    end_settled: bool = False
    """What stands at the text's end is plain to see: it was stripped, or it is a line of a file."""
    drops_empty: bool = False
    """Empty texts are taken out of the outcome of findall or finditer."""
    own: bool = False
    """The text is the program's own (a message under test), not one from outside."""
    selects: bool = False
    """The pattern chooses among things, so that one which takes everything may be meant: a route, a filter."""

    @property
    def mode(self) -> Mode:
        return mode_of(self.function)


@dataclass(frozen=True, slots=True)
class Piece:
    """A run of the pattern that came from one token of the file.

    `start` is its offset in the pattern. `places` has one Place for each pattern character of the run, and
    `spellings` the source text of each (`\\x41` for one character written as an escape); both empty for a
    run that has no spelling of its own (the outcome of `re.escape`, a number formatted by `%d`): then
    `whole` stands for every character. `raw` tells a raw literal.
    """

    start: int
    whole: Place
    raw: bool
    places: tuple[Place, ...] = ()
    spellings: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Site:
    path: str
    pattern: str | bytes
    flags: int
    """Flags given outside the pattern, as the bits of `re`'s constants; inline flags are in the pattern."""
    function: str
    """The name of the called function of `re` (compile, match, sub …), or the qualified name of what takes the
    pattern in another library."""
    place: Place
    """The whole expression that gives the pattern."""
    statement: int
    """First line of the statement that holds it."""
    pieces: tuple[Piece, ...]
    uses: tuple[Use, ...]
    uses_seen: bool
    """Every use of this pattern is in `uses`. False for public, passed on or returned patterns."""
    name: str | None = None
    """The name or attribute that a compiled pattern is bound to."""
    embedded: bool = False
    """A library puts the text into a larger pattern, or reads it: nothing is suggested in its place."""

    def _piece(self, offset: int) -> Piece:
        index = bisect_right(self.pieces, offset, key=lambda piece: piece.start) - 1
        return self.pieces[max(index, 0)]

    def whole_at(self, offset: int) -> Place:
        """The token that the pattern character at `offset` came from."""
        return self._piece(offset).whole

    def place_of(self, offset: int) -> Place:
        """The place of the pattern character at `offset`; at the pattern's end, the empty place after it."""
        if offset >= len(self.pattern):
            if not self.pattern:
                return self.place
            last = self.place_of(len(self.pattern) - 1)
            return Place(last.end_line, last.end_column, last.end_line, last.end_column)
        piece = self._piece(offset)
        inner = offset - piece.start
        return piece.places[inner] if inner < len(piece.places) else piece.whole

    def place_of_span(self, start: int, end: int) -> Place:
        """The place of the pattern's characters `start` to `end`, half-open.

        Of a span that begins in a constant elsewhere and ends in the expression itself (`{WORD}?`), the part in
        the expression: what stands between the two in the file has nothing to do with it.
        """
        first = self.place_of(start)
        if end <= start:
            return Place(first.line, first.column, first.line, first.column)
        last = self.place_of(end - 1)
        if (last.end_line, last.end_column) < (first.line, first.column):
            return first  # pieces out of the order of the file: point at the first alone
        if self._is_inside(last) and not self._is_inside(first):
            first = next(place for place in map(self.place_of, range(start, end)) if self._is_inside(place))
        return Place(first.line, first.column, last.end_line, last.end_column)

    def _is_inside(self, place: Place) -> bool:
        whole = self.place
        return (whole.line, whole.column) <= (place.line, place.column) and (
            place.end_line,
            place.end_column,
        ) <= (whole.end_line, whole.end_column)

    def spelling(self, offset: int) -> str | None:
        """How the file spells the pattern character at `offset`, None where it has no spelling of its own."""
        piece = self._piece(offset)
        inner = offset - piece.start
        return piece.spellings[inner] if 0 <= inner < len(piece.spellings) else None

    def is_raw(self, offset: int) -> bool:
        return self._piece(offset).raw


@dataclass(frozen=True, slots=True)
class Trial:
    """One place where the members of a family are tried on one text: a loop, a generator, a run of tests."""

    place: Place
    positioned: bool = False
    """From a position within the text, the same for all members."""


@dataclass(frozen=True, slots=True)
class Member:
    """One pattern of a family.

    `modes` has one mode for each of the family's trials. `takes`: where it matches, no later member is tried.
    Members of one `step` are asked together, and their order does not matter. `rest` spells what else stands in its
    row: None where that is not known.
    """

    site: Site
    modes: tuple[Mode, ...] = ()
    takes: bool = True
    step: int = 0
    rest: str | None = ""
    asked: Place | None = None
    """The test that asks for this member alone."""


@dataclass(frozen=True, slots=True)
class Family:
    """Patterns that work side by side, in their order.

    `order`: "first" where the first member that matches ends each trial, "independent" where all are applied or
    one is looked up by key, "unknown" where not all is seen of what happens to them. `named`: each member has
    a name of its own by which it is asked for.
    """

    kind: FamilyKind
    order: Order
    members: tuple[Member, ...]
    trials: tuple[Trial, ...] = ()
    named: bool = False


@dataclass(frozen=True, slots=True)
class Unresolved:
    """A call that takes a pattern which cannot be told from the text of the file."""

    path: str
    place: Place
    function: str
    reason: str


@dataclass(frozen=True, slots=True)
class Waiver:
    """A comment `# patlint: waive RULE[, RULE] -- reason`.

    `place` is the comment, `target_lines` the lines whose findings it waives: its own line and, for a comment
    alone on its line, the next code line.
    """

    place: Place
    rules: tuple[str, ...]
    reason: str
    target_lines: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Module:
    """Everything that the source side knows of one file."""

    path: str
    sites: tuple[Site, ...]
    unresolved: tuple[Unresolved, ...]
    waivers: tuple[Waiver, ...]
    lines: tuple[str, ...]
    """The lines of the decoded text with their ends; joined they give the text without a byte order mark."""
    bad_waivers: tuple[tuple[Place, str], ...] = ()
    """Comments that begin like a waiver and are none, with what is wrong about each."""
    encoding: str = "utf-8"
    """The codec that turns the text back into the file's bytes (`utf-8-sig` where it began with a mark)."""
    families: tuple[Family, ...] = ()
    relied_on: tuple[tuple[str, str], ...] = ()
    """Other files that were looked at, and their state (`patlint.source.disk`)."""
