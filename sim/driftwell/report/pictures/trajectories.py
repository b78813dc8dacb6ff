"""Picture: the ways of a few tracked charges, in time and in space."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.paper.palette import colour
from driftwell.report.paper.panel import put_up
from driftwell.report.paper.projection import Frame, frame, plane_limits, put_frame
from driftwell.report.paper.ruler import Ruler, interval, ruler
from driftwell.report.paper.sheet import Entry, sheet
from driftwell.report.paper.time_axis import FEW, put_line, put_time, time_ruler
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

AXES = "xyz"
MOST = 6
"""Charges whose ways are drawn."""
TURN, FLICKER = 0.7, 1.3
"""Change from one step to the next, over the step, from which lines between points would mislead:
for ways in space, about 9 points to a turn; for a coordinate in time, about 4 points to a period.
"""
VISIBLE = 0.02
"""Part of an axis below which a flicker is not seen."""
WIDTH = 1.0
SIDE_RATIO, FRONT_RATIO = 1.5, 1.0


@dataclass(frozen=True, slots=True)
class Way:
    """Where one charge was: times (k,), s, and positions (k, 3), m; `lost` : ended on a wall.

    cell : axis and length, m, of the periodic cell that it leaves and comes into again; None
        without one
    """

    charge: int
    time: Floats
    position: Floats
    lost: bool
    cell: tuple[int, float] | None = None

    def course(self, axis: int) -> tuple[Floats, Floats]:
        """Times and one coordinate, s and m, broken where that jumps."""
        return self._broken((axis,), self.time, self.position[:, axis])

    def path(self, first: int, second: int) -> tuple[Floats, Floats]:
        """Two coordinates, m, broken where one jumps."""
        across, up = self.position[:, first], self.position[:, second]
        return self._broken((first, second), across, up)

    def _broken(self, axes: Sequence[int], *values: Floats) -> tuple[Floats, Floats]:
        if self.cell is not None and self.cell[0] in axes:
            axis, length = self.cell
            jumps = np.flatnonzero(np.abs(np.diff(self.position[:, axis])) > 0.5 * length) + 1
            values = tuple(np.insert(each, jumps, np.nan) for each in values)
        return values[0], values[1]


def trajectories_picture(scene: Scene) -> Figure | None:
    """Coordinates in time on the left, ways in space on the right.

    None where no charge was tracked for two records.
    """
    ways = [way for way in (way_of(scene, charge) for charge in chosen_charges(scene)) if way]
    if not ways:
        return None
    key = [
        Entry(f"charge {way.charge}{', lost at ×' if way.lost else ''}", colour(k), "o", "-")
        for k, way in enumerate(ways)
    ]
    figure = sheet(scene.run, 9.6, 6.9, key)
    halves = figure.add_gridspec(1, 2, width_ratios=[1.35, 1.0])
    places = np.concatenate([way.position for way in ways])
    reach = float(np.ptp(places, axis=0).max())
    times = time_ruler([0.0, scene.run.end_time])
    rows = halves[0].subgridspec(3, 1)
    for axis in range(3):
        panel = figure.add_subplot(rows[axis])
        shown = ruler(interval(places[:, axis], least=reach), "m")
        put_courses(panel, ways, axis, times, shown)
        put_time(panel, times, scene.run.rows("trajectory/time"), labelled=axis == 2)
    columns = halves[1].subgridspec(2, 1, height_ratios=[1.0, SIDE_RATIO])
    for row, (plane, ratio) in enumerate((((2, 0), SIDE_RATIO), ((0, 1), FRONT_RATIO))):
        panel = figure.add_subplot(columns[row])
        limits = plane_limits(places[:, plane[0]], places[:, plane[1]], reach)
        put_paths(panel, ways, plane, frame(*limits, ratio))
    return figure


def put_courses(axes: Axes, ways: Sequence[Way], axis: int, times: Ruler, shown: Ruler) -> None:
    """Draw a coordinate of each charge in time."""
    courses = [
        (times.shown(time), shown.shown(place))
        for time, place in (way.course(axis) for way in ways)
    ]
    seen = VISIBLE * (shown.limits[1] - shown.limits[0])
    joined = not any(jagged(np.zeros(up.size), up, FLICKER, seen) for _, up in courses)
    for k, (way, (across, up)) in enumerate(zip(ways, courses, strict=True)):
        if joined:
            put_line(axes, across, up, colour(k), width=WIDTH)
        else:
            axes.plot(across, up, ".", color=colour(k), markersize=2.5, alpha=0.8)
        put_loss(axes, across, up, k, way.lost)
    put_up(axes, shown, AXES[axis], 5)


def put_paths(axes: Axes, ways: Sequence[Way], plane: tuple[int, int], shown: Frame) -> None:
    """Draw the way of each charge seen in a plane, a larger dot where it begins."""
    first, second = plane
    paths = [
        (shown.across.shown(across), shown.up.shown(up))
        for across, up in (way.path(first, second) for way in ways)
    ]
    joined = not any(jagged(*path, TURN) for path in paths)
    for k, (way, (across, up)) in enumerate(zip(ways, paths, strict=True)):
        look = colour(k)
        if joined:
            put_line(axes, across, up, look, width=WIDTH)
        else:
            axes.plot(across, up, ".", color=look, markersize=3.6, alpha=0.8, markeredgewidth=0.0)
        axes.plot(across[:1], up[:1], "o", color=look, markersize=4.5)
        put_loss(axes, across, up, k, way.lost)
    put_frame(axes, shown, (AXES[first], AXES[second]))


def put_loss(axes: Axes, across: Floats, up: Floats, number: int, lost: bool) -> None:
    """Put a cross where a way ended on a wall."""
    if lost:
        axes.plot(across[-1:], up[-1:], "x", color=colour(number), markersize=6.0, clip_on=False)


def jagged(across: Floats, up: Floats, most: float, seen: float = 0.0) -> bool:
    """Whether a way of many steps changes by more than `most` of a step from one to the next.

    seen : changes smaller than this are too small to mislead
    """
    steps = np.diff(np.stack([across, up]))
    if steps.shape[1] < FEW:
        return False
    length, turn = (np.nanmedian(np.hypot(*each)) for each in (steps, np.diff(steps)))
    return bool(turn > max(most * length, seen))


def chosen_charges(scene: Scene) -> list[int]:
    """A few tracked charges, evenly chosen by id."""
    tracked = scene.run.header.tracked
    places = np.unique(np.linspace(0, len(tracked) - 1, min(MOST, len(tracked))).round())
    return [tracked[int(place)] for place in places]


def way_of(scene: Scene, charge: int) -> Way | None:
    """The way of a charge up to its loss, None where it has fewer than two points."""
    time, state = scene.run.track(charge)
    known = np.isfinite(state[:, :3]).all(axis=1)
    time, position = time[known], state[known, :3]
    loss = scene.losses[scene.losses["id"] == charge]
    if len(loss):
        time = np.append(time, loss["time"][:1])
        position = np.concatenate([position, loss["position"][:1]])
    if time.size < 2:
        return None
    header = scene.run.header
    cell = (AXES.index(header.cell_axis), header.cell_length) if header.cell_axis else None
    return Way(charge, time, position, len(loss) > 0, cell)
