"""Files of charges in HDF5.

One dataset of one dimension for each column at the top of the file, its unit as text in the
attribute ``unit``. Links to other places and data kept outside the file are refused.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from driftwell.particles.charge_columns import (
    TOLD,
    ChargeColumns,
    ChargeFileError,
    check_names,
    si_factor,
)
from driftwell.particles.proper_velocity import Floats
from driftwell.particles.state import LARGEST_COUNT


def read_hdf5(path: Path) -> ChargeColumns:
    """The columns of a file; raises ChargeFileError or OSError."""
    import h5py

    with h5py.File(path, "r", locking="best-effort") as file:
        names = list(file)
        check_names(names, "")
        for name in names:
            if not isinstance(file.get(name, getlink=True), h5py.HardLink):
                raise ChargeFileError(f' "{name}": is a link; needs the numbers themselves')
            if not isinstance(file[name], h5py.Dataset):
                raise ChargeFileError(f' "{name}": is a group; needs a dataset')
        sizes = {name: file[name].shape for name in names}
        for name, shape in sizes.items():
            if shape is None or len(shape) != 1 or shape != sizes["x"]:
                raise ChargeFileError(
                    f' "{name}": has the shape {shape}; needs one number for each charge, '
                    f'as many as "x"'
                )
            if shape[0] > LARGEST_COUNT:
                raise ChargeFileError(f": holds more than {LARGEST_COUNT} charges")
        return ChargeColumns(
            {name: _column(name, file[name]) for name in names},
            lambda row: f" row {row} (counted from 0)",
        )


def _column(name: str, dataset: Any) -> Floats:
    """One column in SI."""
    if dataset.is_virtual or dataset.external:
        raise ChargeFileError(f' "{name}": keeps its data in another file; needs it in this one')
    if dataset.dtype.kind not in "fiu":
        raise ChargeFileError(f' "{name}": does not hold real numbers (type {dataset.dtype})')
    unit = dataset.attrs.get("unit")
    if not isinstance(unit, str):
        raise ChargeFileError(
            f' "{name}": needs its unit as text in the attribute "unit", such as "mm"'
        )
    values = np.asarray(dataset[...], dtype=np.float64)
    bad = np.flatnonzero(~np.isfinite(values))
    if bad.size:
        raise ChargeFileError(
            *(
                f' "{name}" row {row} (counted from 0): must be a finite number'
                for row in bad[:TOLD]
            )
        )
    return values * si_factor(name, unit, "")
