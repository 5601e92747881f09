r"""How the number of steps of CPython's `re` grows: one row for each claim of the project's experiments.

Source: timing of `re` on CPython 3.9.18, 3.10.13, 3.11.7, 3.12.1 and 3.13.0 by CPU time on doubling sizes (or
step by step where exponential), about 1,430 combinations of pattern, manner and text. The section numbers are
those of that report; 9 (memory) and 10 (method) have no rows, and two rows of section 1 and 6 are left out:
the minimal width (`(?:a|a)*.{3000}b` is free up to n = 3000) and the copying of groups, which are not steps.

A row is (pattern, manner, text, growth): the text is (prefix, pump, suffix), the growth a degree in n (0: does
not grow) or the factor for each pump, written as a `Base`. Manner "scan" stands for findall, finditer, sub and
split. Where no text is given it is a^n for match and scan, a^n! for search and fullmatch.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

Text: TypeAlias = tuple[str, str, str]


@dataclass(frozen=True, slots=True)
class Base:
    """Exponential growth by this factor for each pump."""

    factor: float


@dataclass(frozen=True, slots=True)
class Row:
    section: int
    pattern: str
    manner: str
    text: Text
    growth: int | Base

    @property
    def key(self) -> tuple[str, str, Text]:
        return self.pattern, self.manner, self.text


E2 = Base(2.0)
E162 = Base(1.62)
A: Text = ("", "a", "")
A_BANG: Text = ("", "a", "!")
A_X: Text = ("", "a", "x")
X: Text = ("", "x", "")
SPACES_X: Text = ("", " ", "x")
LINES: Text = ("", "\n", "")


def _rows(
    section: int, manner: str, growth: int | Base, patterns: str, text: Text | None = None
) -> list[Row]:
    """`patterns` stand between blanks; a blank in a pattern is not needed here."""
    family = text if text is not None else A_BANG if manner in ("search", "fullmatch") else A
    return [Row(section, pattern, manner, family, growth) for pattern in patterns.split()]


ROWS: tuple[Row, ...] = (
    # 1. What changes the degree and what does not
    *_rows(1, "match", 1, "a*b a*[bc]"),
    *_rows(1, "match", 2, "a*a*b a*a*[bc] .*.*="),
    *_rows(1, "match", 3, "a*a*a*b a*a*a*[bc]"),
    *_rows(1, "scan", 1, "(?s)a(?=.*) (?s)a(?=.*$)"),
    *_rows(1, "scan", 2, r"a(?=[^x]*) (?s)a(?=.*?$) a(?=.*) a(?=[\s\S]*) a(?=(?:.|\n)*)"),
    *_rows(1, "search", 1, "(?s)a(?>.*)y"),
    *_rows(1, "search", 2, "a(?>.*)y (?s)a.*y"),
    *_rows(1, "match", 1, r"(?:a?)*b (?:a|)*b (?:|a)*b (?:a??)*b (?:\b|a)*b"),
    *_rows(1, "match", E2, "(a*)*b (?:a*)*b"),
    # 2. Ambiguous loops need a failure
    *_rows(2, "match", 1, "(?:a|a)* (?:a|aa)*b? (a*)* (a+)+", A_BANG),
    *_rows(2, "fullmatch", E2, "(?:a|a)* (a*)* (a+)+"),
    *_rows(2, "fullmatch", E162, "(?:a|aa)*b?"),
    *_rows(2, "match", 1, "(a*)* (a+)+"),
    *_rows(2, "fullmatch", 1, "(a*)* (a+)+", A),
    *_rows(2, "match", 0, "(?:a|aa)*?", A_BANG),
    *_rows(2, "fullmatch", E162, "(?:a|aa)*?"),
    *_rows(2, "match", 1, "(?:a|aa)*.*", A_BANG),
    *_rows(2, "fullmatch", 1, "(?:a|aa)*.*"),
    *_rows(2, "match", 1, "(?:a|aa)*(?:b|) (?:a|aa)*(?!b) (?:a|aa)*aaaaa", A_X),
    *_rows(2, "fullmatch", E162, "(?:a|aa)*(?:b|) (?:a|aa)*(?!b) (?:a|aa)*aaaaa", A_X),
    *_rows(2, "match", E162, r"(?:a|aa)*$ (?:a|aa)*(?:b|$) (?:a|aa)*\b", A_X),
    *_rows(2, "fullmatch", E162, r"(?:a|aa)*$ (?:a|aa)*(?:b|$) (?:a|aa)*\b", A_X),
    *_rows(2, "match", 1, "(?:a|aa)*$ (?:a|aa)*(?:b|$)", ("", "a", "\n")),
    *_rows(2, "fullmatch", E162, "(?:a|aa)*$ (?:a|aa)*(?:b|$)", ("", "a", "\n")),
    *_rows(2, "match", 1, r"(?:a|aa)*\b (?:a|aa)*[^a]", A_BANG),
    *_rows(2, "fullmatch", E162, r"(?:a|aa)*\b"),
    *_rows(2, "match", E162, "(?:a|aa)*[^a]"),
    *_rows(2, "fullmatch", E162, "(?:a|aa)*[^a]", A),
    *_rows(2, "fullmatch", 1, "(?:a|aa)*[^a]", A_BANG),
    *_rows(2, "match", E162, "(?:a|aa)*b|a"),
    *_rows(2, "match", E2, "(?:a*?)*?b (?:a+?)+?b (?:a|a)*b (?:a*){3,}b"),
    *_rows(2, "match", 2, r"a*?a*?b [^\W_]*(?:\w|-)*! a*b?a*c a*a{0,50}a*b"),
    *_rows(2, "match", 3, "(?:a*){3}b (a*){0,3}b"),
    *_rows(2, "match", Base(3.0), "(?:a|a|a)*b (?:(?:a?)*)*b"),
    *_rows(2, "match", E162, "(?:a|aa)*b (?:aa?)*b (?:a{1,2})*b"),
    *_rows(2, "match", Base(1.32), "(?:aa|aaa)*b"),
    *_rows(2, "match", 1, "(?:a{2})*b"),
    *_rows(2, "match", Base(2.4), "(?:(?:a?){2})*b"),
    *_rows(2, "match", 2, "[a-z]*x[a-z]*y", X),
    *_rows(2, "match", 1, "[a-z]*x[a-z]*y", ("", "z", "")),
    # 3. Equal paths that read nothing
    *_rows(
        3, "match", E2, "(?:a(?:x?)?)*b (?:a(?:x*)*)*b (?:a(?:x?)+)*b (?:a(?:x*)?)*b (?:a(x?)?)*b (?:a()?)*b"
    ),
    *_rows(3, "match", E2, r"(?:a(?:x?){0,2})*b (?:a(?:x?){1,2})*b (?:a(?:x|)?)*b (?:a(?:-?\s?)?)*b"),
    *_rows(3, "match", E2, r"(?:a(?:x?|y?))*b (?:(?:|)a)*b (?:(?:(?=a)|(?=.))a)*b (?:a(?:\B|))*c"),
    *_rows(3, "match", 1, "(?:ax?y?)*b (?:a(?:x+)?)*b (?:a(?:x?){2})*b (?:a(?:x?){1})*b (?:a(?:x|y)?)*b"),
    *_rows(3, "match", 1, "(?:a(?:|x))*b (?:a(?:x?y)?)*b (?:a(?>(?:x?)?))*b (?:a(?:x?)?+)*b"),
    *_rows(3, "match", 1, r"(?:a(?=(?:x?)?))*b (?:a(?:\b|))*c (?:a|x?|y?)*b (?:a|(?:x?)?)*b"),
    # 4. Alternations after the parser
    *_rows(4, "match", 1, r"(?:a|b|a)*! (?:a|a|c)*! (?:a|[ab])*! (?:[ab]|[ac])*! (?i)(?:a|A)*! (?:.|\n)*!"),
    *_rows(4, "match", 1, r"(?:\s|\S)*!"),
    *_rows(4, "match", 1, r"(?:\w|\d)*!", ("", "1", "")),
    *_rows(4, "match", 1, "(?i)(?:k|K)*!", ("", "k", "")),
    *_rows(4, "match", 1, "(?:ab|ac|ab)*!", ("", "ab", "")),
    *_rows(4, "match", 1, "(?:ax|ay|ax)*!", ("", "ax", "")),
    *_rows(4, "match", E2, "(?:a|a)*! (?:.|a)*! (?:[^b]|a)*! (?:a|(a))*! (?:(?i:a)|a)*! (?:a(?!b)|a)*c"),
    *_rows(4, "match", E2, "(?:ab|ab)*!", ("", "ab", "")),
    *_rows(4, "match", E2, "(?:xab|xcb|xab)*!", ("", "xab", "")),
    # 5. search: every offset starts afresh
    *_rows(5, "search", 2, r"a*y a+$ a*$ a*\Z .*= [^=]+= .*?y x?a*y (?=a)a*y (^)?a*b a*^b .*^a!"),
    *_rows(5, "search", 2, "(?>a*)b a*+b (?:a++)*b"),
    *_rows(5, "search", 1, r"^a+$ \Aa*b (?:^|x)a*b (?=^)a*b xa*y a{0,5}$ (?<!a)a+$ \ba+$ a* ab.*y"),
    *_rows(5, "search", 0, "a*?"),
    *_rows(5, "search", 2, r"\s+$ (?:\s)*$ \s*, \s*\n", SPACES_X),
    *_rows(5, "scan", 2, r"\s+$ (?:\s)*$ \s*, \s*\n", SPACES_X),
    *_rows(5, "search", 1, r"(?<!\s)\s+$", SPACES_X),
    *_rows(5, "search", 2, "x.*y", X),
    *_rows(5, "search", 2, "ab.*y", ("", "ab", "")),
    *_rows(5, "search", 2, "<[^>]*>", ("", "<", "")),
    *_rows(5, "search", 2, "<!--.*?-->", ("", "<!--", "")),
    *_rows(5, "search", 2, r"(?m)^\s*! (?m)^[^x]*x", LINES),
    *_rows(5, "search", 1, "(?m)^.*x", ("", "a\n", "")),
    *_rows(5, "search", 3, ".*?x.*?y x.*?x.*?y", X),
    *_rows(5, "search", 3, "x.*y.*z", ("", "xy", "")),
    *_rows(5, "search", 2, "x.*y.*z", X),
    *_rows(5, "search", 3, "a*a*+b"),
    *_rows(5, "search", 3, r"(?m)\s*^\s*!", LINES),
    *_rows(5, "match", 1, r"\s+$", SPACES_X),
    *_rows(5, "fullmatch", 1, r"\s+$", SPACES_X),
    *_rows(5, "match", 1, "a*y"),
    *_rows(5, "fullmatch", 1, "a*y"),
    # 6. findall, finditer, sub, split
    *_rows(6, "scan", 2, r"a*b|a a*?b|a [^,]*,|. \w+@|\w (?:a*b)? (?:a*b)* a(?=a*b)? (?=a*b)|a (?=(a*))"),
    *_rows(6, "match", 1, r"a*b|a a*?b|a [^,]*,|. \w+@|\w (?:a*b)? (?:a*b)* a(?=a*b)? (?=a*b)|a (?=(a*))"),
    *_rows(6, "scan", 1, "a|a*b"),
    *_rows(6, "search", 0, "(?:|a*b) (?:(?:a|aa)*b)??"),
    *_rows(6, "scan", 2, "(?:|a*b)"),
    *_rows(6, "scan", E162, "(?:(?:a|aa)*b)??"),
    # 8. Look-around, atomic, back-references, conditions, boundaries
    *_rows(8, "match", E162, "(?=(?:a|aa)*b) (?!(?:a|aa)*b) (?>(?:a|aa)*b) (?=(?:a|aa)*)(?:a|aa)*b"),
    *_rows(8, "match", 1, "(?=(?:a|aa)*)b (?>(?:a|aa)*)b (?:a|aa)*+b"),
    *_rows(8, "match", 1, "(?>a*)*b (?:a++)*b (?:a*+b?)*c (?>a|aa)*b"),
    *_rows(8, "search", 2, "(?>a*)*b (?:a*+b?)*c (?>a|aa)*b"),
    *_rows(8, "match", 2, "a*a*+b a*(?>a*)b (?>a)*(?>a)*b"),
    *_rows(8, "match", 2, "a*(?=a*b) (?:a(?=a*b)|a)*c (?:(?!.*b)a)*c (?:(?!a*b).)*c"),
    *_rows(8, "match", 1, "(?:(?!b).)*c"),
    *_rows(8, "match", 1, r"(?=(a+))\1b"),
    *_rows(8, "match", 2, r"(a*)\1b (.+)\1!"),
    *_rows(8, "match", 3, r"(a*)(a*)\1b"),
    *_rows(8, "match", Base(1.41), r"(?:(a*)\1)*b"),
    *_rows(8, "match", 2, r"(a)\1*\1*b (a*)?(?(1)a*|b*)c"),
    *_rows(8, "match", 1, "(a)?(?(1)a*|b*)c"),
    *_rows(8, "match", 1, r"(?:a*\b)*b a*\ba*b a*$a*b"),
    *_rows(8, "match", E2, r"(?:a*\B)*b"),
    *_rows(8, "match", 2, r"a*\Ba*b a*(?<=a)a*b"),
    *_rows(8, "match", 2, r"(?m)\s*$\s*!", LINES),
)

# 7. Bounds: pattern with K, manner, text for a K, the K to try, growth in K: a degree, a factor for each unit
# of K, or "faster": each unit multiplies by more than the one before. That `(?:a*){K}b` and `(?:a+){K}b` grow
# with n ** K is tested apart.
BOUNDS: tuple[tuple[str, str, str, tuple[int, ...], int | Base | str], ...] = (
    *((p, "match", "a*200", (6, 8, 10), E2) for p in ("(?:a?){K}b", "(?:a|aa){K}b", "(?:a{1,2}){1,K}b")),
    *((p, "match", "a*200", (4, 5, 6, 7), Base(3.0)) for p in ("(?:a{0,2}){K}b", "(?:a{1,3}){K}b")),
    ("(?:a{1,30}){1,K}$", "match", "a*200!", (1, 2, 3), Base(30.0)),
    # 52 was measured up to K = 5, where 200 characters are too few for 63 in each part; 63 is the product rule.
    (r"(?:\w{1,63}\.?){1,K}@", "match", "a*200", (1, 2), Base(63.0)),
    *((p, "match", "a*200", (1, 2, 3, 4, 5), "faster") for p in ("(?:a{0,K}){0,K}b", "(?:[ab]{1,K}){1,K}c")),
    *((p, "match", "x*1", (8, 10, 12), E2) for p in ("(?:|){K}b", "(?:a?|b?){K}c", "(?:(?=x)|){K}c")),
    *((p, "match", "x*1", (64, 256), 0) for p in ("(?:|){0,K}b", "(?:a?|b?){0,K}c", "(?:(?=x)|){0,K}c")),
    ("(?:a{0,K}){3}b", "match", "a*4K", (8, 16, 32), 3),
    *((p, "match", "a*4K", (32, 64, 128), 2) for p in ("a{0,K}a{0,K}b", "a{0,K}a{0,K}[bc]")),
    *((p, "search", "x*4K", (8, 16, 32), 3) for p in (".{0,K}x.{0,K}y", ".{0,K}x.{0,K}[yz]")),
    (r"\w{1,K}@", "search", "a*2000", (50, 100), 1),
    ("(?:a?){0,K}b", "match", "a*200", (16, 32, 64), 1),
    ("(?:a?b?){K}c", "match", "c*1", (16, 32, 64), 1),
    ("(?:a|){K}b", "match", "c*1", (16, 32, 64), 1),
    ("(?:a{K}){K}b", "match", "a*4000", (16, 32), 2),
    ("(?:a|b){K}c", "match", "a*200", (16, 32, 64), 1),
)
