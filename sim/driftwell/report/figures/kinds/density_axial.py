"""Figure: number of real particles per length along an axis."""

from __future__ import annotations

from matplotlib.figure import Figure

from driftwell.report.figures.kind import Kind, chosen_snapshot
from driftwell.report.figures.kinds.density_radial import missing
from driftwell.report.figures.options import AXES, FigureOptions, axis_number, stretch
from driftwell.report.figures.profile import Profile, axial_profile
from driftwell.report.figures.profile_panel import Floats, density_figure
from driftwell.report.pictures.scene import Scene


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """One profile for each cloud."""
    snapshot, clouds = chosen_snapshot(scene, options)
    axis = axis_number(options.axis, 2)
    limits = stretch(options.across, "m", "across")

    def profile(position: Floats, weight: Floats) -> Profile:
        return axial_profile(position[:, axis], weight, limits)

    names = (AXES[axis], "number per length")
    return density_figure(scene, options, snapshot, clouds, names, "slices", profile)


KIND = Kind(
    "number of particles per length along an axis, with counting errors",
    ("of", "at", "axis", "across"),
    missing,
    draw,
)
