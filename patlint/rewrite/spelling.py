r"""The author's habits of spelling, so that a suggestion looks like the pattern it replaces.

A set of characters that occurs in the pattern is written as the author wrote it, less what it says twice
(`[0-90-9]`, `[a-zA-Z]` under IGNORECASE, `[0123456789]`). A new set is put together from pieces that the
author wrote, in the author's order. Categories and the dot are only used where the author uses them:
`[0-9]` does not become `\d`. Ranges are only made within digits, within letters of one case and within what
is not ASCII or not printable, since nobody reads `[!-/]`. Needless escapes are kept.

>>> from patlint.syntax.parser import parse
>>> habits = habits_of(parse(r"[0-9]|[\-_x]|[0123][abab]"))
>>> habits.spell(CharSet.of_chars("0123456789_"), 32), habits.spell(CharSet.of_chars("0123"), 32)
('[0-9_]', '[0-3]')
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from functools import lru_cache

from patlint.syntax import tree as t
from patlint.syntax.charset import ALL_CODES, EMPTY, CharSet
from patlint.syntax.classes import char_set, universe
from patlint.syntax.parser import PatternError, parse
from patlint.syntax.render import char_node, render
from patlint.syntax.spelling import char_text, member_text, set_text

RUN = 4
"""So many neighbouring characters of one alphabet are written as a range; one less for digits, twice as many
for control characters, of which some are known by name."""
_MOST_ITEMS = 24
_MOST = 1_000
_SCATTERED = 200
UNREADABLE = "." * 1000
"""Stands for a set of hundreds of ranges that the author did not name; longer than any pattern looked at."""
_ESCAPED = frozenset(b"\\]")
_CATEGORIES = frozenset((r"\d", r"\D", r"\s", r"\S", r"\w", r"\W"))
_LATE = frozenset(b"-^[")
_ASCII_PRINTABLE = CharSet.of_range(32, 126)
_DIGITS = CharSet.of_range(48, 57)
_CONTROLS = CharSet.of_range(0, 31)
_ALPHABETS = (
    _DIGITS,
    CharSet.of_range(65, 90),
    CharSet.of_range(97, 122),
    ALL_CODES - _ASCII_PRINTABLE,
)


@dataclass(frozen=True, slots=True)
class _Piece:
    """Something that can stand in a set: its characters, its text there, the place where the author wrote
    it."""

    chars: CharSet
    text: str
    place: int


@dataclass(slots=True)
class Habits:
    """`known` are the spellings of each set of characters under the flags of its place, `pieces` what the
    author's sets are made of, `kinds` the categories used (and `.`), `braces` whether a repeat is written
    with braces."""

    is_bytes: bool
    verbose: bool
    known: dict[tuple[CharSet, int], str] = field(default_factory=dict)
    pieces: dict[int, dict[CharSet, _Piece]] = field(default_factory=dict)
    kinds: set[str] = field(default_factory=set)
    braces: bool = False

    def spell(self, chars: CharSet, flags: int) -> str:
        """`chars` as text for a place where `flags` hold."""
        key = (chars, flags)
        found = self.known.get(key)
        if found is None:
            found = self._composed(chars, flags)
            if found is None or (chars.size() > _MOST and found != UNREADABLE):
                other = self._canonical(chars, flags)
                found = other if found is None or len(other) < len(found) else found
            self.known[key] = found
        return found

    def _composed(self, chars: CharSet, flags: int) -> str | None:
        """A set put together from the author's pieces and from what they leave."""
        if chars.size() == 1 and not flags & t.IGNORECASE:
            return char_text(chars.bounds[0], self.is_bytes, self.verbose)
        rest = chars
        used: list[_Piece] = []
        for piece in sorted(
            self.pieces.get(flags, {}).values(), key=lambda piece: (-piece.chars.size(), piece.place)
        ):
            if not _lies_in(piece.chars, chars) or any(_lies_in(piece.chars, other.chars) for other in used):
                continue
            if len(piece.chars.bounds) > 2:
                if piece.chars.isdisjoint(rest):
                    continue
                rest = rest - piece.chars
            used.append(piece)
        rest = rest - _union(piece.chars for piece in used if len(piece.chars.bounds) == 2)
        if len(rest.bounds) > _MOST_ITEMS or len(used) > _MOST_ITEMS:
            return None if len(chars.bounds) < _SCATTERED else UNREADABLE
        used += [_Piece(part, _item_text(part, self.is_bytes), 10**6) for part in _parts(rest, 2)]
        used.sort(key=lambda piece: piece.place)
        text = _assembled(_rolled(used, self.is_bytes), False)
        return text if _reads_as(text, flags, self.is_bytes) == chars else None

    def _canonical(self, chars: CharSet, flags: int) -> str:
        node = char_node(chars, flags, self.is_bytes)
        if not self._usual(node) and not flags & t.IGNORECASE:
            plain = _plain(chars, self.is_bytes)
            if plain is not None:
                return plain
        return _written(node, flags | (t.VERBOSE if self.verbose else 0), self.is_bytes)

    def _usual(self, node: t.CharNode) -> bool:
        match node:
            case t.Dot():
                return "." in self.kinds
            case t.ClassEscape():
                return node.kind in self.kinds
            case t.Set():
                return all(item.kind in self.kinds for item in node.items if isinstance(item, t.ClassEscape))
            case _:
                return True


