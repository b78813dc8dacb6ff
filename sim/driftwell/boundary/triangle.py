"""Potential and field of a flat triangle that carries its charge evenly, in closed form.

With r the point, d its height above the triangle's plane, and of each edge k (counter-clockwise
seen from above) the length L_k, the outward direction u_k in the plane, the distance p_k of the
point's foot from the edge's line, inward positive, and the distances R, R' of r from its ends,

    I(r) = integral dS' / |r - r'| = sum_k p_k f_k - d W                                      (1)
    -grad I = sum_k u_k f_k + n W                                                             (2)
    f_k = ln((R + R' + L_k) / (R + R' - L_k))                                                 (3)
    tan(W / 2) = 2 A d / (R1 R2 R3 + (r1.r2) R3 + (r2.r3) R1 + (r3.r1) R2)                    (4)

where W is the solid angle under which r sees the triangle, of the sign of d, and r1, r2, r3 lead
from r to the corners. Where the foot lies between the ends of an edge, the denominator of (3) is
taken as h^2 (1/(R + |l|) + 1/(R' + |l'|)), with h the distance from the edge's line and l, l' the
ends along it, which keeps its digits next to the edge. On an edge, where the field is infinite,
f_k is cut off at the logarithm of rounding. In the plane, the field is the mean of both sides'.

Beyond :data:`FAR` longest sides, seven points of a rule of degree 5 take the place of the triangle,
with a relative error below 1e-8; beyond :data:`FARTHER` three points of degree 2, below 2e-8.

References
----------
D. R. Wilton et al., IEEE Trans. Antennas Propag. 32 (1984) 276 (eqs. 1 and 2; from memory).
A. Van Oosterom and J. Strackee, IEEE Trans. Biomed. Eng. 30 (1983) 125 (eq. 4; from memory).
M. Abramowitz and I. A. Stegun, Handbook of Mathematical Functions, 25.4.63 (points; from memory).
"""

from __future__ import annotations

import math

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.kernels import inner_kernel, threaded_kernel

Floats = NDArray[np.float64]

COLUMNS = 32
"""Numbers of a panel's row, of which the kernels know the meaning; see :func:`panel_rows`."""
FAR, FARTHER = 6.0, 60.0
"""Distances from the middle, in longest sides, from which on points take the triangle's place."""
_IN_PLANE = 4e-15
"""Heights below this part of the longest side count as none."""
_NEAREST = 1e-32
"""Least ratio in the logarithm of eq. (3)."""
_A, _B = (6.0 - math.sqrt(15.0)) / 21.0, (6.0 + math.sqrt(15.0)) / 21.0
_WA, _WB = (155.0 - math.sqrt(15.0)) / 1200.0, (155.0 + math.sqrt(15.0)) / 1200.0
_WC = 9.0 / 40.0
BARYCENTRIC7 = np.array(
    [
        [1.0 / 3.0, 1.0 / 3.0, 1.0 / 3.0],
        [1.0 - 2.0 * _A, _A, _A],
        [_A, 1.0 - 2.0 * _A, _A],
        [_A, _A, 1.0 - 2.0 * _A],
        [1.0 - 2.0 * _B, _B, _B],
        [_B, 1.0 - 2.0 * _B, _B],
        [_B, _B, 1.0 - 2.0 * _B],
    ]
)
"""The rule of degree 5: shares of the corners."""
WEIGHTS7 = np.array([_WC, _WA, _WA, _WA, _WB, _WB, _WB])
"""Parts of the area that its points stand for."""
BARYCENTRIC3 = np.array(
    [
        [2.0 / 3.0, 1.0 / 6.0, 1.0 / 6.0],
        [1.0 / 6.0, 2.0 / 3.0, 1.0 / 6.0],
        [1.0 / 6.0, 1.0 / 6.0, 2.0 / 3.0],
    ]
)
"""The rule of degree 2; each point stands for a third of the area."""


