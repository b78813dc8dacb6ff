"""What happens on walls and detectors inside a step.

After a whole step every charge's side of every surface is compared with the side it was on. Where
one changed, the path through the step is the quintic through both ends' positions, velocities and
accelerations (path.py; error of order h^6 in place and time, as small as the best scheme's, and h^4
in velocity), and the crossing is found on it by bisection to the last bit.

An absorbed charge leaves the sums at the end of the step it was lost in, after all reflected ones
have found their places; what is entered in the accounts is what it carried then, so that the
ledger closes exactly, while the record keeps place, time and velocity of the crossing itself, and
that is where it stays. A reflected charge turns its velocity over at the crossing and goes on for
the rest of the step with the step's mean electric acceleration, turning in the magnetic field
(order h^2). What the magnet did in the step is told apart by the way made: with u' = a + Q/m v x B,

    a = ((u1 - u0) - Q/m (x1 - x0) x B) / h                                                 (1)
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import outer_kernel
from driftwell.stepping.accounts import (
    MOMENTUM_WALLS,
    enter_vector,
    enter_wall_moment,
)
from driftwell.stepping.blocks import BLOCK, CROSSED
from driftwell.stepping.contact import first_body
from driftwell.stepping.drift import helix
from driftwell.stepping.forces import magnetic_at
from driftwell.stepping.motion import (
    CURSOR_EVENTS,
    CURSOR_OVERFLOW,
    LEAVING,
    Charges,
    Fields,
    Plan,
    Work,
    put,
)
from driftwell.stepping.path import End, end_of, ends, place, point
from driftwell.walls.form import ABSORB, PASS
from driftwell.walls.table import SurfaceTable, level, normal, stops

UNTOUCHED, MOVED, LOST = 0, 1, 2
"""What a step's surfaces did, as bits: MOVED + LOST where both happened."""
_BISECTIONS = 60
_BOUNCES = 16


@outer_kernel
def meet_surfaces(
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    together: bool,
    t: float,
    h: float,
    inside: float,
    work: Work,
) -> int:
    """Treat all crossings of the step from `t` to `t + h`; returns UNTOUCHED, MOVED and LOST.

    ``work.old_position``, ``work.old_velocity`` and ``work.old_field`` hold the state at `t`;
    `together` : the Coulomb field is part of every kick. Lost charges are marked as LEAVING;
    :func:`take_out` is to be called once the forces belong to the places of the rest.
    """
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    blocks = work.block_sums.shape[0]
    changed = UNTOUCHED
    for s in range(surfaces.kind.size):
        kind = surfaces.kind[s]
        p = surfaces.parameter[s]
        side = work.side[s]
        for b in range(max(1, blocks)):
            first, last = 0, x.size
            if blocks > 0:
                if work.block_sums[b, CROSSED] == 0.0:
                    continue
                first, last = b * BLOCK, min(b * BLOCK + BLOCK, x.size)
            for i in range(first, last):
                there = level(kind, p, x[i], y[i], z[i])
                now = 1 if there > 0.0 else -1
                if now == side[i] or charges.alive[i] != 1:
                    continue
                if side[i] == 0:
                    side[i] = 0 if there == 0.0 else now
                else:
                    changed |= _follow(
                        plan, fields, surfaces, bodies, charges, together, i, t, h, inside, work
                    )
    near = work.clearance
    for b in range(max(1, blocks)):
        first, last = 0, near.size
        if blocks > 0:
            if work.block_sums[b, CROSSED] == 0.0:
                continue
            first, last = b * BLOCK, min(b * BLOCK + BLOCK, near.size)
        for i in range(first, last):
            if near[i] < 0.0 and charges.alive[i] == 1:  # not followed through a surface yet
                changed |= _follow(
                    plan, fields, surfaces, bodies, charges, together, i, t, h, inside, work
                )
    return changed


