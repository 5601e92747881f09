"""Siblings: what is called covered or equal never gets its turn, and what is not called so does, says `re`.

The twin of a verdict is a simulation: the members are asked in their order, each by `re`, on every short text. The
twin of the reading of a program is the program: its function is run on every short text with a table whose rows
tell which of them won.
"""

from __future__ import annotations

import itertools
import random
import re
from collections import Counter
from dataclasses import replace
from typing import Any

import pytest

from patlint import lint_source
from patlint.config import Settings
from patlint.language import Language
from patlint.limits import DEFAULT_LIMITS, Limits
from patlint.machine.cover import Rivals
from patlint.outcome import lint_module
from patlint.placed import PlacedFinding
from patlint.rules import check_family
from patlint.rules.finding import Finding, TextWitness
from patlint.rules.registry import NAMES
from patlint.source import read_module
from patlint.source.sites import Family, Member, Mode, Order, Place, Site, Trial
from tests.rules.support import ALL_RULES, HERE, site

TEXTS = ["".join(text) for size in range(6) for text in itertools.product("ab\n", repeat=size)]
MODES: tuple[Mode, ...] = ("match", "fullmatch", "search")
SIBLINGS = frozenset({"equal-siblings", "covered-sibling"})


def family(members: list[Member], positioned: bool = False, order: Order = "first") -> Family:
    return Family("table", order, tuple(members), (Trial(HERE, positioned),))


def member(
    pattern: str | bytes,
    mode: Mode = "match",
    line: int = 1,
    takes: bool = True,
    flags: int = 0,
    step: int = 0,
) -> Member:
    made = replace(site(pattern, mode, flags=flags), place=Place(line, 1, line, 9))
    return Member(made, (mode,), takes, step or line, "")


def found_in(given: Family, limits: Limits = DEFAULT_LIMITS) -> dict[int, Finding]:
    """Equal and covered members by their number."""
    checked = check_family(given, None, limits, SIBLINGS, {})
    numbers = {id(each): number for number, each in enumerate(given.members)}
    return {numbers[id(each)]: finding for each, finding in checked.findings}


def random_pattern(generator: random.Random, depth: int) -> str:
    if depth == 0 or generator.random() < 0.25:
        return generator.choice(
            [
                "a",
                "b",
                "a",
                "b",
                "ab",
                "ba",
                ".",
                "[ab]",
                "",
                "^",
                "$",
                r"\b",
                "(?=a)",
                "(?!b)",
                r"\n",
                "(?<=a)",
            ]
        )
    inner = [random_pattern(generator, depth - 1) for _ in range(2)]
    return generator.choice(
        [
            f"{inner[0]}{inner[1]}",
            f"{inner[0]}{inner[1]}",
            f"(?:{inner[0]}|{inner[1]})",
            f"(?:{inner[0]})" + generator.choice(["*", "+", "?", "{2}"]),
        ]
    )


def asked(given: Family, text: str, position: int) -> set[int]:
    """The members that match where they are asked: up to the first that takes."""
    hits = set()
    for number, each in enumerate(given.members):
        pattern = each.site.pattern
        if isinstance(pattern, str) and getattr(re.compile(pattern, each.site.flags), each.modes[0])(
            text, position
        ):
            hits.add(number)
            if each.takes:
                break
    return hits


def language(given: Member) -> Language:
    return Language(given.site.pattern, given.site.flags, given.modes[0])


def winning_text(given: Family, number: int) -> str | None:
    """A text on which a member is the first of those that take, from the algebra of languages."""
    rest = language(given.members[number])
    for each in given.members[:number]:
        if each.takes:
            rest = rest - language(each)
    text = rest.shortest()
    assert text is None or isinstance(text, str)
    return text


