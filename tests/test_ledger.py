"""The ledger: what is known stays known whatever happens elsewhere, and what was edited is told again."""

from __future__ import annotations

import json
import os
from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from random import Random

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from patlint.identity import content
from patlint.ledger import HEAD, Judged, Ledger, LedgerError, entered, judge, load, pruned, save
from patlint.outcome import Outcome
from patlint.placed import PlacedFinding

RULES = ("nullable", "straddling-range", "stale-waiver")


def finding(path: str, rule: str, pattern: str | bytes | None, line: int = 1) -> PlacedFinding:
    return PlacedFinding(rule, "warning", path, line, 1, line, 2, f"about {rule}", pattern)


def outcome(path: str, *findings: PlacedFinding, **more: object) -> Outcome:
    return replace(Outcome(path, findings), **more)  # type: ignore[arg-type]


def everything(path: str, rule: str) -> bool:
    return True


@pytest.fixture
def keep(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Callable[..., Ledger]:
    """Writes a ledger that knows the findings of a run, and reads it."""
    monkeypatch.chdir(tmp_path)

    def kept(*outcomes: Outcome) -> Ledger:
        save("known", entered(judge(Ledger("known"), outcomes, ["."], everything)))
        return load("known")

    return kept


def beside(
    ledger: Ledger,
    *outcomes: Outcome,
    paths: tuple[str, ...] = (".",),
    is_on: Callable[[str, str], bool] = everything,
) -> Judged:
    return judge(ledger, outcomes, paths, is_on)


Keep = Callable[..., Ledger]
A, B = finding("a.py", "nullable", "x*"), finding("a.py", "straddling-range", "[A-z]")


def test_the_file(keep: Keep) -> None:
    keep(
        outcome(
            "sub/b.py", finding("sub/b.py", "nullable", b"\xff*"), finding("sub/b.py", "nullable", "a\n'\"")
        ),
        outcome("a.py", finding("a.py", "stale-waiver", None), A, A, replace(B, flags=("ASCII", "VERBOSE"))),
    )
    assert Path("known").read_text().splitlines() == [
        '{"patlint-ledger": 1}',
        '{"path": "a.py", "rule": "nullable", "pattern": "x*"}',
        '{"path": "a.py", "rule": "nullable", "pattern": "x*"}',
        '{"path": "a.py", "rule": "stale-waiver", "message": "about stale-waiver"}',
        '{"path": "a.py", "rule": "straddling-range", "pattern": "[A-z]", "flags": ["ASCII", "VERBOSE"]}',
        '{"path": "sub/b.py", "rule": "nullable", "pattern": "\\u00ff*", "bytes": true}',
        '{"path": "sub/b.py", "rule": "nullable", "pattern": "a\\n\'\\""}',
    ]


def test_known_new_gone(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A, B))
    judged = beside(ledger, outcome("a.py", A, finding("a.py", "nullable", "y*")))
    assert [each.pattern for each in judged.outcomes[0].findings] == ["y*"]
    assert (len(judged.known), len(judged.new)) == (1, 1)
    assert [(each.rule, each.pattern) for each in judged.gone] == [("straddling-range", "[A-z]")]
    assert judged.unjudged == ()


def test_two_equal_findings_of_which_one_goes(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A, A))
    assert len(beside(ledger, outcome("a.py", A, A)).known) == 2
    one = beside(ledger, outcome("a.py", A))
    assert (len(one.known), len(one.new), len(one.gone)) == (1, 0, 1)
    three = beside(ledger, outcome("a.py", A, A, A))
    assert (len(three.known), len(three.new), len(three.gone)) == (2, 1, 0)
    assert three.outcomes[0].findings == (A,)


MOVED = replace(A, path="b.py")


def test_moved_to_another_file(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A, B))
    moved = beside(ledger, outcome("a.py", B), outcome("b.py", MOVED))
    assert (len(moved.known), moved.new, moved.gone) == (2, (), ())
    assert pruned(moved) == [content(B, "a.py"), content(MOVED, "b.py")]


def test_copied_to_another_file(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A))
    copied = beside(ledger, outcome("a.py", A), outcome("b.py", MOVED))
    assert (len(copied.known), copied.new, copied.gone) == (1, (content(MOVED, "b.py"),), ())


def test_moved_while_the_old_file_was_not_read(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A))
    Path("a.py").write_text("")
    assert len(beside(ledger, outcome("b.py", MOVED), paths=("b.py",)).new) == 1
    Path("a.py").unlink()  # a renamed file: the old name is free
    renamed = beside(ledger, outcome("b.py", MOVED), paths=("b.py",))
    assert (len(renamed.known), renamed.new, renamed.gone) == (1, (), ())


