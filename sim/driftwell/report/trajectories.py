"""Picture: the ways of a few tracked charges, in time and in space."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.palette import colour
from driftwell.report.projection import frame, put_frame
from driftwell.report.ruler import interval, ruler
from driftwell.report.scene import Scene
from driftwell.report.sheet import Entry, sheet
from driftwell.report.time_axis import MIDDLE, put_line, put_time, time_ruler

Floats = NDArray[np.float64]

AXES = "xyz"
MOST = 6
"""Charges whose ways are drawn."""
SIDE_RATIO, FRONT_RATIO = 1.5, 1.0


@dataclass(frozen=True, slots=True)
class Way:
    """Where one charge was: times (k,), s, and positions (k, 3), m; `lost` : ended on a wall."""

    charge: int
    time: Floats
    position: Floats
    lost: bool


def trajectories_picture(scene: Scene) -> Figure | None:
    """None where no charge was tracked for two records."""
    ways = [way for way in map(lambda charge: _way(scene, charge), _chosen(scene)) if way]
    if not ways:
        return None
    key = [
        Entry(f"charge {way.charge}{' (lost at ×)' if way.lost else ''}", colour(k), line="-")
        for k, way in enumerate(ways)
    ]
    figure = sheet(scene.run, 9.6, 6.9, key)
    left, right = figure.add_gridspec(1, 2, width_ratios=[1.35, 1.0])
    rows = left.subgridspec(3, 1)
    times = time_ruler(np.concatenate([way.time for way in ways]))
    places = np.concatenate([way.position for way in ways])
    reach = float(np.ptp(places, axis=0).max())
    limits = [interval(places[:, axis], least=reach) for axis in range(3)]
    for axis in range(3):
        panel = figure.add_subplot(rows[axis])
        shown = ruler(limits[axis], "m")
        for k, way in enumerate(ways):
            put_way(panel, times.shown(way.time), shown.shown(way.position[:, axis]), k, way.lost)
        panel.set_ylim(*shown.limits)
        panel.set_ylabel(shown.label(AXES[axis]))
        put_time(panel, times, scene.run.rows("trajectory/time"), labelled=axis == 2)
    columns = right.subgridspec(2, 1, height_ratios=[1.0, SIDE_RATIO])
    for row, (plane, ratio) in enumerate((((2, 0), SIDE_RATIO), ((0, 1), FRONT_RATIO))):
        panel = figure.add_subplot(columns[row])
        seen = frame(limits[plane[0]], limits[plane[1]], ratio)
        for k, way in enumerate(ways):
            across, up = (way.position[:, axis] for axis in plane)
            put_way(panel, seen.across.shown(across), seen.up.shown(up), k, way.lost)
        put_frame(panel, seen, (AXES[plane[0]], AXES[plane[1]]), ratio)
    return figure


def put_way(axes: Axes, across: Floats, up: Floats, number: int, lost: bool) -> None:
    """Draw a way, with a cross where it ended on a wall."""
    put_line(axes, across, up, colour(number), width=MIDDLE - 0.3)
    if lost:
        axes.plot(across[-1:], up[-1:], "x", color=colour(number), markersize=6.0)


def _chosen(scene: Scene) -> list[int]:
    """A few tracked charges, evenly chosen by id."""
    tracked = scene.run.header.tracked
    places = np.unique(np.linspace(0, len(tracked) - 1, min(MOST, len(tracked))).round())
    return [tracked[int(place)] for place in places]


def _way(scene: Scene, charge: int) -> Way | None:
    """The way of a charge up to its loss, None where it has fewer than two points."""
    time, state = scene.run.track(charge)
    known = np.isfinite(state[:, :3]).all(axis=1)
    time, position = time[known], state[known, :3]
    loss = scene.losses[scene.losses["id"] == charge]
    if len(loss):
        time = np.append(time, loss["time"][:1])
        position = np.concatenate([position, loss["position"][:1]])
    return Way(charge, time, position, len(loss) > 0) if time.size > 1 else None