@pytest.mark.parametrize("positioned", [False, True])
def test_the_dead_never_match_and_the_others_do(positioned: bool) -> None:
    generator = random.Random(20261201 + positioned)
    dead = alive = several = 0
    for _ in range(300):
        patterns = [random_pattern(generator, 2) for _ in range(generator.randint(3, 7))]
        if generator.random() < 0.3:
            patterns.append(
                "(?:" + "|".join(generator.sample(patterns, 2)) + ")" + generator.choice(["", "a?", "b"])
            )
        modes = ("match", "search") if positioned else generator.choice([MODES[:1], MODES[:2], MODES])
        members = [
            member(
                pattern,
                generator.choice(modes),  # type: ignore[arg-type]
                line,
                generator.random() < 0.85,
                generator.choice([0, 0, 0, re.MULTILINE, re.DOTALL]),
            )
            for line, pattern in enumerate(patterns, 1)
        ]
        given = family(members, positioned)
        found = found_in(given)
        winners: set[int] = set()
        for text in TEXTS:
            for position in range(len(text) + 1 if positioned else 1):
                winners |= asked(given, text, position)
        assert not winners & found.keys(), [each.site.pattern for each in members]
        dead += len(found)
        several += sum(len(finding.related) > 1 for finding in found.values())
        for number, finding in found.items():
            if isinstance(finding.witness, TextWitness):
                text = finding.witness.text
                compiled = re.compile(members[number].site.pattern, members[number].site.flags)
                assert getattr(compiled, members[number].modes[0])(text)
        if not positioned:
            for number in set(range(1, len(members))) - found.keys():
                text = winning_text(given, number)
                if text is None:  # it matches nothing at all, or all is caught before and that was told once
                    assert language(members[number]).is_empty() or any(
                        each.takes and language(each).is_universal() for each in members[:number]
                    )
                else:
                    alive += number in asked(given, text, 0)
                    assert number in asked(given, text, 0)
    assert dead > 150 and several > 8 and (positioned or alive > 400)


CASES: list[tuple[list[Member], dict[int, tuple[str, str]]]] = [
    ([member("[a-z]+", line=1), member("load", line=2)], {1: ("covered-sibling", "warning")}),
    ([member("load", line=1), member("[a-z]+", line=2)], {}),
    ([member("[a-z]+", "fullmatch", 1), member("load 5", "fullmatch", 2)], {}),
    ([member("[a-z]+", "match", 1), member("load 5", "match", 2)], {1: ("covered-sibling", "warning")}),
    ([member("a", line=1), member("b", line=2), member("[ab]c", line=3)], {2: ("covered-sibling", "warning")}),
    ([member("a", line=1, takes=False), member("ab", line=2)], {}),
    ([member("[0-9]{2}", line=1), member("[0-9][0-9]", line=2)], {1: ("equal-siblings", "warning")}),
    ([member("a|b", line=1), member("[ab]x?", line=2)], {1: ("equal-siblings", "warning")}),
    ([member("a|b", "fullmatch", 1), member("[ab]x?", "fullmatch", 2)], {}),
    ([member("a", line=1), member(b"a", line=2)], {}),
    ([member("a", line=1), member("A", line=2)], {}),
    ([member("a", line=1, flags=re.I), member("A", line=2)], {1: ("covered-sibling", "warning")}),
    ([member(r"(a|b)\1", line=1), member("aa", line=2)], {}),  # a superset takes nothing for sure
    ([member("[ab]", line=1), member(r"(a|b)\1", line=2)], {1: ("covered-sibling", "warning")}),
    ([member("(", line=1), member("a", line=2), member("ab", line=3)], {2: ("covered-sibling", "warning")}),
    ([member("a", line=1), member("a$b", line=2), member("(?!)", line=3)], {}),  # these match nothing anyway
    ([member("a", line=1, step=1), member("ab", line=2, step=1)], {1: ("covered-sibling", "note")}),
    ([member("a", line=1, step=1), member("a", line=2, step=1)], {1: ("equal-siblings", "warning")}),
    # one catch-all, one finding
    ([member("", line=1), member("a", line=2), member("b", line=3)], {1: ("covered-sibling", "warning")}),
    # equal to a later one of those that cover it
    ([member("a", line=1), member("b", line=2), member("ab", line=3), member("ab", line=4)],
     {2: ("covered-sibling", "warning"), 3: ("equal-siblings", "warning")}),
]  # fmt: skip


@pytest.mark.parametrize(("members", "expected"), CASES)
def test_cases(members: list[Member], expected: dict[int, tuple[str, str]]) -> None:
    found = found_in(family(members))
    assert {number: (finding.rule, finding.level) for number, finding in found.items()} == expected


