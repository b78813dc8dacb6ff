"""Re-entry: in a cell that repeats, what leaves at one end comes in at the other.

It happens after the last drift of a step, before the forces are taken. The pushes of all images
stay what they are; the energy in the fields changes by Q (phi_new - phi_old), angular momentum by
the jump times the momentum, and both are entered. The path of the step is moved along, so that
surfaces see a charge that comes from before the end it enters at. One that meets a surface before
the end it leaves at is put back in the next step.
"""

from __future__ import annotations

import math
from typing import Any

import numba
import numpy as np

from driftwell.fields.table import FieldTable, electric_field
from driftwell.kernels import inner_kernel, kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.kernels.waveform import waveform
from driftwell.stepping.accounts import ANGULAR_CELL, ENERGY_CELL, enter_vector
from driftwell.stepping.motion import Charges, Fields, Plan, Work
from driftwell.walls.table import SurfaceTable, level


def reentry(
    plan: Plan, fields: Fields, surfaces: SurfaceTable, charges: Charges, work: Work
) -> CompiledFunction:
    """What the time loop calls after the last drift of a step; nothing is done without a cell."""
    types: Any = numba.types
    typeof: Any = numba.typeof
    given = [typeof(each) for each in (plan, fields.electric, surfaces, charges, work)]
    signature = types.void(*given, types.float64, types.float64)
    return CompiledFunction(put_back if plan.cell_axis >= 0 else stay, signature)


@kernel
def stay(
    plan: Plan,
    electric: FieldTable,
    surfaces: SurfaceTable,
    charges: Charges,
    work: Work,
    t: float,
    inside: float,
) -> None:
    """No cell: nobody comes in anywhere."""


@kernel
def put_back(
    plan: Plan,
    electric: FieldTable,
    surfaces: SurfaceTable,
    charges: Charges,
    work: Work,
    t: float,
    inside: float,
) -> None:
    """Put all charges that are beyond an end back by whole periods, at time `t`."""
    x = charges.position[plan.cell_axis]
    begin, period = plan.cell_begin, plan.cell_length
    for i in range(x.size):
        # written so that what is no number stays where it is
        if not (x[i] < begin or x[i] >= begin + period) or charges.alive[i] != 1:
            continue
        if _meets_surface(surfaces, charges, i, work):
            continue
        place = x[i] - period * math.floor((x[i] - begin) / period)
        if place < begin or place >= begin + period:  # by rounding
            place = begin
        _jump(plan, electric, charges, i, place - x[i], place, t, inside, work)
        work.old_position[plan.cell_axis, i] += place - x[i]
        x[i] = place
        _look_again(surfaces, i, work)


@outer_kernel
def _meets_surface(surfaces: SurfaceTable, charges: Charges, i: int, work: Work) -> bool:
    """Whether a charge is on another side of a surface than at the beginning of the step."""
    for s in range(surfaces.kind.size):
        there = level(
            surfaces.kind[s],
            surfaces.parameter[s],
            charges.position[0, i],
            charges.position[1, i],
            charges.position[2, i],
        )
        if work.side[s, i] != 0 and work.side[s, i] != (1 if there > 0.0 else -1):
            return True
    return False


@outer_kernel
def _look_again(surfaces: SurfaceTable, i: int, work: Work) -> None:
    """Set a charge's sides of all surfaces to those where its path now begins."""
    old = work.old_position
    for s in range(surfaces.kind.size):
        there = level(surfaces.kind[s], surfaces.parameter[s], old[0, i], old[1, i], old[2, i])
        work.side[s, i] = 1 if there > 0.0 else -1
    if work.clearance.size > 0:
        work.clearance[i] = 0.0


@outer_kernel
def _jump(
    plan: Plan,
    electric: FieldTable,
    charges: Charges,
    i: int,
    way: float,
    place: float,
    t: float,
    inside: float,
    work: Work,
) -> None:
    """Enter what changes when charge `i` jumps a `way` along the axis; it stays where it is."""
    axis = plan.cell_axis
    m = charges.mass[i]
    px, py = m * charges.velocity[0, i], m * charges.velocity[1, i]
    pz = m * charges.velocity[2, i]
    if axis == 0:
        enter_vector(ANGULAR_CELL, 0.0, -way * pz, way * py, work.total, work.carry)
    elif axis == 1:
        enter_vector(ANGULAR_CELL, way * pz, 0.0, -way * px, work.total, work.carry)
    else:
        enter_vector(ANGULAR_CELL, -way * py, way * px, 0.0, work.total, work.carry)
    kept = charges.position[axis, i]
    change = -_energy(electric, charges, i, t, inside, work)
    charges.position[axis, i] = place
    change += _energy(electric, charges, i, t, inside, work)
    charges.position[axis, i] = kept
    add_compensated(work.total, work.carry, ENERGY_CELL, change)


@inner_kernel
def _index(i: int) -> Any:
    """`i` without a sign, as passes over all charges have it."""
    return np.uint64(i)


@outer_kernel
def _energy(
    electric: FieldTable, charges: Charges, i: int, t: float, inside: float, work: Work
) -> float:
    """Energy of a charge in the fields where it is, J; overwrites its part of ``work.spare``."""
    for axis in range(3):
        work.spare[axis, i] = 0.0
    energy = 0.0
    for f in range(electric.kind.size):
        w, _ = waveform(
            electric.wave_kind[f], electric.wave_parameter[f], electric.wave_data, t, inside
        )
        if w != 0.0:
            energy += w * electric_field(
                electric.kind[f],
                electric.parameter[f],
                electric.data[electric.first[f] : electric.first[f + 1]],
                w,
                charges.position,
                charges.charge,
                _index(i),
                _index(i + 1),
                work.spare,
            )
    return energy
