r"""Which bodies of a program are not said exactly: those that hold what is no regular language.

`widened` is a question of the program alone, before positions are numbered: `nfa` takes such a look-around to hold and
lets such an atomic group give back, so that the automaton stays a superset.

>>> from patlint.machine.program import compile_tree
>>> from patlint.syntax.parser import parse
>>> len(widened(compile_tree(parse(r"(a)(?>b\1)(?=c)")))), len(widened(compile_tree(parse(r"(?>b)(?=c)"))))
(1, 0)
"""

from __future__ import annotations

from patlint.machine import program as p


def widened(program: p.Program) -> frozenset[int]:
    """The bodies of look-arounds, and the ends of atomic groups, in which something is not said exactly."""
    found: set[int] = set()
    for op in program.code:
        if isinstance(op, p.Look) and _is_widened(program, op.body):
            found.add(op.body)
        elif isinstance(op, p.Atomic) and _is_widened(program, op.body):
            found.add(op.end)
    return frozenset(found)


def _is_widened(program: p.Program, entry: int) -> bool:
    """Whether a body that begins at `entry` holds a back-reference or a conditional, or the locale has a say."""
    stack, seen = [entry], set()
    while stack:
        pc = stack.pop()
        if pc in seen:
            continue
        seen.add(pc)
        op = program.code[pc]
        match op:
            case p.Back() | p.Test():
                return True
            case p.Look() | p.Atomic():
                stack += (op.body, op.next)
            case p.Fork():
                stack += (op.first, op.second)
            case p.Iterate():
                stack += (op.body, op.exit)
            case p.Accept():
                pass
            case _:
                stack.append(op.next)
    return bool(program.locale)