def test_a_position_sees_what_stands_before() -> None:
    members = [member("^[ab]", line=1), member("a", line=2)]
    assert found_in(family(members)).keys() == {1}
    assert found_in(family(members, positioned=True)) == {}
    assert found_in(family([member(r"\ba", line=1), member(r"a", line=2)], positioned=True)) == {}
    assert found_in(family([member("a", line=1), member(r"\bab", line=2)], positioned=True)).keys() == {1}
    # a look-behind sees more than one character: nothing is said
    assert found_in(family([member("(?<=a)b|b", line=1), member("b", line=2)], positioned=True)) == {}


def test_every_trial_must_agree() -> None:
    rows = [Member(site("[a-z]+"), ("match", "fullmatch")), Member(site("load 5"), ("match", "fullmatch"))]
    both = Family("table", "first", tuple(rows), (Trial(HERE), Trial(HERE)))
    assert found_in(both) == {}
    once = replace(
        both, members=tuple(replace(each, modes=("match",)) for each in rows), trials=(Trial(HERE),)
    )
    assert found_in(once).keys() == {1}


def test_where_the_order_is_not_known_only_twins_count() -> None:
    def twins(*rows: tuple[str, str | None, int], named: bool = False, order: Order = "unknown") -> list[int]:
        members = [Member(site(pattern, flags=flags), (), True, 0, rest) for pattern, rest, flags in rows]
        return sorted(found_in(Family("table", order, tuple(members), (), named)))

    assert twins(("a", "", 0), ("b", "", 0), ("a", "", 0)) == [2]
    assert twins(("[0-9]{2}", "", 0), ("[0-9][0-9]", "", 0), order="independent") == [1]
    assert twins(("a", "f", 0), ("a", "g", 0)) == []  # two handlers for one pattern
    assert twins(("a", None, 0), ("a", None, 0)) == []
    assert twins(("a", "", 0), ("a", "", 2)) == []
    assert twins(("a", "", 0), ("a", "", 0), named=True) == []
    assert twins(("a|ab", "", 0), ("ab?", "", 0)) == []  # the same texts, not the same spans
    assert twins(("(a)b", "", 0), ("a(b)", "", 0)) == []  # groups may be asked for
    assert twins(("(a)b", "", 0), ("(a)b", "", 0)) == [1]
    assert twins(("(a)\\1", "", 0), ("(a)\\1", "", 0)) == [1]


def test_a_limit_leaves_one_member_open_and_is_told() -> None:
    members = [
        member("[a-z]{1,40}x", line=1),
        member("[a-y]{2,40}x", line=2),
        member("b", line=3),
        member("bb", line=4),
    ]
    small = replace(DEFAULT_LIMITS, product=5)
    checked = check_family(family(members), None, small, SIBLINGS, {})
    assert [(each.site.place.line, limit) for each, limit in checked.undecided] == [(2, "product")]
    assert [each.site.place.line for each, _ in checked.findings] == [4]
    deep = check_family(family([member("(a|b)*a(a|b){9}", line=1), member("a", line=2)]), None,
                        replace(DEFAULT_LIMITS, states=20), SIBLINGS, {})  # fmt: skip
    assert [(each.site.place.line, limit) for each, limit in deep.undecided] == [(1, "states")]


def test_messages() -> None:
    found = found_in(family([member("a", line=4), member("b", line=5), member("[ab]c", line=6)]))[2]
    assert found.message == "everything that this pattern matches is taken by 2 earlier ones together"
    assert found.evidence == "'ac' is taken by the one of line 4; 'bc' is taken by the one of line 5"
    assert [each.message for each in found.related] == ["takes 'ac'", "takes 'bc'"]
    assert found.proof == "its texts lie within those of the patterns before it, in every trial"
    found = found_in(family([member("[a-z]+", line=4), member("load", line=6)]))[1]
    assert found.message == "everything that this pattern matches is taken by an earlier one of its family"
    assert found.evidence == "this text is taken by the pattern of line 4, like all others"
    assert found.witness == TextWitness("load")
    found = found_in(family([member("ab", line=4), member("a(?:b)", line=6)]))[1]
    assert found.message == "this pattern is that of line 4 in other words"
    assert found.evidence == "both take exactly the same texts, and the one of line 4 is tried first"
    assert found.proof == "both patterns have the same minimal automaton"


