"""Modules of the standard library, imported: no call of `re` is given another text than the one that is told."""

from __future__ import annotations

import os
from collections import defaultdict
from pathlib import Path
from typing import Any

import pytest

from patlint.source import module as reading
from patlint.source import read_module
from patlint.source.disk import Files
from tests.source.recording import Recorded, recorded_imports

MODULES = [
    *("argparse", "base64", "calendar", "configparser", "csv", "difflib", "doctest", "email.message"),
    *("email.header", "email.utils", "email.policy", "fnmatch", "fractions", "ftplib", "gettext", "glob"),
    *("html", "html.parser", "http.client", "http.cookiejar", "http.cookies", "http.server", "imaplib"),
    *("inspect", "json", "json.decoder", "locale", "logging", "logging.config", "mimetypes", "netrc", "pdb"),
    *("pickletools", "pkgutil", "platform", "plistlib", "poplib", "pprint", "pstats", "pydoc", "shlex"),
    *(
        "smtplib",
        "sqlite3",
        "string",
        "sysconfig",
        "tarfile",
        "textwrap",
        "tokenize",
        "unittest",
        "urllib.parse",
    ),
    *("urllib.request", "uuid", "warnings", "wsgiref.headers", "wsgiref.validate", "xml.etree.ElementTree"),
    *("xml.sax.saxutils", "xmlrpc.client", "zipfile", "zoneinfo", "_pydecimal", "_strptime", "_markupbase"),
    *("encodings.idna", "importlib.metadata", "tomllib", "turtle", "idlelib.pyparse", "idlelib.colorizer"),
]


@pytest.fixture
def told(monkeypatch: pytest.MonkeyPatch) -> dict[str, dict[tuple[int, int, str], set[Any]]]:
    """For each file the texts of each call, by its first and last line; None among them where one is not told."""
    seen: dict[str, dict[tuple[int, int, str], set[Any]]] = defaultdict(lambda: defaultdict(set))
    site, refuse = reading._Reader._site, reading._Reader._refuse

    def keep(
        self: Any, call: Any, scope: Any, name: str, node: Any, text: Any, flags: int, **more: Any
    ) -> None:
        seen[self.path][call.lineno, call.end_lineno, name].add((text.value, flags))
        site(self, call, scope, name, node, text, flags, **more)

    def give_up(self: Any, node: Any, function: str, reason: str) -> None:
        whole = self.index.statement(node)
        seen[self.path][whole.lineno, whole.end_lineno, function].add(None)
        refuse(self, node, function, reason)

    monkeypatch.setattr(reading._Reader, "_site", keep)
    monkeypatch.setattr(reading._Reader, "_refuse", give_up)
    return seen


def test_no_text_is_wrong(told: dict[str, dict[tuple[int, int, str], set[Any]]]) -> None:
    calls: dict[str, set[Recorded]] = defaultdict(set)
    for call in recorded_imports(MODULES):
        if os.path.exists(call.path):
            calls[call.path].add(call)
    right = unknown = 0
    for path, recorded in calls.items():
        read_module(Path(path).read_bytes(), path, files=Files())
        for call in recorded:
            texts = set().union(
                *(
                    found
                    for (first, last, function), found in told[path].items()
                    if first <= call.line <= last and function == call.function
                )
            )
            if (call.pattern, call.flags) in texts:
                right += 1
            else:
                assert None in texts or not texts, call
                unknown += 1
    assert right > 130, (right, unknown)
    assert unknown < right / 4, (right, unknown)
