"""Settings given beside the file, ``--set key=value``: they take the place of what it says.

A key is the path to a value with dots between; an entry of a list goes by its name or its number:
``duration=1 ms``, ``cloud.load.count=500``, ``field.1.voltage.amplitude=200 V``,
``field."end caps".axial_frequency.value=90 kHz``. A value is read as TOML where it is TOML, else
it is taken as text, so that quantities need no quotes.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Sequence
from copy import deepcopy
from dataclasses import dataclass
from typing import Any

from driftwell.forms import Form
from driftwell.forms.declared import Several, declared_keys
from driftwell.forms.faults import nearest
from driftwell.forms.wording import as_found, quoted, toml_text
from driftwell.scenario.places import ended, entry_name, keys
from driftwell.scenario.source import DEEPEST

Path = tuple[str | int, ...]

_PART = re.compile(r"""\s*("(?:[^"\\]|\\.)*"|'[^']*'|[^.="']+)(\.|=)""")


@dataclass(frozen=True, slots=True)
class Setting:
    """One setting: its text as given, and the path in the raw table that it made or changed.

    key : the path of the value itself, which lies within `path` where tables were made for it
    """

    text: str
    path: Path
    key: Path = ()

    def shown(self) -> str:
        """The setting as a user types it, on one line."""
        text = self.text if self.text.isprintable() else quoted(self.text)
        return f"--set {text if len(text) <= 120 else text[:116] + ' ...'}"


def apply_settings(
    data: dict[str, Any], texts: Sequence[str], form: type[Form]
) -> tuple[list[Setting], list[str]]:
    """Put settings into the raw table `data` (changed), which is declared as `form`.

    Returns
    -------
    settings : those that were put in
    faults : one line for each that could not be
    """
    settings, faults = [], []
    for text in texts:
        try:
            parts, value = _split(text)
            settings.append(Setting(text, *_put(data, parts, _read(value), form)))
        except _UnusableError as fault:
            faults.append(ended(f"{Setting(text, ()).shown()}: {fault}"))
    return settings, faults


def path_of(key: str, data: Mapping[str, Any], form: type[Form]) -> Path:
    """The path of the value that a setting of `key` would put into the raw table `data`.

    Raises
    ------
    LookupError
        No setting can have this key; the text says why.
    """
    try:
        parts, value = _split(f"{key}=0")
        if value != "0":
            raise _UnusableError('needs a key without "=", for example cloud.load.count')
        return _put(deepcopy(dict(data)), parts, 0, form)[1]
    except _UnusableError as fault:
        raise LookupError(str(fault)) from fault


def setting_path(text: str, data: Mapping[str, Any], form: type[Form]) -> Path | None:
    """The path of the value that a setting changes; None where it cannot be put in."""
    settings, _ = apply_settings(deepcopy(dict(data)), [text], form)
    return settings[0].key if settings else None


def setting_text(key: str, value: Any) -> str:
    """The setting ``key=value`` that puts the raw `value` in: without quotes where none are needed.

    It reads back as this very value.
    """
    if isinstance(value, str) and value == value.strip() and value.isprintable():
        plain = _read(value)
        if isinstance(plain, str) and plain == value:
            return f"{key}={value}"
    return f"{key}={toml_text(value)}"


class _UnusableError(Exception):
    """Why a setting cannot be put in."""


def _split(text: str) -> tuple[list[str], str]:
    """The parts of the key, and the text of the value."""
    try:
        text.encode()
    except UnicodeEncodeError as fault:
        raise _UnusableError("is not valid text") from fault
    parts, at = [], 0
    while match := _PART.match(text, at):
        word, at = match[1].strip(), match.end()
        parts.append(_unquoted(word))
        if len(parts) >= DEEPEST:
            raise _UnusableError(f"has more than {DEEPEST} parts in its key")
        if match[2] == "=":
            return parts, text[at:].strip()
    raise _UnusableError('needs the form key=value, for example "duration=1 ms"')


def _unquoted(word: str) -> str:
    if word[:1] not in ('"', "'"):
        return word
    try:
        return next(iter(tomllib.loads(f"{word} = 0")))
    except ValueError as fault:
        raise _UnusableError(f"{as_found(word[1:-1])} is not a key in quotes") from fault


def _read(text: str) -> Any:
    """The value of a text: as TOML where it is TOML, else the text itself."""
    try:
        table = tomllib.loads(f"value = {text}")
    except (ValueError, RecursionError):
        return text
    return table["value"] if table.keys() == {"value"} else text


def _put(data: dict[str, Any], parts: list[str], value: Any, form: type[Form]) -> tuple[Path, Path]:
    """Set the value at the end of `parts`.

    Returns the path of what was changed (the first table made for it, if any), and of the value.
    """
    _refuse_missing_section(data, parts, form)
    holder: Any = data
    path: Path = ()
    made: Path | None = None
    for part in parts[:-1]:
        step = _step(holder, part, path)
        path = (*path, step)
        if isinstance(holder, dict) and step not in holder:
            holder[step] = {}
            made = made or path
        holder = holder[step]
    last = _step(holder, parts[-1], path)
    holder[last] = value
    path = (*path, last)
    return made or path, path


def _refuse_missing_section(data: dict[str, Any], parts: list[str], form: type[Form]) -> None:
    section = declared_keys(form).get(parts[0])
    if section is None or not isinstance(section.holds, Several) or len(parts) == 1:
        return
    if not data.get(parts[0]):
        raise _UnusableError(f"the scenario has no [[{parts[0]}]]")


def _step(holder: Any, part: str, path: Path) -> str | int:
    """The key or index that `part` means in `holder`."""
    if isinstance(holder, dict):
        return part
    if isinstance(holder, list):
        return _index(holder, part, path)
    whole = keys(path)
    raise _UnusableError(f'"{whole}" is not a table in the scenario; set all of it: "{whole}=..."')


def _index(entries: list[Any], part: str, path: Path) -> int:
    names = [entry_name(entry) for entry in entries]
    if part in names:
        return names.index(part)
    if part.isascii() and part.isdigit() and 1 <= int(part[:9]) <= len(entries):
        return int(part) - 1
    known = [name for name in names if name is not None]
    meant = nearest(part, known)
    if meant is not None:
        hint = f"did you mean {as_found(meant)}?"
    elif known:
        hint = "there are " + ", ".join(as_found(name) for name in known[:10])
    else:
        hint = f"there are {len(entries)}, counted from 1"
    raise _UnusableError(f"no entry of {keys(path)} is {as_found(part)}; {hint}")


def is_within(path: Path, setting: Setting) -> bool:
    """Whether the value at `path` came from a setting."""
    return path[: len(setting.path)] == setting.path


def touches(path: Path, setting: Setting) -> bool:
    """Whether a setting changed something within the table at `path`."""
    return len(path) < len(setting.path) and setting.path[: len(path)] == path
