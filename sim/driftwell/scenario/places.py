"""Where a key stands, in the words of the file: ``[[field]] "rods" voltage.amplitude``."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from driftwell.forms import Form
from driftwell.forms.declared import Keys, Named, Several, Text, declared_keys
from driftwell.forms.wording import as_found, name_found

Path = tuple[str | int, ...]


def place(path: Path, data: Mapping[str, Any], form: type[Form]) -> str:
    """The section and the key at `path` of the raw table `data`, which is declared as `form`."""
    if not path:
        return "the scenario"
    section, value = str(path[0]), data.get(str(path[0]))
    declared = declared_keys(form).get(section)
    holds = None if declared is None else declared.holds
    if isinstance(value, list) and _is_list_of_tables(value, holds):
        if len(path) == 1:
            return f"[[{name_found(section)}]]"
        return _spaced(_entry(section, value, path[1]), keys(path[2:]))
    if isinstance(value, Mapping) and isinstance(holds, Named) and len(path) > 1:
        return _spaced(f"[{name_found(section)}.{name_found(str(path[1]))}]", keys(path[2:]))
    if isinstance(value, Mapping):
        return _spaced(f"[{name_found(section)}]", keys(path[1:]))
    if value is None and isinstance(holds, Several):
        return f"[[{name_found(section)}]]"
    if value is None and isinstance(holds, Keys):
        return _spaced(f"[{name_found(section)}]", keys(path[1:]))
    return keys(path)


def keys(path: Path) -> str:
    """A path within a section: ``shape.sigma entry 3``."""
    text, after_entry = "", False
    for part in path:
        if isinstance(part, int):
            text += f"{',' if after_entry else ''} entry {part + 1}"
        else:
            between = " " if after_entry else "."
            text += f"{between if text else ''}{name_found(part)}"
        after_entry = isinstance(part, int)
    return text.strip()


def ended(sentence: str) -> str:
    """The sentence with a full stop, where it has no end."""
    return sentence if sentence.endswith((".", "?", "!")) else f"{sentence}."


def entry_name(entry: object) -> str | None:
    """The name of an entry of a list of tables, where it has one."""
    name = entry.get("name") if isinstance(entry, Mapping) else None
    return name if isinstance(name, str) and name else None


def _entry(section: str, entries: list[Any], number: str | int) -> str:
    entry = entries[number] if isinstance(number, int) and number < len(entries) else None
    name = entry_name(entry)
    which = f"number {int(number) + 1}" if name is None else as_found(name)
    return f"[[{name_found(section)}]] {which}"


def _is_list_of_tables(value: list[Any], holds: object) -> bool:
    if isinstance(holds, Several) and isinstance(holds.entry, Text):
        return False
    return isinstance(holds, Several) or any(isinstance(entry, Mapping) for entry in value)


def _spaced(*words: str) -> str:
    return " ".join(word for word in words if word)
