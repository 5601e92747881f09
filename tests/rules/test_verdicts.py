"""What each rule says and does not say, on calls as they stand in code; text witnesses are replayed on `re`.

Cases are our own unless a source is named; idioms that stay quiet are common practice, no source.
"""

from __future__ import annotations

import re

import pytest

from patlint import lint_source
from patlint.config import Settings
from patlint.placed import PlacedFinding
from patlint.rules import RULES
from patlint.rules.finding import TextWitness

CASES: list[tuple[str, str, bool]] = [
    # empty-language
    ("ok = re.match(r'a$b', s) is not None", "empty-language", True),
    ("ok = re.search(r'a$b', s) is not None", "empty-language", True),
    ("ok = re.search(r'(?m)a$\\nb', s) is not None", "empty-language", False),
    ("ok = re.search(r'x^y', s) is not None", "empty-language", True),
    ("ok = re.search(r'(?m)x\\n^y', s) is not None", "empty-language", False),
    ("ok = re.search(r'a\\bb', s) is not None", "empty-language", True),
    ("ok = re.match(r'(?=a)b', s) is not None", "empty-language", True),
    ("ok = re.match(r'(?<=#)\\d+', s) is not None", "empty-language", True),
    ("ok = re.search(r'(?<=#)\\d+', s) is not None", "empty-language", False),
    ("_p = re.compile(r'(?<=#)\\d+')\nok = _p.match(s, 3) is not None", "empty-language", False),
    ("p = re.compile(r'(?<=#)\\d+')", "empty-language", False),
    ("p = re.compile(r'\\d+$\\d')", "empty-language", True),
    ("ok = re.fullmatch(r'(?>a|ab)c(?<=abc)', s) is not None", "empty-language", True),
    ("ok = re.fullmatch(r'a*+a', s) is not None", "empty-language", True),
    ("ok = re.search(r'(?!)', s) is not None", "empty-language", False),
    ("ok = re.search(r'[^\\s\\S]', s) is not None", "empty-language", False),
    ("ok = re.match(r'(a)\\1$b', s) is not None", "empty-language", True),
    # vacuous-test
    ("ok = bool(re.match(r'\\d*', s))", "vacuous-test", True),
    ("ok = bool(re.search(r'a|', s))", "vacuous-test", True),
    ("ok = bool(re.fullmatch(r'(?s).*', s))", "vacuous-test", True),
    ("ok = bool(re.fullmatch(r'.*', s))", "vacuous-test", False),
    ("ok = bool(re.fullmatch(r'\\d*', s))", "vacuous-test", False),
    ("ok = bool(re.match('', s))", "vacuous-test", False),
    ("m = re.match(r'\\d*', s)\nuse(m.group())", "vacuous-test", False),
    ("_p = re.compile(r'\\d*')\nok = bool(_p.match(s, 3))", "vacuous-test", False),
    ("ok = bool(re.match(r'(?=a*)', s))", "vacuous-test", True),
    ("ok = bool(re.findall(r'\\d*', s))", "vacuous-test", True),
    ("if not re.findall(r'\\d*', s): raise ValueError(s)", "vacuous-test", True),
    ("ok = any(re.finditer(r'\\d*', s))", "vacuous-test", True),
    ("ok = bool(re.findall(r'\\d+', s))", "vacuous-test", False),
    ("ok = any(re.findall(r'\\d*', s))", "vacuous-test", False),
    ("ok = bool(re.split(r'\\d*', s))", "vacuous-test", False),
    ("ok = bool(re.findall(r'^a?$', s))", "vacuous-test", False),
    # RFC 3986, appendix B (from memory): the expression matches every text that has no line feed in its fragment
    (
        r"ok = bool(re.match(r'^(([^:/?#]+):)?(//([^/?#]*))?([^?#]*)(\?([^#]*))?(#(.*))?', s))",
        "vacuous-test",
        True,
    ),
    # nullable
    ("x = re.split(r'\\s*', s)", "nullable", True),
    ("x = re.split(r',?', s)", "nullable", True),
    ("x = re.split(r'(?<=a)(?=b)', s)", "nullable", False),
    ("x = re.split(r'\\s*$', s)", "nullable", False),
    ("x = re.findall(r'\\d*', s)", "nullable", True),
    ("x = re.findall(r'\\d+', s)", "nullable", False),
    ("x = [y for y in re.findall(r'\\d*', s)]", "nullable", True),
    ("x = [y for y in re.findall(r'\\d*', s) if y]", "nullable", False),
    ("x = [y for y in re.findall(r'\\d*', s) if y in t]", "nullable", True),
    ("x = {y: 1 for y in re.findall(r'\\d*', s) if y != '' and y in t}", "nullable", False),
    ("x = [y.end() for y in re.finditer(r'\\d*', s) if y.group()]", "nullable", False),
    ("x = [y.end() for y in re.finditer(r'\\d*', s) if y[0]]", "nullable", False),
    ("x = [y.end() for y in re.finditer(r'(\\d*)', s) if y[1]]", "nullable", True),
    ("x = list(filter(None, re.findall(r'\\d*', s)))", "nullable", False),
    ("x = list(filter(f, re.findall(r'\\d*', s)))", "nullable", True),
    ("for y in re.findall(r'\\d*', s):\n    if not y:\n        continue\n    go(y)", "nullable", False),
    ("for y in re.findall(r'\\d*', s):\n    if y:\n        go(y)", "nullable", False),
    ("for y in re.findall(r'\\d*', s):\n    if y:\n        go(y)\n    stop()", "nullable", True),
    ("for y in re.findall(r'\\d*', s):\n    if not y:\n        break\n    go(y)", "nullable", True),
    ("for n, y in enumerate(re.findall(r'\\d*', s)):\n    if y:\n        go(y)", "nullable", True),
    # the text is cut all the same
    ("x = [y for y in re.split(r',?', s) if y]", "nullable", True),
    ("x = re.sub(r'\\s*', '', s)", "nullable", False),
    ("x = re.sub(r'\\s*', '-', s)", "nullable", True),
    ("x = re.sub(r'^\\s*', '> ', s)", "nullable", False),
    ("x = re.sub(r'(?m)^\\s*', '> ', s)", "nullable", False),
    ("x = re.sub(r'(?m)^', '> ', s)", "nullable", False),
    ("x = re.sub(r'(\\w*)', r'\\1', s)", "nullable", False),
    ("x = re.sub(r'(\\w*)', r'<\\1>', s)", "nullable", True),
    ("x = re.sub(r'a*', f, s)", "nullable", False),
    ("x = re.sub(r'a*', '-', s, count=1)", "nullable", False),
    ("x = re.sub(r'(?<=\\d)(?=(?:\\d{3})+$)', ',', s)", "nullable", False),
    ("x = re.sub(r'^\\s+|\\s+$', '', s)", "nullable", False),
    ("x = re.split(rb'-?', s)", "nullable", True),
    ("x = re.split(r'(?<!x)b?', s)", "nullable", True),
    # straddling-range
    ("p = re.compile(r'[A-z]')", "straddling-range", True),
    ("p = re.compile(r'[^A-z]')", "straddling-range", True),
    ("p = re.compile(r'[0-z]')", "straddling-range", True),
    ("p = re.compile(rb'[0-Z]')", "straddling-range", True),
    ("p = re.compile(r'[A-Za-z]')", "straddling-range", False),
    ("p = re.compile(r'[!-~]')", "straddling-range", False),
    ("p = re.compile(r'[A-z\\[-`]')", "straddling-range", False),
    ("p = re.compile(r'[\\W\\wA-z]')", "straddling-range", False),
    # swallowed-escape
    ("p = re.compile('\\bgate\\b')", "swallowed-escape", True),
    ("p = re.compile(r'\\bgate\\b')", "swallowed-escape", False),
    ("p = re.compile('\\\\bgate\\\\b')", "swallowed-escape", False),
    ("p = re.compile('[\\b]x')", "swallowed-escape", False),
    ("p = re.compile('(a)\\1')", "swallowed-escape", True),
    ("p = re.compile('a\\tb')", "swallowed-escape", False),
    ("p = re.compile('a\\tb', re.VERBOSE)", "swallowed-escape", True),
    ("p = re.compile('1\\x2e5')", "swallowed-escape", True),
    ("p = re.compile('1\\x2d5')", "swallowed-escape", False),
    ("p = re.compile('a\\n')", "swallowed-escape", False),
    ("x = re.sub('.\\b', '', s)", "swallowed-escape", False),
    ("x = re.sub('_\\b', '', s)", "swallowed-escape", False),
    ("p = re.compile(b'\\bgate')", "swallowed-escape", True),
    # invalid-pattern
    ("p = re.compile(r'a(b')", "invalid-pattern", True),
    ("p = re.compile(r'(?<=a+)b')", "invalid-pattern", True),
    ("p = re.compile(r'a{2,1}')", "invalid-pattern", True),
    ("p = re.compile(r'a{,1}')", "invalid-pattern", False),
]


