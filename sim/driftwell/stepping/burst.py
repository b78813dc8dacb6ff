"""The time loop: many steps in one compiled call, from mark to mark of the schedule.

A step is the palindrome of kicks and drifts of the scheme (schemes.py), closed before walls and
detectors look at it. In the scheme midpoint-rotation all forces are taken in the middle
(midpoint_passes.py), and again at the end only where somebody asks: at marks, and for the account
of charges that are lost; where nothing else looks at the charges, several steps are one call.
Where the Coulomb kick is taken every m-th step only (impulse multiple time stepping), m steps of
the fields alone stand between two half kicks of length m h / 2.

A call returns at the asked mark, when its budget of steps is used up, when the event buffer could
overflow, when charges are due that have no place yet, or with a failing status. Where it returns
makes no difference to a single bit of the result: everything that is pending stands in the work
arrays and the cursor.

References
----------
M. Tuckerman, B. J. Berne and G. J. Martyna, J. Chem. Phys. 97 (1992) 1990 (multiple time steps).
Accounts of a time-dependent potential by the extended phase space: J. M. Sanz-Serna and
M. P. Calvo, Numerical Hamiltonian Problems (1994), sec. 12 (from memory).
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.coulomb.direct import PairSum
from driftwell.coulomb.frame_sum import HELD
from driftwell.coulomb.unresolved import unresolved_pair
from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import inner_kernel, kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.status import (
    COLLAPSE,
    CROWDED_STEP,
    DONE,
    EVENTS_FULL,
    NEED_BIRTHS,
    NOT_FINITE,
    OVERFLOW,
    PAUSED,
    RUNAWAY,
)
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import ENERGY_WALLS, WORK_DRIVE, settle
from driftwell.stepping.births import Births, close_births, take_births
from driftwell.stepping.drift import jump_magnets
from driftwell.stepping.events import LOST, UNTOUCHED, meet_surfaces
from driftwell.stepping.forces import coulomb_forces, enter_images, magnetised
from driftwell.stepping.frames import enter_frames, falling_in_frame
from driftwell.stepping.leaps import leap, may_leap
from driftwell.stepping.losses import take_out
from driftwell.stepping.midpoint_passes import from_middle, to_middle
from driftwell.stepping.motion import (
    CURSOR_AT_FAULT,
    CURSOR_EVENTS,
    CURSOR_FRESH,
    CURSOR_INTERVAL,
    CURSOR_JUMPED,
    CURSOR_NEWBORN,
    CURSOR_OVERFLOW,
    CURSOR_STEP,
    CURSOR_STEPS,
    CURSOR_TRACES,
    Charges,
    Fields,
    Plan,
    Trace,
    Work,
)
from driftwell.stepping.passes import (
    Passes,
    any_crossing,
    move,
    push,
    push_apart,
    take_fields,
)
from driftwell.stepping.process_work import CROWDED, ProcessWork
from driftwell.stepping.process_work import LOST as TAKEN
from driftwell.stepping.processes import Processes, act
from driftwell.stepping.schedule import BREAK, TRACE
from driftwell.stepping.schemes import Scheme
from driftwell.walls.table import SurfaceTable

LOOK_EVERY = 64
"""Steps between two looks for runaways and numbers that are none; a power of two."""
RESOLVED = 0.3
"""Largest product of step and a pair's own rate that still follows a close fall."""


