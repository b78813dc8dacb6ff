"""Events counted in stretches of time, those of several origins one on top of the other."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.report.paper.panel import put_up
from driftwell.report.paper.ruler import Ruler, in_words, interval, ruler

Floats = NDArray[np.float64]

FEWEST, MOST = 10, 80


def bins(events: int, low: float, high: float) -> Floats:
    """Edges of equal stretches from `low` to `high`, more of them where there are more events."""
    count = min(max(int(2.0 * events**0.5), FEWEST), MOST)
    return np.linspace(low, high, count + 1)


def put_histogram(
    axes: Axes, groups: Sequence[tuple[Floats, str]], times: Ruler, name: str
) -> None:
    """Draw the number of events in each stretch; `groups` : times in s, and a colour.

    `name` : of the events, in the plural
    """
    edges = bins(sum(values.size for values, _ in groups), times.low, times.high)
    base = np.zeros(len(edges) - 1)
    places = times.shown(edges)
    for values, colour in groups:
        top = base + np.histogram(values, edges)[0]
        axes.stairs(top, places, baseline=base, fill=True, color=colour, alpha=0.85, linewidth=0.0)
        base = top
    shown = ruler(interval([float(base.max()), 1.0], zero=True), "")
    put_up(axes, shown, f"{name} per {in_words(float(edges[1] - edges[0]), 's')}", whole=True)
