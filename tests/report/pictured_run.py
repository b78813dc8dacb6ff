"""Small run folders to be drawn, written by hand: no physics in them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from driftwell import open_run
from driftwell.answers.evidence import CloudFacts
from driftwell.answers.moments import moments_of
from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.particles.state import Particles
from driftwell.record.header import Header
from driftwell.record.layout import rows
from driftwell.record.outcome import Outcome
from driftwell.record.reader import Run
from driftwell.record.resume_state import particles_state
from driftwell.record.writer import RunWriter

MASS = 40.0 * ATOMIC_MASS
FINISHED = Outcome("finished", "The motion was followed to its end.", 0, 1.5, 2000)
STOPPED = Outcome("stopped", "Stopped on request.", 4, 1.5, 1000)
ALL_LOST = Outcome("all lost", "Every charge was lost.", 3, 1.5, 1000)


@dataclass
class Charges:
    """Charges alive at one time: position and velocity (n, 3), cloud and id (n,)."""

    position: np.ndarray
    velocity: np.ndarray
    cloud: np.ndarray = field(default_factory=lambda: np.zeros(0, np.int64))
    id: np.ndarray = field(default_factory=lambda: np.zeros(0, np.int64))

    def __post_init__(self) -> None:
        count = len(self.position)
        if len(self.cloud) != count:
            self.cloud = np.zeros(count, np.int64)
        if len(self.id) != count:
            self.id = np.arange(count)

    @property
    def particles(self) -> Particles:
        ones = np.ones(len(self.id))
        return Particles(
            np.ascontiguousarray(self.position.T, np.float64),
            np.ascontiguousarray(self.velocity.T, np.float64),
            ELEMENTARY_CHARGE * ones,
            MASS * ones,
            ones,
            self.id.astype(np.int64),
            self.cloud.astype(np.int64),
            self.cloud.astype(np.int64),
            0.0 * ones,
        )


NONE = Charges(np.zeros((0, 3)), np.zeros((0, 3)))


def charges(
    count: int,
    sigma: Sequence[float] = (60e-6, 60e-6, 250e-6),
    speed: Sequence[float] = (100.0, 100.0, 100.0),
    centre: Sequence[float] = (0.0, 0.0, 0.0),
    drift: Sequence[float] = (0.0, 0.0, 0.0),
    seed: int = 1,
    clouds: int = 1,
) -> Charges:
    """A Gaussian cloud, its charges dealt out to `clouds` clouds in the order of their ids."""
    draw = np.random.default_rng(seed)
    return Charges(
        np.array(centre) + draw.normal(size=(count, 3)) * np.array(sigma),
        np.array(drift) + draw.normal(size=(count, 3)) * np.array(speed),
        np.arange(count) * clouds // max(count, 1),
    )


def lost(
    time: np.ndarray, position: np.ndarray, wall: Any = 0, charge: Any = None, cloud: Any = 0
) -> np.ndarray:
    """Rows of losses at these times and places."""
    found = rows("losses", len(time))
    found["time"], found["position"], found["wall"], found["cloud"] = time, position, wall, cloud
    found["id"] = np.arange(len(time)) if charge is None else charge
    found["weight"] = 1.0
    return found


def passed(
    time: np.ndarray, position: np.ndarray, detector: Any = 0, direction: Any = 1, axis: int = 2
) -> np.ndarray:
    """Rows of crossings by charges that fly along an axis."""
    found = rows("crossings", len(time))
    found["time"], found["position"], found["detector"] = time, position, detector
    found["direction"], found["weight"] = direction, 1.0
    found["velocity"][:, axis] = 1e6
    return found


def pictured_run(
    folder: Path,
    records: Sequence[tuple[float, Charges]],
    snapshots: Sequence[int] = (0, -1),
    losses: np.ndarray | None = None,
    crossings: np.ndarray | None = None,
    title: str = "An invented cloud",
    names: Sequence[str] = ("load", "other"),
    walls: Sequence[str] = ("bore", "plate"),
    detectors: Sequence[str] = ("exit", "far"),
    outcome: Outcome | None = FINISHED,
    tracks: int = 1000,
    ledger: dict[str, np.ndarray] | None = None,
    weight: float = 1.0,
    traces: dict[str, np.ndarray] | None = None,
    sampled: np.ndarray | None = None,
    cell: tuple[str, float] = ("", 0.0),
) -> Run:
    """A run with these charges at each record; `snapshots` : the records that have one.

    traces : values (k,), m, by the names of what was traced; sampled : (k,) their times, s
    cell : axis and length, m, of what repeats
    """
    first = records[0][1]
    count = len(first.id)
    held = int(first.cloud.max()) + 1 if count else 1
    tracked = np.unique(np.linspace(0, count - 1, min(count, tracks)).round().astype(int))
    writer = RunWriter.create(
        folder,
        Header(
            scenario="title = 'invented'",
            title=title,
            seed=7,
            duration=records[-1][0] or 1.0,
            step=1e-9,
            scheme="kick-drift-kick",
            softening=0.0,
            clouds=tuple(
                CloudFacts(
                    names[k],
                    k,
                    "calcium",
                    MASS,
                    ELEMENTARY_CHARGE,
                    weight,
                    int(np.argmax(first.cloud == k)) if count else 0,
                    int((first.cloud == k).sum()),
                )
                for k in range(held)
            ),
            species=("calcium",) * held,
            walls=tuple(walls),
            detectors=tuple(detectors),
            tracked=tuple(int(k) for k in tracked),
            traces=tuple(traces or ()),
            cell_axis=cell[0],
            cell_length=cell[1],
        ),
    )
    kept = {number % len(records) for number in snapshots}
    for number, (time, alive) in enumerate(records):
        state = np.full((len(tracked), 6), np.nan)
        for row, charge in enumerate(tracked):
            for k in np.flatnonzero(alive.id == charge):
                state[row] = [*alive.position[k], *alive.velocity[k]]
        writer.trajectory(time, state)
        writer.moments(time, _moments(alive, held))
        row = rows("ledger", 1)
        row["time"] = time
        row["kinetic"] = 0.5 * MASS * float((alive.velocity**2).sum())
        for column, values in (ledger or {}).items():
            row[column] = values[number]
        writer.ledger(row)
        if number in kept:
            writer.snapshot(time, alive.particles)
    if traces and sampled is not None:
        writer.trace(sampled, np.stack(list(traces.values()), axis=1))
    for write, found in ((writer.losses, losses), (writer.crossings, crossings)):
        if found is not None:
            write(found)
    writer.seal(particles_state(records[-1][1].particles))
    if outcome is not None:
        writer.finish(outcome, ())
    return open_run(folder)


def _moments(alive: Charges, clouds: int) -> np.ndarray:
    found = rows("moments", clouds)
    for k, row in enumerate(found):
        own = alive.cloud == k
        made = moments_of(alive.position[own].T, alive.velocity[own].T, MASS)
        for name in ("count", "centre", "covariance", "kinetic_energy", "kinetic_variance"):
            row[name] = getattr(made, name)
    return found
