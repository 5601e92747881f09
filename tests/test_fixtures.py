"""The demo code base in `fixtures/`: exactly the findings of `fixtures/expected.json`, each replayed on `re`.

`expected` must be found, `may` may be found, `waived` must be found if the waivers are taken away, nothing
else is found. The table was written by hand, before the program ran. Slow witnesses are replayed in a
process of their own with a limit; growth is read from counted steps, never from time.
"""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from collections import Counter
from collections.abc import Callable, Iterator
from itertools import islice, product
from pathlib import Path
from typing import Any

import pytest

from patlint import lint_source
from patlint.machine.matcher import Matcher
from patlint.machine.program import compile_tree
from patlint.placed import PlacedFinding, RelatedPlace
from patlint.rules.finding import SlowWitness, TextWitness
from patlint.source import find_patterns
from patlint.source.sites import Place
from patlint.syntax.parser import parse
from patlint.target import running_target

ROOT = Path(__file__).resolve().parent.parent
FIXTURES = ROOT / "fixtures"
TABLE: dict[str, list[dict[str, Any]]] = json.loads((FIXTURES / "expected.json").read_text(encoding="utf-8"))
FILES = sorted(FIXTURES.rglob("*.py"))
PLANTED = {
    "invalid-pattern",
    "empty-language",
    "vacuous-test",
    "nullable",
    "unreachable-part",
    "equal-siblings",
    "covered-sibling",
    "exponential-ambiguity",
    "polynomial-ambiguity",
    "shorter-equivalent",
    "straddling-range",
    "swallowed-escape",
    "lopsided-anchor",
    "final-newline",
    "stale-waiver",
}
SECONDS = 60
"""A replay that takes longer is ended: a guard against hanging, not a measurement."""

Row = tuple[str, int, str]


def rows(kind: str) -> Counter[Row]:
    return Counter((each["path"], each["line"], each["rule"]) for each in TABLE[kind])


def row(finding: PlacedFinding) -> Row:
    return (finding.path, finding.line, finding.rule)


def lint(change: Callable[[str], str] = str) -> list[PlacedFinding]:
    return [
        finding
        for path in FILES
        for finding in lint_source(
            change(path.read_text(encoding="utf-8")), path.relative_to(FIXTURES).as_posix()
        )
    ]


@pytest.fixture(scope="module")
def findings() -> list[PlacedFinding]:
    return lint()


def test_the_table_holds_every_planted_rule() -> None:
    assert {each["rule"] for each in TABLE["expected"]} == PLANTED
    assert TABLE["waived"] and all(each["reason"] for kind in TABLE.values() for each in kind)


def test_fixtures_are_python() -> None:
    assert 18 <= len(FILES) <= 30
    for path in FILES:
        compile(path.read_text(encoding="utf-8"), path.name, "exec")


def test_findings_are_those_of_the_table(findings: list[PlacedFinding]) -> None:
    found = Counter(map(row, findings))
    assert rows("expected") - found == Counter()
    assert found - rows("expected") - rows("may") == Counter()


def test_waivers_waive(findings: list[PlacedFinding]) -> None:
    bare = Counter(map(row, lint(lambda text: text.replace("patlint: waive", "patience: waive"))))
    stale = Counter({each: n for each, n in rows("expected").items() if each[2] == "stale-waiver"})
    assert bare - Counter(map(row, findings)) == rows("waived")
    assert Counter(map(row, findings)) - bare == stale


def test_the_command_says_the_same(findings: list[PlacedFinding]) -> None:
    call = [sys.executable, "-m", "patlint", "lint", "--format", "json", "--no-cache", "--jobs", "1"]
    call += ["--target", "{}.{}".format(*running_target())]
    done = subprocess.run(
        [*call, "freight"], cwd=FIXTURES, capture_output=True, text=True, env=_environment()
    )
    assert (done.returncode, done.stderr) == (1, "")
    report = json.loads(done.stdout)
    assert report["summary"]["files"] == len(FILES)
    assert report["summary"]["skipped"] == 0
    assert [(each["path"], each["line"], each["column"], each["rule"], each["message"]) for each in
            report["findings"]] == [
        (each.path, each.line, each.column, each.rule, each.message)
        for each in sorted(findings, key=lambda each: (_order(each.path), each.sort_key))
    ]  # fmt: skip
    quiet = subprocess.run(
        [*call, "--fail-on", "never", "freight"], cwd=FIXTURES, capture_output=True, env=_environment()
    )
    assert quiet.returncode == 0


def test_every_finding_holds_on_re(findings: list[PlacedFinding]) -> None:
    replayed: Counter[Row] = Counter()
    for finding in findings:
        replay = REPLAYS.get(finding.rule)
        if replay is not None:
            replay(finding)
            replayed[row(finding)] += 1
    missing = {each: n for each, n in (rows("expected") - replayed).items() if each[2] != "stale-waiver"}
    assert not missing


def _environment() -> dict[str, str]:
    return os.environ | {"PYTHONPATH": str(ROOT), "PYTHONIOENCODING": "utf-8"}


