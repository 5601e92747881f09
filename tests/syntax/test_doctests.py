"""The examples in the docstrings of the package."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import patlint.syntax


def test_examples() -> None:
    tried = 0
    for module in pkgutil.iter_modules(patlint.syntax.__path__):
        result = doctest.testmod(importlib.import_module(f"patlint.syntax.{module.name}"))
        assert result.failed == 0, module.name
        tried += result.attempted
    assert tried >= 25
