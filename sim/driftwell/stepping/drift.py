"""Kicks and drifts: the exact flows a step is built from.

A kick changes proper velocities u by Q/m E h at fixed positions. A drift moves with constant |u|:
straight without a magnet, on the exact helix in a uniform magnetic field B (angular frequency
-Q B / (gamma m) about B), so that with u the proper velocity and b = B/|B|, theta = omega h

    u(h) = u_par + u_perp cos(theta) + (u x b) sin(theta)                                   (1)
    x(h) = x + (u_par h + u_perp sin(theta)/omega + (u x b) (1 - cos(theta))/omega) / gamma (2)

A magnetic field that varies in space turns u by its exact rotation (1) halfway through the drift.
Both are volume-preserving, keep gamma to rounding and hold at any speed.

All work on a stretch of the charges, `first` to `last`: the whole of few, a block of many
(passes.py).

References
----------
Q. Spreiter and M. Walter, J. Comput. Phys. 152 (1999) 102 (exact drift in a uniform field; from
memory). L. D. Landau and E. M. Lifshitz, The Classical Theory of Fields, sec. 21 (helix).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import (
    fused,
    inverse_root,
    lanes,
    larger,
    load_some,
    most,
    picked_above,
    put_some,
    some,
    store_some,
    total,
)
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import (
    IMPULSE_MAGNETS,
    TORQUE_MAGNETS,
    WORK_INDUCED,
    Six,
    enter_rates,
    enter_vector,
    settle,
)
from driftwell.stepping.blocks import signed
from driftwell.stepping.forces import (
    force_and_torque,
    induced_by_jumps,
    magnetised,
    shaped_magnetic,
    uniform_magnetic,
)
from driftwell.stepping.motion import Charges, Fields, Plan, Work

_SLOW = 1e-4
"""(u/c)^2 up to which the series of 1/gamma serves."""
_TERMS = 10
_TURN = tuple((-1.0) ** k / math.factorial(2 * k + 1) for k in range(_TERMS))
"""sin(theta)/theta in powers of theta^2."""
_LESS = tuple((-1.0) ** k / math.factorial(2 * k + 2) for k in range(_TERMS))
"""(1 - cos(theta))/theta^2 in powers of theta^2."""


@inner_kernel
def kick(charges: Charges, field: np.ndarray, h: float, first: int, last: int) -> None:
    """u += Q/m E h for one field (3, n), V/m."""
    for axis in range(3):
        u, e, ratio = charges.velocity[axis], field[axis], charges.charge_to_mass[axis]
        for i in range(first, last):
            u[i] += h * ratio[i] * e[i]


@inner_kernel
def kick_both(
    charges: Charges, field: np.ndarray, coulomb: np.ndarray, h: float, first: int, last: int
) -> None:
    """u += Q/m (E + E_Coulomb) h."""
    for axis in range(3):
        u, ratio = charges.velocity[axis], charges.charge_to_mass[axis]
        e, c = field[axis], coulomb[axis]
        for i in range(first, last):
            u[i] += h * ratio[i] * (e[i] + c[i])


@outer_kernel
def induced_work(
    plan: Plan,
    charges: Charges,
    force_field: np.ndarray,
    induced: np.ndarray,
    h: float,
    first: int,
    last: int,
) -> float:
    """The work, J, the induced field does in a kick of length `h` about to be made.

    The kick changes the kinetic energy by Q E.(u0 + u1)/(gamma0 + gamma1) h exactly; the part of
    the induced field E_i in it is Q E_i.(u0 + u1)/(gamma0 + gamma1) h.
    """
    ux, uy, uz = charges.velocity[0], charges.velocity[1], charges.velocity[2]
    total = 0.0
    for i in range(first, last):
        s = h * charges.charge_to_mass[0, i]
        vx = ux[i] + s * force_field[0, i]
        vy = uy[i] + s * force_field[1, i]
        vz = uz[i] + s * force_field[2, i]
        gamma0 = math.sqrt(1.0 + (ux[i] ** 2 + uy[i] ** 2 + uz[i] ** 2) / plan.light2)
        gamma1 = math.sqrt(1.0 + (vx * vx + vy * vy + vz * vz) / plan.light2)
        along = (
            induced[0, i] * (ux[i] + vx)
            + induced[1, i] * (uy[i] + vy)
            + induced[2, i] * (uz[i] + vz)
        )
        total += charges.charge[i] * along / (gamma0 + gamma1)
    return h * total


@outer_kernel
def jump_magnets(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    t: float,
    before: float,
    after: float,
    work: Work,
) -> None:
    """Kick by what magnets that jump at time `t` induce: u += Q/m times minus the change of A.

    It is the limit of ever faster ramps. `before` and `after` lie inside the pieces on both sides
    of `t`. Overwrites the fields and the rates in `work`, which must be settled.
    """
    n = charges.charge.size
    induced_by_jumps(fields, charges, t, before, after, work)
    done = induced_work(plan, charges, work.induced, work.induced, 1.0, 0, n)
    add_compensated(work.total, work.carry, WORK_INDUCED, done)
    for axis in range(3):
        row, out = work.induced[axis], work.external[axis]
        for i in range(n):
            out[i] = row[i]
    enter_rates(0.0, force_and_torque(charges, work.external, 0, n), work.rate)
    work.pending[0] = 1.0
    settle(work.rate, work.pending, work.total, work.carry)
    kick(charges, work.induced, 1.0, 0, n)


@inner_kernel
def drift(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    t: float,
    inside: float,
    h: float,
    work: Work,
    first: int,
    last: int,
) -> None:
    """Move charges for a time `h` from time `t` on, turning them in the magnetic fields."""
    _slowness(charges.velocity, plan.light2, work.slowness, first, last)
    if not magnetised(fields):
        for axis in range(3):
            x, u, slow = charges.position[axis], charges.velocity[axis], work.slowness
            for i in range(first, last):
                x[i] += h * (u[i] * slow[i])
        return
    middle = t + 0.5 * h
    bx, by, bz = uniform_magnetic(fields, middle, inside)
    if fields.magnetic.kind.size == 0:
        _helix(charges, bx, by, bz, h, work.slowness, work.spare, first, last)
    else:
        _helix(charges, bx, by, bz, 0.5 * h, work.slowness, work.spare, first, last)
        shaped_magnetic(fields, charges, middle, inside, work.spare, first, last)
        _turn(charges, work.spare, h, work.slowness, first, last)
        _helix(charges, bx, by, bz, 0.5 * h, work.slowness, work.spare, first, last)


@inner_kernel
def _slowness(
    velocity: np.ndarray, light2: float, out_slowness: np.ndarray, first: int, last: int
) -> None:
    """1/gamma = (1 + u^2/c^2)^(-1/2) of every charge.

    Below u = c/100 the binomial series to the fourth term is the same to the last bit but one, at
    a fifth of the time: the first term left out is (35/128) (u/c)^8 < 3e-17.
    """
    ux, uy, uz = velocity[0], velocity[1], velocity[2]
    inverse = 1.0 / light2
    fast = 0
    for i in range(first, last):
        s = (ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]) * inverse
        out_slowness[i] = 1.0 - s * (0.5 - s * (0.375 - 0.3125 * s))
        fast += not s < _SLOW
    if fast > 0:
        _slow_down(velocity, inverse, out_slowness, signed(first), signed(last))


@outer_kernel
def _slow_down(
    velocity: np.ndarray, inverse: float, out_slowness: np.ndarray, first: int, last: int
) -> None:
    """1/gamma of the fast charges; what stands there of slow ones is kept."""
    one = lanes(1.0)
    for i in range(first, last, 8):
        count = min(8, last - i)
        ux = load_some(velocity[0], i, count)
        uy = load_some(velocity[1], i, count)
        uz = load_some(velocity[2], i, count)
        s = (ux * ux + uy * uy + uz * uz) * lanes(inverse)
        slow = load_some(out_slowness, i, count)
        found = picked_above(lanes(_SLOW), s, slow, inverse_root(one + s))
        store_some(out_slowness, i, count, found)


@outer_kernel
def _helix(
    charges: Charges,
    bx: float,
    by: float,
    bz: float,
    h: float,
    slowness: np.ndarray,
    spare: np.ndarray,
    first: int,
    last: int,
) -> None:
    """Equations (1) and (2); spare : (3, n), of which the stretch's part is overwritten."""
    strength = math.sqrt(bx * bx + by * by + bz * bz)
    if strength > 0.0:
        bx, by, bz = bx / strength, by / strength, bz / strength
    low, high = signed(first), signed(last)
    scale = strength * h
    turn, less, ratio = spare[0], spare[1], charges.charge_to_mass[0]
    if _whirls(ratio, scale, slowness, turn, less, low, high):
        _take_far_whirls(ratio, scale, slowness, turn, less, low, high)
    whole = low + (high - low) // 8 * 8
    for i in range(low, whole, 8):
        _helix_of_eight(charges, bx, by, bz, scale, h, slowness, turn, less, i, 8)
    if whole < high:
        _helix_of_eight(charges, bx, by, bz, scale, h, slowness, turn, less, whole, high - whole)


