"""Figure: the energies of all charges in time, as the ledger has them."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure

from driftwell.report.figures.in_time import put_window
from driftwell.report.figures.kind import Kind
from driftwell.report.figures.options import FigureOptions, stretch
from driftwell.report.figures.print_style import LINE, blank, finish
from driftwell.report.paper.palette import LINES
from driftwell.report.paper.sheet import Entry
from driftwell.report.paper.time_axis import put_time, time_ruler
from driftwell.report.pictures.ledger import ENERGIES, put_energies
from driftwell.report.pictures.scene import Scene


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """The energies that are not zero throughout."""
    ledger = scene.run.ledger
    times = time_ruler(ledger["time"])
    there = [entry for entry in ENERGIES if np.any(ledger[entry[1]] != 0.0)]
    looks = {look: (name, LINES[k % len(LINES)]) for k, (name, _, look, _) in enumerate(there)}
    key = [Entry(name, look, line=line) for look, (name, line) in looks.items()]
    figure = blank(scene.run, options, key)
    panel = figure.subplots()
    put_energies(panel, ledger, times)
    beside = panel.get_legend()
    if beside is not None:
        beside.remove()
    for line in panel.lines:
        line.set_linestyle(looks[str(line.get_color())][1])
        line.set_linewidth(LINE)
        line.set_marker("")
    put_time(panel, times, most=6)
    put_window(panel, times.shown, stretch(options.across, "s", "across"))
    return finish(figure)


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    ledger = scene.run.ledger
    if len(ledger) < 2:
        return "the ledger has no two rows"
    there = any(np.any(ledger[column] != 0.0) for _, column, *_ in ENERGIES)
    return "" if there else "all energies are zero"


KIND = Kind("energies of all charges in time", ("across",), missing, draw)