def test_hundreds_of_members_need_few_comparisons(monkeypatch: pytest.MonkeyPatch) -> None:
    """Counted, not timed: a member that one text tells apart is not compared with any other."""
    calls = 0
    walk = Rivals._walk

    def counted(*given: Any) -> Any:
        nonlocal calls
        calls += 1
        return walk(*given)

    monkeypatch.setattr(Rivals, "_walk", counted)
    words = [f"{a}{b}{c}" for a in "abcdefg" for b in "hijklmn" for c in "opqrst"]
    members = [member(rf"{word}[0-9]+", "match", line) for line, word in enumerate(words, 1)]
    members.append(member("(?:abc|aho|bip)[0-9]{2}", "match", 999))
    members.append(member("(?:aho|bip)[0-9]{2}", "match", 1000))
    assert len(members) > 290
    assert found_in(family(members)).keys() == {len(members) - 1}
    assert calls < 40


OVERLAPS = [
    (["[0-9]+", "[0-9]{4}|today"], {1: "0000"}),
    (["[0-9]{5,}", "[0-9]{4}|today"], {}),
    (["[0-9]+", "[0-9]{4}"], {}),  # covered: told there
    (["a+", "b+", "[ab]|c"], {2: "a"}),
]


@pytest.mark.parametrize(("patterns", "expected"), OVERLAPS)
def test_overlaps(patterns: list[str], expected: dict[int, str]) -> None:
    given = family([member(each, "fullmatch", line) for line, each in enumerate(patterns, 1)])
    checked = check_family(given, None, DEFAULT_LIMITS, frozenset({"overlapping-siblings"}), {})
    assert {each.site.place.line - 1: finding.witness for each, finding in checked.findings} == {
        number: TextWitness(text) for number, text in expected.items()
    }
    searches = family([member(each, "search", line) for line, each in enumerate(patterns, 1)])
    assert not check_family(searches, None, DEFAULT_LIMITS, frozenset({"overlapping-siblings"}), {}).findings


# --- programs, run on every short text ---

PROGRAMS = [
    # a table of rows, left by return
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    m = p.fullmatch(s)\n    if m is not None:\n      return n\n",
    "T = ({rows},)\ndef f(s):\n  for p, n in T:\n    m = p.search(s)\n    if not m: continue\n    return n\n",
    "T = [{rows}]\ndef f(s):\n  for i, (p, n) in enumerate(T):\n    m = p.match(s)\n    if m: break\n  else: n = None\n"
    "  return n\n",
    "T = [{rows}]\ndef f(s):\n  for row in T:\n    if row[0].match(s): return row[1]\n",
    "T = [{rows}]\ndef f(s):\n  for row in T:\n    p, n = row\n    if (m := p.match(s)): return n\n",
    "T = {{{items}}}\ndef f(s):\n  for p, n in T.items():\n    if p.match(s): return n\n",
    "T = {{{turned}}}\ndef f(s):\n  for n, p in T.items():\n    if p.match(s): return n\n",
    "class A:\n  T = [{rows}]\n  def f(self, s):\n    for p, n in self.T:\n      if p.match(s): return n\n"
    "f = A().f\n",
    "class A:\n  def __init__(self):\n    self.t = [{rows}]\n  def f(self, s):\n    for p, n in self.t:\n"
    "      if p.match(s): return n\nf = A().f\n",
    "T = [{rows}]\ndef f(s):\n  return next((n for p, n in T if p.match(s)), None)\n",
    "def f(s):\n  return next((n for p, n in [{rows}] if p.fullmatch(s)), None)\n",
    "T = [{bound}]\ndef f(s):\n  for match, n in T:\n    if match(s): return n\n",
    # texts, compiled on the way
    "def f(s):\n  for n, p in ({texts},):\n    if re.match(p, s): return n\n",
    "T = [{texts}]\ndef f(s):\n  for n, p in T:\n    rx = re.compile(p)\n    if rx.match(s): return n\n",
    "T = [(re.compile(p), n) for n, p in [{texts}]]\ndef f(s):\n  for p, n in T:\n    if p.match(s): return n\n",
    "def f(s):\n  return next((n for n, p in [{texts}] if re.search(p, s)), None)\n",
    # tests one after the other
    "def f(s):\n  if re.match({0!r}, s): return 0\n  elif re.match({1!r}, s): return 1\n"
    "  elif re.match({2!r}, s): return 2\n",
    "A, B = re.compile({0!r}), re.compile({1!r})\ndef f(s):\n  m = A.match(s)\n  if m: return 0\n  x = 1\n"
    "  m = B.match(s)\n  if m is not None: return 1\n  if re.fullmatch({2!r}, s) and x: return 2\n",
    "def f(s):\n  while True:\n    if re.match({0!r}, s):\n      n = 0\n      break\n"
    "    elif re.match({1!r}, s): return 1\n"
    "    if re.search({2!r}, s): return 2\n    return None\n  return n\n",
    "A = re.compile({0!r})\nB = re.compile({1!r})\nC = re.compile({2!r})\ndef f(s):\n"
    "  m = A.match(s) or B.match(s) or C.match(s)\n  return m and [A, B, C].index(m.re)\n",
    "def f(s):\n  if (m := re.match({0!r}, s)): return 0\n  if s == 'b': return None\n"
    "  if re.match({1!r}, s): return 1\n  elif len(s) < 2: pass\n  elif re.match({2!r}, s): return 2\n",
]
"""Programs whose function gives the number of the row that won; `\\0` stands where a row's number goes."""

