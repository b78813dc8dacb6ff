"""What the compiled loop leaves in its buffers: events on surfaces, and traced coordinates."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.particles.state import Particles
from driftwell.stepping.motion import (
    CURSOR_EVENTS,
    CURSOR_TRACES,
    Charges,
    Trace,
    Work,
)

TRACE_ROWS = 4096
"""Samples of the traces between two calls, at the most."""
_CENTRE, _NOBODY = -1, -2

Samples = tuple[NDArray[np.float64], NDArray[np.float64]]
"""Times (k,), s, and values (k, traces), m."""


@dataclass(frozen=True, slots=True)
class Traced:
    """One traced coordinate: a cloud's centre, or one charge by its id."""

    cloud: int
    id: int | None
    axis: int


@dataclass(frozen=True, slots=True)
class Events:
    """What happened on surfaces, in the order of time.

    surface, id, cloud : (k,) int64; direction : (k,) int64, 0 for losses
    time : (k,) s; position, velocity : (k, 3), m and m/s (proper)
    mass, weight : (k,) of one real particle, and how many it stands for
    """

    surface: NDArray[np.int64]
    id: NDArray[np.int64]
    cloud: NDArray[np.int64]
    direction: NDArray[np.int64]
    time: NDArray[np.float64]
    position: NDArray[np.float64]
    velocity: NDArray[np.float64]
    mass: NDArray[np.float64]
    weight: NDArray[np.float64]


def emptied_events(work: Work, particles: Particles) -> Events | None:
    """Take the events out of their buffer; None where there are none."""
    count = int(work.cursor[CURSOR_EVENTS])
    if count == 0:
        return None
    work.cursor[CURSOR_EVENTS] = 0
    rows = work.events[:count]
    rows = rows[np.argsort(rows[:, 2], kind="stable")]
    index = rows[:, 1].astype(np.int64)
    return Events(
        surface=rows[:, 0].astype(np.int64),
        id=particles.id[index],
        cloud=particles.cloud[index],
        direction=rows[:, 9].astype(np.int64),
        time=rows[:, 2],
        position=rows[:, 3:6],
        velocity=rows[:, 6:9],
        mass=particles.mass[index],
        weight=particles.weight[index],
    )


def emptied_trace(work: Work, trace: Trace) -> Samples | None:
    """Take the samples out of their buffer; None where there are none."""
    count = int(work.cursor[CURSOR_TRACES])
    if count == 0:
        return None
    work.cursor[CURSOR_TRACES] = 0
    return trace.time[:count].copy(), trace.value[:count].copy()


def trace_of(traced: Sequence[Traced], particles: Particles) -> Trace:
    """Room for samples of the traced coordinates, found in the present arrays."""
    return Trace(
        np.array([each.cloud for each in traced], dtype=np.int64),
        np.array([_index(each, particles) for each in traced], dtype=np.int64),
        np.array([each.axis for each in traced], dtype=np.int64),
        np.zeros(TRACE_ROWS + 1),
        np.zeros((TRACE_ROWS + 1, len(traced))),
    )


def _index(traced: Traced, particles: Particles) -> int:
    """Where a traced charge stands now; -1 for a centre, -2 once the charge is lost."""
    if traced.id is None:
        return _CENTRE
    found = np.flatnonzero(particles.id == traced.id)
    return int(found[0]) if found.size else _NOBODY


def traced_now(trace: Trace, charges: Charges) -> NDArray[np.float64]:
    """The traced coordinates (1, traces) at the start; NaN for what is not born yet."""
    there = charges.alive == 1
    found = np.full((1, trace.axis.size), np.nan)
    for k, (cloud, i, axis) in enumerate(zip(trace.cloud, trace.which, trace.axis, strict=True)):
        own = there & (charges.cloud == cloud)
        if i == _CENTRE and own.any():
            found[0, k] = charges.position[axis, own].mean()
        elif i >= 0 and there[i]:
            found[0, k] = charges.position[axis, i]
    return found
