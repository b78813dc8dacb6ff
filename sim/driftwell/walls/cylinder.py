"""Cylindrical wall: the lateral surface of a round tube, endless or of a given length."""

from __future__ import annotations

from typing import Literal

import numpy as np

from driftwell.forms import Length, Positive, key
from driftwell.kernels import inner_kernel
from driftwell.walls.form import EFFECT, PackedSurface, WallForm

CYLINDER = 0
_AXES = {"x": 0, "y": 1, "z": 2}


class Cylinder(WallForm):
    """A tube: stops what reaches its radius, from inside or outside, within its length."""

    kind: Literal["cylinder"]
    radius: Positive[Length] = key("inner radius of the tube", example="3.5 mm")
    axis: Literal["x", "y", "z"] = key("direction of the tube's axis", default="z")
    centre: tuple[Length, Length, Length] = key(
        "a point on the axis, halfway along the length", default=(0.0, 0.0, 0.0)
    )
    length: Positive[Length] | None = key("length of the tube; left out: endless", default=None)

    def packed(self) -> PackedSurface:
        half = np.inf if self.length is None else 0.5 * self.length
        return PackedSurface(
            CYLINDER,
            EFFECT[self.effect],
            (*self.centre, float(_AXES[self.axis]), self.radius, half),
        )

    def closed(self) -> bool:
        return self.length is None

    def words(self) -> str:
        long = "endless" if self.length is None else f"{self.length * 1e3:.6g} mm long"
        return f"tube along {self.axis}, radius {self.radius * 1e3:.6g} mm, {long}"


@inner_kernel
def cylinder_level(p: np.ndarray, x: float, y: float, z: float) -> float:
    """R^2 - rho^2, m^2: positive inside."""
    along = int(p[3])
    dx, dy, dz = x - p[0], y - p[1], z - p[2]
    if along == 0:
        return p[4] * p[4] - (dy * dy + dz * dz)
    if along == 1:
        return p[4] * p[4] - (dx * dx + dz * dz)
    return p[4] * p[4] - (dx * dx + dy * dy)


@inner_kernel
def cylinder_stops(p: np.ndarray, x: float, y: float, z: float) -> bool:
    """Whether a point of the surface lies within the tube's length."""
    along = int(p[3])
    if along == 0:
        return abs(x - p[0]) <= p[5]
    if along == 1:
        return abs(y - p[1]) <= p[5]
    return abs(z - p[2]) <= p[5]


@inner_kernel
def cylinder_normal(p: np.ndarray, x: float, y: float, z: float) -> tuple[float, float, float]:
    """Direction in which the level rises, of any length: towards the axis."""
    along = int(p[3])
    dx, dy, dz = p[0] - x, p[1] - y, p[2] - z
    if along == 0:
        dx = 0.0
    elif along == 1:
        dy = 0.0
    else:
        dz = 0.0
    return dx, dy, dz
