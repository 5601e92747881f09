"""`python -m tests.bench.shorten`: how right, how short and how quick suggestions are.

Four measurements, each a plain function that the suite runs in a short form:

- `checked`: every suggestion for random patterns against `re` on short, sampled and near-miss texts, as far as
  it claims (truth, spans, groups);
- `random_automata`: the mean length of expressions for random automata, against removing states in their
  natural order, against the weights of Delgado and Morais (2004) alone, against the bridge states of Han and Wood
  (2007) alone, and against both together. The set-up is that of uniform
  random complete automata: n states, k letters, every transition drawn uniformly, each state final with
  probability 1/2, kept where all n states are reached and the minimal automaton has n states (from memory of
  the literature on the average size of such expressions, Gulan, Gruber and Holzer, and Moreira, Nabais and
  Reis, who draw uniformly as well; no number here is compared with theirs);
- `round_trip`: real patterns made longer by random equivalences, and shortened again;
- `cost`: milliseconds for each of the given patterns.

    python -m tests.bench.shorten --patterns 5000 --dir ../bench-env
"""

from __future__ import annotations

import argparse
import random
import re
import statistics
import sys
import time
import warnings
from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from pathlib import Path

from patlint.language import Language
from patlint.limits import DEFAULT_LIMITS, LimitReached, Saving
from patlint.machine.algebra import Algebra
from patlint.machine.alphabet import Alphabet
from patlint.machine.dfa import Dfa, canonical, minimal
from patlint.machine.expression import eliminated, expression
from patlint.rewrite import suggest
from patlint.rewrite.proof import holds
from patlint.syntax.charset import CharSet
from patlint.syntax.parser import PatternError, parse
from tests.rewrite.oracle import LOOKED_AT, TEXTS, random_pattern

MODES = ("match", "fullmatch", "search")
SHAPES = ((3, 2), (4, 2), (5, 2), (6, 2), (8, 2), (4, 3), (6, 3))
"""States and letters."""
COLUMNS = ("natural", "bridges", "weights", "both", "search")


def near_misses(pattern: str, flags: int, generator: random.Random) -> list[str]:
    """Texts of the language, and such with one character changed, dropped or doubled."""
    try:
        words = [str(word) for word in Language(pattern, flags, "fullmatch").words(12)]
    except (LimitReached, Exception):  # noqa: B014 - whatever is not said exactly has no words
        return []
    out = list(words)
    for word in words:
        for _ in range(3):
            place = generator.randint(0, len(word))
            out.append(word[:place] + generator.choice(["", "a", "b", "x", "\n", word]) + word[place + 1 :])
    return out


def differences(pattern: str, flags: int, generator: random.Random, counts: Counter[str]) -> list[str]:
    """Where a suggestion for `pattern` does something else than it claims; counts what was suggested."""
    try:
        parsed = parse(pattern, flags)
        old = re.compile(pattern, flags)
    except (PatternError, LimitReached, re.error):
        return []
    wrong = []
    texts: list[str] | None = None
    for keeps, mode in ((keeps, mode) for keeps in LOOKED_AT for mode in MODES):
        found = suggest(parsed, mode, keeps, saving=Saving(1, 0))  # type: ignore[arg-type]
        if found is None:
            continue
        assert isinstance(found.pattern, str)
        new = re.compile(found.pattern, flags)
        if texts is None:
            texts = generator.sample(TEXTS, 60) + near_misses(pattern, flags, generator)
        counts[found.keeps] += 1
        counts["texts"] += len(texts)
        again = holds(parsed, parse(found.pattern, flags), [mode], found.keeps, DEFAULT_LIMITS)  # type: ignore[list-item]
        if not again:
            wrong.append(f"{pattern!r} {mode} {keeps}: {found.pattern!r} is not proven a second time")
        look = LOOKED_AT[found.keeps]
        for text in texts:
            if look(old, mode, text) != look(new, mode, text):
                wrong.append(f"{pattern!r} {mode} {keeps}: {found.pattern!r} differs on {text!r}")
                break
    return wrong


