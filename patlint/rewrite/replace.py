"""A file is given new content as a whole, or not at all.

The content goes into a temporary file in the same directory, which then takes the file's name in one step
(`os.replace`); whoever reads, and whatever breaks off in between, finds the old file or the new one. Links
are followed, so that the file they lead to changes; its permissions stay, its owner where that is allowed.

A process that is killed in between leaves a file `.patlint-NAME-….tmp` beside the old one; the next call for
that file takes it away.

Errors: `NotReplaced` with a reason of one line. Limits: other hard links to the file keep the old content. A
change by somebody else between the last look at the file and the step that replaces it is lost.
"""

from __future__ import annotations

import contextlib
import os
import stat
import tempfile

PREFIX = ".patlint-"
SUFFIX = ".tmp"
_RANDOM = 8
"""Characters that `tempfile` makes up for a name."""
_NAMED = 60
"""Characters of the file's own name in it: names may have 255 bytes."""


class NotReplaced(Exception):
    """The file is as it was; the message says what stood in the way."""


def replace_file(path: str, old: bytes, new: bytes) -> None:
    """Make `new` the content of the file at `path`, whose content must still be `old`."""
    real = os.path.realpath(path)
    temporary = ""
    try:
        status = os.stat(real)
        if not stat.S_ISREG(status.st_mode):
            raise NotReplaced("not written: it is no ordinary file")
        if not status.st_mode & 0o222 or not os.access(real, os.W_OK):
            raise NotReplaced("not written: the file is read-only")
        folder, name = os.path.split(real)
        if not os.stat(folder).st_mode & 0o222 or not os.access(folder, os.W_OK):
            raise NotReplaced("not written: its directory is read-only")
        prefix = f"{PREFIX}{name[:_NAMED]}-"
        _clean(folder, prefix)
        handle, temporary = tempfile.mkstemp(prefix=prefix, suffix=SUFFIX, dir=folder)
        with os.fdopen(handle, "wb") as file:
            file.write(new)
            file.flush()
            os.fsync(file.fileno())
        if hasattr(os, "chown"):
            with contextlib.suppress(OSError):
                os.chown(temporary, status.st_uid, status.st_gid)
        os.chmod(temporary, stat.S_IMODE(status.st_mode))
        with open(real, "rb") as file:
            if file.read() != old:
                raise NotReplaced("not written: the file changed in the meantime")
        os.replace(temporary, real)
        temporary = ""
    except OSError as error:
        raise NotReplaced(f"not written: {error.strerror or error}") from None
    finally:
        if temporary:
            with contextlib.suppress(OSError):
                os.unlink(temporary)


def _clean(folder: str, prefix: str) -> None:
    """Take away what a process that was killed left for this file."""
    for left in os.listdir(folder):
        named = left.startswith(prefix) and left.endswith(SUFFIX)
        if named and len(left) == len(prefix) + _RANDOM + len(SUFFIX):
            with contextlib.suppress(OSError):
                os.unlink(os.path.join(folder, left))
