"""What acts on charges besides fields, after the drift of every step.

Where all processes come in events, a pass over the charges takes from their clocks what the step
uses up (process_clocks.py), and the few whose clock has run out are followed through the step
(process_path.py). The pass is part of the time loop; the rest is one function, compiled only where
a scenario has a process, and called by its address. MANY charges are taken block by block on all
threads, the pass with them.
"""

from __future__ import annotations

from typing import Any

import numba
import numpy as np
from numba import prange

from driftwell.fields.table import field_table
from driftwell.kernels import inner_kernel, kernel, outer_kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.handed import hand, rows_of, tuple_at
from driftwell.kernels.lanes import lowest_bit
from driftwell.kernels.pointers import CompiledFunction
from driftwell.particles.state import no_particles
from driftwell.stepping.accounts import ENERGY_PROCESSES
from driftwell.stepping.blocks import BLOCK
from driftwell.stepping.events import write_event
from driftwell.stepping.forces import magnetised
from driftwell.stepping.motion import (
    LEAVING,
    Charges,
    Fields,
    Plan,
    Work,
    charges_of,
    work_space,
)
from driftwell.stepping.process_clocks import any_due, look_ahead, may_run_out, renew, taken
from driftwell.stepping.process_path import acts, follow
from driftwell.stepping.process_work import (
    ALWAYS,
    CHUNK,
    CROWDED,
    EVENTS,
    EXCHANGED,
    LOST,
    ProcessWork,
    no_processes,
    process_work,
)

Processes = CompiledFunction
"""What the time loop takes for processes, see :func:`processes_over`."""


_NOBODY = no_particles()
_field_table, _FIELDS = tuple_at(field_table(()))
_charges, _CHARGES = tuple_at(charges_of(_NOBODY))
_work, _WORK = tuple_at(work_space(0, 0, room((1, 1)), False, False))
_acting, _ACTING = tuple_at(process_work(no_processes(), _NOBODY))
_KINDS = (_FIELDS, _FIELDS, _FIELDS, _CHARGES, _WORK, _ACTING)
_ELECTRIC, _UNIFORM, _MAGNETIC, _AT_CHARGES, _AT_WORK, _AT_ACTING, _ROWS = map(int, rows_of(_KINDS))


def processes_over(
    plan: Plan, fields: Fields, charges: Charges, work: Work, acting: ProcessWork
) -> Processes:
    """The processes as a pointer; one that does nothing where there are none.

    Overwrites ``acting.handed``; the arrays must stay where they are.
    """
    types: Any = numba.types
    typeof: Any = numba.typeof
    numbers = [types.boolean, *[types.float64] * 3]
    signature = types.void(typeof(acting.handed), typeof(plan), *numbers)
    if not plan.processes:
        return CompiledFunction(_nothing, signature)
    hand((*fields, charges, work, acting), _KINDS, acting.handed)
    return CompiledFunction(_blocks if work.block_sums.shape[0] else _few, signature)


@inner_kernel
def act(
    processes: Processes,
    plan: Plan,
    fields: Fields,
    charges: Charges,
    together: bool,
    t: float,
    inside: float,
    h: float,
    work: Work,
    acting: ProcessWork,
) -> None:
    """Let processes act on the drift from `t` on, of length `h`, that has just been made.

    together : the charges' own field is part of every kick
    """
    if plan.processes == EVENTS and work.block_sums.shape[0] == 0:
        if not may_run_out(acting, inside, h):
            return
        spinning, chunks = magnetised(fields), acting.due.size
        if not any_due(charges, together, spinning, inside, h, work, acting, 0, chunks, True):
            look_ahead(charges, acting)
            return
    processes(acting.handed, plan, together, t, inside, h)


