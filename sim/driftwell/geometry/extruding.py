"""Triangles of an extruded outline: walls, and caps at both ends."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.caps import cap
from driftwell.geometry.patches import Patch, grid_triangles
from driftwell.geometry.solid import Extruded
from driftwell.geometry.stations import Chain, Fineness, chains, even_count, spaced

Floats = NDArray[np.float64]


def extruded_patches(solid: Extruded, how: Fineness) -> list[Patch]:
    """Walls and caps, in own coordinates; of a thin sheet one cap alone.

    Raises ValueError where the extrusion has no end.
    """
    half = solid.half_length
    if not math.isfinite(half):
        raise ValueError("a body without end along z has no mesh")
    loops = chains(solid.outline, how)
    if not solid.outline.solid:
        return [_wall(loop, half, how) for loop in loops]
    loops, points, triangles = cap(solid.outline, loops, how)
    lower, upper = (
        Patch(np.column_stack([points, np.full(len(points), z)]), triangles) for z in (-half, half)
    )
    if half == 0.0:
        return [upper]
    return [lower.turned_over(), upper, *(_wall(loop, half, how) for loop in loops)]


def _wall(loop: Chain, half: float, how: Fineness) -> Patch:
    """The strip that a loop sweeps, turned outwards."""
    heights = half * (2.0 * spaced(even_count(2.0 * half, how), how.grade, True, True) - 1.0)
    count = len(loop.points)
    points = np.column_stack(
        [np.tile(loop.points, (len(heights), 1)), np.repeat(heights, count)],
    )
    patch = Patch(points, grid_triangles(len(heights), count, loop.closed))
    return patch if loop.inside_left is False else patch.turned_over()