@outer_kernel
def _follow(
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    together: bool,
    i: int,
    t: float,
    h: float,
    inside: float,
    work: Work,
) -> int:
    """Follow one charge through the step, surface by surface; UNTOUCHED, MOVED or LOST."""
    first, last = ends(plan, fields, charges, together, i, t, h, inside, work)
    changed = UNTOUCHED
    if work.clearance.size > 0:
        work.clearance[i] = 0.0
    start, span = t, h
    for _ in range(_BOUNCES):
        x0, y0, z0, ux0, uy0, uz0 = first[:6]
        x1, y1, z1, ux1, uy1, uz1 = last[:6]
        wall, when = _first_wall(plan, surfaces, first, last, span, i, work)
        if bodies.whole.shape[0] > 0:
            body, at = first_body(plan, bodies, first, last, span, when)
            if body >= 0 and (wall < 0 or at < when):
                wall, when = surfaces.kind.size + body, at
        _pass_detectors(plan, surfaces, first, last, start, span, when, i, work)
        if wall < 0:
            return changed
        xc, yc, zc, uxc, uyc, uzc = point(plan, first, last, span, when)
        if wall >= surfaces.kind.size or surfaces.effect[wall] == ABSORB:
            write_event(wall, i, start + when * span, xc, yc, zc, uxc, uyc, uzc, 0.0, work)
            charges.alive[i] = LEAVING
            for s in range(surfaces.kind.size):
                there = level(surfaces.kind[s], surfaces.parameter[s], x1, y1, z1)
                work.side[s, i] = 1 if there > 0.0 else -1
            work.old_position[0, i], work.old_position[1, i] = xc, yc
            work.old_position[2, i] = zc
            return changed | LOST
        nx, ny, nz = normal(
            surfaces.kind[wall], surfaces.parameter[wall], xc, yc, zc, uxc, uyc, uzc
        )
        outward = -work.side[wall, i] * (uxc * nx + uyc * ny + uzc * nz)
        if outward <= 0.0:  # rounding left it a hair outside, on its way back in
            return changed
        changed = MOVED
        _account_bounce(charges, i, -1.0, work)
        ratio = charges.charge_to_mass[0, i]
        dx, dy, dz = ratio * (x1 - x0), ratio * (y1 - y0), ratio * (z1 - z0)
        put(charges, i, 0.5 * (x0 + x1), 0.5 * (y0 + y1), 0.5 * (z0 + z1))
        bx, by, bz = magnetic_at(fields, charges, i, start + 0.5 * span, inside, work)
        rest = 0.5 * (1.0 - when)
        ax = rest * (ux1 - ux0 - (dy * bz - dz * by))  # (1), for half of what is left
        ay = rest * (uy1 - uy0 - (dz * bx - dx * bz))
        az = rest * (uz1 - uz0 - (dx * by - dy * bx))
        along = 2.0 * (uxc * nx + uyc * ny + uzc * nz)
        ux0, uy0, uz0 = uxc - along * nx, uyc - along * ny, uzc - along * nz
        start += when * span
        span *= 1.0 - when
        put(charges, i, xc, yc, zc)
        bx, by, bz = magnetic_at(fields, charges, i, start + 0.5 * span, inside, work)
        strength = math.sqrt(bx * bx + by * by + bz * bz)
        if strength > 0.0:
            bx, by, bz = bx / strength, by / strength, bz / strength
        vx, vy, vz = ux0 + ax, uy0 + ay, uz0 + az
        way = span / math.sqrt(1.0 + (vx * vx + vy * vy + vz * vz) / plan.light2)
        dx, dy, dz, wx, wy, wz = helix(vx, vy, vz, bx, by, bz, ratio * strength * way)
        x1, y1, z1 = xc + way * dx, yc + way * dy, zc + way * dz
        ux1, uy1, uz1 = vx + wx + ax, vy + wy + ay, vz + wz + az
        put(charges, i, x1, y1, z1)
        charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i] = ux1, uy1, uz1
        _account_bounce(charges, i, 1.0, work)
        if span <= 0.0:
            return changed
        push = (2.0 * ax / span, 2.0 * ay / span, 2.0 * az / span)
        strength *= ratio
        whirl = (strength * bx, strength * by, strength * bz)
        first = end_of(plan, xc, yc, zc, ux0, uy0, uz0, push, whirl)
        last = end_of(plan, x1, y1, z1, ux1, uy1, uz1, push, whirl)
    # caught in a corner: it stays where it last bounced, inside, and goes on in the next step
    _account_bounce(charges, i, -1.0, work)
    put(charges, i, first[0], first[1], first[2])
    for axis in range(3):
        charges.velocity[axis, i] = first[3 + axis]
    _account_bounce(charges, i, 1.0, work)
    return changed


@outer_kernel
def _first_wall(
    plan: Plan,
    surfaces: SurfaceTable,
    start: End,
    end: End,
    span: float,
    i: int,
    work: Work,
) -> tuple[int, float]:
    """The first wall met on the path, and the fraction of the path behind it; (-1, 1) for none."""
    first, earliest = -1, 1.0
    for s in range(surfaces.kind.size):
        if surfaces.effect[s] == PASS or work.side[s, i] == 0:
            continue
        p = surfaces.parameter[s]
        kind = surfaces.kind[s]
        now = 1 if level(kind, p, end[0], end[1], end[2]) > 0.0 else -1
        if now == work.side[s, i]:
            continue
        when = _crossing(plan, kind, p, work.side[s, i], start, end, span)
        x, y, z = place(plan, start, end, span, when)
        if not stops(kind, p, x, y, z):
            continue
        if first < 0 or when < earliest:
            first, earliest = s, when
    return first, earliest


@outer_kernel
def _pass_detectors(
    plan: Plan,
    surfaces: SurfaceTable,
    first: End,
    last: End,
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
        now = 1 if level(kind, p, last[0], last[1], last[2]) > 0.0 else -1
        if side == 0:
            continue
        if now == side:
            continue
        when = _crossing(plan, kind, p, side, first, last, span)
        if when > until:
            continue
        x, y, z, ux, uy, uz = point(plan, first, last, span, when)
        if surfaces.effect[s] == PASS:
            if stops(kind, p, x, y, z):
                write_event(s, i, start + when * span, x, y, z, ux, uy, uz, float(now), work)
            work.side[s, i] = now
        elif not stops(kind, p, x, y, z):
            work.side[s, i] = now


@outer_kernel
def _crossing(
    plan: Plan, kind: int, p: np.ndarray, side: int, start: End, end: End, span: float
) -> float:
    """Fraction of the path where the level leaves `side`, by bisection."""
    low, high = 0.0, 1.0
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        x, y, z = place(plan, start, end, span, middle)
        now = 1 if level(kind, p, x, y, z) > 0.0 else -1
        if now == side:
            low = middle
        else:
            high = middle
    return high


@outer_kernel
def _account_bounce(charges: Charges, i: int, sign: float, work: Work) -> None:
    """Enter what a bounce takes from the charges: their momentum before (-1) less after (+1)."""
    m = -sign * charges.mass[i]
    px = m * charges.velocity[0, i]
    py = m * charges.velocity[1, i]
    pz = m * charges.velocity[2, i]
    enter_vector(MOMENTUM_WALLS, px, py, pz, work.total, work.carry)
    enter_wall_moment(
        charges.position[0, i],
        charges.position[1, i],
        charges.position[2, i],
        px,
        py,
        pz,
        work.total,
        work.carry,
    )


@outer_kernel
def write_event(
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
