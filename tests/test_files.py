"""Which files a run reads, in which order, and what it says of those it cannot."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from patlint.config import Settings
from patlint.files import FileList, find_files, read_file, read_source

SETTINGS = Settings((3, 12), ())


@pytest.fixture
def tree(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    for name in (
        "b.py",
        "a.py",
        "notes.txt",
        "stub.pyi",
        "script",
        ".#a.py",
        "lib/z.py",
        "lib/deep/y.py",
        "lib/__pycache__/c.py",
        "lib/node_modules/c.py",
        ".hidden/c.py",
        "env/pyvenv.cfg",
        "env/lib/c.py",
        "vendor/c.py",
        "vendored.py",
    ):
        path = tmp_path / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text("")
    return tmp_path


def test_directories_are_walked_in_order(tree: Path) -> None:
    expected = ("a.py", "b.py", "vendored.py", "lib/z.py", "lib/deep/y.py", "vendor/c.py")
    assert find_files(["."], SETTINGS) == FileList(expected, 0, ())
    assert find_files(["./lib/", "a.py", "lib/z.py"], SETTINGS).paths == ("lib/z.py", "lib/deep/y.py", "a.py")
    named_twice = find_files(["a.py", str(tree / "a.py"), str(tree / "lib")], SETTINGS).paths
    assert named_twice == ("a.py", str(tree / "lib/z.py"), str(tree / "lib/deep/y.py"))


def test_what_is_named_is_read_whatever_it_is_called(tree: Path) -> None:
    assert find_files(["script", "stub.pyi", "-", ".hidden", "env"], SETTINGS).paths == (
        "script",
        "stub.pyi",
        "-",
        ".hidden/c.py",
        "env/lib/c.py",
    )


def test_exclude_holds_for_walked_and_for_named(tree: Path) -> None:
    settings = Settings((3, 12), (), root=str(tree), exclude=("vendor", "lib/deep/*.py"))
    listed = find_files(["."], settings)
    assert listed.paths == ("a.py", "b.py", "vendored.py", "lib/z.py")
    assert listed.excluded == 2
    assert find_files(["vendor/c.py", "a.py"], settings) == FileList(("a.py",), 1, ())
    assert find_files(["vendor"], settings) == FileList((), 1, ())


def test_what_is_not_there(tree: Path) -> None:
    (tree / "empty").mkdir()
    os.symlink("nowhere", tree / "dangling.py")
    assert find_files(["gone.py", "empty", "dangling.py", "a.py"], SETTINGS) == FileList(
        ("a.py",),
        0,
        (
            "gone.py: cannot be read: No such file or directory",
            "empty: no Python files in this directory",
            "dangling.py: cannot be read: the link leads nowhere",
        ),
    )
    assert read_file("dangling.py") == "cannot be read: the link leads nowhere"
    assert "dangling.py" in find_files(["."], SETTINGS).paths  # found by the walk, told when it is read


def test_links_to_directories_are_not_followed(tree: Path) -> None:
    os.symlink(tree, tree / "lib" / "loop")
    os.symlink(tree / "lib", tree / "lib" / "loop.py")
    os.symlink(tree / "a.py", tree / "lib" / "link.py")
    assert find_files(["lib"], SETTINGS).paths == ("lib/link.py", "lib/z.py", "lib/deep/y.py")


def test_only_plain_files_are_walked(tree: Path) -> None:
    os.mkfifo(tree / "lib" / "pipe.py")
    assert find_files(["lib"], SETTINGS).paths == ("lib/z.py", "lib/deep/y.py")


def test_read_source(tree: Path) -> None:
    assert read_source("a.py", "other") == ("a.py", b"")


def test_standard_input_under_an_excluded_name_is_left_out() -> None:
    settings = Settings((3, 11), (), exclude=("vendor",))
    assert find_files(["-"], settings, "vendor/a.py").paths == ()
    assert find_files(["-"], settings, "vendor/a.py").excluded == 1
    assert find_files(["-"], settings, "src/a.py").paths == ("-",)
    assert find_files(["-"], settings).paths == ("-",)
