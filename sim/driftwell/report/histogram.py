"""Events counted in stretches of time, those of several origins one on top of the other."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.report.ruler import Ruler

Floats = NDArray[np.float64]

FEWEST, MOST = 10, 80


def bins(times: Floats, low: float, high: float) -> Floats:
    """Edges of equal stretches from `low` to `high`, more of them where there are more events."""
    count = min(max(int(2.0 * times.size**0.5), FEWEST), MOST)
    return np.linspace(low, high, count + 1)


def put_histogram(
    axes: Axes, groups: Sequence[tuple[Floats, str]], edges: Floats, times: Ruler
) -> None:
    """Draw the number of events in each stretch; `groups` : times in s, and a colour."""
    base = np.zeros(len(edges) - 1)
    shown = times.shown(edges)
    for values, colour in groups:
        top = base + np.histogram(values, edges)[0]
        axes.stairs(top, shown, baseline=base, fill=True, color=colour, alpha=0.85, linewidth=0.0)
        base = top
    axes.set_ylim(0.0, 1.06 * max(float(base.max()), 1.0))
    axes.yaxis.get_major_locator().set_params(integer=True)
