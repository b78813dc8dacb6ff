"""Field and potential of many charges at eight places at once, a place in each lane.

One source after the other is taken to all lanes, so nothing is added across lanes and the charges
need not be padded. Sources are summed in runs of 512 and the runs' sums added: the rounding of a
long sum grows with the length of a run, not with that of the whole.
"""

from __future__ import annotations

import numpy as np

from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    inverse_cube,
    inverse_root,
    lanes,
    load_one,
    where_above,
    without,
)

NEAREST2 = 1e-100
"""m^2, added to every squared distance, as a softening of 1e-50 m: lost in rounding beyond 1e-42 m,
and finite to the power -3/2, so that what pushes along no distance pushes nowhere."""
_RUN = 512


@inner_kernel
def field_at_eight(
    x: LanesType,
    y: LanesType,
    z: LanesType,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
) -> tuple[LanesType, LanesType, LanesType]:
    """Sums of Q_j (x - x_j) / (|x - x_j|^2 + e^2)^(3/2); charges at the very place push nowhere.

    position : (3, n) m and charge : (n,) C, the sources
    """
    xs, ys, zs = position[0], position[1], position[2]
    soft = lanes(softening2 + NEAREST2)
    ex = ey = ez = lanes(0.0)
    for start in range(0, charge.size, _RUN):
        fx = fy = fz = lanes(0.0)
        for j in range(start, min(start + _RUN, charge.size)):
            dx = x - load_one(xs, j)
            dy = y - load_one(ys, j)
            dz = z - load_one(zs, j)
            push = inverse_cube(fused(dx, dx, fused(dy, dy, fused(dz, dz, soft))))
            push = push * load_one(charge, j)
            fx = fused(push, dx, fx)
            fy = fused(push, dy, fy)
            fz = fused(push, dz, fz)
        ex = ex + fx
        ey = ey + fy
        ez = ez + fz
    return ex, ey, ez


@inner_kernel
def potential_at_eight(
    x: LanesType,
    y: LanesType,
    z: LanesType,
    own: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
) -> LanesType:
    """Sum of Q_j / (|x - x_j|^2 + e^2)^(1/2) at the places of charges `own` to ``own + 7``.

    Their own terms are left out, and without softening those of charges at the very place.
    """
    n = charge.size
    after = min(own + 8, n)
    result = _level(x, y, z, position, charge, softening2, 0, own)
    for j in range(own, after):
        result = result + _term(
            x, y, z, position, j, without(load_one(charge, j), j - own), softening2
        )
    return result + _level(x, y, z, position, charge, softening2, after, n)


@inner_kernel
def _level(
    x: LanesType,
    y: LanesType,
    z: LanesType,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    first: int,
    last: int,
) -> LanesType:
    """The terms of charges `first` to ``last - 1``."""
    result = lanes(0.0)
    for start in range(first, last, _RUN):
        run = lanes(0.0)
        for j in range(start, min(start + _RUN, last)):
            run = run + _term(x, y, z, position, j, load_one(charge, j), softening2)
        result = result + run
    return result


@inner_kernel
def _term(
    x: LanesType,
    y: LanesType,
    z: LanesType,
    position: np.ndarray,
    j: int,
    charge: LanesType,
    softening2: float,
) -> LanesType:
    """Q / (|x - x_j|^2 + e^2)^(1/2)."""
    dx = x - load_one(position[0], j)
    dy = y - load_one(position[1], j)
    dz = z - load_one(position[2], j)
    soft = lanes(softening2 + NEAREST2)
    r2 = fused(dx, dx, fused(dy, dy, fused(dz, dz, soft)))
    return where_above(r2, lanes(NEAREST2), inverse_root(r2) * charge)
