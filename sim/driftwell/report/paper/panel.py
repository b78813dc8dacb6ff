"""The two axes of a panel: limits, labels and round numbers along them."""

from __future__ import annotations

from matplotlib.axes import Axes
from matplotlib.ticker import MaxNLocator

from driftwell.report.paper.ruler import Ruler

ROUND = (1, 2, 2.5, 5, 10)
ACROSS_MOST, UP_MOST = 8, 7
"""Most numbers along an axis."""


def put_across(axes: Axes, shown: Ruler, name: str, most: int = ACROSS_MOST) -> None:
    """Give a panel its axis from left to right."""
    axes.set_xlim(*shown.limits)
    axes.set_xlabel(shown.label(name))
    axes.xaxis.set_major_locator(MaxNLocator(most, steps=ROUND))


def put_up(axes: Axes, shown: Ruler, name: str, most: int = UP_MOST, whole: bool = False) -> None:
    """Give a panel its axis upwards; `whole` : only whole numbers stand along it."""
    axes.set_ylim(*shown.limits)
    axes.set_ylabel(shown.label(name))
    axes.yaxis.set_major_locator(MaxNLocator(most, steps=ROUND, integer=whole))
