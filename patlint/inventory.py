"""Every pattern in the code, without judging it: what `patlint list` prints.

>>> inventory = inventory_of(b"import re\\nre.match('a+', input())\\n", "x.py", (3, 12))
>>> [each.pattern for each in inventory.patterns]
['a+']
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from patlint.outcome import Remark, failed, internal, site_flag_names
from patlint.source.sites import LooksAt, Site
from patlint.target import Target

if TYPE_CHECKING:
    from patlint.source.sinks import SinkTable

_MODES = ("match", "fullmatch", "search")
_LOOKS: tuple[LooksAt, ...] = ("truth", "span", "groups", "unknown")


@dataclass(frozen=True, slots=True)
class Listed:
    """One pattern: its place, flags by name (inline ones too), modes, and the most that is looked at."""

    path: str
    line: int
    column: int
    end_line: int
    end_column: int
    pattern: str | bytes
    flags: tuple[str, ...]
    modes: tuple[str, ...]
    looks_at: LooksAt
    function: str = ""
    """The function of `re` that is called, or the qualified name of what takes the pattern elsewhere."""


@dataclass(frozen=True, slots=True)
class Inventory:
    """The patterns of one file; `problems` are lines for standard error."""

    path: str
    patterns: tuple[Listed, ...] = ()
    unresolved: tuple[Remark, ...] = ()
    problems: tuple[str, ...] = ()


def inventory_of(
    data: bytes, path: str, target: Target, sinks: SinkTable | None = None, root: str | None = None
) -> Inventory:
    """The patterns of a file with content `data`; `sinks` None: the built-in ones. `root`: the project's directory.

    Raises nothing but KeyboardInterrupt.
    """
    from patlint.source import SourceError, read_module
    from patlint.source.disk import Files

    try:
        module = read_module(data, path, sinks, Files(root))
    except SourceError as error:
        return Inventory(path, problems=failed(path, error.message, error.line).problems)
    except (RecursionError, MemoryError):
        return Inventory(path, problems=failed(path, "nested too deeply to be read").problems)
    except Exception as error:
        return Inventory(path, problems=failed(path, internal(error)).problems)
    return Inventory(
        path,
        tuple(_listed(site, target) for site in module.sites),
        tuple(
            Remark(each.place.line, each.place.column, f"{each.function}: {each.reason}")
            for each in module.unresolved
        ),
    )


def looks_at(site: Site) -> LooksAt:
    """The most that any use of `site` looks at; unknown where not all uses are seen."""
    if not site.uses_seen or not site.uses:
        return "unknown"
    return max((use.looks_at for use in site.uses), key=_LOOKS.index)


def modes(site: Site) -> tuple[str, ...]:
    """The modes of `site`'s seen uses, each once, in a fixed order."""
    used = {use.mode for use in site.uses}
    return tuple(mode for mode in _MODES if mode in used)


def _listed(site: Site, target: Target) -> Listed:
    place = site.place
    return Listed(
        site.path,
        place.line,
        place.column,
        place.end_line,
        place.end_column,
        site.pattern,
        site_flag_names(site, target),
        modes(site),
        looks_at(site),
        site.function,
    )
