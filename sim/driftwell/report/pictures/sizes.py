"""Picture: sizes, temperatures and number of charges of each cloud, in time."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.kinds.temperature import Temperature
from driftwell.report.paper.palette import BLUE, GREEN, VERMILLION, colour, line_style
from driftwell.report.paper.panel import ACROSS_MOST
from driftwell.report.paper.projection import cloud_key
from driftwell.report.paper.ruler import Ruler
from driftwell.report.paper.sheet import Entry, sheet
from driftwell.report.paper.time_axis import (
    BROAD,
    MIDDLE,
    NARROW,
    put_amounts,
    put_line,
    put_time,
    time_ruler,
)
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

AXES = ("x", "y", "z")
AXIS_COLOURS = (BLUE, VERMILLION, GREEN)
AXIS_WIDTHS = (BROAD, MIDDLE, NARROW)
LEAST = 2
"""Fewer charges have no size and no temperature."""


@dataclass(frozen=True, slots=True)
class Curve:
    """One line: its values in SI, and how it is drawn."""

    time: Floats
    value: Floats
    colour: str
    line: str
    width: float


def sizes_picture(scene: Scene) -> Figure | None:
    """For one cloud all axes in one panel, for several a panel for each axis.

    None where there are no two records, or never two charges in a cloud and none lost.
    """
    kept = [
        (cloud, moments)
        for cloud, moments in zip(scene.clouds, scene.moments, strict=True)
        if moments.time.size > 1
    ]
    if not kept:
        return None
    sized = [pair for pair in kept if pair[1].count.max() >= LEAST]
    if not sized and all(np.ptp(moments.count) == 0 for _, moments in kept):
        return None
    alone = len(kept) == 1
    columns, most = (1, ACROSS_MOST) if alone else (len(AXES), 4)
    rows = 3 if sized else 1
    key = (
        [
            Entry(axis, look, line="-", width=width)
            for axis, look, width in zip(AXES, AXIS_COLOURS, AXIS_WIDTHS, strict=True)
        ]
        if alone
        else cloud_key([cloud for cloud, _ in kept], lines=True)
    )
    figure = sheet(scene.run, 9.6, 1.3 + 2.1 * rows, key)
    grid = figure.add_gridspec(rows, columns, height_ratios=[1.0, 1.0, 0.45][-rows:])
    times = time_ruler(np.concatenate([moments.time for _, moments in kept]))
    if sized:
        for row, (name, unit, quantity) in enumerate(
            (("rms size", "m", rms_sizes), ("temperature", "K", temperatures))
        ):
            panels = [figure.add_subplot(grid[row, column]) for column in range(columns)]
            put_quantity(panels, sized, times, (name, unit), quantity, alone)
            for panel in panels:
                put_time(panel, times, labelled=not alone and row == 1, most=most)
    left = figure.add_subplot(grid[rows - 1, :])
    put_counts(left, kept, times, alone)
    return figure


def rms_sizes(cloud: CloudFacts, moments: Moments) -> Floats:
    """Sizes (k, 3), m, about the centre; not a number where fewer than two charges are left."""
    return np.sqrt(np.diagonal(moments.covariance, axis1=-2, axis2=-1)[:, :3])


def temperatures(cloud: CloudFacts, moments: Moments) -> Floats:
    """Temperatures (k, 3), K, as the answer of that name has them."""
    return np.stack(
        [
            Temperature(name=axis, ask="temperature", of=cloud.name, axis=axis).of_moments(
                moments, cloud
            )
            for axis in ("x", "y", "z")
        ],
        axis=1,
    )


def put_quantity(
    panels: Sequence[Axes],
    sized: Sequence[tuple[CloudFacts, Moments]],
    times: Ruler,
    named: tuple[str, str],
    quantity: Callable[[CloudFacts, Moments], Floats],
    alone: bool,
) -> None:
    """Draw a quantity of each cloud along each axis: into one panel, or one for each axis."""
    curves: list[list[Curve]] = [[] for _ in AXES]
    for cloud, moments in sized:
        several = records_where(moments, moments.count >= LEAST)
        value = quantity(cloud, several)
        for axis in range(3):
            look = (
                (AXIS_COLOURS[axis], "-", AXIS_WIDTHS[axis])
                if alone
                else (colour(cloud.index), line_style(cloud.index), MIDDLE)
            )
            curves[axis].append(Curve(several.time, value[:, axis], *look))
    every = [curve.value for axis in curves for curve in axis]
    name, unit = named
    for column, panel in enumerate(panels):
        shown = put_amounts(panel, every, unit, name if alone else f"{name} {AXES[column]}")
        for curve in (each for axis in curves for each in axis) if alone else curves[column]:
            across, up = times.shown(curve.time), shown.shown(curve.value)
            put_line(panel, across, up, curve.colour, curve.line, curve.width)


def put_counts(
    axes: Axes, kept: Sequence[tuple[CloudFacts, Moments]], times: Ruler, alone: bool
) -> None:
    """Draw how many charges are left."""
    counts = [moments.count.astype(np.float64) for _, moments in kept]
    shown = put_amounts(axes, [*counts, np.zeros(1)], "", "charges left")
    for (cloud, moments), count in zip(kept, counts, strict=True):
        look = ("#000000", "-") if alone else (colour(cloud.index), line_style(cloud.index))
        put_line(axes, times.shown(moments.time), shown.shown(count), *look)
    put_time(axes, times, kept[0][1].time)


def records_where(moments: Moments, chosen: NDArray[np.bool_]) -> Moments:
    """The records where `chosen` is true."""
    return Moments(
        moments.time[chosen],
        moments.count[chosen],
        moments.centre[chosen],
        moments.covariance[chosen],
        moments.kinetic_energy[chosen],
        moments.kinetic_variance[chosen],
    )
