"""Files of columns as Parquet.

A column's unit stands in its metadata under ``unit``, or in its name, such as ``x [mm]``.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from driftwell.forms.column_csv import named_with_unit
from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns, Floats


def read_parquet(path: Path, rules: ColumnRules) -> Columns:
    """The columns of a file; raises ColumnError or OSError."""
    try:
        import pyarrow as pa
        import pyarrow.parquet as pq
    except ImportError as fault:
        raise ColumnError(
            ": reading Parquet needs pyarrow, which is not installed; install it with: "
            "pip install 'driftwell[parquet]'"
        ) from fault
    try:
        with pq.ParquetFile(path) as file:
            units = dict(_named(field, rules) for field in file.schema_arrow)
            names = [_named(field, rules)[0] for field in file.schema_arrow]
            rules.check_names(names, "")
            if file.metadata.num_rows > rules.most:
                raise ColumnError(f": holds more than {rules.most} {rules.row}s")
            columns = dict(zip(names, file.read().columns, strict=True))
    except pa.ArrowException as fault:
        raise ColumnError(": cannot be read (damaged, or not a file of this kind)") from fault
    return Columns(
        {
            name: _numbers(name, column, pa) * rules.si_factor(name, units[name], "")
            for name, column in columns.items()
            if name in rules.quantities
        },
        lambda row: f" row {row} (counted from 0)",
        {
            name: _texts(name, column, pa)
            for name, column in columns.items()
            if name in rules.labels
        },
    )


def _named(field: Any, rules: ColumnRules) -> tuple[str, str]:
    """Name and unit of a column."""
    unit = (field.metadata or {}).get(b"unit", b"").decode("utf-8", "replace")
    if unit or field.name in rules.labels:
        return field.name, unit
    name, unit = named_with_unit(field.name, rules)
    if not name:
        raise ColumnError(
            f' "{field.name[:60]}": needs its unit in the metadata under "unit", or in its name '
            'such as "x [mm]"'
        )
    return name, unit


def _numbers(name: str, column: Any, pa: Any) -> Floats:
    kind = column.type
    if not (pa.types.is_floating(kind) or pa.types.is_integer(kind)):
        raise ColumnError(f' "{name}": does not hold real numbers (type {kind})')
    values = np.asarray(column.to_numpy(), dtype=np.float64)  # what is missing becomes NaN
    bad = np.flatnonzero(~np.isfinite(values))
    if bad.size:
        raise ColumnError(
            *(
                f' "{name}" row {row} (counted from 0): must be a finite number'
                for row in bad[:TOLD]
            )
        )
    return values


def _texts(name: str, column: Any, pa: Any) -> list[str]:
    kind = column.type.value_type if pa.types.is_dictionary(column.type) else column.type
    if not (pa.types.is_string(kind) or pa.types.is_large_string(kind)) or column.null_count:
        raise ColumnError(f' "{name}": needs a text in each row (type {kind})')
    return [str(text) for text in column.to_pylist()]
