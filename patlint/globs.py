"""Globs of the configuration: `exclude` and the keys of `per-path`.

A glob is read against a path relative to the configuration's directory, parts joined by `/`. `*` and `?` stay
within one part, `**` crosses parts, `[...]` is a set. A glob without `/` means any part at any depth. A glob
that fits a directory fits everything below it.

>>> fits("build", "src/build/x.py"), fits("src/*.py", "src/a/x.py"), fits("src/**/*.py", "src/a/b/x.py")
(True, False, True)
"""

from __future__ import annotations

import re
from functools import cache


def fits(glob: str, path: str) -> bool:
    """Whether `glob` fits `path` or a directory above it. Cost: one match of a compiled expression."""
    return _compiled(glob).match(path) is not None


@cache
def _compiled(glob: str) -> re.Pattern[str]:
    body = glob.rstrip("/")
    if body.startswith("./"):
        body = body[2:]
    anywhere = "/" not in body
    return re.compile(
        ("(?:.*/)?" if anywhere else "") + _translate(body.lstrip("/")) + r"(?:/.*)?\Z", re.DOTALL
    )


def _translate(glob: str) -> str:
    out: list[str] = []
    at = 0
    while at < len(glob):
        if glob.startswith("**/", at) and (at == 0 or glob[at - 1] == "/"):
            out.append("(?:[^/]+/)*")
            at += 3
        elif glob.startswith("**", at):
            out.append(".*")
            at += 2
        elif glob[at] == "*":
            out.append("[^/]*")
            at += 1
        elif glob[at] == "?":
            out.append("[^/]")
            at += 1
        elif glob[at] == "[" and (end := glob.find("]", at + 2)) > 0:
            inner = glob[at + 1 : end]
            negated = inner.startswith("!")
            body = inner[1:] if negated else inner
            out.append(f"(?!/)[{'^' if negated else ''}{_set_body(body)}]")
            at = end + 1
        else:
            out.append(re.escape(glob[at]))
            at += 1
    return "".join(out)


def _set_body(body: str) -> str:
    """The inside of a set with everything but a rising range taken literally."""
    out: list[str] = []
    at = 0
    while at < len(body):
        if at + 2 < len(body) and body[at + 1] == "-" and body[at] <= body[at + 2]:
            out.append(f"{re.escape(body[at])}-{re.escape(body[at + 2])}")
            at += 3
        else:
            out.append(re.escape(body[at]))
            at += 1
    return "".join(out)
