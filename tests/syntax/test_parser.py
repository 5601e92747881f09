"""Trees: kinds, spans, resolved flags, refusals as data, and the nesting limit. What `re` accepts is compared
with `re` itself in test_versions."""

from __future__ import annotations

import pytest

from patlint.limits import LimitReached, Limits
from patlint.syntax.parser import PatternError, parse
from patlint.syntax.tree import (
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
    Range,
    Repeat,
    Sequence,
    Set,
    children,
    walk,
)

from .generate import patterns

U = UNICODE


def leaf(start: int, char: str, flags: int = U) -> Literal:
    return Literal((start, start + 1), ord(char), flags)


TREES: list[tuple[str, int, Node]] = [
    ("", 0, Sequence((0, 0), ())),
    ("a", 0, leaf(0, "a")),
    ("ab", 0, Sequence((0, 2), (leaf(0, "a"), leaf(1, "b")))),
    ("a|", 0, Alternation((0, 2), (leaf(0, "a"), Sequence((2, 2), ())))),
    ("|", 0, Alternation((0, 1), (Sequence((0, 0), ()), Sequence((1, 1), ())))),
    (r"\x41", 0, Literal((0, 4), 0x41, U)),
    (r"\101", 0, Literal((0, 4), 0o101, U)),
    (r"\0", 0, Literal((0, 2), 0, U)),
    (r"\N{COLON}", 0, Literal((0, 9), ord(":"), U)),
    (r"\U0001F600", 0, Literal((0, 10), 0x1F600, U)),
    (r"\.", 0, Literal((0, 2), ord("."), U)),
    (".", DOTALL, Dot((0, 1), U | DOTALL)),
    (r"\W", ASCII, ClassEscape((0, 2), "W", ASCII)),
    (r"\b", 0, Anchor((0, 2), r"\b", U)),
    ("^", MULTILINE, Anchor((0, 1), "^", U | MULTILINE)),
    (
        r"[^a-c\d-]",
        IGNORECASE,
        Set(
            (0, 9),
            (
                Range((2, 5), 97, 99),
                ClassEscape((5, 7), "d", U | IGNORECASE),
                leaf(7, "-", U | IGNORECASE),
            ),
            True,
            U | IGNORECASE,
        ),
    ),
    (r"[]\b]", 0, Set((0, 5), (leaf(1, "]"), Literal((2, 4), 8, U)), False, U)),
    ("a*", 0, Repeat((0, 2), leaf(0, "a"), 0, None, "greedy")),
    ("a{2,3}?", 0, Repeat((0, 7), leaf(0, "a"), 2, 3, "lazy")),
    ("a?+", 0, Repeat((0, 3), leaf(0, "a"), 0, 1, "possessive")),
    ("a(?#c){,4}", 0, Repeat((0, 10), leaf(0, "a"), 0, 4, "greedy")),
    ("{}", 0, Sequence((0, 2), (leaf(0, "{"), leaf(1, "}")))),
    ("(?:a)", 0, Group((0, 5), leaf(3, "a"))),
    ("(a)", 0, Group((0, 3), leaf(1, "a"), 1)),
    ("()", 0, Group((0, 2), Sequence((1, 1), ()), 1)),
    ("(?P<n>a)", 0, Group((0, 8), leaf(6, "a"), 1, "n")),
    ("(?i-s:a)", DOTALL, Group((0, 8), leaf(6, "a", U | IGNORECASE), None, None, IGNORECASE, DOTALL)),
    ("(?a:a)", 0, Group((0, 6), leaf(4, "a", ASCII), None, None, ASCII, 0)),
    ("(?=a)", 0, Look((0, 5), leaf(3, "a"), True, False, 0)),
    ("(?<!ab)", 0, Look((0, 7), Sequence((4, 6), (leaf(4, "a"), leaf(5, "b"))), False, True, 2)),
    ("(?>a)", 0, Atomic((0, 5), leaf(3, "a"))),
    (
        r"(a)\1",
        0,
        Sequence((0, 5), (Group((0, 3), leaf(1, "a"), 1), BackReference((3, 5), 1, None, U))),
    ),
    (
        "(?P<n>a)(?P=n)",
        0,
        Sequence((0, 14), (Group((0, 8), leaf(6, "a"), 1, "n"), BackReference((8, 14), 1, "n", U))),
    ),
    (
        "(a)(?(1)b|)",
        0,
        Sequence(
            (0, 11),
            (
                Group((0, 3), leaf(1, "a"), 1),
                Conditional((3, 11), 1, None, leaf(8, "b"), Sequence((10, 10), ())),
            ),
        ),
    ),
    ("(?(1)b)()", 0, Sequence((0, 9), (Conditional((0, 7), 1, None, leaf(5, "b"), None),
                                        Group((7, 9), Sequence((8, 8), ()), 1)))),
    (" a # b\n *", VERBOSE, Repeat((1, 9), leaf(1, "a"), 0, None, "greedy")),
    ("(?i)a", 0, leaf(4, "a", U | IGNORECASE)),
    ("(?x) a |b", 0, Alternation((5, 9), (leaf(5, "a"), leaf(8, "b")))),
]  # fmt: skip