@pytest.mark.parametrize(("code", "rule", "found"), CASES, ids=[f"{rule}: {code}" for code, rule, _ in CASES])
def test_verdict(code: str, rule: str, found: bool) -> None:
    findings = lint_source(f"import re\n{code}\n", "case.py", target=(3, 11))
    of_rule = [finding for finding in findings if finding.rule == rule]
    assert bool(of_rule) == found
    for finding in of_rule:
        assert finding.witness is not None or finding.proof
        if isinstance(finding.witness, TextWitness):
            replay(finding, finding.witness.text)


def replay(finding: PlacedFinding, text: str | bytes) -> None:
    """The witness shows on `re` what the finding says."""
    assert finding.pattern is not None
    flags = 0
    for name in finding.flags:
        flags |= getattr(re, name)
    compiled = re.compile(finding.pattern, flags)  # type: ignore[arg-type]
    match finding.rule:
        case "vacuous-test":
            assert finding.mode is not None and getattr(compiled, finding.mode)(text) is not None
        case "nullable":
            empty = [m.start() for m in compiled.finditer(text) if m.start() == m.end()]  # type: ignore[arg-type]
            assert len(empty) >= 2
        case "straddling-range" | "swallowed-escape":
            assert finding.mode is not None
            outcome = getattr(compiled, finding.mode)(text)
            assert isinstance(outcome, re.Match) or outcome is None
        case _:
            raise AssertionError(f"{finding.rule} has a text witness that nobody replays")


