"""All kinds of walls and detectors, and their dispatch in compiled code.

A surface is where its *level* is zero. A charge meets it where the level changes sign along its
path, in either direction, and only where the surface *stops* (is solid, or sensitive): not in an
opening, not beyond a tube's end. A charge that begins on a surface has not met it: the side it
leaves to is its own. A new kind is one new file, one line in :data:`WALL_KINDS` or
:data:`DETECTOR_KINDS`, and one branch in each dispatch.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels import inner_kernel, kernel, outer_kernel
from driftwell.walls.box import BOX, Box, box_level, box_normal
from driftwell.walls.cylinder import (
    CYLINDER,
    Cylinder,
    cylinder_level,
    cylinder_normal,
    cylinder_stops,
)
from driftwell.walls.form import DetectorForm, PackedSurface, WallForm
from driftwell.walls.plane import (
    PLANE,
    Plane,
    PlaneDetector,
    plane_level,
    plane_normal,
    plane_stops,
)
from driftwell.walls.sphere import SPHERE, Sphere, sphere_level, sphere_normal

WALL_KINDS: tuple[type[WallForm], ...] = (Cylinder, Plane, Box, Sphere)
DETECTOR_KINDS: tuple[type[DetectorForm], ...] = (PlaneDetector,)

PARAMETERS = 12


class SurfaceTable(NamedTuple):
    """Walls, then detectors, one row each, as flat arrays for compiled code.

    kind, effect : (m,) int64; parameter : (m, 12) float64
    """

    kind: NDArray[np.int64]
    effect: NDArray[np.int64]
    parameter: NDArray[np.float64]


def surface_table(walls: Sequence[WallForm], detectors: Sequence[DetectorForm]) -> SurfaceTable:
    """Lay the walls, then the detectors, one after the other."""
    packed: list[PackedSurface] = [wall.packed() for wall in walls]
    packed += [detector.packed() for detector in detectors]
    parameter = np.zeros((len(packed), PARAMETERS))
    for row, surface in zip(parameter, packed, strict=True):
        row[: len(surface.parameters)] = surface.parameters
    return SurfaceTable(
        np.array([surface.kind for surface in packed], dtype=np.int64),
        np.array([surface.effect for surface in packed], dtype=np.int64),
        parameter,
    )


@inner_kernel
def level(kind: int, p: np.ndarray, x: float, y: float, z: float) -> float:
    """The level of a surface at a point: zero on it, of one sign on each side."""
    if kind == CYLINDER:
        return cylinder_level(p, x, y, z)
    if kind == PLANE:
        return plane_level(p, x, y, z)
    if kind == SPHERE:
        return sphere_level(p, x, y, z)
    if kind == BOX:
        return box_level(p, x, y, z)
    return np.nan


@outer_kernel
def stops(kind: int, p: np.ndarray, x: float, y: float, z: float) -> bool:
    """Whether the surface is solid, or sensitive, at a point on it."""
    if kind == CYLINDER:
        return cylinder_stops(p, x, y, z)
    if kind == PLANE:
        return plane_stops(p, x, y, z)
    return True


@outer_kernel
def normal(
    kind: int, p: np.ndarray, x: float, y: float, z: float, ux: float, uy: float, uz: float
) -> tuple[float, float, float]:
    """Unit vector in which the level rises, at a point where a charge of velocity u meets it."""
    if kind == CYLINDER:
        nx, ny, nz = cylinder_normal(p, x, y, z)
    elif kind == PLANE:
        nx, ny, nz = plane_normal(p)
    elif kind == SPHERE:
        nx, ny, nz = sphere_normal(p, x, y, z)
    else:
        nx, ny, nz = box_normal(p, x, y, z, ux, uy, uz)
    length = np.sqrt(nx * nx + ny * ny + nz * nz)
    return nx / length, ny / length, nz / length


@kernel
def sides(surfaces: SurfaceTable, position: np.ndarray, out_side: np.ndarray) -> None:
    """The side of every surface each charge begins on: +1 or -1 by the level's sign, 0 on it.

    position : (3, n) float64, m; out_side : (m, n) int8, overwritten
    """
    x, y, z = position[0], position[1], position[2]
    for s in range(surfaces.kind.size):
        kind = surfaces.kind[s]
        p = surfaces.parameter[s]
        for i in range(x.size):
            there = level(kind, p, x[i], y[i], z[i])
            out_side[s, i] = 1 if there > 0.0 else (0 if there == 0.0 else -1)
