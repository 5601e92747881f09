"""Tree to text and back: the same shape, and the text that a reader would write."""

from __future__ import annotations

import re
import warnings
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from patlint.syntax.parser import PatternError, parse
from patlint.syntax.render import render, render_pattern
from patlint.syntax.tree import (
    ASCII,
    DOTALL,
    IGNORECASE,
    MULTILINE,
    UNICODE,
    VERBOSE,
    Alternation,
    Anchor,
    Atomic,
    BackReference,
    ClassEscape,
    Dot,
    Group,
    Literal,
    Look,
    Node,
    Range,
    Repeat,
    Sequence,
    Set,
)
from patlint.syntax.width import width

from .awkward import awkward
from .generate import patterns
from .shapes import shape, without_plain_groups, without_spans

TEMPLATE = 1
TARGETS = [(3, 10), (3, 13)]


def test_round_trip() -> None:
    checked = 0
    for text, flags in awkward() + list(patterns(seed=31, count=4500)):
        for target in TARGETS:
            try:
                pattern = parse(text, flags, target)
            except PatternError:
                continue
            if pattern.flags & TEMPLATE:
                continue
            wanted = shape(pattern.root, pattern.is_bytes)
            for root in (pattern.root, without_spans(pattern.root), without_plain_groups(pattern.root)):
                written = render_pattern(replace(pattern, root=root))
                again = parse(written, flags, target)
                assert shape(again.root, pattern.is_bytes) == wanted, (text, flags, written)
                assert again.flags | VERBOSE == pattern.flags | VERBOSE
                assert (again.groups, again.names) == (pattern.groups, pattern.names)
                checked += 1
    assert checked > 10_000


def test_rendering_is_settled() -> None:
    """Writing what was written changes nothing."""
    checked = 0
    for text, flags in patterns(seed=32, count=1500):
        try:
            pattern = parse(text, flags, (3, 13))
        except PatternError:
            continue
        once = render_pattern(pattern)
        assert render_pattern(parse(once, flags, (3, 13))) == once
        checked += 1
    assert checked > 500


def test_no_warning_is_provoked() -> None:
    """`re` warns of set operations that may come; what is written avoids them, whatever was read."""
    for text in ["[[a]", "[*--b]", "[a&&b]", "[a||b]", "[a~~b]", "[+--]", "[&-&&]", "[[a[b]", "[--a]"]:
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            written = render_pattern(parse(text))
            re.compile(written)
        assert shape(parse(written).root, False) == shape(parse(text).root, False)


# Pattern, flags, and how it is written.
WRITTEN = [
    ("", 0, ""),
    (r"\x61\x2e\x0a\t\x00\u00e9\u2028\U0001F600\ud800", 0, r"a\.\n\t\x00é\u2028\U0001f600\ud800"),
    (rb"\x61\xe9\n", 0, rb"a\xe9\n"),
    (r"\-\]\}\/\ \#\=\_", 0, "-]}/ #=_"),
    (r"\^\$\.\|\?\*\+\(\)\[\\", 0, r"\^\$\.\|\?\*\+\(\)\[\\"),
    (r"a\{2\}", 0, r"a\{2}"),
    (r"\{x\}\{\}\{,", 0, "{x}{}{,"),
    (r"\{{2}", 0, r"\{{2}"),
    ("(?:a)", 0, "(?:a)"),
    ("(?:ab){1,}(?:c){0,}(?:d){0,1}", 0, "(?:ab)+(?:c)*(?:d)?"),
    ("a{0,3}b{2,2}c{2,}d{0}e{1}", 0, "a{,3}b{2}c{2,}d{0}e{1}"),
    ("a*?b+?c??d{2,3}?", 0, "a*?b+?c??d{2,3}?"),
    ("(?:^)*(?:a*)*(?:|a)*", 0, "(?:^)*(?:a*)*(?:|a)*"),
    (r"[a\-z][\-a][a\-][\]a][\^a][a\^][^\^]", 0, r"[a\-z][-a][a-][\]a][\^a][a^][^^]"),
    (r"[\x41-\x43\d\n]", 0, r"[A-C\d\n]"),
    (r"(?P<n>a)(?P=n)(?(n)b|c)(d)\2(?(2)e)", 0, r"(?P<n>a)(?P=n)(?(n)b|c)(d)\2(?(2)e)"),
    (r"(a)\1(?:0)(?:\1)1\1a", 0, r"(a)\1(?:0)(?:\1)1\1a"),
    (r"(?=a)(?!b)(?<=c)(?<!d)", 0, r"(?=a)(?!b)(?<=c)(?<!d)"),
    ("(?im)a(?-i:b)", 0, "(?im)a(?-i:b)"),
    ("(?x) a | b # c", 0, "a|b"),
    (" a | b # c", VERBOSE, "a|b"),
    (r" [ ] \  \# (?-x: #)", VERBOSE, r"[ ]\ \#(?:\ \#)"),
    (r"(?x: a\ b )", 0, "(?:a b)"),
    (r"\A\b\B\Z^$.\d\D\s\S\w\W", 0, r"\A\b\B\Z^$.\d\D\s\S\w\W"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "flags", "written"), WRITTEN, ids=[repr(row[0]) for row in WRITTEN])
