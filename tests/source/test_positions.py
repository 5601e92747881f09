"""Each character of a pattern stands where its place says, spelled as its spelling says."""

from __future__ import annotations

import ast
import random
import sys

import pytest

from patlint.source import Site, find_patterns
from patlint.source.decode import split_lines
from patlint.source.literals import split_token

pytestmark = [
    pytest.mark.filterwarnings("ignore::DeprecationWarning"),
    pytest.mark.filterwarnings("ignore::SyntaxWarning"),
]

LITERALS = {
    "plain": "'abc'",
    "raw": r"r'\d+\w'",
    "bytes": r"b'a\x41\d'",
    "raw bytes": r"rb'\d' BR'\w'",
    "unicode prefix": r"u'\u00e9x'",
    "capital prefixes": r"R'\d' U'a'",
    "escapes": r"'\n\t\\\x41\101\7\u0041\U00000041\N{DASH}\a\'\"\d\+'".replace("N{DASH}", "N{EM DASH}"),
    "byte escapes": r"b'\n\x41\101\777\u0041\N{DASH}'".replace("777", "377"),
    "adjacent": "'ab' r'\\d' \"c\"",
    "adjacent over lines": "('ab'  # one 'x'\n    r'\\d'\n\n  \"c\")",
    "joined lines": "'ab\\\ncd' \\\n 'e'",
    "joined within raw": "r'ab\\\ncd'",
    "triple": "'''a\n  b'c\n'''",
    "triple raw": 'r"""(?x)\n  \\d  # digits\n"""',
    "beyond ASCII": "'é' 'ü\U0001f600x' '\\d'",
    "empty parts": "'' 'a' \"\" 'b'",
    "plus": "'a' + r'\\d' + ('b' 'c')",
    "f-string": "f'a{{2}}\\d{N}z' 'q'",
    "raw f-string": "rf'\\d{{2}}{N}\\w' r'\\s'",
    "f-string with an escape": "f'\\N{EM DASH}{N}\\x41'",
    "f-string over lines": "f'''a\n{N}\nb{{1}}'''",
    "nested": "f'{\"a\"}b'",
    "percent": "'a%s%%b' % N",
    "format": "'a{}{{1}}b'.format(N)",
    "join": "'|'.join(['a', r'\\d', N])",
    "slice": "'abcdef'[1:4]",
    "a name in between": "'a' + N + 'b'",
    "repeat": "'ab' * 3",
    "tabs before": "\t'ab'",
    "form feed before": "\x0c 'a\x0cb'",
    "odd line breaks": "'a\x0b\x1c\x85\u2028b' 'c'",
}
if sys.version_info >= (3, 12):
    LITERALS["same quotes in a field"] = "f'a{'b'}c{N}'"
    LITERALS["comment in a field"] = "f'''a{\n  N  # }\n}c'''"


def check(text: str, site: Site) -> int:
    """How many characters had a place of their own."""
    lines = split_lines(text)
    counted = 0
    assert "".join(lines) == text
    for offset in range(len(site.pattern)):
        spelling = site.spelling(offset)
        place = site.place_of(offset)
        assert place.line <= place.end_line <= len(lines)
        assert place.column >= 1 and place.end_column <= len(lines[place.end_line - 1]) + 1
        if spelling is None:
            continue
        if place.line == place.end_line:
            found = lines[place.line - 1][place.column - 1 : place.end_column - 1]
        else:
            found = (
                lines[place.line - 1][place.column - 1 :] + lines[place.end_line - 1][: place.end_column - 1]
            )
        assert found == spelling, (offset, place)
        assert spelled_as(spelling, site.pattern[offset : offset + 1], site.is_raw(offset)), (
            offset,
            spelling,
        )
        counted += 1
    return counted


def spelled_as(spelling: str, char: str | bytes, raw: bool) -> bool:
    """Whether Python reads `spelling` as `char`; doubled braces and percents are undone by hand."""
    if spelling in ("{{", "}}", "%%"):
        return char in (spelling[0], spelling[0].encode())
    if spelling == "\\":  # a backslash that stands for itself, before something that is no escape
        return char in ("\\", b"\\")
    spelled = spelling.replace("\r\n", "\n").replace("\r", "\n")
    if raw or "\n" in spelled or spelled in "'\"":
        return char in (spelled, spelled.encode("latin-1", "replace"))
    prefix = "b" if isinstance(char, bytes) else ""
    return bool(ast.literal_eval(f"{prefix}'{spelled}'") == char)


