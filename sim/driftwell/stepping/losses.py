"""Charges that walls and electrodes took leave all sums, and what they carried is entered.

Each takes its kinetic energy, its energy against all others and in the images, momentum, charge and
count. Of pairs of charges that leave together the energy is entered once.
"""

from __future__ import annotations

import math

from driftwell.coulomb.direct import PairSum, potential_at
from driftwell.kernels import outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import (
    CHARGE_WALLS,
    COUNT_WALLS,
    ENERGY_WALLS,
    MOMENTUM_WALLS,
    enter_vector,
    enter_wall_moment,
)
from driftwell.stepping.forces import take_images
from driftwell.stepping.frames import energy_in_frame
from driftwell.stepping.motion import LEAVING, Charges, Plan, Work, put
from driftwell.walls.table import SurfaceTable, level

MANY_LOST = 1000
"""From this many charges lost in one step on, two sums of the tree beat a direct one for each."""


@outer_kernel
def take_out(
    pair_sum: PairSum,
    images: CompiledFunction,
    plan: Plan,
    surfaces: SurfaceTable,
    charges: Charges,
    work: Work,
) -> None:
    """Take the charges that are LEAVING out of all sums, and put them where they were lost.

    What they carry is entered in the accounts; their energy in the fields is entered by the loop,
    as the difference the renewed forces show.
    """
    if plan.images != 0:
        energy = take_images(images, plan, charges, work)
        add_compensated(work.total, work.carry, ENERGY_WALLS, energy)
    n = charges.alive.size
    one_by_one = plan.coulomb != 0
    if work.levels.shape[1] == n and plan.coulomb != 0:
        leaving = 0
        for i in range(n):
            leaving += charges.alive[i] == LEAVING
        if (leaving >= MANY_LOST and plan.frames == 0) or plan.coulomb == 2:
            one_by_one = False
            _enter_energy_of_many(pair_sum, plan, charges, 1 if leaving == 1 else 2, work)
    for i in range(n):
        if charges.alive[i] == LEAVING:
            if one_by_one:
                if plan.frames != 0:
                    energy = energy_in_frame(i, plan, charges, work)
                else:
                    energy = charges.charge[i] * potential_at(
                        i, charges.position, charges.charge, plan.softening2, plan.constant
                    )
                add_compensated(work.total, work.carry, ENERGY_WALLS, energy)
            _absorb(plan, charges, i, work)
            x, y, z = work.old_position[0, i], work.old_position[1, i], work.old_position[2, i]
            put(charges, i, x, y, z)
            for s in range(surfaces.kind.size):
                there = level(surfaces.kind[s], surfaces.parameter[s], x, y, z)
                work.side[s, i] = 1 if there > 0.0 else -1
    if plan.images != 0:
        energy = take_images(images, plan, charges, work)
        add_compensated(work.total, work.carry, ENERGY_WALLS, -energy)


@outer_kernel
def _enter_energy_of_many(
    pair_sum: PairSum, plan: Plan, charges: Charges, sums: int, work: Work
) -> None:
    """Enter the energy that leaves with the charges LEAVING, all at once.

    It is the sum over them of Q (P + P') / 2, with the potentials P of all charges and P' of those
    that stay; for pairs of leaving ones that counts each pair once. Of one charge alone both are
    the same, and one of the `sums` suffices.
    """
    q, kept = charges.charge, work.spare[0]
    for i in range(q.size):
        kept[i] = q[i]
    for _ in range(sums):
        pair_sum(charges.position, q, plan.softening2, plan.constant, work.tiles, work.levels)
        for i in range(q.size):
            if charges.alive[i] == LEAVING:
                energy = kept[i] * work.levels[3, i] / sums
                add_compensated(work.total, work.carry, ENERGY_WALLS, energy)
                q[i] = 0.0
    for i in range(q.size):
        q[i] = kept[i]


@outer_kernel
def _absorb(plan: Plan, charges: Charges, i: int, work: Work) -> None:
    """Take a charge out of all sums, entering what it carries at the end of the step."""
    ux, uy, uz = charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i]
    x, y, z = charges.position[0, i], charges.position[1, i], charges.position[2, i]
    m = charges.mass[i]
    u2 = ux * ux + uy * uy + uz * uz
    energy = m * u2 / (1.0 + math.sqrt(1.0 + u2 / plan.light2))
    add_compensated(work.total, work.carry, ENERGY_WALLS, energy)
    enter_vector(MOMENTUM_WALLS, m * ux, m * uy, m * uz, work.total, work.carry)
    enter_wall_moment(x, y, z, m * ux, m * uy, m * uz, work.total, work.carry)
    add_compensated(work.total, work.carry, CHARGE_WALLS, charges.charge[i])
    add_compensated(work.total, work.carry, COUNT_WALLS, charges.weight[i])
    charges.alive[i] = 0
    charges.charge[i] = 0.0
    charges.weight[i] = 0.0
    for axis in range(3):
        charges.charge_to_mass[axis, i] = 0.0
        charges.velocity[axis, i] = 0.0
