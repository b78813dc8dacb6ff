"""Figure: the charges at one time, seen along axes."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure

from driftwell.report.figures.kind import Kind, chosen_snapshot, no_snapshot
from driftwell.report.figures.options import AXES, FigureError, FigureOptions, plane_axes, stretch
from driftwell.report.figures.print_style import blank, finish, put_letters
from driftwell.report.paper.projection import cloud_key, frame, plane_limits, put_dots, put_frame
from driftwell.report.pictures.scene import Scene

USUAL = "zx,zy,xy"
DOT = 0.55
"""Size of a dot, of that on a screen."""


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """One panel for each plane, each to scale where that is sensible."""
    snapshot, clouds = chosen_snapshot(scene, options)
    planes = [plane_axes(word.strip()) for word in (options.plane or USUAL).split(",")]
    wanted = (stretch(options.across, "m", "across"), stretch(options.up, "m", "up"))
    if len(planes) > 1 and any(wanted):
        raise FigureError("across, up: these limits are for one plane; name it with --plane.")
    figure = blank(scene.run, options, cloud_key(clouds), 1.15 * len(planes), len(planes))
    reach = float(np.ptp(snapshot.position, axis=0).max())
    panels = list(figure.subplots(1, len(planes), squeeze=False)[0])
    for panel, (first, second) in zip(panels, planes, strict=True):
        across, up = snapshot.position[:, first], snapshot.position[:, second]
        limits = plane_limits(across, up, reach)
        shown = frame(wanted[0] or limits[0], wanted[1] or limits[1], 1.0)
        put_dots(panel, snapshot, shown.across.shown(across), shown.up.shown(up), DOT)
        put_frame(panel, shown, (AXES[first], AXES[second]))
    put_letters(panels)
    return finish(figure)


KIND = Kind(
    "the charges at one time, seen along the axes",
    ("of", "at", "plane", "across", "up"),
    no_snapshot,
    draw,
)
