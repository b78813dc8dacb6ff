"""Picture: the charges at the start and at the end, from the side and along z."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from driftwell.answers.evidence import Snapshot
from driftwell.report.names import MOST_NAMED, put_names
from driftwell.report.palette import PALE
from driftwell.report.projection import (
    Frame,
    cloud_key,
    counted,
    frame,
    put_dots,
    put_frame,
)
from driftwell.report.ruler import Interval, in_words, interval, joined
from driftwell.report.scene import Scene
from driftwell.report.sheet import SMALL_SIZE, sheet

AXES = "xyz"
SIDE, FRONT = (2, 0), (0, 1)
"""Axes across and up: z-x from the side, x-y along z."""
SIDE_RATIO, FRONT_RATIO = 2.0, 1.0
ALIKE = 4.0
"""Start and end have the same limits where those are at most so many times what each needs."""


def cloud_picture(scene: Scene) -> Figure | None:
    """Start and end, one above the other; None where there is no charge in either."""
    views = scene.views
    if not views:
        return None
    figure = sheet(scene.run, 9.6, 0.9 + 3.3 * len(views), cloud_key(scene.clouds))
    panels = figure.subplots(
        len(views), 2, squeeze=False, gridspec_kw={"width_ratios": [SIDE_RATIO, FRONT_RATIO]}
    )
    snapshots = [view for _, view in views]
    for column, (plane, ratio) in enumerate(((SIDE, SIDE_RATIO), (FRONT, FRONT_RATIO))):
        frames = plane_frames(snapshots, plane, ratio)
        for row, (word, snapshot) in enumerate(views):
            put_projection(panels[row, column], snapshot, frames[row], plane, ratio)
            if column == 0:
                panels[row, 0].set_title(
                    f"{word}: t = {in_words(snapshot.time, 's', 4)}, {counted(len(snapshot.id))}"
                )
    return figure


def plane_frames(snapshots: list[Snapshot], plane: tuple[int, int], ratio: float) -> list[Frame]:
    """The axes of each snapshot in a plane: the same for all where they can be compared so."""
    across, up = ([_limits(view, axis) for view in snapshots] for axis in plane)
    if all(_span(joined(limits)) <= ALIKE * min(map(_span, limits)) for limits in (across, up)):
        across, up = ([joined(limits)] * len(snapshots) for limits in (across, up))
    return [frame(*limits, ratio) for limits in zip(across, up, strict=True)]


def put_projection(
    axes: Axes, snapshot: Snapshot, shown: Frame, plane: tuple[int, int], ratio: float
) -> None:
    """Fill a panel with the charges seen in a plane."""
    first, second = (snapshot.position[:, axis] for axis in plane)
    across, up = shown.across.shown(first), shown.up.shown(second)
    put_dots(axes, snapshot, across, up)
    put_frame(axes, shown, (AXES[plane[0]], AXES[plane[1]]), ratio)
    if len(snapshot.id) <= MOST_NAMED:
        put_names(axes, snapshot.id, across, up, ratio)
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


def _limits(snapshot: Snapshot, axis: int) -> Interval:
    """Limits along an axis; a cloud without width there gets that of its longest side."""
    spans = np.ptp(snapshot.position, axis=0)
    return interval(snapshot.position[:, axis], least=float(spans.max()))


def _span(limits: Interval) -> float:
    return limits[1] - limits[0]
