"""Why a pattern stayed unresolved: the fixed set of reasons, in plain words.

`Opaque` is raised inside the source package by whatever cannot tell a value, and becomes the `reason` of an
`Unresolved`. No reason is made up on the way: every one stands below, so that a summary can count them.
"""

from __future__ import annotations

from typing import Final

PARAMETER: Final = "a parameter of the function"
IMPORTED: Final = "imported from another module"
REASSIGNED: Final = "a name assigned more than once"
LOOP_VARIABLE: Final = "a loop variable"
UNPACKED: Final = "bound by unpacking, with, except or a match case"
NOT_TEXT: Final = "a class, function or other value that is no text"
UNBOUND: Final = "a name that this file does not define"
STAR_IMPORT: Final = "a name that a later star import may rebind"
DYNAMIC: Final = "a name that exec or globals() may rebind"
CALL: Final = "built by a call"
ATTRIBUTE: Final = "an attribute"
CHANGED: Final = "a list or dict that may be changed"
ELEMENT: Final = "an element of a container"
EXPRESSION: Final = "an expression that is not constant"
FORMATTED: Final = "formatted in a way that is not followed"
FLAGS: Final = "flags cannot be told"
STARRED: Final = "arguments given by * or **"
MISSING: Final = "a call without a pattern"
OTHER_ENGINE: Final = "perhaps another engine's module"
SCANNER: Final = "a token table of re.Scanner"
PASSED_ON: Final = "a function of re that is passed on"
TOO_MANY: Final = "a table of too many rows"
TOO_LONG: Final = "a text that is too long"
TOO_DEEP: Final = "an expression that is nested too deeply"
MIXED: Final = "str and bytes mixed"
UNREADABLE: Final = "a spelling that cannot be read"

COMPILED: Final = "a compiled pattern"
"""Not a reason of an `Unresolved`: the value is a pattern object, which is followed from where it is made."""

ABSENT: Final = "a class or row that has no text of its own"
"""Not a reason of an `Unresolved` either: such a class or row is left out."""

REASONS: Final = frozenset(
    value for name, value in list(globals().items()) if name.isupper() and name not in ("COMPILED", "ABSENT")
)


class Opaque(Exception):
    """A value that cannot be told from the text; `reason` is one of the constants above."""

    def __init__(self, reason: str) -> None:
        super().__init__(reason)
        self.reason = reason