@kernel
def burst(
    pair_sum: PairSum,
    images: CompiledFunction,
    bearing: CompiledFunction,
    frame_sum: CompiledFunction,
    reentry: CompiledFunction,
    passes: Passes | None,
    processes: Processes,
    acting: ProcessWork,
    plan: Plan,
    scheme: Scheme,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
    births: Births,
    trace: Trace,
    time: np.ndarray,
    flags: np.ndarray,
    steps: np.ndarray,
    until: int,
    budget: int,
    work: Work,
) -> int:
    """Step on to mark `until`, or for about `budget` steps; returns a status.

    Parameters
    ----------
    time, flags : (m + 1,) float64 and int64; steps : (m,) int64
        The schedule.
    """
    cursor = work.cursor
    every = plan.coulomb_every
    midway = plan.midway != 0
    stages = scheme.drift.size
    surfaced = surfaces.kind.size > 0 or bodies.whole.shape[0] > 0
    together = (plan.coulomb != 0 or plan.images != 0) and every == 1
    accounted = plan.images != 0 or plan.cell_axis >= 0
    free = work.events.shape[0] // 2
    leaping = may_leap(plan, fields, surfaces, bodies, births, work)
    if cursor[CURSOR_STEPS] == 0 and budget > 0 and until > 0:
        # a step far too long may throw charges apart before they are looked at
        status = _look(plan, charges, every * (time[1] - time[0]) / steps[0], True, work)
        if status != DONE:
            return status
    while cursor[CURSOR_INTERVAL] < until:
        j = cursor[CURSOR_INTERVAL]
        h = (time[j + 1] - time[j]) / steps[j]
        inside = 0.5 * (time[j] + time[j + 1])
        while cursor[CURSOR_STEP] < steps[j]:
            first = last = True
            if every > 1:
                first = cursor[CURSOR_STEP] % every == 0
                last = cursor[CURSOR_STEP] % every == every - 1
            start = time[j] + cursor[CURSOR_STEP] * h
            end = time[j] + (cursor[CURSOR_STEP] + 1) * h
            if cursor[CURSOR_STEP] + 1 == steps[j]:
                end = time[j + 1]
            # Pass k = 0 opens the step, 1..stages drift and kick, the next looks at surfaces, and
            # the last takes lost charges out, when the forces belong to where reflected ones are.
            met = UNTOUCHED
            asked = not midway
            if midway and cursor[CURSOR_STEP] + 1 == steps[j]:
                asked = flags[j + 1] != TRACE
            taken = 0
            jumping = (flags[j] & BREAK) != 0 and cursor[CURSOR_JUMPED] < j
            if leaping and cursor[CURSOR_FRESH] != 0 and not jumping:
                # up to the next look, the last step of the interval, or a pause
                most = min(budget, steps[j] - 1 - cursor[CURSOR_STEP])
                most = min(most, LOOK_EVERY - (cursor[CURSOR_STEPS] & (LOOK_EVERY - 1)))
                taken = leap(
                    passes,
                    plan,
                    fields,
                    surfaces,
                    bodies,
                    charges,
                    time[j],
                    inside,
                    h,
                    most,
                    work,
                )
            for k in range(stages + 3 if taken == 0 else 0):
                jump = jumping and k == 0
                t = start
                if 0 < k <= stages:
                    if not midway:
                        before = start + scheme.node[k - 1] * h
                        t = end if k == stages else start + scheme.node[k] * h
                        way = scheme.drift[k - 1] * h
                        move(
                            passes,
                            plan,
                            fields,
                            surfaces,
                            bodies,
                            charges,
                            before,
                            inside,
                            way,
                            work,
                        )
                        if plan.processes != 0:
                            act(
                                processes,
                                plan,
                                fields,
                                charges,
                                together,
                                before,
                                inside,
                                way,
                                work,
                                acting,
                            )
                    elif k == 1:
                        to_middle(
                            passes,
                            plan,
                            fields,
                            surfaces,
                            bodies,
                            charges,
                            together,
                            surfaced,
                            start,
                            inside,
                            h,
                            work,
                        )
                        if together:
                            _forces_in_middle(pair_sum, images, frame_sum, plan, charges, h, work)
                        from_middle(
                            passes,
                            plan,
                            fields,
                            surfaces,
                            bodies,
                            charges,
                            together,
                            start,
                            inside,
                            h,
                            work,
                        )
                    if k == stages:
                        if plan.cell_axis >= 0:
                            reentry(plan, fields.electric, surfaces, charges, work, end, inside)
                        ahead = (every - 1 - cursor[CURSOR_STEP] % every) * h
                        take_births(
                            bearing,
                            pair_sum,
                            images,
                            plan,
                            fields,
                            surfaces,
                            charges,
                            births,
                            end,
                            inside,
                            h,
                            scheme.kick[stages] * h,
                            ahead,
                            work,
                        )
                    if midway:
                        continue
                elif k == stages + 1:
                    t = end
                    if last and every > 1:
                        coulomb_forces(pair_sum, images, frame_sum, 0.0, plan, charges, work)
                        half = 0.5 * every * h
                        if plan.frames != 0:
                            enter_frames(plan, charges, False, half, work)
                        push_apart(passes, plan, fields, surfaces, bodies, charges, half, work)
                        if accounted:
                            enter_images(half, plan, work)
                    if surfaced and any_crossing(
                        passes, plan, fields, surfaces, bodies, charges, h, work
                    ):
                        met = meet_surfaces(
                            plan,
                            fields,
                            surfaces,
                            bodies,
                            charges,
                            together,
                            start,
                            h,
                            inside,
                            work,
                        )
                    if plan.processes != 0 and acting.flags[0, TAKEN] > 0:
                        acting.flags[0, TAKEN] = 0
                        met |= LOST
                    if met == UNTOUCHED and not (midway and asked):
                        break
                    if met == LOST and not midway:
                        continue
                elif k == stages + 2:
                    t = end
                    if met & LOST == 0:
                        break
                    take_out(pair_sum, images, plan, surfaces, charges, work)
                if k > 0 or jump or cursor[CURSOR_FRESH] == 0:
                    settle(work.rate, work.pending, work.total, work.carry)
                    if jump:
                        cursor[CURSOR_JUMPED] = j
                        if magnetised(fields):
                            before = 0.5 * (time[j - 1] + time[j])
                            jump_magnets(plan, fields, charges, t, before, inside, work)
                    energy = work.energy[0]
                    take_fields(passes, plan, fields, surfaces, bodies, charges, t, inside, work)
                    if jump or k == stages + 2:
                        _settle_energy(energy, jump, work)
                    if _pushed_anew(k, stages, first, last, together, asked, met, cursor):
                        # frames follow each drift; what else calls for forces leaves them
                        ahead = 0.5 * scheme.drift[k - 1] * h if 0 < k <= stages else HELD
                        coulomb_forces(pair_sum, images, frame_sum, ahead, plan, charges, work)
                    cursor[CURSOR_FRESH] = 1
                if k > stages:
                    continue
                if k == 0 and first:
                    if budget <= 0:
                        return PAUSED
                    if cursor[CURSOR_EVENTS] > free:
                        return EVENTS_FULL
                    until_next = time[j] + (cursor[CURSOR_STEP] + every) * h
                    if cursor[CURSOR_STEP] + every == steps[j]:
                        until_next = time[j + 1]
                    if births.horizon[0] < until_next:
                        settle(work.rate, work.pending, work.total, work.carry)
                        return NEED_BIRTHS
                    if every > 1:
                        half = 0.5 * every * h
                        if plan.frames != 0:
                            enter_frames(plan, charges, False, half, work)
                        push_apart(passes, plan, fields, surfaces, bodies, charges, half, work)
                        if accounted:
                            enter_images(half, plan, work)
                if midway:
                    continue
                keep = k == 0 and surfaced
                length = scheme.kick[k] * h
                if together and plan.frames != 0:
                    enter_frames(plan, charges, True, length, work)
                push(passes, plan, fields, surfaces, bodies, charges, together, keep, length, work)
                if together and accounted:
                    enter_images(length, plan, work)
                work.pending[0] += length
            if cursor[CURSOR_NEWBORN] > 0:
                close_births(charges, births, work)
            taken = max(taken, 1)
            cursor[CURSOR_STEP] += taken
            cursor[CURSOR_STEPS] += taken
            budget -= taken
            status = _look(plan, charges, every * h, cursor[CURSOR_STEP] == steps[j], work)
            if plan.processes != 0 and acting.flags[0, CROWDED] > 0:
                cursor[CURSOR_AT_FAULT] = acting.flags[0, CROWDED] - 1
                status = CROWDED_STEP
            if status != DONE:
                return status
        cursor[CURSOR_STEP] = 0
        cursor[CURSOR_INTERVAL] = j + 1
        if (flags[j + 1] & TRACE) != 0:
            _sample(charges, trace, time[j + 1], work)
    settle(work.rate, work.pending, work.total, work.carry)
    return DONE


