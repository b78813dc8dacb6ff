"""Picture: where charges were lost, when, and on what."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.paper.histogram import put_histogram
from driftwell.report.paper.palette import INK, colour, marker
from driftwell.report.paper.panel import put_up
from driftwell.report.paper.projection import MOST_DOTS, frame, plane_limits, put_frame
from driftwell.report.paper.ruler import Ruler, interval, ruler
from driftwell.report.paper.sheet import Entry, printable, sheet
from driftwell.report.paper.time_axis import put_time, time_ruler
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

PART = 0.25
"""Losses in less than this part of the run are shown without the rest of it."""
SIDE_RATIO, FRONT_RATIO = 2.0, 1.0


def losses_picture(scene: Scene) -> Figure | None:
    """None where nothing was lost."""
    losses = scene.losses
    if not len(losses):
        return None
    header = scene.run.header
    walls, counts = np.unique(losses["wall"], return_counts=True)
    key = [
        Entry(
            f"{printable(header.walls[wall], 40)}: {count} lost",
            colour(int(wall)),
            marker(int(wall)),
        )
        for wall, count in zip(walls, counts, strict=True)
    ]
    figure = sheet(scene.run, 9.6, 7.3, key)
    grid = figure.add_gridspec(2, 6)
    put_places(figure.add_subplot(grid[0, :4]), losses, side=True)
    put_places(figure.add_subplot(grid[0, 4:]), losses, side=False)
    times = loss_times(losses, scene.run.end_time)
    put_rate(figure.add_subplot(grid[1, :3]), losses, times)
    put_share(figure.add_subplot(grid[1, 3:]), scene, times)
    return figure


def loss_times(losses: NDArray[np.void], end: float) -> Ruler:
    """The time axis: the whole run, or when charges were lost if that is a small part of it."""
    low, high = interval(losses["time"])
    if high - low > PART * end:
        return time_ruler([0.0, end])
    return ruler((max(low, 0.0), min(high, end)), "s")


def put_places(axes: Axes, losses: NDArray[np.void], side: bool) -> None:
    """Where charges were lost: distance from the z axis along it, or seen along it."""
    x, y, z = losses["position"].T
    across, up = (z, np.hypot(x, y)) if side else (x, y)
    ratio = SIDE_RATIO if side else FRONT_RATIO
    reach = float(max(map(np.ptp, (x, y, z)))) or float(np.abs(losses["position"]).max())
    shown = frame(*plane_limits(across, up, reach, up_from_zero=side), ratio)
    put_frame(axes, shown, ("z", "distance from z axis") if side else ("x", "y"))
    size = 4.0 if len(losses) <= 300 else 2.4
    for wall in np.unique(losses["wall"]):
        own = np.flatnonzero(losses["wall"] == wall)
        own = own[:: max(1, -(-len(losses) // MOST_DOTS))]
        axes.plot(
            shown.across.shown(across[own]),
            shown.up.shown(up[own]),
            linestyle="none",
            marker=marker(int(wall)),
            markersize=size,
            markeredgewidth=0.0,
            color=colour(int(wall)),
            alpha=0.6,
        )
    axes.set_title("where" if side else "seen along z")


def put_rate(axes: Axes, losses: NDArray[np.void], times: Ruler) -> None:
    """How many were lost in each stretch of time, by wall."""
    groups = [
        (losses["time"][losses["wall"] == wall], colour(int(wall)))
        for wall in np.unique(losses["wall"])
    ]
    put_histogram(axes, groups, times, "charges lost")
    put_time(axes, times)
    axes.set_title("when")


def put_share(axes: Axes, scene: Scene, times: Ruler) -> None:
    """Which part of all charges has been lost until then, by wall and in all."""
    losses = scene.losses
    real = sum(cloud.count * cloud.weight for cloud in scene.clouds)
    walls = np.unique(losses["wall"])
    curves = [(losses[losses["wall"] == wall], colour(int(wall)), 1.3) for wall in walls]
    if len(walls) > 1:
        curves.append((losses, INK, 2.0))
    most = 100.0 * float(losses["weight"].sum()) / real
    shown = ruler(interval([most], zero=True), "")
    for rows, look, width in curves:
        order = np.argsort(rows["time"], kind="stable")
        share = 100.0 * np.cumsum(rows["weight"][order]) / real
        time = np.concatenate([[times.low], rows["time"][order], [times.high]])
        steps = np.concatenate([[0.0], share, share[-1:]])
        axes.plot(
            times.shown(time), steps, color=look, linewidth=width, drawstyle="steps-post", alpha=0.9
        )
    put_up(axes, shown, "part of all charges (%)")
    put_time(axes, times)
    axes.set_title("lost so far" + (", black: on all walls" if len(walls) > 1 else ""))
