r"""What a maintainer would rather not read, although it is shorter.

- more operators than before, or deeper nesting unless much is saved;
- lists of words and symbols taken apart: `foo|ba[rz]` for `foo|bar|baz`, `===?|!=` for `===|==|!=`. A word
  may get an optional last letter (`https?`), and lists that become one plain sequence may go where much is
  saved (`L1|L2|L3|R1|R2|R3` is `[LR][1-3]`);
- sets that mix what the author kept apart: `[a-z=]=` for `[a-z]=|==`;
- optional signs that say what may stand there, swallowed by what follows: `<[^>]+` for `</?[^>]+`;
- a loop inside a loop where there was none: `(?:[a-z][._]*)*[a-z]` for `[a-z]|[a-z][a-z._]*[a-z]`;
- numbers by their ranges whose first digit is taken out: `2(?:2[4-9]|[34][0-9]|5[0-5])` for
  `22[4-9]|23[0-9]|24[0-9]|25[0-5]`;
- a pattern turned inside out for the sake of a few characters.

Examples are from reading what is proposed for the patterns of the standard library; common practice, no
source. `runs_for_loops` finds what may be slower to match: a run over one set of characters that became a
part of a loop, such as `(?:[^"\\]|\\.)*` for `[^"\\]*(?:\\.[^"\\]*)*`, which people write on purpose.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from typing import TypeAlias

from patlint.machine.program import one_character
from patlint.rewrite.islands import complexity
from patlint.syntax import tree as t
from patlint.syntax.charset import EMPTY, CharSet
from patlint.syntax.classes import char_set

Word: TypeAlias = tuple[int, ...]

_DIGITS = CharSet.of_range(48, 57)
LIST = 3
"""So many words make a list."""
LIST_SAVING = 0.4
"""A list that becomes one sequence must be shortened by this share."""
TURNED_SAVING = 0.2
"""So must a part that is written anew from its automaton."""
DEEPER_SAVING = 0.2
DEEPER_OPERATORS = 0.67
"""One level of nesting more is fine where this much is saved, as by `(?:[0-9a-f]{2}:){5}[0-9a-f]{2}`."""
SMALL_SET = 10
"""New sets up to so many characters are fine."""


def is_readable(old: t.Node, new: t.Node, lengths: tuple[int, int], turned: bool, is_bytes: bool) -> bool:
    """Whether `new` may be shown in place of `old`; `lengths` are those of the texts, `turned` says that it
    was written anew from the automaton."""
    old_depth, old_operators = complexity(old)
    depth, operators = complexity(new)
    before, after = lengths
    plainer = operators <= DEEPER_OPERATORS * old_operators and before - after >= DEEPER_SAVING * before
    if operators > old_operators or depth > old_depth + plainer:
        return False
    if _loop_depth(new) > _loop_depth(old) or _split_numbers(new) > _split_numbers(old):
        return False
    if turned and (operators >= old_operators or before - after < TURNED_SAVING * before):
        return False
    return (
        _keeps_sets(old, new, is_bytes)
        and _keeps_words(old, new, before - after)
        and _keeps_options(old, new, is_bytes)
    )


def runs_for_loops(old: t.Node, new: t.Node, is_bytes: bool) -> bool:
    """Whether a set of characters of which there were runs has none any more, although a loop of more is
    left."""
    old_runs, _ = _loops(old, is_bytes)
    new_runs, new_loops = _loops(new, is_bytes)
    return new_loops > 0 and not old_runs <= new_runs


def _loops(node: t.Node, is_bytes: bool) -> tuple[set[CharSet], int]:
    """The sets of which there are runs without bound, and the number of other loops."""
    runs: set[CharSet] = set()
    loops = 0
    for each in t.walk(node):
        if isinstance(each, t.Repeat) and each.maximum is None:
            leaf = one_character(each.body)
            if leaf is not None:
                runs.add(char_set(leaf, is_bytes))
            else:
                loops += 1
    return runs, loops


def _loop_depth(node: t.Node) -> int:
    """How deep repeats without bound are nested."""
    below = max(map(_loop_depth, t.children(node)), default=0)
    return below + (isinstance(node, t.Repeat) and node.maximum is None)


def _split_numbers(node: t.Node) -> int:
    """How often a digit stands before alternatives that begin with digits or sets."""
    count = 0
    for each in t.walk(node):
        for digit, after in (
            zip(each.items, each.items[1:], strict=False) if isinstance(each, t.Sequence) else ()
        ):
            if isinstance(digit, t.Literal) and chr(digit.code).isdigit() and isinstance(after, t.Group):
                branches = after.body.branches if isinstance(after.body, t.Alternation) else ()
                count += sum(map(_begins_with_digits, branches)) > 1
    return count


def _begins_with_digits(node: t.Node) -> bool:
    first = node.items[0] if isinstance(node, t.Sequence) and node.items else node
    if isinstance(first, t.Literal):
        return chr(first.code).isdigit()
    return isinstance(first, t.Set) and not first.negated and not char_set(first, False).isdisjoint(_DIGITS)


def _keeps_options(old: t.Node, new: t.Node, is_bytes: bool) -> bool:
    """Whether every sign that was optional is still written as often, or is counted."""
    before = _signs(old, is_bytes)
    optional = {
        code
        for each in t.walk(old)
        if isinstance(each, t.Repeat) and (each.minimum, each.maximum) == (0, 1)
        for code in _signs(each.body, is_bytes)
    }
    if not optional:
        return True
    after = _signs(new, is_bytes)
    repeated = {
        code for each in t.walk(new) if isinstance(each, t.Repeat) for code in _signs(each.body, is_bytes)
    }
    return all(after[code] >= before[code] or code in repeated for code in optional)


def _signs(node: t.Node, is_bytes: bool) -> Counter[int]:
    """How often each character is written, alone or in a small set."""
    counts: Counter[int] = Counter()
    for each in t.walk(node):
        if isinstance(each, t.Literal):
            counts[each.code] += 1
        elif isinstance(each, t.Set) and not each.negated:
            chars = char_set(each, is_bytes)
            if chars.size() <= SMALL_SET:
                counts.update(chars)
    return counts


def _leaf_sets(node: t.Node, is_bytes: bool) -> set[CharSet]:
    return {
        char_set(each, is_bytes)
        for each in t.walk(node)
        if isinstance(each, t.Literal | t.Dot | t.ClassEscape | t.Set)
    }


def _keeps_sets(old: t.Node, new: t.Node, is_bytes: bool) -> bool:
    fresh = {chars for chars in _leaf_sets(new, is_bytes) if chars.size() > SMALL_SET} - _leaf_sets(
        old, is_bytes
    )
    if not fresh:
        return True
    for each in t.walk(old):
        if isinstance(each, t.Alternation):
            whole = EMPTY
            for branch in each.branches:
                body = branch.body if isinstance(branch, t.Repeat) else branch
                leaf = one_character(body)
                if leaf is not None:
                    whole = whole | char_set(leaf, is_bytes)
            fresh.discard(whole)
    return not fresh


def _keeps_words(old: t.Node, new: t.Node, saved: int) -> bool:
    words = {word for row in _lists(old) for word in row}
    if not words:
        return True
    lost = words - {word for row in _lists(new, 2) for word in row} - _single_words(new)
    if not lost:
        return True
    if not _operators(new) - _operators(old):
        return True  # something went, nothing came
    if any(map(_is_spoken, lost)):
        return False
    return saved >= LIST_SAVING * sum(len(word) + 1 for word in lost)


def merges_words(node: t.Node) -> bool:
    """Whether an automaton would take words of a list apart: two begin or end alike."""
    for row in _lists(node):
        words = [word for word in row if _is_spoken(word)]
        if any(len({word[place] for word in words}) < len(words) for place in (0, -1)):
            return True
    return False


def _lists(node: t.Node, least: int = LIST) -> Iterator[list[Word]]:
    """The words of each alternation that has enough of them."""
    for each in t.walk(node):
        if isinstance(each, t.Alternation):
            words = [word for branch in each.branches for word in _words(branch)]
            if len(words) >= least:
                yield words


def _single_words(node: t.Node) -> set[Word]:
    return set(_words(node))


def _words(node: t.Node) -> list[Word]:
    """The word that a branch is; two where its last letter is optional."""
    while isinstance(node, t.Group) and node.index is None:
        node = node.body
    items = node.items if isinstance(node, t.Sequence) else ()
    codes: list[int] = []
    for item in items:
        if isinstance(item, t.Literal):
            codes.append(item.code)
        elif item is items[-1] and len(codes) >= 3 and isinstance(item, t.Repeat):
            if (item.minimum, item.maximum) == (0, 1) and isinstance(item.body, t.Literal):
                return [tuple(codes), (*codes, item.body.code)]
            return []
        else:
            return []
    return [tuple(codes)] if len(codes) > 1 else []


def _is_spoken(word: Word) -> bool:
    """Whether a word has three letters or more, or is made of symbols."""
    text = "".join(map(chr, word))
    return sum(map(str.isalpha, text)) >= 3 or not any(map(str.isalnum, text))


def _operators(node: t.Node) -> Counter[object]:
    """Sets and counts of repeats, up to their place."""
    found: Counter[object] = Counter()
    for each in t.walk(node):
        match each:
            case t.Set():
                found[each.negated, tuple(replace(item, span=(0, 0)) for item in each.items)] += 1
            case t.Repeat():
                found[each.minimum, each.maximum, each.kind] += 1
            case _:
                pass
    return found
