"""Picture: the charges at the start and at the end, from the side and along z."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from driftwell.answers.evidence import Snapshot
from driftwell.report.paper.names import MOST_NAMED, put_names
from driftwell.report.paper.projection import (
    Frame,
    cloud_key,
    common_size,
    counted,
    frame,
    plane_limits,
    put_dots,
    put_frame,
)
from driftwell.report.paper.ruler import Interval, in_words, joined
from driftwell.report.paper.sheet import sheet
from driftwell.report.pictures.scene import Scene

AXES = "xyz"
SIDE, FRONT = (2, 0), (0, 1)
"""Axes across and up: z-x from the side, x-y along z."""
RATIOS = (2.0, 1.0)
"""Width over height of the panels of both."""
ALIKE = 4.0
"""Start and end have the same limits where those are at most so many times what each needs."""


def cloud_picture(scene: Scene) -> Figure | None:
    """Start and end, one above the other; None where there is no charge in either."""
    views = scene.views
    if not views:
        return None
    figure = sheet(scene.run, 9.6, 0.9 + 3.3 * len(views), cloud_key(scene.clouds))
    panels = figure.subplots(
        len(views), 2, squeeze=False, gridspec_kw={"width_ratios": list(RATIOS)}
    )
    rows = cloud_frames([view for _, view in views])
    for row, (word, snapshot) in enumerate(views):
        for column, plane in enumerate((SIDE, FRONT)):
            put_projection(panels[row, column], snapshot, rows[row][column], plane)
        panels[row, 0].set_title(
            f"{word}: t = {in_words(snapshot.time, 's', 4)}, {counted(len(snapshot.id))}"
        )
    return figure


def cloud_frames(snapshots: Sequence[Snapshot]) -> list[tuple[Frame, Frame]]:
    """The axes of each snapshot, from the side and along z.

    They are the same for all snapshots where these can be compared so.
    """
    columns = [_comparable([_limits(view, plane) for view in snapshots]) for plane in (SIDE, FRONT)]
    frames = []
    for side, front in zip(*columns, strict=True):
        size = common_size([*side, *front])
        frames.append(
            (
                frame(side[0], side[1], RATIOS[0], size),
                frame(front[0], front[1], RATIOS[1], size),
            )
        )
    return frames


def put_projection(axes: Axes, snapshot: Snapshot, shown: Frame, plane: tuple[int, int]) -> None:
    """Fill a panel with the charges seen in a plane."""
    first, second = (snapshot.position[:, axis] for axis in plane)
    across, up = shown.across.shown(first), shown.up.shown(second)
    put_dots(axes, snapshot, across, up)
    put_frame(axes, shown, (AXES[plane[0]], AXES[plane[1]]))
    if len(snapshot.id) <= MOST_NAMED:
        put_names(axes, snapshot.id, across, up, shown.ratio)


def _limits(snapshot: Snapshot, plane: tuple[int, int]) -> tuple[Interval, Interval]:
    reach = float(np.ptp(snapshot.position, axis=0).max())
    return plane_limits(snapshot.position[:, plane[0]], snapshot.position[:, plane[1]], reach)


def _comparable(limits: list[tuple[Interval, Interval]]) -> list[tuple[Interval, Interval]]:
    """The limits, made the same where each is a good part of what holds them all."""
    whole = [joined(sides) for sides in zip(*limits, strict=True)]
    for side, both in zip(zip(*limits, strict=True), whole, strict=True):
        if _span(both) > ALIKE * min(map(_span, side)):
            return limits
    return [(whole[0], whole[1])] * len(limits)


def _span(limits: Interval) -> float:
    return limits[1] - limits[0]