@inner_kernel
def _whirls(
    ratio: np.ndarray,
    scale: float,
    slowness: np.ndarray,
    out_turn: np.ndarray,
    out_less: np.ndarray,
    first: int,
    last: int,
) -> bool:
    """sin(theta)/theta and (1 - cos(theta))/theta^2 of theta = ratio scale slowness.

    By their series, which up to 1 rad leave out less than 1e-18; returns whether any is beyond.
    """
    farthest = lanes(0.0)
    for i in range(first, last, 8):
        count = min(8, last - i)
        theta = load_some(ratio, i, count) * lanes(scale) * load_some(slowness, i, count)
        s = theta * theta
        turn, less = lanes(_TURN[_TERMS - 1]), lanes(_LESS[_TERMS - 1])
        for k in range(_TERMS - 2, -1, -1):
            turn = fused(turn, s, lanes(_TURN[k]))
            less = fused(less, s, lanes(_LESS[k]))
        store_some(out_turn, i, count, turn)
        store_some(out_less, i, count, less)
        farthest = larger(farthest, s)
    return most(farthest) > 1.0


@outer_kernel
def _take_far_whirls(
    ratio: np.ndarray,
    scale: float,
    slowness: np.ndarray,
    out_turn: np.ndarray,
    out_less: np.ndarray,
    first: int,
    last: int,
) -> None:
    """The same where theta is above 1, by sines."""
    for i in range(first, last):
        theta = ratio[i] * scale * slowness[i]
        if theta * theta > 1.0:
            half = math.sin(0.5 * theta) / theta
            out_turn[i] = math.sin(theta) / theta
            out_less[i] = 2.0 * half * half  # 1 - cos(theta), without cancellation


