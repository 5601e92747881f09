r"""patlint against facts from outside. Each check names its source, and says where the value is from memory."""

from __future__ import annotations

import calendar
import ipaddress
import math
import re
import sys
import unicodedata
from datetime import date

import pytest

from patlint.language import Language, ambiguity, relate
from patlint.limits import DEFAULT_LIMITS, Limits
from patlint.machine.nfa import Nfa
from patlint.machine.program import compile_tree
from patlint.machine.walks import walks
from patlint.syntax.parser import parse

ASCII = int(re.ASCII)

OCTET = "25[0-5]|2[0-4][0-9]|1[0-9]{2}|[1-9]?[0-9]"
LONG_MONTH = "(?:0[13578]|1[02])-(?:0[1-9]|[12][0-9]|3[01])"
SHORT_MONTH = "(?:0[469]|11)-(?:0[1-9]|[12][0-9]|30)"
FEBRUARY = "02-(?:0[1-9]|1[0-9]|2[0-8])"

# What the whole grammar counts: name with source, pattern, number of texts.
TOTALS = (
    ("dec-octet; RFC 3986, appendix A; from memory", OCTET, 256),
    ("IPv4address; RFC 3986, appendix A; from memory", rf"(?:{OCTET})(?:\.(?:{OCTET})){{3}}", 2**32),
    (
        "partial-time without fraction; RFC 3339, section 5.6; from memory",
        r"([01]\d|2[0-3]):[0-5]\d:([0-5]\d|60)",
        87_840,
    ),
    (
        "UUID version 4; RFC 9562, section 5.4; from memory",
        "[0-9a-f]{8}-[0-9a-f]{4}-4[0-9a-f]{3}-[89ab][0-9a-f]{3}-[0-9a-f]{12}",
        2**122,
    ),
    (
        "container number before its check digit; ISO 6346; from memory",
        "[A-Z]{3}[UJZ][0-9]{6}",
        26**3 * 3 * 10**6,
    ),
    (
        "BIC; ISO 9362, 2014 form; from memory",
        "[A-Z0-9]{4}[A-Z]{2}[A-Z0-9]{2}([A-Z0-9]{3})?",
        36**4 * 26**2 * 36**2 * (1 + 36**3),
    ),
    (
        "month-day of a common year; Python's calendar",
        f"{LONG_MONTH}|{SHORT_MONTH}|{FEBRUARY}",
        sum(calendar.monthrange(2023, month)[1] for month in range(1, 13)),
    ),
    ("h16; RFC 3986, appendix A; from memory", "[0-9A-Fa-f]{1,4}", 22 + 22**2 + 22**3 + 22**4),
    ("HEXDIG of RFC 5234 (upper case); appendix B.1; from memory", "[0-9A-F]", 16),
)


@pytest.mark.parametrize(("source", "pattern", "total"), TOTALS)
def test_texts_of_published_grammars(source: str, pattern: str, total: int) -> None:
    assert Language(pattern, ASCII).total() == total


def fibonacci(n: int) -> int:
    a, b = 0, 1
    for _ in range(n):
        a, b = b, a + b
    return a


def tribonacci(n: int) -> int:
    a, b, c = 0, 0, 1
    for _ in range(n):
        a, b, c = b, c, a + b + c
    return a


# Texts of length n over the letters named; the sequences are computed here by their recurrences.
SEQUENCES = (
    ("binary texts without 11; OEIS A000045; from memory", "(?:0|10)*1?", lambda n: fibonacci(n + 2)),
    ("the same by look-ahead", "(?!.*11)[01]*", lambda n: fibonacci(n + 2)),
    ("binary texts without 111; OEIS A000073; from memory", "(?!.*111)[01]*", lambda n: tribonacci(n + 3)),
    ("an even number of a; OEIS A011782; from memory", "(?:b*ab*a)*b*", lambda n: 2 ** max(n - 1, 0)),
    (
        "compositions of n into 1 and 2, as a|bb; OEIS A000045; from memory",
        "(?:a|bb)*",
        lambda n: fibonacci(n + 1),
    ),
    ("exactly two b among n; binomial coefficients", "a*ba*ba*", lambda n: math.comb(n, 2)),
)


