"""Which parts of a pattern a match uses, against captures of `re`."""

from __future__ import annotations

import re

import pytest

from patlint.limits import DEFAULT_LIMITS
from patlint.machine.nfa import Nfa
from patlint.machine.priority import shown_used, spans, used_positions
from patlint.machine.program import compile_tree
from patlint.syntax.parser import parse
from tests.corpus.cpython import compiled, spans_of
from tests.corpus.generate import Maker, texts
from tests.machine.support import ends, matcher_of, nfa_of, span_automaton

WORLD = (*texts("abc ", 4), *texts("ab\n", 6), *texts("ab", 8)[-256:])
AHEAD = ("$", r"\b", r"\B", r"\Z")
LETTER = re.compile(r"\\.|\[[^\]]*\]|\(\?.|[ab.]")


def leaves(pattern: str) -> list[tuple[int, int]]:
    """The spans of the letters and dots of a generated pattern, outside sets, escapes and look-around."""
    return [found.span() for found in LETTER.finditer(pattern) if found[0] in ("a", "b", ".")]


def seen_used(pattern: str, span: tuple[int, int], mode: str) -> bool:
    """Whether some text's match captures a group put around the part at `span`."""
    start, end = span
    probed = compiled(f"{pattern[:start]}(?P<probe>{pattern[start:end]}){pattern[end:]}")
    assert probed is not None
    group = probed.groupindex["probe"]
    for text in WORLD:
        found = spans_of(getattr(probed, mode)(text))
        if found is not None and found[group] is not None:
            return True
    return False


@pytest.mark.parametrize("mode", ["match", "fullmatch"])
def test_used_parts_are_those_that_a_capture_shows(mode: str) -> None:
    maker = Maker(50, frozenset())
    parts = dead = 0
    for _ in range(600):
        pattern = maker.pattern(3)
        nfa = Nfa(compile_tree(parse(pattern), engine=False), DEFAULT_LIMITS)
        span_at = [nfa.program.spans[pc] for pc in nfa.pc_of]
        used = {span_at[position] for position in used_positions(nfa, mode, False)}
        shown = {span_at[position] for position in shown_used(nfa, mode, range(nfa.accept))}
        assert shown <= used
        for span in leaves(pattern):
            truth = seen_used(pattern, span, mode)
            # A repeat of one character is one part with the span of the whole repeat.
            covers = [each for each in set(span_at) if each[0] <= span[0] and span[1] <= each[1]]
            found = any(each in used for each in covers)
            # What asks for the characters behind may leave parts in doubt; those count as used.
            assert found == truth or found and any(each in pattern for each in AHEAD), (pattern, span)
            parts += 1
            dead += not truth
    assert parts > 500 and dead > 90


# Source: the project's experiments on spans. Equal spans under match, and whether the search from every place,
# once more with the empty match forbidden, is equal too.
@pytest.mark.parametrize(
    ("first", "second", "match", "scan"),
    [
        ("(?:)", "(?:|a)", True, False),
        ("$", "(?:^)$", True, False),
        ("a|ab", "a", True, True),
        ("a*", "a*?", False, False),
        ("(?:a|b)+", "[ab]+", True, True),
        ("ab|a", "ab?", True, True),
        ("ab?", "a|ab", False, False),
        (r"(?!b)\w", r"[^\Wb]", True, True),
    ],
)
def test_equal_spans(first: str, second: str, match: bool, scan: bool) -> None:
    # Both in one alphabet: the other pattern stands in a branch that no text takes.
    shuffled = Nfa(compile_tree(parse(f"(?!)(?:{first})|(?:{second})")), DEFAULT_LIMITS)
    ours = Nfa(compile_tree(parse(f"(?:{first})|(?!)(?:{second})")), DEFAULT_LIMITS)
    assert shuffled.alphabet == ours.alphabet

    def same(whole: bool) -> bool:
        contexts = ours.all_contexts() if whole else (ours.start_context,)
        return all(
            spans(ours, context, empty) == spans(shuffled, context, empty)
            for context in contexts
            for empty in {False, whole}
        )

    assert (same(False), same(True)) == (match, scan)


# Source: experiments on `re`, CPython 3.10 to 3.13: only parts without a pattern of their own are taken out.
@pytest.mark.parametrize(
    "pattern",
    [
        r"b?\b|b?",
        r"(?:b|ba)c?\b|(?:b|ba)c?",
        r"(?:b?(?=.))\b|b?(?=.)",
        r"(?:a|b)*?\b|(?:a|b)*?c",
        r"(?>b?)\b|(?>b?)c|",
    ],
)
def test_what_branches_share_is_tried_anew_where_it_has_choices(pattern: str) -> None:
    one = compiled(pattern)
    if one is None:
        pytest.skip("this Python has no atomic groups")
    marked = span_automaton(nfa_of(pattern))
    for text in texts("abc ", 4):
        found = one.match(text)
        assert ends(marked, text) == ([] if found is None else [found.end()]), text
        assert matcher_of(pattern).run(text, "match").span == (found and found.span()), text
