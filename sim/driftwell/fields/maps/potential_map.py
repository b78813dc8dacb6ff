"""Unit potentials of all electrodes as splines on one grid."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, Self, cast, get_args

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.fields.apart import ELECTRIC, call_electric, note_addresses
from driftwell.fields.form import PackedField, Role
from driftwell.fields.maps.grid import Grid
from driftwell.fields.maps.kernels import (
    PLANAR_MAP,
    ROUND_MAP,
    SPATIAL_MAP,
    planar_map,
    round_map,
    spatial_map,
)
from driftwell.fields.maps.reached import Reached, reached_from
from driftwell.fields.maps.spline_sums import (
    first_derivatives,
    second_derivatives,
    spline_sums,
)
from driftwell.forms.waveform_table import PackedWaveform
from driftwell.kernels import kernel
from driftwell.kernels.spline import SPARE
from driftwell.kernels.waveform import CONSTANT

Floats = NDArray[np.float64]
Point3 = tuple[float, float, float]
MapGeometry = Literal["axisymmetric", "planar", "spatial"]

KIND_NUMBERS: dict[str, int] = {
    "axisymmetric": ROUND_MAP,
    "planar": PLANAR_MAP,
    "spatial": SPATIAL_MAP,
}
_KERNELS = {ROUND_MAP: round_map, PLANAR_MAP: planar_map, SPATIAL_MAP: spatial_map}
CONSTANT_ONE = PackedWaveform(CONSTANT, (1.0,))


@dataclass(frozen=True, slots=True)
class PotentialMap:
    """Potentials of e unit solutions on one grid.

    geometry : what the d coordinates are: (r, z), (x, y) or (x, y, z)
    grid : in the electrodes' own coordinates, m; the axis r is mirrored
    coefficients : (e, n0 + 4, n1 + 4, ...) float64, V per V
    reached : how well its field agrees with the field it was made from
    """

    geometry: MapGeometry
    grid: Grid
    coefficients: Floats
    reached: Reached

    def combined(self, weights: ArrayLike) -> Floats:
        """Coefficients (n0 + 4, ...) of the sum of the unit solutions times weights (e,)."""
        return np.tensordot(np.asarray(weights, dtype=np.float64), self.coefficients, axes=1)

    def packed(self, coefficients: Floats, centre: Point3, waveform: PackedWaveform) -> PackedField:
        """A field of combined coefficients that a waveform scales, as numbers for compiled code.

        centre : where the origin of the electrodes' own coordinates lies, m
        """
        return packed_map(self.geometry, self.grid, coefficients, centre, waveform)

    def region(self) -> tuple[tuple[float, float], ...]:
        """From and to along each axis, m; of r, from minus the largest r to it."""
        return self.grid.region()

    def values(self, points: ArrayLike, weights: ArrayLike) -> tuple[Floats, Floats]:
        """Potential (n,) and field (n, d) at points (n, d), by the kernels of the time loop."""
        return map_values(
            self.packed(self.combined(weights), (0.0, 0.0, 0.0), CONSTANT_ONE), points
        )

    def curvature(self, points: ArrayLike, weights: ArrayLike) -> Floats:
        """Second derivatives (n, 3, 3) of the potential at points (n, d), V/m^2.

        Along (x, y, z); of axisymmetric maps along (r, the azimuth, z), where the second is
        (dphi/dr)/r. A charge q of mass m oscillates there with sqrt(q k/m) at most, k the largest
        eigenvalue.
        """
        place = np.asarray(points, dtype=np.float64).reshape(-1, self.grid.axes)
        axes = self.grid.axes
        coefficients = self.combined(weights)[None]
        wanted = [*first_derivatives(axes), *second_derivatives(axes)]
        found = spline_sums(self.grid, coefficients, place, wanted)[0]
        slopes, bends = found[:, :axes], found[:, axes:].reshape(-1, axes, axes)
        if self.geometry == "spatial":
            return bends
        out = np.zeros((len(place), 3, 3))
        if self.geometry == "planar":
            out[:, :2, :2] = bends
            return out
        r = place[:, 0]
        on_axis = np.abs(r) < 1e-6 * self.grid.spacing[0]
        out[:, ::2, ::2] = bends
        out[:, 1, 1] = np.where(on_axis, bends[:, 0, 0], slopes[:, 0] / np.where(on_axis, 1.0, r))
        return out

    def arrays(self) -> dict[str, NDArray[np.generic]]:
        """All of it by name, to be kept."""
        return {
            "geometry": np.array([self.geometry.encode()]),
            "origin": np.array(self.grid.origin),
            "spacing": np.array(self.grid.spacing),
            "counts": np.array(self.grid.counts, dtype=np.int64),
            "mirrors": np.array(self.grid.mirrors),
            "coefficients": self.coefficients,
            **self.reached.arrays(),
        }

    @classmethod
    def from_arrays(cls, arrays: dict[str, NDArray[np.generic]]) -> Self:
        """The map that :meth:`arrays` gave; raises KeyError or ValueError where it is no map."""
        geometry = bytes(arrays["geometry"][0]).decode()
        if geometry not in get_args(MapGeometry):
            raise ValueError(f"no map has the geometry {geometry!r}")
        grid = Grid(
            tuple(float(x) for x in arrays["origin"]),
            tuple(float(x) for x in arrays["spacing"]),
            tuple(int(n) for n in arrays["counts"]),
            tuple(bool(m) for m in arrays["mirrors"]),
        )
        coefficients = np.ascontiguousarray(arrays["coefficients"], dtype=np.float64)
        if coefficients.shape[1:] != grid.coefficient_counts:
            raise ValueError("the coefficients of the map do not fit its grid")
        return cls(cast(MapGeometry, geometry), grid, coefficients, reached_from(arrays))


def packed_map(
    geometry: MapGeometry,
    grid: Grid,
    coefficients: Floats,
    centre: Point3,
    waveform: PackedWaveform,
) -> PackedField:
    """A potential on a grid that a waveform scales, as numbers for compiled code."""
    return PackedField(
        Role.ELECTRIC,
        KIND_NUMBERS[geometry],
        (*centre, *grid.parameters()),
        waveform,
        np.concatenate([coefficients.ravel(), np.zeros(SPARE)]),
    )


def map_places(geometry: MapGeometry, centre: Point3, position: Floats) -> Floats:
    """Places (3, n), m, in the coordinates (n, d) of a map whose origin is at `centre`."""
    x, y, z = position - np.array(centre)[:, None]
    if geometry == "axisymmetric":
        return np.stack([np.hypot(x, y), z], axis=1)
    return np.stack([x, y] if geometry == "planar" else [x, y, z], axis=1)


def map_values(packed: PackedField, points: ArrayLike) -> tuple[Floats, Floats]:
    """Potential (n,) and field (n, d) of a packed map, at points (n, d) in its own coordinates."""
    axes = 3 if packed.kind == SPATIAL_MAP else 2
    place = np.asarray(points, dtype=np.float64).reshape(-1, axes)
    position = np.zeros((3, len(place)))
    used = [0, 2] if packed.kind == ROUND_MAP else list(range(axes))
    position[used] = place.T
    position += np.array(packed.parameters[:3])[:, None]
    potential, field = np.empty(len(place)), np.zeros((3, len(place)))
    parameters = np.zeros(16)
    parameters[: len(packed.parameters)] = packed.parameters
    note_addresses(packed.kind, (_KERNELS[packed.kind],), ELECTRIC, parameters)
    _add_values(parameters, np.asarray(packed.data), position, potential, field)
    return potential, np.ascontiguousarray(field[used].T)


@kernel
def _add_values(
    p: np.ndarray,
    data: np.ndarray,
    position: np.ndarray,
    out_potential: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """Overwrite potentials, add fields, for w = 1; a charge of 1 makes the sum the potential."""
    one = out_potential  # its own charge: read before it is written
    for i in range(out_potential.size):
        one[i] = 1.0
        out_potential[i] = call_electric(p, data, 1.0, position, one, i, i + 1, out_field)