@pytest.mark.parametrize(("text", "flags", "root"), TREES, ids=[repr(row[0]) for row in TREES])
def test_tree(text: str, flags: int, root: Node) -> None:
    assert parse(text, flags, (3, 13)).root == root


def test_whole_pattern() -> None:
    assert parse("(?im)(a)(?P<n>b)", MULTILINE) == Pattern(
        "(?im)(a)(?P<n>b)",
        Sequence(
            (5, 16),
            (
                Group((5, 8), leaf(6, "a", U | IGNORECASE | MULTILINE), 1),
                Group((8, 16), leaf(14, "b", U | IGNORECASE | MULTILINE), 2, "n"),
            ),
        ),
        U | IGNORECASE | MULTILINE,
        IGNORECASE,
        2,
        {"n": 2},
    )


def test_bytes_leaves_carry_no_unicode() -> None:
    assert parse(b"(?L:\xe9)").root == Group((0, 6), Literal((4, 5), 0xE9, LOCALE), None, None, LOCALE, 0)


@pytest.mark.parametrize(
    ("text", "flags"),
    [("a(?i)b", U | IGNORECASE), ("a|(?i)b", U | IGNORECASE), ("(?:a(?s))", U | DOTALL), ("(?a)a", ASCII)],
)
def test_late_flags_of_3_10_hold_from_the_start(text: str, flags: int) -> None:
    leaves = [node for node in walk(parse(text, 0, (3, 10)).root) if isinstance(node, Literal)]
    assert leaves and all(node.flags == flags for node in leaves)


def test_late_verbose_of_3_10_begins_anew() -> None:
    """The first reading sees the flag i, the second finds it in a comment."""
    pattern = parse("#(?i)\n a (?x)", 0, (3, 10))
    assert pattern.root == leaf(7, "a")
    assert (pattern.flags, pattern.inline) == (U | VERBOSE, VERBOSE)


def test_spans_nest_and_are_in_order() -> None:
    checked = 0
    for text, flags in patterns(seed=5, count=3000):
        try:
            root = parse(text, flags, (3, 12)).root
        except PatternError:
            continue
        for node in walk(root):
            place = node.span[0]
            for child in children(node):
                assert place <= child.span[0] <= child.span[1] <= node.span[1], (text, node)
                place = child.span[1]
            checked += 1
    assert checked > 5000


def test_a_leaf_is_what_its_span_says() -> None:
    """The slice at a leaf's span, read alone under the leaf's flags, gives the same leaf."""
    checked = 0
    for text, flags in patterns(seed=6, count=3000):
        try:
            root = parse(text, flags, (3, 12)).root
        except PatternError:
            continue
        for node in walk(root):
            start, end = node.span
            piece = text[start:end]
            match node:
                case Literal() | Dot() | ClassEscape() | Set() | Anchor():
                    shift = start
                    alone = parse(piece, node.flags, (3, 12)).root
                    assert type(alone) is type(node)
                    assert _moved(alone, shift) == node, (text, piece)
                    checked += 1
                case Repeat():
                    assert piece[-1:] in ("*", "+", "?", "}", b"*", b"+", b"?", b"}"), (text, piece)
                case Group() | Look() | Atomic() | Conditional():
                    assert piece[:1] in ("(", b"(") and piece[-1:] in (")", b")"), (text, piece)
                case _:
                    pass
    assert checked > 4000


def _moved(node: Node, by: int) -> Node:
    from dataclasses import replace

    start, end = node.span
    moved = replace(node, span=(start + by, end + by))
    if isinstance(moved, Set):
        items = tuple(replace(i, span=(i.span[0] + by, i.span[1] + by)) for i in moved.items)
        moved = replace(moved, items=items)
    return moved


