"""Files of particles that a scenario names: tables of columns, openPMD and VTK."""

from __future__ import annotations

from pathlib import Path

from driftwell.forms.choice import Choice
from driftwell.forms.column_csv import read_csv
from driftwell.forms.column_hdf5 import read_hdf5
from driftwell.forms.column_parquet import read_parquet
from driftwell.forms.column_vtk import read_vtk
from driftwell.forms.columns import ColumnError, ColumnRules, Columns
from driftwell.forms.inside import found_inside

ENDINGS = (".csv", ".h5", ".hdf5", ".parquet", ".vtp")


def particles_inside(folder: Path, path: str, rules: ColumnRules, choice: Choice) -> Columns:
    """The columns of a file in the scenario's folder; to be called in ``told_of_file``.

    Of openPMD only what was chosen; tables and VTK come with all their rows.
    """
    found = found_inside(folder, path, "scenario")
    if isinstance(found, str):
        raise ColumnError(f": {found}")
    ending = found.suffix.lower()
    if ending == ".csv":
        return read_csv(found, rules)
    if ending == ".parquet":
        return read_parquet(found, rules)
    if ending == ".vtp":
        return read_vtk(found, rules)
    return read_hdf5(found, rules, choice)
