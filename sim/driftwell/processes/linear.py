"""Drag in proportion to the velocity, with or without the noise that belongs to it.

    dv/dt = a - G (v - w) + noise                                                           (1)

is solved exactly over a time h of constant a, whatever theta = G h is. With phi_1 = (1 -
exp(-theta)) / theta, phi_2 = (1 - phi_1) / theta, phi_3 = (1/2 - phi_2) / theta the drag adds to
what a alone would do

    dv = -theta (phi_1 (v - w) + phi_2 a h)                                                 (2)
    dx = -theta h (phi_2 (v - w) + phi_3 a h)                                               (3)

and noise of the temperature T a Gaussian (dv, dx) on each axis with

    <dv dv> = (k T/m) (1 - exp(-2 theta)),   <dv dx> = (k T/m) h theta phi_1^2              (4)
    <dx dx> = (k T/m) h^2 4 theta (2 phi_3(2 theta) - phi_3(theta))                         (5)

so that charges come to Maxwell's distribution about w + a/G and diffuse with D = k T / (m G).

References
----------
S. Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, section II (in closed form; (5) rearranged so that
it does not cancel for small theta).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import outer_kernel
from driftwell.processes.form import FLOW, OWN

LINEAR = 0
DAMPING, AGITATION = OWN, OWN + 1
"""G, 1/s, and k T / m, m^2/s^2; 0 without noise."""
_FEW = 0.05

Three = tuple[float, float, float]
Six = tuple[float, float, float, float, float, float]


@outer_kernel
def shares(theta: float) -> Three:
    """phi_1, phi_2 and phi_3; their series up to theta = 0.05 leaves 1e-16 out."""
    if theta < _FEW:
        third = 1.0 / 5040.0 - theta * (1.0 / 40320.0 - theta / 362880.0)
        third = 1.0 / 6.0 - theta * (
            1.0 / 24.0 - theta * (1.0 / 120.0 - theta * (1.0 / 720.0 - theta * third))
        )
        second = 0.5 - theta * third
        return 1.0 - theta * second, second, third
    first = -math.expm1(-theta) / theta
    second = (1.0 - first) / theta
    return first, second, (0.5 - second) / theta


@outer_kernel
def relaxed(
    p: np.ndarray, h: float, vx: float, vy: float, vz: float, ax: float, ay: float, az: float
) -> Six:
    """What drag adds to velocity and place in a time `h`: equations (2) and (3), m/s and m."""
    theta = p[DAMPING] * h
    f1, f2, f3 = shares(theta)
    vx, vy, vz = vx - p[FLOW], vy - p[FLOW + 1], vz - p[FLOW + 2]
    s = -theta * h
    return (
        -theta * (f1 * vx + f2 * h * ax),
        -theta * (f1 * vy + f2 * h * ay),
        -theta * (f1 * vz + f2 * h * az),
        s * (f2 * vx + f3 * h * ax),
        s * (f2 * vy + f3 * h * ay),
        s * (f2 * vz + f3 * h * az),
    )


@outer_kernel
def spreads(p: np.ndarray, h: float) -> Three:
    """Of the noise in a time `h`: rms dv, m/s, <dv dx> over that, m, and the rest's rms, m."""
    theta = p[DAMPING] * h
    f1, _, f3 = shares(theta)
    g1, _, g3 = shares(2.0 * theta)
    velocity = math.sqrt(p[AGITATION] * 2.0 * theta * g1)
    if velocity == 0.0:
        return 0.0, 0.0, 0.0
    shared = p[AGITATION] * h * theta * f1 * f1 / velocity
    rest = p[AGITATION] * h * h * 4.0 * theta * (2.0 * g3 - f3) - shared * shared
    return velocity, shared, math.sqrt(max(rest, 0.0))
