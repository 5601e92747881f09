"""Named limits: counts, never seconds, so that the same input gives the same answer on every machine.

Reaching a limit is a value the caller can see, of another type than "your input is wrong":
`LimitReached` names the limit, and a rule that meets it says nothing about the pattern.

Each limit has a unit, a default and a worked number beside it. All can be set in
`[tool.patlint.limits]` under the names used here.
"""

from __future__ import annotations

from dataclasses import dataclass


class LimitReached(Exception):
    """patlint stopped: `limit` is the field of `Limits`, `value` its setting."""

    def __init__(self, limit: str, value: int) -> None:
        super().__init__(f"limit {limit} reached ({value})")
        self.limit = limit
        self.value = value


@dataclass(frozen=True, slots=True)
class Limits:
    """How far each computation may go."""

    nesting: int = 100
    """Groups inside groups. Every recursive walk of a tree relies on it; `re` itself gives up near 500."""
    instructions: int = 20_000
    """Instructions of one program. `(?:[a-z]{2}-){1,3000}` needs 9,000."""
    states: int = 2_000
    """States of one automaton while it is built. `(a|b)*a(a|b){10}` needs 2,049 (one refuses other letters)."""
    work: int = 400_000
    """Steps of one determinisation (states times minterms, and threads where a step is not shared), about 0.3 s; and
    of all closures, look-behinds and obligations of one program together. `(?:(?:(?:a?b?){0,9}){0,9}){0,9}` needs
    more, `(?:(?:(?:a?b?){0,9}){0,3}){0,9}` 52,000."""
    product: int = 20_000
    """Pairs of states visited by one comparison of two automata."""
    contexts: int = 40
    """Pairs of what two patterns know of the text to the left, for each of which their spans are compared, a few
    milliseconds each. `\\b|^x` and `(?<=a)b` have 4."""
    turns: int = 100_000
    """Places that the counting of steps reckons in all confirmations of one question, about 100 ms. A place is
    reckoned once however often the engine comes there. `(a+)+$` with 60 pumps needs 240."""
    bounded_steps: int = 20_000_000
    """Steps on a text of at most 4,000 characters from which a repeat with a bound is reported, about 0.1 s of
    `re`'s time. `(a{1,30}){1,30}$` takes more on 25 characters, `[a-z]{1,63}@` on 4,000 a hundredth of it."""


DEFAULT_LIMITS = Limits()


@dataclass(frozen=True, slots=True)
class Saving:
    """The least that a shorter pattern has to save before it is suggested: so many characters, and so many
    hundredths of the pattern's length. Set in `[tool.patlint.shorter]`."""

    characters: int = 2
    percent: int = 10

    def of(self, length: int) -> float:
        """The least number of characters for a pattern of this length. 3.0 for 30 characters."""
        return max(self.characters, self.percent * length / 100)


DEFAULT_SAVING = Saving()
