"""The sum over the pairs in the bunches' own rest frames, so that their magnetic force is in it.

A bunch b moves with the proper velocity U = sum m u / sum m over its charges, with V = U/Gamma and
Gamma^2 = 1 + U^2/c^2. In its frame places are stretched along U, and the charges are taken as at
rest there:

    x' = x + U (x.U) / ((Gamma + 1) c^2)                                                      (1)
    E' = 1/(4 pi eps0) sum Q_j r' / (r'^2 + e^2)^(3/2)                                        (2)

Back in the laboratory, with E_par along U and B = V x E / c^2, each charge of b moving with V, the
force on its charges for each coulomb is

    E + V x B = E'/Gamma + U (E'.U) / (Gamma (Gamma + 1) c^2) = (E'_par, E'_perp / Gamma)     (3)

which is minus the gradient, divided by Q, of

    W = 1/Gamma sum_{i<j} Q_i Q_j / (4 pi eps0 (r'^2 + e^2)^(1/2)),  r'^2 = r^2 + (r.U)^2/c^2  (4)

so that the third law holds to rounding. What (3) leaves out is of first order in the velocities
within the frame over c. W changes with U at fixed places by

    dW/dU = -W U / (Gamma^2 c^2) - 1/(Gamma^2 c^2) sum Q_i x_i (E'_i.U)                       (5)

where the charges of a bunch, a, feel another, b, its field is transformed to the laboratory:

    E = Gamma E' - U (E'.U) / ((Gamma + 1) c^2),    F/Q = E + V_a x (V_b x E) / c^2           (6)

That is the field of charges in uniform motion, retardation included; momentum stands in the field,
so between bunches the third law does not hold.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), eqs. 11.19, 11.149, 11.152 (from memory).
"""

from __future__ import annotations

import math
from typing import Any

import numba
import numpy as np

from driftwell.coulomb.direct import THREADED
from driftwell.coulomb.frame_table import (
    BEFORE,
    CENTRE,
    CHARGE,
    ENERGY,
    FOUND,
    GIVEN,
    KNOWN,
    LORENTZ,
    MASS,
    OTHERS,
    PLACE,
    PROPER,
    PUSH,
    RATES,
    SLOPE,
    TWIST,
    WORK,
)
from driftwell.coulomb.pair_sum import SIGNATURE, PairSum
from driftwell.coulomb.potential import potentials, threaded_potentials
from driftwell.kernels import kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction

HELD = math.inf
"""In the place of `ahead`: the frames stay as they are."""


def _signature() -> Any:
    """Of :func:`framed_field`, which is handed the pair sum as an address too."""
    types: Any = numba.types
    core: Any = numba.core
    arguments, returned = core.sigutils.normalize_signature(SIGNATURE)
    summed = types.FunctionType(core.typing.signature(returned, *arguments))
    row, rows, whole = types.float64[::1], types.float64[:, ::1], types.int64[::1]
    number = types.float64
    return types.void(
        *(summed, rows, rows, row, row, whole, rows, *[number] * 4, whole, types.boolean),
        *(rows, rows, rows, rows, rows),
    )


def frame_sum(any_frames: bool) -> CompiledFunction:
    """The sum in the frames of bunches as the time loop takes it; one that is never called."""
    return CompiledFunction(framed_field if any_frames else no_frames, _signature())


@kernel
def no_frames(
    pair_sum: PairSum,
    position: np.ndarray,
    velocity: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    cloud: np.ndarray,
    external: np.ndarray,
    softening2: float,
    constant: float,
    light2: float,
    ahead: float,
    bunch: np.ndarray,
    levels: bool,
    tiles: np.ndarray,
    frames: np.ndarray,
    work_rows: np.ndarray,
    out_pairs: np.ndarray,
    out_coulomb: np.ndarray,
) -> None:
    """No bunch has a frame of its own: nothing is written."""


