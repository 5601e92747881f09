"""The oracle: patlint's parser, automata and matcher against the `re` of the Python that runs them.

    python -m tests.oracle --trials 500000 --seed 7

Random patterns with every construct and real ones that were damaged (`patterns`, `real`), on all short texts
over a small alphabet, on members of the automaton, members with one edit and the borders of the character
classes (`worlds`), are compared in every respect in which patlint says something (`compare`, `pairs`). What
differs is made small (`shrink`) and printed as a row for `cases`. `breaks` breaks patlint on purpose, to show
that the oracle sees it.

It compares with the running Python only: run it with each. Nothing here needs more than the standard library.
"""
