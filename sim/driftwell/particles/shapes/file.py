"""Charges read from a file beside the scenario."""

from __future__ import annotations

from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.errors import ScenarioError
from driftwell.forms import checked, key
from driftwell.forms.body import Body
from driftwell.forms.inside import check_inside, found_inside
from driftwell.particles.charge_columns import ChargeColumns, ChargeFileError
from driftwell.particles.charge_csv import read_csv
from driftwell.particles.charge_hdf5 import read_hdf5
from driftwell.particles.draws import Draws
from driftwell.particles.shapes.form import Placement, ShapeForm

READERS = {".csv": read_csv, ".h5": read_hdf5, ".hdf5": read_hdf5}


class FromFile(ShapeForm):
    """Places, and if the file has them velocities, one charge in each row."""

    kind: Literal["file"]
    path: str = key(
        "file in the scenario's folder, relative to it. A .csv file begins with a line such as "
        "x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]; a .h5 file has one dataset for each "
        "column, its unit in the attribute unit. Velocities may be left out; "
        "ux, uy, uz are proper velocities (gamma v)",
        example="start.csv",
    )

    @checked
    def _inside(self) -> Self:
        check_inside(self.path, READERS, "path", "scenario")
        return self

    def fixes_count(self) -> bool:
        return True

    def sets_velocity(self, folder: Path) -> bool:
        return self.place(0, Draws(0, ""), Body("", 1.0, 1.0), folder).velocity is not None

    def files_named(self) -> tuple[str, ...]:
        return (self.path,)

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        try:
            with np.errstate(all="ignore"):  # the cloud refuses what is not finite
                columns = self._read(folder)
                return Placement(self.moved(columns.position()), columns.velocity())
        except ChargeFileError as fault:
            text = "\n".join(f"{self.path}{line}" for line in fault.lines)
            raise ScenarioError(text) from fault
        except (OSError, RuntimeError, LookupError, ValueError) as fault:  # as h5py fails
            why = getattr(fault, "strerror", None) or "damaged, or not a file of this kind"
            raise ScenarioError(f"{self.path}: cannot be read ({why})") from fault

    def _read(self, folder: Path) -> ChargeColumns:
        path = found_inside(folder, self.path, "scenario")
        if isinstance(path, str):
            raise ChargeFileError(f": {path}")
        return READERS[path.suffix.lower()](path)

    def words(self) -> str:
        return f"as in the file {self.path}"
