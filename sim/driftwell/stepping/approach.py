"""Which charges come near enough to an electrode for their paths to be followed.

A step's path (path.py) is no longer than

    reach = |x1 - x0| + h (|v0| + |v1|) / 2                                                 (1)

as long as velocity and acceleration at its ends do not contradict each other: about twice what it
really is. A path that is shorter than the distances to the nearest surface at both its ends
together meets none: all its points lie within one of them of an end. Such charges are left alone,
all others are followed.

Distances are dear, so every charge has a *clearance*, a lower bound of its distance: what was last
found, less the way made since. Only where that does not exceed the reach are the distances asked
for again. So the clearance saves time and decides nothing: with any other lower bound, and zero is
one, the same charges are followed.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.geometry.body_search import ALL, look
from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.stepping.motion import Charges, Plan, Work

FOLLOWED = -1.0
"""The clearance of a charge whose path through the present step is to be followed."""
_SURE = 1e-12
"""Part by which clearances are taken too small, for all that is rounded."""
_KEPT = 1.0 - 1e-15


@inner_kernel
def near_bodies(
    plan: Plan, bodies: BodyTable, charges: Charges, h: float, work: Work, first: int, last: int
) -> int:
    """How many charges are to be followed through the step; their clearance becomes FOLLOWED.

    That of all others then holds where they are at the end of the step.
    """
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    ux, uy, uz = charges.velocity[0], charges.velocity[1], charges.velocity[2]
    old_x, old_y, old_z = work.old_position[0], work.old_position[1], work.old_position[2]
    old_ux, old_uy, old_uz = work.old_velocity[0], work.old_velocity[1], work.old_velocity[2]
    clearance = work.clearance
    light2 = plan.light2
    near = 0
    for i in range(first, last):
        dx, dy, dz = x[i] - old_x[i], y[i] - old_y[i], z[i] - old_z[i]
        way = math.sqrt(dx * dx + dy * dy + dz * dz)
        before = old_ux[i] * old_ux[i] + old_uy[i] * old_uy[i] + old_uz[i] * old_uz[i]
        after = ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]
        reach = _reach(way, before, after, light2, h)
        left = clearance[i]
        far = left > reach
        near += not far
        clearance[i] = left * _KEPT - way * (1.0 + _SURE) if far else FOLLOWED
    if near == 0:
        return 0
    return _look_closer(plan, bodies, charges, h, work, first, last)


@outer_kernel
def _look_closer(
    plan: Plan, bodies: BodyTable, charges: Charges, h: float, work: Work, first: int, last: int
) -> int:
    """Ask for the distance where the clearance is used up; how many are to be followed."""
    x, old, u, old_u = charges.position, work.old_position, charges.velocity, work.old_velocity
    followed = 0
    for i in range(first, last):
        if work.clearance[i] >= 0.0:
            continue
        if charges.alive[i] != 1:
            work.clearance[i] = np.inf
            continue
        way2 = before2 = after2 = 0.0
        for axis in range(3):
            way2 += (x[axis, i] - old[axis, i]) ** 2
            before2 += old_u[axis, i] ** 2
            after2 += u[axis, i] ** 2
        reach = _reach(math.sqrt(way2), before2, after2, plan.light2, h)
        before, _, _ = look(bodies, ALL, old[0, i], old[1, i], old[2, i])
        after, _, _ = look(bodies, ALL, x[0, i], x[1, i], x[2, i])
        if before < 0.0 or after < 0.0 or before + after <= reach:
            followed += 1
        else:
            work.clearance[i] = max(after * (1.0 - _SURE) - bodies.touch[0], 0.0)
    return followed


@inner_kernel
def _reach(way: float, before2: float, after2: float, light2: float, h: float) -> float:
    """Equation (1), from the squares of the proper speeds."""
    speeds = math.sqrt(before2 * light2 / (light2 + before2))
    speeds += math.sqrt(after2 * light2 / (light2 + after2))
    return way + 0.5 * h * speeds
