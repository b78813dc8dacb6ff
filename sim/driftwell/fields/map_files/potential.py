"""A potential that a file gives on an even grid.

Between the nodes it is a quintic spline through the file's values; the force is minus the gradient
of that spline. In (r, z) it is even in r where the file begins at r = 0. Where electrodes cut
through the grid, the potential has a kink that no smooth function follows: the field is wrong over
a few spacings around it.

References
----------
docs/numerics/field-maps.md.
"""

from __future__ import annotations

from typing import Literal

from driftwell.fields.form import Role
from driftwell.fields.map_files.form import FittedMap, packed_coefficients
from driftwell.fields.map_files.node_table import node_rules, node_table
from driftwell.fields.map_files.swing import usual_curvature
from driftwell.fields.map_files.swinging import SwingingFile
from driftwell.fields.maps.grid import spline_coefficients
from driftwell.fields.maps.potential_map import KIND_NUMBERS
from driftwell.forms import Voltage, key, spelled
from driftwell.forms.columns import ColumnRules, Columns

_RULES = node_rules(
    {"axisymmetric": ("V",), "planar": ("V",), "spatial": ("V",)},
    Voltage,
    "r [mm], z [mm], V [V]",
)


class PotentialMapFile(SwingingFile):
    """Potential from a file, with columns r, z, V or x, y, V or x, y, z, V."""

    kind: Literal["potential-map"]
    mirrors: tuple[Literal["x", "y", "z"], ...] = key(
        "coordinates of which the file holds the half from 0 on, the potential being even; r "
        "always is",
        default=(),
    )

    @classmethod
    def rules(cls) -> ColumnRules:
        return _RULES

    def fit_options(self) -> tuple[tuple[str, ...], float]:
        return self.mirrors, 0.0

    @classmethod
    def fit(cls, columns: Columns, mirrors: tuple[str, ...], tolerance: float) -> FittedMap:
        table = node_table(columns, mirrors)
        values = table.values["V"]
        found = spline_coefficients(values[None], table.grid.mirrors)[0]
        return FittedMap(
            Role.ELECTRIC,
            KIND_NUMBERS[table.geometry],
            table.geometry,
            table.grid,
            packed_coefficients(found),
            usual_curvature(table.grid, found),
            f"potential of {spelled(values.min(), 'V')} to {spelled(values.max(), 'V')}",
        )
