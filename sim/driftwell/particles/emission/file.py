"""Charges whose time, place and velocity a file beside the scenario gives."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.forms import Time, checked, key
from driftwell.forms.body import Body
from driftwell.forms.choice_form import ChoiceForm
from driftwell.forms.column_files import told_of_file
from driftwell.forms.columns import TOLD, ColumnError
from driftwell.forms.inside import check_inside
from driftwell.forms.particle_files import ENDINGS, particles_inside
from driftwell.geometry.solid import Solid
from driftwell.particles.charge_columns import CHARGE_RULES, charges_chosen
from driftwell.particles.draws import Draws
from driftwell.particles.emission.form import EmitterForm, Leaving


def _name_faults(names: Sequence[str]) -> list[str]:
    lines = [] if "t" in names else ['column "t" is missing']
    return [*lines, *CHARGE_RULES.further(names)]


BIRTH_RULES = replace(
    CHARGE_RULES,
    example="t [us], x [mm], y [mm], z [mm]",
    quantities={"t": Time, **CHARGE_RULES.quantities},
    further=_name_faults,
)


class FileEmitter(EmitterForm, ChoiceForm):
    """One charge in each row; without velocities they are born at rest."""

    kind: Literal["file"]
    path: str = key(
        "file in the scenario's folder, relative to it. A .csv file begins with a line such as "
        "t [us], x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]; a .h5 file has one dataset "
        "for each column, its unit in the attribute unit, or is in openPMD, where all are born at "
        "the iteration's time unless it has a record time; .parquet and .vtp are read with their "
        "extras. Velocities may be left out; ux, uy, uz are proper velocities (gamma v), px, py, "
        "pz momenta; a column weight [1] counts where the source has no weight of its own",
        example="births.csv",
    )

    @checked
    def _inside(self) -> Self:
        check_inside(self.path, ENDINGS, "path", "scenario")
        return self

    def fixes_births(self) -> bool:
        return True

    def files_named(self) -> tuple[str, ...]:
        return (self.path,)

    def leave(
        self, count: int, draws: Draws, body: Body, solids: Sequence[Solid], folder: Path
    ) -> Leaving:
        with told_of_file(self.path), np.errstate(all="ignore"):  # the source looks for infinities
            choice = self.choice()
            read = particles_inside(folder, self.path, BIRTH_RULES, choice)
            charges = charges_chosen(read, choice, births=True)
            charges.check(body)
            columns = charges.columns
            time = columns.values["t"]
            early = np.flatnonzero(time < 0.0)
            if early.size:
                raise ColumnError(
                    *(f"{columns.where(int(k))}: t must be at least 0" for k in early[:TOLD])
                )
            order = np.argsort(time, kind="stable")
            position, velocity = charges.position()[:, order], charges.velocity(body)
            weight = charges.weight()
            velocity = np.zeros_like(position) if velocity is None else velocity[:, order]
        return Leaving(
            position,
            np.zeros_like(position),
            velocity,
            time[order],
            None if weight is None else weight[order],
        )

    def words(self) -> str:
        return f"as in the file {self.path}"
