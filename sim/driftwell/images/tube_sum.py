"""Images of charges inside an endless grounded tube: equation (2) of tube_table.py.

The moments of all charges are collected for each order m and node k, then each charge takes field
and potential from them: the cost grows with the number of charges, not with its square. How many
orders and nodes are used follows from the charge farthest from the axis, and from the length the
charges are spread over, at each call. L_m is found for two orders from its series, whose terms are
all positive, and downwards by

    L_{m-1}(x) = L_m(x) + (x/2)^2 / (m (m + 1)) L_{m+1}(x)                                  (1)

which only adds. Eight nodes stand in the lanes. Blocks of nodes are dealt to 8 groups with sums of
their own, which are added in order: the bits do not depend on the number of threads.

The force grows without bound towards the wall, and with it the number of orders. So a charge at the
distance r from the axis is taken to be at

    r' = s r,   s = (1 + t)^(-1/32),   t = (r / reach)^32                                   (2)

in its direction, which is never beyond `reach`; the field is that of the energy as a function of r,
by the chain rule, so the energy is conserved all the same. Field and potential err by about t.

References
----------
M. Abramowitz and I. A. Stegun, Handbook of Mathematical Functions (1964), 9.6.10, 9.6.26 (for (1)).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.images.image_sum import SIGNATURE, THREADED, ImageSum
from driftwell.images.tube_table import DIGITS, HEAD, LENGTHS, orders_for, tube_table
from driftwell.kernels import inner_kernel, kernel, outer_kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.lanes import fused, lanes, load, store, total
from driftwell.kernels.pointers import CompiledFunction

Floats = NDArray[np.float64]

GROUPS = 8
_SMALL = 1e-3
"""Radii: charges nearer to the axis are summed as if the farthest were there."""


@dataclass(frozen=True, slots=True)
class TubeImages:
    """An endless tube that answers with images.

    axis : 0, 1 or 2; centre : (3,) m, a point of the axis; radius : m
    reach : distance from the axis, in radii, up to which the sum is as accurate as it says
    """

    axis: int
    centre: Floats
    radius: float
    reach: float
    table: Floats = field(init=False)

    def __post_init__(self) -> None:
        made = tube_table(self.axis, self.centre, self.radius, self.reach)
        object.__setattr__(self, "table", made)

    def laid_out(self, n: int, threads: int) -> ImageSum:
        """The sum for `n` charges on so many threads."""
        summed = threaded_tube_sum if threads > 1 and 4 * n >= THREADED else tube_sum
        work = room((GROUPS, work_size(n, orders_for(self.reach))))
        return ImageSum(CompiledFunction(summed, SIGNATURE), self.table, work)

    def doubt(self, position: Floats, charge: Floats) -> str | None:
        """Where charges are spread too far along the tube for the quadrature."""
        there = position[self.axis, charge != 0.0]
        length = float(np.ptp(there)) / self.radius if there.size else 0.0
        if length <= LENGTHS[-1]:
            return None
        return (
            f"the charges are spread over {length:.3g} radii of the tube that answers with images; "
            f"the sum is made for {LENGTHS[-1]:g}, and errs beyond"
        )


def work_size(n: int, orders: int) -> int:
    """float64 of a group: moments, L_m, cos and sin of each charge, and its part of the result."""
    return 32 * (orders + 1) + 8 * (orders + 2) + 16 * n + 4 * n


@kernel
def tube_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Field and potential of the images at each charge, on one thread.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C
    constant : 1/(4 pi eps0), N m^2/C^2
    table : of :func:`tube_table`; work : (8, :func:`work_size`), overwritten
    out_image : (4, n) float64, V/m (3) and V, overwritten
    """
    farthest, low, high = _spread(position, charge, table)
    for g in range(GROUPS):
        _group(g, position, charge, table, farthest, low, high, work[g])
    _merge(charge.size, constant, table, work, out_image)


@threaded_kernel
def threaded_tube_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The same as :func:`tube_sum`, with the same bits, on all of numba's threads."""
    farthest, low, high = _spread(position, charge, table)
    for g in prange(GROUPS):
        _group(g, position, charge, table, farthest, low, high, work[g])
    _merge(charge.size, constant, table, work, out_image)


