"""Functions of other libraries that take a pattern: what is known of each, as data.

A `Sink` is one argument of one function, class or method. `SinkTable` holds those that are in force and says
quickly whether a file can have any. The built-in ones stand in `sinks_builtin`; `sinks_names` finds their
calls, `sinks_calls` reads them.

>>> table = SinkTable((Sink("freight.text.expect", (1, "pattern"), "search", "truth", seen=True),))
>>> table.mentioned("from freight.text import expect"), table.mentioned("import freight")
(True, False)

Limits: a name is followed through imports, not through other names it is given. A method of an object that
cannot be typed is told by its name alone (and by a module that the file must import), so only names that
mean nothing else stand in the built-in table.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Literal, TypeAlias

from patlint.source.sites import Function, LooksAt

Where: TypeAlias = tuple[int | str, ...]
"""Where a call has an argument: a position, a keyword, or both (the position first)."""

Kind: TypeAlias = Literal["call", "method", "attribute", "rows", "states", "route", "result", "lookup"]

PART = "a part of a pattern that a library puts together"
ENGINE = "a pattern for another engine than re"
_WORD = re.compile(r"[^\W\d]\w*")
SCANNER = "re.Scanner"
CONDITION = "an argument that cannot be told decides whether it is a pattern"


@dataclass(frozen=True, slots=True)
class Sink:
    """One argument that takes a pattern.

    `name` is the qualified name of what is called, or of the class whose attribute it is. `function` is the
    function of `re` that comes to the same, None where it depends on what cannot be seen.

    `kind` says how it is met: "call" of a function or class; "method" of any object, by the names in
    `method` (("str", "contains") for `x.str.contains`); "attribute" of a class derived from `name`;
    "rows", a sequence whose rows begin with a pattern; "states", an attribute of a class derived from `name`
    that is a dict of such sequences, each tried in its order; "route", a text with patterns in braces; "result",
    a method of what `with name(…) as x` binds; "lookup", keywords of any call that end in `method`.
    """

    name: str
    argument: Where
    function: Function | None = None
    looks_at: LooksAt = "unknown"
    flags: int = 0
    """Flags that the library adds."""
    flags_argument: Where = ()
    kind: Kind = "call"
    method: tuple[str, ...] = ()
    needs: tuple[str, ...] = ()
    """For a method: modules of which the file must import one."""
    seen: bool = False
    """The use told here is the only one that the library makes of the pattern."""
    part: bool = False
    """The library puts the text into a larger pattern."""
    embedded: bool = False
    """The library reads the text of the pattern, so that another spelling may do something else."""
    dollar: Function | None = None
    """With `embedded`: the function where the pattern ends in `$`, which the library looks at; None: unknown."""
    ends_open: bool = True
    """With `embedded`: `function` holds also where the pattern does not end in `$`; else it is then a part."""
    own: bool = False
    """The text that is searched is the program's own (its messages, under test), not one from outside."""
    selects: bool = False
    """The pattern selects, so that one which takes everything may be meant."""
    decorator: bool = False
    """For a method: only where its call decorates a function or class."""
    validates: bool = False
    """A text that is not taken is refused."""
    inverted: Where = ()
    """With `validates`: an argument, or attribute of the class, that turns the sense round where it is given."""
    narrows: bool = False
    """The pattern narrows what is tested in another way already: spelled as everything (`.*`), it is meant so."""
    elsewhere: bool = False
    """Another engine than `re` may get the pattern as well: one that `re` refuses is for that engine."""
    case: Where = ()
    """An argument that stands for IGNORECASE where it is False."""
    regex: Where = ()
    """An argument that decides whether the text is a pattern at all."""
    regex_default: bool | Literal["long"] = True
    """What it is where it is not given; "long": a pattern if it is longer than one character."""
    objects_only: bool = False
    """Only compiled patterns are taken, never their texts."""
    unless: Where = ()
    """An argument that, where it is given, decides how the pattern is used: nothing is known then."""
    refused: str | None = None
    """A reason of `Unresolved`: what is given here is never judged."""
    project: bool = False
    """Told by the configuration: files may import it from beside them (`from .text import expect`)."""

    @property
    def words(self) -> tuple[str, ...]:
        """Texts that a file with this sink must hold, beside one of `needs`."""
        if self.kind in ("method", "lookup"):
            return self.method
        words = [self.name.rpartition(".")[2]]
        if self.kind == "attribute" or not any(isinstance(key, int) for key in self.argument):
            words += [key for key in self.argument if isinstance(key, str)]
        return tuple(dict.fromkeys((*words, *self.method)))


class SinkTable:
    """Sinks by the names under which a file can meet them."""

    def __init__(self, sinks: tuple[Sink, ...]) -> None:
        self.sinks = sinks
        self.calls: dict[str, list[Sink]] = {}
        self.methods: dict[str, list[Sink]] = {}
        self.attributes: dict[str, list[Sink]] = {}
        self.results: dict[str, list[Sink]] = {}
        self.lookups: dict[str, Sink] = {}
        self._told: set[tuple[str, ...]] = set()
        self._below: dict[str, set[tuple[str, ...]]] = {}
        self.scanners = tuple(sink for sink in sinks if sink.name == SCANNER)
        for sink in sinks:
            if sink.name == SCANNER:
                continue  # met as a member of re
            if sink.kind == "lookup":
                self.lookups[sink.method[-1]] = sink
            elif sink.kind == "method" or (sink.kind != "result" and sink.method):
                self.methods.setdefault(sink.method[-1], []).append(sink)
            elif sink.kind in ("attribute", "states"):
                self.attributes.setdefault(sink.name, []).append(sink)
            elif sink.kind == "result":
                self.results.setdefault(sink.name, []).append(sink)
            else:
                self.calls.setdefault(sink.name, []).append(sink)
            if sink.project or (sink.kind == "method" and not sink.needs):
                self._told.add(sink.words)
            else:
                for top in sink.needs or (sink.name.split(".")[0],):
                    self._below.setdefault(top, set()).add(sink.words)
        named = {*self.calls, *self.attributes, *self.results}
        self.tops = frozenset(name.split(".")[0] for name in named)
        self.members = frozenset(name.rpartition(".")[2] for name in named)
        self.project = frozenset(sink.name for sink in sinks if sink.project)

    def mentioned(self, text: str) -> bool:
        """Whether a file with this text can have any of the sinks; cheap, and True rather too often."""
        below = self._below.keys() & imported_words(text)
        several = [*self._told, *(words for top in below for words in self._below[top])]
        return any(all(word in text for word in words) for words in several)


def imported_words(text: str) -> set[str]:
    """The words of all lines that hold "import", continued lines as one: modules are among them."""
    found: set[str] = set()
    at = text.find("import")
    while at >= 0:
        start, end = text.rfind("\n", 0, at) + 1, text.find("\n", at)
        while start > 1 and text[start - 2] == "\\":
            start = text.rfind("\n", 0, start - 1) + 1
        while end > 0 and text[end - 1] == "\\":
            end = text.find("\n", end + 1)
        found.update(_WORD.findall(text, start, end if end >= 0 else len(text)))
        at = text.find("import", end) if end >= 0 else -1
    return found
