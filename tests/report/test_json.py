"""The JSON reports: exactly the documented shape."""

from __future__ import annotations

import json

from patlint import __version__
from patlint.inventory import Inventory, Listed
from patlint.ledger import Entry
from patlint.outcome import Outcome, Remark
from patlint.placed import PlacedFinding, RelatedPlace
from patlint.report.json import lint_report, list_report, witness_object
from patlint.rules.finding import SlowWitness, Suggestion, TextWitness
from patlint.run import RunResult

SLOW = PlacedFinding(
    rule="exponential-ambiguity",
    level="error",
    path="dock.py",
    line=2,
    column=16,
    end_line=2,
    end_column=20,
    message="time doubles",
    pattern="(a+)+$",
    flags=("IGNORECASE",),
    mode="match",
    witness=SlowWitness("", "a", "!", "exponential", ((5, 100),)),
    suggestion=Suggestion("a+$", "spans"),
    related=(RelatedPlace("here", "crane.py", 1, 2, 3, 4, (0, 1)),),
    evidence="on this text it takes long",
    proof="the automaton says so",
    way_out="write a+",
    span=(0, 4),
)
BYTES = PlacedFinding(
    "nullable", "note", "dock.py", 5, 1, 5, 2, "m", b"\xff*", witness=TextWitness(b"\x00\xff")
)
SURROGATE = PlacedFinding(
    "nullable", "note", "dock.py", 6, 1, 6, 2, "m", "\ud800*", witness=TextWitness("\udc80")
)
WAIVER = PlacedFinding("stale-waiver", "warning", "dock.py", 7, 1, 7, 2, "m")

OUTCOME = Outcome(
    "dock.py",
    (SLOW, BYTES, SURROGATE, WAIVER),
    patterns=5,
    waived=1,
    unresolved=(Remark(8, 1, "compile: a parameter"),),
    inexact=(Remark(2, 1, "x"), Remark(3, 1, "x")),
    undecided=(Remark(2, 1, "states"), Remark(4, 1, "states"), Remark(5, 1, "states")),
)


def test_lint_report() -> None:
    text = lint_report(RunResult((OUTCOME, Outcome("bad.py", linted=False)), ("bad.py: no",), 1), (3, 12))
    assert text.isascii()
    assert text.endswith("}\n")
    report = json.loads(text)
    assert list(report) == ["patlint", "target", "summary", "findings", "gone"]
    assert report["patlint"] == __version__
    assert report["target"] == "3.12"
    assert report["summary"] == {
        "files": 1,
        "skipped": 1,
        "patterns": 5,
        "unresolved": 1,
        "inexact": 2,
        "undecided": 3,
        "waived": 1,
        "known": 0,
    }
    assert report["gone"] == []
    slow, raw, surrogate, waiver = report["findings"]
    assert slow == {
        "rule": "exponential-ambiguity",
        "level": "error",
        "path": "dock.py",
        "line": 2,
        "column": 16,
        "end_line": 2,
        "end_column": 20,
        "message": "time doubles",
        "pattern": "(a+)+$",
        "bytes": False,
        "flags": ["IGNORECASE"],
        "mode": "match",
        "evidence": "on this text it takes long",
        "proof": "the automaton says so",
        "advice": "write a+",
        "witness": {"prefix": "", "pump": "a", "suffix": "!", "growth": "exponential"},
        "suggestion": {"pattern": "a+$", "keeps": "spans"},
        "related": [
            {
                "path": "crane.py",
                "line": 1,
                "column": 2,
                "end_line": 3,
                "end_column": 4,
                "message": "here",
            }
        ],
    }
    assert (raw["pattern"], raw["bytes"], raw["witness"]) == ("\xff*", True, {"text": "\x00\xff"})
    assert (surrogate["pattern"], surrogate["witness"]) == ("\ud800*", {"text": "\udc80"})
    assert waiver["pattern"] is waiver["mode"] is waiver["witness"] is waiver["suggestion"] is None
    assert waiver["flags"] == waiver["related"] == []
    assert all(list(each) == list(slow) for each in report["findings"])


def test_a_run_beside_a_ledger() -> None:
    gone = (
        Entry("", "dock.py", "nullable", b"\xff*", ""),
        Entry("", "quay.py", "stale-waiver", None, ""),
    )
    report = json.loads(lint_report(RunResult((), (), 0, "known", 7, gone), (3, 12)))
    assert report["summary"]["known"] == 7
    assert report["gone"] == [
        {"rule": "nullable", "path": "dock.py", "pattern": "\xff*", "bytes": True},
        {"rule": "stale-waiver", "path": "quay.py", "pattern": None, "bytes": False},
    ]


def test_list_report() -> None:
    listed = Listed("dock.py", 1, 2, 3, 4, b"\xfe", ("DOTALL",), ("match", "search"), "span", "compile")
    inventory = Inventory("dock.py", (listed,), (Remark(8, 1, "compile: a parameter"),))
    text = list_report([inventory])
    assert text.isascii()
    assert json.loads(text) == {
        "patterns": [
            {
                "path": "dock.py",
                "line": 1,
                "column": 2,
                "end_line": 3,
                "end_column": 4,
                "pattern": "\xfe",
                "bytes": True,
                "flags": ["DOTALL"],
                "modes": ["match", "search"],
                "looks_at": "span",
                "function": "compile",
            }
        ],
        "unresolved": [{"path": "dock.py", "line": 8, "column": 1, "reason": "compile: a parameter"}],
    }


def test_a_witness_of_several_pumps_and_one_below_a_bound() -> None:
    several = SlowWitness(b"", b"a", b"!", 3, (), ((b"x", b"\xff"),))
    assert witness_object(several) == {
        "prefix": "",
        "pump": "a",
        "suffix": "!",
        "growth": 3,
        "more": [{"between": "x", "pump": "\xff"}],
    }
    assert witness_object(SlowWitness("", "a", "!", "exponential", ((8, 90),), (), True)) == {
        "prefix": "",
        "pump": "a",
        "suffix": "!",
        "growth": "exponential",
        "bounded": True,
    }