@inner_kernel
def _helix_of_eight(
    charges: Charges,
    bx: float,
    by: float,
    bz: float,
    scale: float,
    h: float,
    slowness: np.ndarray,
    turns: np.ndarray,
    lesses: np.ndarray,
    i: int,
    count: int,
) -> None:
    """Eight charges, or the `count` last."""
    nx, ny, nz = lanes(bx), lanes(by), lanes(bz)
    slow = some(slowness, i, count)
    theta = some(charges.charge_to_mass[0], i, count) * lanes(scale) * slow
    along_turn, along_less = some(turns, i, count), some(lesses, i, count)
    turn, less = theta * along_turn, theta * theta * along_less
    along_less = theta * along_less
    ux = some(charges.velocity[0], i, count)
    uy = some(charges.velocity[1], i, count)
    uz = some(charges.velocity[2], i, count)
    along = ux * nx + uy * ny + uz * nz
    ax, ay, az = along * nx, along * ny, along * nz
    px, py, pz = ux - ax, uy - ay, uz - az
    cx, cy, cz = uy * nz - uz * ny, uz * nx - ux * nz, ux * ny - uy * nx
    way = slow * lanes(h)
    x = some(charges.position[0], i, count) + way * (ax + along_turn * px + along_less * cx)
    y = some(charges.position[1], i, count) + way * (ay + along_turn * py + along_less * cy)
    z = some(charges.position[2], i, count) + way * (az + along_turn * pz + along_less * cz)
    put_some(charges.position[0], i, count, x)
    put_some(charges.position[1], i, count, y)
    put_some(charges.position[2], i, count, z)
    put_some(charges.velocity[0], i, count, ux + (turn * cx - less * px))
    put_some(charges.velocity[1], i, count, uy + (turn * cy - less * py))
    put_some(charges.velocity[2], i, count, uz + (turn * cz - less * pz))


