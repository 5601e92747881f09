"""Constants from other files of the project: found as Python finds them, and told as they are imported."""

from __future__ import annotations

import importlib
import sys
from pathlib import Path

import pytest

from patlint.config import Settings
from patlint.rules.registry import RULES
from patlint.run import RunResult, lint_paths, lint_source
from patlint.source import Module, read_module, reasons
from patlint.source.disk import Files, unchanged
from tests.source.recording import recording_re

PROJECT = {
    "yard/__init__.py": "from .marks import CRANE\nDOCK = 'd+'\n",
    "yard/marks.py": (
        "import re\nCRANE = 'c[ab]'\nBERTH: str = 'b' + CRANE\nKINDS = ('x', 'y')\nROWS = [('n', 'p+'), ('m', 'q')]\n"
        "TABLE = {'left': 'l', 'right': 'r'}\nCOMPILED = re.compile('z')\nGROWN = ['a']\nGROWN.append('b')\n"
        "TWICE = 'a'\nif CRANE: TWICE = 'b'\nfrom .deep import far\nFLAGS = 2\nOPEN = open\nEMPTY = ''\n"
        "class Body:\n PART = 'part'\n PARTS = {'head': 'h+'}\n"
        "class Door(Body): pass\n"
    ),
    "yard/again.py": "from yard.marks import CRANE as LIFT\nfrom . import marks\nFROM = marks.BERTH + 'x'\n",
    "yard/all.py": "from .marks import *\nfrom .again import *\n",
    "yard/round.py": "from .trip import A\n",
    "yard/trip.py": "from .round import A\n",
    "yard/broken.py": "A = (\n",
    "yard/deep/__init__.py": "",
    "yard/deep/far.py": "from ..marks import KINDS\nFAR = 'f'\n",
    "yard/string.py": "digits = 'x'\n",
    "scripts/marks.py": "CRANE = 's'\n",
    "scripts/string.py": "MINE = 'x'\n",
}


