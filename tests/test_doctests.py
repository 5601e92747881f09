"""The examples in the docstrings of patlint, all of them."""

from __future__ import annotations

import doctest
import pkgutil
from importlib import import_module

import patlint


def test_examples_in_docstrings() -> None:
    attempted = 0
    for module in pkgutil.walk_packages(patlint.__path__, "patlint."):
        if module.name == "patlint.__main__":
            continue
        outcome = doctest.testmod(import_module(module.name))
        assert outcome.failed == 0, module.name
        attempted += outcome.attempted
    assert attempted >= 60
