"""Bodies in space: outlines revolved about an axis or extruded along it, and triangle meshes.

Boxes, rods, rings, spheres, cones, and plates with holes are all outlines swept one way or the
other, so that a surface has one distance and one mesh, whatever it is called in a scenario.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.outline import Outline

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Frame:
    """Own coordinates of a body: its origin, m, and its axes as rows of a rotation (3, 3)."""

    origin: Floats = field(default_factory=lambda: np.zeros(3))
    axes: Floats = field(default_factory=lambda: np.eye(3))

    def inward(self, points: Floats) -> Floats:
        """Points (n, 3) of the scenario in own coordinates."""
        return np.asarray((points - self.origin) @ self.axes.T)

    def outward(self, points: Floats) -> Floats:
        """Points (n, 3) in own coordinates as the scenario sees them."""
        return np.asarray(points @ self.axes + self.origin)


@dataclass(frozen=True, slots=True)
class Revolved:
    """An outline in (r, z) turned about the own z axis; r = x of the outline is never negative."""

    outline: Outline
    frame: Frame = field(default_factory=Frame)


@dataclass(frozen=True, slots=True)
class Extruded:
    """An outline in the own (x, y), from -half_length to +half_length along the own z axis.

    half_length : m; infinite for what is the same at every z; 0 for a thin sheet, whose outline
        is solid
    """

    outline: Outline
    half_length: float
    frame: Frame = field(default_factory=Frame)


@dataclass(frozen=True, slots=True)
class Mesh:
    """Triangles.

    vertices : (v, 3) float64, m
    triangles : (t, 3) int64, counter-clockwise seen from outside
    closed : whether they bound a volume
    """

    vertices: Floats
    triangles: NDArray[np.int64]
    closed: bool


Solid = Revolved | Extruded | Mesh
