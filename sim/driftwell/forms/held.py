"""What a key may hold at one place of a raw table, where a part of it decides by its kind."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from pydantic_core import PydanticCustomError

from driftwell.forms.declared import (
    Choice,
    Declared,
    Dimensioned,
    Keys,
    Named,
    Row,
    Several,
    declared_keys,
)
from driftwell.forms.form import Form
from driftwell.forms.quantities import Quantity

Path = tuple[str | int, ...]


def held_at(path: Path, data: Mapping[str, Any], form: type[Form]) -> tuple[Declared, ...]:
    """All that the key at `path` may hold, none of it a choice; empty where there is no such key.

    data, form : the raw table, and what it is declared as. Where the kind of a part of it decides
        which keys there are, its own kind is taken; where it names none, all kinds are.
    """
    found: tuple[Declared, ...] = (Keys(form),)
    value: Any = data
    for part in path:
        found = tuple(
            option
            for holder in found
            for declared in _entered(holder, part)
            for option in _options(declared, value, part)
        )
        value = _entry(value, part)
    return found


def read_dimensioned(declared: Dimensioned, text: str) -> float:
    """The SI value of a text such as ``"3.5 mm"``.

    Raises
    ------
    ValueError
        The text is not such a quantity; the message says what is needed.
    """
    try:
        return Quantity(declared.name, declared.si_unit, declared.example).read(text)
    except PydanticCustomError as fault:
        raise ValueError(fault.message()) from fault


def _entered(holder: Declared, part: str | int) -> tuple[Declared, ...]:
    match holder:
        case Keys(form):
            key = declared_keys(form).get(str(part))
            return () if key is None else (key.holds,)
        case Row(entries):
            return (entries[part],) if isinstance(part, int) and part < len(entries) else ()
        case Several(entry) if isinstance(part, int):
            return (entry,)
        case Named(entry) if isinstance(part, str):
            return (entry,)
        case _:
            return ()


def _options(declared: Declared, holder: Any, part: str | int) -> tuple[Declared, ...]:
    if not isinstance(declared, Choice):
        return (declared,)
    value = _entry(holder, part)
    kind = value.get(declared.by) if isinstance(value, Mapping) and declared.by else None
    chosen = [option for name, option in declared.options if name == kind]
    return tuple(
        single
        for option in chosen or [option for _, option in declared.options]
        for single in _options(option, holder, part)
    )


def _entry(value: Any, part: str | int) -> Any:
    try:
        return value[part]
    except (LookupError, TypeError):
        return None
