"""`patlint mend`: what is shown and written, and what is left alone, on real files."""

from __future__ import annotations

import ast
import os
import random
import re
import stat
from collections.abc import Callable
from pathlib import Path

import pytest

from patlint.language import Language
from patlint.mend import Claim, mended, unproven
from patlint.rewrite.replace import NotReplaced, replace_file
from patlint.run import Settings
from patlint.source import find_patterns
from patlint.target import running_target
from tests.cli.conftest import Ran

Patlint = Callable[..., Ran]
SETTINGS = Settings(running_target(), ("shorter-equivalent",))


def mend(source: str) -> str:
    return mended(source.encode(), "x.py", SETTINGS).data.decode()


def call(pattern: str, rest: str = "") -> str:
    return f"import re\nre.match({pattern}, input()){rest}\n"


# The literal in the file, and what becomes of it. Source: written for this test.
LITERALS = [
    ("'(?:a|b)+c'", "'[ab]+c'"),
    ('"(?:a|b)+c"', '"[ab]+c"'),
    ('r"(?:a|b)+\\."', 'r"[ab]+\\."'),
    ('R"(?:a|b)+\\."', 'R"[ab]+\\."'),
    ('"(?:a|b)+\\\\."', '"[ab]+\\\\."'),
    ('"(?:\\\\.|\\\\d)+x"', '"[.\\\\d]+x"'),
    ("'(?:\\'|\")+x'", "'[\\'\"]+x'"),
    ("r'''(?:a|b)+'c'''", "r'''[ab]+'c'''"),
    ('"""(?:a|b)+"c"""', '"""[ab]+"c"""'),
    ("u'(?:a|b)+'", "u'[ab]+'"),
    ("b'(?:a|b)+'", "b'[ab]+'"),
    ("rb'(?:a|b)+\\x00'", "rb'[ab]+\\x00'"),
    ("Br'(?:a|b)+\\x00'", "Br'[ab]+\\x00'"),
    ("'\\x41(?:a|b)+'", "'\\x41[ab]+'"),
    ("'(?:a|\\x62)+'", "'[a\\x62]+'"),
    ("'(?:\\n|\\t)+x'", "'[\\n\\t]+x'"),
    ("'x(?:\u00e9|\u00e8)+'", "'x[\u00e9\u00e8]+'"),
    ("f'(?:a|b)+x{{2,2}}'", "f'[ab]+xx'"),
    ("('(?:a|b)+' 'c')", "('[ab]+' 'c')"),
    ("('x' '(?:a|b)+' r'\\.(?:c|d)')", "('x' '[ab]+' r'\\.[cd]')"),
    ("('x' + '(?:a|b)+')", "('x' + '[ab]+')"),
    ("'(?:a|b)+%s' % 'c'", "'[ab]+%s' % 'c'"),
    ("'(?:a|b)+{}'.format('c')", "'[ab]+{}'.format('c')"),
    ("'(?:a|b)+' + re.escape('.')", "'[ab]+' + re.escape('.')"),
    ("pattern='(?:a|b)+', string=''", "pattern='[ab]+', string=''"),
]


@pytest.mark.parametrize(("before", "after"), LITERALS)
def test_literal(before: str, after: str) -> None:
    def source(literal: str) -> str:
        if "pattern=" in literal:
            return f"import re\nre.match({literal})\n"
        return call(literal)

    assert mend(source(before)) == source(after)


def test_quotes_are_changed_where_the_text_needs_it() -> None:
    """In a raw literal `\\'` is two characters, and the shorter pattern has one."""
    made = mend(call("r'(?:\"|\\')+x'"))
    assert made == call("r'''[\"']+x'''")
    assert find_patterns(made)[0].pattern == "[\"']+x"


def test_verbose_layout_stays() -> None:
    source = (
        'import re\nP = re.compile(r"""\n  (?:a|b) +  # (?:a|b) of a kind\n  \\d{2,2}\n  [x]  # (?:x)\n""",'
        " re.VERBOSE)\nP.match(input())\n"
    )
    made = source.replace("  (?:a|b) +", "  [ab] +").replace("{2,2}", "{2}").replace("[x]  #", "x  #")
    assert mend(source) == made


LEFT = [
    (
        "import re\nRULE = '(?:a|b)+c'\nre.match(RULE, input())\n",
        "RULE is public: other modules may use its text",
    ),
    ("import re\n_R = '(?:a|b)+c'\nre.match(_R, input())\nprint(_R)\n", "_R is read at line 4 too"),
    (
        "import re\n_P = re.compile('(?:a|b)+c')\n_P.match(input())\nprint(_P.pattern)\n",
        "the program reads _P.pattern",
    ),
    (
        "import re\n_R = '(?:a|b)+c'\nre.match(_R, input())\nre.sub('x', _R, input())\n",
        "_R is read at line 4 too",
    ),
    (
        "import re\nfor rule in ('(?:a|b)+c', 'k'):\n    pass\n_R = '(?:a|b)+c'\nre.match(_R, input())\n"
        "re.match(_R + input(), '')\n",
        "_R is read at line 6 too",
    ),
]


