"""What a run keeps at a record, as rows of the layout."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts
from driftwell.answers.moments import moments_of
from driftwell.constants import SPEED_OF_LIGHT
from driftwell.ledger.ledger import LedgerRow
from driftwell.particles.state import Particles
from driftwell.record.form import DEFAULT_TRACKS
from driftwell.record.layout import dataset
from driftwell.stepping.happenings import Events
from driftwell.stepping.pools import Born


def tracked_ids(count: int, wanted: int | None) -> NDArray[np.int64]:
    """Ids of the charges, of so many, whose trajectories are kept, evenly chosen."""
    chosen = min(count, DEFAULT_TRACKS if wanted is None else wanted)
    return np.unique(np.linspace(0, count - 1, chosen).round().astype(np.int64))


def track_rows(particles: Particles, tracked: NDArray[np.int64]) -> NDArray[np.float64]:
    """State (tracked, 6) of the tracked charges, NaN where lost."""
    rows = np.full((len(tracked), 6), np.nan)
    if len(particles) == 0:
        return rows
    where = np.minimum(np.searchsorted(particles.id, tracked), len(particles) - 1)
    alive = particles.id[where] == tracked
    rows[alive, :3] = particles.position[:, where[alive]].T
    rows[alive, 3:] = particles.velocity[:, where[alive]].T
    return rows


def moment_rows(particles: Particles, clouds: Sequence[CloudFacts]) -> NDArray[Any]:
    """One row of moments for each cloud."""
    rows = np.zeros(len(clouds), dataset("moments").dtype())
    for row, cloud in zip(rows, clouds, strict=True):
        # charges stand in the order of their clouds
        first, last = np.searchsorted(particles.cloud, [cloud.index, cloud.index + 1])
        member = slice(first, last)
        found = moments_of(particles.position[:, member], particles.velocity[:, member], cloud.mass)
        for name in ("count", "centre", "covariance", "kinetic_energy", "kinetic_variance"):
            row[name] = getattr(found, name)
    return rows


def ledger_row(row: LedgerRow) -> NDArray[Any]:
    """A ledger row in the record's type."""
    made = np.zeros(1, dataset("ledger").dtype())
    for name in dataset("ledger").dtype().names or ():
        made[0][name] = getattr(row, name)
    return made


def row_of(stored: np.void) -> LedgerRow:
    """The ledger row that was stored as this."""
    values: dict[str, Any] = {
        name: stored[name].copy() if stored[name].ndim else float(stored[name])
        for name in stored.dtype.names or ()
    }
    return LedgerRow(**values)


def birth_rows(born: Born) -> NDArray[Any]:
    """Charges born, as the record keeps them."""
    rows = np.zeros(born.id.size, dataset("births").dtype())
    for name in rows.dtype.names or ():
        rows[name] = getattr(born, name)
    return rows


def event_rows(events: Events, walls: int, detectors: int) -> tuple[NDArray[Any], NDArray[Any]]:
    """What happened on surfaces: losses on walls and electrodes, passages through detectors.

    Surfaces are numbered walls, detectors, electrodes, processes; what takes charges stands in the
    record as walls, electrodes, processes.
    """
    surface = events.surface
    lost = (surface < walls) | (surface >= walls + detectors)
    losses = np.zeros(int(lost.sum()), dataset("losses").dtype())
    crossings = np.zeros(int((~lost).sum()), dataset("crossings").dtype())
    for rows, chosen in ((losses, lost), (crossings, ~lost)):
        for name in ("time", "id", "cloud", "position", "velocity", "weight"):
            rows[name] = getattr(events, name)[chosen]
    losses["wall"] = surface[lost] - np.where(surface[lost] < walls, 0, detectors)
    squares = (losses["velocity"] ** 2).sum(axis=1)
    gamma = np.sqrt(1.0 + squares / SPEED_OF_LIGHT**2)
    losses["kinetic_energy"] = events.mass[lost] * squares / (1.0 + gamma)
    crossings["detector"] = surface[~lost] - walls
    crossings["direction"] = events.direction[~lost]
    return losses, crossings
