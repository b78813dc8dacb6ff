"""Potential and field of what an element's charge is: rings about z, or lines along z.

A ring of radius b at height c with the charge 2 pi b eps0 tau has, at (r, z), in volts per tau,

    phi = b / (2 M(l, s)),   l^2 = (r + b)^2 + (z - c)^2,   s^2 = (r - b)^2 + (z - c)^2     (1)

M is the arithmetic-geometric mean, pi l / (2 K(k)) with k^2 = 1 - s^2/l^2. It is well behaved
everywhere: on the axis l = s = M. With c_1 = (l - s)/2, c_(n+1) = c_n^2 / (4 a_(n+1)) and
T = sum over n >= 1 of 2^(n-1) c_n^2,

    E/K = 1 - (2 r b + T) / l^2                                                             (2)
    F_z = phi (z - c) (E/K) / s^2                                                           (3)
    F_r = phi (B - A + 2 r A B),   A = (b - r)/s^2,   B = (b + T/(2 r)) / l^2               (4)

(4) is the usual form, phi / (2 r) (1 - (1 + 2 r A)(1 - 2 r B)), multiplied out: nothing is divided
by r, as c_1 / r = 2 b / (l + s). A line along z with the charge eps0 tau per length has

    phi = -ln(d) / (2 pi),   F = (x - c) / (2 pi d^2)                                       (5)

Steps of the mean: 5 give rounding for s/l > 1e-3 and 1e-10 at 1e-5; 7 give it down to 1e-12.

References
----------
Ring: J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 3.3 and problem 5.10. Means: M.
Abramowitz and I. A. Stegun, Handbook of Mathematical Functions (1964), 17.6; DLMF 19.8.
"""

from __future__ import annotations

import math

from driftwell.kernels import inner_kernel

_TURN = 2.0 * math.pi
LEAST = 1e-32
"""Least squared distance, in squares of the electrodes' size, that is told from none."""


@inner_kernel
def far_ring(r: float, z: float, b: float, c: float) -> float:
    """1 / (2 M) of equation (1), for rings that are not nearer than 1e-4 of their radius."""
    h = (z - c) * (z - c)
    large = math.sqrt((r + b) * (r + b) + h)
    small = math.sqrt((r - b) * (r - b) + h)
    a1 = 0.5 * (large + small)
    g1 = math.sqrt(large * small)
    a2 = 0.5 * (a1 + g1)
    g2 = math.sqrt(a1 * g1)
    a3 = 0.5 * (a2 + g2)
    g3 = math.sqrt(a2 * g2)
    a4 = 0.5 * (a3 + g3)
    g4 = math.sqrt(a3 * g3)
    a5 = 0.5 * (a4 + g4)
    g5 = math.sqrt(a4 * g4)
    return 1.0 / (a5 + g5)


@inner_kernel
def near_ring(r: float, z: float, b: float, c: float) -> float:
    """1 / (2 M) of equation (1), for any ring that the point is not on."""
    h = (z - c) * (z - c)
    large = math.sqrt((r + b) * (r + b) + h)
    small = math.sqrt(max((r - b) * (r - b) + h, LEAST))
    for _ in range(7):
        mean = 0.5 * (large + small)
        small = math.sqrt(large * small)
        large = mean
    return 1.0 / (large + small)


@inner_kernel
def ring_field(r: float, z: float, b: float, c: float) -> tuple[float, float]:
    """(F_r, F_z) / b of equations (3) and (4)."""
    h = (z - c) * (z - c)
    large2 = (r + b) * (r + b) + h
    small2 = (r - b) * (r - b) + h
    small2 = max(small2, LEAST)
    large = math.sqrt(large2)
    small = math.sqrt(small2)
    a1 = 0.5 * (large + small)
    g1 = math.sqrt(large * small)
    a2 = 0.5 * (a1 + g1)
    g2 = math.sqrt(a1 * g1)
    a3 = 0.5 * (a2 + g2)
    g3 = math.sqrt(a2 * g2)
    a4 = 0.5 * (a3 + g3)
    g4 = math.sqrt(a3 * g3)
    a5 = 0.5 * (a4 + g4)
    g5 = math.sqrt(a4 * g4)
    a6 = 0.5 * (a5 + g5)
    g6 = math.sqrt(a5 * g5)
    per_r = b / a1  # c_1 / r
    c1 = r * per_r
    c2 = c1 * c1 / (4.0 * a2)
    c3 = c2 * c2 / (4.0 * a3)
    c4 = c3 * c3 / (4.0 * a4)
    c5 = c4 * c4 / (4.0 * a5)
    rest = 2.0 * c2 * c2 + 4.0 * c3 * c3 + 8.0 * c4 * c4 + 16.0 * c5 * c5
    # T/(2 r)
    share = 0.5 * r * per_r * per_r
    if c1 > 0.0:
        share *= 1.0 + rest / (c1 * c1)
    over_large = (b + share) / large2
    over_small = (b - r) / small2
    value = 1.0 / (a6 + g6)
    ratio = 1.0 - 2.0 * r * over_large
    return (
        value * (over_large - over_small + 2.0 * r * over_small * over_large),
        value * (z - c) * ratio / small2,
    )


@inner_kernel
def line_potential(x: float, y: float, b: float, c: float) -> float:
    """phi of equation (5)."""
    return -math.log(max((x - b) * (x - b) + (y - c) * (y - c), LEAST)) / (2.0 * _TURN)


@inner_kernel
def line_field(x: float, y: float, b: float, c: float) -> tuple[float, float]:
    """F of equation (5)."""
    dx, dy = x - b, y - c
    scale = 1.0 / (_TURN * max(dx * dx + dy * dy, LEAST))
    return dx * scale, dy * scale