def test_written(text: str | bytes, flags: int, written: str | bytes) -> None:
    assert render_pattern(parse(text, flags)) == written


def lit(char: str, flags: int = UNICODE) -> Literal:
    return Literal((0, 0), ord(char), flags)


def seq(*items: Node) -> Sequence:
    return Sequence((0, 0), items)


def alt(*branches: Node) -> Alternation:
    return Alternation((0, 0), branches)


def rep(body: Node, minimum: int = 0, maximum: int | None = None) -> Repeat:
    return Repeat((0, 0), body, minimum, maximum)


I, U = IGNORECASE | UNICODE, UNICODE  # noqa: E741
BUILT: list[tuple[Node, int, str]] = [
    (seq(), 0, ""),
    (rep(seq()), 0, "(?:)*"),
    (rep(seq(lit("a"), lit("b"))), 0, "(?:ab)*"),
    (rep(alt(lit("a"), lit("b"))), 0, "(?:a|b)*"),
    (rep(rep(lit("a"))), 0, "(?:a*)*"),
    (rep(Anchor((0, 0), "^", U)), 0, "(?:^)*"),
    (rep(lit("{")), 0, r"\{*"),
    (seq(alt(lit("a"), lit("b")), lit("c")), 0, "(?:a|b)c"),
    (alt(seq(lit("a"), lit("b")), seq()), 0, "ab|"),
    (alt(lit("a"), alt(lit("b"), lit("c"))), 0, "a|b|c"),
    (seq(lit("a"), seq(lit("b"), lit("c"))), 0, "abc"),
    (seq(lit("{"), seq(lit("2"), lit("}"))), 0, r"\{2}"),
    (seq(BackReference((0, 0), 1), lit("0")), 0, r"(?:\1)0"),
    (seq(BackReference((0, 0), 1), rep(lit("0"))), 0, r"(?:\1)0*"),
    (Look((0, 0), alt(lit("a"), lit("b")), True, False), 0, "(?=a|b)"),
    (Atomic((0, 0), alt(lit("a"), lit("b"))), 0, "(?>a|b)"),
    (Set((0, 0), ()), 0, r"[^\s\S]"),
    (Set((0, 0), (), True), 0, r"[\s\S]"),
    # leaves whose flags are not those around them
    (lit("k", I), 0, "(?i:k)"),
    (lit("-", I), 0, "-"),
    (lit("k"), I, "(?-i:k)"),
    (lit("-"), I, "-"),
    (lit("k", IGNORECASE | ASCII), I, "(?a:k)"),
    (lit("a", IGNORECASE | ASCII), I, "a"),
    (lit("é", IGNORECASE | ASCII), 0, "é"),
    (seq(lit("a", I), lit("b", I), lit("c")), 0, "(?i:ab)c"),
    (rep(lit("a", I)), 0, "(?i:a)*"),
    (Dot((0, 0), U | DOTALL), 0, "(?s:.)"),
    (Dot((0, 0), U), DOTALL, "(?-s:.)"),
    (Dot((0, 0), U | IGNORECASE | MULTILINE), 0, "."),
    (ClassEscape((0, 0), "d", ASCII), 0, r"(?a:\d)"),
    (ClassEscape((0, 0), "d", U), ASCII, r"(?u:\d)"),
    (Anchor((0, 0), "$", U | MULTILINE), 0, "(?m:$)"),
    (rep(Anchor((0, 0), "$", U | MULTILINE)), 0, "(?m:$)*"),
    (Anchor((0, 0), r"\A", U | MULTILINE), 0, r"\A"),
    (Anchor((0, 0), r"\b", ASCII), 0, r"(?a:\b)"),
    (seq(BackReference((0, 0), 1, None, I), lit("0")), 0, r"(?i:\1)0"),
    (Group((0, 0), lit("k", I), None, None, IGNORECASE), 0, "(?i:k)"),
    (Set((0, 0), (Range((0, 0), 97, 99),), False, ASCII | IGNORECASE), 0, "(?ia:[a-c])"),
]  # fmt: skip