@kernel
def framed_field(
    pair_sum: PairSum,
    position: np.ndarray,
    velocity: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    cloud: np.ndarray,
    external: np.ndarray,
    softening2: float,
    constant: float,
    light2: float,
    ahead: float,
    bunch: np.ndarray,
    levels: bool,
    tiles: np.ndarray,
    frames: np.ndarray,
    work_rows: np.ndarray,
    out_pairs: np.ndarray,
    out_coulomb: np.ndarray,
) -> None:
    """What the charges push each other with, for each coulomb, eqs. (3) and (6).

    Parameters
    ----------
    pair_sum, tiles : the sum (2) and its work space
    position, velocity : (3, n) float64, m and m/s (proper)
    charge, mass : (n,) float64, C, 0 where lost, and kg, macro-charges; cloud : (n,) int64
    external : (3, n) float64, V/m, the fields from outside at the charges
    softening2 : e^2, m^2, e a length in the frame; constant : 1/(4 pi eps0); light2 : c^2
    ahead : s by which `velocity` lies before the time the frames are wanted for; :data:`HELD` to
        leave the frames as they are, where they are known
    bunch : (clouds,) int64, to which bunch a cloud belongs
    levels : whether the pair sum finds potentials, where it is given a fourth row
    frames : (bunches + 1, COLUMNS) float64, see frame_table.py, changed
    work_rows : (ROWS, n) float64, overwritten
    out_pairs : (3, n) float64, V/m, overwritten: (3)
    out_coulomb : the same array; with several bunches another, overwritten: (3) and (6)
    """
    n, bunches = charge.size, frames.shape[0] - 1
    every = frames[bunches]
    for b in range(bunches):
        for k in range(3):
            frames[b, BEFORE + k] = frames[b, PROPER + k]
    _take_frames(position, velocity, charge, mass, cloud, external, light2, ahead, bunch, frames)
    several = bunches > 1
    for b in range(bunches):
        for k in range(3):
            frames[b, GIVEN + k] = 0.0
    for k in range(WORK + 1):
        every[k] = 0.0
    others = work_rows[OTHERS : OTHERS + 3]
    if several:
        for k in range(3):
            for i in range(n):
                others[k, i] = 0.0
    place, own = work_rows[PLACE : PLACE + 3], work_rows[CHARGE]
    field, level = work_rows[FOUND : FOUND + 3], work_rows[FOUND + 3]
    for b in range(bunches):
        row = frames[b]
        stretch(position, row, light2, place)
        for i in range(n):
            own[i] = charge[i] if bunch[cloud[i]] == b else 0.0
        softened = softening2 > 0.0
        if softened and levels:
            pair_sum(place, own, softening2, constant, tiles, work_rows[FOUND : FOUND + 4])
        else:
            pair_sum(place, own, softening2, constant, tiles, field)
            if softened and n >= THREADED:
                threaded_potentials(place, own, softening2, constant, level)
            elif softened:
                potentials(place, own, softening2, constant, level)
        work = _brought_back(
            b,
            position,
            charge,
            cloud,
            bunch,
            place,
            field,
            level,
            softened,
            light2,
            row,
            every,
            out_pairs,
        )
        every[WORK] += work
        if several:
            _add_to_others(b, cloud, bunch, field, light2, frames, others)
    if several:
        _sum_others(position, charge, cloud, bunch, others, frames)
        for k in range(3):
            for i in range(n):
                out_coulomb[k, i] = out_pairs[k, i] + others[k, i]


@outer_kernel
def stretch(position: np.ndarray, row: np.ndarray, light2: float, out_place: np.ndarray) -> None:
    """Places in a bunch's frame, eq. (1); row : its row of the table; out_place : overwritten."""
    ux, uy, uz = row[PROPER], row[PROPER + 1], row[PROPER + 2]
    factor = 1.0 / ((1.0 + row[LORENTZ]) * light2)
    x, y, z = position[0], position[1], position[2]
    for i in range(x.size):
        along = factor * (x[i] * ux + y[i] * uy + z[i] * uz)
        out_place[0, i] = x[i] + along * ux
        out_place[1, i] = y[i] + along * uy
        out_place[2, i] = z[i] + along * uz


@outer_kernel
def _take_frames(
    position: np.ndarray,
    velocity: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    cloud: np.ndarray,
    external: np.ndarray,
    light2: float,
    ahead: float,
    bunch: np.ndarray,
    frames: np.ndarray,
) -> None:
    """Mean places, and where they are not held the mean velocities, `ahead` of now.

    The charges' forces on each other within a bunch do not change its U, so it is known ahead from
    the fields from outside, and from what other bunches did at the sum before.
    """
    bunches = frames.shape[0] - 1
    for b in range(bunches):
        row = frames[b]
        count = total = px = py = pz = fx = fy = fz = cx = cy = cz = 0.0
        for i in range(charge.size):
            if charge[i] != 0.0 and bunch[cloud[i]] == b:
                m, q = mass[i], charge[i]
                count += 1.0
                total += m
                px += m * velocity[0, i]
                py += m * velocity[1, i]
                pz += m * velocity[2, i]
                fx += q * external[0, i]
                fy += q * external[1, i]
                fz += q * external[2, i]
                cx += position[0, i]
                cy += position[1, i]
                cz += position[2, i]
        row[MASS] = total
        row[RATES], row[RATES + 1], row[RATES + 2] = fx, fy, fz
        if count == 0.0:
            continue
        row[CENTRE], row[CENTRE + 1], row[CENTRE + 2] = cx / count, cy / count, cz / count
        if ahead < HELD or row[KNOWN] == 0.0:
            h = ahead if ahead < HELD else 0.0
            row[PROPER] = (px + h * (fx + row[GIVEN])) / total
            row[PROPER + 1] = (py + h * (fy + row[GIVEN + 1])) / total
            row[PROPER + 2] = (pz + h * (fz + row[GIVEN + 2])) / total
        if row[KNOWN] == 0.0:
            for k in range(3):
                row[BEFORE + k] = row[PROPER + k]
            row[KNOWN] = 1.0
        u2 = row[PROPER] ** 2 + row[PROPER + 1] ** 2 + row[PROPER + 2] ** 2
        row[LORENTZ] = math.sqrt(1.0 + u2 / light2)