DECLINING = [
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if p.match(s) and n != 0: return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    m = p.match(s)\n    if m:\n"
    "      if not n: continue\n      return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if p.match(s):\n      if n: return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if n == 0: continue\n    if p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    s = s[1:]\n    if p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if p.match(s): yes = n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in reversed(T):\n    if p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T[1:]:\n    if p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if p.match(s[n:]): return n\n",
    "T = [{rows}]\nT.sort(key=str)\ndef f(s):\n  for p, n in T:\n    if p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if not p.match(s): return n\n",
    "T = [{rows}]\ndef f(s):\n  return [n for p, n in T if p.match(s)]\n",
    "T = [{rows}]\ndef f(s, g):\n  for p, n in T:\n    try:\n      if p.match(s): return g(n)\n"
    "    except ValueError: pass\n",
    "T = [{rows}]\ndef f(s, it):\n  for p, n in T:\n    if p.match(next(it)): return n\n",
    "T = set([{rows}])\ndef f(s):\n  for p, n in T:\n    if p.match(s): return n\n",
    "T = {{{items}}}\ndef f(s):\n  return T[s].match(s)\n",
    "T = [{rows}]\ndef f(s):\n  for p, n in T:\n    if p.match(s):\n      x = n\n      continue\n    return n\n",
    "def f(s):\n  if re.match({0!r}, s): return 0\n  elif (s := s[1:]) == 'x': return None\n"
    "  elif re.match({1!r}, s): return 1\n",
    "def f(s):\n  if s and re.match({0!r}, s): return 0\n  elif s and re.match({1!r}, s): return 1\n",
    "def f(s):\n  if re.match({0!r}, s): x = 0\n  if re.match({1!r}, s): return 1\n  if re.match({2!r}, s): return 2\n",
    "def f(s):\n  if re.match({0!r}, s): return 0\n  s = s.strip('a')\n  if re.match({1!r}, s): return 1\n"
    "  del s\n  if re.match({2!r}, s): return 2\n",
    "def f(s, t):\n  if re.match({0!r}, s): return 0\n  elif re.match({1!r}, t): return 1\n",
    "def f(s):\n  if not re.match({0!r}, s): return 0\n  elif re.match({1!r}, s): return 1\n",
    "def f(s):\n  m = re.match({0!r}, s)\n  s = s + 'a'\n  if m: return 0\n  if re.match({1!r}, s): return 1\n",
    "def f(s):\n  try:\n    if re.match({0!r}, s): return g()\n  except ValueError: pass\n"
    "  if re.match({1!r}, s): return 1\n",
    "class A:\n  def f(self):\n    if re.match({0!r}, self.s): return 0\n    self.s = 'b'\n"
    "    if re.match({1!r}, self.s): return 1\n",
    "class A:\n  def f(self):\n    if re.match({0!r}, self.s): return 0\n    self.step()\n"
    "    if re.match({1!r}, self.s): return 1\n",
    "class A:\n  def f(self):\n    if re.match({0!r}, self.s): return 0\n"
    "    elif self.step() and re.match({1!r}, self.s): return 1\n",
    "def f(s):\n  def g():\n    nonlocal s\n    s = 'b'\n  if re.match({0!r}, s): return 0\n  g()\n"
    "  if re.match({1!r}, s): return 1\n",
]
"""Programs in which an earlier match does not keep the later rows from being asked."""


