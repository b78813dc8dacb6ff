"""The ways of the charges that a player shows: read piece by piece, never the whole record."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from driftwell.record.layout import CHUNK_CHARGES
from driftwell.record.reader import Run, opened
from driftwell.report.player.choice import (
    cloud_of,
    columns_shown,
    evenly,
    records_shown,
    shares,
)

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

FEW_TRACKED = 200
"""Fewer tracked charges than this, of many, tell less than snapshots of all."""
ENOUGH_SNAPSHOTS = 12


@dataclass(frozen=True, slots=True)
class Ways:
    """Where the charges shown were.

    id : (n,); cloud : (n,) index in the record's clouds
    time : (k,) s, of each frame
    state : (n, k, 6) float64, m and m/s; not a number where a charge is not
    kept : times that the record holds of them; `source` : what these are, in a word
    """

    id: Ints
    cloud: Ints
    time: Floats
    state: Floats
    kept: int
    source: str

    def taken(self, which: NDArray[np.bool_]) -> Ways:
        """Some of the charges."""
        return replace(self, id=self.id[which], cloud=self.cloud[which], state=self.state[which])


def ways_of(run: Run) -> Ways | None:
    """What the record holds of ways; None where it holds no charge at any time."""
    tracked = np.array(run.header.tracked, np.int64)
    count = sum(run.born(cloud.name) for cloud in run.header.clouds)
    times = run.rows("trajectory/time")
    few = len(tracked) < FEW_TRACKED and len(tracked) < count
    by_snapshots = len(run.snapshots) >= ENOUGH_SNAPSHOTS or not len(tracked) or not len(times)
    found = _of_snapshots(run) if few and by_snapshots else _of_records(run, tracked, times)
    if found is None:
        return None
    found = found.taken(np.isfinite(found.state[:, :, 0]).any(axis=1) | _born(run, found))
    return found if len(found.id) and len(found.time) else None


def _of_records(run: Run, tracked: Ints, times: Floats) -> Ways | None:
    if not len(tracked) or not len(times):
        return None
    born = np.flatnonzero(_there(run, tracked))
    chosen = columns_shown(tracked[born], run.header.clouds, len(times))
    column = born[chosen.column]
    frame = records_shown(len(times), len(column))
    state = np.full((len(column), len(frame), 6), np.nan)
    first = 0
    for facts in run.segments:
        records = facts.rows["records"]
        own = np.flatnonzero((frame >= first) & (frame < first + records))
        if len(own):
            with opened(run.folder / facts.name) as file:
                rows = file["trajectory/state"]
                for some in _pieces(column):
                    low, high = int(column[some[0]]), int(column[some[-1]]) + 1
                    block = rows[:, low:high, :][frame[own] - first][:, column[some] - low]
                    state[np.ix_(some, own)] = block.transpose(1, 0, 2)
        first += records
    return Ways(tracked[column], chosen.cloud, times[frame], state, len(times), "records")


def _pieces(column: Ints) -> Iterator[Ints]:
    """Places in rising `column` of those that lie in one piece of the record each."""
    piece = column // CHUNK_CHARGES
    for each in np.unique(piece):
        yield np.flatnonzero(piece == each)


def _of_snapshots(run: Run) -> Ways | None:
    """The same from snapshots, which hold every charge."""
    clouds = run.header.clouds
    times = np.array(run.snapshots)
    if not len(times):
        return None
    numbers = shares([run.born(cloud.name) for cloud in clouds])
    ids = np.concatenate(
        [
            cloud.first_id + evenly(run.born(cloud.name), number)
            for cloud, number in zip(clouds, numbers, strict=True)
            if number
        ]
        or [np.zeros(0, np.int64)]
    )
    ids = np.sort(ids)
    times = times[records_shown(len(times), len(ids))]
    state = np.full((len(ids), len(times), 6), np.nan)
    for k, time in enumerate(times):
        view = run.snapshot(float(time))
        if not len(view.id):
            continue
        place = np.minimum(np.searchsorted(view.id, ids), len(view.id) - 1)
        alive = view.id[place] == ids
        state[alive, k, :3] = view.position[place[alive]]
        state[alive, k, 3:] = view.velocity[place[alive]]
    kept = len(run.snapshots)
    return Ways(ids, cloud_of(ids, clouds), times, state, kept, "snapshots")


def _there(run: Run, ids: Ints) -> NDArray[np.bool_]:
    """Whether each charge was there from the start, or was born."""
    emitted = [cloud.index for cloud in run.header.clouds if cloud.emitted]
    from_source = np.isin(cloud_of(ids, run.header.clouds), emitted)
    if not from_source.any():
        return np.ones(len(ids), np.bool_)
    return ~from_source | np.isin(ids, run.births()["id"])


def _born(run: Run, ways: Ways) -> NDArray[np.bool_]:
    """Whether each charge was born and lost, perhaps between two records."""
    return np.isin(ways.id, run.births()["id"]) | np.isin(ways.id, run.losses()["id"])
