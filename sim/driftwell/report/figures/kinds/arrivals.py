"""Figure: when charges passed a detector: a histogram, with mean and rms width.

Mean and rms are over the passages, each with its charge's weight; counted are real particles.
"""

from __future__ import annotations

import math

import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.figures.kind import Kind, chosen_clouds
from driftwell.report.figures.options import FigureError, FigureOptions, known, stretch
from driftwell.report.figures.print_style import LINE, SMALL, blank, finish
from driftwell.report.figures.profile_panel import power_ruler
from driftwell.report.paper.histogram import bins
from driftwell.report.paper.palette import INK, PALE, colour
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import in_words, interval, ruler
from driftwell.report.paper.sheet import Entry
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

ROOM = 1.22
"""Height of the panel over that of the histogram: the numbers stand above it."""
HATCHES = ("", "////", "\\\\\\\\", "....", "xxxx")


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """The passages through the detector asked for, through the first that was passed otherwise."""
    passages, name = chosen_passages(scene, options)
    times = passages["time"]
    low, high = stretch(options.across, "s", "across") or interval(times)
    across = ruler((low, high), "s")
    inside = (times >= low) & (times <= high)
    if not inside.any():
        raise FigureError(f'across: no charge passed "{name}" in that stretch of time.')
    passages, times = passages[inside], times[inside]
    edges = bins(times.size, low, high)
    clouds = [cloud for cloud in scene.clouds if (passages["cloud"] == cloud.index).any()]
    key = [Entry(cloud.name, colour(cloud.index), "s") for cloud in clouds]
    figure = blank(scene.run, options, key)
    panel = figure.subplots()
    error = np.sqrt(np.histogram(times, edges, weights=passages["weight"] ** 2)[0])
    total = np.histogram(times, edges, weights=passages["weight"])[0]
    up = power_ruler((0.0, ROOM * float((total + error).max())), 0)
    base = np.zeros(edges.size - 1)
    for k, cloud in enumerate(clouds):
        own = passages["cloud"] == cloud.index
        top = base + np.histogram(times[own], edges, weights=passages["weight"][own])[0]
        panel.stairs(
            up.shown(top),
            across.shown(edges),
            baseline=up.shown(base),
            fill=True,
            facecolor=colour(cloud.index),
            edgecolor="white" if HATCHES[k % len(HATCHES)] else "none",
            hatch=HATCHES[k % len(HATCHES)],
            alpha=0.8,
            linewidth=0.0,
        )
        base = top
    middles = across.shown(0.5 * (edges[:-1] + edges[1:]))
    panel.errorbar(
        middles, up.shown(total), up.shown(error), fmt="none", ecolor=INK, elinewidth=0.5
    )
    mean, spread = mean_and_rms(times, passages["weight"])
    panel.axvline(float(across.shown(mean)), color=INK, linewidth=0.8, linestyle="--")
    panel.annotate(
        f"mean {in_words(mean, 's', digits_for(mean, spread))}\nrms {in_words(spread, 's')}",
        (0.98, 0.97),
        xycoords="axes fraction",
        ha="right",
        va="top",
        fontsize=SMALL,
        bbox={"facecolor": "white", "edgecolor": PALE, "linewidth": 0.4, "pad": 1.5},
    )
    put_up(panel, up, f"particles per {in_words(float(edges[1] - edges[0]), 's')}")
    put_across(panel, across, "time", 5)
    for line in panel.lines:
        line.set_linewidth(min(line.get_linewidth(), LINE))
    return finish(figure)


def chosen_passages(scene: Scene, options: FigureOptions) -> tuple[NDArray[np.void], str]:
    """The passages through the detector, and by the clouds, that were asked for."""
    run, crossings = scene.run, scene.crossings
    wanted = {cloud.index for cloud in chosen_clouds(scene, options)}
    crossings = crossings[np.isin(crossings["cloud"], list(wanted))]
    if options.detector is None:
        if not len(crossings):
            raise FigureError("of: no charge of these clouds passed a detector.")
        number = int(crossings["detector"].min())
    else:
        number = run.detectors.index(known(options.detector, run.detectors, "detector"))
    passages = crossings[crossings["detector"] == number]
    if not len(passages):
        raise FigureError(
            f'detector: nothing of what was asked for passed "{run.detectors[number]}".'
        )
    return passages, run.detectors[number]


def mean_and_rms(times: Floats, weight: Floats) -> tuple[float, float]:
    """Mean, and rms about it, with weights."""
    mean = float(np.average(times, weights=weight))
    return mean, math.sqrt(float(np.average((times - mean) ** 2, weights=weight)))


def digits_for(mean: float, spread: float) -> int:
    """Digits of a mean that show a tenth of the spread."""
    if not mean or not spread:
        return 4
    return min(max(math.ceil(math.log10(abs(mean) / spread)) + 2, 3), 10)


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    if not scene.run.detectors:
        return "the scenario has no detector"
    return "" if len(scene.crossings) else "no charge passed a detector"


KIND = Kind(
    "arrival times at a detector, with mean and rms",
    ("of", "detector", "across"),
    missing,
    draw,
)
