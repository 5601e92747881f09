"""`char_set` against `re.finditer` over every code point and every byte."""

from __future__ import annotations

import itertools
import random
import re
import warnings

import pytest

from patlint.syntax.casefold import all_characters, folding
from patlint.syntax.charset import ALL_BYTES, ALL_CODES, CharSet
from patlint.syntax.classes import category, char_set, is_locale_dependent, universe, word_set
from patlint.syntax.parser import parse
from patlint.syntax.tree import (
    ASCII,
    DOTALL,
    IGNORECASE,
    LOCALE,
    ClassEscape,
    Dot,
    Group,
    Literal,
    Node,
    Range,
    Set,
    walk,
)

I, A, S = IGNORECASE, ASCII, DOTALL  # noqa: E741 the letters of re
BYTES = bytes(range(256))
EVERYTHING = all_characters()

LEAVES = [
    ".", r"\d", r"\D", r"\s", r"\S", r"\w", r"\W", "a", "k", "K", "s", "_", "é", "É", "ß", "\u1e9e", "İ",
    "ı", "ſ", "\u212a", "\u0345", "µ", "\ufb05", "\U00010400", "\U00010428", "\U0001e900", "\ud800",
    "\x00", "[ab]", "[^ab]", "[k]", "[^k]", "[^é]", "[a-z]", "[A-Z]", "[^a-z]", "[A-z]", "[0-9_]",
    r"[\W_]", r"[^\W\d_]", r"[\s\S]", r"[^\s\S]", r"[\D\d]", r"[^\w]", r"[\wk]", r"[\Wk]", r"[\Dé]",
    "[İa]", "[ıa]", "[ſa]", "[sa]", "[ka]", "[\u212aa]", "[i-k]", "[ßa]", "[\u1e9ea]", "[Ā-ɏ]",
    "[\u0370-\u03ff]", "[^\u0400-\u04ff]", "[\u1e00-\u1fff]", "[\u2100-\u24ff]", "[\uff00-\uffff]",
    "[\u0345a]", "[\ud7ff-\ue000]", "[\x00-\uffff]", "[\x00-\U00010000]", "[\x00-\U0010ffff]",
    "[^\x00-\U0010ffff]",
    # beyond U+FFFF under IGNORECASE: literals in sets are not lowered, ranges are also compared raised
    "[\U00010400a]", "[\U00010428a]", "[^\U00010400a]", "[^\U00010428a]", "[\U00010400]",
    "[^\U00010400]", "[\U00010400\U00010400]", "[\U00010400-\U00010410]", "[\U00010428-\U00010430]",
    "[\U00010400-\U00010410\U00010440]", "[\U0001f600a]", "[\ufff0-\U00010010]", "[a-\U00010000]",
    "[k-\U00010000]", "[\u017f-\U00010000]", "[\u0100-\U00010000]", "[\u1e00-\U00010000]",
    "[\xdf-\U00010000]", "[\xe0-\U00010000]", "[^b-\U00010400]", "[\U00010400-\U0010ffff]",
    "[\U0001e900-\U0001e943k]",
]  # fmt: skip
CASES = [(text, flags) for text in LEAVES for flags in (I, A | I)]
CASES += [(text, flags) for text in LEAVES[:24] + LEAVES[24::4] for flags in (0, A)]


def found_by_re(text: str | bytes, flags: int) -> CharSet:
    """Every character that the one-character pattern matches, by asking for runs of them."""
    subject = BYTES if isinstance(text, bytes) else EVERYTHING
    runs = text + b"+" if isinstance(text, bytes) else text + "+"
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", FutureWarning)
        return CharSet(tuple(b for run in re.finditer(runs, subject, flags) for b in run.span()))


def ours(text: str | bytes, flags: int) -> CharSet:
    root = parse(text, flags).root
    assert isinstance(root, (Literal, Dot, ClassEscape, Set)), text
    return char_set(root, isinstance(text, bytes))


def test_written_leaves_over_all_code_points() -> None:
    wrong = [(text, flags) for text, flags in CASES if ours(text, flags) != found_by_re(text, flags)]
    assert wrong == []
    assert len(CASES) > 250
    assert ours(".", S) == found_by_re(".", S) == ALL_CODES


# One leaf each, inside scopes that change its flags.
SCOPED = [
    ("(?i:k)", 0), ("(?i:(?-i:k))", 0), ("(?-i:k)", I), ("(?-i:(?i:k))", I), ("(?i)(?-i:k)", 0),
    ("(?a:k)", I), ("(?ai:k)", 0), ("(?u:k)", A | I), ("(?i:(?a:(?u:k)))", 0), (r"(?a:\w)", 0),
    (r"(?u:\w)", A), (r"(?a:(?u:\d))", 0), (r"(?a:(?i:[^\W\d]))", 0), ("(?s:.)", 0), ("(?-s:.)", S),
    ("(?s:(?-s:(?i:.)))", 0), ("(?i-s:[^k])", S), (b"(?i:k)", 0), (b"(?a:\\w)", 0), (b"(?-i:k)", I),
]  # fmt: skip


