"""The far images of all charges: a polynomial in differences of places, summed by moments.

With d the difference of two places, e the unit vector along the axis and L the period, the images
beyond the nearest m on each side add to (zeta the one of Hurwitz, P the Legendre polynomials)

    sum_{|k|>m} (1/|d - k L e| - 1/(|k| L)) = sum_{n=2,4,..} 2 zeta(n+1, m+1) d^n P_n / L^(n+1)

(1) for d < (m + 1) L, with the axis as that of the polynomials. Cut at a degree p it still is a
function of d alone, so what i does to j is minus what j does to i. In regular harmonics

    R_l^u(r) = r^l P_l^u(cos) exp(i u phi) / (l + u)!,
    R_n^0(a - b) = sum_k,u R_k^u(a) R_{n-k}^{-u}(-b)

it falls into moments M_j^u = sum q R_j^u(b) and local coefficients, which cost n p^2:

    sum_n C_n R_n^0(a - b) -> Re sum_k,u (2 - [u = 0]) R_k^u(a) L_k^u,                          (2)
    L_k^u = sum_j C_{k+j} (-1)^(j+u) conj(M_j^u),    C_n = 2 n! zeta(n+1, m+1)/L^(n+1)           (3)

The field is the exact gradient of (2). Lengths are counted in (m + 1) L. Charges near the axis need
few orders u; how many, m and p follow from the extent of the charges alone.

References
----------
Addition theorem and derivatives: W. Dehnen, Comput. Astrophys. Cosmol. 1 (2014) 1, app. A (from
memory). zeta(s, a) by Euler and Maclaurin: NIST Handbook of Mathematical Functions (2010), 25.11.5.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    lanes,
    load,
    load_one,
    load_some,
    store,
    total,
)
from driftwell.tree.build import extent

Floats = NDArray[np.float64]

MOST_DEGREE = 64
"""The highest degree p."""
_LINE = MOST_DEGREE + 8
"""Numbers kept for one order u: a place for each l, whole vectors."""
_ORDERS = MOST_DEGREE // 2 + 2
_GRID = _ORDERS * _LINE

IMAGES, DEGREE, ORDER, UNIT, CENTRE, CHARGE = 0, 1, 2, 3, 4, 7
"""Found at each sum: m, p, the highest u, 1/((m + 1) L), middle (axis last), net charge."""
AXIS, LENGTH, TOLERANCE, HIGHEST, MOST_IMAGES, GROUPS = 8, 9, 10, 11, 12, 13
"""Given: axis, L, error allowed to a pair's force in units of 1/L^2, limits of p and m, groups."""
_FIRST, _SECOND = 16, 16 + _GRID
"""Factors of the recursion in l."""
_STRENGTH = _SECOND + _GRID
"""C_n."""
_REAL, _IMAGINARY = _STRENGTH + _LINE, _STRENGTH + _LINE + _GRID
"""Moments, then local coefficients."""
_GRADIENT = _IMAGINARY + _GRID
"""Coefficients of three derivatives and the potential, real and imaginary, u by u and l by l."""
_SUMS = _GRADIENT + 8 * _GRID
"""Moments of each group, lane by lane."""
_GROUP = 16 * _GRID
_ZETA_TERMS = 8
_BERNOULLI = (1.0 / 12.0, -1.0 / 720.0, 1.0 / 30240.0, -1.0 / 1209600.0, 1.0 / 47900160.0)


def far_size(groups: int) -> int:
    """float64 that the far images of charges in so many groups need."""
    return _SUMS + groups * _GROUP


def prepare_far(
    out_far: Floats,
    groups: int,
    axis: int,
    period: float,
    tolerance: float,
    degree: int,
    most_images: int,
) -> None:
    """Write what is given once and for all into the room of :func:`far_size`.

    groups : stretches the charges are summed in; axis : 0, 1 or 2; period : L, m
    tolerance : error allowed to the force of a pair, in units of that between neighbouring images
    of one charge; degree, most_images : limits of p and m
    """
    out_far[AXIS], out_far[LENGTH], out_far[GROUPS] = axis, period, groups
    out_far[TOLERANCE], out_far[HIGHEST] = tolerance, min(degree, MOST_DEGREE)
    out_far[MOST_IMAGES] = most_images
    for u in range(_ORDERS):
        for degree_l in range(u, MOST_DEGREE + 1):
            inverse = 1.0 / ((degree_l + 1.0) ** 2 - u**2)
            out_far[_FIRST + u * _LINE + degree_l] = (2.0 * degree_l + 1.0) * inverse
            out_far[_SECOND + u * _LINE + degree_l] = inverse


