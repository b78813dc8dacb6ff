"""Files of columns as comma-separated text.

The first line names the columns and their units, the rows follow, one line each::

    x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]
    0.10,   0,      -1.5,   0,        0,        420

Empty lines and lines that begin with # are passed over.
"""

from __future__ import annotations

import math
import re
from array import array
from collections.abc import Iterator
from pathlib import Path
from typing import TextIO

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns

_HEADING = re.compile(r"(?P<name>[^\[\]]*[^\[\]\s])\s*\[\s*(?P<unit>[^\[\]]*[^\[\]\s])\s*\]")
_NUMBER = r"\s*[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?\s*"
_CELL = re.compile(_NUMBER, re.ASCII)
_LONGEST = 10_000


def read_csv(path: Path, rules: ColumnRules) -> Columns:
    """The columns of a file; raises ColumnError or OSError."""
    with path.open(encoding="utf-8-sig", errors="replace") as text:
        lines = _lines(text)
        number, heading = next(lines, (1, ""))
        names, factors = _columns(heading, f":{number}", rules)
        table, rows = _table(lines, names, rules)
    return Columns(
        {name: table[:, i] * factors[i] for i, name in enumerate(names)},
        lambda row: f":{rows[row]}",
    )


def _table(
    lines: Iterator[tuple[int, str]], names: list[str], rules: ColumnRules
) -> tuple[NDArray[np.float64], array[int]]:
    """The numbers, row by row, and the line of each."""
    row = re.compile(",".join([_NUMBER] * len(names)), re.ASCII)
    values, rows = array("d"), array("q")
    faults: list[str] = []
    for number, line in lines:
        numbers = [float(cell) for cell in line.split(",")] if row.fullmatch(line) else []
        if not numbers or math.inf in map(abs, numbers):
            faults += _row_faults(line.split(","), names, number)
        if len(rows) == rules.most:
            faults.append(f":{number}: is one {rules.row} more than the {rules.most} there may be")
        if len(faults) >= TOLD or len(rows) == rules.most:
            break
        values.extend(numbers)
        rows.append(number)
    if faults:
        raise ColumnError(*faults[:TOLD])
    return np.array(values, dtype=np.float64).reshape(-1, len(names)), rows


def _lines(text: TextIO) -> Iterator[tuple[int, str]]:
    """Lines that say something, with their numbers."""
    number = 0
    while line := text.readline(_LONGEST + 1):
        number += 1
        if len(line) > _LONGEST:
            raise ColumnError(f":{number}: is longer than {_LONGEST} characters")
        if line.strip() and not line.startswith("#"):
            yield number, line


def _columns(heading: str, where: str, rules: ColumnRules) -> tuple[list[str], list[float]]:
    """Names and factors to SI of the columns the first line declares."""
    matches = [_HEADING.fullmatch(cell.strip()) for cell in heading.split(",")]
    found = [match for match in matches if match is not None]
    if len(found) < len(matches):
        raise ColumnError(f"{where}: must name each column and its unit, such as {rules.example}")
    names = [match["name"] for match in found]
    rules.check_names(names, where)
    return names, [rules.si_factor(match["name"], match["unit"], where) for match in found]


def _row_faults(cells: list[str], names: list[str], number: int) -> list[str]:
    if len(cells) != len(names):
        return [f":{number}: has {len(cells)} columns; needs {len(names)}"]
    return [
        f':{number}: "{cell.strip()[:40]}" in column "{name}" must be a finite number'
        for cell, name in zip(cells, names, strict=True)
        if _CELL.fullmatch(cell) is None or not math.isfinite(float(cell))
    ]