@pytest.mark.parametrize(("node", "context", "written"), BUILT, ids=[row[2] or "empty" for row in BUILT])
def test_built(node: Node, context: int, written: str) -> None:
    assert render(node, context, False) == written


def test_an_unnamed_reference_above_99_cannot_be_written() -> None:
    with pytest.raises(ValueError, match="group 100 cannot be written without a name"):
        render(BackReference((0, 0), 100), 0, False)
    assert render(BackReference((0, 0), 100, "n"), 0, False) == "(?P=n)"


def test_deep_trees_fit_into_the_stack() -> None:
    """The deepest tree that the parser gives: each level a group, a repeat, a sequence, an alternation."""
    text = "x"
    for _ in range(100):
        text = f"(?:a|b{text}c)*"
    assert render_pattern(parse(text)) == text
    assert width(parse(text).root) == (0, None)


LEAF_FLAGS = st.sampled_from([0, IGNORECASE, DOTALL | MULTILINE, ASCII, ASCII | IGNORECASE]).map(
    lambda flags: flags if flags & ASCII else flags | UNICODE
)
CODES = st.sampled_from([ord(char) for char in "ak01{},-^][ \n&#é\u212a\U00010400"])
SPAN = st.just((0, 0))
ITEMS = st.one_of(
    st.builds(Literal, SPAN, CODES),
    st.builds(ClassEscape, SPAN, st.sampled_from("dDsSwW")),
    st.tuples(CODES, CODES).map(lambda ends: Range((0, 0), min(ends), max(ends))),
)
LEAVES = st.one_of(
    st.builds(Literal, SPAN, CODES, LEAF_FLAGS),
    st.builds(Dot, SPAN, LEAF_FLAGS),
    st.builds(ClassEscape, SPAN, st.sampled_from("dDsSwW"), LEAF_FLAGS),
    st.builds(Set, SPAN, st.lists(ITEMS, min_size=1, max_size=4).map(tuple), st.booleans(), LEAF_FLAGS),
    st.builds(Anchor, SPAN, st.sampled_from(["^", "$", r"\A", r"\Z", r"\b", r"\B"]), LEAF_FLAGS),
)
COUNTS = st.sampled_from([(0, None), (1, None), (0, 1), (2, 2), (2, None), (0, 3), (1, 3), (0, 0)])
KINDS = st.sampled_from(["greedy", "lazy", "possessive"])


def _larger(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    several = st.lists(inner, max_size=4).map(tuple)
    return st.one_of(
        st.builds(Sequence, SPAN, several),
        st.builds(Alternation, SPAN, st.lists(inner, min_size=2, max_size=3).map(tuple)),
        st.builds(lambda body, counts, kind: Repeat((0, 0), body, *counts, kind), inner, COUNTS, KINDS),
        st.builds(Look, SPAN, inner, st.just(True), st.booleans()),
        st.builds(Atomic, SPAN, inner),
        st.builds(Group, SPAN, inner),
    )


@settings(max_examples=300, deadline=None)
@given(st.recursive(LEAVES, _larger, max_leaves=12), LEAF_FLAGS)
def test_built_trees_round_trip(tree: Node, context: int) -> None:
    written = render(tree, context, False)
    assert shape(parse(written, context, (3, 13)).root, False) == shape(tree, False), written


@settings(max_examples=150, deadline=None)
@given(st.recursive(LEAVES, _larger, max_leaves=8), LEAF_FLAGS)
def test_built_trees_fit_into_verbose_patterns(tree: Node, context: int) -> None:
    context |= VERBOSE
    written = render(tree, context, False)
    assert shape(parse(written, context, (3, 13)).root, False) == shape(tree, False), written
