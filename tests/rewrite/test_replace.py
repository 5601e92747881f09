"""A file is the old one or the new one, whatever breaks off or stands in the way."""

from __future__ import annotations

import os
import signal
import stat
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from patlint.rewrite import replace as module
from patlint.rewrite.replace import PREFIX, SUFFIX, NotReplaced, replace_file

OLD, NEW = b"old\n" * 3_000, b"new, and longer\n" * 6_000


@pytest.fixture
def file(tmp_path: Path) -> Path:
    made = tmp_path / "a.py"
    made.write_bytes(OLD)
    made.chmod(0o640)
    return made


def others(file: Path) -> list[str]:
    return sorted(each.name for each in file.parent.iterdir() if each != file)


def killed_at(file: Path, call: int) -> bool:
    """Replace the file in a process that is killed when the call of a C function of this number begins; whether
    it came so far."""
    child = os.fork()
    if child == 0:
        seen = 0

        def watch(frame: object, event: str, argument: object) -> None:
            nonlocal seen
            if event == "c_call":
                seen += 1
                if seen == call:
                    os.kill(os.getpid(), signal.SIGKILL)

        try:
            sys.setprofile(watch)
            replace_file(str(file), OLD, NEW)
        finally:
            sys.setprofile(None)
            os._exit(0)
    _, status = os.waitpid(child, 0)
    return os.WIFSIGNALED(status)


@pytest.mark.skipif(not hasattr(os, "fork"), reason="no processes can be forked here")
def test_killed_at_every_call(file: Path) -> None:
    old = new = leftovers = 0
    call = 1
    while killed_at(file, call):
        content = file.read_bytes()
        assert content in (OLD, NEW), call
        assert stat.S_IMODE(file.stat().st_mode) == 0o640
        left = others(file)
        assert all(name.startswith(f"{PREFIX}a.py-") and name.endswith(SUFFIX) for name in left)
        assert len(left) <= 1
        leftovers += len(left)
        if content == OLD:
            old += 1
        else:
            new += 1
        file.write_bytes(OLD)
        call += 1
    assert file.read_bytes() == NEW
    assert others(file) == []
    assert old > 20 and new > 0 and leftovers > 5


def test_what_was_left_is_taken_away(file: Path) -> None:
    left = [f"{PREFIX}a.py-abcdefgh{SUFFIX}", f"{PREFIX}a.py-12345678{SUFFIX}"]
    foreign = [f"{PREFIX}b.py-abcdefgh{SUFFIX}", f"{PREFIX}a.py-notes{SUFFIX}", f"a.py{SUFFIX}"]
    for name in (*left, *foreign):
        (file.parent / name).write_bytes(b"half")
    replace_file(str(file), OLD, NEW)
    assert (file.read_bytes(), others(file)) == (NEW, sorted(foreign))


STEPS = ("fsync", "chmod", "replace")


@pytest.mark.parametrize("step", STEPS)
def test_a_step_that_fails(file: Path, monkeypatch: pytest.MonkeyPatch, step: str) -> None:
    def full(*given: object, **named: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(module.os, step, full)
    with pytest.raises(NotReplaced, match="^not written: No space left on device$"):
        replace_file(str(file), OLD, NEW)
    assert (file.read_bytes(), others(file)) == (OLD, [])


def test_no_temporary_file(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(**named: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(module.tempfile, "mkstemp", refused)
    with pytest.raises(NotReplaced, match="^not written: Permission denied$"):
        replace_file(str(file), OLD, NEW)
    assert (file.read_bytes(), others(file)) == (OLD, [])


@pytest.fixture
def small_disk(tmp_path: Path) -> Iterator[Path]:
    """A file system with room for the old content and half of the new."""
    folder = tmp_path / "disk"
    folder.mkdir()
    size = "size=64k"
    done = subprocess.run(["mount", "-t", "tmpfs", "-o", size, "tmpfs", str(folder)], capture_output=True)
    if done.returncode:
        pytest.skip("no file system can be mounted here")
    yield folder
    subprocess.run(["umount", str(folder)], check=True, capture_output=True)


@pytest.mark.skipif(sys.platform != "linux", reason="mounts as Linux does")
def test_a_full_disk(small_disk: Path) -> None:
    file = small_disk / "a.py"
    file.write_bytes(OLD)
    with pytest.raises(NotReplaced, match="^not written: No space left on device$"):
        replace_file(str(file), OLD, NEW)
    assert (file.read_bytes(), others(file)) == (OLD, [])


@pytest.mark.skipif(not hasattr(os, "fork"), reason="no processes can be forked here")
def test_a_write_that_stops_half_way(file: Path) -> None:
    """A limit on the size of files, so that the kernel writes a part and refuses the rest."""
    import resource

    child = os.fork()
    if child == 0:
        said = 1
        try:
            signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
            resource.setrlimit(resource.RLIMIT_FSIZE, (20_000, 20_000))
            replace_file(str(file), OLD, NEW)
        except NotReplaced as error:
            said = 42 if str(error) == "not written: File too large" else 2
        finally:
            os._exit(said)
    _, status = os.waitpid(child, 0)
    assert os.waitstatus_to_exitcode(status) == 42
    assert (file.read_bytes(), others(file)) == (OLD, [])


def test_read_only(file: Path) -> None:
    file.chmod(0o440)
    with pytest.raises(NotReplaced, match="^not written: the file is read-only$"):
        replace_file(str(file), OLD, NEW)
    file.chmod(0o640)
    file.parent.chmod(0o555)
    try:
        with pytest.raises(NotReplaced, match="^not written: its directory is read-only$"):
            replace_file(str(file), OLD, NEW)
    finally:
        file.parent.chmod(0o755)
    assert (file.read_bytes(), others(file)) == (OLD, [])


def test_changed_meanwhile(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """By somebody who writes while the temporary file is made."""
    real: Callable[..., None] = os.chmod

    def meanwhile(*given: object, **named: object) -> None:
        real(*given, **named)
        file.write_bytes(b"theirs")

    monkeypatch.setattr(module.os, "chmod", meanwhile)
    with pytest.raises(NotReplaced, match="^not written: the file changed in the meantime$"):
        replace_file(str(file), OLD, NEW)
    assert (file.read_bytes(), others(file)) == (b"theirs", [])


def test_removed_meanwhile_and_no_file(file: Path) -> None:
    file.unlink()
    with pytest.raises(NotReplaced, match="^not written: No such file or directory$"):
        replace_file(str(file), OLD, NEW)
    assert others(file) == []
    with pytest.raises(NotReplaced, match="^not written: it is no ordinary file$"):
        replace_file(str(file.parent), OLD, NEW)


def test_links_and_permissions(file: Path) -> None:
    link = file.parent / "link.py"
    link.symlink_to(file)
    further = file.parent / "further.py"
    further.symlink_to("link.py")
    file.chmod(0o6751)
    replace_file(str(further), OLD, NEW)
    assert link.is_symlink() and further.is_symlink()
    assert file.read_bytes() == NEW
    assert stat.S_IMODE(file.stat().st_mode) == 0o6751
    assert others(file) == ["further.py", "link.py"]


def test_a_long_name(tmp_path: Path) -> None:
    file = tmp_path / ("x" * 250 + ".py")
    file.write_bytes(OLD)
    replace_file(str(file), OLD, NEW)
    assert (file.read_bytes(), others(file)) == (NEW, [])