NAMED = [
    ("_P = re.compile(r'a$b')\n\nok = _P.search(s) is None\n", "empty-language", "search", 4),
    ("_P = re.compile(r'a*')\n\nok = _P.match(s) is None\n", "vacuous-test", "match", 4),
    ("_P = r'a*'\n\nok = re.match(_P, s) is None\n", "vacuous-test", "match", 4),
    ("_P = re.compile(r'a*')\n\nx = _P.split(s)\n", "nullable", "split", 4),
    ("_P = re.compile(r'^a|b|c$')\n\nok = _P.search(s) is None\n", "lopsided-anchor", "search", 4),
    ("_P = re.compile(r'a+$')\n\ndef f(s):\n    return bool(_P.match(s))\n", "final-newline", "match", 5),
]


@pytest.mark.parametrize(("code", "rule", "function", "line"), NAMED)
def test_the_call_is_named_where_the_pattern_stands_elsewhere(
    code: str, rule: str, function: str, line: int
) -> None:
    (found,) = (each for each in lint_source(f"import re\n{code}", "case.py") if each.rule == rule)
    assert [(each.message, each.path, each.line) for each in found.related] == [
        (f"used here with {function}", "case.py", line)
    ]


def test_no_call_is_named_where_the_pattern_stands_in_it() -> None:
    (found,) = lint_source("import re\nok = re.match(r'a*', s) is None\n", "case.py")
    assert (found.rule, found.related) == ("vacuous-test", ())


def test_one_cause_one_finding() -> None:
    """A pattern that is empty is not also full of dead parts; one that is vacuous is not also nullable."""
    rules = [finding.rule for finding in lint_source("import re\nok = re.match(r'a$(?:b|c)d?', s) is None\n")]
    assert rules == ["empty-language"]
    rules = [finding.rule for finding in lint_source("import re\nok = re.search(r'(?:a|aa)?', s) is None\n")]
    assert rules == ["vacuous-test"]


DEAD_ELSEWHERE_ALIVE = [
    '_A = re.compile(r"\\Ba|b")\nok = bool(_A.fullmatch(t, n))',
    '_Q = re.compile(r"a|ab")\nok = re.fullmatch(_Q, t), re.match(_Q.pattern, t).group()',
    '_R = r"a|ab"\nok = re.match("(?:" + _R + ")$", t), re.match(_R, t).group()',
    'class K:\n    _go = re.compile(r"a|ab")\n    def f(self, t, k):\n        self._go.match(t).group()\n'
    '        getattr(self, f"_{k}").fullmatch(t)',
    '_m = re.compile(r"a|ab")\nm = _m.match(t)\nm.re.fullmatch(t)',
]
"""A part that one use never takes and another does; the other one is not easy to see."""


@pytest.mark.parametrize("code", DEAD_ELSEWHERE_ALIVE)
def test_a_part_is_dead_only_where_no_use_takes_it(code: str) -> None:
    found = lint_source(f"import re\n{code}\n", "case.py", target=(3, 11))
    assert [finding.rule for finding in found if finding.rule == "unreachable-part"] == []


def test_a_shared_text_is_told_once() -> None:
    code = '_R = r"x(?:a|b|c)"\nok = re.match(_R, t), re.match(_R + "y", t)\n'
    found = lint_source(f"import re\n{code}", "case.py", target=(3, 11))
    assert [finding.rule for finding in found] == ["shorter-equivalent"]


def test_a_rule_that_is_off_silences_nothing() -> None:
    code = "import re\nok = re.match(r'x(?:a|a)b', t) is None\n"
    names = tuple(rule.name for rule in RULES)
    off = Settings((3, 11), names, only=frozenset({"shorter-equivalent"}))
    assert [finding.rule for finding in lint_source(code, "case.py", settings=off)] == ["shorter-equivalent"]


def test_a_match_from_within_a_text_is_called_a_match() -> None:
    code = (
        "import re\n_A = re.compile(r'$a')\n_B = re.compile(r'in|into')\n\n\n"
        "def read(text, at):\n    return _A.match(text, at) or _B.match(text, at).group()\n"
    )
    (never,) = (each for each in lint_source(code, "case.py") if each.rule == "empty-language")
    assert (never.mode, never.message) == (
        "match",
        "nothing matches this pattern in match, from whatever place",
    )
    (part,) = (each for each in lint_source(code, "case.py") if each.rule == "unreachable-part")
    assert part.mode == "match"