@pytest.mark.parametrize("ends", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("name", LITERALS)
def test_each_character(name: str, ends: str) -> None:
    head = "import re\nN = 'n\\x4e'\nü = 1; re.compile("
    text = (head + LITERALS[name] + ")\n").replace("\n", ends)
    (site,) = find_patterns(text, "a.py")
    expected = eval_pattern(text)
    assert site.pattern == expected
    without = 1 if name in ("nested", "same quotes in a field") else 0  # a literal within an f-string
    assert check(text, site) == len(site.pattern) - without


def eval_pattern(text: str) -> str | bytes:
    from tests.source.recording import run

    ((_, pattern, _),) = run(text)
    return pattern


def test_random_literals() -> None:
    """Random tokens with random escapes, joined at random: the text is Python's, and every place is right."""
    choices = random.Random(5)
    atoms = [
        "a",
        "é",
        "\\n",
        "\\x41",
        "\\u00e9",
        "\\101",
        "\\\\",
        "\\d",
        "\\.",
        "\U0001f600",
        "{",
        "}",
        "\\\n",
        " ",
    ]
    tokens = spelled = 0
    for _ in range(600):
        parts = []
        for _ in range(choices.randint(1, 4)):
            prefix = choices.choice(["", "r", "u", "R"])
            quotes = choices.choice(["'", '"', "'''", '"""'])
            body = "".join(choice for choice in choices.choices(atoms, k=choices.randint(0, 6)))
            if len(quotes) == 3 and choices.random() < 0.5:
                body += "\nx"
            parts.append(f"{prefix}{quotes}{body}{quotes}")
        gap = choices.choice([" ", "\n   ", "  # 'c'\n", " \\\n"])
        ends = choices.choice(["\n", "\r\n"])
        text = f"import re\nre.match({gap.join(parts)}, '')\n".replace("\n", ends)
        (site,) = find_patterns(text, "a.py")
        assert site.pattern == ast.parse(text).body[1].value.args[0].value  # type: ignore[attr-defined]
        spelled += check(text, site)
        tokens += len(parts)
        assert all(piece.places for piece in site.pieces if site.pattern), text
    assert tokens > 1_000 and spelled > 3_000


def test_places_of_names_and_wholes() -> None:
    text = "import re\nA = 'x'\nB = (A +\n     '|y')\nre.match(B, s)\n"
    (site,) = find_patterns(text, "a.py")
    assert (site.place.line, site.place.column, site.place.end_line, site.place.end_column) == (3, 6, 4, 10)
    assert site.statement == 3
    assert [(site.place_of(n).line, site.place_of(n).column) for n in range(4)] == [
        (2, 6),
        (4, 7),
        (4, 8),
        (4, 9),
    ]


def test_what_has_no_spelling_stands_as_a_whole() -> None:
    text = "import re\nre.match(re.escape('a.b') + '%d' % 5 + 'z', s)\n"
    (site,) = find_patterns(text, "a.py")
    assert site.pattern == "a\\.b5z"
    assert [site.spelling(n) for n in range(6)] == [None] * 5 + ["z"]
    assert {site.place_of(n).column for n in range(4)} == {21}
    assert site.place_of(4).column == 30


def test_columns_count_code_points() -> None:
    text = "import re\né = '\U0001f600'; re.match('ü+', s)\n"
    (site,) = find_patterns(text, "a.py")
    assert (site.place.column, site.place.end_column) == (19, 23)
    assert text.split("\n")[1][18:22] == "'ü+'"


def test_split_token() -> None:
    assert split_token("rB'''x'''") == ("rb", "'''", "x")
    assert split_token("''") == ("", "'", "")


def test_a_long_pattern_is_cheap() -> None:
    """A hundred thousand characters have a place each."""
    text = "import re\nre.match('" + "ab|" * 33_333 + "', s)\n"
    (site,) = find_patterns(text, "a.py")
    assert check(text, site) == 99_999