@pytest.mark.parametrize(("source", "pattern", "terms"), SEQUENCES)
def test_integer_sequences(source: str, pattern: str, terms) -> None:  # type: ignore[no-untyped-def]
    language = Language(pattern)
    assert [language.count(n) for n in range(30)] == [terms(n) for n in range(30)]


def test_the_sequences_begin_as_published() -> None:
    """OEIS A000045, A000073 and A011782, first terms from memory."""
    assert [fibonacci(n + 2) for n in range(6)] == [1, 2, 3, 5, 8, 13]
    assert [tribonacci(n + 3) for n in range(6)] == [1, 2, 4, 7, 13, 24]
    assert [2 ** max(n - 1, 0) for n in range(5)] == [1, 1, 2, 4, 8]


def over(letters: str, pattern: str, limits: Limits = DEFAULT_LIMITS) -> int:
    """States of the minimal complete automaton over `letters` alone.

    Ours are complete over all of Unicode. Let every text that holds another letter be accepted as well as none of
    them: with `(?s:.)*[^letters](?s:.)*` added, another letter leads to one further state that accepts all; that
    state is taken away again unless the letters alone lead there too.
    """
    language = Language(pattern, limits=limits) | Language(f"(?s:.)*[^{letters}](?s:.)*")
    dfa = language.dfa
    classes = [dfa.alphabet.classify(ord(letter)) for letter in letters]
    reached = [0]
    for state in reached:
        for symbol in classes:
            if dfa.table[state][symbol] not in reached:
                reached.append(dfa.table[state][symbol])
    return len(reached)


# Source: Aho, Lam, Sethi and Ullman, Compilers, 2nd edition, section 3.9 (the first row); Meyer and Fischer 1971 and
# Hopcroft, Motwani and Ullman, section 2.3.6 (the n-th letter from the end); standard exercises (the others). All
# from memory.
SIZES = (
    ("ab", "(a|b)*abb", 4),
    *(("ab", f"(a|b)*a(a|b){{{n - 1}}}", 2**n) for n in (1, 2, 3, 5, 8)),
    ("01", "(?:0|1(?:01*0)*1)*", 3),
    *(("ab", f"[ab]*a{{{k}}}[ab]*", k + 1) for k in (1, 2, 5, 9)),
    ("ab", "(?:b*ab*a)*b*", 2),
    ("a", "(?:aaaaaaa)*", 7),
    ("a", "(?:aa|aaa)*", 3),
)


@pytest.mark.parametrize(("letters", "pattern", "states"), SIZES)
def test_sizes_of_minimal_automata(letters: str, pattern: str, states: int) -> None:
    assert over(letters, pattern) == states


def test_binary_multiples_of_five() -> None:
    """Five states, by the remainders. Source: standard exercise; the pattern comes from removing states by hand."""
    pattern = "(?:0|1(?:10|(?:0|11)(?:01*01)*01*00)*(?:0|11)(?:01*01)*1)*"
    language = Language(pattern)
    assert all(language.accepts(f"{n:b}") == (n % 5 == 0) for n in range(1, 600))
    assert over("01", pattern) == 5


def test_categories_over_all_code_points() -> None:
    r"""`\d` is Nd (Unicode, as `unicodedata` has it); `\s` and `\w` as `re` itself finds them."""
    everything = "".join(map(chr, range(0x110000)))
    decimal = {ord(char) for char in everything if unicodedata.category(char) == "Nd"}
    for pattern in (r"\d", r"\s", r"\w", r"(?i)[a-z]", r"(?a)\w", r"(?i)\u0130"):
        found = {ord(char) for char in re.findall(pattern, everything)}
        language = Language(pattern)
        assert language.count(1) == language.total() == len(found)
        dfa = language.dfa
        taken = [
            chars for chars, to in zip(dfa.alphabet.classes, dfa.table[0], strict=True) if dfa.accepting[to]
        ]
        assert {code for chars in taken for code in chars} == found
        assert pattern != r"\d" or found == decimal


