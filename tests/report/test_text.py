"""The text report: whole blocks, character by character."""

from __future__ import annotations

from typing import Any

import pytest

from patlint.outcome import Outcome, Remark
from patlint.placed import PlacedFinding, RelatedPlace
from patlint.report.text import Style, finding_block, lint_report, summary_line
from patlint.rules.finding import SlowWitness, Suggestion, TextWitness
from patlint.run import RunResult

PLAIN = Style()


def finding(pattern: str | bytes | None, span: tuple[int, int], **more: Any) -> PlacedFinding:
    given: dict[str, Any] = {
        "rule": "nullable",
        "level": "warning",
        "path": "dock.py",
        "line": 3,
        "column": 9,
        "end_line": 3,
        "end_column": 12,
        "message": "says so",
    }
    return PlacedFinding(**given | more, pattern=pattern, span=span)


def block(pattern: str | bytes | None, span: tuple[int, int], style: Style = PLAIN, **more: Any) -> str:
    return "\n".join(finding_block(finding(pattern, span, **more), style))


HEAD = "dock.py:3:9: warning: nullable: says so"


def test_everything_at_once() -> None:
    assert (
        block(
            "^(a+)+$",
            (1, 6),
            level="error",
            rule="exponential-ambiguity",
            message="time doubles",
            evidence="on this text `match` takes long",
            witness=SlowWitness("", "a", "!", "exponential"),
            suggestion=Suggestion("^a+$", "language"),
            related=(
                RelatedPlace("the same here", "crane.py", 4, 5, 4, 9),
                RelatedPlace("and here", "dock.py", 4, 5, 4, 9),
            ),
            way_out="say it once " * 8,
        )
        == """\
dock.py:3:9: error: exponential-ambiguity: time doubles
  pattern  ^(a+)+$
            =====
  evidence on this text `match` takes long
  text     'a' * 30 + '!'
  instead  '^a+$'
           takes the same texts
  see      line 4, column 5 of crane.py: the same here
  see      line 4, column 5: and here
  advice   say it once say it once say it once say it once say it once say it
           once say it once say it once"""
    )


def test_proof_stands_where_there_is_no_evidence() -> None:
    assert (
        block("a", (0, 1), proof="the language is empty")
        == f"{HEAD}\n  pattern  a\n           =\n  evidence the language is empty"
    )


def test_a_text_witness() -> None:
    assert block("a", (0, 1), witness=TextWitness("\n")).endswith("\n  text     '\\n'")


UNDERLINED = [
    ("abc", (1, 2), {}, "  pattern  abc\n            ="),
    ("a|b|c", (4, 5), {"marks": ((0, 1), (2, 3))}, "  pattern  a|b|c\n           - - ="),
    (
        "a|b",
        (2, 3),
        {"related": (RelatedPlace("first", "dock.py", 3, 9, 3, 10, (0, 1)),)},
        "  pattern  a|b\n           - =\n  see      line 3, column 9: first",
    ),
    ("abc", (1, 1), {}, "  pattern  abc\n            |"),
    ("abc", (3, 3), {}, "  pattern  abc\n              |"),
    ("a\tb\n", (2, 4), {}, "  pattern  a\\tb\\n\n              ==="),
    ("\u6f22\u5b57x", (1, 3), {}, "  pattern  \u6f22\u5b57x\n             ==="),
    ("\u6f22x", (0, 0), {}, "  pattern  \u6f22x\n           |"),
    ("e\u0301x", (2, 3), {}, "  pattern  e\\u0301x\n                  ="),
    (b"\xff\x00a", (2, 3), {}, "  pattern  \\xff\\x00a\n                   ="),
    ("", (0, 0), {}, ""),
    (None, (0, 0), {}, ""),
]


@pytest.mark.parametrize(("pattern", "span", "more", "rows"), UNDERLINED)
def test_underlines(
    pattern: str | bytes | None, span: tuple[int, int], more: dict[str, Any], rows: str
) -> None:
    assert block(pattern, span, **more) == (f"{HEAD}\n{rows}" if rows else HEAD)


CUT = [
    ("x" * 69, (0, 1)),
    ("x" * 70, (0, 1)),
    ("x" * 100 + "(ab|ab)" + "y" * 100, (101, 103)),
    ("x" * 100 + "(ab|ab)", (101, 103)),
    ("(ab|ab)" + "y" * 100, (1, 3)),
    ("x" * 50 + "y" * 150 + "z" * 50, (50, 200)),
    ("\u6f22" * 100, (60, 62)),
    ("\t" * 100, (60, 62)),
    ("x" * 300, (300, 300)),
    ("x" * 300, (0, 0)),
]


@pytest.mark.parametrize(("pattern", "span"), CUT)
@pytest.mark.parametrize("columns", [40, 80])
def test_long_patterns_are_cut_around_the_part(pattern: str, span: tuple[int, int], columns: int) -> None:
    from patlint.report.show import width

    _, shown, under = block(pattern, span, Style(columns)).split("\n")
    assert width(shown) <= columns
    assert width(under) <= columns + 1  # the mark behind the last character
    assert ("..." in shown) == (width("".join(pattern)) > columns - 11 or "\t" in pattern)
    assert under.strip(" ")


