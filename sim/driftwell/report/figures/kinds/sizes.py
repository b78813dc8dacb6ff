"""Figure: the envelope in time: rms sizes about the centre, of one cloud or of several."""

from __future__ import annotations

from matplotlib.figure import Figure

from driftwell.report.figures.in_time import figure_in_time, missing_in_time
from driftwell.report.figures.kind import Kind
from driftwell.report.figures.options import FigureOptions
from driftwell.report.pictures.scene import Scene
from driftwell.report.pictures.sizes import rms_sizes


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """Sizes along all axes of one cloud; of several along one."""
    return figure_in_time(scene, options, ("rms size", "m"), rms_sizes)


KIND = Kind("rms sizes in time", ("of", "axis", "across", "up"), missing_in_time, draw)
