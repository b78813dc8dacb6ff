"""Charges seen along an axis: a cloud of dots, in the colours of the clouds they belong to."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.report.paper.palette import colour, line_style, marker
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import THIN, Interval, Ruler, interval, ruler, widened
from driftwell.report.paper.sheet import Entry, printable

Floats = NDArray[np.float64]

MOST_DOTS = 20_000
"""More charges than this are thinned out evenly."""
FEW = 1000
"""Clouds up to this are never thinned."""
UNLIKE = 4.0
"""A panel keeps both axes to one scale where that leaves at least one part in so many filled."""
LEGIBLE = 0.2
"""An axis whose numbers are all below this part of the unit needs a smaller unit."""


@dataclass(frozen=True, slots=True)
class Frame:
    """The two axes of a panel.

    ratio : width over height of the panel
    true : whether both axes are to one scale
    """

    across: Ruler
    up: Ruler
    ratio: float
    true: bool


def plane_limits(
    across: Floats, up: Floats, reach: float, up_from_zero: bool = False
) -> tuple[Interval, Interval]:
    """Limits, m, that hold points in a plane.

    A side without width gets that of the other side, and if that has none either, `reach`.
    """
    wide, high = (
        span if span > THIN * reach else reach
        for span in (float(np.ptp(side)) for side in (across, up))
    )
    return interval(across, least=high), interval(up, least=wide, zero=up_from_zero)


def frame(across: Interval, up: Interval, ratio: float, size: float | None = None) -> Frame:
    """Axes for lengths in m within a panel `ratio` times as wide as high, to one scale if sensible.

    Limits are widened, never narrowed. `size` : see :func:`driftwell.report.paper.ruler.ruler`.
    """
    wide, high = across[1] - across[0], up[1] - up[0]
    true = wide <= UNLIKE * ratio * high and ratio * high <= UNLIKE * wide
    if true:
        across, up = widened(across, ratio * high), widened(up, wide / ratio)
        size = size or max(ruler(limits, "m").size for limits in (across, up))
    return Frame(ruler(across, "m", size), ruler(up, "m", size), ratio, true)


def common_size(limits: Sequence[Interval]) -> float | None:
    """The size in which all these lengths can be shown, None where they are too different."""
    size = max(ruler(each, "m").size for each in limits)
    narrowest = min(high - low for low, high in limits)
    return size if narrowest >= LEGIBLE * size else None


def put_frame(axes: Axes, shown: Frame, names: tuple[str, str]) -> None:
    """Give a panel its axes and its shape."""
    put_across(axes, shown.across, names[0], 6)
    put_up(axes, shown.up, names[1], 6)
    axes.set_box_aspect(1.0 / shown.ratio)
    if not shown.true:
        axes.set_xlabel(f"{axes.get_xlabel()}, not to scale")


def put_dots(axes: Axes, snapshot: Snapshot, across: Floats, up: Floats, size: float = 1.0) -> None:
    """Draw each charge at values as they stand along the axes, thinned where there are many."""
    count = len(snapshot.id)
    every = thinning(count)
    width, alpha = _dot(-(-count // every))
    for cloud in np.unique(snapshot.cloud):
        own = np.flatnonzero(snapshot.cloud == cloud)
        own = own if own.size <= FEW else own[::every]
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
            f"{printable(cloud.name, 24)}: {cloud.count} {printable(cloud.species, 24)}"
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
    return said if every == 1 else f"{said}, thinned to one in {every}"


def _dot(count: int) -> tuple[float, float]:
    """Size and opacity of a dot among so many."""
    for most, size, alpha in ((60, 6.0, 0.9), (600, 3.6, 0.75), (4000, 2.4, 0.55)):
        if count <= most:
            return size, alpha
    return 1.7, 0.4
