"""What the commands do with the terminal: colour, width, a line of progress, output that may end early.

Colour only where standard output is a terminal that is not `dumb` and NO_COLOR is not set (no-color.org).
"""

from __future__ import annotations

import contextlib
import os
import sys
import time
from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from patlint.report.text import Style
    from patlint.run import Progress

PLAIN_COLUMNS: Final = 80
"""Width of a report that does not go to a terminal."""
QUIET_SECONDS: Final = 1.0
"""A run shows its progress only after this time, and then at most ten times a second."""


class CallError(Exception):
    """A wrong call, or a report that cannot be written; the message is one line."""


def style(to_file: bool = False) -> Style:
    """How a text report may look: on this terminal, or in a file or pipe."""
    from patlint.report.text import Style

    if to_file:
        return Style()
    encoding = sys.stdout.encoding or "ascii"
    if not sys.stdout.isatty():
        return Style(PLAIN_COLUMNS, encoding)
    colour = not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"
    from shutil import get_terminal_size

    return Style(max(get_terminal_size((PLAIN_COLUMNS, 24)).columns, 40), encoding, colour)


def say(line: str) -> None:
    """One line on standard error, whatever its characters; where that is closed or full there is no telling."""
    if sys.stderr is None:
        return
    encoding = sys.stderr.encoding or "ascii"
    line = "".join(char if char.isprintable() else ascii(char)[1:-1] for char in line)
    with contextlib.suppress(OSError):
        print(line.encode(encoding, "backslashreplace").decode(encoding), file=sys.stderr)


@contextlib.contextmanager
def output(path: str | None = None) -> Iterator[Callable[[str], object]]:
    """A function that writes text to the file `path`, or to standard output if it is None.

    The file is written at the end, as a whole or not at all. A reader of standard output that leaves early ends
    the block and nothing else. CallError where the text cannot be written.
    """
    if path is not None:
        from patlint.whole import write_whole

        parts: list[str] = []
        yield parts.append
        try:
            write_whole(path, "".join(parts))
        except OSError as error:
            raise CallError(f"--output {path}: {error.strerror or error}") from None
        return
    if sys.stdout is None:
        raise CallError("standard output is closed")
    reconfigure = getattr(sys.stdout, "reconfigure", None)
    if reconfigure is not None:
        reconfigure(errors="backslashreplace")
    try:
        yield sys.stdout.write
        sys.stdout.flush()
    except OSError as error:
        # Python flushes standard output once more at exit: give it somewhere to go.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        if not isinstance(error, BrokenPipeError):
            raise CallError(f"standard output: {error.strerror or error}") from None


@contextlib.contextmanager
def progress_line() -> Iterator[Progress | None]:
    """A function that shows `done of total` on one line of standard error; None where that is no terminal."""
    if sys.stderr is None or not sys.stderr.isatty() or os.environ.get("TERM") == "dumb":
        yield None
        return
    begun = time.monotonic()
    shown = 0.0

    def show(done: int, total: int) -> None:
        nonlocal shown
        now = time.monotonic()
        if now - begun > QUIET_SECONDS and now - shown > 0.1:
            shown = now
            sys.stderr.write(f"\r{done} of {total} files")
            sys.stderr.flush()

    try:
        yield show
    finally:
        if shown:
            sys.stderr.write("\r\x1b[K")
            sys.stderr.flush()
