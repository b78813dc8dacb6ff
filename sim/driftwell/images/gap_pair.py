"""What one charge between two grounded plates does to another by its images.

The images of a charge at the height u_j over the first plate, d the gap, are a row of period 2 d:
like charges at u_j + m d, m even but 0, and opposite ones where the mirrored charge would be for m
odd. With the softened lateral distance rho, rho^2 = lateral^2 + s^2, and lengths in gaps d,

    G = (K/d) [A(rho, a) - B(rho, c)],    a = u_i - u_j,  c = u_i + u_j - 1
    A = sum over even m but 0 of 1/(rho^2 + (a + m)^2)^(1/2),   B = the same over odd m, with c  (1)

Each diverges, their difference does not. Where charges are near each other, rho < 5/4, images up to
|m| = 4 are taken one by one, and those beyond by harmonics S_l = r^l P_l(z/r),

    sum over m = |m0| and beyond of 1/(rho^2 + (z + m)^2)^(1/2)
        = sum over even l of 2 zeta_l S_l(rho, z),    zeta_l = sum over m of m^-(l + 1)      (2)

Hurwitz's zeta function, and psi(5/2) - psi(3) for the difference at l = 0. Up to l = 20 this leaves
1e-11. Farther away,

    G = (K/d) [4 sum_k K_0(pi k rho) sin(pi k u_i) sin(pi k u_j) - 1/(rho^2 + a^2)^(1/2)]    (3)

where the sum is that of the charge itself and all its images, and falls as exp(-pi rho).

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), problem 3.17 (plates, by K_0).
M. Abramowitz and I. A. Stegun, Handbook of Mathematical Functions (1964), 6.3.16, 8.5.3, 9.6.27;
23.2.9 with Hurwitz's parameter (from memory).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from scipy.special import digamma, k0e, k1e, zeta

from driftwell.kernels import inner_kernel

Floats = NDArray[np.float64]

NEAR = 1.25
"""rho, in gaps, from which on (3) is taken."""
LEVELS = 10
"""Even l from 2 on."""
_DEGREE = 12
_LEAST = math.pi * NEAR
_STEPS = 2 * LEVELS - 1
_HARMONICS, _FACTORS, _BESSEL = 1, 1 + 2 * LEVELS, 1 + 2 * LEVELS + 2 * _STEPS
PAIR_TABLE = _BESSEL + 2 * (_DEGREE + 1)
_MOST, _CUT = 8, 28.0
"""Terms of (3) at the most, and pi k rho from which they are left out: exp(-28) = 7e-13."""


def pair_table() -> Floats:
    """(PAIR_TABLE,) the numbers of (2) and (3) that depend on nothing."""
    power = 2.0 * np.arange(1, LEVELS + 1) + 1.0
    like, opposite = (2.0 * 0.5**power * zeta(power, first) for first in (3.0, 2.5))
    count = 10 * _DEGREE
    w = 0.5 * (1.0 + np.cos(math.pi * (np.arange(count) + 0.5) / count))
    x = _LEAST / w
    fits = [
        np.polynomial.Polynomial.fit(w, np.sqrt(x) * each(x), _DEGREE, domain=[-1.0, 1.0]).coef
        for each in (k0e, k1e)
    ]
    order = np.arange(1.0, _STEPS + 1)
    factors = np.stack([(2.0 * order + 1.0) / (order + 1.0), order / (order + 1.0)], axis=1)
    constant = [digamma(2.5) - digamma(3.0)]
    return np.concatenate([constant, like, opposite, factors.ravel(), *fits])


@inner_kernel
def near_pair(
    rho2: float, a: float, c: float, table: np.ndarray, first: int
) -> tuple[float, float, float]:
    """G d/K of (1) by (2), its rate with rho^2, and with u_i; table : :func:`pair_table` there."""
    g, g_rho, g_z = table[first], 0.0, 0.0
    for k in range(4):
        z = a + (-4.0, -2.0, 2.0, 4.0)[k]
        inverse2 = 1.0 / (rho2 + z * z)
        inverse = math.sqrt(inverse2)
        g += inverse
        g_rho -= 0.5 * inverse * inverse2
        g_z -= z * inverse * inverse2
    for k in range(4):
        z = c + (-3.0, -1.0, 1.0, 3.0)[k]
        inverse2 = 1.0 / (rho2 + z * z)
        inverse = math.sqrt(inverse2)
        g -= inverse
        g_rho += 0.5 * inverse * inverse2
        g_z += z * inverse * inverse2
    like = first + _HARMONICS
    factors = first + _FACTORS
    one = _harmonics(rho2, a, table, like, factors)
    other = _harmonics(rho2, c, table, like + LEVELS, factors)
    return g + one[0] - other[0], g_rho + one[1] - other[1], g_z + one[2] - other[2]


@inner_kernel
def _harmonics(
    rho2: float, z: float, table: np.ndarray, first: int, factors: int
) -> tuple[float, float, float]:
    """Sum of coefficients times S_2, S_4, ..., and its rates with rho^2 and z.

    (l + 1) S_(l+1) = (2 l + 1) z S_l - l r^2 S_(l-1),   dS_l/dz = l S_(l-1)
    """
    r2 = rho2 + z * z
    below, here, below_rho, here_rho = 1.0, z, 0.0, 0.0
    g = g_rho = g_z = 0.0
    for k in range(_STEPS):
        one, other = table[factors + 2 * k] * z, table[factors + 2 * k + 1]
        above = one * here - other * r2 * below
        above_rho = one * here_rho - other * (below + r2 * below_rho)
        below, below_rho, here, here_rho = here, here_rho, above, above_rho
        if k % 2 == 0:
            coefficient = table[first + k // 2]
            g += coefficient * here
            g_rho += coefficient * here_rho
            g_z += coefficient * (k + 2.0) * below
    return g, g_rho, g_z


@inner_kernel
def far_pair(
    rho2: float,
    a: float,
    sine_i: float,
    cosine_i: float,
    sine_j: float,
    cosine_j: float,
    table: np.ndarray,
    first: int,
) -> tuple[float, float, float]:
    """The same by (3); sines and cosines of pi u of both charges."""
    rho = math.sqrt(rho2)
    inverse2 = 1.0 / (rho2 + a * a)
    inverse = math.sqrt(inverse2)
    g, g_rho, g_z = -inverse, 0.5 * inverse * inverse2, a * inverse * inverse2
    low_i, low_j, rate_i = 0.0, 0.0, 1.0
    s_i, s_j, c_i = sine_i, sine_j, cosine_i
    x1 = math.pi * rho
    decay = math.exp(-x1)
    fall = decay
    for k in range(1, _MOST + 1):
        x = k * x1
        if x > _CUT:
            break
        k0, k1 = _bessel(x, table, first + _BESSEL)
        scale = 4.0 * fall / math.sqrt(x)
        g += scale * k0 * s_i * s_j
        g_rho -= scale * k1 * (0.5 * math.pi * k / rho) * s_i * s_j
        g_z += scale * k0 * math.pi * k * c_i * s_j
        low_i, s_i = s_i, 2.0 * cosine_i * s_i - low_i
        low_j, s_j = s_j, 2.0 * cosine_j * s_j - low_j
        rate_i, c_i = c_i, 2.0 * cosine_i * c_i - rate_i
        fall *= decay
    return g, g_rho, g_z


@inner_kernel
def _bessel(x: float, table: np.ndarray, first: int) -> tuple[float, float]:
    """x^(1/2) exp(x) K_0 and K_1, to 3e-14 of themselves, from x = 5 pi/4 on."""
    w = _LEAST / x
    k0, k1 = table[first + _DEGREE], table[first + 2 * _DEGREE + 1]
    for k in range(_DEGREE - 1, -1, -1):
        k0 = k0 * w + table[first + k]
        k1 = k1 * w + table[first + _DEGREE + 1 + k]
    return k0, k1
