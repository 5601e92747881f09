r"""Tree to pattern text: `parse` of what is written here gives the same tree again.

The same up to spans and to plain groups `(?:...)`, which are put in only where precedence asks for them.

>>> from patlint.syntax.parser import parse
>>> render(parse(r"(?: a | [b] ) + \x2e", VERBOSE).root, 0, False)
'(?:a|[b])+\\.'

A leaf carries the flags under which it stands. Where they differ from those around it in a way that
matters, it is wrapped in a group with flags: `(?-i:k)`. Under VERBOSE in `context_flags`, blanks and `#`
are escaped, so that the text fits into a verbose pattern.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from .charset import CharSet
from .classes import char_set, is_locale_dependent
from .compact import char_node, node_text
from .spelling import char_text
from .tree import (
    ASCII,
    DOTALL,
    FLAG_LETTERS,
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
    Repeat,
    Sequence,
    Set,
)

__all__ = ["char_node", "render", "render_pattern", "render_set"]

_TYPE_FLAGS = ASCII | LOCALE | UNICODE
# How tightly a text must hold together: as the body of a group, beside others, under a repeat.
_LOOSE, _BESIDE, _TIGHT = range(3)
_REPEAT_MARKS = {"greedy": "", "lazy": "?", "possessive": "+"}


def render(node: Node, context_flags: int, is_bytes: bool) -> str | bytes:
    """`node` as pattern text that stands where `context_flags` hold.

    Capturing groups are numbered by the place where the text is put, so a back-reference keeps its meaning
    only if the groups do. Raises ValueError for an unnamed reference above group 99, which `re` cannot
    write.
    """
    text = _text(node, _Context(context_flags, is_bytes), _LOOSE)
    return text.encode("latin-1") if is_bytes else text


def render_pattern(pattern: Pattern) -> str | bytes:
    """The whole pattern, to be compiled with the flags that were given beside the original text.

    Flags that the original set inside its text stand at the start, except VERBOSE, which is written out.
    """
    inline = pattern.inline & ~VERBOSE
    context = pattern.flags & ~(pattern.inline & VERBOSE)
    letters = _letters(inline)
    text = _text(pattern.root, _Context(context, pattern.is_bytes), _LOOSE)
    if letters:
        text = f"(?{letters}){text}"
    return text.encode("latin-1") if pattern.is_bytes else text


def render_set(charset: CharSet, flags: int, is_bytes: bool) -> str:
    """`charset` as the shortest text for one character under `flags`; see `char_node`."""
    return _text(char_node(charset, flags, is_bytes), _Context(flags, is_bytes), _TIGHT)


@dataclass(frozen=True, slots=True)
class _Context:
    flags: int
    is_bytes: bool


def _text(node: Node, context: _Context, binding: int) -> str:
    """`node` where it is held together at least as tightly as `binding` asks.

    One call a node and no other in between: 100 nested groups must fit into Python's stack.
    """
    own = _TIGHT
    match node:
        case Literal() | Dot() | ClassEscape() | Set() | Anchor() | BackReference():
            opening = _flag_change(node, context)
            text = _leaf(node, context, binding)
            if opening:
                text = f"{opening}{text})"
            elif isinstance(node, Anchor):
                own = _BESIDE
        case Sequence():
            pieces = []
            for item in _flat(node):
                opening = _flag_change(item, context)
                inner = _leaf(item, context, _BESIDE) if opening else _text(item, context, _BESIDE)
                pieces.append((opening, inner, item))
            text, own = _side_by_side(pieces), _BESIDE
        case Alternation():
            text, own = "", _LOOSE
            for number, branch in enumerate(node.branches):
                text += "|" if number else ""
                text += _text(branch, context, _LOOSE if isinstance(branch, Alternation) else _BESIDE)
        case Repeat():
            text = _text(node.body, context, _TIGHT) + _counts(node.minimum, node.maximum)
            text, own = text + _REPEAT_MARKS[node.kind], _BESIDE
        case Conditional():
            text = f"(?({node.name or node.index}){_text(node.yes, context, _BESIDE)}"
            if node.no is not None:
                text += "|" + _text(node.no, context, _BESIDE)
            text += ")"
        case Group() | Look() | Atomic():
            text = f"{_group_opening(node)}{_text(node.body, _inside(node, context), _LOOSE)})"
    return f"(?:{text})" if binding > own else text


def _group_opening(node: Group | Look | Atomic) -> str:
    match node:
        case Group(index=None):
            return _opening(node.add_flags & ~VERBOSE, node.del_flags & ~VERBOSE)
        case Group():
            return "(" if node.name is None else f"(?P<{node.name}>"
        case Look():
            return "(?" + ("" if node.ahead else "<") + ("!" if node.negated else "=")
        case Atomic():
            return "(?>"


def _inside(node: Group | Look | Atomic, context: _Context) -> _Context:
    """The context in a group. VERBOSE stays as it is around: blanks are written accordingly."""
    if not isinstance(node, Group) or not (node.add_flags or node.del_flags):
        return context
    flags = context.flags & ~_TYPE_FLAGS if node.add_flags & _TYPE_FLAGS else context.flags
    flags = (flags | node.add_flags & ~VERBOSE) & ~(node.del_flags & ~VERBOSE)
    return replace(context, flags=flags)


def _side_by_side(pieces: list[tuple[str, str, Node]]) -> str:
    """The pieces (change of flags, text, node) in a row; neighbours with the same change share a group."""
    text = run = group = ""
    for opening, piece, node in reversed(pieces):
        if opening != group:
            text = f"{group}{run}){text}" if group else text
            run, group = "", opening
        if opening:
            run = _join(piece, node, run)
        else:
            text = _join(piece, node, text)
    return f"{group}{run}){text}" if group else text


def _flat(node: Sequence) -> list[Node]:
    found: list[Node] = []
    for item in node.items:
        found += _flat(item) if isinstance(item, Sequence) else (item,)
    return found


def _join(text: str, node: Node, rest: str) -> str:
    """`text`, which `node` was written as, before `rest`, kept apart where they would run together."""
    if isinstance(node, BackReference) and rest[:1].isdigit() and text[-1] != ")":
        return f"(?:{text}){rest}"
    if isinstance(node, Literal) and text == "{" and _reads_as_counts(rest):
        return "\\{" + rest
    return text + rest


def _reads_as_counts(rest: str) -> bool:
    """Whether `re` would take a brace before `rest` for a repeat."""
    inside, closed, _ = rest.partition("}")
    low, _, high = inside.partition(",")
    return bool(closed and inside) and all(not part or part.isdigit() for part in (low, high))


def _leaf(node: Node, context: _Context, binding: int) -> str:
    match node:
        case Literal():
            if binding == _TIGHT and node.code == ord("{"):
                return r"\{"
            return char_text(node.code, context.is_bytes, bool(context.flags & VERBOSE))
        case Dot() | ClassEscape() | Set():
            return node_text(node, context.is_bytes)
        case Anchor():
            return node.kind
        case BackReference():
            if node.name is not None:
                return f"(?P={node.name})"
            if node.index > 99:
                raise ValueError(f"a reference to group {node.index} cannot be written without a name")
            return f"\\{node.index}"
    raise AssertionError(f"{node!r} is no leaf")


def _counts(minimum: int, maximum: int | None) -> str:
    match minimum, maximum:
        case 0, None:
            return "*"
        case 1, None:
            return "+"
        case 0, 1:
            return "?"
        case _, None:
            return f"{{{minimum},}}"
        case _ if minimum == maximum:
            return f"{{{minimum}}}"
        case 0, _:
            return f"{{,{maximum}}}"
        case _:
            return f"{{{minimum},{maximum}}}"


def _flag_change(node: Node, context: _Context) -> str:
    """The opening of the group that gives a leaf its flags; empty where it needs none."""
    mask = _heeded(node)
    if not mask:
        return ""
    wanted, present = _typed(node, context.is_bytes), _typed(context, context.is_bytes)
    if not (wanted ^ present) & mask or _same_meaning(node, context):
        return ""
    return _opening(wanted & ~present & mask, present & ~wanted & mask & ~_TYPE_FLAGS)


def _heeded(node: Node) -> int:
    """The flags on which the meaning of `node` itself, not of what is below it, depends."""
    match node:
        case Dot():
            return DOTALL
        case Anchor(kind="^" | "$"):
            return MULTILINE
        case Anchor(kind=r"\b" | r"\B") | ClassEscape():
            return _TYPE_FLAGS
        case Set():
            return IGNORECASE | _TYPE_FLAGS
        case Literal() | BackReference():
            return IGNORECASE | (_TYPE_FLAGS if node.flags & IGNORECASE else 0)
        case _:
            return 0


def _same_meaning(node: Node, context: _Context) -> bool:
    """Whether a leaf means the same under the flags around it, although they differ from its own."""
    match node:
        case Literal() | Dot() | ClassEscape() | Set():
            here = replace(node, flags=context.flags)
            return is_locale_dependent(node) == is_locale_dependent(here) and (
                char_set(node, context.is_bytes) == char_set(here, context.is_bytes)
            )
        case _:
            return False


def _typed(holder: Node | _Context, is_bytes: bool) -> int:
    """The flags of a leaf or a context, with exactly one of ASCII, LOCALE and UNICODE."""
    flags: int = getattr(holder, "flags", 0)
    if flags & LOCALE and is_bytes:
        return flags & ~_TYPE_FLAGS | LOCALE
    return flags & ~_TYPE_FLAGS | (ASCII if is_bytes or flags & ASCII else UNICODE)


def _opening(add: int, remove: int) -> str:
    taken = _letters(remove)
    return f"(?{_letters(add)}{'-' + taken if taken else ''}:"


def _letters(flags: int) -> str:
    return "".join(letter for letter, flag in FLAG_LETTERS.items() if flags & flag)
