"""One file a rule: a pure function from a site to findings, with its documentation and its evidence.

The names below are loaded when first used: a run that finds everything in the cache asks no rule.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from patlint.rules.check import Checked as Checked
    from patlint.rules.check import check_family as check_family
    from patlint.rules.check import check_site as check_site
    from patlint.rules.finding import Finding as Finding
    from patlint.rules.finding import Rule as Rule
    from patlint.rules.registry import RULES as RULES

_HOMES = {
    "Checked": "patlint.rules.check",
    "Finding": "patlint.rules.finding",
    "RULES": "patlint.rules.registry",
    "Rule": "patlint.rules.finding",
    "check_family": "patlint.rules.check",
    "check_site": "patlint.rules.check",
}

__all__ = ["RULES", "Checked", "Finding", "Rule", "check_family", "check_site"]


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    value: object = getattr(import_module(_HOMES[name]), name)
    globals()[name] = value
    return value
