"""What `re` does with a pattern, as values that can be compared, and patterns to do it with."""

from __future__ import annotations

import itertools
import random
import re

TEXTS = [
    *("".join(letters) for n in range(6) for letters in itertools.product("ab", repeat=n)),
    *("".join(letters) for n in range(1, 4) for letters in itertools.product("abc\nA", repeat=n)),
]


def truth(compiled: re.Pattern[str], mode: str, text: str) -> object:
    return getattr(compiled, mode)(text) is not None


def spans(compiled: re.Pattern[str], mode: str, text: str) -> object:
    match = getattr(compiled, mode)(text)
    seen: list[object] = [match and match.span()]
    if mode == "search":
        seen += [[found.span() for found in compiled.finditer(text)], compiled.sub("-", text)]
    return seen


def groups(compiled: re.Pattern[str], mode: str, text: str) -> object:
    seen: list[object] = []
    for name in ("match", "fullmatch", "search"):
        match = getattr(compiled, name)(text)
        seen.append(match and match.regs)
    return seen + [
        [found.regs for found in compiled.finditer(text)],
        compiled.sub("-", text),
        compiled.split(text),
    ]


LOOKED_AT = {"language": truth, "spans": spans, "groups": groups}

_ATOMS = ["a", "b", "a", "b", "c", ".", "[ab]", "[^a]", "[a-ca]", r"\w"]
_REPEATS = ["*", "+", "?", "*", "+", "?", "{1,2}", "{2}", "{0,1}", "*?", "+?", "??", "{1}", "{,3}"]


def random_pattern(generator: random.Random, depth: int, *, pure: bool = False) -> str:
    """A pattern over a, b, c; `pure` ones look at nothing outside themselves and have no groups."""
    dice = generator.random()
    if depth == 0 or dice < 0.3:
        return generator.choice(_ATOMS)
    if dice < 0.5:
        return random_pattern(generator, depth - 1, pure=pure) + random_pattern(
            generator, depth - 1, pure=pure
        )
    if dice < 0.7:
        branches = [
            random_pattern(generator, depth - 1, pure=pure) if generator.random() < 0.8 else ""
            for _ in range(generator.choice((2, 2, 3, 4)))
        ]
        opening = "(?:" if pure else generator.choice(("(?:", "(?:", "(?:", "("))
        return opening + "|".join(branches) + ")"
    if dice < 0.92 or pure:
        body = random_pattern(generator, depth - 1, pure=pure)
        return (f"(?:{body})" if len(body) > 1 else body) + generator.choice(_REPEATS)
    if dice < 0.96:
        return generator.choice(("(?=%s)", "(?!%s)", "(?i:%s)")) % random_pattern(generator, depth - 1)
    return generator.choice(("^", "$", r"\b", r"\Z"))


def ends_of(part: str, text: str) -> list[int]:
    """The places at which `part`, matched from the start of `text`, can end, in the engine's order.

    Each place found is forbidden by a look-behind of its width, so that the engine goes on to the next.
    """
    found: list[int] = []
    while True:
        forbidden = "".join(rf"(?<!\A.{{{place}}})" for place in found)
        match = re.match(f"(?s)(?:(?-s:{part})){forbidden}", text)
        if match is None:
            return found
        found.append(match.end())
