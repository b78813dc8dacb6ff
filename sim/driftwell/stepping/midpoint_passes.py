"""Passes over all charges in steps of the scheme midpoint-rotation.

The charges are cut into blocks, few ones too, so that the time loop needs none of this code in it:
it is handed a function as a pointer, one that shares the blocks among all threads where charges are
many and one that does not where they are few. Where charges do not push each other, a block does
the whole of a step while its charges are in a core's own cache, and a stretch of it several steps
where nobody looks at charges in between (leaps.py).
"""

from __future__ import annotations

from typing import Any

import numba
import numpy as np
from numba import prange

from driftwell.fields.table import FieldTable
from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import inner_kernel, kernel, outer_kernel, threaded_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import WORK_INDUCED, enter_rates, settle
from driftwell.stepping.approach import near_bodies
from driftwell.stepping.blocks import (
    AFTER,
    BLOCK,
    CROSSED,
    ENERGY,
    FORCE,
    INDUCED,
    MANY,
    POWER,
    SUMS,
    add_six,
    added,
    signed,
    six_added,
    unsigned,
)
from driftwell.stepping.drift import enter_magnets, kick
from driftwell.stepping.forces import (
    external_forces,
    magnetised,
    magnets_change,
    shaped_magnetic,
    uniform_magnetic,
)
from driftwell.stepping.midpoint_rotation import (
    COULOMB,
    EXTERNAL,
    SHAPED,
    half_drift,
    induced_work_done,
    keep_start,
    turn_and_drift,
)
from driftwell.stepping.motion import (
    CURSOR_INDUCED,
    CURSOR_STEP,
    Charges,
    Fields,
    Plan,
    Work,
)
from driftwell.stepping.passes import (
    CROSS,
    PUSH_APART,
    TAKE,
    Passes,
    crossed,
    over_blocks,
)
from driftwell.stepping.plain_fields import are_plain, take_plain_fields
from driftwell.walls.table import SurfaceTable

_TO_MIDDLE, _THROUGH, WHOLE = 16, 17, 18
"""Passes; from WHOLE on that many whole steps more than one."""
STRETCH = 512
"""Charges that a step's parts take in turn: what it keeps of them stays in the nearest cache."""


def midpoint_passes_over(
    n: int,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    work: Work,
) -> Passes:
    """The passes over `n` charges, as a pointer."""
    types: Any = numba.types
    typeof: Any = numba.typeof
    moved = [typeof(each) for each in (plan, *fields, surfaces, bodies, charges, work)]
    numbers = [types.int64, types.boolean, *[types.float64] * 3]
    function = _shared_blocks if n >= MANY else _blocks
    return CompiledFunction(function, types.void(*moved, *numbers))


@inner_kernel
def to_middle(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    together: bool,
    keep: bool,
    start: float,
    inside: float,
    h: float,
    work: Work,
) -> None:
    """Move to the middle of the step that begins at `start`, and find the fields there.

    Where charges do not push each other (`together`), go through to its end at once.

    keep : note the state at the beginning, for the path through the step
    """
    what = _TO_MIDDLE if together else WHOLE
    changing = magnetised(fields) and magnets_change(fields, start + 0.5 * h, inside)
    work.cursor[CURSOR_INDUCED] = 1 if changing else 0
    if passes is not None:
        over_blocks(
            passes, plan, fields, surfaces, bodies, charges, work, what, keep, h, start, inside
        )


@inner_kernel
def from_middle(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    together: bool,
    start: float,
    inside: float,
    h: float,
    work: Work,
) -> None:
    """Change the momenta in the middle, move on to the end, and account what was given."""
    if passes is not None and together:
        over_blocks(
            passes, plan, fields, surfaces, bodies, charges, work, _THROUGH, False, h, start, inside
        )
    enter_sums(magnetised(fields), h, work.block_sums, work)


@outer_kernel
def enter_sums(magnets: bool, h: float, sums: np.ndarray, work: Work) -> None:
    """Enter the sums over all blocks."""
    enter_rates(added(sums, POWER), six_added(sums, FORCE), work.rate)
    work.pending[0] = h
    settle(work.rate, work.pending, work.total, work.carry)
    if magnets:
        enter_magnets(1.0, six_added(sums, AFTER), work.total, work.carry)
        if work.cursor[CURSOR_INDUCED] != 0:
            add_compensated(work.total, work.carry, WORK_INDUCED, added(sums, INDUCED))


