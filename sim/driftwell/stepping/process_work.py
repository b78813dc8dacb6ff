"""What the time loop keeps of processes: their table, and each charge's clocks.

Every charge has a clock for every process that comes in events: the exponential of mean 1 that its
rate has still to use up, and the number of the event to come. Both belong to the state of a run; a
charge that joins it has clocks that follow from its id.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels.philox import fill_exponentials
from driftwell.particles.state import Particles
from driftwell.processes.outcome import CLOCK
from driftwell.processes.table import Acting, acting
from driftwell.stepping.blocks import blocks

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

CHUNK = 32
"""Charges among which those whose clocks have run out are noted together, as bits of a number."""
LAZY = 256
"""Up to so many charges clocks of constant rates are looked at only when one may run out."""
HANDED = 90
"""Rows enough for all arrays that are handed to the processes."""
EXCHANGED = 8
"""J, N s (3), N m s (3) given to the charges, and the number of events; weights included."""
NEVER, EVENTS, ALWAYS = 0, 1, 2
"""``Plan.processes``: there are none; all come in events; some act in every step."""
LOST, CROWDED = 0, 1
"""Flags of a step: how many charges are lost; 1 + index of one with more events than can be."""


class ProcessWork(NamedTuple):
    """The processes and the charges' clocks.

    kind, parameter, flow, start, end, region, key, surface : as in the table of processes
    sloped : (p,) int64, 1 where rates depend on the velocity
    id : (n,) int64; rate, slope : (p, n) 1/s and 1/m, largest rate of events of each charge
    depth : (p, n), of the clocks; number : (p, n) int64, of the event to come
    lost_by : (n,) int64 and lost_at : (n,), what took a charge LEAVING, and when, as a part of step
    sums : (blocks or 1, p, 8), of one step; flags : (blocks or 1, 8) int64, see above
    exchanged, carry : (p, 8), the accounts by process
    used : (p,) s, time in which a process' rates, which do not change, have used up clocks and
        have not been entered yet; soonest : (p,) s, until when none runs out
    due : (chunks,) int64, of so many charges each those whose clocks have run out, as bits
    handed : (k, 4) int64, where all arrays are, see processes.py
    """

    kind: Ints
    parameter: Floats
    flow: Floats
    start: Floats
    end: Floats
    region: Floats
    key: NDArray[np.uint64]
    surface: Ints
    sloped: Ints
    id: Ints
    rate: Floats
    slope: Floats
    depth: Floats
    number: Ints
    lost_by: Ints
    lost_at: Floats
    sums: Floats
    flags: Ints
    exchanged: Floats
    carry: Floats
    used: Floats
    soonest: Floats
    due: Ints
    handed: Ints


def no_processes() -> Acting:
    """The processes of a run without any."""
    return acting((), (), 0)


def when_acting(processes: Acting) -> int:
    """What the plan says of processes."""
    if not len(processes):
        return NEVER
    return ALWAYS if processes.continuous else EVENTS


def process_work(
    processes: Acting, particles: Particles, before: ProcessWork | None = None
) -> ProcessWork:
    """The processes laid out for charges; those that were there `before` keep their clocks."""
    count, n = len(processes), len(particles) if len(processes) else 0
    table = processes.table
    ids = particles.id[:n].copy()
    rate, slope = processes.rates(particles.cloud[:n])
    depth, number = np.empty((count, n)), np.ones((count, n), np.int64)
    for p in range(count):
        fill_exponentials(table.key[p], ids, np.zeros(n, np.int64), CLOCK, depth[p])
    exchanged, carry = np.zeros((count, EXCHANGED)), np.zeros((count, EXCHANGED))
    used = np.zeros(count)
    if before is not None:
        _, now, then = np.intersect1d(ids, before.id, assume_unique=True, return_indices=True)
        used, exchanged, carry = before.used, before.exchanged, before.carry
        depth += rate * used[:, np.newaxis]  # none of that time is a new charge's
        depth[:, now], number[:, now] = before.depth[:, then], before.number[:, then]
    rows = max(1, blocks(n))
    return ProcessWork(
        table.kind,
        table.parameter,
        table.flow,
        table.start,
        table.end,
        table.region,
        table.key,
        table.surface,
        processes.sloped.astype(np.int64),
        ids,
        rate,
        slope,
        depth,
        number,
        np.zeros(n, np.int64),
        np.zeros(n),
        np.zeros((rows, count, EXCHANGED)),
        np.zeros((rows, 8), np.int64),
        exchanged,
        carry,
        used,
        np.zeros(count),
        np.zeros(-(-n // CHUNK), np.int64),
        np.zeros((HANDED, 4), np.int64),
    )


def process_state(work: ProcessWork) -> dict[str, NDArray[Any]]:
    """Copies of what a resume needs, by name; nothing where there are no processes."""
    if not work.kind.size:
        return {}
    return {name: getattr(work, name).copy() for name in _KEPT}


def take_up_processes(work: ProcessWork, state: Mapping[str, NDArray[Any]]) -> None:
    """Put a state into the arrays laid out."""
    if work.kind.size:
        for name in _KEPT:
            getattr(work, name)[...] = state[name]


_KEPT = ("depth", "number", "exchanged", "carry", "used", "soonest")
