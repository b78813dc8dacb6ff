"""Passes over all charges: they are pushed, moved, and looked for on the other side of a surface.

Few charges are one stretch, and the code for it is made part of the time loop. MANY are cut into
blocks (blocks.py) that all threads share; a block does the whole of a pass while its charges are in
a core's own cache. Its code stands in one function alone, which the loop is handed as a pointer,
as it is handed the pair sum: sums in lanes would have other bits where they are compiled again, so
one thread runs the very same function.
"""

from __future__ import annotations

from typing import Any

import numba
from numba import prange

from driftwell.fields.table import FieldTable
from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import inner_kernel, outer_kernel, threaded_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import WORK_INDUCED, enter_rates
from driftwell.stepping.approach import near_bodies
from driftwell.stepping.blocks import (
    AFTER,
    BEFORE,
    BLOCK,
    CROSSED,
    ENERGY,
    FORCE,
    INDUCED,
    MANY,
    POWER,
    added,
    put_six,
    signed,
    six_added,
    unsigned,
)
from driftwell.stepping.drift import drift, enter_magnets, induced_work, kick, kick_both, momenta
from driftwell.stepping.forces import external_forces, magnetised, magnets_change
from driftwell.stepping.motion import CURSOR_INDUCED, Charges, Fields, Plan, Work
from driftwell.walls.table import SurfaceTable, level

_PUSH, _PUSH_TOGETHER, PUSH_APART, _MOVE, TAKE, CROSS = 0, 1, 2, 3, 4, 5

Passes = CompiledFunction
"""What the time loop takes for passes over many charges, see :func:`passes_over`."""


def passes_over(
    n: int,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    work: Work,
) -> Passes | None:
    """The passes over `n` charges, as a pointer; None where they are few.

    The loop is compiled for either, and has nothing in it of what it does not need.
    """
    if n < MANY:
        return None
    types: Any = numba.types
    typeof: Any = numba.typeof
    moved = [typeof(each) for each in (plan, *fields, surfaces, bodies, charges, work)]
    numbers = [types.int64, types.boolean, *[types.float64] * 3]
    return CompiledFunction(_blocks, types.void(*moved, *numbers))


@inner_kernel
def push(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    together: bool,
    keep: bool,
    h: float,
    work: Work,
) -> None:
    """Kick all charges for a time `h`, and account the work of induced fields.

    together : by the charges' own field too
    keep : note place, velocity and field before the kick, for the path through the step
    """
    n = charges.charge.size
    induced = magnetised(fields) and work.cursor[CURSOR_INDUCED] != 0
    if passes is None:
        done = _push(plan, charges, together, keep, induced, h, work, unsigned(0), unsigned(n))
    else:
        what = _PUSH_TOGETHER if together else _PUSH
        over_blocks(passes, plan, fields, surfaces, bodies, charges, work, what, keep, h, 0.0, 0.0)
        done = added(work.block_sums, INDUCED)
    if induced:
        add_compensated(work.total, work.carry, WORK_INDUCED, done)


@inner_kernel
def push_apart(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    h: float,
    work: Work,
) -> None:
    """Kick all charges by their own field alone for a time `h`."""
    if passes is None:
        kick(charges, work.coulomb, h, unsigned(0), unsigned(charges.charge.size))
    else:
        over_blocks(
            passes,
            plan,
            fields,
            surfaces,
            bodies,
            charges,
            work,
            PUSH_APART,
            False,
            h,
            0.0,
            0.0,
        )


@inner_kernel
def move(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    t: float,
    inside: float,
    h: float,
    work: Work,
) -> None:
    """Drift from the time `t` on for a time `h`, and account what magnets turn."""
    n = charges.charge.size
    turned = magnetised(fields)
    if passes is None:
        if turned:
            enter_magnets(-1.0, momenta(charges, unsigned(0), unsigned(n)), work.total, work.carry)
        drift(plan, fields, charges, t, inside, h, work, unsigned(0), unsigned(n))
        if turned:
            enter_magnets(1.0, momenta(charges, unsigned(0), unsigned(n)), work.total, work.carry)
    else:
        over_blocks(
            passes, plan, fields, surfaces, bodies, charges, work, _MOVE, False, h, t, inside
        )
        if turned:
            enter_magnets(-1.0, six_added(work.block_sums, BEFORE), work.total, work.carry)
            enter_magnets(1.0, six_added(work.block_sums, AFTER), work.total, work.carry)


