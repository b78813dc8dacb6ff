"""Forces on the charges at one time: the fields' and the charges' own.

The fields' work on a stretch of the charges, `first` to `last`, and return their sums over it: the
whole of few charges, a block of many (passes.py).
"""

from __future__ import annotations

import numpy as np

from driftwell.coulomb.direct import SMALL, PairSum, small_field
from driftwell.fields.table import FieldTable, electric_field, induced_field, magnetic_field
from driftwell.kernels import inner_kernel, inner_sum_kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.kernels.waveform import CONSTANT, waveform
from driftwell.stepping.accounts import (
    ANGULAR_CELL,
    IMPULSE_IMAGES,
    TORQUE_IMAGES,
    Six,
)
from driftwell.stepping.frames import take_frames
from driftwell.stepping.motion import Charges, Fields, Plan, Work


@inner_kernel
def external_forces(
    fields: Fields,
    charges: Charges,
    t: float,
    inside: float,
    changing: bool,
    work: Work,
    first: int,
    last: int,
) -> tuple[float, float, Six]:
    """The fields' E at charges; overwrites their part of ``work.external`` and ``work.induced``.

    changing : whether a magnet changes, see :func:`magnets_change`

    Returns the drives' power, W, the energy in the fields, J, and :func:`force_and_torque`.
    """
    out = work.external
    for axis in range(3):
        row = out[axis]
        for i in range(first, last):
            row[i] = 0.0
    power = 0.0
    energy = 0.0
    table = fields.electric
    for f in range(table.kind.size):
        w, rate = waveform(table.wave_kind[f], table.wave_parameter[f], table.wave_data, t, inside)
        total = electric_field(
            table.kind[f],
            table.parameter[f],
            table.data[table.first[f] : table.first[f + 1]],
            w,
            charges.position,
            charges.charge,
            first,
            last,
            out,
        )
        power += rate * total
        energy += w * total
    if changing:
        _induced(fields, charges, t, inside, work, first, last)
    return power, energy, force_and_torque(charges, out, first, last)


@inner_kernel
def at_rest(table: FieldTable) -> bool:
    """Whether none of the fields ever changes."""
    resting = True
    for f in range(table.kind.size):
        resting &= table.wave_kind[f] == CONSTANT
    return resting


@inner_kernel
def magnetised(fields: Fields) -> bool:
    """Whether there is any magnet."""
    return fields.uniform.kind.size + fields.magnetic.kind.size > 0


@outer_kernel
def magnets_change(fields: Fields, t: float, inside: float) -> bool:
    """Whether any magnet changes at a time, so that it induces an electric field."""
    for table in (fields.uniform, fields.magnetic):
        for f in range(table.kind.size):
            _, rate = waveform(
                table.wave_kind[f], table.wave_parameter[f], table.wave_data, t, inside
            )
            if rate != 0.0:
                return True
    return False


@outer_kernel
def magnetic_at(
    fields: Fields, charges: Charges, i: int, t: float, inside: float, work: Work
) -> tuple[float, float, float]:
    """All magnetic fields at the place of charge `i`, T; overwrites its part of ``work.spare``."""
    bx, by, bz = uniform_magnetic(fields, t, inside)
    table = fields.magnetic
    spare = work.spare
    spare[0, i] = spare[1, i] = spare[2, i] = 0.0
    for f in range(table.kind.size):
        w, _ = waveform(table.wave_kind[f], table.wave_parameter[f], table.wave_data, t, inside)
        magnetic_field(
            table.kind[f],
            table.parameter[f],
            table.data[table.first[f] : table.first[f + 1]],
            w,
            charges.position,
            i,
            i + 1,
            spare,
        )
    return bx + spare[0, i], by + spare[1, i], bz + spare[2, i]


@outer_kernel
def _induced(
    fields: Fields,
    charges: Charges,
    t: float,
    inside: float,
    work: Work,
    first: int,
    last: int,
) -> None:
    """Electric fields of changing magnets, kept apart for the account of their work."""
    for axis in range(3):
        row = work.induced[axis]
        for i in range(first, last):
            row[i] = 0.0
    for table in (fields.uniform, fields.magnetic):
        for f in range(table.kind.size):
            _, rate = waveform(
                table.wave_kind[f], table.wave_parameter[f], table.wave_data, t, inside
            )
            if rate != 0.0:
                induced_field(
                    table.kind[f],
                    table.parameter[f],
                    table.data[table.first[f] : table.first[f + 1]],
                    rate,
                    charges.position,
                    first,
                    last,
                    work.induced,
                )
    for axis in range(3):
        row, out = work.induced[axis], work.external[axis]
        for i in range(first, last):
            out[i] += row[i]


@outer_kernel
def induced_by_jumps(
    fields: Fields, charges: Charges, t: float, before: float, after: float, work: Work
) -> None:
    """What magnets that jump at time `t` induce, as an impulse, V s/m; overwrites ``work.induced``.

    `before` and `after` lie inside the pieces of the waveforms on both sides of `t`.
    """
    for axis in range(3):
        row = work.induced[axis]
        for i in range(row.size):
            row[i] = 0.0
    for table in (fields.uniform, fields.magnetic):
        for f in range(table.kind.size):
            kind, parameter = table.wave_kind[f], table.wave_parameter[f]
            old, _ = waveform(kind, parameter, table.wave_data, t, before)
            new, _ = waveform(kind, parameter, table.wave_data, t, after)
            if new != old:
                induced_field(
                    table.kind[f],
                    table.parameter[f],
                    table.data[table.first[f] : table.first[f + 1]],
                    new - old,
                    charges.position,
                    0,
                    charges.charge.size,
                    work.induced,
                )


