"""Files are written as a whole or not at all."""

from __future__ import annotations

import os
import stat
import sys
from pathlib import Path

import pytest

from patlint.whole import write_whole

POSIX = pytest.mark.skipif(sys.platform == "win32", reason="permissions and devices of POSIX")


def test_new_and_old_files(tmp_path: Path) -> None:
    place = tmp_path / "report.txt"
    write_whole(str(place), "first\n")
    write_whole(str(place), "\ud800 \u00e4\n")
    assert place.read_bytes() == b"\\ud800 \xc3\xa4\n"
    assert os.listdir(tmp_path) == ["report.txt"]


@POSIX
def test_permissions(tmp_path: Path) -> None:
    before = os.umask(0o027)
    try:
        write_whole(str(tmp_path / "new"), "")
    finally:
        os.umask(before)
    assert stat.S_IMODE((tmp_path / "new").stat().st_mode) == 0o640
    (tmp_path / "new").chmod(0o604)
    write_whole(str(tmp_path / "new"), "text")
    assert stat.S_IMODE((tmp_path / "new").stat().st_mode) == 0o604


@POSIX
def test_a_link_leads_to_the_file(tmp_path: Path) -> None:
    (tmp_path / "there").mkdir()
    (tmp_path / "there/report").write_text("old")
    (tmp_path / "link").symlink_to("there/report")
    write_whole(str(tmp_path / "link"), "new")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "there/report").read_text() == "new"


def test_a_write_that_fails_leaves_the_old(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    place = tmp_path / "report.txt"
    place.write_text("old")
    with pytest.raises(OSError):
        write_whole(str(place / "inside"), "new")
    with pytest.raises(IsADirectoryError):
        write_whole(str(tmp_path), "new")

    def full(source: str, target: str) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", full)
    with pytest.raises(OSError, match="No space left"):
        write_whole(str(place), "new")
    assert place.read_text() == "old"
    assert os.listdir(tmp_path) == ["report.txt"]


@POSIX
def test_a_file_that_is_read_only_stays(tmp_path: Path) -> None:
    place = tmp_path / "report.txt"
    place.write_text("old")
    place.chmod(0o444)
    with pytest.raises(PermissionError):
        write_whole(str(place), "new")
    assert place.read_text() == "old"


@POSIX
def test_what_is_no_ordinary_file_is_written_directly(tmp_path: Path) -> None:
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    reader = os.open(pipe, os.O_RDONLY | os.O_NONBLOCK)
    write_whole(str(pipe), "through\n")
    assert os.read(reader, 100) == b"through\n"
    os.close(reader)
    assert stat.S_ISFIFO(pipe.stat().st_mode)
    write_whole(os.devnull, "nowhere")
    assert not stat.S_ISREG(os.stat(os.devnull).st_mode)


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="no /dev/full here")
def test_a_full_device(tmp_path: Path) -> None:
    with pytest.raises(OSError, match="No space left"):
        write_whole("/dev/full", "text")