def checked(number: int, seed: int = 0) -> tuple[Counter[str], list[str]]:
    """So many random patterns: what was suggested (by what it keeps), and all that is wrong."""
    generator = random.Random(seed)
    counts: Counter[str] = Counter()
    wrong: list[str] = []
    while counts["patterns"] < number:
        pattern = random_pattern(generator, 3)
        if len(pattern) > 60:
            continue
        counts["patterns"] += 1
        wrong += differences(pattern, generator.choice((0, 0, re.I, re.S, re.M)), generator, counts)
    return counts, wrong


def random_automaton(states: int, letters: int, generator: random.Random) -> Dfa:
    """A minimal automaton with so many states, uniform among the complete ones that are drawn."""
    sets = [CharSet.of_range(97 + index, 97 + index) for index in range(letters)]
    rest = CharSet.of_range(0, 0x10FFFF) - CharSet.of_range(97, 96 + letters)
    alphabet = Alphabet(
        (rest, *sets),
        (0, *(97 + index for index in range(letters + 1))),
        (0, *range(1, letters + 1), 0),
    )
    while True:
        rows = [(states, *(generator.randrange(states) for _ in range(letters))) for _ in range(states)]
        rows.append((states,) * (letters + 1))
        accepting = [generator.random() < 0.5 for _ in range(states)] + [False]
        dfa = canonical(minimal(alphabet, rows, accepting))
        if len(dfa) == states + 1:
            return dfa


def random_automata(
    number: int, seed: int = 0, shapes: Sequence[tuple[int, int]] = SHAPES
) -> list[tuple[int, int, dict[str, float]]]:
    """Rows (states, letters, mean length of the expressions by `COLUMNS`)."""
    rows = []
    for states, letters in shapes:
        generator = random.Random(seed)
        lengths: dict[str, list[int]] = {column: [] for column in COLUMNS}
        for _ in range(number):
            dfa = random_automaton(states, letters, generator)
            for column in COLUMNS:
                algebra = Algebra(_letters)
                found = (
                    expression(dfa, algebra, 100_000)
                    if column == "search"
                    else eliminated(dfa, algebra, column)  # type: ignore[arg-type]
                )
                assert found is not None
                lengths[column].append(len(algebra.text(found)))
        rows.append((states, letters, {column: statistics.mean(row) for column, row in lengths.items()}))
    return rows


def _letters(chars: CharSet) -> str:
    codes = list(chars)
    return chr(codes[0]) if len(codes) == 1 else f"[{''.join(map(chr, codes))}]"


# Short patterns as people write them. Source: written for this measurement from common practice, no source.
PLAIN = (
    r"[0-9]+", r"[a-z]+[0-9]*", r"\d{4}-\d{2}-\d{2}", r"[A-Z]{2}[0-9]{6}", r"https?://\S+", r"\s*#.*", r"\w+\s*=\s*\w+",
    r"[+-]?\d+(?:\.\d+)?", r"(?:in|out)bound", r"[A-F0-9]{2}(?::[A-F0-9]{2}){5}", r"x-[a-z]+(?:-[a-z]+)*", r"\\[ntr]",
    r"\"[^\"]*\"", r"[^,;]+[,;]", r"v\d+(?:\.\d+)*", r"(?:crate|box|barrel) \d+", r"<[a-z]+[^>]*>", r"[A-Za-z_]\w*",
    r"\$\{\w+\}", r"[a-z]{3,5}[0-9]?", r"(?:[01]\d|2[0-3]):[0-5]\d", r"\[\d+\]", r"--[a-z]+(?:=\S+)?",
    r"\d+(?:px|em|%)",
    r"(?:ab|cd)+e", r"[01]+b", r"#[0-9a-f]{6}", r"[a-z]+@[a-z]+\.[a-z]{2,3}", r"\d{1,3}(?:,\d{3})*", r"(?:LF|CR)+",
)  # fmt: skip


