"""A quick look at a pattern: is there anything that might be written shorter?

Most patterns are plain sequences in which nothing can be saved; they are to cost next to nothing. True
means only that a closer look is worth its time.
"""

from __future__ import annotations

from patlint.machine.engine_tree import same
from patlint.rewrite.spelling import reduced_set
from patlint.syntax import tree as t

_LONG_RUN = 5
"""So many equal characters in a row are shorter as a repeat."""
_MANY_WORDS = 4


def worth_a_try(pattern: t.Pattern, truth: bool = False) -> bool:
    """`truth`: optional parts at the ends count as well."""
    text = pattern.text if isinstance(pattern.text, str) else pattern.text.decode("latin-1")
    if truth and _has_loose_end(pattern.root):
        return True
    return any(_is_suspect(node, text, pattern.is_bytes) for node in t.walk(pattern.root))


def _has_loose_end(root: t.Node) -> bool:
    items = root.items if isinstance(root, t.Sequence) else (root,)
    return bool(items) and any(isinstance(item, t.Repeat) for item in (items[0], items[-1]))


def _is_suspect(node: t.Node, text: str, is_bytes: bool) -> bool:
    match node:
        case t.Alternation():
            return True
        case t.Set():
            return reduced_set(node, text, is_bytes) is not None
        case t.Group():
            return node.index is None and not isinstance(node.body, t.Alternation | t.Sequence)
        case t.Repeat():
            written = text[node.body.span[1] : node.span[1]]
            if node.minimum == node.maximum and ("," in written or node.kind == "lazy"):
                return True
            own_mark = (node.minimum, node.maximum) in _OWN_MARKS
            return _inner_repeat(node.body) or (own_mark and "}" in written)
        case t.Sequence():
            return _repeats_itself(node.items) or _has_runs(node.items, text)
        case _:
            return False


_OWN_MARKS = ((0, None), (1, None), (0, 1), (1, 1), (0, 0))


def _inner_repeat(body: t.Node) -> bool:
    if isinstance(body, t.Group) and body.index is None:
        return isinstance(body.body, t.Repeat) or (
            isinstance(body.body, t.Sequence) and any(isinstance(item, t.Repeat) for item in body.body.items)
        )
    return False


def _is_needless(item: t.Node) -> bool:
    """Whether `item`, one of several, is a plain group that holds nothing together."""
    match item:
        case t.Group(index=None, add_flags=0, del_flags=0):
            return not isinstance(item.body, t.Alternation)
        case _:
            return False


def _repeats_itself(items: tuple[t.Node, ...]) -> bool:
    if any(map(_is_needless, items)):
        return True
    run = 1
    for before, item in zip(items, items[1:], strict=False):
        a = before.body if isinstance(before, t.Repeat) else before
        b = item.body if isinstance(item, t.Repeat) else item
        if _ends_like(before, item) or _ends_like(item, before):
            return True
        if type(a) is type(b) and same(a, b):
            run += 1
            if a is not before or b is not item or isinstance(a, t.Set) or run >= _LONG_RUN:
                return True
        else:
            run = 1
    return False


def _has_runs(items: tuple[t.Node, ...], text: str) -> bool:
    """Whether several items stand there three times in a row, and are long enough to be counted."""
    if len(items) < 5:
        return False
    texts = [text[item.span[0] : item.span[1]] for item in items]
    for width in range(2, min(6, len(items) // 2) + 1):
        run = 0
        for place in range(len(items) - width):
            run = run + 1 if texts[place] == texts[place + width] else 0
            if run >= width and sum(map(len, texts[place + 1 - width : place + 1])) * (run // width) > 6:
                return True
    return False


def _ends_like(loop: t.Node, other: t.Node) -> bool:
    """Whether a repeat of several items is next to an item like one of its own."""
    if (
        isinstance(loop, t.Repeat)
        and isinstance(loop.body, t.Group)
        and isinstance(loop.body.body, t.Sequence)
    ):
        items = loop.body.body.items or (loop,)
        return any(type(item) is type(other) and same(item, other) for item in (items[0], items[-1]))
    return False


def is_involved(node: t.Node) -> bool:
    """Whether an automaton may know more than the laws: alternatives other than long lists of words, or
    repeats in repeats."""
    for each in t.walk(node):
        match each:
            case t.Alternation():
                if len(each.branches) <= _MANY_WORDS or not all(map(is_word, each.branches)):
                    return True
            case t.Repeat() if any(isinstance(below, t.Repeat) for below in t.walk(each.body)):
                return True
            case _:
                pass
    return False


def is_word(node: t.Node) -> bool:
    """Whether `node` is a row of characters in which nothing can be saved."""
    items = node.items if isinstance(node, t.Sequence) else (node,)
    return all(isinstance(item, t.Literal) for item in items) and not _has_long_run(items)


def _has_long_run(items: tuple[t.Node, ...]) -> bool:
    return len(items) >= _LONG_RUN and _repeats_itself(items)