def _order(path: str) -> tuple[tuple[bool, str], ...]:
    """A walk gives the files of a directory before those of its directories, both by name."""
    *folders, name = path.split("/")
    return (*((True, each) for each in folders), (False, name))


# --- replays, one for each rule ---


def _flags(finding: PlacedFinding) -> int:
    inline_too = 0
    for name in finding.flags:
        inline_too |= re.RegexFlag[name]
    return int(inline_too)


def _compiled(finding: PlacedFinding, pattern: str | bytes | None = None) -> re.Pattern[Any]:
    return re.compile(finding.pattern if pattern is None else pattern, _flags(finding))


def _run(finding: PlacedFinding, pattern: re.Pattern[Any], text: str | bytes) -> re.Match[Any] | None:
    assert finding.mode in ("match", "fullmatch", "search")
    found: re.Match[Any] | None = getattr(pattern, finding.mode)(text)
    return found


def _texts(finding: PlacedFinding, size: int = 4) -> Iterator[Any]:
    """Texts over letters of the pattern, shortest first, and the branches of the pattern as they stand."""
    pattern = finding.pattern
    assert pattern is not None
    plain = pattern if isinstance(pattern, str) else pattern.decode("latin-1")
    words = re.findall(r"\w+", plain)
    letters = sorted(set(plain) & set("ABFLRT019aft$# :")) + ["\n", "1"]
    texts = words + [word + end for word in words for end in ("1", "x", " ", "\n")]
    texts += ["".join(each) for n in range(size) for each in product(letters, repeat=n)]
    for text in texts:
        yield text if isinstance(pattern, str) else text.encode("latin-1")


def _invalid(finding: PlacedFinding) -> None:
    with pytest.raises(re.error):
        _compiled(finding)


def _empty(finding: PlacedFinding) -> None:
    pattern = _compiled(finding)
    assert [text for text in _texts(finding) if _run(finding, pattern, text)] == []


def _vacuous(finding: PlacedFinding) -> None:
    pattern = _compiled(finding)
    assert [text for text in _texts(finding) if not _run(finding, pattern, text)] == []
    if isinstance(finding.witness, TextWitness):
        assert _run(finding, pattern, finding.witness.text)


def _nullable(finding: PlacedFinding) -> None:
    assert isinstance(finding.witness, TextWitness)
    widths = {len(found.group()) for found in _compiled(finding).finditer(finding.witness.text)}
    assert 0 in widths
    assert any(found.group() for text in _texts(finding) for found in _compiled(finding).finditer(text))


def _same_without_the_part(finding: PlacedFinding) -> None:
    """The branch that is marked can go: no text changes its span."""
    assert finding.pattern is not None
    start, end = finding.span
    before, after = finding.pattern[:start], finding.pattern[end:]
    bar = "|" if isinstance(finding.pattern, str) else b"|"
    shorter = before[:-1] + after if before[-1:] == bar else before + after[1:]  # type: ignore[operator]
    _same_spans(finding, shorter)


def _equal(finding: PlacedFinding) -> None:
    if finding.related[0].span is None:
        _covered(finding)
    else:
        _same_without_the_part(finding)


def _covered(finding: PlacedFinding) -> None:
    """Whatever the pattern matches is matched by one of the earlier ones that the finding names."""
    if finding.related[0].span is not None:
        _same_without_the_part(finding)
        return
    sites = find_patterns((FIXTURES / finding.path).read_text(encoding="utf-8"), finding.path)
    earlier = [
        (re.compile(site.pattern, site.flags), site.uses[0].mode if site.uses else finding.mode)
        for site in sites
        for place in finding.related
        if site.place_of_span(0, len(site.pattern)) == _place(place)
    ]
    assert len(earlier) == len(finding.related) > 0
    own, matched = _compiled(finding), 0
    assert isinstance(finding.witness, TextWitness)
    shown: Any = finding.witness.text
    for text in [
        shown,
        *(shown[:at] + letter + shown[at + 1 :] for at in range(len(shown)) for letter in "aB17 "),
    ]:
        if _run(finding, own, text):
            matched += 1
            assert any(getattr(each, str(mode))(text) for each, mode in earlier), text
    assert matched


def _place(related: RelatedPlace) -> Place:
    return Place(related.line, related.column, related.end_line, related.end_column)


def _shorter(finding: PlacedFinding) -> None:
    assert finding.suggestion is not None and finding.pattern is not None
    assert len(finding.suggestion.pattern) < len(finding.pattern)
    _same_spans(finding, finding.suggestion.pattern, only_truth=finding.suggestion.keeps == "language")


def _same_spans(finding: PlacedFinding, pattern: str | bytes, only_truth: bool = False) -> None:
    old, new = _compiled(finding), _compiled(finding, pattern)
    assert old.pattern != new.pattern
    matched = 0
    modes = (finding.mode,) if finding.mode else _modes(finding)
    for text in _clock_times_and(finding):
        for name in modes:
            was, now = getattr(old, name)(text), getattr(new, name)(text)
            assert (was is None) == (now is None), text
            if was is not None:
                matched += 1
                assert only_truth or was.span() == now.span(), text
    assert matched