def test_a_run_over_a_few_files_says_nothing_about_the_others(keep: Keep) -> None:
    other = finding("b.py", "nullable", "z*")
    ledger = keep(
        outcome("a.py", A), outcome("b.py", other), outcome("c/d.py", finding("c/d.py", "nullable", "d*"))
    )
    Path("b.py").write_text("")
    judged = beside(ledger, outcome("a.py"), paths=("a.py",))
    assert [each.path for each in judged.gone] == ["a.py"]
    assert [each.path for each in judged.unjudged] == ["b.py", "c/d.py"]
    assert len(pruned(judged)) == 2
    whole = beside(ledger, outcome("a.py"), paths=(".",))  # b.py was left out, c/d.py is no more
    assert [each.path for each in whole.gone] == ["a.py", "c/d.py"]
    assert [each.path for each in beside(ledger, outcome("a.py"), paths=("c",)).gone] == ["a.py", "c/d.py"]


def test_rules_that_were_not_asked_and_files_that_failed(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A, B))
    off = beside(ledger, outcome("a.py"), is_on=lambda path, rule: (path, rule) == ("a.py", "nullable"))
    assert [each.rule for each in off.gone] == ["nullable"]
    assert entered(off) == [content(B, "a.py")]
    for broken in ({"linted": False}, {"problems": ("a.py:1:1: patlint itself failed here",)}):
        judged = beside(ledger, outcome("a.py", **broken))
        assert (judged.gone, len(judged.unjudged)) == ((), 2)


def test_paths_are_relative_to_the_ledger(keep: Keep, monkeypatch: pytest.MonkeyPatch) -> None:
    ledger = keep(outcome("sub/b.py", finding("sub/b.py", "nullable", "x*")))
    Path("sub").mkdir()
    monkeypatch.chdir("sub")
    ledger = load("../known")
    assert len(beside(ledger, outcome("b.py", finding("b.py", "nullable", "x*"))).known) == 1
    full = os.path.abspath("b.py")
    assert len(beside(ledger, outcome(full, finding(full, "nullable", "x*"))).known) == 1


WRONG = [
    ("", 'not a ledger: its first line is not {"patlint-ledger": 1}'),
    ("[]\n", 'not a ledger: its first line is not {"patlint-ledger": 1}'),
    ('{"other": 1}\n', 'not a ledger: its first line is not {"patlint-ledger": 1}'),
    ("\xff\xfe\0\n", 'not a ledger: its first line is not {"patlint-ledger": 1}'),
    ("[" * 100_000, 'not a ledger: its first line is not {"patlint-ledger": 1}'),
    ('{"patlint-ledger": 2}\n', "a ledger of version 2; this patlint knows 1"),
]
ENTRIES = [
    '{"path": "a.py", "rule": "nullable", "patt',
    "[]",
    "7",
    "[" * 100_000,
    '{"path": "a.py", "rule": "nullable"}',
    '{"path": 1, "rule": "nullable", "pattern": ""}',
    '{"path": "a.py", "rule": "nullable", "pattern": "", "message": ""}',
    '{"path": "a.py", "rule": "nullable", "pattern": "", "line": 7}',
    '{"path": "a.py", "rule": "nullable", "pattern": "", "bytes": 1}',
    '{"path": "a.py", "rule": "nullable", "pattern": "", "flags": "ASCII"}',
    '{"path": "a.py", "rule": "nullable", "pattern": "", "flags": [1]}',
    '{"path": "a.py", "rule": "nullable", "message": "", "bytes": true}',
]


@pytest.mark.parametrize(("text", "message"), WRONG)
def test_not_a_ledger(tmp_path: Path, text: str, message: str) -> None:
    place = tmp_path / "known"
    place.write_text(text, encoding="latin-1")
    with pytest.raises(LedgerError) as caught:
        load(str(place))
    assert str(caught.value) == f"{place}: {message}"


@pytest.mark.parametrize("line", ENTRIES)
def test_not_an_entry(tmp_path: Path, line: str) -> None:
    place = tmp_path / "known"
    place.write_text(f'{{"{HEAD}": 1}}\n\n{line}\n')
    with pytest.raises(LedgerError) as caught:
        load(str(place))
    assert str(caught.value) == f"{place}:3: not an entry of a ledger"


def test_a_merge_left_its_marks(tmp_path: Path) -> None:
    place = tmp_path / "known"
    place.write_text(f'{{"{HEAD}": 1}}\n<<<<<<< ours\n')
    with pytest.raises(LedgerError, match=r"known:2: a merge left a conflict here$"):
        load(str(place))