@outer_kernel
def _spread(
    position: np.ndarray, charge: np.ndarray, table: np.ndarray
) -> tuple[float, float, float]:
    """Largest distance from the axis, and lowest and highest place along it, in radii."""
    far2 = _SMALL**2
    low, high = math.inf, -math.inf
    for i in range(charge.size):
        if charge[i] != 0.0:
            u, v, w, _, _ = _place(position, table, i)
            far2 = max(far2, u * u + v * v)
            low, high = min(low, w), max(high, w)
    if low > high:
        low = high = 0.0
    return math.sqrt(far2), low, high


@outer_kernel
def _group(
    g: int,
    position: np.ndarray,
    charge: np.ndarray,
    table: np.ndarray,
    farthest: float,
    low: float,
    high: float,
    work_row: np.ndarray,
) -> None:
    """The part of the blocks of nodes dealt to group `g`, into the end of its row of work space."""
    n = charge.size
    all_orders, widest, levels = int(table[5]), table[6], int(table[7])
    orders = all_orders
    if farthest < 1.0:
        orders = min(orders, int(DIGITS / (-2.0 * math.log(farthest))) + 1)
        widest = min(widest, DIGITS / (2.0 * (1.0 - farthest)))
    level = 0
    while level + 1 < levels and table[HEAD + 3 * level] < high - low:
        level += 1
    blocks = int(table[HEAD + 3 * level + 1])
    start = int(table[HEAD + 3 * level + 2])
    stride = 8 * (all_orders + 2)
    middle = 0.5 * (low + high)
    lam = 32 * (all_orders + 1)
    trig = lam + 8 * (all_orders + 2)
    out = trig + 16 * n
    for i in range(out, out + 4 * n):
        work_row[i] = 0.0
    for b in range(g, blocks, GROUPS):
        first = start + b * stride
        if table[first] > widest:
            break
        _collect(position, charge, table, first, orders, middle, lam, trig, work_row)
        _hand_out(position, charge, table, first, orders, lam, trig, out, work_row)


@inner_kernel
def _place(
    position: np.ndarray, table: np.ndarray, i: int
) -> tuple[float, float, float, float, float]:
    """Where a charge is taken to be, u, v and w in radii; s of (2), and t."""
    along = int(table[0])
    one, two = (along + 1) % 3, (along + 2) % 3
    a = table[4]
    u = (position[one, i] - table[1 + one]) / a
    v = (position[two, i] - table[1 + two]) / a
    w = (position[along, i] - table[1 + along]) / a
    t = (u * u + v * v) / (table[8] * table[8])
    t *= t
    t *= t
    t *= t
    t *= t
    root = math.sqrt(math.sqrt(math.sqrt(math.sqrt(math.sqrt(1.0 + t)))))
    return u / root, v / root, w, 1.0 / root, t


@inner_kernel
def _collect(
    position: np.ndarray,
    charge: np.ndarray,
    table: np.ndarray,
    first: int,
    orders: int,
    middle: float,
    lam: int,
    trig: int,
    work_row: np.ndarray,
) -> None:
    """The moments of all charges at one block of nodes."""
    for i in range(32 * (orders + 1)):
        work_row[i] = 0.0
    for i in range(charge.size):
        u, v, w, _, _ = _place(position, table, i)
        for lane in range(8):
            phase = table[first + lane] * (w - middle)
            work_row[trig + 16 * i + lane] = math.cos(phase)
            work_row[trig + 16 * i + 8 + lane] = math.sin(phase)
        q = charge[i]
        if q == 0.0:
            continue
        _bessel(table, first, orders, u * u + v * v, lam, work_row)
        cos, sin = load(work_row, trig + 16 * i), load(work_row, trig + 16 * i + 8)
        re, im = q, 0.0
        for m in range(orders + 1):
            one = load(work_row, lam + 8 * m)
            even, odd = one * cos, one * sin
            at = 32 * m
            store(work_row, at, fused(lanes(re), even, load(work_row, at)))
            store(work_row, at + 8, fused(lanes(re), odd, load(work_row, at + 8)))
            store(work_row, at + 16, fused(lanes(im), even, load(work_row, at + 16)))
            store(work_row, at + 24, fused(lanes(im), odd, load(work_row, at + 24)))
            re, im = re * u - im * v, re * v + im * u


