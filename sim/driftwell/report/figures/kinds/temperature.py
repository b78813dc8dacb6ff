"""Figure: temperatures in time, from the spread of velocities along each axis."""

from __future__ import annotations

from matplotlib.figure import Figure

from driftwell.report.figures.in_time import figure_in_time, missing_in_time
from driftwell.report.figures.kind import Kind
from driftwell.report.figures.options import FigureOptions
from driftwell.report.pictures.scene import Scene
from driftwell.report.pictures.sizes import temperatures


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """Temperatures along all axes of one cloud; of several along one."""
    return figure_in_time(scene, options, ("temperature", "K"), temperatures)


KIND = Kind("temperatures in time", ("of", "axis", "across"), missing_in_time, draw)
