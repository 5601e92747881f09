"""Which programs take the empty texts out of what findall and finditer give. Cases are ours."""

from __future__ import annotations

import pytest

from patlint.source import find_patterns

DROPS = [
    "x = [y for y in CALL if y]",
    "x = {y for y in CALL if len(y)}",
    "x = [y for y in list(CALL) if y and y in t]",
    "x = [y for y in CALL if y != '']",
    "x = [y for y in CALL if y.strip()]",
    "x = list(filter(None, CALL))",
    "x = list(filter(len, CALL))",
    "for y in CALL:\n    if not y:\n        continue\n    go(y)",
    "for y in CALL:\n    if y == '':\n        continue\n    go(y)",
    "for y in sorted(CALL):\n    if y:\n        go(y)",
    "x = [y.start() for y in CALL if y.group()]",
    "x = [y.start() for y in CALL if y.group(0)]",
    "x = [y.start() for y in CALL if y[0]]",
]
KEEPS = [
    "x = CALL",
    "x = [y for y in CALL]",
    "x = [y for y in CALL if z]",
    "x = [y for y in CALL if not y]",
    "x = [y for y in CALL if y or z]",
    "x = [y for y in CALL if y != 'a']",
    "x = list(filter(f, CALL))",
    "for y in CALL:\n    if not y:\n        break\n    go(y)",
    "for y in CALL:\n    if y:\n        go(y)\n    else:\n        stop()",
    "for y in CALL:\n    go(y)\n    if y:\n        stop()",
    "for n, y in enumerate(CALL):\n    if y:\n        go(y)",
    "x = [y for y in CALL if y.group(1)]",
    "x = [y for z in CALL for y in z if y]",
]


@pytest.mark.parametrize("function", ["findall", "finditer"])
@pytest.mark.parametrize(("code", "drops"), [(c, True) for c in DROPS] + [(c, False) for c in KEEPS])
def test_empty_texts_are_dropped(code: str, drops: bool, function: str) -> None:
    call = f"re.{function}('a*', s)"
    (site,) = find_patterns(f"import re\n{code.replace('CALL', call)}\n")
    assert [use.drops_empty for use in site.uses] == [drops]


def test_other_functions_have_no_empty_texts_to_drop() -> None:
    (site,) = find_patterns("import re\nx = [y for y in re.split('a*', s) if y]\n")
    assert [use.drops_empty for use in site.uses] == [False]
