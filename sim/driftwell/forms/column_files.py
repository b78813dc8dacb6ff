"""Files of columns that a scenario names, and what is wrong with them in words."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from driftwell.errors import ScenarioError
from driftwell.forms.column_csv import read_csv
from driftwell.forms.column_hdf5 import read_hdf5
from driftwell.forms.columns import ColumnError, ColumnRules, Columns
from driftwell.forms.inside import found_inside

READERS = {".csv": read_csv, ".h5": read_hdf5, ".hdf5": read_hdf5}
"""By the ending of a file's name."""


def columns_inside(folder: Path, path: str, rules: ColumnRules) -> Columns:
    """The columns of a file in the scenario's folder; to be called in :func:`told_of_file`."""
    found = found_inside(folder, path, "scenario")
    if isinstance(found, str):
        raise ColumnError(f": {found}")
    return READERS[found.suffix.lower()](found, rules)


@contextmanager
def told_of_file(path: str) -> Iterator[None]:
    """Tell whatever goes wrong with a file as a ScenarioError, one line for each fault."""
    try:
        yield
    except ColumnError as fault:
        raise ScenarioError("\n".join(f"{path}{line}" for line in fault.lines)) from fault
    except (OSError, RuntimeError, LookupError, ValueError) as fault:  # as h5py fails
        why = getattr(fault, "strerror", None) or "damaged, or not a file of this kind"
        raise ScenarioError(f"{path}: cannot be read ({why})") from fault
