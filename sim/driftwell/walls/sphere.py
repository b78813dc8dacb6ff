"""Spherical wall."""

from __future__ import annotations

from typing import Literal

import numpy as np

from driftwell.forms import Length, Positive, key
from driftwell.kernels import inner_kernel
from driftwell.walls.form import EFFECT, PackedSurface, WallForm

SPHERE = 1


class Sphere(WallForm):
    """A hollow sphere: charges are born and held inside it."""

    kind: Literal["sphere"]
    radius: Positive[Length] = key("inner radius", example="20 mm")
    centre: tuple[Length, Length, Length] = key("centre", default=(0.0, 0.0, 0.0))

    def packed(self) -> PackedSurface:
        return PackedSurface(SPHERE, EFFECT[self.effect], (*self.centre, self.radius))

    def closed(self) -> bool:
        return True

    def words(self) -> str:
        return f"hollow sphere, radius {self.radius * 1e3:.6g} mm"


@inner_kernel
def sphere_level(p: np.ndarray, x: float, y: float, z: float) -> float:
    """R^2 - r^2, m^2: positive inside."""
    dx, dy, dz = x - p[0], y - p[1], z - p[2]
    return p[3] * p[3] - (dx * dx + dy * dy + dz * dz)


@inner_kernel
def sphere_normal(p: np.ndarray, x: float, y: float, z: float) -> tuple[float, float, float]:
    """Direction in which the level rises, of any length: towards the centre."""
    return p[0] - x, p[1] - y, p[2] - z
