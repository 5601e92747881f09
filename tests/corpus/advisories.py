r"""Shapes behind published advisories for Python packages and CPython, and forms without the fault.

The numbers, the packages and what was slow are told from memory; the patterns are written for this table, with the
fault of the original and nothing else of it. A row: advisory, package, pattern, manner, least growth (0 for
exponential), and the repaired pattern in the same manner, of which nothing worse than `left` may be said (1: nothing
at all; 2: what the search's beginning afresh leaves).
"""

from __future__ import annotations

ADVISORIES: tuple[tuple[str, str, str, str, int, str, int], ...] = (
    ("CVE-2018-1060", "poplib", r"\.*\s*x?\s*\Z", "match", 2, r"\.*\s*(?:x\s*)?\Z", 1),
    ("CVE-2018-1061", "difflib", r"\s*#?\s*$", "match", 2, r"\s*(?:#\s*)?$", 1),
    ("CVE-2018-7536", "Django", r"\w[^@]+\.(?:com|net)$", "search", 2, r"\A\w[^@.]+\.(?:com|net)$", 1),
    ("CVE-2018-7537", "Django", r"(?:\w[-\w]*|&.*?;)+>", "search", 0, r"\b(?:\w[-\w]*+|&[^;&]*;)++>", 2),
    (
        "CVE-2020-6817",
        "bleach",
        r"(?:\s*[-\w]+\s*:\s*[^:;]*(?:;|$))*$",
        "match",
        2,
        r"(?:[-\w]+:[^:;]*(?:;|$))*$",
        1,
    ),
    (
        "CVE-2020-8492",
        "urllib.request",
        r"(?:.*,)*[ \t]*([^ \t]+)[ \t]+realm=",
        "match",
        0,
        r"(?:[^,]*,)*[ \t]+realm=",
        1,
    ),
    ("CVE-2020-28493", "Jinja2", r"\S+@\w[\w.-]*\.\w+$", "search", 2, r"\A[^@\s]+@\w[\w-]*\.\w+$", 1),
    (
        "CVE-2021-3733",
        "urllib.request",
        r"(?:^|,)[ \t]*([^ \t]+)[ \t]+realm=",
        "search",
        2,
        r"(?:^|,)[ \t]*([^ \t,]+)[ \t]+realm=",
        1,
    ),
    ("CVE-2021-3828", "nltk", r"(?:[0-9]+ ?)+:", "match", 0, r"[0-9]+(?: [0-9]+)*:", 1),
    (
        "CVE-2021-23437",
        "Pillow",
        r"hsl\(\s*[0-9]*\.?[0-9]+%\)",
        "match",
        2,
        r"hsl\(\s*[0-9]+(?:\.[0-9]+)?%\)",
        1,
    ),
    ("CVE-2021-25292", "Pillow", r"\s*xref\s+[0-9]+", "search", 2, r"\bxref\s{1,20}[0-9]+", 1),
    ("CVE-2021-27291", "Pygments", r'"(?:[^"\\]*(?:\\.)?)*"', "match", 0, r'"[^"\\]*(?:\\.[^"\\]*)*"', 1),
    ("CVE-2021-32838", "flask-restx", r"(?:[\w.]+)+@", "match", 0, r"[\w.]+@", 1),
    ("CVE-2021-33503", "urllib3", r"(?:(.*)@)?(.*):[0-9]*$", "match", 2, r"(?:([^@]*)@)?([^@:]*):[0-9]*$", 1),
    ("CVE-2021-43854", "nltk", r"\S*[.?!](?=\s+\S)", "scan", 2, r"[.?!](?=\s\S)", 1),
    (
        "CVE-2022-1930",
        "eth-account",
        r"[a-z]+(?:\[([1-9]\d*)*\])*$",
        "match",
        0,
        r"[a-z]+(?:\[(?:[1-9]\d*)?\])*$",
        1,
    ),
    ("CVE-2022-40896", "Pygments", r"@[a-z]+(?:\s*\w*)*=", "match", 0, r"@[a-z]+(?:\s+\w+)*=", 1),
    (
        "CVE-2022-40897",
        "setuptools",
        r"<[^>]*\srel\s*=\s*([^'>]+)[^>]*>",
        "search",
        3,
        r"\A<a\srel=([^'>\s]+)>",
        1,
    ),
    ("CVE-2022-40898", "wheel", r"(.+?)-(.+?)-(.+?)\.whl$", "match", 3, r"([^-]+)-([^-]+)-([^-]+)\.whl$", 1),
    (
        "CVE-2022-40899",
        "future",
        r"\d\s*[a-z]*\s*(?:\(\w+\))?\s*$",
        "match",
        3,
        r"\d(?:\s*[a-z]+)?(?:\s*\(\w+\))?$",
        1,
    ),
    ("CVE-2022-42964", "pymatgen", r"(?:\s*[-\w]+\s*)*$", "match", 0, r"\s*(?:[-\w]+(?:\s+[-\w]+)*\s*)?$", 1),
    ("CVE-2022-42969", "py", r"\s*(\d+)\s*(\S+) (.*)$", "match", 2, r"\s*(\d+)\s+([a-z]+) ([^\n]*)", 1),
    ("CVE-2023-26112", "configobj", r"(.+?)\((.*)\)$", "match", 2, r"([^(]+)\(([^()]*)\)$", 1),
    ("CVE-2024-6232", "tarfile", r"[0-9]+ [^=]+=", "search", 2, r"\A[0-9]{1,20} [^=]+=", 1),
    ("CVE-2024-27351", "Django", r"<[^>]+?>|[^<>\s]+", "scan", 2, r"<[^<>]+>|[^<>\s]+", 1),
)
