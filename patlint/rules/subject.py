"""A site with everything that can be asked of its pattern, each answer computed once.

Rules ask a `Subject`; they never build automata themselves, so that one pattern is parsed and compiled once for
all of them. A limit that stops a computation is raised as LimitReached: `check_site` turns it into "undecided"
for the rule that asked.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import TypeVar, cast

from patlint.language import Language
from patlint.limits import DEFAULT_SAVING, LimitReached, Limits, Saving
from patlint.machine.dfa import Dfa
from patlint.machine.matcher import Matcher
from patlint.machine.nfa import Nfa
from patlint.machine.priority import spans, used_positions
from patlint.machine.program import Program, compile_tree
from patlint.machine.slow_text import Ambiguity, Manner, ambiguity_of
from patlint.source.sites import SCANNING, Mode, Site, Use
from patlint.syntax import tree as t
from patlint.syntax.parser import PatternError, parse

Answer = TypeVar("Answer")


class Subject:
    """`site` for the target version; `parsed` is None where `re` refuses the pattern (`error` says why)."""

    def __init__(
        self, site: Site, target: tuple[int, int] | None, limits: Limits, saving: Saving = DEFAULT_SAVING
    ) -> None:
        """Raises LimitReached("nesting")."""
        self.site = site
        self.target = target
        self.limits = limits
        self.saving = saving
        self.error: PatternError | None = None
        self.parsed: t.Pattern | None = None
        try:
            self.parsed = parse(site.pattern, site.flags, target, limits)
        except PatternError as error:
            self.error = error
        self._kept: dict[tuple[str, object], object] = {}

    @property
    def pattern(self) -> t.Pattern:
        assert self.parsed is not None
        return self.parsed

    @property
    def uses(self) -> tuple[Use, ...]:
        return self.site.uses

    @property
    def program(self) -> Program:
        """As the engine runs it. Raises LimitReached."""
        return self._keep(("program", None), lambda: compile_tree(self.pattern, self.limits))

    @property
    def nfa(self) -> Nfa:
        """Raises LimitReached."""
        return self._keep(("nfa", None), lambda: Nfa(self.program, self.limits))

    @property
    def written(self) -> Nfa:
        """The positions of the pattern as it is written, each alternative on its own. Raises LimitReached."""
        return self._keep(
            ("written", None),
            lambda: Nfa(compile_tree(self.pattern, self.limits, engine=False), self.limits),
        )

    @cached_property
    def matcher(self) -> Matcher:
        return Matcher(self.program)

    @property
    def exact(self) -> bool:
        return not self.nfa.inexact

    def language(self, mode: Mode) -> Language:
        """The language in a mode (a superset where not `exact`). Raises LimitReached."""
        return self._keep(("language", mode), lambda: self._language(mode))

    def _language(self, mode: Mode) -> Language:
        return Language.of_nfa(self.nfa, mode)

    def spans(self, context: int, not_empty: bool = False) -> Dfa:
        """The automaton of marked texts; see `patlint.machine.priority`. Raises LimitReached."""
        return self._keep(("spans", (context, not_empty)), lambda: spans(self.nfa, context, not_empty))

    def used(self, mode: Mode, not_empty: bool) -> set[int]:
        """The positions of `written` that a winning thread reads. Raises LimitReached."""
        return self._keep(("used", (mode, not_empty)), lambda: used_positions(self.written, mode, not_empty))

    def ambiguity(self, manner: Manner) -> Ambiguity:
        return self._keep(("ambiguity", manner), lambda: ambiguity_of(self.program, manner, self.limits))

    def ambiguities(self) -> list[Ambiguity]:
        """Those that a rule has asked for."""
        return [found for found in self._kept.values() if isinstance(found, Ambiguity)]

    def _keep(self, key: tuple[str, object], compute: Callable[[], Answer]) -> Answer:
        found: object = self._kept.get(key)
        if found is None:
            try:
                found = compute()
            except LimitReached as reached:
                found = reached
            self._kept[key] = found
        if isinstance(found, LimitReached):
            raise found
        return cast(Answer, found)

    def text(self, codes: tuple[int, ...]) -> str | bytes:
        return bytes(codes) if self.pattern.is_bytes else "".join(map(chr, codes))


def manner_of(use: Use) -> Manner:
    """How the engine is driven by a use: once, or again and again over the text."""
    return "scan" if use.function in SCANNING else use.mode
