"""The families of one file: patterns that work side by side, from the calls that made them.

`read_families` puts together what `tables` (displays and the loops through them) and `chains` (tests one after
the other) find, the rows that libraries try in their order, and runs of constants with a common part in their names.
A constant has a name of its own, so that an equal one beside it may be meant, unless the names differ in a number
alone (`RULE_1`, `RULE_2`). A family has at least two patterns whose text is known.

>>> from patlint.source import read_module
>>> text = "import re\\ndef f(s):\\n if re.match('a', s): return 1\\n elif re.match('b', s): return 2\\n"
>>> [[member.site.pattern for member in each.members] for each in read_module(text, "a.py").families]
[['a', 'b']]
"""

from __future__ import annotations

import ast
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import replace
from typing import TypeAlias

from patlint.source.chains import Chains
from patlint.source.constants import Constants
from patlint.source.index import Index
from patlint.source.places import Text
from patlint.source.routes import route_families
from patlint.source.scopes import Scope
from patlint.source.sinks_calls import SinkReader
from patlint.source.sites import Family, Member, Place, Site, Trial
from patlint.source.tables import Tables
from patlint.source.trials import TESTING, Test, read_test

_COMMON = frozenset({"re", "regex", "regexp", "rx", "pattern", "pat"})
"""Words that say no more than that it is a pattern."""

Made: TypeAlias = dict[ast.Call, list[tuple[Site, Scope]]]
"""The sites of each call that gives a pattern to `re`, in the order of their rows, with the scope of the call."""


def read_families(
    index: Index,
    text: Text,
    constants: Constants,
    made: Made,
    sinks: SinkReader,
    sites: Iterable[Site],
) -> tuple[Family, ...]:
    """The families of a file whose sites, merged, are `sites`; in the order of their first members.

    `sinks` knows the rows and routes of which a library takes the first that matches.
    """
    ordered = [each for each in sinks.rows if len(each) > 1]
    if not made and not ordered and not sinks.made:
        return ()
    final = {(site.place, site.pattern, site.flags): site for site in sites}
    found = list(Tables(index, text, constants.names, made).find())
    found += Chains(index, text, _tests(index, constants, made)).find()
    found += filter(None, map(_ordered, ordered))
    found += route_families(index, text, sinks.made)
    found += _constants(index, made)
    settled = filter(None, (_settled(family, final) for family in found))
    return tuple(sorted(settled, key=lambda family: family.members[0].site.place))


def _ordered(rows: list[Site]) -> Family | None:
    """Rows that a library tries in their order; None where it is not known how."""
    if all(site.function.startswith("tornado.") and not site.uses for site in rows):
        # A dollar is added to each, and match asked: what holds of fullmatch holds of that.
        members = tuple(Member(site, ("fullmatch",), True, step, None) for step, site in enumerate(rows))
        return Family("table", "first", members, (Trial(rows[0].place),))
    if any(len(site.uses) != 1 for site in rows):
        return None
    positioned = any(site.uses[0].positioned for site in rows)
    members = tuple(Member(site, (site.uses[0].mode,), True, step, None) for step, site in enumerate(rows))
    return Family("table", "first", members, (Trial(rows[0].uses[0].place, positioned),))


def _constants(index: Index, made: Made) -> Iterator[Family]:
    """Runs of `NAME = re.compile(…)`, one line after the other, whose names have a part in common."""
    lines: dict[int, tuple[str, Site]] = {}
    for call, rows in made.items():
        statement = index.parents.get(call)
        if not isinstance(statement, ast.Assign) or len(rows) != 1 or rows[0][0].function != "compile":
            continue
        above = index.parents.get(statement)
        if len(statement.targets) == 1 and isinstance(above, (ast.Module, ast.ClassDef)):
            target = statement.targets[0]
            if isinstance(target, ast.Name):
                lines[id(statement)] = (target.id, rows[0][0])
    bodies = [index.tree.body, *(node.body for node in index.classes)]
    for body in bodies:
        run: list[tuple[str, Site]] = []
        for statement in [*body, None]:
            found = None if statement is None else lines.get(id(statement))
            if found is not None and (not run or _parts(found[0]) & _parts(run[0][0])):
                run.append(found)
                continue
            if len(run) > 1:
                yield _run(run)
            run = [] if found is None else [found]


def _parts(name: str) -> frozenset[str]:
    """The words of a name, without the numbers."""
    words = (word.rstrip("0123456789") for word in name.lower().split("_"))
    return frozenset(word for word in words if len(word) > 1 and word not in _COMMON)


def _run(run: list[tuple[str, Site]]) -> Family:
    named = len({name.rstrip("0123456789") for name, _ in run}) > 1
    members = tuple(
        Member(site, rest=" ".join(sorted({f"{use.function} {use.looks_at}" for use in site.uses})))
        for _, site in run
    )
    return Family("constants", "unknown", members, named=named)


def _settled(family: Family, final: Mapping[tuple[Place, str | bytes, int], Site]) -> Family | None:
    """The family with the sites that the file has in the end."""
    members = []
    for member in family.members:
        site = final.get((member.site.place, member.site.pattern, member.site.flags))
        if site is not None:
            members.append(replace(member, site=site))
    if len(members) < 2 or (family.kind != "tests" and len({id(member.site) for member in members}) < 2):
        return None
    return replace(family, members=tuple(members))


def _tests(index: Index, constants: Constants, made: Made) -> dict[ast.Call, tuple[Test, Site, Scope]]:
    """The calls that test a text by one known pattern."""
    engine = constants.engine
    found: dict[ast.Call, tuple[Test, Site, Scope]] = {}
    for call, rows in made.items():
        if len(rows) == 1 and rows[0][0].function in TESTING:
            site, scope = rows[0]
            test = read_test(call, scope, engine)
            if test is not None:
                found[call] = (test, site, scope)
    for node, scope in _methods(index):
        above = index.parents.get(node)
        if isinstance(above, ast.Call) and above.func is node and above not in found:
            maker = constants.names.maker(node.value, scope)
            rows = made.get(maker[0], []) if maker else []
            test = read_test(above, scope, engine)
            if len(rows) == 1 and test is not None:
                found[above] = (test, rows[0][0], scope)
    return dict(sorted(found.items(), key=lambda item: (item[0].lineno, item[0].col_offset)))


def _methods(index: Index) -> Iterator[tuple[ast.Attribute, Scope]]:
    for name in TESTING:
        for use in index.reads.get(name, ()):
            yield use.node, use.scope
