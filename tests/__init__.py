"""The tests of patlint: `tests/` mirrors `patlint/`. A package, so that `python -m tests.bench` runs."""
