"""What the pictures of a run are drawn from, read once."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Moments, Snapshot
from driftwell.record.reader import Run
from driftwell.record.resume_state import particles_of

Floats = NDArray[np.float64]

SAME_TIME = 1e-9
"""Part of the duration within which two times are the same."""


@dataclass(frozen=True, slots=True)
class Scene:
    """A run as its pictures see it.

    clouds : in order
    start : the charges of the first snapshot, None where there were none
    end : the charges alive when the record ends, None where none is left or time did not pass
    moments : of each cloud, in time
    losses, crossings : tables, as :class:`Run` gives them
    """

    run: Run
    clouds: tuple[CloudFacts, ...]
    start: Snapshot | None
    end: Snapshot | None
    moments: tuple[Moments, ...]
    losses: NDArray[np.void]
    crossings: NDArray[np.void]

    @property
    def views(self) -> list[tuple[str, Snapshot]]:
        """What is known of start and end, by these words."""
        return [
            (word, view)
            for word, view in (("start", self.start), ("end", self.end))
            if view is not None
        ]


def scene_of(run: Run) -> Scene:
    """Read what the pictures need."""
    first, last = _ends(run)
    return Scene(
        run=run,
        clouds=tuple(
            replace(cloud, count=run.born(cloud.name)) if cloud.emitted else cloud
            for cloud in run.header.clouds
        ),
        start=first,
        end=last,
        moments=tuple(run.moments(cloud.name) for cloud in run.header.clouds),
        losses=run.losses(),
        crossings=run.crossings(),
    )


def _ends(run: Run) -> tuple[Snapshot | None, Snapshot | None]:
    """The charges at the start, and at the time the record reaches."""
    times = run.snapshots
    near = SAME_TIME * run.header.duration
    first = run.snapshot(times[0]) if times else None
    last = run.snapshot(times[-1]) if times else None
    if last is None or last.time < run.end_time - near:
        last = _sealed(run) or last
    if first is not None and last is not None and last.time <= first.time + near:
        last = None
    return _held(first), _held(last)


def _sealed(run: Run) -> Snapshot | None:
    """The charges a run was sealed with, for one that was stopped between two snapshots."""
    state = run.state()
    if "particles/position" not in state:
        return None
    particles = particles_of(state)
    if "charges/alive" in state:
        particles = particles.kept(state["charges/alive"] == 1)
    return Snapshot(
        run.end_time,
        particles.id,
        particles.cloud,
        np.ascontiguousarray(particles.position.T),
        np.ascontiguousarray(particles.velocity.T),
        particles.charge,
        particles.mass,
        particles.weight,
    )


def _held(snapshot: Snapshot | None) -> Snapshot | None:
    """The snapshot without charges whose place or velocity is no number, None if all are such."""
    if snapshot is None:
        return None
    sound = np.isfinite(snapshot.position).all(axis=1) & np.isfinite(snapshot.velocity).all(axis=1)
    if not sound.any():
        return None
    return Snapshot(
        snapshot.time,
        snapshot.id[sound],
        snapshot.cloud[sound],
        snapshot.position[sound],
        snapshot.velocity[sound],
        snapshot.charge[sound],
        snapshot.mass[sound],
        snapshot.weight[sound],
    )
