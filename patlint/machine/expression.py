r"""From an automaton back to an expression: states are removed one by one.

Removing a state joins each way into it with each way out of it, its loop between them. Which state goes first
decides how long the result becomes; the state that adds least is taken each time, and states that every
accepted text passes are kept for last, so that what stands before and behind them is not mixed. The
automaton read backwards gives a second result; the shorter text wins, then the lower nesting, then the
fewer operators.

>>> from patlint.language import Language
>>> from patlint.syntax.render import render_set
>>> short = expression(Language("(a|b)*a|(b|a)*b|").dfa, Algebra(lambda chars: render_set(chars, 0, False)))
>>> Algebra(lambda chars: render_set(chars, 0, False)).text(short)
'[ab]*'

Sources: Brzozowski and McCluskey, Signal flow graph techniques for sequential circuit state diagrams, 1963
(removing states); Delgado and Morais, Approximation to the smallest regular expression for a given regular
language, 2004 (weights); Han and Wood, Obtaining shorter regular expressions from finite-state automata,
2007 (bridge states).
Limits: `MOST_STATES` useful states, and the length given by the caller; beyond either there is no result.
Cost: states squared times transitions, cut short by the length.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal, TypeAlias

from patlint.machine.algebra import Algebra, reverse
from patlint.machine.dfa import Dfa, minimal
from patlint.machine.expr import (
    EMPTY,
    NOTHING,
    Chain,
    Chars,
    Choice,
    Expr,
    Opaque,
    Times,
    nullable,
)
from patlint.machine.words import distances
from patlint.syntax.charset import EMPTY as NO_CHARS
from patlint.syntax.charset import CharSet

MOST_STATES = 40
"""Useful states of an automaton that is turned into an expression; 40 states take about 20 ms."""
Order: TypeAlias = Literal["natural", "weights", "bridges", "both"]
SLACK = 2
"""A way between two states may become so many times longer than the result may be; algebra shortens it
later."""


def expression(dfa: Dfa, algebra: Algebra, longest: int = 400, *, backwards: bool = True) -> Expr | None:
    """A short expression of the automaton's language; None beyond a limit or above `longest` characters."""
    good = expressions(dfa, algebra, longest, backwards=backwards)
    return min(good, key=lambda found: rank(found, algebra), default=None)


def expressions(dfa: Dfa, algebra: Algebra, longest: int = 400, *, backwards: bool = True) -> list[Expr]:
    """What the orders of removal give, none above `longest` characters; an empty list beyond a limit."""
    forward = _edges(dfa)
    if forward is None:
        return []
    results = [_eliminate(forward, algebra, longest, keep_bridges) for keep_bridges in (True, False)]
    if backwards:
        turned = _reversed(dfa)
        edges = None if turned is None else _edges(turned)
        if edges is not None:
            for keep_bridges in (True, False):
                found = _eliminate(edges, algebra, longest, keep_bridges)
                results.append(None if found is None else reverse(found, algebra))
    return [found for found in results if found is not None and len(algebra.text(found)) <= longest]


def eliminated(dfa: Dfa, algebra: Algebra, order: Order, longest: int = 100_000) -> Expr | None:
    """One run of the elimination forwards, for comparison: states in their "natural" order, by "weights" alone,
    in their natural order but for "bridges", which come last, or "both"."""
    edges = _edges(dfa)
    if edges is None:
        return None
    natural = order in ("natural", "bridges")
    found = _eliminate(edges, algebra, longest, True, natural) if order in ("bridges", "both") else None
    return _eliminate(edges, algebra, longest, False, natural) if found is None else found


def in_order(expr: Expr, leaves: list[CharSet]) -> Expr:
    """`expr` with its branches in the order in which their first characters come in `leaves`."""
    match expr:
        case Chain():
            return Chain(tuple(in_order(item, leaves) for item in expr.items))
        case Choice():
            branches = [in_order(branch, leaves) for branch in expr.branches]
            return Choice(tuple(sorted(branches, key=lambda branch: _place(branch, leaves))))
        case Times():
            return Times(in_order(expr.body, leaves), expr.low, expr.high, expr.lazy)
        case _:
            return expr


def _place(expr: Expr, leaves: list[CharSet]) -> int:
    first = _first(expr)
    return next((place for place, chars in enumerate(leaves) if not chars.isdisjoint(first)), len(leaves))


def _first(expr: Expr) -> CharSet:
    """Characters with which a text of `expr` may begin."""
    match expr:
        case Chars():
            return expr.chars
        case Opaque():
            return NO_CHARS
        case Chain() | Choice():
            found = NO_CHARS
            for part in expr.items if isinstance(expr, Chain) else expr.branches:
                found = found | _first(part)
                if isinstance(expr, Chain) and not nullable(part):
                    break
            return found
        case Times():
            return _first(expr.body)


def rank(expr: Expr, algebra: Algebra) -> tuple[int, int, int, str]:
    """Shorter, then flatter, then fewer operators, then by text, so that the choice is always the same."""
    text = algebra.text(expr)
    depth, operators = complexity(expr)
    return len(text), depth, operators, text


def complexity(expr: Expr) -> tuple[int, int]:
    """How deep groups are nested, and the number of operators: bars, repeats and sets."""
    match expr:
        case Chars():
            return 0, int(expr.chars.size() > 1)
        case Opaque():
            return 0, 0
        case Chain():
            return _most(expr.items, 0)
        case Choice():
            return _most(expr.branches, max(0, len(expr.branches) - 1), deeper=True)
        case Times():
            return _most(
                (expr.body,), 2 if expr.lazy else 1, deeper=not isinstance(expr.body, Chars | Choice)
            )


