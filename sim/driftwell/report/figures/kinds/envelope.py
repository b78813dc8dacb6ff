"""Figure: the envelope along a beam at one time: rms sizes, and the radius that holds 90 %."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure

from driftwell.report.figures.kind import Kind, chosen_snapshot, no_snapshot
from driftwell.report.figures.options import AXES, FigureError, FigureOptions, axis_number, stretch
from driftwell.report.figures.print_style import LINE, blank, finish
from driftwell.report.paper.palette import BLUE, INK, VERMILLION
from driftwell.report.paper.panel import put_across
from driftwell.report.paper.ruler import interval, ruler
from driftwell.report.paper.sheet import Entry
from driftwell.report.paper.time_axis import put_amounts, put_line
from driftwell.report.pictures.envelope import LEAST, slice_edges, slice_sizes
from driftwell.report.pictures.phase_space import flight_axis
from driftwell.report.pictures.scene import Scene


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """Sizes of slices of all charges asked for, about the middle of each slice."""
    snapshot, _ = chosen_snapshot(scene, options)
    if len(snapshot.id) < LEAST:
        raise FigureError(
            f"{scene.run.folder}: {len(snapshot.id)} charges at t = {snapshot.time:.6g} s are too "
            f"few to be cut into slices; needs {LEAST}. Take another time with --at."
        )
    flying = flight_axis(snapshot)
    axis = axis_number(options.axis, 2 if flying is None else flying)
    edges = slice_edges(snapshot.position[:, axis])
    place, position = snapshot.position[:, axis], snapshot.position.T
    across = [k for k in range(3) if k != axis]
    looks = [
        (f"rms {AXES[across[0]]}", [across[0]], "rms", BLUE, "-"),
        (f"rms {AXES[across[1]]}", [across[1]], "rms", VERMILLION, "--"),
        ("radius of 90 %", across, "edge", INK, ":"),
    ]
    key = [Entry(name, look, line=line) for name, _, _, look, line in looks]  # type: ignore[arg-type]
    figure = blank(scene.run, options, key)
    panel = figure.subplots()
    sizes = [slice_sizes(place, position[rows], edges, measure) for _, rows, measure, *_ in looks]
    along = ruler(stretch(options.across, "m", "across") or interval(edges, margin=0.0), "m")
    shown = put_amounts(panel, [*sizes, np.zeros(1)], "m", "size")
    middles = along.shown(0.5 * (edges[:-1] + edges[1:]))
    for size, (_, _, _, look, line) in zip(sizes, looks, strict=True):
        put_line(panel, middles, shown.shown(size), look, line, LINE)
    put_across(panel, along, AXES[axis], 6)
    wanted = stretch(options.up, "m", "up")
    if wanted is not None:
        panel.set_ylim(*shown.shown(wanted))
    return finish(figure)


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    most = max((len(view.id) for _, view in scene.views), default=0)
    return no_snapshot(scene) or (
        "" if most >= LEAST else f"no snapshot holds {LEAST} charges or more"
    )


KIND = Kind(
    "rms sizes along a beam at one time",
    ("of", "at", "axis", "across", "up"),
    missing,
    draw,
)
