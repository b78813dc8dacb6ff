"""Unit solutions of electrodes in space, from charges on triangles.

At a point the potential is the sum of all panels' (triangle.py). For many points it is taken by the
tree, with three points in the place of each panel, and for panels nearer than :data:`NEAR` of
their longest sides the closed form in the points' stead.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.boundary.panel_bounds import bounds_of
from driftwell.boundary.panel_evaluation import REACHED, add_near_panels
from driftwell.boundary.panel_matrix import POINTS, panel_points
from driftwell.boundary.point_sum import PointSum
from driftwell.boundary.solution import Panels
from driftwell.boundary.triangle import panel_field_sums, panel_rows, panel_sums
from driftwell.constants import COULOMB_CONSTANT
from driftwell.kernels.threads import on_threads

Floats = NDArray[np.float64]

NEAR = 3.0
"""Distance, in longest sides of a panel, within which its closed form is taken."""
_FEW = 3e7
"""Pairs of panels and points up to which all panels are summed in closed form."""
_AT_ONCE = 400_000
"""Points taken by one tree."""


@dataclass(frozen=True, slots=True)
class SpatialSolution:
    """Unit solutions of e electrodes as charges on k triangles; see :class:`Solution`.

    corners : (k, 3, 3), m; electrode : (k,), e for panels that are always at 0 V
    density : (e, k), C/m^2; threads : that evaluation runs on
    """

    corners: Floats
    electrode: NDArray[np.int64]
    density: Floats
    capacitance: Floats
    error: float
    mirrors: tuple[bool, ...]
    threads: int = 1

    @property
    def panels(self) -> Panels:
        """Where the charge sits."""
        sides = self.corners[:, 1:] - self.corners[:, :1]
        area = 0.5 * np.linalg.norm(np.cross(sides[:, 0], sides[:, 1]), axis=1)
        return Panels(self.corners.mean(axis=1), area, self.electrode, self.density)

    def on_threads(self, threads: int) -> SpatialSolution:
        """The same, evaluated on so many threads."""
        return replace(self, threads=threads)

    def potential(self, points: Floats) -> Floats:
        """Potentials (e, n), V per V, at points (n, 3), m."""
        return self._evaluated(points, with_field=False)[0]

    def field(self, points: Floats) -> Floats:
        """Fields -grad phi (e, n, 3), 1/m, at points (n, 3), m; on panels both sides' mean."""
        return self._evaluated(points, with_field=True)[1]

    def potential_and_field(self, points: Floats) -> tuple[Floats, Floats]:
        """Both at once, (e, n) and (e, n, 3), for the price of one where points are many."""
        return self._evaluated(points, with_field=True, with_potential=True)

    def arrays(self) -> dict[str, NDArray[np.generic]]:
        """All of it by name, to be kept."""
        return {
            "corners": self.corners,
            "electrode": self.electrode,
            "density": self.density,
            "capacitance": self.capacitance,
            "error": np.array(self.error),
            "mirrors": np.array(self.mirrors, dtype=np.int64),
        }

    @classmethod
    def from_arrays(cls, arrays: Mapping[str, NDArray[Any]]) -> SpatialSolution:
        """The solution whose :meth:`arrays` these are."""
        return cls(
            np.ascontiguousarray(arrays["corners"], dtype=np.float64),
            np.ascontiguousarray(arrays["electrode"], dtype=np.int64),
            np.ascontiguousarray(arrays["density"], dtype=np.float64),
            np.ascontiguousarray(arrays["capacitance"], dtype=np.float64),
            float(arrays["error"]),
            tuple(bool(each) for each in arrays["mirrors"]),
        )

    def _evaluated(
        self, points: Floats, with_field: bool, with_potential: bool = False
    ) -> tuple[Floats, Floats]:
        """Potentials, unless only the field is wanted, and fields, if wanted."""
        points = np.ascontiguousarray(points, dtype=np.float64).reshape(-1, 3)
        sets, count = len(self.density), len(points)
        potential = np.zeros((sets, count))
        field = np.zeros((sets, count if with_field else 0, 3))
        if count == 0 or sets == 0:
            return potential, field
        rows = panel_rows(self.corners)
        density = np.ascontiguousarray(COULOMB_CONSTANT * self.density.T)
        if float(count) * len(rows) <= _FEW:
            if with_potential or not with_field:
                potential = self._directly(rows, density, points)
            if with_field:
                field = self._field_directly(rows, density, points)
            return potential, field
        for low in range(0, count, _AT_ONCE):
            part = slice(low, low + _AT_ONCE)
            found = self._by_tree(rows, density, points[part], with_field)
            potential[:, part] = found[:, 3]
            if with_field:
                field[:, part] = found[:, :3].transpose(0, 2, 1)
        return potential, field

    def _directly(self, rows: Floats, density: Floats, points: Floats) -> Floats:
        out = np.empty((len(points), density.shape[1]))
        with on_threads(self.threads):
            panel_sums(rows, density, points, out)
        return np.ascontiguousarray(out.T)

    def _field_directly(self, rows: Floats, density: Floats, points: Floats) -> Floats:
        out = np.empty((len(points), density.shape[1], 3))
        with on_threads(self.threads):
            panel_field_sums(rows, density, points, out)
        return np.ascontiguousarray(out.transpose(1, 0, 2))

    def _by_tree(self, rows: Floats, density: Floats, points: Floats, with_field: bool) -> Floats:
        """(e, 4, n): fields and potentials, through points in the place of panels."""
        every_point = panel_points(rows)
        of_panels = every_point.reshape(-1, 3)
        total = PointSum(np.concatenate([of_panels, points]), self.threads)
        share = np.repeat(rows[:, 21] / POINTS, POINTS)
        found = np.empty((density.shape[1], 4, len(points)))
        for e in range(density.shape[1]):
            charge = np.repeat(density[:, e], POINTS) * share
            found[e] = total(charge)[:, len(of_panels) :]
        bounds = bounds_of(np.ascontiguousarray(rows[:, 23:26]), NEAR * rows[:, 22])
        status = np.zeros(len(points), dtype=np.int64)
        with on_threads(self.threads):
            add_near_panels(rows, every_point, density, points, bounds, with_field, found, status)
        # so close to a panel's point that the tree's sum has lost its digits
        close = np.flatnonzero(status == REACHED)
        if len(close):
            found[:, 3, close] = self._directly(rows, density, points[close])
            if with_field:
                field = self._field_directly(rows, density, points[close])
                found[:, :3, close] = field.transpose(0, 2, 1)
        return found