def habits_of(parsed: t.Pattern) -> Habits:
    text = parsed.text if isinstance(parsed.text, str) else parsed.text.decode("latin-1")
    habits = Habits(parsed.is_bytes, bool(parsed.flags & t.VERBOSE))
    for node in t.walk(parsed.root):
        match node:
            case t.Repeat():
                habits.braces |= "}" in text[node.span[1] - 2 : node.span[1]]
            case t.Literal() | t.Dot() | t.ClassEscape() | t.Set():
                _note(habits, node, text)
            case _:
                pass
    return habits


def _note(habits: Habits, node: t.CharNode, text: str) -> None:
    written = text[node.span[0] : node.span[1]]
    pieces = habits.pieces.setdefault(node.flags, {})
    match node:
        case t.Dot():
            habits.kinds.add(".")
        case t.ClassEscape():
            habits.kinds.add(node.kind)
            chars = char_set(node, habits.is_bytes)
            pieces.setdefault(chars, _Piece(chars, written, node.span[0]))
        case t.Literal():
            chars = char_set(node, habits.is_bytes)
            as_is = written.isalnum() or (written[0] == "\\" and written[1:2].isalnum())
            as_is = as_is or not (written.isprintable() or habits.verbose)
            inside = written if as_is else _inside(node.code, habits.is_bytes)
            pieces.setdefault(chars, _Piece(chars, inside, node.span[0]))
        case t.Set():
            for item in node.items:
                if isinstance(item, t.ClassEscape):
                    habits.kinds.add(item.kind)
                chars = char_set(replace(node, items=(item,), negated=False), habits.is_bytes)
                pieces.setdefault(chars, _Piece(chars, text[item.span[0] : item.span[1]], item.span[0]))
            texts = tuple(text[item.span[0] : item.span[1]] for item in node.items)
            written = reduced(_bare(node), texts, habits.is_bytes) or written
    key = (char_set(node, habits.is_bytes), node.flags)
    if key not in habits.known or len(written) < len(habits.known[key]):
        habits.known[key] = written


def _bare(node: t.Set) -> t.Set:
    return replace(node, span=(0, 0), items=tuple(replace(item, span=(0, 0)) for item in node.items))


def reduced_set(node: t.Set, text: str, is_bytes: bool) -> str | None:
    """A shorter spelling of a set that says something twice, from its own items; None where it does not."""
    return reduced(_bare(node), tuple(text[item.span[0] : item.span[1]] for item in node.items), is_bytes)


@lru_cache(maxsize=4096)
def reduced(node: t.Set, texts: tuple[str, ...], is_bytes: bool) -> str | None:
    """As `reduced_set`, for a set without spans and the texts of its items."""
    if len(node.items) == 1:
        only = node.items[0]
        if isinstance(only, t.Literal) and not node.negated and chr(only.code).isalnum():
            return texts[0]  # `[a]`; but `[.]` and `[ ]` are ways to escape
        return None
    if len(node.items) > 64:
        return None
    whole = char_set(node, is_bytes)
    kept = list(range(len(node.items)))

    def order(index: int) -> tuple[int, int]:
        item = node.items[index]
        return (0 if isinstance(item, t.Literal) else 1 if isinstance(item, t.Range) else 2), -index

    chars = [char_set(replace(node, items=(item,), negated=False), is_bytes) for item in node.items]
    if node.flags & t.IGNORECASE or sum(each.size() for each in chars) > _union(chars).size():
        for index in sorted(kept, key=order):
            fewer = [each for each in kept if each != index]
            if (
                fewer
                and char_set(replace(node, items=tuple(node.items[i] for i in fewer)), is_bytes) == whole
            ):
                kept = fewer
    pieces = []
    for index in kept:
        item = node.items[index]
        plain = char_set(item, is_bytes) if isinstance(item, t.Range) else None
        if isinstance(item, t.Literal):
            plain = CharSet((item.code, item.code + 1))
        pieces.append(_Piece(chars[index] if plain is None else plain, texts[index], index))
    text = _assembled(_rolled(pieces, is_bytes), node.negated)
    if len(kept) == 1 and texts[kept[0]].isalnum() and not node.negated:
        text = texts[kept[0]]
    if (
        len(kept) == len(texts)
        and len(text) >= len(_assembled(texts, node.negated))
        or _reads_as(text, node.flags, is_bytes) != whole
    ):
        return None
    return text


