r"""What a finding is by its content, whatever its line: the ground of the ledger and of SARIF's fingerprints.

Two findings are the same if rule, file, pattern and flags are the same (for a finding without a pattern, its
message). Line, column, mode, level, witness, wording and the part that is underlined do not count: they change
with edits elsewhere, with another use of the pattern, with the configuration or with another patlint.

`content` is one line of JSON in ASCII, so that texts with lone surrogates stay apart from each other and equal
lines are equal findings. Equal findings of one file differ only by their number, `ordinals`.

>>> from patlint.placed import PlacedFinding
>>> finding = PlacedFinding("nullable", "warning", "quay.py", 4, 2, 4, 5, "...", r"\s*;?", span=(0, 3))
>>> print(content(finding, "src/quay.py"))
{"path": "src/quay.py", "rule": "nullable", "pattern": "\\s*;?"}
"""

from __future__ import annotations

import hashlib
import json
from collections import Counter
from collections.abc import Iterable
from typing import Any, Final

from patlint.placed import PlacedFinding

VERSION: Final = 1
"""Of the choice above; a change makes every ledger and fingerprint another."""


def content(finding: PlacedFinding, path: str) -> str:
    """The finding as one line, with `path` for its file."""
    said: dict[str, Any] = {"path": path, "rule": finding.rule}
    pattern = finding.pattern
    if pattern is None:
        said["message"] = finding.message
    else:
        said["pattern"] = pattern.decode("latin-1") if isinstance(pattern, bytes) else pattern
        if isinstance(pattern, bytes):
            said["bytes"] = True
        if finding.flags:
            said["flags"] = list(finding.flags)
    return json.dumps(said)


def ordinals(contents: Iterable[str]) -> list[int]:
    """For each line its number among the equal ones before it, from 0."""
    seen: Counter[str] = Counter()
    out = []
    for line in contents:
        out.append(seen[line])
        seen[line] += 1
    return out


def fingerprint(line: str, ordinal: int) -> str:
    """A hash of `content` and the number among equal ones, in hexadecimal digits."""
    return hashlib.sha256(f"{line}\n{ordinal}".encode("ascii")).hexdigest()[:32]
