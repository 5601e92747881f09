"""What the README says about editors, tried in the real programs where they are installed.

The settings are those of the README, word for word. The report that is parsed has awkward lines: patterns and texts
that look like places, related places, advice over several lines.
"""

from __future__ import annotations

import json
import re
import shutil
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")

SOURCES = {
    "dock.py": r"""
import re

TIME = re.compile(r"at 12:30: (x|x)")
ROW = re.compile(r"quay/file\.py:3:4: (a+)+;")
print(TIME.match(input()), ROW.match(input()))
print(re.compile(r"(\s+)$").sub("", input()))
""",
    "with blank/quay.py": 'import re\nif re.match("[0-9A-z]:12:30:", input()):\n    print("x" "y")\n',
    "broken.py": "import re\nre.compile(\n",
}


@dataclass(frozen=True)
class Place:
    path: str
    line: int
    column: int
    kind: str


def block(language: str) -> str:
    (found,) = re.findall(rf"(?ms)^```{language}\n(.*?)^```$", README)
    assert isinstance(found, str)
    return found


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    made = tmp_path_factory.mktemp("editors")
    for name, text in SOURCES.items():
        (made / name).parent.mkdir(exist_ok=True)
        (made / name).write_text(text)
    ran = lint(made)
    assert ran.returncode == 2
    (made / "report.txt").write_text(ran.stdout + ran.stderr)
    return made


def lint(folder: Path, *words: str) -> subprocess.CompletedProcess[str]:
    code = (
        f"import sys; sys.path.insert(0, {str(ROOT)!r}); from patlint.cli.main import main; sys.exit(main())"
    )
    return subprocess.run(
        [sys.executable, "-c", code, "lint", *words], cwd=folder, capture_output=True, encoding="utf-8"
    )


@pytest.fixture(scope="module")
def places(folder: Path) -> list[Place]:
    """What an editor should find: the findings as the JSON report has them, and the file that is no Python."""
    findings = json.loads(lint(folder, "--format", "json").stdout)["findings"]
    assert {each["level"] for each in findings} == {"error", "warning", "note"}
    text = (folder / "report.txt").read_text()
    assert "\n  pattern  at 12:30: (x|x)\n" in text and "\n  see      line " in text
    out = [Place(each["path"], each["line"], each["column"], each["level"]) for each in findings]
    return [*out, Place("broken.py", 2, 0, "error")]


def test_the_first_line_of_a_finding_in_the_form_of_the_gnu_coding_standards(
    folder: Path, places: list[Place]
) -> None:
    """`sourcefile:lineno:column: message`; every other line begins with a blank, is empty or the summary."""
    found = []
    for line in (folder / "report.txt").read_text().splitlines():
        if line and not line.startswith(" "):
            made = re.fullmatch(r"(.+?):(\d+):(?:(\d+):)? (error|warning|note)?.*", line)
            if made is None:
                assert re.match(r"\d+ files?, ", line)
            else:
                found.append(Place(made[1], int(made[2]), int(made[3] or 0), made[4] or "error"))
    assert found == places


def test_quickfix(folder: Path, places: list[Place]) -> None:
    program = shutil.which("vim")
    if program is None:
        pytest.skip("vim is not installed")
    settings = block("vim")
    assert settings.count("\nset errorformat=") == 1
    script = f"""set nocompatible
{settings}
cgetfile report.txt
let out = []
for each in getqflist()
  if each.valid
    call add(out, join([bufname(each.bufnr), each.lnum, each.col, each.type], '|'))
  endif
endfor
call writefile(out, 'quickfix.out')
qa!
"""
    (folder / "script.vim").write_text(script)
    words = [program, "-u", "NONE", "-i", "NONE", "-e", "-s", "-n", "-S", "script.vim"]
    ran = subprocess.run(words, cwd=folder, stdin=subprocess.DEVNULL, capture_output=True, timeout=60)
    if not (folder / "quickfix.out").exists():
        pytest.skip(f"this vim cannot run a script: {ran.stderr.decode()[:200]}")
    kinds = {"e": "error", "w": "warning", "n": "note", "": "error"}
    found = []
    for line in (folder / "quickfix.out").read_text().splitlines():
        path, number, column, kind = line.split("|")
        found.append(Place(path, int(number), int(column), kinds[kind]))
    assert found == places
    make = re.search(r"(?m)^set makeprg=(.*)$", settings)
    assert make is not None and make[1].replace("\\ ", " ") == "patlint lint %"


def test_compilation_mode(folder: Path, places: list[Place]) -> None:
    program = shutil.which("emacs")
    if program is None:
        pytest.skip("emacs is not installed")
    script = f"""{block("elisp")}
(with-current-buffer (get-buffer-create "report")
  (insert-file-contents "report.txt")
  (compilation-mode)
  (compilation--ensure-parse (point-max))
  (goto-char (point-min))
  (while (not (eobp))
    (let ((message (get-text-property (point) 'compilation-message)))
      (when message
        (let ((place (compilation--message->loc message)))
          (princ (format "%s|%s|%s|%s\\n" (caar (compilation--loc->file-struct place))
                         (compilation--loc->line place) (or (compilation--loc->col place) 0)
                         (compilation--message->type message))))))
    (forward-line 1)))
"""
    (folder / "script.el").write_text(script)
    words = [program, "-Q", "--batch", "-l", "script.el"]
    ran = subprocess.run(words, cwd=folder, stdin=subprocess.DEVNULL, capture_output=True, encoding="utf-8")
    assert ran.returncode == 0, ran.stderr
    kinds = {"2": "error", "1": "warning", "0": "note"}
    found = []
    for line in ran.stdout.splitlines():
        path, number, column, kind = line.split("|")
        found.append(Place(path, int(number), int(column), kinds[kind]))
    assert found == places
