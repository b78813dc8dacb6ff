"""Files of columns in HDF5.

One dataset of one dimension for each column at the top of the file, its unit as text in the
attribute ``unit``. Links to other places and data kept outside the file are refused.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

from driftwell.forms.choice import Choice
from driftwell.forms.columns import ColumnError, ColumnRules, Columns, Floats
from driftwell.forms.hdf5_numbers import finite_numbers, refuse_elsewhere, refuse_other_types
from driftwell.forms.openpmd_columns import read_openpmd


def read_hdf5(path: Path, rules: ColumnRules, choice: Choice | None = None) -> Columns:
    """The columns of a file; raises ColumnError or OSError.

    choice : of what a file in openPMD holds; None: such a file is not what is needed
    """
    import h5py

    with h5py.File(path, "r", locking="best-effort") as file:
        if choice is not None and "openPMD" in file.attrs:
            return read_openpmd(file, rules, choice)
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
            {name: _column(name, file[name], rules) for name in names if name in rules.quantities},
            lambda row: f" row {row} (counted from 0)",
            {name: _texts(name, file[name]) for name in names if name in rules.labels},
        )


def _texts(name: str, dataset: Any) -> list[str]:
    """One column of text."""
    refuse_elsewhere(name, dataset)
    if dataset.dtype.kind not in "SO":
        raise ColumnError(f' "{name}": does not hold texts (type {dataset.dtype})')
    return [
        each.decode("utf-8", "replace") if isinstance(each, bytes) else str(each)
        for each in dataset[...].tolist()
    ]


def _column(name: str, dataset: Any, rules: ColumnRules) -> Floats:
    """One column in SI."""
    refuse_elsewhere(name, dataset)
    refuse_other_types(name, dataset)
    unit = dataset.attrs.get("unit")
    if not isinstance(unit, str):
        raise ColumnError(
            f' "{name}": needs its unit as text in the attribute "unit", such as "mm"'
        )
    return finite_numbers(name, dataset) * rules.si_factor(name, unit, "")
