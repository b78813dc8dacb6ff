"""An electric field that a file gives by its components on an even grid.

The field used is minus the gradient of the potential whose slopes come nearest to the file's
components (:mod:`driftwell.fields.map_files.potential_fit`), so that it does no work around closed
paths. What no potential gives is told, and refused where it is much.
"""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np

from driftwell.fields.form import Role
from driftwell.fields.map_files.form import FittedMap, packed_coefficients
from driftwell.fields.map_files.node_table import node_rules, node_table
from driftwell.fields.map_files.potential_fit import fitted_potential
from driftwell.fields.map_files.swing import usual_curvature
from driftwell.fields.map_files.swinging import SwingingFile
from driftwell.fields.maps.grid import spline_coefficients
from driftwell.fields.maps.potential_map import KIND_NUMBERS, MapGeometry
from driftwell.forms import Bound, ElectricField, Real, key, spelled
from driftwell.forms.columns import ColumnError, ColumnRules, Columns

COMPONENTS: dict[MapGeometry, tuple[str, ...]] = {
    "axisymmetric": ("Er", "Ez"),
    "planar": ("Ex", "Ey"),
    "spatial": ("Ex", "Ey", "Ez"),
}
_RULES = node_rules(COMPONENTS, ElectricField, "r [mm], z [mm], Er [V/m], Ez [V/m]")


class ElectricMapFile(SwingingFile):
    """Electric field from a file: columns r, z, Er, Ez; x, y, Ex, Ey; or x, y, z, Ex, Ey, Ez."""

    kind: Literal["electric-map"]
    mirrors: tuple[Literal["x", "y", "z"], ...] = key(
        "coordinates of which the file holds the half from 0 on, the potential being even; r "
        "always is",
        default=(),
    )
    tolerance: Annotated[Real, Bound(above=0.0, most=1.0)] = key(
        "part of the field (rms) that may be left over because no potential gives it", default=0.02
    )

    @classmethod
    def rules(cls) -> ColumnRules:
        return _RULES

    def fit_options(self) -> tuple[tuple[str, ...], float]:
        return self.mirrors, self.tolerance

    @classmethod
    def fit(cls, columns: Columns, mirrors: tuple[str, ...], tolerance: float) -> FittedMap:
        table = node_table(columns, mirrors)
        field = [table.values[name] for name in COMPONENTS[table.geometry]]
        potential, left_over = fitted_potential(table.grid, field)
        if left_over > tolerance:
            raise ColumnError(
                f": {100.0 * left_over:.3g} % of the field (rms) is not the slope of any "
                f"potential; needs at most {100.0 * tolerance:.3g} %: check signs, units and "
                "columns, or raise `tolerance`"
            )
        found = spline_coefficients(potential[None], table.grid.mirrors)[0]
        largest = float(np.sqrt(np.max(sum(component**2 for component in field))))
        return FittedMap(
            Role.ELECTRIC,
            KIND_NUMBERS[table.geometry],
            table.geometry,
            table.grid,
            packed_coefficients(found),
            usual_curvature(table.grid, found),
            f"electric field of up to {spelled(largest, 'V/m')} ({left_over:.1g} of it left over)",
        )
