"""`python -m tests.bench.mended`: packages before and after `patlint mend --write`.

Two checks in a folder of their own, `--dir`:

- the test suites of some packages, from their source distributions, are run on a fresh copy, the package is
  mended, and the suite is run again: each test has to end as before (`outcomes`);
- every Python file of the installed packages of `--env` (as `tests.bench` makes it) is copied and mended; each
  pattern that changed is compared with what stood there on `re`, on texts of the language and near misses.

    python -m tests.bench.mended --dir ../mended --env ../bench-env
"""

from __future__ import annotations

import argparse
import random
import re
import shutil
import subprocess
import sys
import tarfile
import warnings
from collections import Counter
from pathlib import Path
from xml.etree import ElementTree

from patlint.rules.shorter_equivalent import needed
from patlint.source import SourceError, find_patterns
from patlint.source.sites import Site
from tests.bench.environment import environment_python, install
from tests.bench.shorten import near_misses
from tests.rewrite.oracle import LOOKED_AT

SUITES = {"sqlparse": (), "markdown": ("pyyaml", "markdown"), "mistune": ()}
"""Packages whose tests are run, and what these need beside pytest (one needs the metadata of its own
installation, though its modules are those of the copy)."""
AGAIN = 3
"""Times that a suite is run again where tests end otherwise; what ends as before once is no difference."""
ROOT = Path(__file__).resolve().parents[2]


def source_of(package: str, python: Path, folder: Path) -> Path:
    """The unpacked source distribution of a package in `folder`, fetched if it is not there."""
    found = sorted(folder.glob(f"{package}-*/"))
    if not found:
        call = [str(python), "-m", "pip", "download", "--quiet", "--no-deps", "--no-binary", ":all:", package]
        subprocess.run([*call, "--dest", str(folder)], check=True, stderr=subprocess.DEVNULL)
        for archive in folder.glob(f"{package}-*.tar.gz"):
            with tarfile.open(archive) as opened:
                opened.extractall(folder, filter="data")
        found = sorted(folder.glob(f"{package}-*/"))
    return found[-1]


def code_of(tree: Path, package: str) -> Path:
    """Where the modules of a package stand in its source distribution."""
    return next(each for each in (tree / "src" / package, tree / package) if each.is_dir())


def outcomes(tree: Path, package: str, python: Path) -> dict[str, str]:
    """How each test of a suite ends."""
    report = tree / "outcomes.xml"
    code = code_of(tree, package)
    # The modules are those of the copy, whatever is installed.
    begin = f"import sys; sys.path.insert(0, {str(code.parent)!r})"
    begin += "; import pytest; sys.exit(pytest.main(sys.argv[1:]))"
    call = [
        str(python),
        "-c",
        begin,
        "-q",
        "--continue-on-collection-errors",
        "-p",
        "no:cacheprovider",
        f"--junitxml={report}",
        "tests",
    ]
    subprocess.run(call, cwd=tree, capture_output=True)
    found = {}
    for case in ElementTree.parse(report).iter("testcase"):
        how = next((child.tag for child in case if child.tag in ("failure", "error", "skipped")), "passed")
        found[f"{case.get('classname')}.{case.get('name')}"] = how
    return found


def mend(path: Path) -> str:
    """Mend a file or a directory in place; the line that tells what was done."""
    call = [sys.executable, "-m", "patlint", "mend", "--write", str(path)]
    done = subprocess.run(call, cwd=ROOT, capture_output=True, encoding="utf-8")
    return done.stderr.splitlines()[-1] if done.stderr else f"no word, status {done.returncode}"


def suite(package: str, python: Path, sources: Path, copies: Path) -> tuple[Counter[str], list[str], str]:
    """How many tests ended how before mending, those that end otherwise afterwards, and what was mended."""
    tree = copies / package
    shutil.rmtree(tree, ignore_errors=True)
    shutil.copytree(source_of(package, python, sources), tree)
    before = outcomes(tree, package, python)
    said = mend(code_of(tree, package))
    after = outcomes(tree, package, python)
    changed = [name for name in sorted({*before, *after}) if before.get(name) != after.get(name)]
    for _ in range(AGAIN):
        if changed:  # tests that ask the clock end as they like on a busy machine
            after = outcomes(tree, package, python)
            changed = [name for name in changed if before.get(name) != after.get(name)]
    return Counter(before.values()), changed, said


