"""Picture: the envelope of a beam: its size across, and its charge per length, along its flight.

The beam is cut into slices along the axis it flies along; the size of a slice is about its own
middle, as for the question `beam-envelope`. Slices with few charges show none.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.answers.extent import extent
from driftwell.report.paper.palette import BLUE, INK, VERMILLION, Line, colour, line_style
from driftwell.report.paper.panel import put_across
from driftwell.report.paper.projection import cloud_key
from driftwell.report.paper.ruler import Ruler, in_words, interval, ruler
from driftwell.report.paper.sheet import Entry, sheet
from driftwell.report.paper.time_axis import MIDDLE, NARROW, put_amounts, put_line
from driftwell.report.pictures.phase_space import flight_axis
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

AXES = "xyz"
LEAST = 400
"""Fewer charges do not show how the size changes along a beam."""
FEWEST_IN_SLICE = 20
IN_SLICE = 150
"""Charges of a slice on average, where there are not more slices than MOST_SLICES."""
MOST_SLICES = 80
ENDS = (0.002, 0.998)
"""Parts of the charges between which slices lie."""


@dataclass(frozen=True, slots=True)
class Curve:
    """Sizes (k,), m, of the slices, and how they are drawn."""

    size: Floats
    colour: str
    line: Line
    width: float


def envelope_picture(scene: Scene) -> Figure | None:
    """Start and end, side by side; None where too few charges fly along an axis."""
    views = [
        (word, view, axis)
        for word, view in scene.views
        if len(view.id) >= LEAST and (axis := flight_axis(view)) is not None
    ]
    if not views:
        return None
    alone = len(scene.clouds) == 1
    key = (
        _key_of_one(views[0][2])
        if alone and len({axis for *_, axis in views}) == 1
        else [*cloud_key(scene.clouds, lines=True), Entry("size: rms radius", INK)]
    )
    named = alone and len(key) == 3
    figure = sheet(scene.run, 9.6 if len(views) > 1 else 6.4, 5.4, key)
    panels = figure.subplots(
        2, len(views), squeeze=False, gridspec_kw={"height_ratios": [1.6, 1.0]}
    )
    for column, (word, view, axis) in enumerate(views):
        edges = slice_edges(view.position[:, axis])
        along = ruler(interval(edges, margin=0.0), "m")
        put_sizes(panels[0, column], view, axis, edges, along, named)
        put_line_charge(panels[1, column], view, axis, edges, along, scene.clouds)
        put_across(panels[0, column], along, "", 6)
        panels[0, column].set_xlabel("")
        panels[0, column].tick_params(labelbottom=False)
        put_across(panels[1, column], along, AXES[axis], 6)
        head = f"{word}: t = {in_words(view.time, 's', 4)}, {len(view.id)} charges"
        panels[0, column].set_title(head)
        panels[1, column].set_title(
            f"slices of {in_words(float(edges[1] - edges[0]), 'm')} along {AXES[axis]}"
        )
    return figure


def slice_edges(along: Floats) -> Floats:
    """Edges (k + 1,), m, of equal slices over places (n,) along the beam."""
    low, high = np.quantile(along, ENDS)
    if high <= low:
        low, high = low - 0.5, high + 0.5
    count = min(max(along.size // IN_SLICE, 4), MOST_SLICES)
    return np.linspace(low, high, count + 1)


def slice_sizes(along: Floats, places: Floats, edges: Floats, measure: str) -> Floats:
    """Size (k,) of each slice, m; not a number where it holds too few charges.

    along : (n,) places along the beam; places : (axes, n), those across it
    """
    number = np.searchsorted(edges, along, side="right") - 1
    order = np.argsort(number, kind="stable")
    first, last = (
        np.searchsorted(number[order], np.arange(edges.size - 1), side=side)
        for side in ("left", "right")
    )
    sizes = np.full(edges.size - 1, np.nan)
    for k, (begin, end) in enumerate(zip(first, last, strict=True)):
        if end - begin >= FEWEST_IN_SLICE:
            chosen = places[:, order[begin:end]]
            sizes[k] = extent(chosen, "edge" if measure == "edge" else "rms")
    return sizes


def put_sizes(
    axes: Axes, view: Snapshot, axis: int, edges: Floats, along: Ruler, named: bool
) -> None:
    """Draw sizes: of one cloud by axis and the 90 % radius, of several their rms radii."""
    across = [k for k in range(3) if k != axis]
    place, position = view.position[:, axis], view.position.T
    curves = []
    if named:
        for k, look in zip(across, (BLUE, VERMILLION), strict=True):
            size = slice_sizes(place, position[[k]], edges, "rms")
            curves.append(Curve(size, look, "-", MIDDLE))
        size = slice_sizes(place, position[across], edges, "edge")
        curves.append(Curve(size, INK, "--", NARROW))
    else:
        for cloud in np.unique(view.cloud):
            own = view.cloud == cloud
            size = slice_sizes(place[own], position[across][:, own], edges, "rms")
            curves.append(Curve(size, colour(int(cloud)), line_style(int(cloud)), MIDDLE))
    shown = put_amounts(axes, [curve.size for curve in curves], "m", "size")
    middles = along.shown(0.5 * (edges[:-1] + edges[1:]))
    for curve in curves:
        put_line(axes, middles, shown.shown(curve.size), curve.colour, curve.line, curve.width)


def put_line_charge(
    axes: Axes,
    view: Snapshot,
    axis: int,
    edges: Floats,
    along: Ruler,
    clouds: Sequence[CloudFacts],
) -> None:
    """Draw the charge per length of each cloud, without its sign."""
    densities = {}
    for cloud in clouds:
        own = view.cloud == cloud.index
        charge = np.abs(view.charge[own] * view.weight[own])
        held = np.histogram(view.position[own, axis], edges, weights=charge)[0]
        densities[cloud.index] = held / np.diff(edges)
    shown = put_amounts(axes, [*densities.values(), np.zeros(1)], "C/m", "charge per length")
    for number, density in densities.items():
        axes.stairs(
            shown.shown(density),
            along.shown(edges),
            color=INK if len(densities) == 1 else colour(number),
            linestyle=line_style(number),
            linewidth=MIDDLE,
            baseline=None,
        )


def _key_of_one(axis: int) -> list[Entry]:
    """The key where there is one cloud: sizes along both axes across, and the edge."""
    first, second = (AXES[k] for k in range(3) if k != axis)
    return [
        Entry(f"rms size along {first}", BLUE, line="-", width=MIDDLE),
        Entry(f"rms size along {second}", VERMILLION, line="-", width=MIDDLE),
        Entry("radius that holds 90 %", INK, line="--", width=NARROW),
    ]