def panel_rows(corners: Floats) -> Floats:
    """(k, COLUMNS) float64 for triangles of corners (k, 3 corners, 3 axes), m.

    The first corner is the origin of a frame whose first axis runs along the first edge and whose
    third is the normal; seen against it the corners go round counter-clockwise.
    """
    a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
    rows = np.zeros((len(corners), COLUMNS))
    along = b - a
    length = np.linalg.norm(along, axis=1)
    normal = np.cross(along, c - a)
    twice = np.linalg.norm(normal, axis=1)
    e1, e3 = along / length[:, None], normal / twice[:, None]
    e2 = np.cross(e3, e1)
    x2 = np.einsum("ij,ij->i", c - a, e1)
    y2 = np.einsum("ij,ij->i", c - a, e2)
    second, third = np.hypot(x2 - length, y2), np.hypot(x2, y2)
    rows[:, 0:3], rows[:, 3:6], rows[:, 6:9], rows[:, 9:12] = a, e1, e2, e3
    rows[:, 12], rows[:, 13], rows[:, 14] = length, x2, y2
    rows[:, 15], rows[:, 16] = (x2 - length) / second, y2 / second
    rows[:, 17], rows[:, 18] = -x2 / third, -y2 / third
    rows[:, 19], rows[:, 20] = second, third
    rows[:, 21] = 0.5 * twice
    rows[:, 22] = np.maximum(np.maximum(length, second), third)
    rows[:, 23:26] = (a + b + c) / 3.0
    return rows


@inner_kernel
def panel_potential(row: np.ndarray, x: float, y: float, z: float) -> float:
    """I of eq. (1), m, of one panel at a point, m; times density / (4 pi eps0): volts."""
    return panel_terms(row, x, y, z, False)[0]


@inner_kernel
def panel_field(row: np.ndarray, x: float, y: float, z: float) -> tuple[float, float, float, float]:
    """I and the three components of -grad I, eq. (2), of one panel at a point."""
    return panel_terms(row, x, y, z, True)


@inner_kernel
def panel_terms(
    row: np.ndarray, x: float, y: float, z: float, with_field: bool
) -> tuple[float, float, float, float]:
    """I and, if wanted, -grad I: in closed form where near, by points where far."""
    x, y, z = x - row[0], y - row[1], z - row[2]
    u = x * row[3] + y * row[4] + z * row[5]
    v = x * row[6] + y * row[7] + z * row[8]
    d = x * row[9] + y * row[10] + z * row[11]
    middle_u, middle_v = (row[12] + row[13]) / 3.0, row[14] / 3.0
    apart2 = (u - middle_u) ** 2 + (v - middle_v) ** 2 + d * d
    size2 = row[22] * row[22]
    if apart2 > FARTHER * FARTHER * size2:
        potential, fu, fv, fd = _three_points(row, u, v, d, with_field)
    elif apart2 > FAR * FAR * size2:
        potential, fu, fv, fd = _seven_points(row, u, v, d, with_field)
    else:
        potential, fu, fv, fd = _closed_form(row, u, v, d, with_field)
    if not with_field:
        return potential, 0.0, 0.0, 0.0
    return (
        potential,
        fu * row[3] + fv * row[6] + fd * row[9],
        fu * row[4] + fv * row[7] + fd * row[10],
        fu * row[5] + fv * row[8] + fd * row[11],
    )


@inner_kernel
def _closed_form(
    row: np.ndarray, u: float, v: float, d: float, with_field: bool
) -> tuple[float, float, float, float]:
    """Eqs. (1) to (4) in the panel's own frame."""
    length, x2, y2 = row[12], row[13], row[14]
    if abs(d) < _IN_PLANE * row[22]:
        d = 0.0
    d2 = d * d
    u1, u2, v2 = u - length, u - x2, v - y2
    ra = math.sqrt(u * u + v * v + d2)
    rb = math.sqrt(u1 * u1 + v * v + d2)
    rc = math.sqrt(u2 * u2 + v2 * v2 + d2)
    # inward distances from the edges' lines; the ends along them begin at -(point along)
    pa = v
    pb = v * row[15] - u1 * row[16]
    pc = v2 * row[17] - u2 * row[18]
    fa = _edge(-u, length, pa * pa + d2, ra, rb)
    fb = _edge(-(u1 * row[15] + v * row[16]), row[19], pb * pb + d2, rb, rc)
    fc = _edge(-(u2 * row[17] + v2 * row[18]), row[20], pc * pc + d2, rc, ra)
    angle = 0.0
    if d != 0.0:
        ab = u * u1 + v * v + d2
        bc = u1 * u2 + v * v2 + d2
        ca = u2 * u + v2 * v + d2
        angle = 2.0 * math.atan2(2.0 * row[21] * d, ra * rb * rc + ab * rc + bc * ra + ca * rb)
    potential = pa * fa + pb * fb + pc * fc - d * angle
    if not with_field:
        return potential, 0.0, 0.0, 0.0
    return (
        potential,
        row[16] * fb + row[18] * fc,
        -fa - row[15] * fb - row[17] * fc,
        angle,
    )


