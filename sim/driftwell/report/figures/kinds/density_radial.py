"""Figure: density against the distance from a cloud's centre, or from a line along an axis.

About the centre it is a number per volume, in shells; about an axis the number per area that is
seen along that axis, in tubes. Real particles are counted: each charge with its weight.
"""

from __future__ import annotations

from matplotlib.figure import Figure

from driftwell.report.figures.kind import Kind, chosen_snapshot, no_snapshot
from driftwell.report.figures.options import FigureOptions, axis_number, stretch
from driftwell.report.figures.profile import Profile, radial_profile, radii
from driftwell.report.figures.profile_panel import LEAST, Floats, density_figure
from driftwell.report.pictures.scene import Scene


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """One profile for each cloud, about its own centre."""
    snapshot, clouds = chosen_snapshot(scene, options)
    axis = None if options.axis is None else axis_number(options.axis, 2)
    kind = "shells" if axis is None else "tubes"
    limits = stretch(options.across, "m", "across")
    limits = None if limits is None else (max(limits[0], 0.0), limits[1])

    def profile(position: Floats, weight: Floats) -> Profile:
        return radial_profile(radii(position, weight, axis), weight, kind, limits)

    whence = "the centre" if axis is None else f"the {options.axis} axis"
    names = (f"distance from {whence}", "density" if axis is None else "areal density")
    return density_figure(scene, options, snapshot, clouds, names, kind, profile)


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    most = max((len(view.id) for _, view in scene.views), default=0)
    return no_snapshot(scene) or (
        "" if most >= LEAST else f"no snapshot holds {LEAST} charges or more"
    )


KIND = Kind(
    "density against distance from the centre, or from an axis, with counting errors",
    ("of", "at", "axis", "across"),
    missing,
    draw,
)