@inner_kernel
def _hand_out(
    position: np.ndarray,
    charge: np.ndarray,
    table: np.ndarray,
    first: int,
    orders: int,
    lam: int,
    trig: int,
    out: int,
    work_row: np.ndarray,
) -> None:
    """Field and potential at all charges from the moments at one block of nodes."""
    n = charge.size
    k = load(table, first)
    half_k2 = k * k * lanes(0.5)
    for i in range(n):
        u, v, _, s, t = _place(position, table, i)
        _bessel(table, first, orders, u * u + v * v, lam, work_row)
        cos, sin = load(work_row, trig + 16 * i), load(work_row, trig + 16 * i + 8)
        level = bulge = eu = ev = ew = lanes(0.0)
        re, im, rate_re, rate_im = 1.0, 0.0, 0.0, 0.0
        for m in range(orders + 1):
            at = 32 * m
            coefficient = load(table, first + 8 * (m + 1))
            one = coefficient * load(work_row, lam + 8 * m)
            next_one = coefficient * load(work_row, lam + 8 * (m + 1))
            re_even, re_odd = load(work_row, at), load(work_row, at + 8)
            im_even, im_odd = load(work_row, at + 16), load(work_row, at + 24)
            of_re = fused(re_even, cos, re_odd * sin)
            of_im = fused(im_even, cos, im_odd * sin)
            turn_re = re_odd * cos - re_even * sin
            turn_im = im_odd * cos - im_even * sin
            both = fused(lanes(re), of_re, lanes(im) * of_im)
            level = fused(one, both, level)
            bulge = fused(next_one * lanes(1.0 / (m + 1.0)), both, bulge)
            eu = fused(one, fused(lanes(rate_re), of_re, lanes(rate_im) * of_im), eu)
            ev = fused(one, fused(lanes(rate_re), of_im, lanes(-rate_im) * of_re), ev)
            ew = fused(one, fused(lanes(re), turn_re, lanes(im) * turn_im), ew)
            rate_re, rate_im = (m + 1.0) * re, (m + 1.0) * im
            re, im = re * u - im * v, re * v + im * u
        outward = total(bulge * half_k2)
        fu, fv = total(eu) + u * outward, total(ev) + v * outward
        r2 = u * u + v * v
        less = t / (1.0 + t) * (fu * u + fv * v) / r2 if t > 0.0 else 0.0
        work_row[out + i] += s * (fu - less * u)
        work_row[out + n + i] += s * (fv - less * v)
        work_row[out + 2 * n + i] += total(ew * k)
        work_row[out + 3 * n + i] += total(level)


@inner_kernel
def _bessel(
    table: np.ndarray, first: int, orders: int, r2: float, lam: int, work_row: np.ndarray
) -> None:
    """L_m, m = 0 to orders + 1, at eight nodes and a distance from the axis, into `work_row`."""
    k = load(table, first)
    y = k * k * lanes(0.25 * r2)
    most = 0.25 * r2 * table[first + 7] * table[first + 7]
    top = orders + 1
    upper, lower = lanes(1.0), lanes(1.0)
    term_upper, term_lower = lanes(1.0), lanes(1.0)
    largest, size = 1.0, 1.0
    j = 1
    while largest > 1e-17 * size and j < 400:
        term_upper = term_upper * (y * lanes(1.0 / (j * (top + j))))
        term_lower = term_lower * (y * lanes(1.0 / (j * (top - 1.0 + j))))
        upper = upper + term_upper
        lower = lower + term_lower
        largest *= most / (j * (top - 1.0 + j))
        size += largest
        j += 1
    store(work_row, lam + 8 * top, upper)
    store(work_row, lam + 8 * (top - 1), lower)
    for m in range(top - 1, 0, -1):
        upper, lower = lower, fused(y * lanes(1.0 / (m * (m + 1.0))), upper, lower)
        store(work_row, lam + 8 * (m - 1), lower)


@outer_kernel
def _merge(
    n: int, constant: float, table: np.ndarray, work: np.ndarray, out_image: np.ndarray
) -> None:
    """Add the groups in order, in the units and axes of the scenario."""
    along = int(table[0])
    a = table[4]
    out = work.shape[1] - 4 * n
    for part in range(4):
        row = along if part == 2 else (along + 1 + part) % 3
        scale = constant / (a * a)
        if part == 3:
            row, scale = 3, -constant / a
        for i in range(n):
            result = 0.0
            for g in range(GROUPS):
                result += work[g, out + part * n + i]
            out_image[row, i] = scale * result