# The whole text of a refusal: message, position, kind. Wording is ours, positions are those of re.
REFUSALS = [
    ("(", "the group has no closing parenthesis", 0, "error"),
    ("a)", "this parenthesis closes nothing", 1, "error"),
    ("[a", "the set has no closing bracket", 0, "error"),
    ("*", "there is nothing to repeat", 0, "error"),
    ("^*", "there is nothing to repeat", 1, "error"),
    ("a**", "a repeat cannot be repeated without a group", 2, "error"),
    ("a{3,2}", "the repeat's minimum 3 is above its maximum 2", 2, "error"),
    ("a{4294967295}", "the repeat count is too large", None, "OverflowError"),
    ("[b-a]", "b-a is no range", 1, "error"),
    (r"[\d-a]", r"\d-a is no range", 1, "error"),
    (r"\q", r"escape \q has no meaning", 0, "error"),
    ("a\\", "a lone backslash ends the pattern", 1, "error"),
    (r"\x4", r"escape \x4 needs 2 hexadecimal digits", 0, "error"),
    (r"\777", r"octal escape \777 is above \377", 0, "error"),
    (r"\N{NO SUCH}", "no character is named 'NO SUCH'", 0, "error"),
    (r"\N", r"\N needs a character name in braces", 2, "error"),
    (r"\1", "there is no group 1", 1, "error"),
    (r"(a\1)", "group 1 is still open", 2, "error"),
    ("(?P=n)", "no group is named 'n'", 4, "error"),
    ("(?P<n>)(?P<n>)", "the name 'n' belongs to group 1 already", 11, "error"),
    ("(?P<1>a)", "'1' cannot name a group", 4, "error"),
    ("(?P<n", "the group's name has no closing >", 4, "error"),
    ("(?(1)a|b|c)()", "a condition has at most two branches", 8, "error"),
    ("(?(2)a)()", "there is no group 2", 3, "error"),
    ("(?(0)a)", "group 0 cannot be a condition", 3, "error"),
    ("(?<=a*)", "a look-behind needs a fixed width", None, "error"),
    (r"(?<=(a)\1)", "group 1 belongs to the same look-behind", 9, "error"),
    ("(?z)", "?z begins no kind of group", 1, "error"),
    ("(?", "the pattern ends in the middle of a group's opening", 2, "error"),
    ("(?#", "the comment has no closing parenthesis", 0, "error"),
    ("(?iz)", "z is no flag", 3, "error"),
    ("(?i", "a colon, a minus sign or a parenthesis is missing after the flags", 3, "error"),
    ("(?au)", "flags a, u and L exclude each other", 4, "error"),
    ("(?L)", "flag L is for bytes patterns only", 3, "error"),
    ("(?i-i:a)", "a flag is both set and taken away", 5, "error"),
    ("a(?i)", "flags for the whole pattern must stand at its start", 1, "error"),
]


@pytest.mark.parametrize(("text", "message", "position", "kind"), REFUSALS, ids=[r[0] for r in REFUSALS])
def test_refusal(text: str, message: str, position: int | None, kind: str) -> None:
    with pytest.raises(PatternError) as caught:
        parse(text, 0, (3, 13))
    refusal = caught.value
    assert (refusal.message, refusal.position, refusal.kind) == (message, position, kind)
    assert str(refusal) == (message if position is None else f"{message} (position {position})")


OPENINGS = ["(", "(?:", "(?=", "(?!", "(?<=", "(?<!", "(?>", "(?i:", "(?(1)"]


@pytest.mark.parametrize("opening", OPENINGS)
def test_nesting_limit(opening: str) -> None:
    def nested(depth: int) -> str:
        return "()" + opening * depth + "a" + ")" * depth

    assert parse(nested(100), 0, (3, 12)).groups == (101 if opening == "(" else 1)
    for depth in (101, 5000):
        with pytest.raises(LimitReached) as caught:
            parse(nested(depth), 0, (3, 12))
        assert (caught.value.limit, caught.value.value) == ("nesting", 100)
    with pytest.raises(LimitReached):
        parse(nested(4), 0, (3, 12), Limits(nesting=3))
    assert parse(nested(3), 0, (3, 12), Limits(nesting=3))


def test_length_is_no_problem() -> None:
    assert len(children(parse("(a)" * 20_000).root)) == 20_000
    with pytest.raises(LimitReached):
        parse("(" * 5000)