# Published under Semantic Versioning 2.0.0, FAQ; both from memory. One with named groups, one with numbered ones.
SEMVER_NAMED = (
    r"^(?P<major>0|[1-9]\d*)\.(?P<minor>0|[1-9]\d*)\.(?P<patch>0|[1-9]\d*)"
    r"(?:-(?P<prerelease>(?:0|[1-9]\d*|\d*[a-zA-Z-][0-9a-zA-Z-]*)(?:\.(?:0|[1-9]\d*|\d*[a-zA-Z-][0-9a-zA-Z-]*))*))?"
    r"(?:\+(?P<buildmetadata>[0-9a-zA-Z-]+(?:\.[0-9a-zA-Z-]+)*))?$"
)
SEMVER_NUMBERED = re.sub(r"\?P<\w+>", "", SEMVER_NAMED)
VALID = "0.0.4 1.2.3 10.20.30 1.1.2-prerelease+meta 1.0.0-alpha.1 1.0.0-0A.is.legal 1.2.3----RC-SNAPSHOT.12.9.1--.12"
INVALID = "1 1.2 1.2.3-0123 1.1.2+.123 +invalid alpha 01.1.1 1.01.1 1.2.3.DEV 1.2-SNAPSHOT -1.0.3-gamma+b7718"


def test_the_two_expressions_for_semantic_versions_are_equal() -> None:
    named, numbered = Language(SEMVER_NAMED, ASCII), Language(SEMVER_NUMBERED, ASCII)
    assert SEMVER_NAMED != SEMVER_NUMBERED and named == numbered
    assert all(map(named.accepts, VALID.split())) and not any(map(named.accepts, INVALID.split()))
    assert len(VALID.split()) == 7 and len(INVALID.split()) == 11


def test_the_expression_for_uris_matches_every_text() -> None:
    """RFC 3986, appendix B; the expression from memory. The dots of `(.*)` stop at a line feed under fullmatch."""
    pattern = r"^(([^:/?#]+):)?(//([^/?#]*))?([^?#]*)(\?([^#]*))?(#(.*))?"
    assert Language(pattern, mode="match").is_universal()
    assert Language(pattern, mode="search").is_universal()
    assert not Language(pattern).is_universal()
    assert Language(pattern, int(re.DOTALL)).is_universal()


def test_the_expression_for_mail_addresses() -> None:
    """HTML Living Standard, e-mail state of input, from memory: labels of at most 63 characters, and no way back."""
    pattern = (
        r"^[a-zA-Z0-9.!#$%&'*+\/=?^_`{|}~-]+@[a-zA-Z0-9](?:[a-zA-Z0-9-]{0,61}[a-zA-Z0-9])?"
        r"(?:\.[a-zA-Z0-9](?:[a-zA-Z0-9-]{0,61}[a-zA-Z0-9])?)*$"
    )
    address = Language(pattern, ASCII)
    assert address.accepts("a@" + "b" * 63) and not address.accepts("a@" + "b" * 64)
    assert not address.accepts("a@-b") and not address.accepts("a@b.")
    label = r"(?!-)[a-zA-Z0-9-]{1,63}(?<!-)"
    assert address == Language(rf"[a-zA-Z0-9.!#$%&'*+/=?^_`{{|}}~-]+@{label}(?:\.{label})*", ASCII)
    found = ambiguity(pattern, ASCII, "match")
    assert (found.growth, found.undecided) == (None, None)


# RFC 5234, appendix B.1; from memory: the code points of each rule.
CORE_RULES = (
    ("ALPHA", "[A-Za-z]", {*range(0x41, 0x5B), *range(0x61, 0x7B)}),
    ("DIGIT", r"(?a)\d", set(range(0x30, 0x3A))),
    ("WSP", r"[ \t]", {0x20, 0x09}),
    ("VCHAR", "[!-~]", set(range(0x21, 0x7F))),
    ("CTL", r"[\x00-\x1f\x7f]", {*range(0x20), 0x7F}),
    ("OCTET", "(?s).", set(range(256))),
)