def test_no_such_file(tmp_path: Path) -> None:
    with pytest.raises(LedgerError, match="none: cannot be read: No such file or directory$"):
        load(str(tmp_path / "none"))
    with pytest.raises(LedgerError, match="none/known: cannot be written: "):
        save(str(tmp_path / "none/known"), [])


def test_other_spacing_order_and_line_ends_are_the_same(keep: Keep) -> None:
    ledger = keep(outcome("a.py", A, B))
    lines = [json.loads(line) for line in Path("known").read_text().splitlines()]
    shuffled = [dict(reversed(each.items())) for each in (lines[2], lines[1])]
    text = "\r\n".join(json.dumps(each, separators=(",", ":")) for each in (lines[0], *shuffled))
    Path("known").write_bytes(text.encode())
    assert Counter(each.line for each in load("known").entries) == Counter(
        each.line for each in ledger.entries
    )


# Small alphabets, so that equal findings, and equal ones in other files, are common.
texts = st.sampled_from(["x*", "y", "\ud800", "\ud83d\ude00", "\U0001f600", "", "\n"])
patterns = st.one_of(texts, st.sampled_from([b"x*", b"\xff"]), st.none())
files = st.sampled_from(["a.py", "b.py", "sub/c.py", "odd \udcff.py"])
findings = st.builds(
    finding, files, st.sampled_from(RULES), patterns, st.integers(min_value=1, max_value=500)
).map(lambda each: replace(each, flags=("ASCII",) if each.line % 3 == 0 else ()))
SETTINGS = settings(
    max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)


def by_file(found: list[PlacedFinding]) -> list[Outcome]:
    paths = dict.fromkeys(each.path for each in found)
    return [outcome(path, *(each for each in found if each.path == path)) for path in paths]


@SETTINGS
@given(st.lists(findings, max_size=12), st.integers(), st.integers(min_value=0, max_value=90))
def test_shifted_and_reordered_stays_known(
    keep: Keep, found: list[PlacedFinding], seed: int, by: int
) -> None:
    ledger = keep(*by_file(found))
    moved = [replace(each, line=each.line + by, level="note", message=each.message) for each in found]
    Random(seed).shuffle(moved)
    judged = beside(ledger, *by_file(moved))
    assert (judged.new, judged.gone, judged.unjudged) == ((), (), ())
    assert len(judged.known) == len(found)
    assert sorted(pruned(judged)) == sorted(entered(judged)) == [each.line for each in ledger.entries]


@SETTINGS
@given(st.lists(findings, max_size=8), st.lists(findings, max_size=8), st.integers())
def test_every_finding_and_every_entry_is_counted_once(
    keep: Keep, before: list[PlacedFinding], after: list[PlacedFinding], seed: int
) -> None:
    """Against a plain count: of each content in each file the lesser number is known, then across files."""
    ledger = keep(*by_file(before))
    read = by_file(after) + [outcome(each.path) for each in by_file(before)]
    merged = {each.path: each for each in reversed(read)}
    judged = beside(ledger, *merged.values())

    def count(found: list[PlacedFinding], with_path: bool) -> Counter[str]:
        return Counter(content(each, each.path if with_path else "") for each in found)

    both = count(before, False) & count(after, False)
    assert len(judged.known) == both.total()
    assert len(judged.new) == len(after) - both.total()
    assert len(judged.gone) == len(before) - both.total()
    assert judged.unjudged == ()
    at_home = (count(before, True) & count(after, True)).total()
    assert at_home <= len(judged.known)
    assert sum(len(each.findings) for each in judged.outcomes) == len(judged.new)


@SETTINGS
@given(st.lists(findings, min_size=1, max_size=8), st.data())
def test_an_edited_pattern_is_told_again(keep: Keep, found: list[PlacedFinding], data: st.DataObject) -> None:
    ledger = keep(*by_file(found))
    index = data.draw(st.integers(min_value=0, max_value=len(found) - 1))
    edited = replace(found[index], pattern="edited")
    judged = beside(ledger, *by_file([*found[:index], edited, *found[index + 1 :]]))
    told = [each for done in judged.outcomes for each in done.findings]
    assert told == [edited]
    assert len(judged.gone) == 1


@SETTINGS
@given(st.lists(findings, max_size=8), files)
def test_what_another_file_says_changes_nothing(keep: Keep, found: list[PlacedFinding], path: str) -> None:
    """A run over one file tells of that file what the whole run tells."""
    ledger = keep(*by_file(found))
    alone = [each for each in by_file(found) if each.path == path]
    judged = beside(ledger, *alone, paths=(path,))
    assert (judged.new, judged.gone) == ((), ())
    assert sorted(pruned(judged)) == [each.line for each in ledger.entries]
