"""Declared keys and values in words: what a key may hold, and a value as a scenario writes it."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from typing import Any

from driftwell.forms.declared import (
    Anything,
    Choice,
    Declared,
    Dimensioned,
    Flag,
    Keys,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
    declared_keys,
)
from driftwell.forms.form import Bound, Form

_LONGEST = 60


def needed(declared: Declared, example: object = None) -> str:
    """What a value must be, to follow "needs", e.g. ``a length such as "3.5 mm"``.

    A quantity is shown with `example` where that is text, else with its own.
    """
    match declared:
        case Dimensioned(name, _, usual):
            return f'{name} such as "{example if isinstance(example, str) else usual}"'
        case Number(whole):
            return "a whole number" if whole else "a plain number"
        case Text():
            return f'text such as "{example}"' if isinstance(example, str) else "text in quotes"
        case Flag():
            return "true or false"
        case Anything():
            return "any value"
        case Words(words):
            return either(words)
        case Row() | Several() if isinstance(example, list):
            return f"a list such as {as_found(example)}"
        case Row(entries):
            if all(entry == entries[0] for entry in entries):
                return f"a list of {len(entries)}, each {needed(entries[0])}"
            return "a list of " + ", ".join(needed(entry) for entry in entries)
        case Several(Dimensioned() | Number() | Text() | Words() | Row() | Anything() as entry):
            return f"a list, each entry {needed(entry)}"
        case Several():
            return "a list of tables"
        case Named(entry):
            return f"a table of names, each {needed(entry)}"
        case Keys(form):
            keys = [key.name for key in declared_keys(form).values() if key.required]
            return "a table" + (f" with {_and(keys)}" if keys else "")
        case Choice():
            return _needed_of(declared, example)


def _needed_of(choice: Choice, example: object) -> str:
    kinds = {name for name, _ in choice.kinds}
    parts = [needed(option, example) for name, option in choice.options if name not in kinds]
    if kinds:
        words = either(name for name, _ in choice.kinds)
        parts.append(f"a table with {choice.by} = {words}")
    return ", or ".join(parts)


def either(words: Any) -> str:
    """``"a"``, ``"b"`` or ``"c"``."""
    quoted = [f'"{word}"' for word in words]
    return " or ".join(part for part in (", ".join(quoted[:-1]), *quoted[-1:]) if part)


def _and(words: Sequence[str]) -> str:
    return " and ".join(part for part in (", ".join(words[:-1]), *words[-1:]) if part)


def bound_words(bounds: Sequence[Bound], si_unit: str = "") -> str:
    """The range of a number in words; limits other than 0 carry their unit."""
    words = " and ".join(bound.words() for bound in bounds)
    limits = [
        limit
        for bound in bounds
        for limit in (bound.above, bound.least, bound.below, bound.most, bound.other_than)
        if limit
    ]
    return f"{words} {si_unit}" if limits and si_unit else words


def as_found(value: Any) -> str:
    """A raw value of the file, as TOML and short enough for a message of one line."""
    return _shortened(toml_text(value, depth=3))


def name_found(name: str) -> str:
    """A key as TOML, short enough for a message of one line."""
    return _shortened(name_text(name))


def _shortened(text: str) -> str:
    return text if len(text) <= _LONGEST else text[: _LONGEST - 4] + " ..."


def as_written(declared: Declared, value: Any) -> str:
    """A read value as a scenario would state it, exactly: ``0.0035`` m becomes ``"0.0035 m"``."""
    return toml_text(raw_value(declared, value), depth=50)


def raw_value(declared: Declared, value: Any) -> Any:
    """The raw value (strings, numbers, lists, tables) that reads as `value`."""
    match declared:
        case Dimensioned(_, si_unit):
            return f"{_shortest(float(value))} {si_unit}"
        case Row(entries):
            return [raw_value(entry, part) for entry, part in zip(entries, value, strict=True)]
        case Several(entry):
            return [raw_value(entry, part) for part in value]
        case Named(entry):
            return {name: raw_value(entry, part) for name, part in value.items()}
        case Keys():
            return raw_table(value)
        case Choice():
            return raw_value(_option_of(declared, value), value)
        case _:
            return value


def _shortest(value: float) -> str:
    """The shortest text that reads as this very number."""
    short = f"{value:g}"
    return short if float(short) == value else repr(value)


def raw_table(form: Form) -> dict[str, Any]:
    """The raw table that reads as `form`; keys that are left out by default stay left out."""
    values = ((key, getattr(form, key.attribute)) for key in declared_keys(type(form)).values())
    return {key.name: raw_value(key.holds, value) for key, value in values if value is not None}


def _option_of(choice: Choice, value: Any) -> Declared:
    return next(option for _, option in choice.options if _may_hold(option, value))


def _may_hold(declared: Declared, value: Any) -> bool:
    match declared:
        case Keys(form):
            return isinstance(value, form)
        case Words(words):
            return value in words
        case Text():
            return isinstance(value, str)
        case Flag():
            return isinstance(value, bool)
        case Anything():
            return True
        case Row() | Several():
            return isinstance(value, list | tuple)
        case Dimensioned() | Number():
            return isinstance(value, int | float)
        case Named():
            return isinstance(value, Mapping)
        case Choice(options):
            return any(_may_hold(option, value) for _, option in options)


def toml_text(value: Any, depth: int = 50) -> str:
    """A raw value as TOML on one line; `depth` levels of it, shortened where that is 3 or less."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return quoted(value if depth > 3 else value[: 2 * _LONGEST])
    if isinstance(value, Mapping):
        if depth == 0:
            return "{ ... }"
        pairs = [f"{name_text(key)} = {toml_text(part, depth - 1)}" for key, part in value.items()]
        return "{ " + ", ".join(pairs) + " }" if pairs else "{}"
    if isinstance(value, list | tuple):
        if depth == 0:
            return "[ ... ]"
        shown_parts = value if depth > 3 else value[:_LONGEST]
        return "[" + ", ".join(toml_text(part, depth - 1) for part in shown_parts) + "]"
    if isinstance(value, int) and abs(value) >= 1 << 64:
        return "a whole number of more than 64 bits"
    return str(value)


def name_text(name: str) -> str:
    """A key as TOML: quoted where it needs to be."""
    if name and all(c in _BARE for c in name):
        return name
    return quoted(name)


def quoted(text: str) -> str:
    """Text in quotes on one line, as TOML; what cannot be seen is escaped."""
    return "".join(
        c if c.isprintable() else f"\\U{ord(c):08X}" for c in json.dumps(text, ensure_ascii=False)
    )


_BARE = frozenset("ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789_-")
