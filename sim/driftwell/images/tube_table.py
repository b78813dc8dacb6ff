"""Quadrature nodes and coefficients of the images in an endless grounded tube.

    G = -(2 K / (pi a)) sum_m (2 - delta_m0) cos m(phi_i - phi_j)
        int_0^inf K_m(k)/I_m(k) I_m(k rho_i) I_m(k rho_j) cos k(z_i - z_j) dk                (1)

with lengths in units of the radius a. With I_m(x) = (x/2)^m / m! L_m(x), L_m = 0F1(; m + 1; x^2/4),

    G = -(K/a) sum_m sum_k C_mk Re[(u_i + i v_i)^m (u_j - i v_j)^m]
        L_m(k rho_i) L_m(k rho_j) cos k(z_i - z_j)                                           (2)
    C_mk = (2/pi) (2 - delta_m0) w_k K_m(k)/I_m(k) ((k/2)^m / m!)^2

a sum of products of one function of each charge. The integrand falls as
exp(-k (2 - rho_i - rho_j)), terms as (rho_i rho_j)^m. The logarithm of K_0 at k = 0 is taken by
nodes that crowd there as t^4 (Gauss-Legendre in t); then follow panels of 16 nodes, narrow enough
for cos k z over the length of a *level*: lengths up to 4 a, 8 a, ... 64 a.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), problem 3.23 (b).
M. Abramowitz and I. A. Stegun, Handbook of Mathematical Functions (1964), 9.6.10, 9.6.26.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from scipy.special import gammaln, i0e, k0e, k1e

Floats = NDArray[np.float64]

LENGTHS = (4.0, 8.0, 16.0, 32.0, 64.0)
"""Lengths of the levels, in radii."""
TOLERANCE = 1e-9
"""Where series and integral are cut, of the largest term."""
DIGITS = -math.log(TOLERANCE)
HEAD = 10
"""Entries of the table before those of the levels: axis, centre, radius, orders, widest k, levels,
reach, and one that is not used."""
_PHASE, _WIDEST = 20.0, 4.0
_FIRST, _PANEL = 24, 16
_ABOVE = 30
"""Orders above the highest, and above k, from which the ratios of I_m are taken downwards."""


def orders_for(reach: float) -> int:
    """Highest m needed where no charge is farther from the axis than `reach`, in radii."""
    return math.ceil(DIGITS / (-2.0 * math.log(reach)))


def widest_for(reach: float) -> float:
    """Largest k needed there, in inverse radii."""
    return DIGITS / (2.0 * (1.0 - reach))


def nodes(length: float, widest: float) -> tuple[Floats, Floats]:
    """Nodes and weights in k, multiples of 8, ascending: cos k z is followed up to `length`."""
    width = min(_PHASE / length, _WIDEST)
    t, v = np.polynomial.legendre.leggauss(_FIRST)
    t = 0.5 * (t + 1.0)
    first = 0.25 * width
    places, weights = [first * t**4], [0.5 * first * 4.0 * t**3 * v]
    s, w = np.polynomial.legendre.leggauss(_PANEL)
    start = first
    while start < widest:
        places.append(start + 0.5 * width * (s + 1.0))
        weights.append(0.5 * width * w)
        start += width
    return np.concatenate(places), np.concatenate(weights)


def coefficients(k: Floats, weight: Floats, orders: int) -> Floats:
    """C_mk of (2), (orders + 1, nodes).

    From the ratios K_{m+1}/K_m, upwards, and I_{m+1}/I_m, downwards, which neither grow nor vanish.
    """
    m = np.arange(orders + 1)[:, None]
    log_k, log_i = np.empty((orders + 1, k.size)), np.empty((orders + 1, k.size))
    log_k[0], log_i[0] = np.log(k0e(k)) - k, np.log(i0e(k)) + k
    ratio = k1e(k) / k0e(k)
    for order in range(1, orders + 1):
        log_k[order] = log_k[order - 1] + np.log(ratio)
        ratio = 2.0 * order / k + 1.0 / ratio
    ratio = np.zeros(k.size)
    for order in range(orders + _ABOVE + int(k[-1]), -1, -1):
        ratio = 1.0 / (2.0 * (order + 1) / k + ratio)
        if order < orders:
            log_i[order + 1] = np.log(ratio)
    log_i = np.cumsum(log_i, axis=0)
    share = np.where(m == 0, 1.0, 2.0)
    found = log_k - log_i + 2.0 * (m * np.log(0.5 * k) - gammaln(m + 1.0))
    return np.asarray((2.0 / math.pi) * share * weight * np.exp(found))


def tube_table(axis: int, centre: Floats, radius: float, reach: float) -> Floats:
    """All numbers of a tube, flat: HEAD, for each level (length, blocks, start), then the levels.

    A level is its nodes, blocks of 8 in order; for each block the 8 values k, then the rows m = 0
    to `orders` of 8 coefficients.
    """
    orders, widest = orders_for(reach), widest_for(reach)
    head = [axis, *centre, radius, orders, widest, len(LENGTHS), reach, 0.0]
    parts: list[Floats] = []
    index: list[float] = []
    start = HEAD + 3 * len(LENGTHS)
    for length in LENGTHS:
        k, weight = nodes(length, widest)
        blocks = k.size // 8
        rows = np.concatenate([k[None, :], coefficients(k, weight, orders)])
        part = np.ascontiguousarray(rows.reshape(orders + 2, blocks, 8).transpose(1, 0, 2)).ravel()
        index += [length, blocks, start]
        start += part.size
        parts.append(part)
    return np.concatenate([np.array(head), np.array(index), *parts])
