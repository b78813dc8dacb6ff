"""Figure: place against slope, or against proper velocity, with the rms ellipse of each cloud.

A beam that flies along an axis is shown with slopes across it, x' = u_x / u_z, of proper velocities
u = gamma v (so slopes are those of the momenta); anything else with the velocities themselves. The
ellipse is that of one rms, its area pi times the emittance; over c the emittance of velocities is
the normalised one.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.report.figures.ellipse import LEAST, RmsEllipse, rms_ellipse
from driftwell.report.figures.kind import Kind, chosen_snapshot, no_snapshot
from driftwell.report.figures.options import AXES, FigureError, FigureOptions, axis_number, stretch
from driftwell.report.figures.print_style import LINE, SMALL, blank, finish, put_letters
from driftwell.report.paper.palette import INK, colour, line_style
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.projection import cloud_key, put_dots
from driftwell.report.paper.ruler import in_words, interval, ruler
from driftwell.report.pictures.phase_space import Plane, flight_axis, plane_of
from driftwell.report.pictures.scene import Scene

DOT = 0.5
MOST_ELLIPSES = 3
"""More clouds than these stay without ellipses."""
ROOM = 0.14
"""Part of the panel's height that a line of the legend takes, above the charges."""


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """A panel for the axis asked for, or for all three."""
    snapshot, clouds = chosen_snapshot(scene, options)
    if not np.any(np.ptp(snapshot.velocity, axis=0) > 0.0):
        raise FigureError(
            f"{scene.run.folder}: all charges have one velocity at t = {snapshot.time:.6g} s, so "
            "there is no phase space to show. Take another time with --at."
        )
    axes = [0, 1, 2] if options.axis is None else [axis_number(options.axis, 0)]
    wanted = stretch(options.across, "m", "across")
    figure = blank(scene.run, options, cloud_key(clouds), 1.1 * len(axes), len(axes))
    panels = list(figure.subplots(1, len(axes), squeeze=False)[0])
    along = flight_axis(snapshot)
    for panel, axis in zip(panels, axes, strict=True):
        put_plane(panel, snapshot, clouds, axis, plane_of(snapshot, axis, along), wanted)
    put_letters(panels)
    return finish(figure)


def put_plane(
    panel: Axes,
    snapshot: Snapshot,
    clouds: Sequence[CloudFacts],
    axis: int,
    plane: Plane,
    wanted: tuple[float, float] | None = None,
) -> None:
    """Fill a panel with charges, ellipses, and emittances in a legend."""
    place = snapshot.position[:, axis]
    reach = float(np.ptp(snapshot.position, axis=0).max())
    fast = float(np.ptp(snapshot.velocity, axis=0).max())
    found = [
        (cloud, ellipse)
        for cloud in clouds[:MOST_ELLIPSES]
        if (ellipse := _ellipse(snapshot, cloud, place, plane)) is not None
    ]
    low, high = interval(plane.up, least=fast if plane.unit == "m/s" else 0.0)
    high += ROOM * (high - low) * (len(found) + bool(found))
    across = ruler(wanted or interval(place, least=reach), "m")
    up = ruler((low, high), plane.unit)
    put_dots(panel, snapshot, across.shown(place), up.shown(plane.up), DOT)
    put_across(panel, across, AXES[axis], 5)
    put_up(panel, up, plane.name, 6)
    for cloud, ellipse in found:
        line = ellipse.outline()
        panel.plot(
            across.shown(line[0]),
            up.shown(line[1]),
            color=INK if len(clouds) == 1 else colour(cloud.index),
            linestyle=line_style(cloud.index),
            linewidth=LINE,
            label=_emittance(ellipse, plane),
            path_effects=[withStroke(linewidth=LINE + 1.4, foreground="white")],
        )
    if found:
        panel.legend(
            loc="upper right",
            fontsize=SMALL,
            handlelength=1.6,
            borderpad=0.1,
            borderaxespad=0.35,
            labelspacing=0.2,
        )


def _ellipse(
    snapshot: Snapshot, cloud: CloudFacts, place: np.ndarray, plane: Plane
) -> RmsEllipse | None:
    own = snapshot.cloud == cloud.index
    return rms_ellipse(place[own], plane.up[own], snapshot.weight[own])


def _emittance(ellipse: RmsEllipse, plane: Plane) -> str:
    """The emittance in words; ε over c is the normalised one."""
    symbol = "ε" if plane.scale == 1.0 else "εₙ"
    return f"{symbol} = {in_words(ellipse.emittance / plane.scale, 'm rad')}"


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    most = max((len(view.id) for _, view in scene.views), default=0)
    return no_snapshot(scene) or (
        "" if most >= LEAST else f"no snapshot holds {LEAST} charges or more"
    )


KIND = Kind(
    "place against slope or velocity, with the 1 rms ellipse and its emittance",
    ("of", "at", "axis", "across"),
    missing,
    draw,
)