@inner_kernel
def _pushed_anew(
    k: int,
    stages: int,
    first: bool,
    last: bool,
    together: bool,
    asked: bool,
    met: int,
    cursor: np.ndarray,
) -> bool:
    """Whether the charges' own field is needed in pass `k`, and not at hand."""
    if k == 0:
        return (together or first) and cursor[CURSOR_FRESH] == 0  # else a waveform jumped, no more
    if k <= stages:
        return together
    if k == stages + 1 and met & LOST != 0:
        return False  # the next pass takes lost charges out
    return asked if together else last and met != UNTOUCHED


@outer_kernel
def _forces_in_middle(
    pair_sum: PairSum,
    images: CompiledFunction,
    frame_sum: CompiledFunction,
    plan: Plan,
    charges: Charges,
    h: float,
    work: Work,
) -> None:
    """The charges' own field in the middle of a step, and what images and frames give in it."""
    coulomb_forces(pair_sum, images, frame_sum, 0.5 * h, plan, charges, work)
    if plan.images != 0 or plan.cell_axis >= 0:
        enter_images(h, plan, work)
    if plan.frames != 0:
        enter_frames(plan, charges, True, h, work)


@outer_kernel
def _settle_energy(before: float, jump: bool, work: Work) -> None:
    """Enter how the energy in the fields changed: by a waveform's jump, or with charges lost."""
    change = work.energy[0] - before
    if jump:
        add_compensated(work.total, work.carry, WORK_DRIVE, change)
    else:
        add_compensated(work.total, work.carry, ENERGY_WALLS, -change)


