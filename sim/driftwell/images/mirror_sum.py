"""Images of charges before a grounded plane, and inside a grounded sphere.

Both have the same pair energy. With D = 2 d for a plane, d the distance from it, and
D = (a^2 - s^2) / a for a sphere of radius a, s the distance from its centre,

    G(x_i, x_j) = -K / (|x_i - x_j|^2 + D_i D_j)^(1/2),    K = 1/(4 pi eps0)                (1)

which is the potential of the mirrored charge, and of Kelvin's image -q a/s at a^2/s. The force
grows without bound towards the conductor; a length s stops it,

    G(x_i, x_j) = -K / R_ij,    R_ij^2 = |x_i - x_j|^2 + D_i D_j + s^2                      (2)

with the charge's own image, j = i, among them: its potential before a plane is
-K q / (2 (d^2 + c^2)^(1/2)), c = s/2. Where the pairs are softened, K / (r^2 + e^2)^(1/2), and
s = e, pair and image cancel on the conductor, D_i = 0, exactly. The field on a charge is

    E_i = -K sum_j q_j [x_i - x_j + D_j grad D_i / 2] / R_ij^3                              (3)

Eight charges are summed at once, one source after the other, as in the direct sum of the pairs;
the bits do not depend on the number of threads.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sections 2.1 and 2.2. In (1) the mirrored
distance is written as |x_i - x_j|^2 + 4 d_i d_j; for the sphere s_i^2 s_j^2 / a^2 - 2 x_i.x_j + a^2
is |x_i - x_j|^2 + D_i D_j. The softened law is H. C. Plummer's of the pairs, mirrored (common
practice, no source).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.forms import spelled
from driftwell.images.image_sum import BY_TREE, SIGNATURE, THREADED, Fineness, ImageSum
from driftwell.images.mirror_tree import mirrored_room, plane_tree_sum
from driftwell.kernels import inner_kernel, kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.lanes import (
    fused,
    inverse_root,
    lanes,
    larger,
    load_one,
    load_some,
    store_some,
)
from driftwell.kernels.pointers import CompiledFunction

Floats = NDArray[np.float64]

PLANE, SPHERE = 0, 1
_NEAR, _MANY = 8.0, 0.1
"""D of (1) in lengths s from which on forces are right to 2 %; the share of charges nearer than
that which is said."""
NEAREST2 = 1e-100
"""m^2, the least squared distance: what pushes along no distance pushes nowhere."""


@dataclass(frozen=True, slots=True)
class MirrorImages:
    """A plane or a sphere that answers with images.

    table : (6,) kind; a point of the plane or the centre, m; s, m; and of the plane its
        normal (3), of the sphere its radius, m
    softening : m, e of the pairs' law
    fineness : of the tree that sums many charges before a plane; None: never
    """

    table: Floats
    softening: float = 0.0
    fineness: Fineness | None = None

    def laid_out(self, n: int, threads: int) -> ImageSum:
        """The sum for `n` charges on so many threads."""
        if self.fineness is not None and n >= BY_TREE and self.table[0] == PLANE:
            point, blur, normal = self.table[1:4], self.table[4], self.table[5:8]
            work = mirrored_room(n, 1, threads, self.fineness, bool(blur > 0.0))
            planes = np.array([*normal, normal @ point, blur])
            return ImageSum(CompiledFunction(plane_tree_sum, SIGNATURE), planes, work, True)
        summed = threaded_mirror_sum if threads > 1 and n >= THREADED else mirror_sum
        return ImageSum(CompiledFunction(summed, SIGNATURE), self.table, room((4, n)))

    def doubt(self, position: Floats, charge: Floats) -> str | None:
        """Where many charges are so near the conductor that `closest` weakens their force."""
        away = position[:, charge != 0.0].T - self.table[1:4]
        if self.table[0] == PLANE:
            mirrored = 2.0 * (away @ self.table[5:8])
        else:
            mirrored = self.table[5] - np.sum(away**2, axis=1) / self.table[5]
        return weakened(mirrored, float(self.table[4]), self.softening)


def weakened(mirrored: Floats, blur: float, softening: float) -> str | None:
    """What should be said of charges whose D of (1) is (n,), m, where s weakens their images.

    Nothing where s is the pairs' softening, which the user chose.
    """
    if not mirrored.size or blur <= softening:
        return None
    share = float(np.mean(mirrored < _NEAR * blur))
    if share <= _MANY:
        return None
    return (
        f"{100.0 * share:.3g} % of the charges are so near the conductor that their own images' "
        f"force, which stops growing within {spelled(0.5 * blur, 'm', 3)} of it, errs by more than "
        "2 %. Where that matters, take a shorter step, or state [images] closest"
    )


def plane_images(
    point: Floats,
    normal: Floats,
    blur: float,
    softening: float = 0.0,
    fineness: Fineness | None = None,
) -> MirrorImages:
    """A grounded plane through `point`, m; charges are where the unit vector `normal` points.

    blur, softening : s and e, m
    """
    table = np.array([PLANE, *point, blur, *normal], dtype=np.float64)
    return MirrorImages(table, softening, fineness)


def sphere_images(
    centre: Floats, radius: float, blur: float, softening: float = 0.0
) -> MirrorImages:
    """A grounded sphere around `centre`, m, with the charges inside; s and e, m."""
    return MirrorImages(np.array([SPHERE, *centre, blur, radius], dtype=np.float64), softening)


@kernel
def mirror_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Field and potential of the images at each charge, eqs. (2) and (3), on one thread.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C
    constant : 1/(4 pi eps0), N m^2/C^2
    table : see :class:`MirrorImages`; work : (4, n), overwritten
    out_image : (4, n) float64, V/m (3) and V, overwritten
    """
    _depths(position, table, work)
    for block in range((charge.size + 7) // 8):
        _eight(8 * block, position, charge, constant, table[4], work, out_image)


@threaded_kernel
def threaded_mirror_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The same as :func:`mirror_sum`, with the same bits, on all of numba's threads."""
    _depths(position, table, work)
    for block in prange((charge.size + 7) // 8):
        _eight(8 * block, position, charge, constant, table[4], work, out_image)


@inner_kernel
def _depths(position: np.ndarray, table: np.ndarray, work: np.ndarray) -> None:
    """D of (1), and half its gradient, of every charge into rows of `work`."""
    x, y, z = position[0], position[1], position[2]
    cx, cy, cz = table[1], table[2], table[3]
    for i in range(x.size):
        dx, dy, dz = x[i] - cx, y[i] - cy, z[i] - cz
        if table[0] == PLANE:
            gx, gy, gz = table[5], table[6], table[7]
            depth = 2.0 * (gx * dx + gy * dy + gz * dz)
        else:
            a = table[5]
            depth = a - (dx * dx + dy * dy + dz * dz) / a
            gx, gy, gz = -dx / a, -dy / a, -dz / a
        work[0, i] = depth
        work[1, i], work[2, i], work[3, i] = gx, gy, gz


@inner_kernel
def _eight(
    i: int,
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    blur: float,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The sums at charges i to i + 7."""
    left = charge.size - i
    xs, ys, zs, depths = position[0], position[1], position[2], work[0]
    x, y, z = load_some(xs, i, left), load_some(ys, i, left), load_some(zs, i, left)
    depth = load_some(depths, i, left)
    ex = ey = ez = inward = level = lanes(0.0)
    soft, nearest2 = lanes(blur * blur), lanes(NEAREST2)
    for j in range(charge.size):
        dx = x - load_one(xs, j)
        dy = y - load_one(ys, j)
        dz = z - load_one(zs, j)
        other = load_one(depths, j)
        r2 = fused(dx, dx, fused(dy, dy, fused(dz, dz, fused(depth, other, soft))))
        r2 = larger(nearest2, r2)  # beyond the surface a mirrored charge may be at the very place
        inverse = inverse_root(r2)
        at = inverse * load_one(charge, j)
        push = at * (inverse * inverse)
        level = level + at
        ex = fused(push, dx, ex)
        ey = fused(push, dy, ey)
        ez = fused(push, dz, ez)
        inward = fused(push, other, inward)
    scale = lanes(-constant)
    gx, gy, gz = (
        load_some(work[1], i, left),
        load_some(work[2], i, left),
        load_some(work[3], i, left),
    )
    store_some(out_image[0], i, left, scale * fused(inward, gx, ex))
    store_some(out_image[1], i, left, scale * fused(inward, gy, ey))
    store_some(out_image[2], i, left, scale * fused(inward, gz, ez))
    store_some(out_image[3], i, left, scale * level)