@inner_sum_kernel
def force_and_torque(charges: Charges, field: np.ndarray, first: int, last: int) -> Six:
    """Sums over charges of Q E and x cross Q E."""
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    ex, ey, ez = field[0], field[1], field[2]
    q = charges.charge
    fx = fy = fz = 0.0
    tx = ty = tz = 0.0
    for i in range(first, last):
        px, py, pz = q[i] * ex[i], q[i] * ey[i], q[i] * ez[i]
        fx += px
        fy += py
        fz += pz
        tx += y[i] * pz - z[i] * py
        ty += z[i] * px - x[i] * pz
        tz += x[i] * py - y[i] * px
    return fx, fy, fz, tx, ty, tz


@inner_kernel
def coulomb_forces(
    pair_sum: PairSum,
    images: CompiledFunction,
    frame_sum: CompiledFunction,
    ahead: float,
    plan: Plan,
    charges: Charges,
    work: Work,
) -> None:
    """The charges' field at each other, with their images; overwrites ``work.coulomb``.

    ahead : s to the time at which bunches' frames are wanted, see coulomb/frame_sum.py
    """
    if plan.frames != 0:
        take_frames(pair_sum, frame_sum, ahead, plan, charges, work)
        return
    _pair_forces(pair_sum, plan, charges, work)
    if plan.images != 0:
        take_images(images, plan, charges, work)
    elif plan.cell_axis >= 0:
        _take_torque(charges, work)


@outer_kernel
def take_images(images: CompiledFunction, plan: Plan, charges: Charges, work: Work) -> float:
    """Field and potential of the images, their force and torque, and the sum of all with pairs.

    Overwrites ``work.image``, ``work.image_force`` and ``work.coulomb``; returns the energy, J.
    """
    out, image, pairs = work.coulomb, work.image, work.pairs
    images(
        charges.position, charges.charge, plan.constant, work.image_table, work.image_work, image
    )
    six = force_and_torque(charges, image, 0, charges.charge.size)
    for k in range(6):
        work.image_force[k] = six[k]
    energy = 0.0
    for i in range(charges.charge.size):
        energy += 0.5 * charges.charge[i] * image[3, i]
    for axis in range(3):
        for i in range(charges.charge.size):
            out[axis, i] = pairs[axis, i] + image[axis, i]
    return energy


@outer_kernel
def _take_torque(charges: Charges, work: Work) -> None:
    """Keep force and torque of the pairs: across the ends of a cell they are no central forces."""
    six = force_and_torque(charges, work.pairs, 0, charges.charge.size)
    for k in range(6):
        work.image_force[k] = six[k]


@outer_kernel
def enter_images(h: float, plan: Plan, work: Work) -> None:
    """Account what images of either kind gave the charges in a kick of length `h`.

    In a cell that is a torque alone, of the pairs across its ends: none about its axis.
    """
    force = work.image_force
    if plan.cell_axis >= 0:
        for k in range(3):
            if k != plan.cell_axis:
                add_compensated(work.total, work.carry, ANGULAR_CELL + k, h * force[3 + k])
        return
    for k in range(3):
        add_compensated(work.total, work.carry, IMPULSE_IMAGES + k, h * force[k])
        add_compensated(work.total, work.carry, TORQUE_IMAGES + k, h * force[3 + k])


@inner_kernel
def _pair_forces(pair_sum: PairSum, plan: Plan, charges: Charges, work: Work) -> None:
    """The field of the charges at each other; overwrites ``work.pairs``."""
    if plan.coulomb == 0:
        return
    if charges.charge.size <= SMALL and plan.coulomb == 1:
        small_field(
            charges.position,
            charges.charge,
            plan.softening2,
            plan.constant,
            work.tiles[0],
            work.pairs,
        )
    else:
        pair_sum(
            charges.position,
            charges.charge,
            plan.softening2,
            plan.constant,
            work.tiles,
            work.pairs,
        )


@inner_kernel
def uniform_magnetic(fields: Fields, t: float, inside: float) -> tuple[float, float, float]:
    """The sum of all uniform magnetic fields at a time, T."""
    bx = by = bz = 0.0
    table = fields.uniform
    for f in range(table.kind.size):
        w, _ = waveform(table.wave_kind[f], table.wave_parameter[f], table.wave_data, t, inside)
        bx += w * table.parameter[f, 3]
        by += w * table.parameter[f, 4]
        bz += w * table.parameter[f, 5]
    return bx, by, bz


@outer_kernel
def shaped_magnetic(
    fields: Fields,
    charges: Charges,
    t: float,
    inside: float,
    out_field: np.ndarray,
    first: int,
    last: int,
) -> None:
    """The sum of all magnetic fields that vary in space, at charges; overwrites their part."""
    for axis in range(3):
        row = out_field[axis]
        for i in range(first, last):
            row[i] = 0.0
    table = fields.magnetic
    for f in range(table.kind.size):
        w, _ = waveform(table.wave_kind[f], table.wave_parameter[f], table.wave_data, t, inside)
        magnetic_field(
            table.kind[f],
            table.parameter[f],
            table.data[table.first[f] : table.first[f + 1]],
            w,
            charges.position,
            first,
            last,
            out_field,
        )