def _modes(finding: PlacedFinding) -> set[str]:
    """The modes in which the pattern is used, all where no use is seen."""
    text = (FIXTURES / finding.path).read_text(encoding="utf-8")
    (site,) = (each for each in find_patterns(text, finding.path) if each.pattern == finding.pattern)
    return {use.mode for use in site.uses} if site.uses_seen else {"match", "fullmatch", "search"}


def _clock_times_and(finding: PlacedFinding) -> Iterator[Any]:
    yield from _texts(finding)
    if isinstance(finding.pattern, str):
        yield from (f"{hour:02}:{minute:02}" for hour in range(30) for minute in range(70))
        yield from (
            "+1234567",
            "+1-2 34 5-67",
            "+1--2",
            "20ft",
            "45 FT",
            "40 '",
            "AB CD",
            "AB  CD",
            "L1",
            "R3",
            "L4",
        )


def _straddling(finding: PlacedFinding) -> None:
    assert finding.pattern is not None and isinstance(finding.witness, TextWitness)
    text = finding.witness.text
    assert any(each in (text if isinstance(text, str) else text.decode("latin-1")) for each in "[\\]^_`")
    whole = _run(finding, _compiled(finding), text) is not None
    set_alone = re.search(r"\[[^\]]*\]", str(finding.pattern))
    assert whole or set_alone is not None and re.search(set_alone.group(), str(text))


def _swallowed(finding: PlacedFinding) -> None:
    assert isinstance(finding.pattern, str) and "\b" in finding.pattern


def _lopsided(finding: PlacedFinding) -> None:
    """The text passes, and does not once the anchors bind all branches."""
    assert isinstance(finding.pattern, str) and isinstance(finding.witness, TextWitness)
    assert _run(finding, _compiled(finding), finding.witness.text)
    bare = finding.pattern.removeprefix("^").removesuffix("$")
    assert not _run(finding, _compiled(finding, f"^(?:{bare})$"), finding.witness.text)


def _final_newline(finding: PlacedFinding) -> None:
    """The text passes with its line feed and without it, and with the line feed only because of the `$`."""
    assert isinstance(finding.pattern, str) and isinstance(finding.witness, TextWitness)
    text = finding.witness.text
    assert isinstance(text, str) and text.endswith("\n") and finding.pattern[slice(*finding.span)] == "$"
    compiled = _compiled(finding)
    assert _run(finding, compiled, text) and _run(finding, compiled, text[:-1])
    start, end = finding.span
    hard = _compiled(finding, finding.pattern[:start] + r"\Z" + finding.pattern[end:])
    assert not _run(finding, hard, text) and _run(finding, hard, text[:-1])


def _slow(finding: PlacedFinding) -> None:
    """Steps grow as the finding says, and `re` comes to the same outcome on a text of some length."""
    witness = finding.witness
    assert isinstance(witness, SlowWitness) and finding.pattern is not None
    function = finding.mode or "search"
    matcher = Matcher(compile_tree(parse(finding.pattern, _flags(finding))))

    def text(count: int) -> Any:
        return witness.text(count)

    def steps(count: int) -> int:
        outcome = matcher.run(text(count), function)
        assert outcome.finished
        return outcome.steps

    if witness.growth == "exponential":
        size = 12
        ratios = [steps(count + 2) / steps(count) for count in (6, 8, 10)]
        assert min(ratios) > 1.3, ratios
    else:
        size = 48
        ratio = steps(2 * size) / steps(size)
        assert 2.0**witness.growth * 0.6 < ratio < 2.0**witness.growth * 1.3, ratio
    code = (
        "import re, sys, ast; pattern, flags, function, text = ast.literal_eval(sys.argv[1]);"
        "found = getattr(re.compile(pattern, flags), function)(text);"
        "print(found.span() if found else None)"
    )
    given = ascii((finding.pattern, _flags(finding), function, text(size)))
    done = subprocess.run(
        [sys.executable, "-c", code, given], capture_output=True, text=True, timeout=SECONDS
    )
    assert done.stderr == ""
    outcome = matcher.run(text(size), function)
    assert done.stdout.strip() == str(outcome.span)


REPLAYS: dict[str, Callable[[PlacedFinding], None]] = {
    "invalid-pattern": _invalid,
    "empty-language": _empty,
    "vacuous-test": _vacuous,
    "nullable": _nullable,
    "unreachable-part": _same_without_the_part,
    "equal-siblings": _equal,
    "covered-sibling": _covered,
    "exponential-ambiguity": _slow,
    "polynomial-ambiguity": _slow,
    "shorter-equivalent": _shorter,
    "straddling-range": _straddling,
    "swallowed-escape": _swallowed,
    "lopsided-anchor": _lopsided,
    "final-newline": _final_newline,
}


def test_texts_for_replays_are_many() -> None:
    """The worlds of the replays are not empty by mistake."""
    lane = PlacedFinding("nullable", "note", "x", 1, 1, 1, 1, "", pattern=r"(?:L1|R1)[ab]")
    assert len(list(islice(_texts(lane), 100))) == 100
