"""Several steps of the scheme midpoint-rotation in one call, where nothing else looks at charges.

Without walls, births, processes and the charges' own field, with magnets at rest, each charge goes
its own way from mark to mark. A stretch of the charges then takes many steps while it is in a
core's nearest cache, before the next stretch does; the drifts on both sides of a step's end are
one pass. Neither changes a bit: what each charge undergoes is the same in the same order, and the
sums of each step over the blocks are kept apart, and entered step by step.

So it does not matter either where a call ends: at a mark, when the budget of steps is used up, or
where charges are looked at for faults.
"""

from __future__ import annotations

import numpy as np

from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import inner_kernel
from driftwell.stepping.births import Births
from driftwell.stepping.blocks import LEAP
from driftwell.stepping.forces import at_rest, magnetised
from driftwell.stepping.midpoint_passes import WHOLE, enter_sums
from driftwell.stepping.motion import CURSOR_BIRTH, CURSOR_INDUCED, Charges, Fields, Plan, Work
from driftwell.stepping.passes import Passes, over_blocks
from driftwell.walls.table import SurfaceTable


@inner_kernel
def may_leap(
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    births: Births,
    work: Work,
) -> bool:
    """Whether nothing looks at the charges between two marks but the fields, and magnets rest."""
    return (
        plan.midway != 0
        and plan.coulomb == 0
        and plan.images == 0
        and plan.frames == 0
        and plan.processes == 0
        and plan.cell_axis < 0
        and surfaces.kind.size == 0
        and bodies.whole.shape[0] == 0
        and work.cursor[CURSOR_BIRTH] >= births.time.size
        and not np.isfinite(births.horizon[0])
        and at_rest(fields.uniform)
        and at_rest(fields.magnetic)
    )


@inner_kernel
def leap(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    mark: float,
    inside: float,
    h: float,
    most: int,
    work: Work,
) -> int:
    """Take up to `most` whole steps from that of the cursor on; how many, or 0 if not two at least.

    Each charge is moved as by single steps, and each step's sums are entered in turn.

    mark : s, the time that steps are counted from
    """
    count = 0
    if passes is not None and most > 1:
        count = min(most, LEAP)
        what = WHOLE + count - 1
        work.cursor[CURSOR_INDUCED] = 0
        over_blocks(
            passes, plan, fields, surfaces, bodies, charges, work, what, False, h, mark, inside
        )
        for k in range(count):
            enter_sums(magnetised(fields), h, work.leap_sums[k], work)
    return count
