"""Names beside charges where there are few of them: where they fit, and never on one another."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.report.paper.sheet import SMALL_SIZE

Floats = NDArray[np.float64]

MOST_NAMED = 50
"""More charges than this stay without names."""
PANEL_HEIGHT = 180.0
"""Height of a panel in points, about."""
SAME_PLACE = 3.0
"""Charges nearer than this, in points, share a name."""
MOST_LISTED = 3
DOT = 3.0
"""Half the width of a dot, points."""


@dataclass(frozen=True, slots=True)
class Box:
    """The room a text or a dot takes, points."""

    left: float
    bottom: float
    right: float
    top: float

    def meets(self, other: Box) -> bool:
        """Whether both have a place in common."""
        return (
            self.left < other.right
            and other.left < self.right
            and self.bottom < other.top
            and other.bottom < self.top
        )

    def within(self, width: float, height: float) -> bool:
        """Whether it lies inside a panel."""
        return (
            self.left >= 0.0 and self.bottom >= 0.0 and self.right <= width and self.top <= height
        )


def put_names(axes: Axes, ids: NDArray[np.int64], across: Floats, up: Floats, ratio: float) -> None:
    """Write the ids beside charges at these values along the axes of a panel with limits.

    A name that fits on no side of its charge is left out.
    """
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    width, height = PANEL_HEIGHT * ratio, PANEL_HEIGHT
    x = (across - left) / (right - left) * width
    y = (up - bottom) / (top - bottom) * height
    taken = [Box(x[k] - DOT, y[k] - DOT, x[k] + DOT, y[k] + DOT) for k in range(len(ids))]
    for members in together(x, y):
        first = members[0]
        name = _listed(ids[members])
        side = _free_side(name, (float(x[first]), float(y[first])), taken, (width, height))
        if side is None:
            continue
        rightward, upward, box = side
        taken.append(box)
        axes.annotate(
            name,
            (float(across[first]), float(up[first])),
            xytext=(DOT + 1.0 if rightward else -DOT - 1.0, DOT if upward else -DOT),
            textcoords="offset points",
            ha="left" if rightward else "right",
            va="bottom" if upward else "top",
            fontsize=SMALL_SIZE,
        ).set_in_layout(False)


def together(x: Floats, y: Floats) -> list[list[int]]:
    """Numbers of the charges that lie on one another, each near the first of its group."""
    found: list[list[int]] = []
    for k in range(len(x)):
        for group in found:
            if max(abs(x[group[0]] - x[k]), abs(y[group[0]] - y[k])) < SAME_PLACE:
                group.append(k)
                break
        else:
            found.append([k])
    return found


def _free_side(
    name: str, dot: tuple[float, float], taken: list[Box], panel: tuple[float, float]
) -> tuple[bool, bool, Box] | None:
    """The first side of a dot on which its name fits: to the right, above; and its room."""
    for rightward, upward in ((True, True), (False, True), (True, False), (False, False)):
        box = _room(name, *dot, rightward, upward)
        if box.within(*panel) and not any(map(box.meets, taken)):
            return rightward, upward, box
    return None


def _room(name: str, x: float, y: float, rightward: bool, upward: bool) -> Box:
    """The room a name takes beside a dot."""
    width, height = 0.6 * SMALL_SIZE * len(name), SMALL_SIZE
    left = x + DOT + 1.0 if rightward else x - DOT - 1.0 - width
    bottom = y + DOT if upward else y - DOT - height
    return Box(left, bottom, left + width, bottom + height)


def _listed(ids: NDArray[np.int64]) -> str:
    """A few ids in full, more of them by first, last and number."""
    if len(ids) <= MOST_LISTED:
        return ", ".join(map(str, ids))
    return f"{ids[0]} … {ids[-1]} ({len(ids)})"
