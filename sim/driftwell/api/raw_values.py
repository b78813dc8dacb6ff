"""Values of Python as a scenario file would hold them: text, numbers, lists and tables."""

from __future__ import annotations

import keyword
from collections.abc import Mapping
from datetime import date, time
from pathlib import PurePath
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from driftwell.errors import ScenarioError
from driftwell.forms.wording import quoted

IN_CODE = "scenario in code"
"""What stands in messages where a file would have its name."""


def raw(value: Any, where: str, folder: PurePath | None = None) -> Any:
    """The raw value of a Python value; copies whatever could be changed later.

    Numbers and arrays of numpy become plain ones, tuples lists, and paths text with forward
    slashes, counted from `folder` where they lie in it.

    Raises ScenarioError, with `where` it was given, for what no scenario can hold.
    """
    match value:
        case str() | date() | time():
            return str(value) if isinstance(value, str) else value
        case bool() | np.bool_():
            return bool(value)
        case int() | np.integer():
            return int(value)
        case float() | np.floating():
            return float(value)
        case PurePath():
            inside = folder is not None and value.is_absolute() and value.is_relative_to(folder)
            return (value.relative_to(folder) if inside and folder else value).as_posix()
        case np.ndarray():
            return raw(value.tolist(), where, folder)
        case Mapping():
            return raw_keys(value, where, folder)
        case list() | tuple():
            return [raw(part, f"{where} entry {i}", folder) for i, part in enumerate(value, 1)]
    raise ScenarioError(
        f"{IN_CODE}: {where} = {_shown(value)}: needs what a file can hold: text (a quantity such "
        'as "3.5 mm"), a number, true or false, a list or a table (dict) of these'
    )


def raw_keys(keys: Mapping[Any, Any], where: str, folder: PurePath | None = None) -> dict[str, Any]:
    """A table of raw values; keys that are None are left out.

    A word that Python keeps for itself is written with an underscore behind it: ``from_``.
    """
    table = {}
    for name, value in keys.items():
        if not isinstance(name, str):
            raise ScenarioError(f"{IN_CODE}: {where}: the key {name!r} must be text")
        if value is not None:
            key = name[:-1] if name.endswith("_") and keyword.iskeyword(name[:-1]) else name
            table[key] = raw(value, f"{where}.{key}" if where else key, folder)
    return table


def with_unit(values: ArrayLike, unit: str) -> Any:
    """Numbers as quantities of a scenario, each to its last bit: ``[0.1, 2]`` in "mm" becomes
    ``["0.1 mm", "2.0 mm"]``.

    Parameters
    ----------
    values : a number, or an array of any shape
    unit : as in a scenario file

    Returns
    -------
    text, or lists of text of the shape of `values`
    """

    def spelled(value: Any) -> Any:
        return [spelled(part) for part in value] if isinstance(value, list) else f"{value!r} {unit}"

    return spelled(np.asarray(values, dtype=np.float64).tolist())


def _shown(value: Any) -> str:
    text = repr(value)
    text = text if text.isprintable() else quoted(text)
    return text if len(text) <= 60 else text[:56] + " ..."