def lengthened(pattern: str, generator: random.Random, steps: int = 3) -> str | None:
    """`pattern` with up to `steps` parts written in a longer way that means the same; None where none fits."""
    text = pattern
    done = 0
    for _ in range(steps * 6):
        tree = parse(text)
        nodes = [node for node in _nodes(tree.root) if node.span[1] > node.span[0]]
        node = generator.choice(nodes)
        longer = _longer(node, text, generator)
        if longer is None:
            continue
        start, end = node.span
        candidate = f"{text[:start]}{longer}{text[end:]}"
        try:
            same = Language(candidate) == Language(pattern)
        except (PatternError, LimitReached):
            continue
        if same and len(candidate) > len(text):
            text = candidate
            done += 1
            if done == steps:
                break
    return text if done else None


def _nodes(root: object) -> list:  # type: ignore[type-arg]
    from patlint.syntax.tree import walk

    return list(walk(root))  # type: ignore[arg-type]


def _longer(node: object, text: str, generator: random.Random) -> str | None:
    from patlint.syntax import tree as t

    def part(inner: t.Node) -> str:
        return text[inner.span[0] : inner.span[1]]

    match node:
        case t.Repeat(minimum=1, maximum=None, kind="greedy"):
            return generator.choice(
                [f"{part(node.body)}{part(node.body)}*", f"(?:{part(node)})", f"{part(node.body)}{{1,}}"]
            )
        case t.Repeat(minimum=0, maximum=None, kind="greedy"):
            body = part(node.body)
            return generator.choice([f"(?:{body}+)?", f"(?:{body}+|)", f"{body}{{0,}}", f"{body}*{body}*"])
        case t.Repeat(minimum=0, maximum=1, kind="greedy"):
            return generator.choice([f"(?:{part(node.body)}|)", f"{part(node.body)}{{0,1}}"])
        case t.Repeat(minimum=low, maximum=high) if low == high and 2 <= low <= 6:
            return generator.choice([part(node.body) * low, f"{part(node.body)}{{{low},{low}}}"])
        case t.Set() if len(node.items) > 1 and not node.negated:
            items = [text[item.span[0] : item.span[1]] for item in node.items]
            return f"(?:{'|'.join(f'[{item}]' for item in items)})"
        case t.Set(items=(t.Range() as only,), negated=False) if only.high - only.low > 2:
            middle = generator.randrange(only.low + 1, only.high)
            return f"[{chr(only.low)}-{chr(middle)}{chr(middle + 1)}-{chr(only.high)}]"
        case t.ClassEscape() | t.Literal() | t.Set() if part(node).isalnum():
            return generator.choice(
                [f"(?:{part(node)})", f"[{part(node)}]", f"(?:{part(node)}|{part(node)})"]
            )
        case t.Group(index=None):
            return f"(?:{part(node)})"
        case _:
            return None


def round_trip(number: int, seed: int = 0) -> tuple[int, int, list[tuple[str, str, str | None]]]:
    """How many patterns were lengthened, how many came back at the original length or less, and the others."""
    generator = random.Random(seed)
    tried = back = 0
    others: list[tuple[str, str, str | None]] = []
    while tried < number:
        pattern = generator.choice(PLAIN)
        long = lengthened(pattern, generator)
        if long is None:
            continue
        tried += 1
        found = suggest(parse(long), "fullmatch", "language", saving=Saving(1, 0))
        short = long if found is None else str(found.pattern)
        if len(short) <= len(pattern):
            back += 1
        else:
            others.append((pattern, long, None if found is None else short))
    return tried, back, others


def cost(check: Callable[[object], object], sites: Iterable[object]) -> list[float]:
    """Milliseconds that `check` takes for each site, sorted."""
    times = []
    for site in sites:
        begun = time.perf_counter()
        check(site)
        times.append((time.perf_counter() - begun) * 1000)
    return sorted(times)


