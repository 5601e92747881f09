"""Lists of routes, of which a library takes the first that fits, as families.

`route_families` finds the lists that hold calls of Django's `re_path`. A route to a view takes the texts that it
matches. One to further routes (`include(…)`, `admin.site.urls`) takes nothing for sure: where none of those fits, the
next one in the list is tried. Only what is plainly a view counts: `Name.as_view()`, a function of the file or an
imported one, an attribute of an imported module.

Which function of `re` a route that ends in `$` is asked of differs with the version of Django, so that such a list is
judged twice: once with `search` throughout, once with `fullmatch` for these.

Source: django/urls/resolvers.py of Django 1.11 to 5.2 (`URLResolver.resolve`, `RegexPattern.match`).
"""

from __future__ import annotations

import ast
from collections.abc import Iterator, Mapping

from patlint.source.index import Index
from patlint.source.places import Text
from patlint.source.scopes import Scope
from patlint.source.sites import Family, Member, Mode, Site, Trial

_DJANGO = frozenset({"django.urls.re_path", "django.urls.conf.re_path", "django.conf.urls.url"})


def route_families(index: Index, text: Text, made: Mapping[ast.Call, Site]) -> Iterator[Family]:
    """One family for each list of routes. `made`: the sites of the calls that take one pattern."""
    lists: dict[ast.List | ast.Tuple, list[ast.Call]] = {}
    for call, site in made.items():
        above = index.parents.get(call)
        if site.function in _DJANGO and isinstance(above, (ast.List, ast.Tuple)):
            lists.setdefault(above, []).append(call)
    for display, calls in lists.items():
        routes = sorted(calls, key=display.elts.index)
        if len(routes) < 2:
            continue
        members = []
        for step, call in enumerate(routes):
            site = made[call]
            ends = site.pattern.endswith("$" if isinstance(site.pattern, str) else b"$")  # type: ignore[arg-type]
            modes: tuple[Mode, Mode] = ("search", "fullmatch" if ends else "search")
            members.append(Member(site, modes, _is_view(call, index.module), step, None))
        trial = Trial(text.place(display))
        yield Family("table", "first", tuple(members), (trial, trial))


def _is_view(call: ast.Call, module: Scope) -> bool:
    """Whether the second argument of a route is plainly a view."""
    if len(call.args) < 2:
        return False
    match call.args[1]:
        case ast.Call(func=ast.Attribute(attr="as_view")):
            return True
        case ast.Name(id=name):
            bindings = module.bindings.get(name, [])
            return (
                bool(bindings)
                and all(b.kind in ("import", "definition") for b in bindings)
                and _no_urls(name)
            )
        case ast.Attribute(value=ast.Name(id=name), attr=attr):
            bindings = module.bindings.get(name, [])
            return bool(bindings) and all(b.kind == "import" for b in bindings) and _no_urls(attr)
        case _:
            return False


def _no_urls(name: str) -> bool:
    return "url" not in name.lower() and "pattern" not in name.lower() and "include" not in name.lower()
