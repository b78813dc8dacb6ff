"""A charge's path through a step in which processes act on it.

A step's drift has brought the charge to x with u, which stands for the acceleration a = Q E / m
with the velocity u + a (s - 1/2) h at the part s of the step. What an event at s adds to the
velocity, D, goes on to the end of the step,

    u += D,    x += D (1 - s) h / gamma,                                                    (1)

in a magnetic field on the helix of the rest of the step; so any number of events follow each other
in one step, each at its own time and velocity. Drag acts between events by its exact solution; in
a magnetic field by a push in the middle of the step.

For constant a the energy given, K(v + D) - K(v) of an event, and K(v1) - K(v0) - m a . (x1 - x0)
of a stretch of drag, is exactly what the account of energy lacks.

Events come when a charge's clock (process_work.py) is used up by its largest rate, RATE + SLOPE c,
where c bounds its speed against the gas in the rest of the step: thinning by a bound that is
constant from piece to piece, which is exact.

References
----------
P. A. W. Lewis and G. S. Shedler, Nav. Res. Logist. Q. 26 (1979) 403 (thinning; from memory).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel
from driftwell.kernels.philox import normals
from driftwell.processes.form import FLOW
from driftwell.processes.linear import AGITATION, DAMPING, LINEAR, relaxed, spreads
from driftwell.processes.outcome import CHANGED, NOISE
from driftwell.processes.outcome import LOST as GONE
from driftwell.processes.table import ON, happen, is_within
from driftwell.stepping.drift import helix
from driftwell.stepping.forces import magnetic_at
from driftwell.stepping.motion import CURSOR_STEPS, LEAVING, Charges, Fields, Plan, Work, put
from driftwell.stepping.process_work import CROWDED, LOST, ProcessWork

MOST_EVENTS = 100_000
"""Events of one charge in one step, null ones included, beyond which the run gives up."""
_END, _PUSH = -1, -2


@inner_kernel
def acts(acting: ProcessWork, p: int, inside: float) -> bool:
    """Whether a process acts in the piece of time that `inside` lies in."""
    return acting.start[p] <= inside < acting.end[p]


@inner_kernel
def used_up(
    acting: ProcessWork,
    p: int,
    i: int,
    spinning: bool,
    ux: float,
    uy: float,
    uz: float,
    spread: float,
) -> tuple[float, float]:
    """Largest rate of a process' events for velocities near u, 1/s, and the bound c in it, m/s.

    spread : |a| h / 2, or more
    """
    if acting.sloped[p] == 0:
        return acting.rate[p, i], 0.0
    wx, wy, wz = acting.flow[p, 0], acting.flow[p, 1], acting.flow[p, 2]
    if spinning:
        spread += math.sqrt(wx * wx + wy * wy + wz * wz)
        wx = wy = wz = 0.0
    dx, dy, dz = ux - wx, uy - wy, uz - wz
    bound = math.sqrt(dx * dx + dy * dy + dz * dz) + spread
    return acting.rate[p, i] + acting.slope[p, i] * bound, bound


@inner_kernel
def follow(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    work: Work,
    acting: ProcessWork,
    together: bool,
    spinning: bool,
    t: float,
    inside: float,
    h: float,
    i: int,
    out_sums: np.ndarray,
    out_flags: np.ndarray,
) -> None:
    """Follow charge `i` through the step behind it, from `t` on, of length `h`.

    Its clocks must stand as at the step's start. Adds to `out_sums` (p, 8) and `out_flags`.
    """
    ratio, mass, slow = charges.charge_to_mass[0, i], charges.mass[i], work.slowness[i]
    ax, ay, az = work.external[0, i], work.external[1, i], work.external[2, i]
    if together:
        ax, ay, az = ax + work.coulomb[0, i], ay + work.coulomb[1, i], az + work.coulomb[2, i]
    ax, ay, az = ratio * ax, ratio * ay, ratio * az
    spread = 0.5 * h * (abs(ax) + abs(ay) + abs(az))
    x, y, z = charges.position[0, i], charges.position[1, i], charges.position[2, i]
    ux, uy, uz = charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i]
    middle = 0.5 * h * slow
    mx, my, mz = x - middle * ux, y - middle * uy, z - middle * uz
    bx = by = bz = theta = 0.0
    if spinning:
        put(charges, i, mx, my, mz)
        bx, by, bz = magnetic_at(fields, charges, i, t + 0.5 * h, inside, work)
        strength = math.sqrt(bx * bx + by * by + bz * bz)
        if strength > 0.0:
            bx, by, bz = bx / strength, by / strength, bz / strength
        theta = ratio * strength * slow * h
    drag = -1
    for p in range(acting.kind.size):
        if (
            acting.kind[p] == LINEAR
            and acting.parameter[p, charges.cloud[i], ON] != 0.0
            and acts(acting, p, inside)
            and is_within(acting.region[p], mx, my, mz)
        ):
            drag = p
    row = acting.parameter[max(drag, 0), charges.cloud[i]]
    done = 0.0
    for count in range(MOST_EVENTS + 1):
        if count == MOST_EVENTS:
            out_flags[CROWDED] = i + 1
            break
        rx, ry, rz = ux, uy, uz
        if spinning:
            _, _, _, wx, wy, wz = helix(ux, uy, uz, bx, by, bz, (done - 1.0) * theta)
            rx, ry, rz = ux + wx, uy + wy, uz + wz
        until, which, bound = 1.0, _END, 0.0
        if drag >= 0 and spinning and done < 0.5:
            until, which = 0.5, _PUSH
        reach = spread
        if drag >= 0 and not spinning:
            reach += _slowed(row, h, done, ux, uy, uz, ax, ay, az)
        for p in range(acting.kind.size):
            if acting.kind[p] != LINEAR and acts(acting, p, inside):
                rate, c = used_up(acting, p, i, spinning, rx, ry, rz, reach)
                if rate * h * (until - done) > acting.depth[p, i]:
                    until, which, bound = done + acting.depth[p, i] / (rate * h), p, c
        for p in range(acting.kind.size):
            if acting.kind[p] != LINEAR and acts(acting, p, inside):
                rate, c = used_up(acting, p, i, spinning, rx, ry, rz, reach)
                acting.depth[p, i] -= rate * h * (until - done)
        if drag >= 0 and not spinning:
            since = h * (done - 0.5)
            vx, vy, vz = ux + since * ax, uy + since * ay, uz + since * az
            wait = h * (until - done)
            dx, dy, dz, sx, sy, sz = relaxed(row, wait, vx, vy, vz, ax, ay, az)
            vx, vy, vz = vx + wait * ax, vy + wait * ay, vz + wait * az
            given = _kinetic(plan.light2, mass, vx, vy, vz, dx, dy, dz)
            given -= mass * (ax * sx + ay * sy + az * sz)
            rest = h * (1.0 - until)
            sx, sy, sz = slow * (sx + rest * dx), slow * (sy + rest * dy), slow * (sz + rest * dz)
            _enter(out_sums[drag], mass, given, x, y, z, ux, uy, uz, sx, sy, sz, dx, dy, dz)
            x, y, z, ux, uy, uz = x + sx, y + sy, z + sz, ux + dx, uy + dy, uz + dz
        done = until
        if which == _END:
            break
        left = h * (1.0 - done)
        rx, ry, rz = ux, uy, uz
        px, py, pz = ux + 0.5 * done * h * ax, uy + 0.5 * done * h * ay, uz + 0.5 * done * h * az
        if spinning:
            px, py, pz, wx, wy, wz = helix(ux, uy, uz, bx, by, bz, (done - 1.0) * theta)
            rx, ry, rz = ux + wx, uy + wy, uz + wz
        px, py, pz = x - left * slow * px, y - left * slow * py, z - left * slow * pz
        since = h * (done - 0.5)
        vx, vy, vz = rx + since * ax, ry + since * ay, rz + since * az
        if which == _PUSH:
            whose = drag
            share = math.expm1(-row[DAMPING] * h)
            dx = share * (vx - row[FLOW])
            dy = share * (vy - row[FLOW + 1])
            dz = share * (vz - row[FLOW + 2])
            if row[AGITATION] > 0.0:
                kick, _, _ = spreads(row, h)
                step = work.cursor[CURSOR_STEPS]
                n1, n2, n3, _ = normals(acting.key[drag], acting.id[i], step, NOISE, 0)
                dx, dy, dz = dx + kick * n1, dy + kick * n2, dz + kick * n3
        else:
            whose = which
            event = acting.number[which, i]
            acting.number[which, i] = event + 1
            came, dx, dy, dz, acting.depth[which, i] = happen(
                acting.kind[which],
                acting.parameter[which, charges.cloud[i]],
                acting.key[which],
                acting.id[i],
                event,
                bound,
                px,
                py,
                pz,
                vx,
                vy,
                vz,
            )
            if not is_within(acting.region[which], px, py, pz):
                continue
            if came == GONE:
                _note_lost(charges, work, acting, i, which, done, px, py, pz, vx, vy, vz)
                out_flags[LOST] += 1
                out_sums[which, 7] += charges.weight[i]
                break
            if came != CHANGED:
                continue
            out_sums[which, 7] += charges.weight[i]
        given = _kinetic(plan.light2, mass, vx, vy, vz, dx, dy, dz)
        sx, sy, sz = dx, dy, dz
        if spinning:
            sx, sy, sz, wx, wy, wz = helix(dx, dy, dz, bx, by, bz, (1.0 - done) * theta)
            dx, dy, dz = dx + wx, dy + wy, dz + wz
        sx, sy, sz = left * slow * sx, left * slow * sy, left * slow * sz
        _enter(out_sums[whose], mass, given, x, y, z, ux, uy, uz, sx, sy, sz, dx, dy, dz)
        x, y, z, ux, uy, uz = x + sx, y + sy, z + sz, ux + dx, uy + dy, uz + dz
    if drag >= 0 and not spinning and row[AGITATION] > 0.0 and charges.alive[i] == 1:
        step = work.cursor[CURSOR_STEPS]
        n1, n2, n3, n4 = normals(acting.key[drag], acting.id[i], step, NOISE, 0)
        n5, n6, _, _ = normals(acting.key[drag], acting.id[i], step, NOISE, 1)
        kick, shared, own = spreads(row, h)
        dx, dy, dz = kick * n1, kick * n2, kick * n3
        sx, sy, sz = shared * n1 + own * n4, shared * n2 + own * n5, shared * n3 + own * n6
        half = 0.5 * h
        vx, vy, vz = ux + half * ax, uy + half * ay, uz + half * az
        given = _kinetic(plan.light2, mass, vx, vy, vz, dx, dy, dz)
        given -= mass * (ax * sx + ay * sy + az * sz)
        sx, sy, sz = slow * sx, slow * sy, slow * sz
        _enter(out_sums[drag], mass, given, x, y, z, ux, uy, uz, sx, sy, sz, dx, dy, dz)
        x, y, z, ux, uy, uz = x + sx, y + sy, z + sz, ux + dx, uy + dy, uz + dz
    put(charges, i, x, y, z)
    charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i] = ux, uy, uz


@inner_kernel
def _slowed(
    row: np.ndarray,
    h: float,
    done: float,
    ux: float,
    uy: float,
    uz: float,
    ax: float,
    ay: float,
    az: float,
) -> float:
    """How much drag may change the velocity in the rest of a step, at most, m/s."""
    since = h * (done - 0.5)
    dx, dy, dz, _, _, _ = relaxed(
        row, h * (1.0 - done), ux + since * ax, uy + since * ay, uz + since * az, ax, ay, az
    )
    return abs(dx) + abs(dy) + abs(dz)


@inner_kernel
def _kinetic(
    light2: float, mass: float, vx: float, vy: float, vz: float, dx: float, dy: float, dz: float
) -> float:
    """How the kinetic energy changes as v changes by d, J."""
    before = vx * vx + vy * vy + vz * vz
    more = 2.0 * (vx * dx + vy * dy + vz * dz) + dx * dx + dy * dy + dz * dz
    gammas = math.sqrt(1.0 + before / light2) + math.sqrt(1.0 + (before + more) / light2)
    return mass * more / gammas


@inner_kernel
def _enter(
    row: np.ndarray,
    mass: float,
    given: float,
    x: float,
    y: float,
    z: float,
    ux: float,
    uy: float,
    uz: float,
    sx: float,
    sy: float,
    sz: float,
    dx: float,
    dy: float,
    dz: float,
) -> None:
    """Enter what a process gives a charge at x with u: energy, place by s, velocity by d."""
    vx, vy, vz = ux + dx, uy + dy, uz + dz
    row[0] += given
    row[1] += mass * dx
    row[2] += mass * dy
    row[3] += mass * dz
    row[4] += mass * (y * dz - z * dy + sy * vz - sz * vy)
    row[5] += mass * (z * dx - x * dz + sz * vx - sx * vz)
    row[6] += mass * (x * dy - y * dx + sx * vy - sy * vx)


@inner_kernel
def _note_lost(
    charges: Charges,
    work: Work,
    acting: ProcessWork,
    i: int,
    p: int,
    done: float,
    x: float,
    y: float,
    z: float,
    vx: float,
    vy: float,
    vz: float,
) -> None:
    """Note that a process takes a charge, where and how fast; it leaves at the end of the step."""
    charges.alive[i] = LEAVING
    acting.lost_by[i], acting.lost_at[i] = p, done
    work.old_position[0, i], work.old_position[1, i], work.old_position[2, i] = x, y, z
    work.old_velocity[0, i], work.old_velocity[1, i], work.old_velocity[2, i] = vx, vy, vz
