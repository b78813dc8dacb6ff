"""Panels with time across: their axis, and lines that show single records where those are few."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator
from numpy.typing import ArrayLike, NDArray

from driftwell.report.paper.panel import ACROSS_MOST, put_across, put_up
from driftwell.report.paper.ruler import Ruler, in_words, interval, prefix_size, ruler

Floats = NDArray[np.float64]

FEW = 20
"""Up to so many records each is marked."""
BROAD, MIDDLE, NARROW = 1.9, 1.3, 0.8
"""Widths of lines that may lie on one another, drawn in this order."""
WIDE = 200.0
"""Values that differ by more than this factor are shown on a logarithmic axis."""


def time_ruler(times: ArrayLike) -> Ruler:
    """The axis for these times, s, without margins."""
    return ruler(interval(times, margin=0.0), "s")


def put_time(
    axes: Axes,
    times: Ruler,
    recorded: Floats | None = None,
    labelled: bool = True,
    most: int = ACROSS_MOST,
) -> None:
    """Give a panel its time axis.

    recorded : times of the records, s: how far apart they are is said
    labelled : whether numbers and name stand below the axis
    most : numbers along the axis
    """
    put_across(axes, times, "time", most)
    if labelled:
        axes.set_xlabel(times.label("time") + _spacing(recorded))
    else:
        axes.set_xlabel("")
        axes.tick_params(labelbottom=False)


def put_line(
    axes: Axes, across: Floats, up: Floats, colour: str, line: str = "-", width: float = MIDDLE
) -> None:
    """Draw values as they stand along the axes, in the order given."""
    axes.plot(
        across,
        up,
        line,
        color=colour,
        linewidth=width,
        marker="." if np.isfinite(up).sum() <= FEW else "",
        markersize=4.0,
        alpha=0.9,
    )


def put_amounts(axes: Axes, curves: Sequence[Floats], unit: str, name: str) -> Ruler:
    """Give a panel the upward axis for amounts that are not negative, logarithmic if they need it.

    curves : in SI; the axis holds them all
    """
    values = np.concatenate([np.ravel(curve) for curve in curves])
    values = values[np.isfinite(values)]
    positive = values[values > 0.0]
    if positive.size and positive.max() > WIDE * positive.min() and positive.size == values.size:
        low, high = float(positive.min()), float(positive.max())
        free = (high / low) ** 0.05
        middle = prefix_size(math.sqrt(low * high)) if unit else None
        shown = ruler((low / free, high * free), unit, middle)
        axes.set_ylim(*shown.limits)
        axes.set_ylabel(shown.label(name))
        axes.set_yscale("log")
        decades = np.log10(high / low)
        put_decades(axes, (1.0, 2.0, 5.0) if decades < 2.5 else (1.0,))
    else:
        shown = ruler(interval(values, zero=True), unit)
        put_up(axes, shown, name, whole=not unit)
    return shown


def put_decades(axes: Axes, places: Sequence[float]) -> None:
    """Plain numbers along a logarithmic axis, at these places of each decade."""
    axes.yaxis.set_major_locator(LogLocator(subs=places))
    axes.yaxis.set_minor_locator(NullLocator())
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}".replace("-", "−")))


def _spacing(recorded: Floats | None) -> str:
    """What lies between records, for what is faster is not seen."""
    if recorded is None or recorded.size < 3:
        return ""
    return f", a record every {in_words(float(np.median(np.diff(recorded))), 's')}"
