"""Charges seen along an axis: a cloud of dots, in the colours of the clouds they belong to."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.report.palette import PALE, colour, line_style, marker
from driftwell.report.panel import put_across, put_up
from driftwell.report.ruler import Interval, Ruler, prefix_size, ruler, widened
from driftwell.report.sheet import SMALL_SIZE, Entry

Floats = NDArray[np.float64]

MOST_DOTS = 20_000
"""More charges than this are thinned out evenly."""
UNLIKE = 4.0
"""A panel keeps both axes to one scale where that leaves at least one part in so many filled."""


@dataclass(frozen=True, slots=True)
class Frame:
    """The two axes of a panel; `true` : whether both are to one scale."""

    across: Ruler
    up: Ruler
    true: bool


def frame(across: Interval, up: Interval, ratio: float) -> Frame:
    """Axes for lengths in m within a panel `ratio` times as wide as high, to one scale if sensible.

    Limits are widened, never narrowed.
    """
    wide, high = across[1] - across[0], up[1] - up[0]
    true = wide <= UNLIKE * ratio * high and ratio * high <= UNLIKE * wide
    if not true:
        return Frame(ruler(across, "m"), ruler(up, "m"), true)
    across, up = widened(across, ratio * high), widened(up, wide / ratio)
    first, second = ruler(across, "m"), ruler(up, "m")
    size = prefix_size(
        max(abs(end - each.origin) for each in (first, second) for end in (each.low, each.high))
    )
    return Frame(ruler(across, "m", size), ruler(up, "m", size), true)


def put_frame(axes: Axes, shown: Frame, names: tuple[str, str], ratio: float) -> None:
    """Give a panel its axes and its shape."""
    put_across(axes, shown.across, names[0], 6)
    put_up(axes, shown.up, names[1], 6)
    axes.set_box_aspect(1.0 / ratio)
    if not shown.true:
        axes.text(
            0.99,
            0.01,
            "axes not to one scale",
            transform=axes.transAxes,
            ha="right",
            va="bottom",
            fontsize=SMALL_SIZE - 1.0,
            color=PALE,
        ).set_in_layout(False)


def put_dots(axes: Axes, snapshot: Snapshot, across: Floats, up: Floats, size: float = 1.0) -> None:
    """Draw each charge at values as they stand along the axes, thinned where there are many."""
    count = len(snapshot.id)
    every = thinning(count)
    width, alpha = _dot(-(-count // every))
    for cloud in np.unique(snapshot.cloud):
        own = np.flatnonzero(snapshot.cloud == cloud)[::every]
        axes.plot(
            across[own],
            up[own],
            linestyle="none",
            marker=marker(int(cloud)),
            markersize=width * size,
            markeredgewidth=0.0,
            color=colour(int(cloud)),
            alpha=alpha,
        )


def thinning(count: int) -> int:
    """Every how many charges one is drawn."""
    return max(1, -(-count // MOST_DOTS))


def cloud_key(clouds: Sequence[CloudFacts], lines: bool = False) -> list[Entry]:
    """The key to the colours of clouds, drawn as dots or as lines."""
    return [
        Entry(
            f"{cloud.name}: {cloud.count} {cloud.species}"
            + (f", each standing for {cloud.weight:.4g}" if cloud.weight != 1.0 else ""),
            colour(cloud.index),
            "" if lines else marker(cloud.index),
            line_style(cloud.index) if lines else "",
        )
        for cloud in clouds
    ]


def counted(number: int) -> str:
    """``1 charge``, ``400 charges``, and how many of them are drawn."""
    said = f"{number} charge{'s' * (number != 1)}"
    every = thinning(number)
    return said if every == 1 else f"{said}, one in {every} drawn"


def _dot(count: int) -> tuple[float, float]:
    """Size and opacity of a dot among so many."""
    for most, size, alpha in ((60, 6.0, 0.9), (600, 3.6, 0.75), (4000, 2.4, 0.55)):
        if count <= most:
            return size, alpha
    return 1.7, 0.4
