"""Picture: what detectors saw: the spot on each, and when charges passed."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.paper.histogram import put_histogram
from driftwell.report.paper.palette import colour, marker
from driftwell.report.paper.projection import MOST_DOTS, cloud_key, frame, plane_limits, put_frame
from driftwell.report.paper.ruler import interval, ruler
from driftwell.report.paper.sheet import printable, sheet
from driftwell.report.paper.time_axis import put_time
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

AXES = "xyz"
MOST_DETECTORS = 5
"""More detectors than these are left out, those with the fewest passages first."""


def arrivals_picture(scene: Scene) -> Figure | None:
    """A row for each detector that was passed; None where none was."""
    crossings = scene.crossings
    if not len(crossings):
        return None
    counts = np.bincount(crossings["detector"], minlength=len(scene.run.detectors))
    busiest = np.argsort(-counts, kind="stable")[:MOST_DETECTORS]
    chosen = [int(number) for number in np.sort(busiest) if counts[number]]
    figure = sheet(scene.run, 9.6, 0.9 + 2.9 * len(chosen), cloud_key(scene.clouds))
    panels = figure.subplots(
        len(chosen), 2, squeeze=False, gridspec_kw={"width_ratios": [1.0, 2.0]}
    )
    for row, number in enumerate(chosen):
        passed = crossings[crossings["detector"] == number]
        put_spot(panels[row, 0], passed)
        put_passages(panels[row, 1], passed)
        against = int((passed["direction"] < 0).sum())
        name = printable(scene.run.detectors[number], 40)
        panels[row, 0].set_title(name)
        panels[row, 1].set_title(
            f"{len(passed)} passage{'s' * (len(passed) != 1)}"
            + (f", {against} of them against the normal" if against else "")
        )
    return figure


def put_spot(axes: Axes, passed: NDArray[np.void]) -> None:
    """Where charges passed, in the two axes along which the places differ most."""
    position = passed["position"]
    first, second = across_axes(passed)
    reach = float(np.ptp(position, axis=0).max()) or float(np.abs(position).max())
    limits = plane_limits(position[:, first], position[:, second], reach)
    shown = frame(*limits, 1.0)
    put_frame(axes, shown, (AXES[first], AXES[second]))
    every = max(1, -(-len(passed) // MOST_DOTS))
    for cloud in np.unique(passed["cloud"]):
        own = np.flatnonzero(passed["cloud"] == cloud)[::every]
        axes.plot(
            shown.across.shown(position[own, first]),
            shown.up.shown(position[own, second]),
            linestyle="none",
            marker=marker(int(cloud)),
            markersize=4.5 if len(passed) <= 300 else 2.0,
            markeredgewidth=0.0,
            color=colour(int(cloud)),
            alpha=0.6,
        )


def across_axes(passed: NDArray[np.void]) -> tuple[int, int]:
    """The two axes across the detector: without that of the least width, or of the flight."""
    spans = np.ptp(passed["position"], axis=0)
    least = np.flatnonzero(spans <= spans.min() + 1e-9 * spans.max())
    speeds = np.abs(passed["velocity"]).mean(axis=0)
    normal = int(least[np.argmax(speeds[least])])
    first, second = (axis for axis in range(3) if axis != normal)
    return first, second


def put_passages(axes: Axes, passed: NDArray[np.void]) -> None:
    """How many passed in each stretch of time, by cloud."""
    low, high = interval(passed["time"])
    times = ruler((max(low, 0.0), high), "s")
    groups = [
        (passed["time"][passed["cloud"] == cloud], colour(int(cloud)))
        for cloud in np.unique(passed["cloud"])
    ]
    put_histogram(axes, groups, times, "passages")
    put_time(axes, times)
