"""Random programs: whatever is resolved is what `re` is given, on every way through the program.

A program has one call of `re` among assignments, branches, loops, tries and nested functions that fight over
two names. It is run with many outcomes of its conditions; where the call was resolved, every run must have
given `re` that text and those flags.
"""

from __future__ import annotations

import random

from patlint.source import read_module
from tests.source.recording import run

PROGRAMS = 2_500
RUNS = 6


class Maker:
    """Writes one program; the choices come from `random`."""

    def __init__(self, choices: random.Random) -> None:
        self.choices = choices
        self.called = False

    def text(self, depth: int = 0) -> str:
        pick = self.choices.choice
        simple = ["'a'", "'b'", "r'c+'", "'[x]' 'y'", "p", "q", "p", "q"]
        if depth > 2:
            return pick(simple)
        inner = self.text(depth + 1)
        return pick(
            [
                *simple * 2,
                f"({inner} + {pick(simple)})",
                f"f'{{p}}{{{{1}}}}{{{pick(['p', 'q'])}}}'",
                f"'(%s)%%' % ({inner})",
                f"'{{}}|{{x}}'.format({inner}, x=q)",
                f"'|'.join([{inner}, 'z'])",
                f"'|'.join(re.escape(w) for w in ('a.', {inner}))",
                f"re.escape({inner})",
                f"({inner}) * 2",
                f"({inner} if cond() else {inner})",
            ]
        )

    def flags(self) -> str:
        return self.choices.choice(["0", "0", "0", "re.I", "F", "re.S | F", "F if cond() else 0"])

    def head(self, target: str) -> str:
        """What a loop goes through; `T` and `L` are tables of the module, the second one is changed."""
        other = "q" if target == "p" else "p"
        return self.choices.choice(
            [
                "_ in range(2)",
                f"{target} in ('a', 'b')",
                f"{target}, {other} in T",
                f"{other}, ({target}, _) in enumerate(T)",
                f"{target} in [{other}, 'g', *('h', {other} + 'i')]",
                f"{target} in {{'k': 'v', 'l': 'w'}}.values()",
                f"{other}, {target} in zip(('k', 'l', 'm'), ['v', {other}])",
                f"_, {target} in sorted({{'k': 'v', 'l': 'w'}}.items())",
                f"{target} in L",
            ]
        )

    def block(self, indent: str, depth: int, name: str) -> list[str]:
        lines: list[str] = []
        for _ in range(self.choices.randint(1, 4)):
            lines += self.statement(indent, depth, name)
        return lines

    def statement(self, indent: str, depth: int, name: str) -> list[str]:
        choice = self.choices
        target = choice.choice(["p", "p", "q"])
        kinds = ["assign"] * 5 + ["call"] * 3 + ["walrus", "augment", "delete"]
        if depth < 3:
            kinds += ["if", "if", "for", "while", "try", "function", "with"]
        kind = choice.choice(kinds)
        inner = indent + " "
        if kind == "assign":
            return [f"{indent}{target} = {self.text()}"]
        if kind == "call":
            if self.called:
                return [f"{indent}pass"]
            self.called = True
            call = f"re.match({self.text(1)}, '', {self.flags()})"
            if choice.random() < 0.2:
                tail = choice.choice(["", "", f" if {target}", " if cond()", f" if {target} == 'a'"])
                return [f"{indent}cond([{call} for {self.head(target)}{tail}])"]
            return [f"{indent}{call}"]
        if kind == "walrus":
            return [f"{indent}cond({target} := {self.text(2)})"]
        if kind == "augment":
            return [f"{indent}{target} += {self.text(2)}"]
        if kind == "delete":
            return [f"{indent}if cond(): del {target}"]
        if kind == "if":
            lines = [f"{indent}if cond():", *self.block(inner, depth + 1, name)]
            if choice.random() < 0.5:
                lines += [f"{indent}else:", *self.block(inner, depth + 1, name)]
            return lines
        if kind == "for":
            lines = [f"{indent}for {self.head(target)}:", *self.block(inner, depth + 1, name)]
            return lines + ([f"{inner}if cond(): {choice.choice(['break', 'continue'])}"])
        if kind == "while":
            return [f"{indent}while cond():", *self.block(inner, depth + 1, name)]
        if kind == "try":
            return [
                f"{indent}try:",
                *self.block(inner, depth + 1, name),
                f"{inner}stop()",
                *self.block(inner, depth + 1, name),
                f"{indent}except ValueError:",
                *self.block(inner, depth + 1, name),
            ]
        if kind == "with":
            return [f"{indent}with ctx() as {target}:", *self.block(inner, depth + 1, name)]
        inside = f"{name}f"
        scope = choice.choice(["", "nonlocal", "global"]) if depth else choice.choice(["", "global"])
        head = f"{indent}def {inside}({choice.choice(['', '', 'p=' + chr(39) + 'd' + chr(39)])}):"
        if scope and "p=" not in head:
            lines = [head, f"{inner}{scope} p", *self.block(inner, depth + 1, inside)]
        else:
            lines = [head, *self.block(inner, depth + 1, inside)]
        return [*lines, f"{indent}{inside}()"]

    def program(self) -> str:
        lines = ["import re", "F = re.M", "T = (('x', 'y'), ['z', 'x+'])", "L = ['a']", "L.append('b')"]
        lines += self.choices.choice([["p = 's'", "q = 't'"], ["q = 'u'"], []])
        lines += self.block("", 0, "g")
        if self.choices.random() < 0.7:
            lines += ["def main():", *self.block(" ", 1, "h"), "main()"]
        return "\n".join(lines) + "\n"


def surroundings(seed: int) -> dict[str, object]:
    """`cond()` and `stop()` that go one way or the other, at most 60 times."""
    outcomes = random.Random(seed)
    left = [60]

    class Context:
        def __enter__(self) -> str:
            return "w"

        def __exit__(self, *_: object) -> None:
            return None

    def cond(*_: object) -> bool:
        left[0] -= 1
        return left[0] > 0 and outcomes.random() < 0.5

    def stop() -> None:
        if outcomes.random() < 0.3:
            raise ValueError

    return {"cond": cond, "stop": stop, "ctx": Context}


def test_resolved_is_what_re_is_given() -> None:
    resolved = several = unresolved = compared = 0
    for seed in range(PROGRAMS):
        source = Maker(random.Random(seed)).program()
        try:
            compile(source, "snippet", "exec")
        except SyntaxError:  # nonlocal without a binding, a global that was used before
            continue
        module = read_module(source, "a.py")
        if "re.match" not in source:
            assert module.sites == () and module.unresolved == ()
            continue
        assert module.sites or module.unresolved, source
        unresolved += len(module.unresolved)
        if module.unresolved:
            continue
        told = {(site.function, site.pattern, site.flags) for site in module.sites}
        resolved += 1
        several += len(told) > 1
        for number in range(RUNS):
            for given in run(source, surroundings(number)):
                compared += 1
                assert given in told, source
    assert resolved > 200 and several > 15, (resolved, several, unresolved, compared)
    assert unresolved > 200 and compared > 1000, (resolved, unresolved, compared)