@pytest.mark.parametrize(("rule", "pattern", "codes"), CORE_RULES)
def test_core_rules(rule: str, pattern: str, codes: set[int]) -> None:
    language = Language(pattern.encode())
    assert language.count(1) == len(codes) and language.total() == len(codes)
    assert {code for code in range(256) if language.accepts(bytes([code]))} == codes


def test_line_ends_are_those_of_splitlines() -> None:
    """Python library reference, str.splitlines; compared with the method over all code points."""
    ends = Language(r"\r\n|[\n\v\f\r\x1c\x1d\x1e\x85\u2028\u2029]")
    splitting = [chr(code) for code in range(0x110000) if len(f"a{chr(code)}b".splitlines()) == 2]
    assert ends.total() == len(splitting) + 1 == 11
    assert all(map(ends.accepts, splitting)) and ends.accepts("\r\n") and not ends.accepts("\n\r")


def accepting_paths(pattern: str, text: str) -> int:
    """How many paths read the whole of `text`, counted on the graph of walks (ways up to 2 are exact there)."""
    nfa = Nfa(compile_tree(parse(f"(?:{pattern})!")), DEFAULT_LIMITS)
    graph = walks(nfa, False)
    counts = {node: 1 for node in graph.entry}
    for char in text:
        symbol = 1 << nfa.alphabet.classify(ord(char))
        after: dict[int, int] = {}
        for node, paths in counts.items():
            for edge in graph.edges[node]:
                if edge.mask & symbol:
                    after[edge.target] = after.get(edge.target, 0) + paths * edge.ways
        counts = after
    bang = next(
        node for node, span in enumerate(graph.spans) if span is not None and span[0] == len(pattern) + 4
    )
    return counts.get(bang, 0)


# Source: stars and bars; compositions into 1 and 2; the product rule; definition.
PATHS = (
    ("a*", lambda n: 1),
    ("a*a*", lambda n: math.comb(n + 1, 1)),
    ("a*a*a*", lambda n: math.comb(n + 2, 2)),
    ("a*a*a*a*", lambda n: math.comb(n + 3, 3)),
    ("(?:a|aa)*", lambda n: fibonacci(n + 1)),
    ("(?:a|a)*", lambda n: 2**n),
    ("(?:a|(a)|(?:a))*", lambda n: 3**n),
    ("(?:ab|a)*b?", lambda n: 1),
)


@pytest.mark.parametrize(("pattern", "paths"), PATHS)
def test_numbers_of_accepting_paths(pattern: str, paths) -> None:  # type: ignore[no-untyped-def]
    """Of a**n, n from one on; between two nodes at most two ways are told apart, so three stand apart here."""
    assert [accepting_paths(pattern, "a" * n) for n in range(1, 9)] == [paths(n) for n in range(1, 9)]


def test_paths_of_a_chain_whose_words_differ() -> None:
    """Source: Weber and Seidl 1991 (degree 2 on a**n b**n, 1 on any power of one word); the product rule."""
    for n in range(1, 8):
        assert accepting_paths("a*a*b*b*", "a" * n + "b" * n) == (n + 1) ** 2
        assert accepting_paths("a*a*xb*b*", "a" * n + "x" + "b" * n) == (n + 1) ** 2


# Common practice, no source.
def test_facts_of_the_trade() -> None:
    assert Language("^a$", mode="match").accepts("a\n") and not Language(r"^a\Z", mode="match").accepts("a\n")
    assert Language(r"\d").count(1) > 300 and Language(r"(?a)\d").count(1) == 10
    assert {t for t in "kK\u212as\u017f" if Language("(?i)k|s").accepts(t)} == set("kK\u212as\u017f")
    assert not Language("(?ia)k").accepts("\u212a")
    assert sys.maxunicode == 0x10FFFF and Language("(?s).").total() == sys.maxunicode + 1