@inner_kernel
def helix(
    ux: float, uy: float, uz: float, bx: float, by: float, bz: float, theta: float
) -> tuple[float, float, float, float, float, float]:
    """Mean of u on the way round by `theta` about the unit vector b, and how u changes."""
    half = math.sin(0.5 * theta)
    turn = math.sin(theta)
    less = 2.0 * half * half  # 1 - cos(theta), without cancellation
    mean_turn, mean_less = 1.0, 0.0
    if theta != 0.0:
        mean_turn, mean_less = turn / theta, less / theta
    along = ux * bx + uy * by + uz * bz
    px, py, pz = ux - along * bx, uy - along * by, uz - along * bz
    cx = uy * bz - uz * by
    cy = uz * bx - ux * bz
    cz = ux * by - uy * bx
    return (
        along * bx + mean_turn * px + mean_less * cx,
        along * by + mean_turn * py + mean_less * cy,
        along * bz + mean_turn * pz + mean_less * cz,
        turn * cx - less * px,
        turn * cy - less * py,
        turn * cz - less * pz,
    )


@outer_kernel
def _turn(
    charges: Charges, field: np.ndarray, h: float, slowness: np.ndarray, first: int, last: int
) -> None:
    """Equation (1) alone, in each charge's own magnetic field (3, n), T."""
    ux, uy, uz = charges.velocity[0], charges.velocity[1], charges.velocity[2]
    for i in range(first, last):
        bx, by, bz = field[0, i], field[1, i], field[2, i]
        strength = math.sqrt(bx * bx + by * by + bz * bz)
        if strength == 0.0:
            continue
        bx, by, bz = bx / strength, by / strength, bz / strength
        theta = charges.charge_to_mass[0, i] * strength * slowness[i] * h
        _, _, _, wx, wy, wz = helix(ux[i], uy[i], uz[i], bx, by, bz, theta)
        ux[i] += wx
        uy[i] += wy
        uz[i] += wz


@outer_kernel
def momenta(charges: Charges, first: int, last: int) -> Six:
    """Sums of momentum and angular momentum; magnets change them in a drift."""
    px = py = pz = lanes(0.0)
    lx = ly = lz = lanes(0.0)
    end = signed(last)
    for i in range(signed(first), end, 8):
        count = min(8, end - i)
        m = load_some(charges.mass, i, count)
        x = load_some(charges.position[0], i, count)
        y = load_some(charges.position[1], i, count)
        z = load_some(charges.position[2], i, count)
        ux = m * load_some(charges.velocity[0], i, count)
        uy = m * load_some(charges.velocity[1], i, count)
        uz = m * load_some(charges.velocity[2], i, count)
        px, py, pz = px + ux, py + uy, pz + uz
        lx = lx + (y * uz - z * uy)
        ly = ly + (z * ux - x * uz)
        lz = lz + (x * uy - y * ux)
    return total(px), total(py), total(pz), total(lx), total(ly), total(lz)


@outer_kernel
def enter_magnets(sign: float, sums: Six, total: np.ndarray, carry: np.ndarray) -> None:
    """Enter the :func:`momenta` before (-1) and after (+1) a drift."""
    enter_vector(IMPULSE_MAGNETS, sign * sums[0], sign * sums[1], sign * sums[2], total, carry)
    enter_vector(TORQUE_MAGNETS, sign * sums[3], sign * sums[4], sign * sums[5], total, carry)
