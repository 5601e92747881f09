"""Comments that waive findings: `# patlint: waive RULE[, RULE] -- reason`.

Only files that spell `patlint:` are looked at; comments are found by `tokenize`, so that text in strings is
none. A waiver counts for its own line and, where it stands alone on a line, for the next line of code.
"""

from __future__ import annotations

import io
import re
import tokenize

from patlint.source.sites import Place, Waiver

_MARK = re.compile(r"#\s*patlint\s*:", re.IGNORECASE)
_WAIVER = re.compile(r"#\s*patlint:\s*waive\s+(.*)", re.DOTALL)
_RULE = re.compile(r"[a-z][a-z0-9]*(?:-[a-z0-9]+)*\Z")


def read_waivers(
    text: str, lines: tuple[str, ...]
) -> tuple[tuple[Waiver, ...], tuple[tuple[Place, str], ...]]:
    """The waivers of a file and the malformed ones, each with what is wrong about it."""
    if not _MARK.search(text):
        return (), ()
    good: list[Waiver] = []
    bad: list[tuple[Place, str]] = []
    for comment, line, column in _comments(lines):
        if not _MARK.match(comment):
            continue
        place = Place(line, column + 1, line, column + 1 + len(comment))
        problem, rules, reason = _parse(comment)
        if problem:
            bad.append((place, problem))
            continue
        alone = not lines[line - 1][:column].strip()
        targets = (line, _next_code_line(lines, line)) if alone else (line,)
        good.append(Waiver(place, rules, reason, targets))
    return tuple(good), tuple(bad)


def _comments(lines: tuple[str, ...]) -> list[tuple[str, int, int]]:
    """Every comment with its line (1-based) and column (0-based)."""
    found: list[tuple[str, int, int]] = []
    plain = "".join(line.rstrip("\r\n") + "\n" for line in lines)
    try:
        for token in tokenize.generate_tokens(io.StringIO(plain).readline):
            if token.type == tokenize.COMMENT:
                found.append((token.string, *token.start))
    except (tokenize.TokenError, SyntaxError):
        pass  # the file was parsed before: what is left after the error is its end
    return found


def _parse(comment: str) -> tuple[str | None, tuple[str, ...], str]:
    found = _WAIVER.match(comment)
    if not found:
        return "expected `patlint: waive RULE[, RULE] -- reason`", (), ""
    listed, dashes, reason = found[1].partition("--")
    rules = tuple(rule.strip() for rule in listed.split(","))
    for rule in rules:
        if not _RULE.match(rule):
            return (f"not the name of a rule: {rule!r}" if rule else "a rule is missing"), (), ""
    if not dashes or not reason.strip():
        return "a reason is missing: write ` -- ` and why", (), ""
    return None, rules, reason.strip()


def _next_code_line(lines: tuple[str, ...], line: int) -> int:
    """The first line after `line` that is neither blank nor a comment, the next one where there is none."""
    for number in range(line, len(lines)):
        stripped = lines[number].strip()
        if stripped and not stripped.startswith("#"):
            return number + 1
    return line + 1