@outer_kernel
def _block(
    b: int,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    work: Work,
    what: int,
    asked: bool,
    h: float,
    t: float,
    inside: float,
) -> None:
    """One block's part of a pass; its sums into its row."""
    start = b * BLOCK
    end = min(start + BLOCK, charges.charge.size)
    if what == CROSS:
        row = work.block_sums[b]
        row[CROSSED] = crossed(surfaces, charges, work, unsigned(start), unsigned(end))
        if bodies.whole.shape[0] > 0:
            row[CROSSED] += near_bodies(
                plan, bodies, charges, h, work, unsigned(start), unsigned(end)
            )
        return
    if what == PUSH_APART:
        kick(charges, work.coulomb, h, unsigned(start), unsigned(end))
        return
    count = max(what - WHOLE, 0) + 1
    for k in range(count):
        for entry in range(AFTER if what == _THROUGH else 0, SUMS):
            work.leap_sums[k, b, entry] = 0.0
    plain = are_plain(fields.electric)
    for first in range(start, end, STRETCH):
        last = min(first + STRETCH, end)
        for k in range(count):
            since = t if count == 1 else t + (work.cursor[CURSOR_STEP] + k) * h
            _stretch(
                plan,
                fields,
                charges,
                work,
                min(what, WHOLE),
                asked,
                plain,
                k > 0,
                k + 1 < count,
                h,
                since,
                inside,
                first,
                last,
                work.leap_sums[k, b],
            )


@inner_kernel
def _stretch(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    work: Work,
    what: int,
    asked: bool,
    plain: bool,
    drifted: bool,
    on: bool,
    h: float,
    t: float,
    inside: float,
    first: int,
    last: int,
    row: np.ndarray,
) -> None:
    """A part of a block; its sums are added to the row.

    plain : all electric fields are, see plain_fields.py
    drifted : charges are in the middle already; on : move them to that of the next step
    """
    changing = work.cursor[CURSOR_INDUCED] != 0
    pushed = fields.electric.kind.size > 0 or changing
    if what in (_TO_MIDDLE, WHOLE):
        if asked or changing:
            keep_start(charges, work, first, last)
        if not drifted:
            half_drift(charges.position, charges.velocity, plan.light2, h, first, last)
    middle = t if what == TAKE else t + 0.5 * h
    if plain and pushed and not changing and what in (_TO_MIDDLE, WHOLE):
        add_six(take_plain_fields(fields.electric, charges, first, last, work.external), FORCE, row)
    elif what == TAKE or (pushed and what != _THROUGH):
        take = asked if what == TAKE else changing
        power, energy, force = external_forces(
            fields, charges, middle, inside, take, work, unsigned(first), unsigned(last)
        )
        row[POWER] += power
        row[ENERGY] += energy
        add_six(force, FORCE, row)
    if what in (_THROUGH, WHOLE):
        acting = EXTERNAL if pushed else 0
        if what == _THROUGH:
            acting |= COULOMB
        magnet = uniform_magnetic(fields, middle, inside)
        if fields.magnetic.kind.size > 0:
            acting |= SHAPED
            shaped_magnetic(
                fields, charges, middle, inside, work.spare, unsigned(first), unsigned(last)
            )
        given = turn_and_drift(
            charges,
            work.external,
            work.coulomb,
            work.spare,
            acting,
            magnet,
            plan.light2,
            h,
            on,
            first,
            last,
            work.old_field,
        )
        add_six(given, AFTER, row)
        if changing:
            row[INDUCED] += induced_work_done(plan, charges, work, h, first, last)


@kernel
def _blocks(
    plan: Plan,
    electric: FieldTable,
    uniform: FieldTable,
    magnetic: FieldTable,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    work: Work,
    what: int,
    asked: bool,
    h: float,
    t: float,
    inside: float,
) -> None:
    """A pass over all blocks."""
    fields = Fields(electric, uniform, magnetic)
    for b in range(work.block_sums.shape[0]):
        _block(b, plan, fields, surfaces, bodies, charges, work, what, asked, h, t, inside)


@threaded_kernel
def _shared_blocks(
    plan: Plan,
    electric: FieldTable,
    uniform: FieldTable,
    magnetic: FieldTable,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    work: Work,
    what: int,
    asked: bool,
    h: float,
    t: float,
    inside: float,
) -> None:
    """A pass over all blocks, on all of numba's threads, which take no tuples of tuples."""
    for b in prange(work.block_sums.shape[0]):
        _block(
            signed(b),
            plan,
            Fields(electric, uniform, magnetic),
            surfaces,
            bodies,
            charges,
            work,
            what,
            asked,
            h,
            t,
            inside,
        )
