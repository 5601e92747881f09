"""Findings and rules as data.

A rule module holds one `Rule` named `RULE`. Its `check` takes a `Subject` (a site with everything that can be
asked of its pattern, `patlint.rules.subject`) and yields `Finding`s; its `check_family` takes a `Kin` (a family,
`patlint.rules.kin`) and yields them with the number of the member that carries each. A rule has one of the two or both.
What is rendered where is not its affair.

No finding without evidence: `witness` is a text that shows it on `re`, or `proof` says in words what was
proven about the automata.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal, TypeAlias

if TYPE_CHECKING:
    from patlint.rules.kin import Kin
    from patlint.rules.subject import Subject
    from patlint.source.sites import Place

Level: TypeAlias = Literal["error", "warning", "note"]
LEVELS: tuple[Level, ...] = ("error", "warning", "note")
Keeps: TypeAlias = Literal["language", "spans", "groups"]
Growth: TypeAlias = int | Literal["exponential"]


@dataclass(frozen=True, slots=True)
class TextWitness:
    """A text that shows the finding when it is given to `re` in the finding's mode."""

    text: str | bytes


@dataclass(frozen=True, slots=True)
class SlowWitness:
    """prefix + pump * n + suffix makes matching slow; `growth` in n, `steps` counted as (n, steps).

    `more` are further pumps, each with the text before it; they stand between the first pump and the suffix, all
    repeated n times. `bounded`: the growth is what is seen below a bound that is out of reach.
    """

    prefix: str | bytes
    pump: str | bytes
    suffix: str | bytes
    growth: Growth
    steps: tuple[tuple[int, int], ...] = ()
    more: tuple[tuple[str | bytes, str | bytes], ...] = ()
    bounded: bool = False

    def text(self, n: int) -> str | bytes:
        whole = self.prefix + self.pump * n  # type: ignore[operator]
        for between, pump in self.more:
            whole += between + pump * n  # type: ignore[operator]
        return whole + self.suffix  # type: ignore[operator]


Witness: TypeAlias = TextWitness | SlowWitness


@dataclass(frozen=True, slots=True)
class Suggestion:
    """A pattern that may stand in place of the whole pattern; `keeps` says what was proven to stay."""

    pattern: str | bytes
    keeps: Keeps


@dataclass(frozen=True, slots=True)
class Related:
    """Another part of the same pattern (`span`) or another place (`path`, `place`) that the finding is about."""

    message: str
    span: tuple[int, int] | None = None
    path: str | None = None
    place: Place | None = None


@dataclass(frozen=True, slots=True)
class Finding:
    """What a rule says about one site. `span` is the part of the pattern that is underlined.

    `message` is one line without a full stop. `evidence` is one line that starts in lower case ("on this
    text …") and `way_out` one line of advice; both may be empty.
    `marks` are further parts of the pattern to underline.
    """

    rule: str
    level: Level
    span: tuple[int, int]
    message: str
    mode: str | None = None
    witness: Witness | None = None
    proof: str = ""
    evidence: str = ""
    way_out: str = ""
    suggestion: Suggestion | None = None
    marks: tuple[tuple[int, int], ...] = ()
    related: tuple[Related, ...] = ()
    brief: bool = False
    """One line is enough unless more is asked for: the finding is common and mostly harmless."""


@dataclass(frozen=True, slots=True)
class Example:
    """Python source with one call on `re`; the tests lint it."""

    source: str
    says: str = ""
    """What is to be seen in it, one line."""


@dataclass(frozen=True, slots=True)
class Rule:
    """A rule and its page. `summary` is one line; `page` a few paragraphs of plain text in lines below 80."""

    name: str
    level: Level
    summary: str
    page: str
    wrong: Example
    right: Example
    check: Callable[[Subject], Iterable[Finding]] | None = field(default=None, repr=False)
    check_family: Callable[[Kin], Iterable[tuple[int, Finding]]] | None = field(default=None, repr=False)
