"""The numbers of a dataset in HDF5: in this very file, real and finite."""

from __future__ import annotations

from typing import Any

import numpy as np

from driftwell.forms.columns import TOLD, ColumnError, Floats


def refuse_elsewhere(name: str, dataset: Any) -> None:
    """Raise ColumnError where a dataset keeps its data in another file."""
    if dataset.is_virtual or dataset.external:
        raise ColumnError(f' "{name}": keeps its data in another file; needs it in this one')


def refuse_other_types(name: str, dataset: Any) -> None:
    """Raise ColumnError where a dataset holds no real numbers."""
    if dataset.dtype.kind not in "fiu":
        raise ColumnError(f' "{name}": does not hold real numbers (type {dataset.dtype})')


def finite_numbers(name: str, dataset: Any) -> Floats:
    """The numbers as float64, as they stand; raises ColumnError."""
    refuse_elsewhere(name, dataset)
    refuse_other_types(name, dataset)
    values = np.asarray(dataset[...], dtype=np.float64)
    bad = np.flatnonzero(~np.isfinite(values))
    if bad.size:
        raise ColumnError(
            *(
                f' "{name}" row {row} (counted from 0): must be a finite number'
                for row in bad[:TOLD]
            )
        )
    return values
