"""The potential of charges and their near images at eight places, a place in each lane."""

from __future__ import annotations

import numpy as np

from driftwell.coulomb.eight_places import NEAREST2, potential_at_eight
from driftwell.coulomb.periodic.far import AXIS, CHARGE, IMAGES, LENGTH, inverse_near
from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    inverse_root,
    lanes,
    load_one,
    load_some,
    where_above,
)

_RUN = 512


@inner_kernel
def near_potential(
    x: LanesType,
    y: LanesType,
    z: LanesType,
    own: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    far: np.ndarray,
) -> LanesType:
    """The part of |k| <= m of eq. (2) of direct.py at charges `own` to ``own + 7``.

    x, y, z : their places, the axis last; position, charge : of all
    """
    axis = int(far[AXIS])
    plain, by_own = inverse_near(far, softening2)
    own_charge = load_some(charge, own, charge.size - own)
    result = lanes(plain) * (own_charge - lanes(far[CHARGE])) - lanes(by_own) * own_charge
    # its sums are the same for any order of the axes
    if axis == 0:
        result = result + potential_at_eight(z, x, y, own, position, charge, softening2)
    elif axis == 1:
        result = result + potential_at_eight(y, z, x, own, position, charge, softening2)
    else:
        result = result + potential_at_eight(x, y, z, own, position, charge, softening2)
    xs, ys, zs = position[(axis + 1) % 3], position[(axis + 2) % 3], position[axis]
    for k in range(1, int(far[IMAGES]) + 1):
        shift = lanes(k * far[LENGTH])
        result = result + _images(x, y, z - shift, z + shift, xs, ys, zs, charge, softening2)
    return result


@inner_kernel
def _images(
    x: LanesType,
    y: LanesType,
    up: LanesType,
    down: LanesType,
    xs: np.ndarray,
    ys: np.ndarray,
    zs: np.ndarray,
    charge: np.ndarray,
    softening2: float,
) -> LanesType:
    """Potential of all charges at two places in each lane, which differ along the axis."""
    soft = lanes(softening2 + NEAREST2)
    result = lanes(0.0)
    for start in range(0, charge.size, _RUN):
        run = lanes(0.0)
        for j in range(start, min(start + _RUN, charge.size)):
            dx, dy = x - load_one(xs, j), y - load_one(ys, j)
            dz, ez = up - load_one(zs, j), down - load_one(zs, j)
            across = fused(dx, dx, fused(dy, dy, soft))
            a, b = fused(dz, dz, across), fused(ez, ez, across)
            near = where_above(a, lanes(NEAREST2), inverse_root(a))
            near = near + where_above(b, lanes(NEAREST2), inverse_root(b))
            run = fused(near, load_one(charge, j), run)
        result = result + run
    return result