def _rolled(pieces: list[_Piece], is_bytes: bool) -> list[str]:
    """The texts of pieces, those that lie side by side within one alphabet put together as ranges."""
    out: dict[int, str] = {index: piece.text for index, piece in enumerate(pieces)}
    for alphabet in (*_ALPHABETS[:3], _CONTROLS):
        mine = [
            index
            for index, piece in enumerate(pieces)
            if piece.chars <= alphabet and len(piece.chars.bounds) == 2
        ]
        joined = _union([pieces[index].chars for index in mine])
        for low, high in joined.ranges():
            inside = [index for index in mine if low <= pieces[index].chars.bounds[0] <= high]
            least = RUN - 1 if alphabet is _DIGITS else 2 * RUN if alphabet is _CONTROLS else RUN
            if len(inside) < 2 or high - low + 1 < least:
                continue
            ends = [
                next((pieces[i].text for i in inside if pieces[i].chars == CharSet((code, code + 1))), None)
                or member_text(code, is_bytes)
                for code in (low, high)
            ]
            text = f"{ends[0]}-{ends[1]}"
            if len(text) <= sum(len(out[index]) for index in inside):
                for index in inside:
                    del out[index]
                out[inside[0]] = text
    return [out[index] for index in sorted(out)]


def _assembled(texts: Iterable[str], negated: bool) -> str:
    """A set of these items, with those that are special in some places put where they are not."""
    items = list(texts)
    for awkward in ("^", "-"):
        if awkward in items:
            items.remove(awkward)
            items.append(awkward)
    if "]" in items:
        items.remove("]")
        items.insert(0, "]")
    if items == ["^"] and not negated:
        return r"\^"
    if len(items) == 1 and items[0] in _CATEGORIES:
        return items[0].swapcase() if negated else items[0]
    return ("[^" if negated else "[") + "".join(items) + "]"


def _parts(chars: CharSet, least: int) -> list[CharSet]:
    """`chars` cut into ranges within one alphabet (longer than `least`) and single characters."""
    out: list[CharSet] = []
    printable = chars & _ASCII_PRINTABLE
    for alphabet in _ALPHABETS:
        for low, high in (chars & alphabet).ranges():
            if high - low >= least:
                out.append(CharSet((low, high + 1)))
            else:
                out += [CharSet((code, code + 1)) for code in range(low, high + 1)]
        printable = printable - alphabet
    return out + [CharSet((code, code + 1)) for code in printable]


def _item_text(chars: CharSet, is_bytes: bool) -> str:
    low, high = chars.bounds[0], chars.bounds[-1] - 1
    if low == high:
        return _inside(low, is_bytes)
    return f"{member_text(low, is_bytes)}-{member_text(high, is_bytes)}"


def _lies_in(part: CharSet, whole: CharSet) -> bool:
    """`part <= whole`, quick where `part` is one range or plainly sticks out."""
    place = bisect_right(whole.bounds, part.bounds[0])
    if not place & 1 or part.bounds[-1] > whole.bounds[-1]:
        return False
    return part.bounds[-1] <= whole.bounds[place] or (len(part.bounds) > 2 and part <= whole)


def _inside(code: int, is_bytes: bool) -> str:
    return "\\" + chr(code) if code in _ESCAPED else member_text(code, is_bytes)


def _union(sets: Iterable[CharSet]) -> CharSet:
    whole = EMPTY
    for chars in sets:
        whole = whole | chars
    return whole


@lru_cache(maxsize=4096)
def _reads_as(text: str, flags: int, is_bytes: bool) -> CharSet | None:
    """The characters that `text` matches under `flags`; None where it is not one leaf."""
    try:
        root = parse(text.encode("latin-1") if is_bytes else text, flags).root
    except (PatternError, UnicodeEncodeError):
        return None
    match root:
        case t.Literal() | t.Set() | t.ClassEscape():
            return char_set(root, is_bytes)
        case _:
            return None


@lru_cache(maxsize=4096)
def _written(node: t.CharNode, flags: int, is_bytes: bool) -> str:
    text = render(node, flags, is_bytes)
    return text if isinstance(text, str) else text.decode("latin-1")


@lru_cache(maxsize=1024)
def _plain(chars: CharSet, is_bytes: bool) -> str | None:
    """`chars` with ranges and literals only; None where that is long."""
    texts = []
    for wanted, negated in ((chars, False), (universe(is_bytes) - chars, True)):
        if not wanted or len(wanted.bounds) > 2 * _MOST_ITEMS:
            continue
        items: list[t.SetItem] = []
        for part in _parts(wanted, 2):
            low, high = part.bounds[0], part.bounds[-1] - 1
            items.append(t.Literal((0, 0), low) if low == high else t.Range((0, 0), low, high))
        items.sort(key=lambda item: isinstance(item, t.Literal) and item.code in _LATE)
        texts.append(set_text(t.Set((0, 0), tuple(items), negated), is_bytes))
    return min(texts, key=len, default=None)