def bench_sites(folder: Path) -> list[object]:
    """The sites of the bench's files with different patterns."""
    from patlint.source import SourceError, read_module
    from tests.bench.environment import python_files

    sites: dict[object, object] = {}
    for path in python_files(folder):
        try:
            module = read_module(path.read_bytes(), str(path))
        except (OSError, SourceError, RecursionError):
            continue
        for site in module.sites:
            sites.setdefault((site.pattern, site.flags), site)
    return list(sites.values())


def suggestions_of(sites: Sequence[object]) -> tuple[list[float], Counter[str], list[str]]:
    """Costs, numbers and errors of the rule's suggestions for real sites."""
    from patlint.rules.shorter_equivalent import check
    from patlint.rules.subject import Subject

    generator = random.Random(0)
    counts: Counter[str] = Counter()
    wrong: list[str] = []
    times = []
    for site in sites:
        try:
            subject = Subject(site, None, DEFAULT_LIMITS)  # type: ignore[arg-type]
            if subject.parsed is None:
                continue
            subject.exact  # noqa: B018 - the automaton is there for all rules
        except LimitReached:
            continue
        begun = time.perf_counter()
        findings = list(check(subject))
        times.append((time.perf_counter() - begun) * 1000)
        for finding in findings:
            assert finding.suggestion is not None
            counts[finding.suggestion.keeps] += 1
            old, new = subject.site.pattern, finding.suggestion.pattern
            if isinstance(old, str) and isinstance(new, str):
                a, b = re.compile(old, subject.site.flags), re.compile(new, subject.site.flags)
                look = LOOKED_AT[finding.suggestion.keeps]
                for text in near_misses(old, subject.site.flags, generator):
                    counts["texts"] += 1
                    if look(a, finding.mode or "search", text) != look(b, finding.mode or "search", text):
                        wrong.append(f"{old!r}: {new!r} differs on {text!r}")
                        break
    return sorted(times), counts, wrong


def main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.bench.shorten")
    parser.add_argument("--patterns", type=int, default=5000, help="random patterns (default: 5000)")
    parser.add_argument("--automata", type=int, default=100, help="automata of each shape (default: 100)")
    parser.add_argument("--trips", type=int, default=400, help="round trips (default: 400)")
    parser.add_argument("--dir", type=Path, help="the bench's environment; without it real code is left out")
    parser.add_argument("--seed", type=int, default=0)
    given = parser.parse_args()
    warnings.simplefilter("ignore")
    counts, wrong = checked(given.patterns, given.seed)
    print(f"random patterns: {dict(counts)}; wrong: {len(wrong)}", *wrong, sep="\n")
    print("states letters", *(f"{column:>8}" for column in COLUMNS), "  of the better published one")
    for states, letters, means in random_automata(given.automata, given.seed):
        share = means["search"] / min(means[column] for column in ("weights", "bridges", "both"))
        print(f"{states:6} {letters:7}", *(f"{means[column]:8.1f}" for column in COLUMNS), f"{share:10.0%}")
    tried, back, others = round_trip(given.trips, given.seed)
    print(f"round trips: {back} of {tried} ({back / tried:.0%})")
    for pattern, long, found in others[:20]:
        print(f"    {pattern}  {long}  {found}")
    if given.dir is not None:
        times, found_counts, mistakes = suggestions_of(bench_sites(given.dir))
        print(f"bench: {dict(found_counts)}; wrong: {len(mistakes)}", *mistakes, sep="\n")
        p50, p90, p99 = (times[len(times) * part // 100] for part in (50, 90, 99))
        print(f"ms: median {p50:.2f}, 90 % {p90:.1f}, 99 % {p99:.1f}, most {times[-1]:.1f}")
        wrong += mistakes
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
