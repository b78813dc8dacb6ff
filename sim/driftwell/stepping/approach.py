"""Which charges come near enough to an electrode for their paths to be followed.

A step's path (path.py) stays within

    reach = |x1 - x0| + h (|v0| + |v1|) / 2                                                 (1)

of where the step begins, as long as velocity and acceleration at its ends do not contradict each
other: twice what the quintic needs, whose control points lie 2 h v / 5 + h^2 a / 20 from its ends.
A charge whose distance to the nearest surface is greater is left alone; all others are followed.

Distances are dear, so every charge has a *clearance*, a lower bound of its distance: what was last
found, less the way made since. Only where that does not exceed the reach is the distance asked for
again. So the clearance saves time and decides nothing: with any other lower bound, and zero is one,
the same charges are followed.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.geometry.body_table import BodyTable
from driftwell.geometry.distance import nearest_body
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
    light2, half = plan.light2, 0.5 * h
    near = 0
    for i in range(first, last):
        dx, dy, dz = x[i] - old_x[i], y[i] - old_y[i], z[i] - old_z[i]
        way = math.sqrt(dx * dx + dy * dy + dz * dz)
        before = old_ux[i] * old_ux[i] + old_uy[i] * old_uy[i] + old_uz[i] * old_uz[i]
        after = ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]
        speeds = math.sqrt(before * light2 / (light2 + before))
        speeds += math.sqrt(after * light2 / (light2 + after))
        reach = way + half * speeds
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
        way2 = before = after = 0.0
        for axis in range(3):
            way2 += (x[axis, i] - old[axis, i]) ** 2
            before += old_u[axis, i] ** 2
            after += u[axis, i] ** 2
        way = math.sqrt(way2)
        speeds = math.sqrt(before * plan.light2 / (plan.light2 + before))
        speeds += math.sqrt(after * plan.light2 / (plan.light2 + after))
        distance, _, _ = nearest_body(bodies, old[0, i], old[1, i], old[2, i])
        if distance <= way + 0.5 * h * speeds:
            followed += 1
            continue
        left = distance * (1.0 - _SURE) - bodies.touch[0] - way * (1.0 + _SURE)
        work.clearance[i] = max(left, 0.0)
    return followed
