"""What happens on walls and detectors inside a step.

After a whole step every charge's side of every surface is compared with the side it was on. Where
one changed, the path through the step is the cubic through both ends' positions and velocities
(Hermite; error of order h^4, as small as the best scheme's), and the crossing is found on it by
bisection to the last bit. Proper velocity at the crossing is the straight line between both ends,
corrected by how the cubic's slope differs from the straight line of velocities.

An absorbed charge leaves the sums at the end of the step it was lost in; what is entered in the
accounts is what it carried then, so that the ledger closes exactly, while the record keeps place,
time and velocity of the crossing itself. A reflected charge turns its velocity over at the
crossing and goes on for the rest of the step with the step's mean acceleration (order h^2).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.coulomb.direct import potential_at
from driftwell.kernels import outer_kernel
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import (
    ANGULAR_WALLS,
    CHARGE_WALLS,
    COUNT_WALLS,
    ENERGY_WALLS,
    MOMENTUM_WALLS,
    enter_vector,
)
from driftwell.stepping.motion import CURSOR_EVENTS, CURSOR_OVERFLOW, Charges, Plan, Work
from driftwell.walls.form import ABSORB, PASS
from driftwell.walls.table import SurfaceTable, level, normal, stops

UNTOUCHED, MOVED, LOST = 0, 1, 2
_BISECTIONS = 60
_BOUNCES = 16


@outer_kernel
def meet_surfaces(
    plan: Plan,
    surfaces: SurfaceTable,
    charges: Charges,
    t: float,
    h: float,
    work: Work,
) -> int:
    """Treat all crossings of the step from `t` to `t + h`; returns UNTOUCHED, MOVED or LOST.

    ``work.old_position`` and ``work.old_velocity`` hold the state at `t`.
    """
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    changed = UNTOUCHED
    for s in range(surfaces.kind.size):
        kind = surfaces.kind[s]
        p = surfaces.parameter[s]
        side = work.side[s]
        crossed = 0
        for i in range(x.size):
            now = 1 if level(kind, p, x[i], y[i], z[i]) > 0.0 else -1
            crossed += now != side[i]
        if crossed == 0:
            continue
        for i in range(x.size):
            if charges.alive[i] == 0:
                continue
            now = 1 if level(kind, p, x[i], y[i], z[i]) > 0.0 else -1
            if now != side[i]:
                changed = max(changed, _follow(plan, surfaces, charges, i, t, h, work))
    return changed


@outer_kernel
def _follow(
    plan: Plan,
    surfaces: SurfaceTable,
    charges: Charges,
    i: int,
    t: float,
    h: float,
    work: Work,
) -> int:
    """Follow one charge through the step, surface by surface; UNTOUCHED, MOVED or LOST."""
    x0, y0, z0 = work.old_position[0, i], work.old_position[1, i], work.old_position[2, i]
    ux0, uy0, uz0 = work.old_velocity[0, i], work.old_velocity[1, i], work.old_velocity[2, i]
    changed = UNTOUCHED
    start, span = t, h
    for _ in range(_BOUNCES):
        x1, y1, z1 = charges.position[0, i], charges.position[1, i], charges.position[2, i]
        ux1, uy1, uz1 = charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i]
        path = (x0, y0, z0, ux0, uy0, uz0, x1, y1, z1, ux1, uy1, uz1)
        wall, when = _first_wall(plan, surfaces, path, span, i, work)
        _pass_detectors(plan, surfaces, path, start, span, when, i, work)
        if wall < 0:
            return changed
        xc, yc, zc, uxc, uyc, uzc = _point(plan, path, span, when)
        if surfaces.effect[wall] == ABSORB:
            _write(wall, i, start + when * span, xc, yc, zc, uxc, uyc, uzc, 0.0, work)
            _absorb(plan, charges, i, work)
            for s in range(surfaces.kind.size):
                there = level(surfaces.kind[s], surfaces.parameter[s], x1, y1, z1)
                work.side[s, i] = 1 if there > 0.0 else -1
            return LOST
        nx, ny, nz = normal(surfaces.kind[wall], surfaces.parameter[wall], xc, yc, zc)
        outward = -work.side[wall, i] * (uxc * nx + uyc * ny + uzc * nz)
        if outward <= 0.0:  # rounding left it a hair outside, on its way back in
            return changed
        changed = MOVED
        ax, ay, az = (ux1 - ux0) / span, (uy1 - uy0) / span, (uz1 - uz0) / span
        along = 2.0 * (uxc * nx + uyc * ny + uzc * nz)
        x0, y0, z0 = xc, yc, zc
        ux0, uy0, uz0 = uxc - along * nx, uyc - along * ny, uzc - along * nz
        start += when * span
        span *= 1.0 - when
        vx, vy, vz = ux0 + ax * span, uy0 + ay * span, uz0 + az * span
        mx, my, mz = 0.5 * (ux0 + vx), 0.5 * (uy0 + vy), 0.5 * (uz0 + vz)
        slow = span / math.sqrt(1.0 + (mx * mx + my * my + mz * mz) / plan.light2)
        _account_bounce(charges, i, -1.0, work)
        charges.position[0, i] = xc + mx * slow
        charges.position[1, i] = yc + my * slow
        charges.position[2, i] = zc + mz * slow
        charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i] = vx, vy, vz
        _account_bounce(charges, i, 1.0, work)
        if span <= 0.0:
            return changed
    # caught in a corner: it stays where it last bounced, inside, and goes on in the next step
    _account_bounce(charges, i, -1.0, work)
    charges.position[0, i], charges.position[1, i], charges.position[2, i] = x0, y0, z0
    charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i] = ux0, uy0, uz0
    _account_bounce(charges, i, 1.0, work)
    return changed


@outer_kernel
def _first_wall(
    plan: Plan,
    surfaces: SurfaceTable,
    path: tuple[float, ...],
    span: float,
    i: int,
    work: Work,
) -> tuple[int, float]:
    """The first wall met on the path, and the fraction of the path behind it; (-1, 1) for none."""
    first, earliest = -1, 1.0
    for s in range(surfaces.kind.size):
        if surfaces.effect[s] == PASS:
            continue
        p = surfaces.parameter[s]
        kind = surfaces.kind[s]
        now = 1 if level(kind, p, path[6], path[7], path[8]) > 0.0 else -1
        if now == work.side[s, i]:
            continue
        when = _crossing(plan, kind, p, work.side[s, i], path, span)
        x, y, z, _, _, _ = _point(plan, path, span, when)
        if not stops(kind, p, x, y, z):
            continue
        if first < 0 or when < earliest:
            first, earliest = s, when
    return first, earliest


@outer_kernel
def _pass_detectors(
    plan: Plan,
    surfaces: SurfaceTable,
    path: tuple[float, ...],
    start: float,
    span: float,
    until: float,
    i: int,
    work: Work,
) -> None:
    """Write the passages through detectors, and keep the sides of all that does not stop."""
    for s in range(surfaces.kind.size):
        p = surfaces.parameter[s]
        kind = surfaces.kind[s]
        side = work.side[s, i]
        now = 1 if level(kind, p, path[6], path[7], path[8]) > 0.0 else -1
        if now == side:
            continue
        when = _crossing(plan, kind, p, side, path, span)
        if when > until:
            continue
        x, y, z, ux, uy, uz = _point(plan, path, span, when)
        if surfaces.effect[s] == PASS:
            if stops(kind, p, x, y, z):
                _write(s, i, start + when * span, x, y, z, ux, uy, uz, float(now), work)
            work.side[s, i] = now
        elif not stops(kind, p, x, y, z):
            work.side[s, i] = now


@outer_kernel
def _crossing(
    plan: Plan, kind: int, p: np.ndarray, side: int, path: tuple[float, ...], span: float
) -> float:
    """Fraction of the path where the level leaves `side`, by bisection."""
    low, high = 0.0, 1.0
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        x, y, z, _, _, _ = _point(plan, path, span, middle)
        now = 1 if level(kind, p, x, y, z) > 0.0 else -1
        if now == side:
            low = middle
        else:
            high = middle
    return high


@outer_kernel
def _point(
    plan: Plan, path: tuple[float, ...], span: float, s: float
) -> tuple[float, float, float, float, float, float]:
    """Position and proper velocity at the fraction `s` of the path."""
    x0, y0, z0, ux0, uy0, uz0, x1, y1, z1, ux1, uy1, uz1 = path
    slow0 = 1.0 / math.sqrt(1.0 + (ux0 * ux0 + uy0 * uy0 + uz0 * uz0) / plan.light2)
    slow1 = 1.0 / math.sqrt(1.0 + (ux1 * ux1 + uy1 * uy1 + uz1 * uz1) / plan.light2)
    x, ux = _cubic(x0, ux0, slow0, x1, ux1, slow1, span, s)
    y, uy = _cubic(y0, uy0, slow0, y1, uy1, slow1, span, s)
    z, uz = _cubic(z0, uz0, slow0, z1, uz1, slow1, span, s)
    return x, y, z, ux, uy, uz


@outer_kernel
def _cubic(
    x0: float,
    u0: float,
    slow0: float,
    x1: float,
    u1: float,
    slow1: float,
    span: float,
    s: float,
) -> tuple[float, float]:
    """One coordinate of the Hermite cubic, and the proper velocity that goes with it."""
    v0, v1 = u0 * slow0, u1 * slow1
    r = 1.0 - s
    bend = x1 - x0 - 0.5 * span * (v0 + v1)
    x = x0 + s * s * (3.0 - 2.0 * s) * (x1 - x0) + span * s * r * (r * v0 - s * v1)
    u = r * u0 + s * u1
    if span > 0.0:
        # the cubic's slope less the straight line of velocities, as proper velocity
        u += 6.0 * s * r * bend / (span * (r * slow0 + s * slow1))
    return x, u


@outer_kernel
def _absorb(plan: Plan, charges: Charges, i: int, work: Work) -> None:
    """Take a charge out of all sums, entering what it carries at the end of the step.

    Its energy in the fields is entered by the loop, as the difference the renewed forces show.
    """
    ux, uy, uz = charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i]
    x, y, z = charges.position[0, i], charges.position[1, i], charges.position[2, i]
    m = charges.mass[i]
    u2 = ux * ux + uy * uy + uz * uz
    energy = m * u2 / (1.0 + math.sqrt(1.0 + u2 / plan.light2))
    if plan.coulomb != 0:
        energy += charges.charge[i] * potential_at(
            i, charges.position, charges.charge, plan.softening2, plan.constant
        )
    add_compensated(work.total, work.carry, ENERGY_WALLS, energy)
    enter_vector(MOMENTUM_WALLS, m * ux, m * uy, m * uz, work.total, work.carry)
    _enter_angular(x, y, z, m * ux, m * uy, m * uz, work)
    add_compensated(work.total, work.carry, CHARGE_WALLS, charges.charge[i])
    add_compensated(work.total, work.carry, COUNT_WALLS, charges.weight[i])
    charges.alive[i] = 0
    charges.charge[i] = 0.0
    charges.weight[i] = 0.0
    for axis in range(3):
        charges.charge_to_mass[axis, i] = 0.0
        charges.velocity[axis, i] = 0.0


@outer_kernel
def _account_bounce(charges: Charges, i: int, sign: float, work: Work) -> None:
    """Enter what a bounce takes from the charges: their momentum before (-1) less after (+1)."""
    m = -sign * charges.mass[i]
    px = m * charges.velocity[0, i]
    py = m * charges.velocity[1, i]
    pz = m * charges.velocity[2, i]
    enter_vector(MOMENTUM_WALLS, px, py, pz, work.total, work.carry)
    _enter_angular(
        charges.position[0, i], charges.position[1, i], charges.position[2, i], px, py, pz, work
    )


@outer_kernel
def _enter_angular(
    x: float, y: float, z: float, px: float, py: float, pz: float, work: Work
) -> None:
    enter_vector(
        ANGULAR_WALLS,
        y * pz - z * py,
        z * px - x * pz,
        x * py - y * px,
        work.total,
        work.carry,
    )


@outer_kernel
def _write(
    surface: int,
    i: int,
    t: float,
    x: float,
    y: float,
    z: float,
    ux: float,
    uy: float,
    uz: float,
    direction: float,
    work: Work,
) -> None:
    """One row of the event buffer; a row that does not fit is counted, and stops the run."""
    k = work.cursor[CURSOR_EVENTS]
    if k >= work.events.shape[0]:
        work.cursor[CURSOR_OVERFLOW] += 1
        return
    row = work.events[k]
    row[0], row[1], row[2] = surface, i, t
    row[3], row[4], row[5] = x, y, z
    row[6], row[7], row[8] = ux, uy, uz
    row[9] = direction
    work.cursor[CURSOR_EVENTS] = k + 1