@inner_kernel
def _look(plan: Plan, charges: Charges, span: float, at_mark: bool, work: Work) -> int:
    """Look for what must stop the run."""
    cursor = work.cursor
    if cursor[CURSOR_OVERFLOW] > 0:
        return OVERFLOW
    if plan.watch_collapse != 0:
        found = _falling(plan, charges, span, work)
        if found >= 0:
            cursor[CURSOR_AT_FAULT] = found
            return COLLAPSE
    if not at_mark and cursor[CURSOR_STEPS] & (LOOK_EVERY - 1) != 0:
        return DONE
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    ux, uy, uz = charges.velocity[0], charges.velocity[1], charges.velocity[2]
    for i in range(x.size):
        r2 = x[i] * x[i] + y[i] * y[i] + z[i] * z[i]
        u2 = ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]
        if not math.isfinite(r2 + u2):
            cursor[CURSOR_AT_FAULT] = i
            return NOT_FINITE
        if r2 > plan.extent2:
            cursor[CURSOR_AT_FAULT] = i
            return RUNAWAY
    return DONE


@outer_kernel
def _falling(plan: Plan, charges: Charges, span: float, work: Work) -> int:
    """A charge that falls towards an opposite one faster than steps of `span` follow, or -1."""
    limit, extent = (RESOLVED / span) ** 2, math.sqrt(plan.extent2)
    if plan.frames != 0:
        return falling_in_frame(plan, charges, limit, work)
    q, m, k = charges.charge, charges.mass, plan.constant
    found = unresolved_pair(charges.position, q, m, k, limit, extent, work.search)
    if plan.cell_axis >= 0:
        _meet_ends(plan, charges, work)
        other = unresolved_pair(work.spare, q, m, k, limit, extent, work.search)
        if other >= 0 and (found < 0 or other < found):
            return other
    return found


@outer_kernel
def _meet_ends(plan: Plan, charges: Charges, work: Work) -> None:
    """Places with the second half of the cell before the first, into ``work.spare``."""
    middle = plan.cell_begin + 0.5 * plan.cell_length
    for axis in range(3):
        x, out = charges.position[axis], work.spare[axis]
        for i in range(x.size):
            out[i] = x[i]
            if axis == plan.cell_axis and x[i] >= middle:
                out[i] = x[i] - plan.cell_length


@outer_kernel
def _sample(charges: Charges, trace: Trace, t: float, work: Work) -> None:
    """One row of the traced coordinates."""
    row = work.cursor[CURSOR_TRACES]
    trace.time[row] = t
    for k in range(trace.axis.size):
        x = charges.position[trace.axis[k]]
        i = trace.which[k]
        if i >= 0:
            trace.value[row, k] = x[i] if charges.alive[i] == 1 else np.nan
        elif i == -1:
            total = 0.0
            count = 0
            for m in range(x.size):
                if charges.cloud[m] == trace.cloud[k] and charges.alive[m] == 1:
                    total += x[m]
                    count += 1
            trace.value[row, k] = total / count if count > 0 else np.nan
        else:
            trace.value[row, k] = np.nan
    work.cursor[CURSOR_TRACES] = row + 1
