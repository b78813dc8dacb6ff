"""Box-shaped wall, its faces along the axes."""

from __future__ import annotations

from typing import Literal

import numpy as np

from driftwell.forms import Length, Positive, key
from driftwell.kernels import inner_kernel
from driftwell.walls.form import EFFECT, PackedSurface, WallForm

BOX = 2


class Box(WallForm):
    """A hollow box: charges are born and held inside it."""

    kind: Literal["box"]
    size: tuple[Positive[Length], Positive[Length], Positive[Length]] = key(
        "full lengths along x, y and z", example=["10 mm", "10 mm", "40 mm"]
    )
    centre: tuple[Length, Length, Length] = key("centre", default=(0.0, 0.0, 0.0))

    def packed(self) -> PackedSurface:
        return PackedSurface(
            BOX, EFFECT[self.effect], (*self.centre, *(0.5 * side for side in self.size))
        )

    def closed(self) -> bool:
        return True

    def words(self) -> str:
        return "hollow box, " + " x ".join(f"{side * 1e3:.6g}" for side in self.size) + " mm"


@inner_kernel
def box_level(p: np.ndarray, x: float, y: float, z: float) -> float:
    """Distance to the nearest face, m: positive inside."""
    return min(p[3] - abs(x - p[0]), p[4] - abs(y - p[1]), p[5] - abs(z - p[2]))


@inner_kernel
def box_normal(
    p: np.ndarray, x: float, y: float, z: float, ux: float, uy: float, uz: float
) -> tuple[float, float, float]:
    """Inward normal of the nearest face a charge of velocity u runs into, or of the nearest."""
    dx, dy, dz = x - p[0], y - p[1], z - p[2]
    ax, ay, az = p[3] - abs(dx), p[4] - abs(dy), p[5] - abs(dz)
    if dx * ux > 0.0 or dy * uy > 0.0 or dz * uz > 0.0:
        # on an edge or in a corner the faces already bounced off must not be chosen again
        ax = ax if dx * ux > 0.0 else np.inf
        ay = ay if dy * uy > 0.0 else np.inf
        az = az if dz * uz > 0.0 else np.inf
    if ax <= ay and ax <= az:
        return (-1.0 if dx > 0.0 else 1.0), 0.0, 0.0
    if ay <= az:
        return 0.0, (-1.0 if dy > 0.0 else 1.0), 0.0
    return 0.0, 0.0, (-1.0 if dz > 0.0 else 1.0)
