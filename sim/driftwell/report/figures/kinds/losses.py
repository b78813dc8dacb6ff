"""Figure: where charges met surfaces: along an axis and about it, and with what energy.

The azimuth is the angle about the axis, from x towards y for z (from y towards z for x, from z
towards x for y). Energies are kinetic, of one real particle.
"""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.report.figures.kind import Kind, chosen_clouds
from driftwell.report.figures.options import AXES, FigureError, FigureOptions, axis_number, stretch
from driftwell.report.figures.print_style import LINE, blank, finish, put_letters
from driftwell.report.figures.profile_panel import power_ruler
from driftwell.report.paper.histogram import bins
from driftwell.report.paper.palette import COLOURS, MARKERS, Line, colour, line_style
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.projection import frame, plane_limits, put_frame
from driftwell.report.paper.ruler import in_words, interval, ruler
from driftwell.report.paper.sheet import Entry
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]
Rows = NDArray[np.void]

FEW = 300
FLAT = 1e-6
"""Losses that spread along the axis by less than this part of their reach are in a plane."""


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """The map on the left, or above; energies beside or below it."""
    wanted = [cloud.index for cloud in chosen_clouds(scene, options)]
    losses = scene.losses[np.isin(scene.losses["cloud"], wanted)]
    if not len(losses):
        raise FigureError("of: no charge of these clouds was lost.")
    axis = axis_number(options.axis, 2)
    walls, counts = np.unique(losses["wall"], return_counts=True)
    key = [
        Entry(f"{scene.run.header.walls[wall]}: {count}", colour(int(wall)), mark(int(wall)))
        for wall, count in zip(walls, counts, strict=True)
    ]
    figure = blank(scene.run, options, key if len(key) > 1 else (), 2.4, 2)
    panels = list(figure.subplots(1, 2, gridspec_kw={"width_ratios": [1.5, 1.0]}))
    put_map(panels[0], losses, axis, stretch(options.across, "m", "across"))
    put_energies(panels[1], losses)
    put_letters(panels)
    return finish(figure)


def mark(wall: int) -> str:
    """The marker of a wall: each its own, so that colour is not all that tells them apart."""
    return MARKERS[(wall + wall // len(COLOURS)) % len(MARKERS)]


def azimuth(position: Floats, axis: int) -> Floats:
    """Angles (n,) about an axis, degrees from -180 to 180."""
    first, second = (axis + 1) % 3, (axis + 2) % 3
    return np.degrees(np.arctan2(position[:, second], position[:, first]))


def put_map(
    panel: Axes, losses: Rows, axis: int, limits: tuple[float, float] | None = None
) -> None:
    """Place along the axis against the angle about it; both places across it, where all losses
    are at one place along it."""
    position = losses["position"]
    along = position[:, axis]
    reach = float(np.ptp(position, axis=0).max()) or float(np.abs(position).max())
    if limits is None and float(np.ptp(along)) <= FLAT * reach:
        first, second = (axis + 1) % 3, (axis + 2) % 3
        shown = frame(*plane_limits(position[:, first], position[:, second], reach), 1.0)
        _put_marks(
            panel,
            losses,
            shown.across.shown(position[:, first]),
            shown.up.shown(position[:, second]),
        )
        put_frame(panel, shown, (AXES[first], AXES[second]))
        return
    shown_along = ruler(limits or interval(along, least=reach), "m")
    _put_marks(panel, losses, shown_along.shown(along), azimuth(position, axis))
    put_across(panel, shown_along, AXES[axis], 6)
    panel.set_ylim(-180.0, 180.0)
    panel.set_yticks([-180.0, -90.0, 0.0, 90.0, 180.0])
    panel.set_yticklabels(["−180", "−90", "0", "90", "180"])
    panel.set_ylabel(f"azimuth about {AXES[axis]} (°)")


def _put_marks(panel: Axes, losses: Rows, across: Floats, up: Floats) -> None:
    for wall in np.unique(losses["wall"]):
        own = losses["wall"] == wall
        panel.plot(
            across[own],
            up[own],
            linestyle="none",
            marker=mark(int(wall)),
            markersize=2.6 if len(losses) <= FEW else 1.4,
            markeredgewidth=0.0,
            color=colour(int(wall)),
            alpha=0.7,
        )


def put_energies(panel: Axes, losses: Rows) -> None:
    """Kinetic energies at the surface, real particles in each stretch, by wall."""
    energy = losses["kinetic_energy"] / ELEMENTARY_CHARGE
    low, high = interval(energy)
    across = ruler((max(low, 0.0), high), "eV")
    edges = bins(energy.size, max(low, 0.0), high)
    walls = np.unique(losses["wall"])
    counts = [
        np.histogram(energy[own], edges, weights=losses["weight"][own])[0]
        for own in (losses["wall"] == wall for wall in walls)
    ]
    up = power_ruler((0.0, 1.1 * float(np.max(counts))), 0)
    for wall, held in zip(walls, counts, strict=True):
        line: Line = line_style(7 * int(wall))
        panel.stairs(
            up.shown(held),
            across.shown(edges),
            color=colour(int(wall)),
            linewidth=LINE,
            linestyle=line,
        )
    put_across(panel, across, "kinetic energy", 4)
    put_up(panel, up, f"particles per {in_words(float(edges[1] - edges[0]), 'eV')}")


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    return "" if len(scene.losses) else "no charge was lost"


KIND = Kind(
    "where charges met surfaces, along an axis and about it, and with what energy",
    ("of", "axis", "across"),
    missing,
    draw,
)
