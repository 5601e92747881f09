"""`patlint inspect`: everything that is known about one pattern, as text or JSON."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING, Any, Final

from patlint.cli.arguments import CallError, Parser, one_of
from patlint.cli.screen import output, style
from patlint.target import running_target, target_name, target_named, unknown_target

if TYPE_CHECKING:
    from patlint.portrait import Portrait
    from patlint.report.text import Style

LABEL: Final = 10
EXACT_DIGITS: Final = 16
"""Numbers with more digits are shown as a power of ten."""


def parser() -> Parser:
    """The arguments of the command."""
    made = Parser(
        "inspect",
        "[OPTIONS] PATTERN",
        "Show everything that is known about one pattern: whether it is taken, its\n"
        "groups, its automata, its texts, how long matching can take, and what the rules\n"
        "say.",
        "exit status: 0, 1 where `re` refuses the pattern, 2 a wrong call",
    )
    made.add_argument("pattern", metavar="PATTERN", help="the regular expression")
    made.add_argument(
        "--flags",
        default="",
        metavar="LETTERS",
        help="flags of re by their letters, of a, i, L, m, s, u, x (default: none)",
    )
    made.add_argument(
        "--mode",
        type=one_of("match", "fullmatch", "search"),
        default="fullmatch",
        metavar="MODE",
        help="how it is used: match, fullmatch or search (default: fullmatch)",
    )
    made.add_argument("--bytes", action="store_true", help="a pattern of bytes (default: of text)")
    made.add_argument(
        "--target",
        metavar="VERSION",
        help="Python version whose re is meant, 3.10 to 3.13 (default: the running one)",
    )
    made.add_argument(
        "--format",
        type=one_of("text", "json"),
        default="text",
        metavar="FORMAT",
        help="text or json (default: text)",
    )
    return made


def run(given: Sequence[str]) -> int:
    """Run the command; the exit status."""
    options = parser().read(given)
    target = running_target() if options.target is None else target_named(options.target)
    if target is None:
        raise CallError(f"--target: {unknown_target(options.target)}")
    flags = _flags(options.flags)
    pattern: str | bytes = options.pattern
    if options.bytes:
        try:
            pattern = options.pattern.encode("latin-1", "surrogateescape")  # a raw byte of the call
        except UnicodeEncodeError:
            raise CallError("--bytes: the pattern has characters above U+00FF") from None
    from patlint.config import OFF_BY_DEFAULT
    from patlint.portrait import portrait_of
    from patlint.rules.registry import NAMES

    rules = [name for name in NAMES if name not in OFF_BY_DEFAULT]
    portrait = portrait_of(pattern, flags, options.mode, target, rules=rules)
    with output() as write:
        if options.format == "json":
            from patlint.report.json import dump

            write(dump(_object(portrait)))
        else:
            for line in _lines(portrait, style()):
                write(line + "\n")
    return int(portrait.refused is not None)


def _flags(letters: str) -> int:
    from patlint.syntax.tree import FLAG_LETTERS

    flags = 0
    for letter in letters:
        if letter not in FLAG_LETTERS:
            known = ", ".join(sorted(FLAG_LETTERS, key=str.lower))
            raise CallError(f"--flags: unknown flag {letter!r}; the flags are {known}")
        flags |= FLAG_LETTERS[letter]
    return flags


def _lines(portrait: Portrait, style: Style) -> Iterator[str]:
    from patlint.report.show import expression, open_question, pattern_expression, witness_expression
    from patlint.report.text import finding_block

    def row(label: str, text: str) -> str:
        return style.paint(label, "label") + " " * (LABEL - len(label)) + text

    def rows(label: str, parts: Sequence[str]) -> Iterator[str]:
        """`parts`, divided by commas, in as many rows as they need; none of them is broken."""
        line = ""
        for index, part in enumerate(parts):
            piece = part + "," * (index + 1 < len(parts))
            if line and LABEL + len(line) + 1 + len(piece) > style.columns:
                yield row(label, line)
                label, line = "", piece
            else:
                line += " " * bool(line) + piece
        yield row(label, line)

    yield row("pattern", pattern_expression(portrait.pattern))
    yield row("flags", " ".join(portrait.flags) or "none")
    yield row("target", target_name(portrait.target))
    yield row("mode", portrait.mode)
    if portrait.refused is not None:
        message, position = portrait.refused
        yield row("refused", message if position is None else f"{message}, at position {position}")
    elif portrait.states:
        yield row("groups", _groups(portrait))
        yield from rows("exact", _exactness(portrait))
        states = ", ".join(f"{mode} {_known(number)}" for mode, number in portrait.states.items())
        yield row("states", states)
        yield row("texts", _texts(portrait))
        counts = [f"{_number(each)} of {n}" for n, each in enumerate(portrait.counts or ()) if each]
        if counts:
            yield from rows("lengths", counts)
        if portrait.words:
            yield from rows("such as", [expression(each) for each in portrait.words])
        yield from rows("time", _growth(portrait))
        if portrait.slow is not None:
            yield row("slow text", witness_expression(portrait.slow))
    for pattern, length, verdict in portrait.shorter:
        yield row(
            "shorter", f"{pattern_expression(pattern)} ({length} for {len(portrait.pattern)}: {verdict})"
        )
    for reason in portrait.open:
        if not any(reason != other and reason in other for other in portrait.open):  # said in more words
            yield row("open", open_question(reason))
    for finding in portrait.findings:
        yield ""
        yield from finding_block(finding, style)


def _groups(portrait: Portrait) -> str:
    names = ", ".join(f"{index} is {name}" for name, index in portrait.names.items())
    return f"{portrait.groups}{' (' + names + ')' if names else ''}"


def _exactness(portrait: Portrait) -> list[str]:
    if not portrait.inexact:
        return ["yes"]
    from patlint.report.show import pattern_expression

    reasons = dict.fromkeys(
        f"{reason} {pattern_expression(portrait.pattern[start:end])}"
        for reason, (start, end) in portrait.inexact
    )
    first, *others = reasons
    return ["no", f"the automata are supersets: {first}", *others]


def _texts(portrait: Portrait) -> str:
    if portrait.empty:
        return "none: the language is empty"
    if portrait.universal:
        return "all"
    if portrait.total is not None:
        return _number(portrait.total)
    return "endlessly many" if portrait.endless else "not known"


def _growth(portrait: Portrait) -> list[str]:
    slow = portrait.slow
    limit = ["up to a bound that is out of reach"] if slow is not None and slow.bounded else []
    match portrait.growth:
        case None:
            return ["not known"]
        case 1:
            return ["can be endless on any text" if limit else "no growth beyond the text's length was found"]
        case "exponential":
            return ["exponential in the number of repetitions", *limit]
        case degree:
            return [f"grows with the text's length to the power {degree}", *limit]


def _known(number: int | None) -> str:
    return "not known" if number is None else str(number)


def _number(number: int) -> str:
    digits = str(number) if number < 10**EXACT_DIGITS else ""
    if digits:
        return digits
    power = number.bit_length() * 30103 // 100_000
    while number >= 10 ** (power + 1):
        power += 1
    while number < 10**power:
        power -= 1
    return f"about {number * 10 // 10**power / 10:.1f} * 10**{power}"


def _object(portrait: Portrait) -> dict[str, Any]:
    from patlint.report.json import as_text, finding_object, witness_object

    refused = portrait.refused
    return {
        "pattern": as_text(portrait.pattern),
        "bytes": isinstance(portrait.pattern, bytes),
        "target": target_name(portrait.target),
        "mode": portrait.mode,
        "flags": list(portrait.flags),
        "refused": None if refused is None else {"message": refused[0], "position": refused[1]},
        "groups": portrait.groups,
        "names": portrait.names,
        "exact": not portrait.inexact,
        "inexact": [
            {"reason": reason, "start": start, "end": end} for reason, (start, end) in portrait.inexact
        ],
        "states": portrait.states,
        "empty": portrait.empty,
        "universal": portrait.universal,
        "endless": portrait.endless,
        "total": portrait.total,
        "shortest": None if portrait.shortest is None else as_text(portrait.shortest),
        "words": None if portrait.words is None else [as_text(each) for each in portrait.words],
        "counts": None if portrait.counts is None else list(portrait.counts),
        "growth": portrait.growth,
        "witness": witness_object(portrait.slow),
        "shorter": [
            {"pattern": as_text(pattern), "length": length, "verdict": verdict}
            for pattern, length, verdict in portrait.shorter
        ],
        "open": list(portrait.open),
        "findings": [finding_object(each) for each in portrait.findings],
    }