def test_a_cut_pattern_whole() -> None:
    assert block("x" * 40 + "(ab|ab)" + "y" * 40, (41, 46), Style(40)).split("\n")[1:] == [
        "  pattern  ...xxxxxxxx(ab|ab)yyyyyyyy...",
        "                       =====",
    ]


VERBOSE = """
    (?P<row>\\d+)   # the row
    [ ]
    (a|a)          # twice
    end
"""


def test_verbose_patterns_show_the_line_concerned() -> None:
    start = VERBOSE.index("(a|a)")
    assert block(VERBOSE, (start + 3, start + 4), flags=("VERBOSE",)) == (
        f"{HEAD}\n  pattern  (a|a)          # twice\n              ="
    )


def test_verbose_patterns_show_three_lines_at_most() -> None:
    assert block(VERBOSE, (5, len(VERBOSE) - 1), flags=("VERBOSE",)) == (
        f"{HEAD}\n"
        "  pattern  (?P<row>\\d+)   # the row\n"
        "           ========================\n"
        "           [ ]\n"
        "           ===\n"
        "           (a|a)          # twice\n"
        "           ======================\n"
        "           (1 more line)"
    )


def test_without_verbose_a_line_feed_is_an_escape() -> None:
    assert block("a\nb", (2, 3)) == f"{HEAD}\n  pattern  a\\nb\n              ="


def test_nothing_breaks_the_line() -> None:
    assert block(None, (0, 0), path="a\nb.py", message="x\x1b[31m") == (
        "a\\nb.py:3:9: warning: nullable: x\\x1b[31m"
    )


def test_colour() -> None:
    assert block("a(b)", (1, 4), Style(colour=True)) == (
        "dock.py:3:9: \x1b[1;33mwarning\x1b[0m: nullable: says so\n"
        "  \x1b[2mpattern\x1b[0m  a\x1b[1;33m(b)\x1b[0m\n"
        "           \x1b[1;33m ===\x1b[0m"
    )


def test_the_summary_line() -> None:
    assert summary_line(RunResult((), (), 0)) == (
        "0 files, 0 patterns: 0 errors, 0 warnings, 0 notes; "
        "0 waived, 0 unresolved, 0 inexact, 0 undecided, 0 skipped"
    )
    one = Outcome(
        "dock.py",
        (finding("a", (0, 1)),),
        patterns=1,
        waived=2,
        unresolved=(Remark(1, 1, "x"),),
        inexact=(Remark(1, 1, "x"), Remark(2, 1, "x")),
        undecided=(Remark(1, 1, "x"),),
    )
    assert summary_line(RunResult((one,), (), 4)) == (
        "1 file, 1 pattern: 0 errors, 1 warning, 0 notes; "
        "2 waived, 1 unresolved, 2 inexact, 1 undecided, 4 skipped"
    )


def test_a_whole_report_verbose() -> None:
    outcome = Outcome(
        "dock.py",
        (finding(None, (0, 0)), finding(None, (0, 0), line=4)),
        patterns=2,
        unresolved=(Remark(9, 5, "compile: a parameter"),),
        inexact=(Remark(3, 9, "a back-reference"),),
        undecided=(Remark(9, 1, "states"),),
    )
    assert list(lint_report(RunResult((outcome,), (), 0), Style(), verbose=True)) == [
        HEAD,
        "",
        "dock.py:4:9: warning: nullable: says so",
        "",
        "dock.py:3:9: inexact: a back-reference",
        "dock.py:9:1: undecided: limit states reached",
        "dock.py:9:5: unresolved: compile: a parameter",
        "",
        "1 file, 2 patterns: 0 errors, 2 warnings, 0 notes; "
        "0 waived, 1 unresolved, 1 inexact, 1 undecided, 0 skipped",
    ]


def test_brief_findings_of_a_rule_are_one_line_a_file() -> None:
    def brief(line: int, path: str = "dock.py", rule: str = "nullable") -> PlacedFinding:
        return finding("a*", (0, 2), level="note", brief=True, line=line, path=path, rule=rule)

    found: tuple[PlacedFinding, ...]
    found = (brief(3), brief(5), finding("a*", (0, 2), line=6), brief(7), brief(7), brief(8, rule="other"))
    found += tuple(brief(line, "crane.py") for line in range(1, 14))
    result = RunResult((Outcome("dock.py", findings=found),), (), 0)
    lines = list(lint_report(result, PLAIN))
    assert [line for line in lines if not line.startswith(" ")] == [
        "dock.py:3:9: note: nullable: says so; likewise in lines 5, 7",
        "",
        "dock.py:6:9: warning: nullable: says so",
        "",
        "dock.py:8:9: note: other: says so",
        "crane.py:1:9: note: nullable: says so; likewise in lines 2, 3, 4, 5, 6, 7, 8, 9, 10, 11 and 2 more",
        "",
        summary_line(result),
    ]
    assert summary_line(result).startswith("1 file, 0 patterns: 0 errors, 1 warning, 18 notes; ")
    assert sum("note:" in line for line in lint_report(result, PLAIN, verbose=True)) == 18