@inner_kernel
def take_fields(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    t: float,
    inside: float,
    work: Work,
) -> None:
    """The fields' E at every charge, the rates of the accounts, and the energy in the fields.

    Overwrites ``work.external``, ``work.induced`` (where a magnet changes), ``work.rate``, which
    must be settled, and ``work.energy``; the cursor tells whether a magnet changes.
    """
    n = charges.charge.size
    changing = False
    if magnetised(fields):
        changing = magnets_change(fields, t, inside)
        work.cursor[CURSOR_INDUCED] = 1 if changing else 0
    if passes is None:
        power, energy, force = external_forces(
            fields, charges, t, inside, changing, work, unsigned(0), unsigned(n)
        )
    else:
        over_blocks(
            passes, plan, fields, surfaces, bodies, charges, work, TAKE, changing, 0.0, t, inside
        )
        power, energy = added(work.block_sums, POWER), added(work.block_sums, ENERGY)
        force = six_added(work.block_sums, FORCE)
    work.energy[0] = energy
    enter_rates(power, force, work.rate)


@inner_kernel
def any_crossing(
    passes: Passes | None,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    h: float,
    work: Work,
) -> bool:
    """Whether a charge is on another side of a surface than at the beginning of the step.

    Or near enough to an electrode to be followed through the step of length `h`.
    """
    n = charges.charge.size
    if passes is None:
        found = crossed(surfaces, charges, work, unsigned(0), unsigned(n))
        if bodies.whole.shape[0] > 0:
            found += near_bodies(plan, bodies, charges, h, work, unsigned(0), unsigned(n))
        return found > 0
    over_blocks(passes, plan, fields, surfaces, bodies, charges, work, CROSS, False, h, 0.0, 0.0)
    return added(work.block_sums, CROSSED) > 0.0


@inner_kernel
def over_blocks(
    passes: Passes,
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
    """Call the function behind the pointer, which takes no tuples of tuples."""
    passes(
        plan,
        fields.electric,
        fields.uniform,
        fields.magnetic,
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


@inner_kernel
def _push(
    plan: Plan,
    charges: Charges,
    together: bool,
    keep: bool,
    induced: bool,
    h: float,
    work: Work,
    first: int,
    last: int,
) -> float:
    """Push a stretch of the charges; the work of induced fields, J."""
    if keep:
        _keep(charges, together, work, first, last)
    done = 0.0
    if induced:
        done = _induced_work(plan, charges, together, h, work, first, last)
    if together:
        kick_both(charges, work.external, work.coulomb, h, first, last)
    else:
        kick(charges, work.external, h, first, last)
    return done


@inner_kernel
def _keep(charges: Charges, together: bool, work: Work, first: int, last: int) -> None:
    """Note state and field at the beginning of a step for the path through it."""
    for axis in range(3):
        x, u = charges.position[axis], charges.velocity[axis]
        e, c = work.external[axis], work.coulomb[axis]
        old_x, old_u = work.old_position[axis], work.old_velocity[axis]
        old_e = work.old_field[axis]
        for i in range(first, last):
            old_x[i] = x[i]
            old_u[i] = u[i]
            old_e[i] = e[i] + c[i] if together else e[i]


@outer_kernel
def _induced_work(
    plan: Plan, charges: Charges, together: bool, h: float, work: Work, first: int, last: int
) -> float:
    """The induced field's work in the kick to come, J."""
    force_field = work.spare
    for axis in range(3):
        out, e, c = force_field[axis], work.external[axis], work.coulomb[axis]
        for i in range(first, last):
            out[i] = e[i] + c[i] if together else e[i]
    return induced_work(plan, charges, force_field, work.induced, h, first, last)


@inner_kernel
def crossed(surfaces: SurfaceTable, charges: Charges, work: Work, first: int, last: int) -> int:
    """How often a charge is on another side of a surface than before."""
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    crossed = 0
    for s in range(surfaces.kind.size):
        kind = surfaces.kind[s]
        p = surfaces.parameter[s]
        side = work.side[s]
        for i in range(first, last):
            now = 1 if level(kind, p, x[i], y[i], z[i]) > 0.0 else -1
            crossed += now != side[i]
    return crossed


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
    first, last = unsigned(start), unsigned(min(start + BLOCK, charges.charge.size))
    row = work.block_sums[b]
    if what == _MOVE:
        turned = magnetised(fields)
        if turned:
            put_six(momenta(charges, first, last), BEFORE, row)
        drift(plan, fields, charges, t, inside, h, work, first, last)
        if turned:
            put_six(momenta(charges, first, last), AFTER, row)
    elif what == TAKE:
        row[POWER], row[ENERGY], force = external_forces(
            fields, charges, t, inside, asked, work, first, last
        )
        put_six(force, FORCE, row)
    elif what == CROSS:
        row[CROSSED] = crossed(surfaces, charges, work, first, last)
        if bodies.whole.shape[0] > 0:
            row[CROSSED] += near_bodies(plan, bodies, charges, h, work, first, last)
    elif what == PUSH_APART:
        kick(charges, work.coulomb, h, first, last)
    else:
        together = what == _PUSH_TOGETHER
        induced = work.cursor[CURSOR_INDUCED] != 0
        row[INDUCED] = _push(plan, charges, together, asked, induced, h, work, first, last)


@threaded_kernel
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
