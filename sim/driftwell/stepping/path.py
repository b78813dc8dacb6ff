"""The path of one charge through a step: a polynomial through what is known at both ends.

With s from 0 to 1 over the span h, and position x, velocity v and acceleration a at both ends, the
quintic of Hermite

    x(s) = x0 + h v0 s + h^2 a0 s^2 / 2 + c3 s^3 + c4 s^4 + c5 s^5                          (1)
    c3, c4, c5 = 10 X - 4 V + A / 2, -15 X + 7 V - A, 6 X - 3 V + A / 2
    X = x1 - x0 - h v0 - h^2 a0 / 2,    V = h (v1 - v0 - h a0),    A = h^2 (a1 - a0)

errs by order h^6. Proper velocity u is the cubic through u and f = du/dt at both ends, with an
error of order h^4; it does not come from the slope of (1), which near the speed of light says
nothing of gamma.

    f = Q/m (E + v x B),    a = (f - v (v . f) / c^2) / gamma                               (2)

In the scheme midpoint-rotation forces are known in the middle alone, and f is (u1 - u0) / h at both
ends: place and time of a crossing then err by order h^3 within the step, its velocity by h^2, both
no worse than the scheme.

References
----------
E. Hairer, S. P. Norsett, G. Wanner, Solving Ordinary Differential Equations I, sec. II.6 (Hermite
interpolation as dense output; from memory). J. D. Jackson, Classical Electrodynamics, 3rd ed.
(1998), sec. 12.1, for (2).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.stepping.forces import magnetic_at
from driftwell.stepping.motion import Charges, Fields, Plan, Work

End = tuple[float, float, float, float, float, float, float, float, float]
"""x, y, z, m; ux, uy, uz, m/s, proper; f = du/dt (3), m/s^2."""


@outer_kernel
def ends(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    together: bool,
    i: int,
    t: float,
    h: float,
    inside: float,
    work: Work,
) -> tuple[End, End]:
    """Charge `i` at the beginning and at the end of the step from `t` to ``t + h``."""
    if plan.midway != 0:
        return _ends_by_mean(charges, i, h, work)
    last = _last_end(plan, fields, charges, together, i, t + h, inside, work)
    return _first_end(plan, fields, charges, i, t, inside, work), last


@inner_kernel
def _ends_by_mean(charges: Charges, i: int, h: float, work: Work) -> tuple[End, End]:
    """Both ends, with what the velocity changed by."""
    x, old, u, old_u = charges.position, work.old_position, charges.velocity, work.old_velocity
    fx = (u[0, i] - old_u[0, i]) / h
    fy = (u[1, i] - old_u[1, i]) / h
    fz = (u[2, i] - old_u[2, i]) / h
    return (
        (old[0, i], old[1, i], old[2, i], old_u[0, i], old_u[1, i], old_u[2, i], fx, fy, fz),
        (x[0, i], x[1, i], x[2, i], u[0, i], u[1, i], u[2, i], fx, fy, fz),
    )


@outer_kernel
def _first_end(
    plan: Plan, fields: Fields, charges: Charges, i: int, t: float, inside: float, work: Work
) -> End:
    """Charge `i` at the beginning of the step, at the time `t`."""
    x, old, e = charges.position, work.old_position, work.old_field
    now = (x[0, i], x[1, i], x[2, i])
    x[0, i], x[1, i], x[2, i] = old[0, i], old[1, i], old[2, i]
    field = (e[0, i], e[1, i], e[2, i])
    found = _end_there(plan, fields, charges, work.old_velocity, field, i, t, inside, work)
    x[0, i], x[1, i], x[2, i] = now
    return found


@outer_kernel
def _last_end(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    together: bool,
    i: int,
    t: float,
    inside: float,
    work: Work,
) -> End:
    """Charge `i` at the end of the step, at the time `t`, with the field of the last kick."""
    e, c = work.external, work.coulomb
    field = (e[0, i], e[1, i], e[2, i])
    if together:
        field = (e[0, i] + c[0, i], e[1, i] + c[1, i], e[2, i] + c[2, i])
    return _end_there(plan, fields, charges, charges.velocity, field, i, t, inside, work)


@inner_kernel
def _end_there(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    velocity: np.ndarray,
    field: tuple[float, float, float],
    i: int,
    t: float,
    inside: float,
    work: Work,
) -> End:
    """An end where charge `i` is, in this electric field and the magnetic one there."""
    x = charges.position
    ratio = charges.charge_to_mass[0, i]
    bx, by, bz = magnetic_at(fields, charges, i, t, inside, work)
    return end_of(
        plan,
        x[0, i],
        x[1, i],
        x[2, i],
        velocity[0, i],
        velocity[1, i],
        velocity[2, i],
        (ratio * field[0], ratio * field[1], ratio * field[2]),
        (ratio * bx, ratio * by, ratio * bz),
    )


@inner_kernel
def end_of(
    plan: Plan,
    x: float,
    y: float,
    z: float,
    ux: float,
    uy: float,
    uz: float,
    push: tuple[float, float, float],
    turn: tuple[float, float, float],
) -> End:
    """An end of a path; push : Q/m E, m/s^2; turn : Q/m B, rad/s."""
    slow = 1.0 / math.sqrt(1.0 + (ux * ux + uy * uy + uz * uz) / plan.light2)
    wx, wy, wz = slow * turn[0], slow * turn[1], slow * turn[2]
    fx = push[0] + uy * wz - uz * wy
    fy = push[1] + uz * wx - ux * wz
    fz = push[2] + ux * wy - uy * wx
    return x, y, z, ux, uy, uz, fx, fy, fz


@outer_kernel
def place(plan: Plan, start: End, end: End, span: float, s: float) -> tuple[float, float, float]:
    """Position at the fraction `s` of the path."""
    v0, a0 = _moving(plan, start)
    v1, a1 = _moving(plan, end)
    return (
        _quintic(start[0], v0[0], a0[0], end[0], v1[0], a1[0], span, s),
        _quintic(start[1], v0[1], a0[1], end[1], v1[1], a1[1], span, s),
        _quintic(start[2], v0[2], a0[2], end[2], v1[2], a1[2], span, s),
    )


@outer_kernel
def fastest(plan: Plan, start: End, end: End, span: float) -> float:
    """The largest |dx/ds| on the path, m, or a little more: the control points of (1) bound it."""
    v0, a0 = _moving(plan, start)
    v1, a1 = _moving(plan, end)
    most = 0.0
    for k in range(5):
        square = 0.0
        for axis in range(3):
            first, last = span * v0[axis], span * v1[axis]
            bend0, bend1 = span * span * a0[axis], span * span * a1[axis]
            if k == 0:
                leg = first
            elif k == 1:
                leg = first + 0.25 * bend0
            elif k == 2:
                leg = 5.0 * (end[axis] - start[axis]) - 2.0 * (first + last)
                leg += 0.25 * (bend1 - bend0)
            elif k == 3:
                leg = last - 0.25 * bend1
            else:
                leg = last
            square += leg * leg
        most = max(most, square)
    return math.sqrt(most)


@outer_kernel
def point(
    plan: Plan, start: End, end: End, span: float, s: float
) -> tuple[float, float, float, float, float, float]:
    """Position and proper velocity at the fraction `s` of the path."""
    x, y, z = place(plan, start, end, span, s)
    ux = _cubic(start[3], start[6], end[3], end[6], span, s)
    uy = _cubic(start[4], start[7], end[4], end[7], span, s)
    uz = _cubic(start[5], start[8], end[5], end[8], span, s)
    return x, y, z, ux, uy, uz


@outer_kernel
def _moving(plan: Plan, end: End) -> tuple[tuple[float, float, float], tuple[float, float, float]]:
    """Velocity, and acceleration by (2)."""
    slow = 1.0 / math.sqrt(1.0 + (end[3] ** 2 + end[4] ** 2 + end[5] ** 2) / plan.light2)
    vx, vy, vz = slow * end[3], slow * end[4], slow * end[5]
    along = (vx * end[6] + vy * end[7] + vz * end[8]) / plan.light2
    return (vx, vy, vz), (
        slow * (end[6] - vx * along),
        slow * (end[7] - vy * along),
        slow * (end[8] - vz * along),
    )


@outer_kernel
def _quintic(
    x0: float, v0: float, a0: float, x1: float, v1: float, a1: float, h: float, s: float
) -> float:
    """Equation (1)."""
    push = h * a0
    far = x1 - x0 - h * (v0 + 0.5 * push)
    fast = h * (v1 - v0 - push)
    bend = h * (h * a1 - push)
    c3 = 10.0 * far - 4.0 * fast + 0.5 * bend
    c4 = -15.0 * far + 7.0 * fast - bend
    c5 = 6.0 * far - 3.0 * fast + 0.5 * bend
    return x0 + s * (h * (v0 + 0.5 * push * s) + s * s * (c3 + s * (c4 + s * c5)))


@outer_kernel
def _cubic(u0: float, f0: float, u1: float, f1: float, h: float, s: float) -> float:
    """The cubic through u and du/dt at both ends."""
    r = 1.0 - s
    return u0 + s * s * (3.0 - 2.0 * s) * (u1 - u0) + h * s * r * (r * f0 - s * f1)
