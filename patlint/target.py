"""The Python version whose `re` is meant: a target such as (3, 12), and where it comes from.

patlint knows `TARGETS`. Without a word from the user the target is the lowest version that `requires-python`
of the project allows (what is fine there is fine on the others, but for a few constructs that came later),
held within that range, else the running version.
"""

from __future__ import annotations

import re
import sys
from typing import Final, TypeAlias

Target: TypeAlias = tuple[int, int]

TARGETS: Final[tuple[Target, ...]] = ((3, 10), (3, 11), (3, 12), (3, 13))


def target_name(target: Target) -> str:
    """(3, 12) as "3.12"."""
    return f"{target[0]}.{target[1]}"


def target_named(name: str) -> Target | None:
    """`3.12` as (3, 12), None where patlint does not know that version."""
    return next((each for each in TARGETS if target_name(each) == name), None)


def unknown_target(name: str) -> str:
    """The message about a name for which `target_named` has nothing."""
    return f"unknown target {name!r}; patlint knows {', '.join(map(target_name, TARGETS))}"


def running_target() -> Target:
    """The running Python, held within the range that patlint knows."""
    return min(max(sys.version_info[:2], TARGETS[0]), TARGETS[-1])


def lowest_target(requires_python: str) -> Target | None:
    """The lowest 3.x that a `requires-python` allows, held within the known range; None if not understood.

    A version is allowed if one of its releases 3.x.0 to 3.x.40 meets every clause.

    >>> lowest_target(">=3.8"), lowest_target(">3.11.2,<4"), lowest_target("==3.12.*")
    ((3, 10), (3, 11), (3, 12))
    """
    clauses = []
    for text in requires_python.split(","):
        found = re.fullmatch(r"\s*(~=|===?|!=|<=?|>=?)\s*v?(\d+(?:\.\d+)*)(\.\*)?[A-Za-z0-9.+!_-]*\s*", text)
        if found is None:
            if text.strip():
                return None
            continue
        clauses.append((found[1], tuple(map(int, found[2].split("."))), found[3] is not None))
    for minor in range(60):
        if any(all(_meets((3, minor, micro), *clause) for clause in clauses) for micro in range(41)):
            return min(max((3, minor), TARGETS[0]), TARGETS[-1])
    return None


def _meets(release: tuple[int, int, int], operator: str, version: tuple[int, ...], star: bool) -> bool:
    padded = version + (0,) * (3 - len(version))
    if star or operator == "~=":
        head = version if star else version[:-1]
        same = release[: len(head)] == head
        if operator == "!=":
            return not same
        return same if star and operator != "~=" else same and release >= padded
    match operator:
        case ">=":
            return release >= padded
        case "<=":
            return release <= padded
        case ">":
            return release > padded
        case "<":
            return release < padded
        case "!=":
            return release != padded
        case _:
            return release == padded
