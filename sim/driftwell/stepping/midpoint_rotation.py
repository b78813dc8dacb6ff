"""The parts of the scheme midpoint-rotation: half drifts, and a change of momentum between them.

Drift for h/2, change the momentum by E and B of the middle, drift for h/2. With u the proper
velocity, e = Q E h / (2 m) and b = Q B h / (2 m), the change is (Higuera and Cary, eqs. 19 to 23)

    u- = u0 + e,    u* = u- . b / c,    s = 1 + u-^2 / c^2 - b^2
    g^2 = (s + sqrt(s^2 + 4 (b^2 + u*^2))) / 2                                              (1)
    t = b / g,    u+ = u- + (u- + u- x t) x t 2 / (1 + t^2),    u1 = u+ + e                 (2)

where g turns out to be gamma of the mean proper velocity (u0 + u1) / 2, so that

    u1 - u0 = (Q/m) (E + v x B) h,    v = (u0 + u1) / (2 g)                                 (3)

A charge with E + v x B = 0 goes straight, whatever h. Each of the three parts preserves volume in
phase space and is its own inverse with h reversed. The kinetic energy changes by exactly

    m c^2 (gamma1 - gamma0) = Q h E . (u0 + u1) / (gamma0 + gamma1)                         (4)

All is done in lanes on a stretch of the charges, `first` to `last`, with no function of an angle.

References
----------
A. V. Higuera and J. R. Cary, Phys. Plasmas 24 (2017) 052104, doi:10.1063/1.4979989 (the equations
and their numbers from memory; volume, drift and order are tested).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    inverse_root,
    lanes,
    larger,
    picked_above,
    put_some,
    root,
    some,
)
from driftwell.stepping.accounts import Six
from driftwell.stepping.motion import Charges, Plan, Work
from driftwell.stepping.six_lanes import SixLanes, no_six, six_and, six_totals, with_moment

EXTERNAL, COULOMB, SHAPED = 1, 2, 4
"""What acts in the middle beside uniform magnets, as bits: E of fields, of charges, B of places."""


@outer_kernel
def keep_start(charges: Charges, work: Work, first: int, last: int) -> None:
    """Note place and velocity at the beginning of a step."""
    for axis in range(3):
        x, u = charges.position[axis], charges.velocity[axis]
        old_x, old_u = work.old_position[axis], work.old_velocity[axis]
        for i in range(first, last):
            old_x[i] = x[i]
            old_u[i] = u[i]


@outer_kernel
def half_drift(
    position: np.ndarray, velocity: np.ndarray, light2: float, h: float, first: int, last: int
) -> None:
    """x += u / gamma h / 2."""
    whole = first + (last - first) // 8 * 8
    for i in range(first, whole, 8):
        _drift_eight(position, velocity, light2, h, i, 8)
    if whole < last:
        _drift_eight(position, velocity, light2, h, whole, last - whole)


@outer_kernel
def turn_and_drift(
    charges: Charges,
    external: np.ndarray,
    coulomb: np.ndarray,
    shaped: np.ndarray,
    acting: int,
    magnet: tuple[float, float, float],
    light2: float,
    h: float,
    on: bool,
    first: int,
    last: int,
    work_turn: np.ndarray,
) -> Six:
    """Equations (1) and (2), and the drift of the second half; changes places and velocities.

    Parameters
    ----------
    external, coulomb : (3, n) float64, V/m; shaped : (3, n) float64, T
    acting : which of these act, as bits; the others are not looked at
    magnet : B that is the same everywhere, T
    on : drift on through the first half of the next step, as :func:`half_drift` does
    work_turn : (3, n) float64, of which two rows are overwritten

    Returns the momentum that the magnets gave, N s, and its moment, N m s.

    Notes
    -----
    In two passes: the roots and quotients of (1), one after the other, keep a processor waiting,
    and it sees the more charges ahead the fewer instructions each of them takes.
    """
    whole = first + (last - first) // 8 * 8
    inverses, twices = work_turn[0], work_turn[1]
    for i in range(first, whole, 8):
        _find_turn_of_eight(
            charges, external, coulomb, shaped, acting, magnet, light2, h, i, 8, inverses, twices
        )
    if whole < last:
        count = last - whole
        _find_turn_of_eight(
            charges,
            external,
            coulomb,
            shaped,
            acting,
            magnet,
            light2,
            h,
            whole,
            count,
            inverses,
            twices,
        )
    given = no_six()
    for i in range(first, whole, 8):
        turned = _turn_eight(
            charges,
            external,
            coulomb,
            shaped,
            acting,
            magnet,
            light2,
            h,
            on,
            i,
            8,
            inverses,
            twices,
        )
        given = six_and(given, turned)
    if whole < last:
        turned = _turn_eight(
            charges,
            external,
            coulomb,
            shaped,
            acting,
            magnet,
            light2,
            h,
            on,
            whole,
            last - whole,
            inverses,
            twices,
        )
        given = six_and(given, turned)
    return six_totals(given)


@outer_kernel
def induced_work_done(
    plan: Plan, charges: Charges, work: Work, h: float, first: int, last: int
) -> float:
    """The work, J, of the induced field in the change of momentum just made, by equation (4)."""
    u, old, e = charges.velocity, work.old_velocity, work.induced
    done = 0.0
    for i in range(first, last):
        before = after = along = 0.0
        for axis in range(3):
            before += old[axis, i] ** 2
            after += u[axis, i] ** 2
            along += e[axis, i] * (old[axis, i] + u[axis, i])
        gammas = math.sqrt(1.0 + before / plan.light2) + math.sqrt(1.0 + after / plan.light2)
        done += charges.charge[i] * along / gammas
    return h * done


@inner_kernel
def _drift_eight(
    position: np.ndarray, velocity: np.ndarray, light2: float, h: float, i: int, count: int
) -> None:
    x, y, z = position[0], position[1], position[2]
    ux = some(velocity[0], i, count)
    uy = some(velocity[1], i, count)
    uz = some(velocity[2], i, count)
    square = fused(ux, ux, fused(uy, uy, uz * uz))
    way = lanes(0.5 * h) * inverse_root(fused(square, lanes(1.0 / light2), lanes(1.0)))
    put_some(x, i, count, fused(way, ux, some(x, i, count)))
    put_some(y, i, count, fused(way, uy, some(y, i, count)))
    put_some(z, i, count, fused(way, uz, some(z, i, count)))


@inner_kernel
def _half_kick(
    charges: Charges,
    external: np.ndarray,
    coulomb: np.ndarray,
    shaped: np.ndarray,
    acting: int,
    magnet: tuple[float, float, float],
    h: float,
    i: int,
    count: int,
) -> tuple[LanesType, LanesType, LanesType, LanesType, LanesType, LanesType]:
    """e and b of (1) for eight charges."""
    half = lanes(0.5 * h) * some(charges.charge_to_mass[0], i, count)
    bx, by, bz = lanes(magnet[0]), lanes(magnet[1]), lanes(magnet[2])
    if acting & SHAPED != 0:
        bx = bx + some(shaped[0], i, count)
        by = by + some(shaped[1], i, count)
        bz = bz + some(shaped[2], i, count)
    ex, ey, ez = lanes(0.0), lanes(0.0), lanes(0.0)
    if acting & EXTERNAL != 0:
        ex = some(external[0], i, count)
        ey = some(external[1], i, count)
        ez = some(external[2], i, count)
    if acting & COULOMB != 0:
        ex = ex + some(coulomb[0], i, count)
        ey = ey + some(coulomb[1], i, count)
        ez = ez + some(coulomb[2], i, count)
    return half * ex, half * ey, half * ez, half * bx, half * by, half * bz


@inner_kernel
def _find_turn_of_eight(
    charges: Charges,
    external: np.ndarray,
    coulomb: np.ndarray,
    shaped: np.ndarray,
    acting: int,
    magnet: tuple[float, float, float],
    light2: float,
    h: float,
    i: int,
    count: int,
    out_inverse: np.ndarray,
    out_twice: np.ndarray,
) -> None:
    """1/g and 2/(1 + t^2) of eight charges, or the `count` last."""
    per_light2, one, minus = lanes(1.0 / light2), lanes(1.0), lanes(-0.0)
    ex, ey, ez, bx, by, bz = _half_kick(
        charges, external, coulomb, shaped, acting, magnet, h, i, count
    )
    ux = some(charges.velocity[0], i, count) + ex
    uy = some(charges.velocity[1], i, count) + ey
    uz = some(charges.velocity[2], i, count) + ez
    b2 = fused(bx, bx, fused(by, by, bz * bz))
    along = fused(ux, bx, fused(uy, by, uz * bz))
    s = fused(fused(ux, ux, fused(uy, uy, uz * uz)), per_light2, one) - b2
    star = fused(along, along * per_light2, b2)
    square = fused(s, s, lanes(4.0) * star)
    # 1/g^2 of (1) is above / below, of its two forms the one without cancellation
    both = root(square) + larger(s, minus - s)
    above = picked_above(s, minus, lanes(2.0), both)
    below = picked_above(s, minus, both, star + star)
    put_some(out_inverse, i, count, above / root(above * below))
    put_some(out_twice, i, count, (below + below) / fused(b2, above, below))


@inner_kernel
def _turn_eight(
    charges: Charges,
    external: np.ndarray,
    coulomb: np.ndarray,
    shaped: np.ndarray,
    acting: int,
    magnet: tuple[float, float, float],
    light2: float,
    h: float,
    on: bool,
    i: int,
    count: int,
    inverses: np.ndarray,
    twices: np.ndarray,
) -> SixLanes:
    """Eight charges, or the `count` last; what magnets gave them, and its moments."""
    per_light2, one, minus = lanes(1.0 / light2), lanes(1.0), lanes(-0.0)
    half_step = lanes(0.5 * h)
    ex, ey, ez, bx, by, bz = _half_kick(
        charges, external, coulomb, shaped, acting, magnet, h, i, count
    )
    ux = some(charges.velocity[0], i, count) + ex
    uy = some(charges.velocity[1], i, count) + ey
    uz = some(charges.velocity[2], i, count) + ez
    inverse, twice = some(inverses, i, count), some(twices, i, count)
    tx, ty, tz = bx * inverse, by * inverse, bz * inverse
    vx = ux + fused(uy, tz, minus - uz * ty)
    vy = uy + fused(uz, tx, minus - ux * tz)
    vz = uz + fused(ux, ty, minus - uy * tx)
    tx, ty, tz = twice * tx, twice * ty, twice * tz
    dx = fused(vy, tz, minus - vz * ty)
    dy = fused(vz, tx, minus - vx * tz)
    dz = fused(vx, ty, minus - vy * tx)
    ux, uy, uz = ux + dx + ex, uy + dy + ey, uz + dz + ez
    put_some(charges.velocity[0], i, count, ux)
    put_some(charges.velocity[1], i, count, uy)
    put_some(charges.velocity[2], i, count, uz)
    square = fused(fused(ux, ux, fused(uy, uy, uz * uz)), per_light2, one)
    way = half_step / root(square)
    x = some(charges.position[0], i, count)
    y = some(charges.position[1], i, count)
    z = some(charges.position[2], i, count)
    endx, endy, endz = fused(way, ux, x), fused(way, uy, y), fused(way, uz, z)
    if on:
        way = half_step * inverse_root(square)  # as in half_drift, to the last bit
        endx, endy, endz = fused(way, ux, endx), fused(way, uy, endy), fused(way, uz, endz)
    put_some(charges.position[0], i, count, endx)
    put_some(charges.position[1], i, count, endy)
    put_some(charges.position[2], i, count, endz)
    m = some(charges.mass, i, count)
    return with_moment(x, y, z, m * dx, m * dy, m * dz)
