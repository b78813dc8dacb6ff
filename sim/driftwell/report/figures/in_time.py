"""What figures with time across have in common: which clouds and records, one line for each."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.report.figures.kind import chosen_clouds
from driftwell.report.figures.options import AXES, FigureError, FigureOptions, axis_number, stretch
from driftwell.report.figures.print_style import LINE, blank, finish
from driftwell.report.paper.palette import BLUE, GREEN, VERMILLION, Line, colour, line_style
from driftwell.report.paper.ruler import Interval
from driftwell.report.paper.sheet import Entry
from driftwell.report.paper.time_axis import put_amounts, put_line, put_time, time_ruler
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]
Quantity = Callable[[CloudFacts, Moments], Floats]

LEAST = 2
"""Fewer charges have no size and no temperature."""
LOOKS: tuple[tuple[str, Line], ...] = ((BLUE, "-"), (VERMILLION, "--"), (GREEN, ":"))
"""Of x, y and z, where one cloud is shown."""


def figure_in_time(
    scene: Scene, options: FigureOptions, named: tuple[str, str], quantity: Quantity
) -> Figure:
    """A quantity (k, 3) in time: of one cloud along each axis, of several along one.

    named : what it is called, and its SI unit
    """
    kept = [
        (cloud, lasting(scene.run.moments(cloud.name))) for cloud in chosen_clouds(scene, options)
    ]
    kept = [(cloud, moments) for cloud, moments in kept if moments.time.size > 1]
    if not kept:
        raise FigureError(
            f"{scene.run.folder}: nothing of what was asked for holds {LEAST} charges at two "
            "records, so it has no such quantity in time."
        )
    alone = len(kept) == 1
    axes = [0, 1, 2] if options.axis is None and alone else [axis_number(options.axis, 2)]
    curves = [
        (moments.time, quantity(cloud, moments)[:, axis], _look(cloud, axis, alone), axis)
        for cloud, moments in kept
        for axis in axes
    ]
    key = [
        Entry(AXES[axis] if alone else kept[k // len(axes)][0].name, look[0], line=look[1])
        for k, (_, _, look, axis) in enumerate(curves)
    ]
    figure = blank(scene.run, options, key)
    panel = figure.subplots()
    name, unit = named
    title = name if len(axes) > 1 else f"{name} {AXES[axes[0]]}"
    times = time_ruler(np.concatenate([time for time, *_ in curves]))
    window = stretch(options.across, "s", "across")
    shown = put_amounts(panel, [_within(time, v, window) for time, v, *_ in curves], unit, title)
    for time, values, (look, line), _ in curves:
        put_line(panel, times.shown(time), shown.shown(values), look, line, LINE)
    put_time(panel, times, most=6)
    put_window(panel, times.shown, window)
    wanted = stretch(options.up, unit, "up") if unit == "m" else None
    if wanted is not None:
        panel.set_ylim(*shown.shown(wanted))
    return finish(figure)


def put_window(
    panel: Axes, shown: Callable[[Interval], Floats], window: tuple[float, float] | None
) -> None:
    """Narrow a panel to the times asked for."""
    if window is not None:
        low, high = shown(window)
        panel.set_xlim(float(low), float(high))


def lasting(moments: Moments) -> Moments:
    """The records at which enough charges are left."""
    chosen = moments.count >= LEAST
    return Moments(
        moments.time[chosen],
        moments.count[chosen],
        moments.centre[chosen],
        moments.covariance[chosen],
        moments.kinetic_energy[chosen],
        moments.kinetic_variance[chosen],
    )


def missing_in_time(scene: Scene) -> str:
    """Why it cannot be drawn."""
    kept: Sequence[Moments] = [lasting(moments) for moments in scene.moments]
    if any(moments.time.size > 1 for moments in kept):
        return ""
    return f"no cloud holds {LEAST} charges or more at two records"


def _look(cloud: CloudFacts, axis: int, alone: bool) -> tuple[str, Line]:
    return LOOKS[axis] if alone else (colour(cloud.index), _line(cloud.index))


def _line(number: int) -> Line:
    """Another kind of line for each cloud, so that colour is not all that tells them apart."""
    return line_style(7 * number)


def _within(time: Floats, values: Floats, window: tuple[float, float] | None) -> Floats:
    if window is None:
        return values
    inside = values[(time >= window[0]) & (time <= window[1])]
    return inside if inside.size else values