@pytest.fixture
def project(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name, text in PROJECT.items():
        (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / name).write_text(text)
    monkeypatch.chdir(tmp_path)
    return tmp_path


def read(text: str, path: str = "yard/gate.py") -> Module:
    return read_module("import re\n" + text, path, files=Files("."))


TOLD = {
    "relative": "from .marks import CRANE\nre.match(CRANE, '')",
    "absolute": "from yard.marks import CRANE\nre.match(CRANE + '+', '')",
    "renamed": "from .marks import CRANE as C\nre.match('(%s)' % C, '')",
    "put together there": "from .marks import BERTH\nre.match(BERTH, '')",
    "of the package": "from . import DOCK\nre.match(DOCK, '')",
    "through the package": "from yard import CRANE\nre.match(CRANE, '')",
    "through another": "from .again import LIFT\nre.match(LIFT, '')",
    "through another's module": "from .again import FROM\nre.match(FROM, '')",
    "by a star": "from .all import FROM\nre.match(FROM, '')",
    "of a module": "from . import marks\nre.match(marks.CRANE, '')",
    "of a module by its whole name": "import yard.marks\nre.match(yard.marks.CRANE, '')",
    "of a renamed module": "import yard.marks as m\nre.match(f'{m.CRANE}{1}', '')",
    "two levels": "from .deep.far import FAR\nre.match(FAR, '')",
    "up again": "from .deep.far import KINDS\nre.match('|'.join(KINDS), '')",
    "in a function": "def f():\n from .marks import CRANE\n re.match(CRANE, '')\nf()",
    "a loop": "from .marks import KINDS\nfor k in KINDS: re.match(k, '')",
    "rows": "from .marks import ROWS\nfor n, p in ROWS: re.match(p, n)",
    "an element": "from .marks import TABLE\nre.match(TABLE['left'], '')",
    "a class": "from .marks import Body\nre.match(Body.PART, '')",
    "a derived class": "from .marks import Door\nre.match(Door.PART, '')",
    "a table of a class": "from .marks import Body\nre.match(Body.PARTS['head'], '')",
    "a class of a module": "from . import marks\nre.match(marks.Body.PART, '')",
    "flags": "from .marks import FLAGS\nre.compile('a', FLAGS)",
    "an empty text": "from .marks import EMPTY\nre.match('a' + EMPTY, '')",
    "a base": "from .marks import CRANE\nclass A:\n P = CRANE\n def f(self): re.match(self.P, '')\nA().f()",
    "a helper": "from .marks import CRANE\ndef f(p): return p + '+'\nre.match(f(CRANE), '')",
}


@pytest.mark.parametrize("name", TOLD)
def test_told_as_imported(name: str, project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    module = read(TOLD[name])
    assert module.unresolved == ()
    calls: list[tuple[str, str | bytes, int]] = []
    scope = {"__name__": "yard.gate", "__package__": "yard", "re": recording_re(calls)}
    monkeypatch.syspath_prepend(str(project))
    known = set(sys.modules)
    try:
        importlib.import_module("yard")
        exec(compile(TOLD[name], "gate.py", "exec"), scope)
    finally:
        for each in set(sys.modules) - known:
            del sys.modules[each]
    assert calls
    assert {(site.function, site.pattern, site.flags) for site in module.sites} == set(calls)


NOT_TOLD = [
    ("from .marks import TWICE\nre.match(TWICE, '')", reasons.REASSIGNED),
    ("from .marks import GROWN\nre.match('|'.join(GROWN), '')", reasons.CHANGED),
    ("from .marks import OPEN\nre.match(OPEN, '')", reasons.UNBOUND),
    ("from .marks import Body\nre.match(Body, '')", reasons.NOT_TEXT),
    ("from .marks import none\nre.match(none, '')", reasons.IMPORTED),
    ("from .none import CRANE\nre.match(CRANE, '')", reasons.IMPORTED),
    ("from .broken import A\nre.match(A, '')", reasons.IMPORTED),
    ("from .round import A\nre.match(A, '')", reasons.IMPORTED),
    ("from . import marks\nre.match(marks, '')", reasons.NOT_TEXT),
    ("from . import marks\nmarks.CRANE = 'b'\nre.match(marks.CRANE, '')", reasons.ATTRIBUTE),
    ("from .marks import Body\nBody.PART = 'b'\nre.match(Body.PART, '')", reasons.ATTRIBUTE),
    ("from .marks import KINDS\nKINDS = g(KINDS)\nre.match('|'.join(KINDS), '')", reasons.REASSIGNED),
    ("from .marks import ROWS\nROWS.append(('a', 'b'))\nfor n, p in ROWS: re.match(p, n)", reasons.CHANGED),
    ("from .marks import TABLE\nTABLE['left'] = 'b'\nre.match(TABLE['left'], '')", reasons.CHANGED),
    ("from .marks import Body\nBody.PARTS['head'] = 'b'\nre.match(Body.PARTS['head'], '')", reasons.CHANGED),
    ("from .marks import CRANE\nfrom .again import *\nre.match(CRANE, '')", reasons.IMPORTED),
    ("from .marks import CRANE\nglobals()['CRANE'] = 'b'\nre.match(CRANE, '')", reasons.IMPORTED),
    (
        "try:\n from .marks import CRANE\nexcept ImportError:\n CRANE = 'b'\nre.match(CRANE, '')",
        reasons.REASSIGNED,
    ),
    ("from string import digits\nre.match(digits, '')", reasons.IMPORTED),
    ("from .marks import KINDS\nfor k in KINDS:\n if k == 'x': re.match(k, '')", reasons.LOOP_VARIABLE),
]


@pytest.mark.parametrize("text, reason", NOT_TOLD)
def test_not_told(text: str, reason: str, project: Path) -> None:
    module = read(text)
    assert module.sites == ()
    assert [call.reason for call in module.unresolved] == [reason]


def test_nothing_is_read_for_a_text_at_hand(project: Path) -> None:
    text = "import re\nfrom .marks import CRANE\nre.match(CRANE, '')"
    assert [call.reason for call in read_module(text, "yard/gate.py").unresolved] == [reasons.IMPORTED]
    assert lint_source("import re\nfrom .marks import CRANE\nre.compile(CRANE + '(')", "yard/gate.py") == ()


def test_a_compiled_one_is_no_unresolved_call(project: Path) -> None:
    module = read("from .marks import COMPILED\nre.match(COMPILED, '')")
    assert module.sites == () and module.unresolved == ()


def test_where_modules_are_looked_for(project: Path) -> None:
    """A script's neighbour; a package from outside of it; a name that is found twice is not told."""
    marks = "from marks import CRANE\nre.match(CRANE, '')"
    (site,) = read(marks, "scripts/run.py").sites
    assert site.pattern == "s"
    (site,) = read("from yard.marks import CRANE\nre.match(CRANE, '')", "scripts/run.py").sites
    assert site.pattern == "c[ab]"
    assert read("from string import MINE\nre.match(MINE, '')", "scripts/run.py").sites == ()
    (project / "marks.py").write_text("CRANE = 'other'\n")
    assert read(marks, "scripts/run.py").sites == ()
    outside = read_module("import re\n" + marks, "scripts/run.py", files=Files("scripts"))
    assert [each.pattern for each in outside.sites] == ["s"]


def test_the_place_is_the_use(project: Path) -> None:
    (site,) = read("from .marks import CRANE\nre.match('x' + CRANE, '')").sites
    assert [site.place_of(at).column for at in range(4)] == [11, 16, 16, 16]
    assert site.spelling(0) == "x" and site.spelling(1) is None
    (alone,) = read("from .marks import CRANE\nre.match(CRANE, '')").sites
    assert (alone.place.line, alone.place.column, alone.place.end_column) == (3, 10, 15)


def test_what_was_relied_on(project: Path) -> None:
    relied_on = dict(read("from .again import FROM\nre.match(FROM, '')").relied_on)
    assert {Path(name).as_posix() for name, state in relied_on.items() if len(state) > 1} == {
        "yard/again.py",
        "yard/__init__.py",
        "yard/marks.py",
    }
    assert unchanged(relied_on)
    changes = 0
    for name, state in relied_on.items():
        path = project / name
        if state == "-":
            path.parent.mkdir(exist_ok=True)
            path.write_text("")
            assert not unchanged(relied_on)
            path.unlink()
        else:
            before = path.read_text()
            path.unlink()
            assert not unchanged(relied_on)
            path.write_text(before + "\n")
            assert unchanged(relied_on) is (state == "+")
            path.write_text(before)
        assert unchanged(relied_on)
        changes += 1
    assert changes >= 5


def seen(result: RunResult) -> list[tuple[str, int, int, str]]:
    return [(each.path, each.line, each.column, each.rule) for each in result.findings]


def test_the_cache_knows_the_imported_file(project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (project / "yard/gate.py").write_text("import re\nfrom .marks import CRANE\nre.match(CRANE, input())\n")
    settings = Settings((3, 12), tuple(rule.name for rule in RULES), root=".")
    assert seen(lint_paths(["yard/gate.py"], settings, jobs=1)) == []
    from patlint import run

    linted: list[str] = []
    real = run.lint_bytes
    monkeypatch.setattr(
        run, "lint_bytes", lambda data, path, settings: linted.append(path) or real(data, path, settings)
    )
    assert seen(lint_paths(["yard/gate.py"], settings, jobs=1)) == [] and linted == []
    marks = project / "yard/marks.py"
    marks.write_text(PROJECT["yard/marks.py"].replace("'c[ab]'", "'c('"))
    expected = [("yard/gate.py", 3, 10, "invalid-pattern")]
    assert seen(lint_paths(["yard/gate.py"], settings, jobs=1)) == expected
    assert linted == ["yard/gate.py"]
    assert seen(lint_paths(["yard/gate.py"], settings, jobs=1)) == expected and len(linted) == 1
    marks.unlink()
    assert seen(lint_paths(["yard/gate.py"], settings, jobs=1)) == [] and len(linted) == 2
    assert seen(lint_paths(["yard/gate.py"], settings, use_cache=False)) == []


def test_standard_input_stands_where_its_name_says(project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    import io

    text = b"import re\nfrom .marks import CRANE\nre.match(CRANE + '(', input())\n"
    settings = Settings((3, 12), tuple(rule.name for rule in RULES), root=".")
    for name, count in (("yard/gate.py", 1), ("elsewhere/gate.py", 0)):
        monkeypatch.setattr("sys.stdin", io.TextIOWrapper(io.BytesIO(text)))
        assert len(lint_paths(["-"], settings, stdin_name=name).findings) == count


def test_limits(project: Path) -> None:
    many = "".join(f"from .m{n} import A as A{n}\n" for n in range(40))
    for number in range(40):
        (project / f"yard/m{number}.py").write_text(f"A = 'a{number}'\n")
    module = read(many + "".join(f"re.match(A{n}, '')\n" for n in range(40)))
    assert len(module.sites) == 30 and {call.reason for call in module.unresolved} == {reasons.IMPORTED}
    (project / "yard/large.py").write_text("A = 'a'\n" + "#" * 2_000_000)
    assert read("from .large import A\nre.match(A, '')").sites == ()
    (project / "yard/chain0.py").write_text("A = 'a'\n")
    for number in range(1, 28):
        (project / f"yard/chain{number}.py").write_text(f"from .chain{number - 1} import A\n")
    assert len(read("from .chain15 import A\nre.match(A, '')").sites) == 1
    assert read("from .chain27 import A\nre.match(A, '')").sites == ()
