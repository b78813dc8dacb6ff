"""Tables as comma-separated text, one file each.

The first line names each column and its unit, such as ``x [m]``; a text has none. Numbers are the
shortest that read back as the same bits. Text that holds a comma or a quotation mark stands in
quotation marks. A text that a spreadsheet would take for a formula gets an apostrophe in front.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.exports.tables import Batch, Field, Labels, Table, tables
from driftwell.exports.wanted import Wanted
from driftwell.exports.written import whole
from driftwell.forms.column_csv import FORMULA
from driftwell.record.reader import Run

ENDING = ".csv"


def write(run: Run, wanted: Wanted, path: Path) -> None:
    """A folder of files, one for each table; one file where `path` ends in .csv."""
    found = tables(run, wanted)
    if path.suffix.lower() == ENDING and len(found) == 1:
        with whole(path) as part:
            _write(found[0], part)
        return
    with whole(path, folder=True) as part:
        for table in found:
            _write(table, part / f"{table.name}{ENDING}")


def _write(table: Table, path: Path) -> None:
    with path.open("w", encoding="utf-8", newline="\n") as file:
        file.write(",".join(map(heading, table.fields)) + "\n")
        for batch in table.batches():
            file.writelines(f"{','.join(row)}\n" for row in zip(*_cells(batch), strict=True))


def _cells(batch: Batch) -> list[list[str]]:
    """The texts of each column."""
    return [
        Labels(values.place, list(map(text_cell, values.names))).texts()
        if isinstance(values, Labels)
        else _numbers(values)
        for values in batch
    ]


def _numbers(values: NDArray[Any]) -> list[str]:
    """The text of each number; where all have the same bits it is made once."""
    bits = values.view(np.int64)
    if bits.size and (bits == bits[0]).all():
        return [repr(values[0].item())] * bits.size
    return list(map(repr, values.tolist()))


def heading(field: Field) -> str:
    """How the first line names a column."""
    name = f"{field.name} [{field.unit}]" if field.unit else field.name
    return text_cell(name)


def text_cell(text: str) -> str:
    """A text as one cell."""
    shown = "".join(each if each.isprintable() else " " for each in text)
    if shown.startswith(FORMULA):
        shown = f"'{shown}"
    return '"' + shown.replace('"', '""') + '"' if set(shown) & set(',"') else shown
