"""Files of columns in HDF5.

One dataset of one dimension for each column at the top of the file, its unit as text in the
attribute ``unit``. Links to other places and data kept outside the file are refused.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns, Floats


def read_hdf5(path: Path, rules: ColumnRules) -> Columns:
    """The columns of a file; raises ColumnError or OSError."""
    import h5py

    with h5py.File(path, "r", locking="best-effort") as file:
        names = list(file)
        rules.check_names(names, "")
        for name in names:
            if not isinstance(file.get(name, getlink=True), h5py.HardLink):
                raise ColumnError(f' "{name}": is a link; needs the numbers themselves')
            if not isinstance(file[name], h5py.Dataset):
                raise ColumnError(f' "{name}": is a group; needs a dataset')
        sizes = {name: file[name].shape for name in names}
        leading = rules.leading(names)
        for name, shape in sizes.items():
            if shape is None or len(shape) != 1 or shape != sizes[leading]:
                raise ColumnError(
                    f' "{name}": has the shape {shape}; needs one number for each '
                    f'{rules.row}, as many as "{leading}"'
                )
            if shape[0] > rules.most:
                raise ColumnError(f": holds more than {rules.most} {rules.row}s")
        return Columns(
            {name: _column(name, file[name], rules) for name in names},
            lambda row: f" row {row} (counted from 0)",
        )


def _column(name: str, dataset: Any, rules: ColumnRules) -> Floats:
    """One column in SI."""
    if dataset.is_virtual or dataset.external:
        raise ColumnError(f' "{name}": keeps its data in another file; needs it in this one')
    if dataset.dtype.kind not in "fiu":
        raise ColumnError(f' "{name}": does not hold real numbers (type {dataset.dtype})')
    unit = dataset.attrs.get("unit")
    if not isinstance(unit, str):
        raise ColumnError(
            f' "{name}": needs its unit as text in the attribute "unit", such as "mm"'
        )
    values = np.asarray(dataset[...], dtype=np.float64)
    bad = np.flatnonzero(~np.isfinite(values))
    if bad.size:
        raise ColumnError(
            *(
                f' "{name}" row {row} (counted from 0): must be a finite number'
                for row in bad[:TOLD]
            )
        )
    return values * rules.si_factor(name, unit, "")