def program(template: str, patterns: list[str]) -> str:
    numbered = list(enumerate(patterns))
    return "import re\n" + template.format(
        *patterns,
        rows=",\n ".join(f"(re.compile({each!r}), {n})" for n, each in numbered),
        items=",\n ".join(f"re.compile({each!r}): {n}" for n, each in numbered),
        turned=",\n ".join(f"{n}: re.compile({each!r})" for n, each in numbered),
        bound=",\n ".join(f"(re.compile({each!r}).match, {n})" for n, each in numbered),
        texts=",\n ".join(f"({n}, {each!r})" for n, each in numbered),
    )


def siblings(source: str) -> list[PlacedFinding]:
    return lint_source(source, "made.py", settings=Settings((3, 11), NAMES, only=SIBLINGS))  # type: ignore[return-value]


def simple_pattern(generator: random.Random) -> str:
    return generator.choice(["", "a", "b", "[ab]", "ab"]) + generator.choice(
        ["", "", "a*", "b+", "b?", "$", "[ab]"]
    )


@pytest.mark.parametrize("template", PROGRAMS)
def test_programs_never_come_to_a_row_that_is_called_dead(template: str) -> None:
    generator = random.Random(template)
    told = Counter[str]()
    for _ in range(40):
        patterns = list(dict.fromkeys(simple_pattern(generator) for _ in range(12)))[:3]
        if generator.random() < 0.3:
            patterns[2] = f"(?:{patterns[generator.randrange(2)]})"
        source = program(template, patterns)
        findings = siblings(source)
        space: dict[str, Any] = {}
        exec(compile(source, "made.py", "exec"), space)
        winners = {space["f"](text) for text in TEXTS}
        dead = set()
        for finding in findings:
            told[finding.rule] += 1
            (number,) = {n for n, each in enumerate(patterns) if each == finding.pattern}
            dead.add(number)
        assert not winners & dead, (source, patterns, dead)
        # and the other way round: what never wins is told, but for what matches nothing and what follows a catch-all
        if not dead and None in winners and "pass" not in template:
            silent = {n for n, each in enumerate(patterns) if n not in winners}
            assert not [n for n in silent if any(re.search(patterns[n], text) for text in TEXTS)], source
    assert told["covered-sibling"] >= 5 and told["equal-siblings"] >= 2, told


@pytest.mark.parametrize("template", DECLINING)
def test_programs_that_may_decline_say_nothing(template: str) -> None:
    for patterns in (["[ab]+", "a", "b"], ["a", "ab", "a$"]):
        source = program(template, patterns)
        assert siblings(source) == (), source


def test_a_finding_is_told_once_and_silences_what_it_makes_idle() -> None:
    source = (
        "import re\nA = re.compile('[a-z]+')\nB = re.compile('(?:a|b)')\n"
        "def f(s):\n  if A.match(s): return 1\n  elif B.match(s): return 2\n"
        "def g(s):\n  if A.match(s): return 1\n  elif B.match(s): return 2\n"
    )
    findings = lint_source(source, "made.py")
    assert [(each.rule, each.line) for each in findings] == [("covered-sibling", 3)]
    assert [
        (each.path, each.line, each.column, each.end_line, each.end_column) for each in findings[0].related
    ] == [("made.py", 2, 17, 2, 23)]


def test_one_pattern_asked_twice() -> None:
    source = (
        "import re\nA = re.compile('a+')\ndef f(s):\n  if A.match(s): return 1\n"
        "  if A.fullmatch(s): return 2\n  elif A.match(s): return 3\n"
    )
    equal, covered = sorted(siblings(source), key=lambda finding: finding.rule, reverse=True)
    assert (equal.rule, equal.message) == (
        "equal-siblings",
        "this pattern has been tried on the same text before",
    )
    assert [(place.line, place.column) for place in equal.related] == [(4, 6)]
    assert covered.rule == "covered-sibling" and [place.line for place in covered.related] == [4]