@inner_kernel
def _edge(begin: float, length: float, height2: float, r0: float, r1: float) -> float:
    """Eq. (3) of an edge that runs from `begin` to `begin` + length, seen from the foot at 0."""
    end = begin + length
    if begin < 0.0 < end:
        under = height2 * (1.0 / (r0 - begin) + 1.0 / (r1 + end))
    else:
        under = r0 + r1 - length
    over = r0 + r1 + length
    return math.log(over / max(under, _NEAREST * over))


@inner_kernel
def _three_points(
    row: np.ndarray, u: float, v: float, d: float, with_field: bool
) -> tuple[float, float, float, float]:
    weight = row[21] / 3.0
    potential = fu = fv = fd = 0.0
    for k in range(3):
        of_b, of_c = BARYCENTRIC3[k, 1], BARYCENTRIC3[k, 2]
        du, dv = u - of_b * row[12] - of_c * row[13], v - of_c * row[14]
        inverse2 = 1.0 / (du * du + dv * dv + d * d)
        part = weight * math.sqrt(inverse2)
        potential += part
        part *= inverse2
        fu += part * du
        fv += part * dv
        fd += part * d
    return potential, fu, fv, fd


@inner_kernel
def _seven_points(
    row: np.ndarray, u: float, v: float, d: float, with_field: bool
) -> tuple[float, float, float, float]:
    potential = fu = fv = fd = 0.0
    for k in range(7):
        of_b, of_c = BARYCENTRIC7[k, 1], BARYCENTRIC7[k, 2]
        du, dv = u - of_b * row[12] - of_c * row[13], v - of_c * row[14]
        inverse2 = 1.0 / (du * du + dv * dv + d * d)
        part = row[21] * WEIGHTS7[k] * math.sqrt(inverse2)
        potential += part
        part *= inverse2
        fu += part * du
        fv += part * dv
        fd += part * d
    return potential, fu, fv, fd


@threaded_kernel
def panel_sums(
    rows: np.ndarray, density: np.ndarray, points: np.ndarray, out_potential: np.ndarray
) -> None:
    """Sums over all panels at points, without 1/(4 pi eps0).

    rows : (k, COLUMNS) of :func:`panel_rows`; density : (k, e) C/m^2, e sets side by side
    points : (n, 3), m; out_potential : (n, e), C/m, overwritten
    """
    sets = density.shape[1]
    for i in prange(points.shape[0]):
        for e in range(sets):
            out_potential[i, e] = 0.0
        for k in range(rows.shape[0]):
            term = panel_potential(rows[k], points[i, 0], points[i, 1], points[i, 2])
            for e in range(sets):
                out_potential[i, e] += density[k, e] * term


@threaded_kernel
def panel_field_sums(
    rows: np.ndarray, density: np.ndarray, points: np.ndarray, out_field: np.ndarray
) -> None:
    """Sums of fields over all panels at points; out_field : (n, e, 3), C/m^2, overwritten."""
    sets = density.shape[1]
    for i in prange(points.shape[0]):
        for e in range(sets):
            for axis in range(3):
                out_field[i, e, axis] = 0.0
        for k in range(rows.shape[0]):
            _, fx, fy, fz = panel_field(rows[k], points[i, 0], points[i, 1], points[i, 2])
            for e in range(sets):
                out_field[i, e, 0] += density[k, e] * fx
                out_field[i, e, 1] += density[k, e] * fy
                out_field[i, e, 2] += density[k, e] * fz
