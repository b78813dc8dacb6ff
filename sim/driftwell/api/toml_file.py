"""A scenario as the text of a TOML file.

Values are written by what already writes them into messages and settings
(:func:`driftwell.forms.wording.toml_text`); here sections get their headers. A library for it
(tomli-w) would be one more thing to install for thirty lines, and would write headers for tables
within sections, which scenarios hold on one line. Round trips are tested over all shipped
scenarios and over made-up ones, with the standard library's reader.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from driftwell.forms.wording import name_text, toml_text

_LONGEST = 90
"""Characters of a list on one line."""


def toml_file(table: Mapping[str, Any]) -> str:
    """A raw table as a file: plain keys, then a header for each section and entry, in order."""
    plain: list[str] = []
    sections: list[str] = []
    for name, value in table.items():
        key = name_text(name)
        if isinstance(value, Mapping) and value and all(map(_is_table, value.values())):
            for inner, entry in value.items():
                sections.append(_section(f"[{key}.{name_text(inner)}]", entry))
        elif isinstance(value, Mapping):
            sections.append(_section(f"[{key}]", value))
        elif isinstance(value, list) and value and all(map(_is_table, value)):
            sections += [_section(f"[[{key}]]", entry) for entry in value]
        else:
            plain.append(_line(key, value))
    return "\n".join(["".join(plain), *sections]) if plain else "\n".join(sections)


def _is_table(value: object) -> bool:
    return isinstance(value, Mapping)


def _section(header: str, table: Mapping[str, Any]) -> str:
    return f"{header}\n" + "".join(_line(name_text(key), value) for key, value in table.items())


def _line(key: str, value: Any) -> str:
    text = toml_text(value)
    if isinstance(value, list) and len(key) + len(text) > _LONGEST:
        text = "\n".join(["[", *(f"  {part}," for part in _parts(value)), "]"])
    return f"{key} = {text}\n"


def _parts(value: list[Any]) -> Iterator[str]:
    return (toml_text(part) for part in value)
