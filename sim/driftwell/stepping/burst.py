"""The time loop: many steps in one compiled call, from mark to mark of the schedule.

A step is the palindrome of kicks and drifts of the scheme (schemes.py), closed before walls and
detectors look at it. Where the Coulomb kick is taken every m-th step only (impulse multiple time
stepping), m steps of the fields alone stand between two half kicks of length m h / 2.

A call returns at the asked mark, when its budget of steps is used up, when the event buffer could
overflow, or with a failing status. Where it returns makes no difference to a single bit of the
result: everything that is pending stands in the work arrays and the cursor.

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
from driftwell.coulomb.unresolved import unresolved_pair
from driftwell.geometry.body_table import BodyTable
from driftwell.kernels import inner_kernel, kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.status import (
    COLLAPSE,
    CROWDED_STEP,
    DONE,
    EVENTS_FULL,
    NOT_FINITE,
    OVERFLOW,
    PAUSED,
    RUNAWAY,
)
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import ENERGY_WALLS, WORK_DRIVE, settle
from driftwell.stepping.drift import jump_magnets
from driftwell.stepping.events import LOST, UNTOUCHED, meet_surfaces
from driftwell.stepping.forces import coulomb_forces, enter_images, magnetised
from driftwell.stepping.losses import take_out
from driftwell.stepping.motion import (
    CURSOR_AT_FAULT,
    CURSOR_EVENTS,
    CURSOR_FRESH,
    CURSOR_INTERVAL,
    CURSOR_JUMPED,
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
    passes: Passes | None,
    processes: Processes,
    acting: ProcessWork,
    plan: Plan,
    scheme: Scheme,
    fields: Fields,
    surfaces: SurfaceTable,
    bodies: BodyTable,
    charges: Charges,
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
    stages = scheme.drift.size
    surfaced = surfaces.kind.size > 0 or bodies.whole.shape[0] > 0
    together = (plan.coulomb != 0 or plan.images != 0) and every == 1
    free = work.events.shape[0] // 2
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
            for k in range(stages + 3):
                jump = False
                t = start
                if k == 0:
                    jump = (flags[j] & BREAK) != 0 and cursor[CURSOR_JUMPED] < j
                elif k <= stages:
                    before = start + scheme.node[k - 1] * h
                    t = end if k == stages else start + scheme.node[k] * h
                    way = scheme.drift[k - 1] * h
                    move(passes, plan, fields, surfaces, bodies, charges, before, inside, way, work)
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
                elif k == stages + 1:
                    t = end
                    if last and every > 1:
                        coulomb_forces(pair_sum, images, plan, charges, work)
                        half = 0.5 * every * h
                        push_apart(passes, plan, fields, surfaces, bodies, charges, half, work)
                        if plan.images != 0:
                            enter_images(half, work)
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
                    if met == UNTOUCHED:
                        break
                    if met == LOST:
                        continue
                else:
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
                    if _pushed_anew(k, stages, first, last, together, met, cursor):
                        coulomb_forces(pair_sum, images, plan, charges, work)
                    cursor[CURSOR_FRESH] = 1
                if k > stages:
                    continue
                if k == 0 and first:
                    if budget <= 0:
                        return PAUSED
                    if cursor[CURSOR_EVENTS] > free:
                        return EVENTS_FULL
                    if every > 1:
                        half = 0.5 * every * h
                        push_apart(passes, plan, fields, surfaces, bodies, charges, half, work)
                        if plan.images != 0:
                            enter_images(half, work)
                keep = k == 0 and surfaced
                length = scheme.kick[k] * h
                push(passes, plan, fields, surfaces, bodies, charges, together, keep, length, work)
                if together and plan.images != 0:
                    enter_images(length, work)
                work.pending[0] += length
            cursor[CURSOR_STEP] += 1
            cursor[CURSOR_STEPS] += 1
            budget -= 1
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
    k: int, stages: int, first: bool, last: bool, together: bool, met: int, cursor: np.ndarray
) -> bool:
    """Whether the charges' own field is needed in pass `k`, and not at hand."""
    if k == 0:
        return (together or first) and cursor[CURSOR_FRESH] == 0  # else a waveform jumped, no more
    if k <= stages:
        return together
    if k == stages + 1 and met & LOST != 0:
        return False  # the next pass takes lost charges out
    return together or last


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
    return unresolved_pair(
        charges.position,
        charges.charge,
        charges.mass,
        plan.constant,
        (RESOLVED / span) ** 2,
        math.sqrt(plan.extent2),
        work.search,
    )


@outer_kernel
def _sample(charges: Charges, trace: Trace, t: float, work: Work) -> None:
    """One row of the traced coordinates."""
    row = work.cursor[CURSOR_TRACES]
    trace.time[row] = t
    for k in range(trace.axis.size):
        x = charges.position[trace.axis[k]]
        i = trace.which[k]
        if i >= 0:
            trace.value[row, k] = x[i] if charges.alive[i] != 0 else np.nan
        elif i == -1:
            total = 0.0
            count = 0
            for m in range(x.size):
                if charges.cloud[m] == trace.cloud[k] and charges.alive[m] != 0:
                    total += x[m]
                    count += 1
            trace.value[row, k] = total / count if count > 0 else np.nan
        else:
            trace.value[row, k] = np.nan
    work.cursor[CURSOR_TRACES] = row + 1
