"""Files of columns as comma-separated text.

The first line names the columns and their units, the rows follow, one line each::

    x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]
    0.10,   0,      -1.5,   0,        0,        420

Empty lines and lines that begin with # are passed over. Columns of text, where a file may have
them, have no unit; a text with a comma or a quotation mark in it stands in quotation marks.
"""

from __future__ import annotations

import csv
import math
import re
import sys
from array import array
from collections.abc import Iterator
from pathlib import Path
from typing import TextIO

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns

_HEADING = re.compile(r"(?P<name>[^\[\]]*[^\[\]\s])\s*\[\s*(?P<unit>[^\[\]]*[^\[\]\s])\s*\]")
_NUMBER = r"\s*[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?\s*"
_TEXT = r'\s*(?:"(?:[^"]|"")*"|[^",]*)\s*'
_CELL = re.compile(_NUMBER, re.ASCII)
FORMULA = ("=", "+", "-", "@", "\t", "\r")
"""How a text begins that has an apostrophe in front, lest a spreadsheet take it for a formula."""
_LONGEST = 10_000


def read_csv(path: Path, rules: ColumnRules) -> Columns:
    """The columns of a file; raises ColumnError or OSError."""
    with path.open(encoding="utf-8-sig", errors="replace") as text:
        lines = _lines(text)
        number, heading = next(lines, (1, ""))
        names, factors = _columns(heading, f":{number}", rules)
        table, rows, texts = _table(lines, names, rules)
    numeric = [name for name in names if name in rules.quantities]
    return Columns(
        {name: table[:, i] * factors[name] for i, name in enumerate(numeric)},
        lambda row: f":{rows[row]}",
        texts,
    )


def _table(
    lines: Iterator[tuple[int, str]], names: list[str], rules: ColumnRules
) -> tuple[NDArray[np.float64], array[int], dict[str, list[str]]]:
    """The numbers, row by row, the line of each, and the texts."""
    texts: dict[str, list[str]] = {name: [] for name in names if name in rules.labels}
    labels = [i for i, name in enumerate(names) if name in texts]
    numeric = [i for i, name in enumerate(names) if name not in texts]
    row = re.compile(",".join(_TEXT if name in texts else _NUMBER for name in names), re.ASCII)
    values, rows = array("d"), array("q")
    faults: list[str] = []
    for number, line in lines:
        cells = next(csv.reader([line], skipinitialspace=True)) if '"' in line else line.split(",")
        numbers = [float(cells[i]) for i in numeric] if row.fullmatch(line) else []
        if not numbers or math.inf in map(abs, numbers):
            faults += _row_faults(cells, names, number, rules)
        if len(rows) == rules.most:
            faults.append(f":{number}: is one {rules.row} more than the {rules.most} there may be")
        if len(faults) >= TOLD or len(rows) == rules.most:
            break
        values.extend(numbers)
        rows.append(number)
        for i in labels:
            texts[names[i]].append(_text(cells[i]))
    if faults:
        raise ColumnError(*faults[:TOLD])
    return np.array(values, dtype=np.float64).reshape(-1, len(numeric)), rows, texts


def _text(cell: str) -> str:
    """The text in a cell; the same texts are one object."""
    text = cell.strip()
    return sys.intern(text[1:] if text[:1] == "'" and text[1:2] in FORMULA else text)


def _lines(text: TextIO) -> Iterator[tuple[int, str]]:
    """Lines that say something, with their numbers."""
    number = 0
    while line := text.readline(_LONGEST + 1):
        number += 1
        if len(line) > _LONGEST:
            raise ColumnError(f":{number}: is longer than {_LONGEST} characters")
        if line.strip() and not line.startswith("#"):
            yield number, line


def _columns(heading: str, where: str, rules: ColumnRules) -> tuple[list[str], dict[str, float]]:
    """Names of the columns the first line declares, and factors to SI of those with a unit."""
    names, units = [], {}
    for cell in heading.split(","):
        name, unit = named_with_unit(cell, rules)
        if not name:
            raise ColumnError(
                f"{where}: must name each column and its unit, such as {rules.example}"
            )
        names.append(name)
        units[name] = unit
    rules.check_names(names, where)
    return names, {
        name: rules.si_factor(name, unit, where)
        for name, unit in units.items()
        if name not in rules.labels
    }


def named_with_unit(cell: str, rules: ColumnRules) -> tuple[str, str]:
    """Name and unit in a heading such as ``x [mm]``; a label has none; two empty ones: neither."""
    if cell.strip() in rules.labels:
        return cell.strip(), ""
    match = _HEADING.fullmatch(cell.strip())
    return ("", "") if match is None else (match["name"], match["unit"])


def _row_faults(cells: list[str], names: list[str], number: int, rules: ColumnRules) -> list[str]:
    if len(cells) != len(names):
        return [f":{number}: has {len(cells)} columns; needs {len(names)}"]
    return [
        f':{number}: "{cell.strip()[:40]}" in column "{name}" must be a finite number'
        for cell, name in zip(cells, names, strict=True)
        if name in rules.quantities
        and (_CELL.fullmatch(cell) is None or not math.isfinite(float(cell)))
    ] or [f":{number}: has a quotation mark that is never closed, or in the middle of a text"]