def test_waivers_and_levels() -> None:
    source = (
        "import re\ndef f(s):\n  if re.match('[a-z]+', s): return 1\n"
        "  elif re.match('ab', s): return 2  # patlint: waive covered-sibling -- kept for later\n"
    )
    settings = Settings((3, 11), NAMES)
    outcome = lint_module(read_module(source, "made.py"), settings)
    assert (outcome.findings, outcome.waived) == ((), 1)
    moved = source.replace("'ab'", "'1b'")
    assert [each.rule for each in lint_source(moved, "made.py")] == ["stale-waiver"]
    bare = source.replace("# patlint: waive covered-sibling -- kept for later", "")
    louder = Settings((3, 11), NAMES, levels=(("covered-sibling", "error"),))
    assert [each.level for each in lint_source(bare, "made.py", settings=louder)] == ["error"]
    off = Settings((3, 11), NAMES, skip=frozenset({"covered-sibling"}))
    assert lint_source(bare, "made.py", settings=off) == ()


def test_an_undecided_family_keeps_a_waiver_from_being_stale() -> None:
    source = (
        "import re\ndef f(s):\n  if re.match('[a-z]{1,40}x', s): return 1\n"
        "  elif re.match('[a-y]{2,40}x', s): return 2  # patlint: waive covered-sibling -- it is\n"
    )
    few = Settings(
        (3, 11), NAMES, only=SIBLINGS | {"stale-waiver"}, limits=replace(DEFAULT_LIMITS, product=5)
    )
    outcome = lint_module(read_module(source, "made.py"), few)
    assert outcome.findings == ()
    assert [(each.line, each.reason) for each in outcome.undecided] == [(4, "product")]
    enough = lint_module(read_module(source, "made.py"), Settings((3, 11), NAMES))
    assert (enough.findings, enough.waived, enough.undecided) == ((), 1, ())


JOINED = [
    # rows, template, dead rows
    (["a", "ab", "b"], "'|'.join(T)", [1]),
    (["ab", "a", "b"], "'|'.join(T)", []),
    (["a", "b", "[ab]c"], "'(?:' + '|'.join(T) + ')'", [2]),
    (["a", "ab", "b"], "'(?:' + '|'.join(T) + ')c'", []),
    (["a|b", "ab|ba"], "'|'.join(T)", [1]),
    (["a", "ab"], "'|'.join('(' + p + ')' for p in T)", [1]),
    (["a", "ab", "b"], "'|'.join('(?P<x%d>%s)' % (1, p) for p in T[:1]) + '|ab'", []),
]


@pytest.mark.parametrize(("rows", "joined", "dead"), JOINED)
def test_rows_of_joined_alternations(rows: list[str], joined: str, dead: list[int]) -> None:
    lines = "".join(f"    {row!r},\n" for row in rows)
    source = (
        f"import re\nT = [\n{lines}]\ndef f(s):\n    m = re.match({joined}, s)\n    return m and m.group()\n"
    )
    found = lint_source(source, "made.py")
    assert [(each.rule, each.line - 3) for each in found if each.rule in SIBLINGS] == [
        ("covered-sibling", row) for row in dead
    ]
    assert "ab" not in rows[-1:] or not [each for each in found if each.rule == "unreachable-part" and dead]
    for each in found:
        if each.rule == "covered-sibling":
            assert each.related and all(place.line - 3 < each.line - 3 for place in each.related)


def test_rows_joined_twice_are_dead_only_in_both() -> None:
    source = (
        "import re\nT = [\n 'a',\n 'ab',\n]\ndef f(s):\n  m = re.match('|'.join(T), s)\n  return m and m.group()\n"
        "def g(s):\n  m = re.match('(?:' + '|'.join(T) + ')c', s)\n  return m and m.group()\n"
    )
    assert [each.rule for each in lint_source(source, "made.py")] == []


def test_every_rule_is_on_for_families_here() -> None:
    assert SIBLINGS | {"overlapping-siblings"} <= ALL_RULES
    assert isinstance(member("a").site, Site)
