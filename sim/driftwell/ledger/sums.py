"""What the charges hold at one time: sums over all of them, in one pass and a fixed order.

Charges are taken in blocks of 1024, in lanes; the sums of the blocks are added with their rounding
carried along, so that the error stays near that of one block whatever the number of charges.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_sum_kernel, kernel
from driftwell.kernels.sums import add_compensated

_BLOCK = 1024

KINETIC = 0
"""J."""
MOMENTUM = 1
"""3 entries, N s."""
ANGULAR = 4
"""3 entries, N m s, about the origin."""
CHARGE = 7
"""C."""
COUNT = 8
"""Real particles."""
MOMENTUM_SIZE = 9
"""Sum of lengths of momenta, N s."""
ANGULAR_SIZE = 10
"""Sum of |x| |p|, N m s."""
CHARGE_SIZE = 11
"""Sum of |Q|, C."""
COULOMB_FORCE = 12
"""3 entries, N, of the charges on each other."""
COULOMB_SIZE = 15
"""Sum of the lengths of these forces, N."""
COULOMB_TORQUE = 16
"""3 entries, N m, of the same forces about the origin."""
COULOMB_TORQUE_SIZE = 19
"""Sum of |x| |F|, N m."""
SUMS = 20


@kernel
def sum_charges(
    position: np.ndarray,
    velocity: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    weight: np.ndarray,
    coulomb: np.ndarray,
    light2: float,
    work_carry: np.ndarray,
    out_sums: np.ndarray,
) -> None:
    """The sums named above.

    Parameters
    ----------
    position, velocity, coulomb : (3, n) float64, m, m/s (proper), V/m
    charge, mass, weight : (n,) float64, C, kg, real particles
    light2 : c^2, m^2/s^2
    work_carry, out_sums : (SUMS,) float64, overwritten
    """
    for k in range(SUMS):
        work_carry[k] = out_sums[k] = 0.0
    n = charge.size
    for first in range(0, n, _BLOCK):
        last = min(first + _BLOCK, n)
        motion = _motion(
            position[0, first:last],
            position[1, first:last],
            position[2, first:last],
            velocity[0, first:last],
            velocity[1, first:last],
            velocity[2, first:last],
            mass[first:last],
            light2,
        )
        forces = _forces(
            position[0, first:last],
            position[1, first:last],
            position[2, first:last],
            coulomb[0, first:last],
            coulomb[1, first:last],
            coulomb[2, first:last],
            charge[first:last],
            weight[first:last],
        )
        for k in range(7):
            add_compensated(out_sums, work_carry, k, motion[k])
        add_compensated(out_sums, work_carry, MOMENTUM_SIZE, motion[7])
        add_compensated(out_sums, work_carry, ANGULAR_SIZE, motion[8])
        add_compensated(out_sums, work_carry, CHARGE, forces[0])
        add_compensated(out_sums, work_carry, COUNT, forces[1])
        for k in range(9):
            add_compensated(out_sums, work_carry, CHARGE_SIZE + k, forces[2 + k])
    for k in range(SUMS):
        out_sums[k] += work_carry[k]


@inner_sum_kernel
def _motion(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    ux: np.ndarray,
    uy: np.ndarray,
    uz: np.ndarray,
    mass: np.ndarray,
    light2: float,
) -> tuple[float, float, float, float, float, float, float, float, float]:
    """Kinetic energy, momentum, angular momentum, and the sizes of the last two."""
    kinetic = size = spin = 0.0
    sx = sy = sz = 0.0
    lx = ly = lz = 0.0
    inverse = 1.0 / light2
    for i in range(x.size):
        m = mass[i]
        u2 = ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]
        r2 = x[i] * x[i] + y[i] * y[i] + z[i] * z[i]
        kinetic += m * u2 / (1.0 + math.sqrt(1.0 + u2 * inverse))
        size += m * math.sqrt(u2)
        spin += m * math.sqrt(u2) * math.sqrt(r2)
        sx += m * ux[i]
        sy += m * uy[i]
        sz += m * uz[i]
        lx += m * (y[i] * uz[i] - z[i] * uy[i])
        ly += m * (z[i] * ux[i] - x[i] * uz[i])
        lz += m * (x[i] * uy[i] - y[i] * ux[i])
    return kinetic, sx, sy, sz, lx, ly, lz, size, spin


@inner_sum_kernel
def _forces(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    ex: np.ndarray,
    ey: np.ndarray,
    ez: np.ndarray,
    charge: np.ndarray,
    weight: np.ndarray,
) -> tuple[float, float, float, float, float, float, float, float, float, float, float]:
    """Charge, count, size of the charge; Coulomb force, its size, its torque and the size of it."""
    total = count = size = length = lever = 0.0
    fx = fy = fz = 0.0
    tx = ty = tz = 0.0
    for i in range(charge.size):
        q = charge[i]
        total += q
        count += weight[i]
        size += abs(q)
        px, py, pz = q * ex[i], q * ey[i], q * ez[i]
        fx += px
        fy += py
        fz += pz
        tx += y[i] * pz - z[i] * py
        ty += z[i] * px - x[i] * pz
        tz += x[i] * py - y[i] * px
        force = abs(q) * math.sqrt(ex[i] * ex[i] + ey[i] * ey[i] + ez[i] * ez[i])
        length += force
        lever += force * math.sqrt(x[i] * x[i] + y[i] * y[i] + z[i] * z[i])
    return total, count, size, fx, fy, fz, length, tx, ty, tz, lever
