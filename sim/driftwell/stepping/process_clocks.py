"""The charges' clocks: what a step takes from them, and which run out.

A clock is the exponential of mean 1 that a charge has still to use up before its next event
(process_work.py). Rates that depend on the velocity are taken from all clocks in every step, in
lanes. Those that do not change use up time only: of few charges the clocks are looked at when the
first of them may run out.
"""

from __future__ import annotations

import math

from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import (
    WIDTH,
    LanesType,
    below_zero,
    lanes,
    larger,
    least,
    load_some,
    root,
    smaller,
    store_some,
)
from driftwell.kernels.philox import exponential, uniforms
from driftwell.processes.linear import LINEAR
from driftwell.processes.outcome import CLOCK
from driftwell.stepping.motion import Charges, Work
from driftwell.stepping.process_path import acts, used_up
from driftwell.stepping.process_work import CHUNK, LAZY, ProcessWork


@inner_kernel
def may_run_out(acting: ProcessWork, inside: float, h: float) -> bool:
    """Count a step as used by clocks of constant rates; whether any clock may have run out."""
    may = False
    for p in range(acting.kind.size):
        if acting.kind[p] != LINEAR and acts(acting, p, inside):
            acting.used[p] += h
            may |= acting.sloped[p] != 0 or acting.used[p] >= acting.soonest[p]
    return may


@inner_kernel
def any_due(
    charges: Charges,
    together: bool,
    spinning: bool,
    inside: float,
    h: float,
    work: Work,
    acting: ProcessWork,
    first: int,
    last: int,
    lazy: bool,
) -> bool:
    """Take from the clocks what a step uses up, as if nothing happened in it; whether any ran out.

    first, last : chunks of the charges; overwrites their part of ``acting.due``
    lazy : take all that constant rates have used since it was last done, and this step's part
    """
    n, found = charges.charge.size, False
    for c in range(first, last):
        start, end = c * CHUNK, min(c * CHUNK + CHUNK, n)
        due = 0
        for p in range(acting.kind.size):
            if acting.kind[p] == LINEAR or not (acts(acting, p, inside) or acting.used[p] > 0.0):
                continue
            depth, rate = acting.depth[p], acting.rate[p]
            span = lanes(acting.used[p] if lazy else h)
            for i in range(start, end, WIDTH):
                count = min(WIDTH, end - i)
                most = load_some(rate, i, count)
                if acting.sloped[p] != 0:
                    slope = load_some(acting.slope[p], i, count)
                    most = most + slope * _speeds(
                        charges, together, spinning, h, work, acting, p, i, count
                    )
                left = load_some(depth, i, count) - span * most
                store_some(depth, i, count, left)
                due |= below_zero(left) << (i - start)
        acting.due[c] = due
        found |= due != 0
    if lazy:
        for p in range(acting.kind.size):
            acting.used[p] = acting.soonest[p] = 0.0
    return found


@inner_kernel
def look_ahead(charges: Charges, acting: ProcessWork) -> None:
    """Find when the next clock of constant rates runs out; always, where there are many charges."""
    n = charges.alive.size
    for p in range(acting.kind.size):
        soonest = lanes(math.inf if n <= LAZY else 0.0)
        if acting.sloped[p] == 0 and n <= LAZY:
            depth, rate = acting.depth[p], acting.rate[p]
            for i in range(0, n, WIDTH):
                count = min(WIDTH, n - i)
                # a rate of 0 gives infinity, and what is no number is never the smaller
                last = load_some(depth, i, count) / load_some(rate, i, count)
                soonest = smaller(last, soonest)
        acting.soonest[p] = least(soonest)


@inner_kernel
def taken(
    charges: Charges,
    together: bool,
    spinning: bool,
    h: float,
    work: Work,
    acting: ProcessWork,
    p: int,
    i: int,
) -> float:
    """What a step without events has taken from a clock."""
    ax, ay, az = work.external[0, i], work.external[1, i], work.external[2, i]
    if together:
        ax, ay, az = ax + work.coulomb[0, i], ay + work.coulomb[1, i], az + work.coulomb[2, i]
    push = 0.5 * h * abs(charges.charge_to_mass[0, i])
    u = charges.velocity
    spread = push * (abs(ax) + abs(ay) + abs(az))
    return h * used_up(acting, p, i, spinning, u[0, i], u[1, i], u[2, i], spread)[0]


@inner_kernel
def renew(acting: ProcessWork, i: int) -> None:
    """Draw the clocks anew that have run out for a charge that is not there, or not yet.

    What has no memory may tick for nobody: nothing need be done where a charge is born.
    """
    for p in range(acting.kind.size):
        if acting.depth[p, i] < 0.0:
            event = acting.number[p, i]
            first, _, _, _ = uniforms(acting.key[p], acting.id[i], event, CLOCK, 0)
            acting.depth[p, i], acting.number[p, i] = exponential(first), event + 1


@inner_kernel
def _speeds(
    charges: Charges,
    together: bool,
    spinning: bool,
    h: float,
    work: Work,
    acting: ProcessWork,
    p: int,
    i: int,
    count: int,
) -> LanesType:
    """The bounds c of :func:`used_up` for 8 charges from `i` on, in lanes."""
    ratio = load_some(charges.charge_to_mass[0], i, count)
    none = lanes(0.0)
    square, spread, still = none, none, 0.0
    for axis in range(3):
        w = acting.flow[p, axis]
        e = load_some(work.external[axis], i, count)
        if together:
            e = e + load_some(work.coulomb[axis], i, count)
        e = e * ratio
        spread = spread + larger(e, none - e)
        u = load_some(charges.velocity[axis], i, count)
        if spinning:
            still += w * w
        else:
            u = u - lanes(w)
        square = square + u * u
    return root(square) + lanes(0.5 * h) * spread + lanes(math.sqrt(still))