@pytest.mark.parametrize(("text", "flags"), SCOPED)
def test_leaves_carry_the_flags_of_their_scope(text: str | bytes, flags: int) -> None:
    leaf = next(node for node in walk(parse(text, flags).root) if not isinstance(node, Group))
    assert isinstance(leaf, (Literal, Dot, ClassEscape, Set))
    assert char_set(leaf, isinstance(text, bytes)) == found_by_re(text, flags)


def random_set(rng: random.Random, cased: list[int], top: int) -> str:
    def char() -> int:
        code = rng.choice((rng.choice(cased), rng.randrange(128), rng.randrange(top)))
        return code if code < top else rng.randrange(top)

    def written(code: int) -> str:
        return "\\" + chr(code) if chr(code) in r"\]^[-&~|" else chr(code)

    items = []
    for _ in range(rng.choice((1, 2, 2, 3, 4))):
        kind = rng.random()
        if kind < 0.5:
            items.append(written(char()))
        elif kind < 0.85:
            low = char()
            high = min(top - 1, low + rng.choice((1, 30, 300, 70_000)))
            items.append(f"{written(low)}-{written(high)}")
        else:
            items.append("\\" + rng.choice("dDsSwW"))
    return f"[{rng.choice(('', '^'))}{''.join(items)}]"


def test_random_sets_over_all_code_points() -> None:
    rng = random.Random(11)
    cased = list(folding(False).cased)
    wrong = []
    for _ in range(150):
        text, flags = random_set(rng, cased, 0x110000), rng.choice((I, I, I, A | I, 0, A))
        if ours(text, flags) != found_by_re(text, flags):
            wrong.append((text, flags))
    assert wrong == []


def test_sets_over_all_bytes() -> None:
    rng = random.Random(12)
    cased = list(range(65, 123))
    texts = [random_set(rng, cased, 256).encode("latin-1") for _ in range(1500)]
    texts += [re.escape(bytes((code,))) for code in range(256)]
    texts += [b".", rb"\d", rb"\D", rb"\s", rb"\S", rb"\w", rb"\W"]
    cases = list(itertools.product(texts, (0, I, A, S, I | A)))
    wrong = [(text, flags) for text, flags in cases if ours(text, flags) != found_by_re(text, flags)]
    assert wrong == []
    assert len(cases) > 8000


def test_locale_in_the_c_locale() -> None:
    """Tests run in a locale in which bytes above 127 are no letters, or this says nothing."""
    texts = [rb"\w", rb"\W", rb"[\w-]", rb"[a-f]", b"k", rb"\s", rb"\d", rb"[^k]"]
    if re.findall(rb"(?L)\w", BYTES) != re.findall(rb"\w", BYTES):
        pytest.skip("the locale has letters above 127")
    for text, flags in itertools.product(texts, (LOCALE, LOCALE | I)):
        assert ours(text, flags) == found_by_re(text, flags), (text, flags)


@pytest.mark.parametrize(
    ("text", "flags", "dependent"),
    [
        (rb"\w", LOCALE, True),
        (rb"\w", 0, False),
        (rb"\d", LOCALE, False),
        (b"a", LOCALE, False),
        (b"a", LOCALE | I, True),
        (b"[ab]", LOCALE, False),
        (b"[ab]", LOCALE | I, True),
        (rb"[\W]", LOCALE, True),
        (rb"\b", LOCALE, True),
        (b"^", LOCALE, False),
        (b".", LOCALE | I, False),
    ],
)
def test_is_locale_dependent(text: bytes, flags: int, dependent: bool) -> None:
    node: Node = parse(text, flags).root
    assert is_locale_dependent(node) is dependent


def test_categories() -> None:
    """Source of the ASCII sets: the library reference of `re`; Unicode's are what `re` finds."""
    for kind in ("d", "D", "s", "S", "w", "W"):
        assert category(kind, False) == found_by_re("\\" + kind, 0)
        assert category(kind, True) == found_by_re("\\" + kind, A)
        assert category(kind, True, is_bytes=True) == found_by_re(b"\\" + kind.encode(), 0)
    assert category("d", True) == CharSet.of_chars("0123456789")
    assert word_set(0, False) == category("w", False)
    assert word_set(A, False) == word_set(0, True) == category("w", True)
    assert (universe(False), universe(True)) == (ALL_CODES, ALL_BYTES)


def test_range_stands_for_its_members() -> None:
    assert char_set(Range((0, 3), 97, 99), False) == CharSet.of_chars("abc")


def test_a_merged_alternation_can_differ_from_its_branches() -> None:
    """`re` makes one set of `x|y`; beyond U+FFFF under IGNORECASE that set matches less than the branches."""
    assert re.fullmatch("\U00010400", "\U00010400", re.I)
    assert not re.fullmatch("\U00010400|b", "\U00010400", re.I)
    assert 0x10400 in ours("\U00010400", I)
    assert 0x10400 not in ours("[\U00010400b]", I)
