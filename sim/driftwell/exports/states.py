"""All charges that a run knows of at one time, one time after another."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.errors import RecordError
from driftwell.exports.wanted import Times
from driftwell.record.layout import dataset
from driftwell.record.reader import Run, opened


def states(run: Run, what: str, times: Times) -> Iterator[Snapshot]:
    """The snapshots, or with `what` = ``trajectory`` the tracked charges alive at each record.

    Raises RecordError where there is none at the times.
    """
    found = False
    for state in _snapshots(run, times) if what == "snapshots" else _records(run, times):
        found = True
        yield state
    if not found:
        raise RecordError(f"{run.folder}: nothing was recorded at these times. {_there(run, what)}")


def pieces(run: Run, path: str, choice: Any = ()) -> Iterator[NDArray[Any]]:
    """The rows of a dataset that grows, one segment after another; `choice` : of each."""
    for facts in run.segments:
        if facts.rows[str(dataset(path).shape[0])]:
            with opened(run.folder / facts.name) as file:
                rows = file[path][choice]
            yield rows


def tracked_clouds(run: Run) -> NDArray[np.int64]:
    """The place, in the header's clouds, of each tracked charge's cloud."""
    clouds = run.header.clouds
    first = np.array([cloud.first_id for cloud in clouds], dtype=np.int64)
    order = np.argsort(first, kind="stable")
    place = np.searchsorted(first[order], np.array(run.header.tracked, np.int64), side="right") - 1
    return np.asarray(order[place], dtype=np.int64)


def cloud_by_index(run: Run) -> dict[int, CloudFacts]:
    """The clouds by the number that stands for them in a record."""
    return {cloud.index: cloud for cloud in run.header.clouds}


def _snapshots(run: Run, times: Times) -> Iterator[Snapshot]:
    recorded = np.array(run.snapshots)
    for time in dict.fromkeys(recorded[times.taken(recorded)].tolist()):
        yield run.snapshot(time)


def _records(run: Run, times: Times) -> Iterator[Snapshot]:
    clouds = run.header.clouds
    place = tracked_clouds(run)
    ids = np.array(run.header.tracked, dtype=np.int64)
    index, charge, mass, weight = (
        np.array([getattr(cloud, name) for cloud in clouds])[place]
        for name in ("index", "charge", "mass", "weight")
    )
    both = zip(pieces(run, "trajectory/time"), pieces(run, "trajectory/state"), strict=True)
    for when, rows in both:
        for k in np.flatnonzero(times.taken(when)):
            alive = np.isfinite(rows[k]).all(axis=1)
            yield Snapshot(
                float(when[k]),
                ids[alive],
                index[alive],
                rows[k][alive, :3],
                rows[k][alive, 3:],
                charge[alive],
                mass[alive],
                weight[alive],
            )


def _there(run: Run, what: str) -> str:
    """What was recorded instead, in a sentence."""
    times = run.snapshots if what == "snapshots" else run.rows("trajectory/time").tolist()
    if not times:
        return f"It has no {what}."
    shown = [f"{time:.9g}" for time in times]
    if len(shown) > 8:
        shown = [*shown[:4], "...", *shown[-3:]]
    return f"Its {what} {'is' if len(times) == 1 else 'are'} at {', '.join(shown)} s."
