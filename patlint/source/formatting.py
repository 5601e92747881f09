"""`%` and `.format` on constant texts, keeping the places of what is put together.

Every conversion is computed by Python itself, one at a time; the whole is computed by Python once more and
compared, so that a format read wrongly here is given up and never believed.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

from patlint.source import reasons
from patlint.source.literals import Run
from patlint.source.reasons import Opaque
from patlint.source.spelled import Listed, Spelled, check_length, cut, join, merged

_PERCENT = re.compile(r"%(?:\(([^()]*)\))?([#0 +-]*)(\d*)((?:\.\d*)?)[hlL]?(.)", re.DOTALL)
_FIELD = re.compile(r"\{\{|\}\}|\{([A-Za-z0-9_]*)((?:![rsa])?)((?::[^{}]*)?)\}|[{}]")
_WIDEST = 4
"""Digits of a width in a format; more are given up before Python makes the text."""


def plain(value: object) -> Any:
    """The value as Python has it, without places."""
    match value:
        case Spelled():
            return value.value
        case tuple():
            return tuple(plain(item) for item in value)
        case dict():
            return {name: plain(item) for name, item in value.items()}
        case _:
            return value


def percent(template: Spelled, arguments: object) -> Spelled:
    """`template % arguments`; `arguments` is a text, an int, or a tuple or dict of them."""
    is_bytes = isinstance(template.value, bytes)
    text = template.value.decode("latin-1") if isinstance(template.value, bytes) else template.value
    if isinstance(arguments, Listed):
        raise Opaque(reasons.FORMATTED)
    queue = list(arguments) if isinstance(arguments, tuple) else [arguments]
    parts: list[Spelled] = []
    at = 0
    for found in _PERCENT.finditer(text):
        name, _, width, precision, kind = found.groups()
        parts.append(cut(template, at, found.start()))
        at = found.end()
        field = cut(template, found.start(), at)
        if kind == "%":
            if found[0] != "%%":
                raise Opaque(reasons.FORMATTED)
            parts.append(merged(field, b"%" if is_bytes else "%"))
            continue
        if len(width) > _WIDEST or len(precision) > _WIDEST:
            raise Opaque(reasons.TOO_LONG)
        if name is not None:
            if not isinstance(arguments, dict) or name not in arguments:
                raise Opaque(reasons.FORMATTED)
            value = arguments[name]
        else:
            if not queue:
                raise Opaque(reasons.FORMATTED)
            value = queue.pop(0)
        bare = "%" + found[0][found.end(1) + 1 - found.start() :] if name is not None else found[0]
        parts.append(_percent_one(field, bare, value, is_bytes))
    parts.append(cut(template, at, len(text)))
    result = join(parts)
    return _checked(result, lambda: template.value % plain(arguments))


def _percent_one(field: Spelled, conversion: str, value: object, is_bytes: bool) -> Spelled:
    simple = conversion in ("%s", "%b") if is_bytes else conversion == "%s"
    if simple and isinstance(value, Spelled) and isinstance(value.value, bytes) == is_bytes:
        return value
    given: str | bytes = conversion.encode("latin-1") if is_bytes else conversion
    return _computed(field, lambda: given % (_formattable(value),))


def braces(template: Spelled, positional: Sequence[object], named: Mapping[str, object]) -> Spelled:
    """`template.format(*positional, **named)` of texts and ints."""
    if not isinstance(template.value, str):
        raise Opaque(reasons.FORMATTED)
    text = template.value
    parts: list[Spelled] = []
    at = count = 0
    for found in _FIELD.finditer(text):
        parts.append(cut(template, at, found.start()))
        at = found.end()
        field = cut(template, found.start(), at)
        if found[0] in ("{{", "}}"):
            parts.append(merged(field, found[0][0]))
            continue
        if found[0] in ("{", "}"):
            raise Opaque(reasons.FORMATTED)
        name, conversion, spec = found.groups()
        if name == "":
            name = str(count)
            count += 1
        if len(re.sub(r"\D", "", spec)) > _WIDEST:
            raise Opaque(reasons.TOO_LONG)
        try:
            value = positional[int(name)] if name.isdecimal() else named[name]
        except (IndexError, KeyError, ValueError):
            raise Opaque(reasons.FORMATTED) from None
        if conversion in ("", "!s") and spec in ("", ":") and _is_str(value):
            assert isinstance(value, Spelled)
            parts.append(value)
        else:
            bare = "{" + conversion + spec + "}"
            parts.append(_computed(field, lambda bare=bare, value=value: bare.format(_formattable(value))))
    parts.append(cut(template, at, len(text)))
    for given in (*positional, *named.values()):
        _formattable(given)
    arguments = [plain(value) for value in positional]
    keywords = {name: plain(value) for name, value in named.items()}
    return _checked(join(parts), lambda: text.format(*arguments, **keywords))


def replacement_field(place_of: Spelled, value: object, conversion: int, spec: str) -> Spelled:
    """A field of an f-string: `value` formatted, its own places kept where nothing was changed."""
    if conversion in (-1, ord("s")) and not spec and _is_str(value):
        assert isinstance(value, Spelled)
        return value
    if len(re.sub(r"\D", "", spec)) > _WIDEST:
        raise Opaque(reasons.TOO_LONG)
    bare = "{" + ("" if conversion == -1 else "!" + chr(conversion)) + "}"
    if spec:
        bare = bare[:-1] + ":" + spec + "}"
    return _computed(place_of, lambda: bare.format(_formattable(value)))


def _is_str(value: object) -> bool:
    return isinstance(value, Spelled) and isinstance(value.value, str)


def _formattable(value: object) -> Any:
    """A text or number as Python has it; how a sequence is written is not followed."""
    if isinstance(value, (Spelled, int)):
        return plain(value)
    raise Opaque(reasons.FORMATTED)


def _computed(field: Spelled, compute: Any) -> Spelled:
    """A text that Python makes, standing at the place of `field`."""
    try:
        value = compute()
    except Opaque:
        raise
    except Exception:  # a format of any value may raise anything
        raise Opaque(reasons.FORMATTED) from None
    check_length(len(value))
    place = merged(field, "x").runs[0].whole
    return Spelled(value, (Run(value, place, False, (), ()),) if value else ())


def _checked(result: Spelled, compute: Any) -> Spelled:
    try:
        expected = compute()
    except Exception:
        raise Opaque(reasons.FORMATTED) from None
    if expected != result.value:
        raise Opaque(reasons.FORMATTED)
    return result