@pytest.mark.parametrize(("source", "reason"), LEFT)
def test_left(source: str, reason: str) -> None:
    made = mended(source.encode(), "x.py", SETTINGS)
    assert (made.data, [each.reason for each in made.left]) == (source.encode(), [reason])


def test_shared_constants_are_mended_where_all_agree() -> None:
    source = (
        "import re\n_W = '(?:a|b)+'\n_P = re.compile(_W + 'x')\n_Q = re.compile(f'{_W}(?:c|d)')\n"
        "_P.match(input())\n_Q.match(input())\n"
    )
    assert mend(source) == source.replace("(?:a|b)", "[ab]").replace("(?:c|d)", "[cd]")


def test_diff_and_status(patlint: Patlint, tmp_path: Path) -> None:
    file = tmp_path / "a.py"
    file.write_text(call("'(?:a|b)+c'") + "x = 1", encoding="utf-8")
    ran = patlint("mend", "a.py")
    assert ran.status == 1
    assert ran.out == (
        "--- a.py\n+++ a.py\n@@ -1,3 +1,3 @@\n import re\n-re.match('(?:a|b)+c', input())\n"
        "+re.match('[ab]+c', input())\n x = 1\n\\ No newline at end of file\n"
    )
    assert ran.err == "1 pattern in 1 file to mend, 3 bytes shorter; 0 left as they were, 0 errors\n"
    assert "(?:a|b)" in file.read_text(encoding="utf-8")
    written = patlint("mend", "--write", "a.py")
    assert (written.status, written.out) == (0, "")
    assert written.err == "1 pattern in 1 file mended, 3 bytes shorter; 0 left as they were, 0 errors\n"
    assert file.read_text(encoding="utf-8") == call("'[ab]+c'") + "x = 1"
    again = patlint("mend", "a.py")
    assert (again.status, again.out) == (0, "")
    assert again.err == "nothing to mend; 0 left as they were, 0 errors\n"


def test_bytes_around_stay(patlint: Patlint, tmp_path: Path) -> None:
    """Line ends of all kinds, a form feed, a mark, a cookie, odd blanks: byte for byte."""
    before = b"'(?:a|b)+c' ; \x0c\ty = re.search(  '(?:k|l)z',s )"
    after = b"'[ab]+c' ; \x0c\ty = re.search(  '[kl]z',s )"
    heads = [
        b"",
        b"\xef\xbb\xbf",
        b"# -*- coding: latin-1 -*-\r\n# \xe9\xff\r\n",
        b"#!/usr/bin/env python\n# coding: koi8-r\n# \xc1\xc2\n",
        b"# \xe2\x80\xa8 is no line end\n",
    ]
    for number, head in enumerate(heads):
        for end in (b"\n", b"\r\n", b"\r"):
            body = end.join([b"import re", b"s = input()", b"re.match(%s", b"if s:", b"\tpass  ", b"", b"#"])
            file = tmp_path / f"f{number}{len(end)}{end[-1]}.py"
            file.write_bytes(head + body.replace(b"%s", before.replace(b"' ;", b"', s) ;")))
            assert patlint("mend", "--write", str(file)).status == 0
            assert file.read_bytes() == head + body.replace(b"%s", after.replace(b"' ;", b"', s) ;"))
    assert len(list(tmp_path.glob("f*.py"))) == 15


def test_links_and_permissions(patlint: Patlint, tmp_path: Path) -> None:
    real = tmp_path / "real"
    real.mkdir()
    target = real / "b.py"
    target.write_text(call("'(?:a|b)+c'"), encoding="utf-8")
    target.chmod(0o751)
    link = tmp_path / "link.py"
    link.symlink_to(target)
    assert patlint("mend", "--write", "link.py").status == 0
    assert link.is_symlink()
    assert target.read_text(encoding="utf-8") == call("'[ab]+c'")
    assert stat.S_IMODE(target.stat().st_mode) == 0o751
    assert [each.name for each in real.iterdir()] == ["b.py"]


