"""Names beside charges where there are few of them, those on top of one another under one name."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from numpy.typing import NDArray

from driftwell.report.sheet import SMALL_SIZE

Floats = NDArray[np.float64]

MOST_NAMED = 50
"""More charges than this stay without names."""
NEAR = (0.075, 0.04)
"""Parts of a square panel's width and height within which two names would be on each other."""
MOST_LISTED = 4


def put_names(axes: Axes, ids: NDArray[np.int64], across: Floats, up: Floats, ratio: float) -> None:
    """Write the ids beside charges at these values along the axes of a panel."""
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    places = np.stack(
        [
            (across - left) / (right - left) / NEAR[0] * ratio,
            (up - bottom) / (top - bottom) / NEAR[1],
        ]
    )
    for members in _groups(places):
        k = members[0]
        edge = (across[k] - left) / (right - left) > 0.85
        axes.annotate(
            _listed(ids[members]),
            (float(across[members].mean()), float(up[members].mean())),
            xytext=(-5 if edge else 5, 4),
            textcoords="offset points",
            ha="right" if edge else "left",
            fontsize=SMALL_SIZE,
            annotation_clip=True,
        ).set_in_layout(False)


def _groups(places: Floats) -> list[list[int]]:
    """Rows of those whose names would be on each other: each near the first of its group."""
    groups: list[list[int]] = []
    for k in range(places.shape[1]):
        for group in groups:
            if np.all(np.abs(places[:, group[0]] - places[:, k]) < 1.0):
                group.append(k)
                break
        else:
            groups.append([k])
    return groups


def _listed(ids: NDArray[np.int64]) -> str:
    """A few ids in full, more of them by first, last and number."""
    if len(ids) <= MOST_LISTED:
        return ", ".join(map(str, ids))
    return f"{ids[0]} … {ids[-1]} ({len(ids)} charges)"