def _most(parts: Iterable[Expr], operators: int, deeper: bool = False) -> tuple[int, int]:
    depth = 0
    for part in parts:
        below, more = complexity(part)
        depth = max(depth, below)
        operators += more
    return depth + deeper, operators


@dataclass(frozen=True, slots=True)
class _Edges:
    """The useful part of an automaton: `moves[p][q]` are the characters that lead from p to q."""

    moves: dict[int, dict[int, CharSet]]
    start: int
    ends: frozenset[int]


def _edges(dfa: Dfa) -> _Edges | None:
    left = distances(dfa)
    useful = [state for state, distance in enumerate(left) if distance is not None]
    if len(useful) > MOST_STATES:
        return None
    moves: dict[int, dict[int, CharSet]] = {}
    unions: dict[tuple[int, ...], CharSet] = {}
    for state in useful:
        columns: dict[int, list[int]] = {}
        for minterm, target in enumerate(dfa.table[state]):
            if left[target] is not None:
                columns.setdefault(target, []).append(minterm)
        row = moves[state] = {}
        for target, minterms in columns.items():
            key = tuple(minterms)
            if key not in unions:
                parts = (part for minterm in minterms for part in dfa.alphabet.classes[minterm].ranges())
                unions[key] = CharSet.of_ranges(parts)
            row[target] = unions[key]
    return _Edges(moves, 0, frozenset(state for state in useful if dfa.accepting[state]))


_Ways: TypeAlias = dict[int, dict[int, tuple[Expr, int]]]
"""From each state to others: the texts that lead there, and the length of the expression."""


def _eliminate(
    edges: _Edges, algebra: Algebra, longest: int, keep_bridges: bool, natural: bool = False
) -> Expr | None:
    start, end = -1, -2
    if edges.start not in edges.moves:
        return NOTHING

    def sized(expr: Expr) -> tuple[Expr, int]:
        return expr, algebra.size(expr)

    ways: _Ways = {
        state: {target: sized(algebra.chars(chars)) for target, chars in row.items()}
        for state, row in edges.moves.items()
    }
    back: dict[int, set[int]] = {state: set() for state in ways}
    back[end] = set()
    ways[start] = {edges.start: (EMPTY, 0)}
    ways[end] = {}
    for state in edges.ends:
        ways[state][end] = (EMPTY, 0)
    for state, row in ways.items():
        for target in row:
            back[target].add(state)
    bridges = _bridges(ways, start, end) if keep_bridges else frozenset()
    if keep_bridges and not bridges:
        return None  # the other order does the same
    waiting = [state for state in ways if state >= 0]
    while waiting:
        candidates = [state for state in waiting if state not in bridges] or waiting
        state = (
            min(candidates)
            if natural
            else min(candidates, key=lambda each: (_weight(each, ways, back), each))
        )
        waiting.remove(state)
        loop = ways[state].pop(state, None)
        back[state].discard(state)
        middle = EMPTY if loop is None else algebra.star(loop[0])
        for target, (out, _) in ways[state].items():
            back[target].discard(state)
            tail = algebra.chain((middle, out))
            for source in back[state]:
                way = algebra.chain((ways[source][state][0], tail))
                known = ways[source].get(target)
                joined = ways[source][target] = sized(
                    way if known is None else algebra.choice((known[0], way))
                )
                if joined[1] > longest * SLACK:
                    return None
                back[target].add(source)
        for source in back[state]:
            del ways[source][state]
        del ways[state], back[state]
    found = ways[start].get(end)
    return NOTHING if found is None else found[0]


def _weight(state: int, ways: _Ways, back: dict[int, set[int]]) -> int:
    """How much text the removal of `state` adds (Delgado and Morais, section 3)."""
    into = [ways[source][state][1] for source in back[state] if source != state]
    out = [size for target, (_, size) in ways[state].items() if target != state]
    loop = ways[state].get(state)
    around = 0 if loop is None else loop[1]
    return sum(into) * (len(out) - 1) + sum(out) * (len(into) - 1) + around * (len(into) * len(out) - 1)


def _bridges(ways: _Ways, start: int, end: int) -> frozenset[int]:
    """States that every accepted text passes exactly once."""
    found = []
    for state in ways:
        if state in (start, end) or not ways[start]:
            continue
        if not _reaches(ways, start, end, state) and not any(
            target == state or _reaches(ways, target, state, None) for target in ways[state]
        ):
            found.append(state)
    return frozenset(found)


def _reaches(ways: _Ways, source: int, goal: int, without: int | None) -> bool:
    stack, seen = [source], {source, without}
    while stack:
        state = stack.pop()
        if state == goal:
            return True
        for target in ways[state]:
            if target not in seen:
                seen.add(target)
                stack.append(target)
    return False


def _reversed(dfa: Dfa) -> Dfa | None:
    """The minimal automaton of the texts read backwards; None where it has too many states."""
    width = len(dfa.alphabet)
    before = [[0] * len(dfa) for _ in range(width)]
    for state, row in enumerate(dfa.table):
        for minterm, target in enumerate(row):
            before[minterm][target] |= 1 << state
    first = sum(1 << state for state, end in enumerate(dfa.accepting) if end)
    number = {first: 0}
    order = [first]
    table: list[tuple[int, ...]] = []
    for states in order:
        new_row = []
        for minterm in range(width):
            reached, rest = 0, states
            while rest:
                low = rest & -rest
                rest ^= low
                reached |= before[minterm][low.bit_length() - 1]
            index = number.get(reached)
            if index is None:
                if len(order) > 2 * MOST_STATES:
                    return None
                index = number[reached] = len(order)
                order.append(reached)
            new_row.append(index)
        table.append(tuple(new_row))
    return minimal(dfa.alphabet, table, [bool(states & 1) for states in order])
