"""A text is written to a file as a whole, or the file stays as it was.

The text goes into a temporary file beside it, which then takes the file's name in one step (`os.replace`).
Links are followed, so that the file they lead to changes, and its permissions stay. What is no ordinary file (a
terminal, a pipe, `/dev/stdout`) is written directly, as is a file in a directory that takes no new ones.

>>> import tempfile, pathlib
>>> place = pathlib.Path(tempfile.mkdtemp(), "report.txt")
>>> write_whole(str(place), "one line\\n"); place.read_text()
'one line\\n'
"""

from __future__ import annotations

import contextlib
import errno
import os
import stat


def write_whole(path: str, text: str) -> None:
    """Make `text` the content of the file at `path`, in UTF-8 (lone surrogates escaped). Raises OSError."""
    data = text.encode("utf-8", "backslashreplace")
    real = os.path.realpath(path)
    mode = _mode(real)
    if (
        mode is not None
        and not stat.S_ISREG(mode)
        or real.startswith(("/dev/", "/proc/"))
        or _is_device(path)
    ):
        _write(path, data)
        return
    if mode is not None and not mode & 0o222:
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))
    temporary = os.path.join(os.path.dirname(real), f".patlint-{os.getpid()}-{os.urandom(4).hex()}.tmp")
    try:
        handle = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o666)
    except PermissionError:
        if mode is None:
            raise
        _write(path, data)
        return
    try:
        with open(handle, "wb") as file:
            file.write(data)
        if mode is not None:
            os.chmod(temporary, stat.S_IMODE(mode))
        os.replace(temporary, real)
    except BaseException:
        with contextlib.suppress(OSError):
            os.unlink(temporary)
        raise


def _write(path: str, data: bytes) -> None:
    with open(path, "wb") as file:
        file.write(data)


def _mode(path: str) -> int | None:
    try:
        return os.stat(path).st_mode
    except FileNotFoundError:
        return None


def _is_device(path: str) -> bool:
    """`/dev/stdout` may lead to an ordinary file that the shell holds open: its name must stay with it."""
    return os.path.abspath(path).startswith(("/dev/", "/proc/"))
