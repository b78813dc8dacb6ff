"""Names beside charges where there are few of them, those on top of one another under one name."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.report.sheet import SMALL_SIZE

Floats = NDArray[np.float64]

MOST_NAMED = 50
"""More charges than this stay without names."""
NEAR = (0.08, 0.045)
"""Parts of a square panel's width and height within which two names would be on each other."""
MOST_LISTED = 3
EDGES = (0.8, 0.93)
"""Parts of the width and the height beyond which a name stands on the inner side of its charge."""


def put_names(axes: Axes, ids: NDArray[np.int64], across: Floats, up: Floats, ratio: float) -> None:
    """Write the ids beside charges at these values along the axes of a panel with limits."""
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    places = np.stack([(across - left) / (right - left), (up - bottom) / (top - bottom)])
    for members in groups(places / np.array([[NEAR[0] / ratio], [NEAR[1]]])):
        beside, above = places[:, members[0]]
        axes.annotate(
            _listed(ids[members]),
            (float(across[members].mean()), float(up[members].mean())),
            xytext=(-5 if beside > EDGES[0] else 5, -5 if above > EDGES[1] else 4),
            textcoords="offset points",
            ha="right" if beside > EDGES[0] else "left",
            va="top" if above > EDGES[1] else "bottom",
            fontsize=SMALL_SIZE,
        ).set_in_layout(False)


def groups(places: Floats) -> list[list[int]]:
    """Columns of `places` (2, n) whose names would be on each other: each near its first one."""
    found: list[list[int]] = []
    for k in range(places.shape[1]):
        for group in found:
            if np.all(np.abs(places[:, group[0]] - places[:, k]) < 1.0):
                group.append(k)
                break
        else:
            found.append([k])
    return found


def _listed(ids: NDArray[np.int64]) -> str:
    """A few ids in full, more of them by first, last and number."""
    if len(ids) <= MOST_LISTED:
        return ", ".join(map(str, ids))
    return f"{ids[0]} … {ids[-1]} ({len(ids)} charges)"