def differences(old: Site, new: Site, generator: random.Random) -> tuple[int, list[str]]:
    """Texts that were tried on both patterns of a site, and those on which `re` does not do the same."""
    if not isinstance(old.pattern, str) or not isinstance(new.pattern, str):
        return 0, []
    modes, keeps = needed(old)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        a, b = re.compile(old.pattern, old.flags), re.compile(new.pattern, new.flags)
    tried, wrong = 0, []
    for text in near_misses(old.pattern, old.flags, generator):
        for mode in sorted(modes):
            tried += 1
            if LOOKED_AT[keeps](a, mode, text) != LOOKED_AT[keeps](b, mode, text):
                wrong.append(f"{old.pattern!r} {mode}: {new.pattern!r} differs on {text!r}")
    return tried, wrong


def changed_patterns(before: Path, after: Path) -> tuple[Counter[str], list[str]]:
    """What differs between two trees of the same files."""
    counts: Counter[str] = Counter()
    wrong: list[str] = []
    generator = random.Random(0)
    for old in sorted(before.rglob("*.py")):
        new = after / old.relative_to(before)
        if old.read_bytes() == new.read_bytes():
            continue
        counts["files"] += 1
        try:
            compile(new.read_bytes(), str(new), "exec", dont_inherit=True)
            pairs = list(
                zip(*(find_patterns(each.read_bytes(), str(each)) for each in (old, new)), strict=True)
            )
        except (SourceError, SyntaxError, ValueError) as error:
            wrong.append(f"{new}: {error}")
            continue
        for one, other in pairs:
            if one.pattern != other.pattern:
                counts["patterns"] += 1
                tried, differs = differences(one, other, generator)
                counts["texts"] += tried
                wrong += differs[:1]
    return counts, wrong


def installed(env: Path, copies: Path) -> tuple[str, Counter[str], list[str]]:
    """Copies of the installed packages, mended: the word of the command, what changed, and what is wrong."""
    packages = next(iter(sorted([*env.glob("lib/python*/site-packages"), *env.glob("Lib/site-packages")])))
    for name in ("before", "after"):
        shutil.rmtree(copies / name, ignore_errors=True)
    ignored = shutil.ignore_patterns("__pycache__", "*.so", "*.pyd", "*.pyc")
    shutil.copytree(packages, copies / "before", ignore=ignored)
    shutil.copytree(copies / "before", copies / "after")
    said = mend(copies / "after")
    counts, wrong = changed_patterns(copies / "before", copies / "after")
    left = [each for each in (copies / "after").rglob(".patlint-*") if each.suffix == ".tmp"]
    return said, counts, wrong + [f"left behind: {each}" for each in left]


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.mended")
    parser.add_argument("--dir", type=Path, required=True, help="where sources and copies go")
    parser.add_argument(
        "--env", type=Path, help="the bench's environment, whose packages are mended in a copy"
    )
    parser.add_argument(
        "--suite", action="append", choices=sorted(SUITES), help="one suite alone; may be repeated"
    )
    given = parser.parse_args()
    sources, copies = given.dir / "sources", given.dir / "copies"
    for each in (sources, copies):
        each.mkdir(parents=True, exist_ok=True)
    bad = 0
    chosen = given.suite or list(SUITES)
    failed = install(given.dir / "env", ["pytest", *(need for name in chosen for need in SUITES[name])])
    if failed:
        print("not installed:", *failed, file=sys.stderr)
        return 2
    python = environment_python(given.dir / "env").absolute()
    for package in chosen:
        counts, changed, said = suite(package, python, sources.absolute(), copies.absolute())
        print(
            f"{package}: {dict(counts)} before; {said}; {len(changed)} tests end otherwise",
            *changed,
            sep="\n    ",
        )
        bad += len(changed) + (not counts["passed"])
    if given.env is not None:
        said, numbers, wrong = installed(given.env, copies.absolute())
        print(
            f"installed packages: {said}; compared: {dict(numbers)}; wrong: {len(wrong)}",
            *wrong,
            sep="\n    ",
        )
        bad += len(wrong)
    return 1 if bad else 0


if __name__ == "__main__":
    sys.exit(main())
