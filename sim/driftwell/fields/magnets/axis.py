"""Places in the coordinates of a round thing: along its axis and away from it."""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel


@inner_kernel
def about_axis(
    p: np.ndarray, x: float, y: float, z: float
) -> tuple[float, float, float, float, float]:
    """A place as zeta along the axis, the vector away from it, and rho, its length.

    p = centre (3), unit vector of the axis (3).
    """
    dx, dy, dz = x - p[0], y - p[1], z - p[2]
    zeta = dx * p[3] + dy * p[4] + dz * p[5]
    ax, ay, az = dx - zeta * p[3], dy - zeta * p[4], dz - zeta * p[5]
    return zeta, ax, ay, az, math.sqrt(ax * ax + ay * ay + az * az)
