"""Where the tracked charges of a run are at any time between its first and last record.

Between two records a charge goes straight on, at one speed: what is faster than the records is not
seen. A charge that was lost goes on to where it met the surface.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.report.figures.options import FigureError
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

AXES = "xyz"


@dataclass(frozen=True, slots=True)
class Courses:
    """The ways of n charges.

    time : (k,) s, of the records
    position : (k, n, 3) m; not a number where a charge is not there
    cloud : (n,) int64
    lost : (n,) s, when a charge was lost; infinite where it was not
    last : (n, 3) m, where that was
    cell : axis and length, m, of what repeats; a length of 0: nothing
    """

    time: Floats
    position: Floats
    cloud: Ints
    lost: Floats
    last: Floats
    cell: tuple[int, float]

    def at(self, t: float) -> Floats:
        """Places (n, 3), m, at a time, s; not a number for charges that are not there."""
        k = int(np.clip(np.searchsorted(self.time, t, side="right") - 1, 0, self.time.size - 2))
        begin, end = self.time[k], self.time[k + 1]
        before, after = self.position[k], self.position[k + 1]
        until = np.full(self.lost.shape, end)
        ends_here = (self.lost > begin) & (self.lost <= end)
        if ends_here.any():
            after = np.where(ends_here[:, None], self.last, after)
            until = np.where(ends_here, self.lost, until)
        part = np.clip((t - begin) / np.maximum(until - begin, 1e-300), 0.0, 1.0)[:, None]
        axis, length = self.cell
        apart = after - before
        if length > 0.0:
            apart[:, axis] -= length * np.round(apart[:, axis] / length)
        here = before + part * apart
        here[t >= self.lost] = np.nan
        return np.asarray(here)


def courses_of(scene: Scene, most: int) -> Courses:
    """The ways of at most so many tracked charges, evenly chosen.

    Raises FigureError where none was recorded.
    """
    header = scene.run.header
    time, state = scene.run.trajectory
    if time.size < 2 or not header.tracked:
        raise FigureError(
            f"{scene.run.folder}: the run recorded no ways of charges that a movie could show. "
            "`tracks` and `every` in [record] have them kept."
        )
    every = max(1, -(-len(header.tracked) // most))
    ids = np.array(header.tracked[::every], np.int64)
    position = np.ascontiguousarray(state[:, ::every, :3])
    cloud = np.zeros(ids.size, np.int64)
    for facts in header.clouds:
        cloud[(ids >= facts.first_id) & (ids < facts.first_id + facts.count)] = facts.index
    lost, last = np.full(ids.size, np.inf), np.full((ids.size, 3), np.nan)
    order = np.argsort(ids)
    losses = scene.losses[np.isin(scene.losses["id"], ids)]
    places = order[np.searchsorted(ids[order], losses["id"])]
    lost[places], last[places] = losses["time"], losses["position"]
    axis = AXES.index(header.cell_axis) if header.cell_axis else 0
    return Courses(time, position, cloud, lost, last, (axis, header.cell_length))
