"""The cache: what changes a key, what a damaged entry is worth, and that it never changes an outcome."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

import patlint.cache as cache
from patlint.cache import FOLDER, fetch, fingerprint, folder_of, key_of, store
from patlint.config import PathSettings, Settings
from patlint.limits import Limits, Saving
from patlint.outcome import Outcome
from patlint.placed import PlacedFinding
from patlint.source.sinks import SinkTable
from patlint.source.sinks_builtin import BUILTIN

SETTINGS = Settings((3, 12), ("nullable",), root=".")
OUTCOME = Outcome("dock.py", (PlacedFinding("nullable", "note", "dock.py", 1, 2, 3, 4, "m", "\ud800"),), 7)


@pytest.fixture
def folder(tmp_path: Path) -> str:
    return str(tmp_path / FOLDER)


def entry(folder: str) -> Path:
    (found,) = [each for each in Path(folder).iterdir() if each.name != ".gitignore"]
    return found


def test_stored_and_fetched(folder: str) -> None:
    assert fetch(folder, "dock.py", "k") is None
    store(folder, "dock.py", "k", OUTCOME)
    assert fetch(folder, "dock.py", "k") == OUTCOME
    assert fetch(folder, "dock.py", "other") is None
    assert fetch(folder, "crane.py", "k") is None
    assert (Path(folder) / ".gitignore").read_text() == "*\n"


def test_a_changed_file_takes_the_place_of_its_old_entry(folder: str) -> None:
    store(folder, "dock.py", "old", OUTCOME)
    store(folder, "dock.py", "new", replace(OUTCOME, patterns=8))
    entry(folder)  # the only one
    assert fetch(folder, "dock.py", "old") is None
    assert fetch(folder, "dock.py", "new") == replace(OUTCOME, patterns=8)


def test_every_damage_is_as_good_as_no_entry(folder: str) -> None:
    store(folder, "dock.py", "k", OUTCOME)
    path = entry(folder)
    whole = path.read_bytes()
    tried = 0
    for at in range(len(whole) - 1):  # the last line feed is not needed
        path.write_bytes(whole[:at])
        assert fetch(folder, "dock.py", "k") is None
        path.write_bytes(whole[:at] + bytes([whole[at] ^ 1]) + whole[at + 1 :])
        assert fetch(folder, "dock.py", "k") is None
        tried += 1
    assert tried > 100
    for body in (b"\xff\xfe", b"k\n()\n", b"k\n" + b"(" * 10_000 + b"\n"):
        path.write_bytes(body)
        assert fetch(folder, "dock.py", "k") is None


def test_a_cache_that_cannot_be_written_is_no_error(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    store(str(tmp_path / "file" / FOLDER), "dock.py", "k", OUTCOME)


def test_where_it_stands(tmp_path: Path) -> None:
    assert folder_of(replace(SETTINGS, root=str(tmp_path))) == str(tmp_path / FOLDER)
    assert folder_of(replace(SETTINGS, root=None)) is None


def test_what_changes_the_key() -> None:
    key = key_of(b"x", "dock.py", "f")
    assert key == key_of(b"x", "dock.py", "f")
    assert (
        len({key, key_of(b"y", "dock.py", "f"), key_of(b"x", "crane.py", "f"), key_of(b"x", "dock.py", "g")})
        == 4
    )
    assert key_of(b"", "d\udcff.py", "f") != key_of(b"", "d.py", "f")


def test_what_changes_the_fingerprint(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    changes = [
        SETTINGS,
        replace(SETTINGS, target=(3, 11)),
        replace(SETTINGS, rules=("nullable", "empty-language")),
        replace(SETTINGS, limits=Limits(states=7)),
        replace(SETTINGS, saving=Saving(2, 11)),
        replace(SETTINGS, saving=Saving(3, 10)),
        replace(SETTINGS, only=frozenset({"nullable"})),
        replace(SETTINGS, skip=frozenset({"nullable"})),
        replace(SETTINGS, levels=(("nullable", "error"),)),
        replace(SETTINGS, per_path=(PathSettings("a"),)),
        replace(SETTINGS, sinks=SinkTable(())),
        replace(SETTINGS, sinks=SinkTable(BUILTIN)),
        replace(SETTINGS, per_path=(PathSettings("a", skip=frozenset({"nullable"})),)),
    ]
    assert len({fingerprint(each) for each in changes}) == len(changes)
    assert fingerprint(SETTINGS) == fingerprint(replace(SETTINGS, fail_on="never"))
    package = tmp_path / "package"
    package.mkdir()
    source = package / "cache.py"
    source.write_text("1")
    monkeypatch.setattr(cache, "__file__", str(source))
    first = fingerprint(SETTINGS)
    assert first == fingerprint(SETTINGS)
    source.write_text("12")
    second = fingerprint(SETTINGS)
    (package / "new.py").write_text("")
    assert len({first, second, fingerprint(SETTINGS)}) == 3
    here = fingerprint(SETTINGS)
    monkeypatch.chdir(tmp_path)
    assert fingerprint(SETTINGS) != here
    second = fingerprint(SETTINGS)
    monkeypatch.setattr("sys.version", "another Python")
    assert fingerprint(SETTINGS) != second