# Source: RFC 3986, appendix A (the grammar) and appendix B (the splitting expression), from memory. ABNF's
# letters stand for both cases; the grammar's rules are written out of each other as in the appendix.
def _uri_rules() -> dict[str, str]:
    rules: dict[str, str] = {}
    rules["unreserved"] = r"[A-Za-z0-9\-._~]"
    rules["sub-delims"] = r"[!$&'()*+,;=]"
    encoded = r"%[0-9A-Fa-f]{2}"
    both = rf"{rules['unreserved']}|{rules['sub-delims']}|{encoded}"
    pchar = rf"(?:{both}|[:@])"
    rules["scheme"] = r"[A-Za-z][A-Za-z0-9+\-.]*"
    octet = r"(?:[0-9]|[1-9][0-9]|1[0-9]{2}|2[0-4][0-9]|25[0-5])"
    rules["IPv4address"] = rf"{octet}\.{octet}\.{octet}\.{octet}"
    rules["reg-name"] = rf"(?:{both})*"
    h16 = r"[0-9A-Fa-f]{1,4}"
    ls32 = rf"(?:{h16}:{h16}|{rules['IPv4address']})"
    rows = [rf"(?:{h16}:){{6}}{ls32}", rf"::(?:{h16}:){{5}}{ls32}", rf"(?:{h16})?::(?:{h16}:){{4}}{ls32}"]
    rows += [
        rf"(?:(?:{h16}:){{0,{left}}}{h16})?::(?:{h16}:){{{right}}}{ls32}"
        for left, right in ((1, 3), (2, 2), (3, 1))
    ]
    rows += [rf"(?:(?:{h16}:){{0,4}}{h16})?::{ls32}", rf"(?:(?:{h16}:){{0,5}}{h16})?::{h16}"]
    rows += [rf"(?:(?:{h16}:){{0,6}}{h16})?::"]
    rules["IPv6address"] = "|".join(rows)
    future = rf"[vV][0-9A-Fa-f]+\.(?:{rules['unreserved']}|{rules['sub-delims']}|:)+"
    host = rf"(?:\[(?:{rules['IPv6address']}|{future})\]|{rules['IPv4address']}|{rules['reg-name']})"
    rules["authority"] = rf"(?:(?:{both}|:)*@)?{host}(?::[0-9]*)?"
    segment = rf"{pchar}*"
    rules["path-abempty"] = rf"(?:/{segment})*"
    rules["path-absolute"] = rf"/(?:{pchar}+(?:/{segment})*)?"
    rules["path-noscheme"] = rf"(?:{both}|@)+(?:/{segment})*"
    rules["path-rootless"] = rf"{pchar}+(?:/{segment})*"
    rules["query"] = rules["fragment"] = rf"(?:{pchar}|[/?])*"
    hier = rf"(?://{rules['authority']}{rules['path-abempty']}|{rules['path-absolute']}|{rules['path-rootless']}|)"
    rest = rf"(?:\?{rules['query']})?"
    rules["absolute-URI"] = rf"{rules['scheme']}:{hier}{rest}"
    rules["URI"] = rf"{rules['absolute-URI']}(?:#{rules['fragment']})?"
    relative = rf"(?://{rules['authority']}{rules['path-abempty']}|{rules['path-absolute']}|{rules['path-noscheme']}|)"
    rules["relative-ref"] = rf"{relative}{rest}(?:#{rules['fragment']})?"
    return rules


APPENDIX_B = {
    "scheme": "[^:/?#]+",
    "authority": "[^/?#]*",
    "path": "[^?#]*",
    "query": "[^#]*",
    "fragment": ".*",
    "whole": r"^(([^:/?#]+):)?(//([^/?#]*))?([^?#]*)(\?([^#]*))?(#(.*))?",
}


@pytest.mark.parametrize(
    ("rule", "part"),
    [
        ("scheme", "scheme"),
        ("authority", "authority"),
        ("path-abempty", "path"),
        ("path-absolute", "path"),
        ("path-noscheme", "path"),
        ("path-rootless", "path"),
        ("query", "query"),
        ("fragment", "fragment"),
        ("URI", "whole"),
        ("relative-ref", "whole"),
    ],
)
def test_rules_of_the_uri_grammar_lie_within_the_parts_of_the_splitting_expression(
    rule: str, part: str
) -> None:
    assert relate(_uri_rules()[rule], APPENDIX_B[part]).word == "within"