@outer_kernel
def _brought_back(
    b: int,
    position: np.ndarray,
    charge: np.ndarray,
    cloud: np.ndarray,
    bunch: np.ndarray,
    place: np.ndarray,
    field: np.ndarray,
    level: np.ndarray,
    softened: bool,
    light2: float,
    row: np.ndarray,
    every: np.ndarray,
    out_pairs: np.ndarray,
) -> float:
    """Forces (3), energy (4), its slope (5), torque; returns the change of W by that of U, J.

    Without softening the potentials are not needed: sum Q x'.E' is the energy of all pairs, since
    it falls with the inverse of lengths.
    """
    ux, uy, uz, lorentz = row[PROPER], row[PROPER + 1], row[PROPER + 2], row[LORENTZ]
    less = 1.0 / lorentz
    back = less / ((1.0 + lorentz) * light2)
    ax, ay, az = row[CENTRE], row[CENTRE + 1], row[CENTRE + 2]
    along = (ax * ux + ay * uy + az * uz) / ((1.0 + lorentz) * light2)
    bx, by, bz = ax + along * ux, ay + along * uy, az + along * uz
    energy = sx = sy = sz = tx = ty = tz = 0.0
    for i in range(charge.size):
        if bunch[cloud[i]] != b:
            continue
        x, y, z, q = position[0, i], position[1, i], position[2, i], charge[i]
        ex, ey, ez = field[0, i], field[1, i], field[2, i]
        forward = ex * ux + ey * uy + ez * uz
        fx = less * ex + back * forward * ux
        fy = less * ey + back * forward * uy
        fz = less * ez + back * forward * uz
        out_pairs[0, i], out_pairs[1, i], out_pairs[2, i] = fx, fy, fz
        tx += q * (y * fz - z * fy)
        ty += q * (z * fx - x * fz)
        tz += q * (x * fy - y * fx)
        if softened:
            energy += 0.5 * q * level[i]
        else:
            energy += q * (
                (place[0, i] - bx) * ex + (place[1, i] - by) * ey + (place[2, i] - bz) * ez
            )
        sx += q * (x - ax) * forward
        sy += q * (y - ay) * forward
        sz += q * (z - az) * forward
    every[TWIST] += tx
    every[TWIST + 1] += ty
    every[TWIST + 2] += tz
    row[ENERGY] = less * energy
    slow = -less * less / light2
    change = 0.0
    for k in range(3):
        spread = sx if k == 0 else sy if k == 1 else sz
        slope = slow * (row[ENERGY] * row[PROPER + k] + spread)
        step = row[PROPER + k] - row[BEFORE + k]
        if step != 0.0:
            change += 0.5 * (row[SLOPE + k] + slope) * step
        row[SLOPE + k] = slope
    return change


@outer_kernel
def _add_to_others(
    b: int,
    cloud: np.ndarray,
    bunch: np.ndarray,
    field: np.ndarray,
    light2: float,
    frames: np.ndarray,
    others: np.ndarray,
) -> None:
    """What bunch `b` pushes the charges of others with, eq. (6); others : (3, n), added to."""
    row = frames[b]
    ux, uy, uz, lorentz = row[PROPER], row[PROPER + 1], row[PROPER + 2], row[LORENTZ]
    along = 1.0 / ((1.0 + lorentz) * light2)
    vx, vy, vz = ux / lorentz, uy / lorentz, uz / lorentz
    for i in range(cloud.size):
        a = bunch[cloud[i]]
        if a == b:
            continue
        their = frames[a]
        g = their[LORENTZ]
        wx, wy, wz = their[PROPER] / g, their[PROPER + 1] / g, their[PROPER + 2] / g
        forward = along * (field[0, i] * ux + field[1, i] * uy + field[2, i] * uz)
        ex = lorentz * field[0, i] - forward * ux
        ey = lorentz * field[1, i] - forward * uy
        ez = lorentz * field[2, i] - forward * uz
        work = (wx * ex + wy * ey + wz * ez) / light2
        held = 1.0 - (wx * vx + wy * vy + wz * vz) / light2
        others[0, i] += ex * held + work * vx
        others[1, i] += ey * held + work * vy
        others[2, i] += ez * held + work * vz


@outer_kernel
def _sum_others(
    position: np.ndarray,
    charge: np.ndarray,
    cloud: np.ndarray,
    bunch: np.ndarray,
    others: np.ndarray,
    frames: np.ndarray,
) -> None:
    """Force on each bunch by others, and force and torque of all of that."""
    every = frames[frames.shape[0] - 1]
    for i in range(charge.size):
        q = charge[i]
        x, y, z = position[0, i], position[1, i], position[2, i]
        fx, fy, fz = q * others[0, i], q * others[1, i], q * others[2, i]
        row = frames[bunch[cloud[i]]]
        row[GIVEN] += fx
        row[GIVEN + 1] += fy
        row[GIVEN + 2] += fz
        every[PUSH] += fx
        every[PUSH + 1] += fy
        every[PUSH + 2] += fz
        every[TWIST] += y * fz - z * fy
        every[TWIST + 1] += z * fx - x * fz
        every[TWIST + 2] += x * fy - y * fx