@outer_kernel
def settle_far(position: np.ndarray, far: np.ndarray) -> None:
    """Choose m, p and the orders for the charges where they are; overwrites the first entries.

    Where no m allowed is large enough, or a place is no number, all that follows is NaN.
    """
    axis, period = int(far[AXIS]), far[LENGTH]
    n = position.shape[1]
    reach2 = across2 = 0.0
    for k in range(3):
        row = position[(axis + 1 + k) % 3]
        low, high = extent(row, 0, n)
        far[CENTRE + k] = 0.5 * low + 0.5 * high
        reach2 += (high - low) ** 2
        if k < 2:
            across2 += 0.25 * (high - low) ** 2
    far[IMAGES], far[DEGREE], far[ORDER] = 1.0, 2.0, 1.0
    far[UNIT] = math.nan
    if not math.isfinite(reach2):
        return
    reach, tolerance = math.sqrt(reach2), far[TOLERANCE]
    for m in range(1, int(far[MOST_IMAGES]) + 1):
        ratio = reach / ((m + 1.0) * period)
        degree = _degree(ratio, m, tolerance, int(far[HIGHEST]))
        if degree > 0:
            far[IMAGES], far[DEGREE], far[UNIT] = m, degree, 1.0 / ((m + 1.0) * period)
            far[ORDER] = _order(across2, period * (m + 1.0) - reach, tolerance * period, degree)
            _settle_strength(m, degree, period, far)
            return


@inner_kernel
def _degree(ratio: float, m: int, tolerance: float, highest: int) -> int:
    """The smallest even p whose first term left out pushes less than tolerance / L^2; or 0."""
    for degree in range(2, highest + 1, 2):
        n = degree + 2.0
        if 2.0 * n * ratio ** (n - 1.0) <= tolerance * (m + 1.0) ** 2:
            return degree
    return 0


@inner_kernel
def _order(across2: float, nearest: float, tolerance: float, degree: int) -> int:
    """The highest order u wanted: the next is of the size (a/z)^(2u) u/a, at a distance z."""
    power = across2 / (nearest * nearest)
    if not nearest > 0.0 or power >= 1.0:
        return degree // 2
    size, u = 1.0, 0
    while u < degree // 2:
        size *= power
        if (u + 1.0) * size * nearest <= tolerance * math.sqrt(across2):
            return u
        u += 1
    return u


@inner_kernel
def _settle_strength(m: int, degree: int, period: float, far: np.ndarray) -> None:
    """C_n, with lengths in (m + 1) L; the odd ones are 0."""
    factorial = 1.0
    for n in range(degree + 1):
        factorial *= max(n, 1)
        far[_STRENGTH + n] = 0.0
        if n >= 2 and n % 2 == 0:
            inverse = 1.0 / (m + 1.0)
            far[_STRENGTH + n] = 2.0 * factorial * _zeta(n + 1.0, m + 1.0) * inverse / period


@inner_kernel
def _zeta(s: float, a: float) -> float:
    """a^s zeta(s, a), by the sum of Euler and Maclaurin."""
    value = 0.0
    for k in range(_ZETA_TERMS):
        value += (a / (a + k)) ** s
    end = a + _ZETA_TERMS
    power = (a / end) ** s
    value += power * (end / (s - 1.0) + 0.5)
    rising = s / end
    for k in range(len(_BERNOULLI)):
        value += _BERNOULLI[k] * rising * power
        rising *= (s + 2.0 * k + 1.0) * (s + 2.0 * k + 2.0) / (end * end)
    return value


