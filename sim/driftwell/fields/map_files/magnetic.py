"""A magnetic field that a file gives by its components on an even grid.

In (r, z) the field used is the curl of a vector potential along the azimuth, found from the flux of
the file's B_z (:mod:`driftwell.fields.map_files.vector_potential`), and B_r is compared with it. In
(x, y, z) each component is a spline of its own, and their divergence is looked at. What is left
over is told, and refused where it is much.

A field in (r, z) may change in time. Of one in (x, y, z) the field that its change induces is not
known, so its scale must be constant.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Annotated, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.form import Role
from driftwell.fields.map_files.form import FittedMap, MapFile, packed_coefficients
from driftwell.fields.map_files.node_table import NodeTable, node_rules, node_table
from driftwell.fields.map_files.swing import some_nodes
from driftwell.fields.map_files.vector_potential import potential_over_radius
from driftwell.fields.maps.grid import spline_coefficients
from driftwell.fields.maps.magnetic_kernels import ROUND_MAGNETIC_MAP, SPATIAL_MAGNETIC_MAP
from driftwell.fields.maps.spline_sums import first_derivatives, spline_sums
from driftwell.forms import Bound, MagneticField, Real, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.columns import ColumnError, ColumnRules, Columns
from driftwell.forms.faults import Fault
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.waveforms import frequency_scale, largest_value

Floats = NDArray[np.float64]

_RULES = node_rules(
    {"axisymmetric": ("Br", "Bz"), "spatial": ("Bx", "By", "Bz")},
    MagneticField,
    "r [mm], z [mm], Br [T], Bz [T]",
)
_EVEN = 1e-3
"""Variation over the map, as part of the field, below which a divergence means nothing."""


class MagneticMapFile(MapFile):
    """Magnetic field from a file, with columns r, z, Br, Bz or x, y, z, Bx, By, Bz."""

    kind: Literal["magnetic-map"]
    tolerance: Annotated[Real, Bound(above=0.0, most=1.0)] = key(
        "what may be left over because a magnetic field has no sources: part of the field (rms), "
        "or in (x, y, z) of its slopes",
        default=0.02,
    )

    @classmethod
    def rules(cls) -> ColumnRules:
        return _RULES

    def fit_options(self) -> tuple[tuple[str, ...], float]:
        return (), self.tolerance

    def faults(self) -> list[Fault]:
        found = super().faults()
        if not found and self.fitted().geometry == "spatial" and self._changes():
            text = (
                "must be constant: what a changing magnetic field in (x, y, z) induces is not "
                "known from the field alone; give a file in (r, z)"
            )
            found.append(Fault(("scale",), "", text))
        return found

    def _changes(self) -> bool:
        return isinstance(self.scale, WaveformForm)

    @classmethod
    def fit(cls, columns: Columns, mirrors: tuple[str, ...], tolerance: float) -> FittedMap:
        table = node_table(columns)
        is_round = table.geometry == "axisymmetric"
        coefficients, left_over = _round(table) if is_round else _spatial(table)
        if left_over > tolerance:
            what = "field (rms)" if is_round else "field's slopes (rms)"
            raise ColumnError(
                f": {100.0 * left_over:.3g} % of the {what} would need sources, which a magnetic "
                f"field has not; needs at most {100.0 * tolerance:.3g} %: check signs, units and "
                "columns, or raise `tolerance`"
            )
        largest = float(np.sqrt(np.max(sum(b**2 for b in table.values.values()))))
        return FittedMap(
            Role.MAGNETIC,
            ROUND_MAGNETIC_MAP if is_round else SPATIAL_MAGNETIC_MAP,
            table.geometry,
            table.grid,
            coefficients,
            largest,
            f"magnetic field of up to {spelled(largest, 'T')} ({left_over:.1g} of it left over)",
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that in the largest field of the file."""
        strongest = self.fitted().strength * largest_value(self.scale)
        rates = {"cyclotron": abs(body.charge_to_mass) * strongest}
        drive = 2.0 * math.pi * frequency_scale(self.scale)
        return {"drive": drive, **rates} if drive else rates


def _round(table: NodeTable) -> tuple[Floats, float]:
    """The spline of A/r, and the rms of what B differs by from its curl, as part of B's."""
    grid = table.grid
    if not grid.mirrors[0]:
        raise ColumnError(f": r begins at {spelled(grid.origin[0], 'm')}; needs to begin at 0 m")
    radial, axial = table.values["Br"], table.values["Bz"]
    found = spline_coefficients(potential_over_radius(grid, axial)[None], grid.mirrors)
    nodes = grid.nodes()
    f, slope_r, slope_z = spline_sums(grid, found, nodes, [(0, 0), (1, 0), (0, 1)])[0].T
    left = (radial.ravel() + nodes[:, 0] * slope_z) ** 2
    left += (axial.ravel() - 2.0 * f - nodes[:, 0] * slope_r) ** 2
    whole = np.mean(radial**2) + np.mean(axial**2)
    return packed_coefficients(found), _part(float(np.mean(left)), float(whole))


def _spatial(table: NodeTable) -> tuple[Floats, float]:
    """The splines of the components, and their divergence as part of all their slopes (rms).

    Slopes that are all divergence have the part 1: the square of a sum of three is at most three
    times the sum of their squares.
    """
    grid = table.grid
    values = np.stack([table.values[name] for name in ("Bx", "By", "Bz")])
    found = spline_coefficients(values, grid.mirrors)
    slopes = spline_sums(grid, found, grid.nodes()[some_nodes(grid)], first_derivatives(3))
    divergence = slopes[0, :, 0] + slopes[1, :, 1] + slopes[2, :, 2]
    every = 3.0 * float(np.mean(np.sum(slopes**2, axis=(0, 2))))
    extent = max(high - low for low, high in grid.region())
    least = float(np.mean(np.sum(values**2, axis=0))) * (_EVEN / extent) ** 2
    return packed_coefficients(found), _part(float(np.mean(divergence**2)), max(every, least))


def _part(left: float, whole: float) -> float:
    return math.sqrt(left / whole) if whole > 0.0 else 0.0
