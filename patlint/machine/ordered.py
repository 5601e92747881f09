"""Ordered lists of threads: the state of a backtracking engine after a prefix of the text.

The preferred thread stands first, each thread once at its best place. What stands behind a thread that has
reached the end without obligations can never win and is cut. A thread that has reached the end with obligations
stays as *pending* where the list is to go on: should they come true, the match ended back there, so it vetoes
everything behind it, and never ends again.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING, TypeAlias

from patlint.machine.determinise import subset_table
from patlint.machine.obligations import ALL, NONE, Conjunction, Thread

if TYPE_CHECKING:
    from patlint.machine.nfa import Nfa

Threads: TypeAlias = tuple[Thread, ...]


def prune(nfa: Nfa, moves: Iterable[tuple[Thread, int]], cut: bool) -> tuple[Threads, tuple[int, ...]]:
    """Threads in order without those that a better equal one makes pointless, and where each came from.

    `cut`: nothing behind a thread at the end without obligations.
    """
    best: dict[int, list[Conjunction]] = {}
    kept: list[Thread] = []
    origins: list[int] = []
    for thread, origin in moves:
        position, duty = thread
        before = best.get(position)
        if before is None:
            best[position] = [duty]
        elif any(other <= duty for other in before):
            continue
        else:
            before.append(duty)
        kept.append(thread)
        origins.append(origin)
        if cut and not duty and position in (nfa.accept, nfa.pending):
            break
    return tuple(kept), tuple(origins)


def steps(
    nfa: Nfa, threads: Threads, minterm: int, context: int, stays: bool, among: Sequence[int] | None = None
) -> Iterator[tuple[Thread, int]]:
    """The threads after reading a character, which leaves `context`, with the index each came from.

    `stays`: a thread at the end goes on as pending. `among`: the row of `movers` for this character.
    """
    readers = nfa.readers[minterm]
    for index in range(len(threads)) if among is None else among:
        position, duty = threads[index]
        if position == nfa.accept or position == nfa.pending:
            if stays:
                rest = nfa.obligations.step(duty, minterm)
                if rest is not None:
                    yield (nfa.pending, rest), index
        elif readers >> position & 1:
            if not duty:
                for thread in nfa.after(position, minterm, context):
                    yield thread, index
                continue
            rest = nfa.obligations.step(duty, minterm)
            if rest is not None:
                for after, more in nfa.after(position, minterm, context):
                    yield (after, rest | more), index


def movers(nfa: Nfa, threads: Threads, stays: bool) -> list[list[int]]:
    """For each minterm the indexes of the threads that may go on when it is read.

    Long lists mostly hold threads of which each reads little, the beginnings of many words.
    """
    rows: list[list[int]] = [[] for _ in nfa.readers]
    for index, (position, _) in enumerate(threads):
        if stays and (position == nfa.accept or position == nfa.pending):
            for row in rows:
                row.append(index)
        else:
            for minterm in nfa.minterms_of(nfa.reads[position]):
                rows[minterm].append(index)
    return rows


def ends_here(nfa: Nfa, threads: Threads, context: int) -> Iterator[Conjunction]:
    """For each thread that has just reached the end, what the rest must be for the match to end here."""
    for index, (position, duty) in enumerate(threads):
        if position != nfa.accept:
            continue
        veto = _veto(nfa, threads[:index], context)
        if veto == ALL:
            yield duty
        elif veto != NONE:
            yield duty | {veto}


def _veto(nfa: Nfa, better: Threads, context: int) -> int:
    """The obligation that none of the threads `better` matches on the rest of the text."""
    if not better:
        return ALL
    key = (better, context)
    found = nfa.vetoes.get(key)
    if found is None:
        # A pending thread matches as one at the end does: by its obligations alone.
        threads = tuple(
            (nfa.accept if position == nfa.pending else position, duty) for position, duty in better
        )
        table, accepting = subset_table(nfa, "match", threads, context)
        nfa.charge(len(table) + len(threads))
        found = nfa.obligations.complement(nfa.obligations.intern(table, accepting)[0])
        nfa.vetoes[key] = found
    return found
