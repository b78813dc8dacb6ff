"""Charges read from a file beside the scenario."""

from __future__ import annotations

from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.forms import checked, key
from driftwell.forms.body import Body
from driftwell.forms.choice_form import ChoiceForm
from driftwell.forms.column_files import told_of_file
from driftwell.forms.inside import check_inside
from driftwell.forms.particle_files import ENDINGS, particles_inside
from driftwell.particles.charge_columns import CHARGE_RULES, ChargeColumns, charges_chosen
from driftwell.particles.draws import Draws
from driftwell.particles.shapes.form import Placement, ShapeForm


class FromFile(ShapeForm, ChoiceForm):
    """Places, and if the file has them velocities, one charge in each row."""

    kind: Literal["file"]
    path: str = key(
        "file in the scenario's folder, relative to it. A .csv file begins with a line such as "
        "x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]; a .h5 file has one dataset for each "
        "column, its unit in the attribute unit, or is in openPMD; .parquet and .vtp are read with "
        "their extras. Velocities may be left out; ux, uy, uz are proper velocities (gamma v), "
        "px, py, pz momenta; a column weight [1] counts where the cloud has no weight of its own",
        example="start.csv",
    )

    @checked
    def _inside(self) -> Self:
        check_inside(self.path, ENDINGS, "path", "scenario")
        return self

    def fixes_count(self) -> bool:
        return True

    def sets_velocity(self, folder: Path) -> bool:
        with told_of_file(self.path), np.errstate(all="ignore"):
            return self._charges(folder).velocity(Body("", 1.0, 1.0)) is not None

    def files_named(self) -> tuple[str, ...]:
        return (self.path,)

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        # the cloud refuses what is not finite
        with told_of_file(self.path), np.errstate(all="ignore"):
            charges = self._charges(folder)
            charges.check(body)
            return Placement(
                self.moved(charges.position()), charges.velocity(body), charges.weight()
            )

    def _charges(self, folder: Path) -> ChargeColumns:
        choice = self.choice()
        return charges_chosen(particles_inside(folder, self.path, CHARGE_RULES, choice), choice)

    def words(self) -> str:
        return f"as in the file {self.path}"