@outer_kernel
def sum_moments(
    g: int, groups: int, position: np.ndarray, charge: np.ndarray, far: np.ndarray
) -> None:
    """Moments of one group's stretch of the charges, lane by lane."""
    n = charge.size
    vectors = (n + 7) // 8
    first, last = 8 * (g * vectors // groups), min(8 * ((g + 1) * vectors // groups), n)
    axis, degree, order = int(far[AXIS]), int(far[DEGREE]), int(far[ORDER])
    xs, ys, zs = position[(axis + 1) % 3], position[(axis + 2) % 3], position[axis]
    sums = far[_SUMS + g * _GROUP :]
    for u in range(order + 1):
        for j in range(u, degree - u + 1):
            store(sums, 16 * (u * _LINE + j), lanes(0.0))
            store(sums, 16 * (u * _LINE + j) + 8, lanes(0.0))
    unit = lanes(far[UNIT])
    for i in range(first, last, 16):
        x, y, z, q = _place(xs, ys, zs, charge, i, last, unit, far)
        xb, yb, zb, qb = _place(xs, ys, zs, charge, i + 8, last, unit, far)
        square = _minus_square(x, y, z)
        square_b = _minus_square(xb, yb, zb)
        real, imaginary, real_b, imaginary_b = q, lanes(0.0), qb, lanes(0.0)
        for u in range(order + 1):
            if u > 0:
                real, imaginary = _turned(u, x, y, real, imaginary)
                real_b, imaginary_b = _turned(u, xb, yb, real_b, imaginary_b)
            below, here, below_b, here_b = lanes(0.0), lanes(1.0), lanes(0.0), lanes(1.0)
            for j in range(u, degree - u + 1):
                at = 16 * (u * _LINE + j)
                more = fused(here, real, load(sums, at))
                store(sums, at, fused(here_b, real_b, more))
                more = fused(here, imaginary, load(sums, at + 8))
                store(sums, at + 8, fused(here_b, imaginary_b, more))
                first_factor = load_one(far, _FIRST + u * _LINE + j)
                second_factor = load_one(far, _SECOND + u * _LINE + j)
                below, here = here, fused(first_factor * z, here, second_factor * square * below)
                below_b, here_b = (
                    here_b,
                    fused(first_factor * zb, here_b, second_factor * square_b * below_b),
                )


@inner_kernel
def _place(
    xs: np.ndarray,
    ys: np.ndarray,
    zs: np.ndarray,
    charge: np.ndarray,
    i: int,
    last: int,
    unit: LanesType,
    far: np.ndarray,
) -> tuple[LanesType, LanesType, LanesType, LanesType]:
    """Places of eight charges before `last` in the units of the expansion, and the charges."""
    left = last - i
    left = left if left > 0 else 0
    return (
        unit * (load_some(xs, i, left) - lanes(far[CENTRE])),
        unit * (load_some(ys, i, left) - lanes(far[CENTRE + 1])),
        unit * (load_some(zs, i, left) - lanes(far[CENTRE + 2])),
        load_some(charge, i, left),
    )


@inner_kernel
def _minus_square(x: LanesType, y: LanesType, z: LanesType) -> LanesType:
    return lanes(0.0) - fused(x, x, fused(y, y, z * z))


@inner_kernel
def _turned(
    u: int, x: LanesType, y: LanesType, real: LanesType, imaginary: LanesType
) -> tuple[LanesType, LanesType]:
    """R_u^u of R_{u-1}^{u-1}: times (x + i y) / (2 u)."""
    half = lanes(0.5 / u)
    return half * (x * real - y * imaginary), half * (x * imaginary + y * real)


@outer_kernel
def finish_far(groups: int, charge: np.ndarray, far: np.ndarray) -> None:
    """From the groups' moments to the coefficients of field and potential, eq. (3)."""
    degree, order = int(far[DEGREE]), int(far[ORDER])
    net = 0.0
    for i in range(charge.size):
        net += charge[i]
    far[CHARGE] = net
    for u in range(order + 1):
        for j in range(u, degree - u + 1):
            at = u * _LINE + j
            real, imaginary = lanes(0.0), lanes(0.0)
            for g in range(groups):
                real = real + load(far, _SUMS + g * _GROUP + 16 * at)
                imaginary = imaginary + load(far, _SUMS + g * _GROUP + 16 * at + 8)
            far[_REAL + at], far[_IMAGINARY + at] = total(real), total(imaginary)
    for u in range(order + 1):
        _to_local(u, degree, far)
    unit = far[UNIT]
    for u in range(order + 2):
        for j in range(u, degree - u + 1):
            at = u * _LINE + j
            twice = 1.0 if u == 0 else 2.0
            ar, ai = _local(u + 1, j + 1, order, degree, far)
            br, bi = _local(u - 1, j + 1, order, degree, far)
            cr, ci = _local(u, j + 1, order, degree, far)
            pr, pi = _local(u, j, order, degree, far)
            out = far[_GRADIENT + 8 * at :]
            out[0], out[1] = unit * (br - ar), unit * (bi - ai)
            out[2], out[3] = unit * (ai + bi), -unit * (ar + br)
            out[4], out[5] = -unit * twice * cr, -unit * twice * ci
            out[6], out[7] = twice * pr, twice * pi


@inner_kernel
def _to_local(u: int, degree: int, far: np.ndarray) -> None:
    """Overwrite the moments of one order by its local coefficients."""
    real, imaginary = far[_REAL + u * _LINE :], far[_IMAGINARY + u * _LINE :]
    room_real, room_imaginary = far[_SUMS:], far[_SUMS + _LINE :]
    for k in range(u, degree - u + 1):
        a = b = 0.0
        for j in range(u, degree - k + 1):
            sign = 1.0 - 2.0 * ((j + u) % 2)
            a += sign * far[_STRENGTH + k + j] * real[j]
            b -= sign * far[_STRENGTH + k + j] * imaginary[j]
        room_real[k], room_imaginary[k] = a, b
    for k in range(u, degree - u + 1):
        real[k], imaginary[k] = room_real[k], room_imaginary[k]


@inner_kernel
def _local(u: int, j: int, order: int, degree: int, far: np.ndarray) -> tuple[float, float]:
    """The local coefficient of an order, 0 where there is none."""
    if u < 0 or u > order or j < u or j > degree - u:
        return 0.0, 0.0
    return far[_REAL + u * _LINE + j], far[_IMAGINARY + u * _LINE + j]


@inner_kernel
def far_field(
    x: LanesType, y: LanesType, z: LanesType, far: np.ndarray
) -> tuple[LanesType, LanesType, LanesType]:
    """The field of the far images at eight places (axis last), over 1/(4 pi eps0).

    ((l+1)^2 - u^2) R_{l+1} = (2 l + 1) z R_l - r^2 R_{l-1} without the turns in phi, which all
    l of one order have in common.
    """
    degree, order, unit = int(far[DEGREE]), int(far[ORDER]), lanes(far[UNIT])
    x = unit * (x - lanes(far[CENTRE]))
    y = unit * (y - lanes(far[CENTRE + 1]))
    z = unit * (z - lanes(far[CENTRE + 2]))
    square = _minus_square(x, y, z)
    real, imaginary = lanes(1.0), lanes(0.0)
    ex = ey = ez = lanes(0.0)
    for u in range(order + 2):
        if u > 0:
            real, imaginary = _turned(u, x, y, real, imaginary)
        below, here = lanes(0.0), lanes(1.0)
        ar = ai = br = bi = cr = ci = lanes(0.0)
        for j in range(u, degree - u + 1):
            at = _GRADIENT + 8 * (u * _LINE + j)
            ar, ai = fused(here, load_one(far, at), ar), fused(here, load_one(far, at + 1), ai)
            br, bi = fused(here, load_one(far, at + 2), br), fused(here, load_one(far, at + 3), bi)
            cr, ci = fused(here, load_one(far, at + 4), cr), fused(here, load_one(far, at + 5), ci)
            below, here = here, _next(u, j, z, square, below, here, far)
        ex = ex + (real * ar - imaginary * ai)
        ey = ey + (real * br - imaginary * bi)
        ez = ez + (real * cr - imaginary * ci)
    return ex, ey, ez


@inner_kernel
def far_potential(x: LanesType, y: LanesType, z: LanesType, far: np.ndarray) -> LanesType:
    """The potential of the far images at eight places (axis last), over 1/(4 pi eps0)."""
    degree, order, unit = int(far[DEGREE]), int(far[ORDER]), lanes(far[UNIT])
    x = unit * (x - lanes(far[CENTRE]))
    y = unit * (y - lanes(far[CENTRE + 1]))
    z = unit * (z - lanes(far[CENTRE + 2]))
    square = _minus_square(x, y, z)
    real, imaginary, level = lanes(1.0), lanes(0.0), lanes(0.0)
    for u in range(order + 1):
        if u > 0:
            real, imaginary = _turned(u, x, y, real, imaginary)
        below, here = lanes(0.0), lanes(1.0)
        a = b = lanes(0.0)
        for j in range(u, degree - u + 1):
            at = _GRADIENT + 8 * (u * _LINE + j)
            a, b = fused(here, load_one(far, at + 6), a), fused(here, load_one(far, at + 7), b)
            below, here = here, _next(u, j, z, square, below, here, far)
        level = level + (real * a - imaginary * b)
    return level


@inner_kernel
def _next(
    u: int,
    j: int,
    z: LanesType,
    square: LanesType,
    below: LanesType,
    here: LanesType,
    far: np.ndarray,
) -> LanesType:
    """The next of the recursion in l; square : -r^2."""
    factor = load_one(far, _FIRST + u * _LINE + j) * z
    return fused(factor, here, load_one(far, _SECOND + u * _LINE + j) * square * below)


@inner_kernel
def signed(i: int) -> Any:
    """`i` with a sign, as all others are: a parallel loop's index has none."""
    return np.int64(i)


@inner_kernel
def inverse_near(far: np.ndarray, softening2: float) -> tuple[float, float]:
    """Sums over the near images of 1/(|k| L), and of what each is worth to its own charge, 1/m."""
    period = far[LENGTH]
    plain = own = 0.0
    for k in range(1, int(far[IMAGES]) + 1):
        plain += 2.0 / (k * period)
        own += 2.0 / math.sqrt((k * period) ** 2 + softening2)
    return plain, own