@inner_kernel
def _on_stretch(
    plan: Plan,
    fields: Fields,
    charges: Charges,
    work: Work,
    acting: ProcessWork,
    together: bool,
    t: float,
    inside: float,
    h: float,
    first: int,
    last: int,
    out_sums: np.ndarray,
    out_flags: np.ndarray,
) -> None:
    """Follow the charges of a stretch that are due, or all where something always acts."""
    spinning, always = magnetised(fields), plan.processes == ALWAYS
    for p in range(out_sums.shape[0]):
        for k in range(EXCHANGED):
            out_sums[p, k] = 0.0
    out_flags[LOST] = out_flags[CROWDED] = 0
    for c in range(first // CHUNK, -(-last // CHUNK)):
        start = c * CHUNK
        due = acting.due[c]
        if always:
            due = (1 << min(CHUNK, last - start)) - 1
        while due != 0:
            i = start + lowest_bit(due)
            due &= due - 1
            if charges.alive[i] != 1:
                renew(acting, i)
                continue
            if not always:
                for p in range(acting.kind.size):
                    if acts(acting, p, inside):
                        acting.depth[p, i] += (
                            h * acting.rate[p, i]
                            if acting.sloped[p] == 0
                            else taken(charges, together, spinning, h, work, acting, p, i)
                        )
            follow(
                plan,
                fields,
                charges,
                work,
                acting,
                together,
                spinning,
                t,
                inside,
                h,
                i,
                out_sums,
                out_flags,
            )


@inner_kernel
def _add(total: np.ndarray, carry: np.ndarray, k: int, amount: float) -> None:
    """Add to an account by the two-sum of :func:`accounts.settle`, free of branches."""
    before = total[k]
    after = before + amount
    part = after - before
    carry[k] += (before - (after - part)) + (amount - part)
    total[k] = after


@inner_kernel
def _settle(charges: Charges, work: Work, acting: ProcessWork, t: float, h: float) -> None:
    """Enter what the processes gave, in the order of the blocks, and write what they took."""
    lost = crowded = 0
    for b in range(acting.flags.shape[0]):
        lost += acting.flags[b, LOST]
        crowded = max(crowded, acting.flags[b, CROWDED])
    for p in range(acting.kind.size):
        for b in range(1, acting.sums.shape[0]):
            for k in range(EXCHANGED):
                acting.sums[0, p, k] += acting.sums[b, p, k]
        for k in range(EXCHANGED):
            _add(acting.exchanged[p], acting.carry[p], k, acting.sums[0, p, k])
        for k in range(7):
            _add(work.total, work.carry, ENERGY_PROCESSES + k, acting.sums[0, p, k])
    acting.flags[0, LOST], acting.flags[0, CROWDED] = lost, crowded
    if lost == 0:
        return
    x, u = work.old_position, work.old_velocity
    for i in range(charges.alive.size):
        if charges.alive[i] == LEAVING:
            write_event(
                acting.surface[acting.lost_by[i]],
                i,
                t + acting.lost_at[i] * h,
                x[0, i],
                x[1, i],
                x[2, i],
                u[0, i],
                u[1, i],
                u[2, i],
                0.0,
                work,
            )


@kernel
def _nothing(
    handed: np.ndarray, plan: Plan, together: bool, t: float, inside: float, h: float
) -> None:
    """No process: never called."""


@kernel
def _few(handed: np.ndarray, plan: Plan, together: bool, t: float, inside: float, h: float) -> None:
    """All charges as one stretch."""
    fields = _fields(handed)
    charges, work = _charges(handed, _AT_CHARGES), _work(handed, _AT_WORK)
    acting = _acting(handed, _AT_ACTING)
    _on_stretch(
        plan,
        fields,
        charges,
        work,
        acting,
        together,
        t,
        inside,
        h,
        0,
        charges.charge.size,
        acting.sums[0],
        acting.flags[0],
    )
    if plan.processes == EVENTS:
        look_ahead(charges, acting)
    _settle(charges, work, acting, t, h)


@threaded_kernel
def _blocks(
    handed: np.ndarray, plan: Plan, together: bool, t: float, inside: float, h: float
) -> None:
    """All charges block by block, on all of numba's threads."""
    for b in prange(_number_of_blocks(handed)):
        _block(_signed(b), handed, plan, together, t, inside, h)
    _settle_blocks(handed, t, h)


@outer_kernel
def _number_of_blocks(handed: np.ndarray) -> int:
    return _acting(handed, _AT_ACTING).sums.shape[0]


@outer_kernel
def _settle_blocks(handed: np.ndarray, t: float, h: float) -> None:
    charges, work = _charges(handed, _AT_CHARGES), _work(handed, _AT_WORK)
    _settle(charges, work, _acting(handed, _AT_ACTING), t, h)


@outer_kernel
def _block(
    b: int,
    handed: np.ndarray,
    plan: Plan,
    together: bool,
    t: float,
    inside: float,
    h: float,
) -> None:
    """One block, and what its clocks lose."""
    fields = _fields(handed)
    charges, work = _charges(handed, _AT_CHARGES), _work(handed, _AT_WORK)
    acting = _acting(handed, _AT_ACTING)
    first, last = b * BLOCK, min(b * BLOCK + BLOCK, charges.charge.size)
    if plan.processes == EVENTS:
        spinning = magnetised(fields)
        start, end = first // CHUNK, -(-last // CHUNK)
        any_due(charges, together, spinning, inside, h, work, acting, start, end, False)
    _on_stretch(
        plan,
        fields,
        charges,
        work,
        acting,
        together,
        t,
        inside,
        h,
        first,
        last,
        acting.sums[b],
        acting.flags[b],
    )


@inner_kernel
def _signed(i: int) -> Any:
    """`i` with a sign, as all others are: a parallel loop's index has none."""
    return np.int64(i)


@inner_kernel
def _fields(handed: np.ndarray) -> Fields:
    return Fields(
        _field_table(handed, _ELECTRIC),
        _field_table(handed, _UNIFORM),
        _field_table(handed, _MAGNETIC),
    )