@pytest.mark.parametrize(
    ("first", "second", "word", "where"),
    [
        ("query", "fragment", "equal", "appendix A"),
        ("IPv4address", "reg-name", "within", "section 3.2.2: a host that fits both is an address"),
        ("IPv4address", "IPv6address", "disjoint", "appendix A"),
        ("path-absolute", "path-abempty", "within", "appendix A"),
        ("path-noscheme", "path-rootless", "within", "appendix A"),
        ("path-absolute", "path-rootless", "disjoint", "section 3.3: begins with a slash, or not"),
        ("absolute-URI", "URI", "within", "section 4.3: without a fragment"),
        ("URI", "relative-ref", "disjoint", "section 4.1: told apart by the scheme and its colon"),
    ],
)
def test_rules_of_the_uri_grammar_beside_each_other(first: str, second: str, word: str, where: str) -> None:
    rules = _uri_rules()
    assert relate(rules[first], rules[second]).word == word, where


def test_addresses_are_those_that_python_reads() -> None:
    """Source: the library's `ipaddress`, on texts in and near the language (it also takes a zone, after `%`)."""
    address = Language(_uri_rules()["IPv6address"], re.ASCII)
    texts = [str(text) for text in address.samples(150, 3)] + [
        str(text) for text in (~address).samples(100, 4)
    ]
    texts += [text[:place] + text[place + 1 :] for place, text in enumerate(texts[:150]) if place < len(text)]
    taken = 0
    for text in texts:
        try:
            ipaddress.IPv6Address(text)
            read = "%" not in text
        except ValueError:
            read = False
        assert address.accepts(text) == read, text
        taken += read
    assert 100 < taken < len(texts) - 80


# Source: RFC 3339, section 5.6 (the grammar) and appendix C (the rule for leap years), from memory.
_MONTH_DAY = (
    "(?:(?:0[13578]|1[02])-(?:0[1-9]|[12][0-9]|3[01])|(?:0[469]|11)-(?:0[1-9]|[12][0-9]|30)"
    "|02-(?:0[1-9]|1[0-9]|2[0-8]))"
)
_LEAP = "(?:[0-9]{2}(?:0[48]|[2468][048]|[13579][26])|(?:[02468][048]|[13579][26])00)"
TIMES = {
    "full-date": f"(?!0000)(?:[0-9]{{4}}-{_MONTH_DAY}|{_LEAP}-02-29)",
    "full-date by digits": "[0-9]{4}-[0-9]{2}-[0-9]{2}",
    "time-hour": "[01][0-9]|2[0-3]",
    "time-numoffset": "[+-](?:[01][0-9]|2[0-3]):[0-5][0-9]",
    "time-offset": "[Zz]|[+-](?:[01][0-9]|2[0-3]):[0-5][0-9]",
    "partial-time": r"(?:[01][0-9]|2[0-3]):[0-5][0-9]:(?:[0-5][0-9]|60)(?:\.[0-9]+)?",
    "without leap second": r"(?:[01][0-9]|2[0-3]):[0-5][0-9]:[0-5][0-9](?:\.[0-9]+)?",
}


def test_dates_and_times_of_rfc_3339() -> None:
    dates = Language(TIMES["full-date"])
    assert dates.total() == date.max.toordinal() == 3_652_059  # the library's calendar, years 1 to 9999
    for text in dates.samples(200, 5):
        assert date.fromisoformat(str(text)).isoformat() == text
    assert dates < Language(TIMES["full-date by digits"])
    assert Language(TIMES["time-numoffset"]).total() == 2 * 24 * 60
    assert Language(TIMES["time-offset"]).total() == 2 * 24 * 60 + 2
    assert relate(TIMES["without leap second"], TIMES["partial-time"]).word == "within"
    leap = Language(TIMES["partial-time"]) - Language(TIMES["without leap second"])
    assert leap == Language(r"(?:[01][0-9]|2[0-3]):[0-5][0-9]:60(?:\.[0-9]+)?")
    assert relate(TIMES["full-date"], TIMES["partial-time"]).word == "disjoint"