def test_read_only_and_broken_files(patlint: Patlint, tmp_path: Path) -> None:
    file = tmp_path / "a.py"
    file.write_text(call("'(?:a|b)+c'"), encoding="utf-8")
    file.chmod(0o444)
    (tmp_path / "broken.py").write_text("import re\nre.match('(?:a|b)'\n", encoding="utf-8")
    ran = patlint("mend", "--write", ".")
    assert ran.status == 2
    assert "a.py: not written: the file is read-only\n" in ran.err
    assert "broken.py:2: " in ran.err
    assert ran.err.endswith("nothing mended; 0 left as they were, 2 errors\n")
    assert file.read_text(encoding="utf-8") == call("'(?:a|b)+c'")


def test_a_file_that_changed_in_between(tmp_path: Path) -> None:
    file = tmp_path / "a.py"
    file.write_bytes(b"now")
    with pytest.raises(NotReplaced, match="not written: the file changed in the meantime"):
        replace_file(str(file), b"then", b"new")
    assert file.read_bytes() == b"now"
    assert [each.name for each in tmp_path.iterdir()] == ["a.py"]


def test_a_full_disk_leaves_the_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "a.py"
    file.write_bytes(b"old")

    def full(descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(NotReplaced, match="not written: No space left on device"):
        replace_file(str(file), b"old", b"new")
    assert [(each.name, each.read_bytes()) for each in tmp_path.iterdir()] == [("a.py", b"old")]


def test_put_back_where_the_proof_fails_on_the_written_file(
    patlint: Patlint, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from patlint import mend as module

    file = tmp_path / "a.py"
    file.write_text(call("'(?:a|b)+c'"), encoding="utf-8")
    asked: list[bytes] = []

    def only_in_memory(old: bytes, new: bytes, *rest: object) -> str | None:
        asked.append(new)
        return None if len(asked) < 3 else "no"

    monkeypatch.setattr(module, "unproven", only_in_memory)
    ran = patlint("mend", "--write", "a.py")
    assert ran.status == 2
    assert "a.py: not mended: no\n" in ran.err
    assert file.read_text(encoding="utf-8") == call("'(?:a|b)+c'")
    assert len(asked) == 3


def test_the_second_look_sees_what_is_wrong() -> None:
    old = b"import re\nre.match('(?:a|b)+c', input())\n"
    good = old.replace(b"(?:a|b)", b"[ab]")
    claim = (Claim(0, "[ab]+c", "groups"),)
    assert unproven(old, good, "x.py", claim, SETTINGS) is None
    for wrong, reason in (
        (good.replace(b"input", b"output"), "something else than literals changed"),
        (good.replace(b"[ab]", b"[abc]"), "line 2: the pattern is not the suggested one"),
        (good.replace(b"'[", b"["), "it cannot be read again: invalid syntax"),
    ):
        found = unproven(old, wrong, "x.py", claim, SETTINGS)
        assert found is not None and found.startswith(reason.partition(":")[0]), found
    assert unproven(old, good.replace(b"b]", b"bc]"), "x.py", (Claim(0, "[abc]+c", "groups"),), SETTINGS) == (
        "line 2: the pattern there is not proven to do the same"
    )


def test_configuration_waivers_and_only(patlint: Patlint, tmp_path: Path) -> None:
    waived = call("'(?:a|b)+c'", "  # patlint: waive shorter-equivalent -- as in the standard")
    (tmp_path / "a.py").write_text(waived, encoding="utf-8")
    assert patlint("mend", "a.py").err == "nothing to mend; 0 left as they were, 0 errors\n"
    (tmp_path / "a.py").write_text(call("'(?:a|b)+c'"), encoding="utf-8")
    assert patlint("mend", "--only", "nullable", "a.py").status == 0
    assert patlint("mend", "--only", "shorter-equivalent", "a.py").status == 1
    (tmp_path / "pyproject.toml").write_text(
        '[tool.patlint]\nskip = ["shorter-equivalent"]\n', encoding="utf-8"
    )
    assert patlint("mend", "a.py").status == 0
    assert patlint("mend", "--only", "shorter", "a.py").status == 2


SLOW = call("'(?:a*)*b'")
SLOWER = "import re\nassert re.match('(?:a*)*b', input())\nassert re.match('(?:c|d)+e', input())\n"


def test_what_is_quicker_is_applied_too(patlint: Patlint, tmp_path: Path) -> None:
    """One change for each pattern, and a longer file is said to be longer."""
    file = tmp_path / "a.py"
    for only, after in (
        ((), SLOWER.replace("(?:a*)*b", "a*b").replace("(?:c|d)+", "[cd]+")),
        (("--only", "exponential-ambiguity"), SLOWER.replace("(?:a*)*b", "a*b")),
        (("--only", "shorter-equivalent"), SLOWER.replace("(?:a*)*b", "a*b").replace("(?:c|d)+", "[cd]+")),
        (("--only", "polynomial-ambiguity"), SLOWER),
    ):
        file.write_text(SLOWER, encoding="utf-8")
        assert patlint("mend", "--write", *only, "a.py").status == 0
        assert file.read_text(encoding="utf-8") == after
    file.write_text(SLOW, encoding="utf-8")
    ran = patlint("mend", "a.py")
    assert ran.err == "1 pattern in 1 file to mend, 5 bytes shorter; 0 left as they were, 0 errors\n"
    file.write_text(call(r"r'\s*,?\s*='"), encoding="utf-8")
    ran = patlint("mend", "--write", "--target", "3.10", "a.py")
    assert ran.err == "1 pattern in 1 file mended, 4 bytes longer; 0 left as they were, 0 errors\n"
    assert file.read_text(encoding="utf-8") == call(r"r'\s*(?:,\s*)?='")


def test_waived_ambiguity_is_not_mended(patlint: Patlint, tmp_path: Path) -> None:
    waiver = "  # patlint: waive exponential-ambiguity, shorter-equivalent -- twenty characters at most"
    (tmp_path / "a.py").write_text(call("'(?:a*)*b'", waiver), encoding="utf-8")
    ran = patlint("mend", "--write", "a.py")
    assert (ran.status, ran.err) == (0, "nothing to mend; 0 left as they were, 0 errors\n")
    assert (tmp_path / "a.py").read_text(encoding="utf-8") == call("'(?:a*)*b'", waiver)


def test_two_ideas_for_one_text_are_one_change() -> None:
    """Two sites read it, and what is best for one is not what is best for the other; nothing is said of that."""
    source = (
        "import re\n_R = '(?:x|y)a*a*'\nif re.fullmatch(_R, input()): pass\nif re.match(_R, input()): pass\n"
    )
    rules = ("exponential-ambiguity", "polynomial-ambiguity", "shorter-equivalent")
    made = mended(source.encode(), "x.py", Settings(running_target(), rules))
    assert (made.left, made.problems) == ((), ())
    assert made.data.decode() == source.replace("(?:x|y)a*a*", "[xy]a*")
    assert len(made.claims) in (1, 2)


def test_standard_input(patlint: Patlint, monkeypatch: pytest.MonkeyPatch) -> None:
    source = call("'(?:a|b)+c'")
    ran = patlint("mend", "--as", "x/y.py", "-", stdin=source)
    assert (ran.status, ran.out.splitlines()[:2]) == (1, ["--- x/y.py", "+++ x/y.py"])
    ran = patlint("mend", "--write", "-", stdin=source)
    assert (ran.status, ran.out) == (0, call("'[ab]+c'"))
    plain = "print(1)\n"
    ran = patlint("mend", "--write", "-", stdin=plain)
    assert (ran.status, ran.out) == (0, plain)


PARTS = [
    "(?:a|b)",
    "[0-90-9]",
    r"\d\d\d\d\d\d",
    "(?:x)",
    "[x]y",
    "(k|l)",
    "c{1,}",
    '"',
    "'",
    r"\.",
    "\\\\",
    "$",
    "{2,2}",
]


def test_random_files_keep_their_shape() -> None:
    """The syntax tree differs in literals alone, patterns are equal, and a second run finds nothing."""
    generator = random.Random(8)
    changed = patterns = 0
    for _ in range(60):
        lines = ["import re"]
        for _ in range(generator.randint(1, 4)):
            text = "".join(generator.choice(PARTS) for _ in range(generator.randint(2, 6)))
            try:
                re.compile(text)
            except re.error:
                continue
            literal = generator.choice((repr(text), repr(text), f'r"""{text} """'))
            function = generator.choice(("match", "fullmatch", "search"))
            lines.append(f"if re.{function}({literal}, input()): print(1)")
        source = "\n".join(lines) + "\n"
        made = mended(source.encode(), "x.py", SETTINGS)
        assert not made.problems
        if not made.changed:
            continue
        changed += 1
        assert mended(made.data, "x.py", SETTINGS).data == made.data
        shapes = []
        for code in (source.encode(), made.data):
            tree = ast.parse(code)
            for node in ast.walk(tree):
                if isinstance(node, ast.Constant):
                    node.value = ""
            shapes.append(ast.dump(tree))
        assert shapes[0] == shapes[1]
        before, after = find_patterns(source), find_patterns(made.data)
        for one, other in zip(before, after, strict=True):
            mode = one.uses[0].mode
            assert Language(one.pattern, mode=mode) == Language(other.pattern, mode=mode)
            patterns += one.pattern != other.pattern
        assert len(made.claims) == sum(a.pattern != b.pattern for a, b in zip(before, after, strict=True))
    assert changed > 40
    assert patterns > 60
