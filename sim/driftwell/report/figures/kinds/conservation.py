"""Figure: what does not close in the ledger: energy, momentum, angular momentum, third law."""

from __future__ import annotations

from matplotlib.figure import Figure

from driftwell.report.figures.in_time import put_window
from driftwell.report.figures.kind import Kind
from driftwell.report.figures.options import FigureOptions, stretch
from driftwell.report.figures.print_style import LINE, blank, finish
from driftwell.report.paper.palette import LINES
from driftwell.report.paper.sheet import Entry
from driftwell.report.paper.time_axis import put_time, time_ruler
from driftwell.report.pictures.ledger import RESIDUALS, put_residuals
from driftwell.report.pictures.scene import Scene


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """Magnitudes, relative, on a logarithmic axis; what is exactly zero stands on its foot."""
    ledger = scene.run.ledger
    times = time_ruler(ledger["time"])
    looks = {look: (name, line) for (name, _, look, _), line in zip(RESIDUALS, LINES, strict=True)}
    key = [Entry(name, look, line=line) for look, (name, line) in looks.items()]
    figure = blank(scene.run, options, key)
    panel = figure.subplots()
    put_residuals(panel, ledger, times)
    beside = panel.get_legend()
    if beside is not None:
        beside.remove()
    for line in panel.lines:
        if line.get_linestyle() != "None":
            line.set_linestyle(looks[str(line.get_color())][1])
            line.set_linewidth(LINE)
            line.set_marker("")
        else:
            line.set_markersize(2.0)
    panel.set_ylabel("relative residual")
    put_time(panel, times, most=6)
    put_window(panel, times.shown, stretch(options.across, "s", "across"))
    return finish(figure)


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    return "" if len(scene.run.ledger) > 1 else "the ledger has no two rows"


KIND = Kind("residuals of the ledger in time", ("across",), missing, draw)
