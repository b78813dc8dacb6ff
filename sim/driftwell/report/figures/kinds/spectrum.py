"""Figure: the spectrum of a traced coordinate, with its strongest lines.

Amplitudes are worked out as for the pictures of a run: a Hann window, scaled so that a sine of
amplitude A stands as high as A (:mod:`driftwell.report.pictures.spectrum`).
"""

from __future__ import annotations

from matplotlib.figure import Figure

from driftwell.report.figures.kind import Kind
from driftwell.report.figures.options import FigureError, FigureOptions, known, stretch
from driftwell.report.figures.print_style import SMALL, blank, finish
from driftwell.report.pictures.scene import Scene
from driftwell.report.pictures.spectrum import put_spectrum, traced_motions

MARK = 3.5
HERTZ = {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "GHz": 1e9, "THz": 1e12, "mHz": 1e-3, "µHz": 1e-6}


def draw(scene: Scene, options: FigureOptions) -> Figure:
    """The spectrum of the trace asked for, of the first that moves where none was named."""
    traces = {name: (time, value) for name, time, value in traced_motions(scene.run)}
    moving = [name for name, (time, _) in traces.items() if time.size]
    name = moving[0] if options.trace is None else known(options.trace, traces, "trace")
    time, value = traces[name]
    if not time.size:
        raise FigureError(
            f'trace: "{name}" did not move, or was followed for too short a time; there is no '
            "spectrum of it."
        )
    figure = blank(scene.run, options, ratio=1.5)
    panel = figure.subplots()
    put_spectrum(panel, time, value)
    for line in panel.lines:
        line.set_linewidth(0.8)
        line.set_markersize(MARK)
    for text in panel.texts:
        text.set_fontsize(SMALL)
    window = stretch(options.across, "Hz", "across")
    if window is not None:
        label = panel.get_xlabel()
        size = HERTZ[label[label.rindex("(") + 1 : -1]]
        panel.set_xlim(window[0] / size, window[1] / size)
        for text in panel.texts:
            text.set_clip_on(True)
    return finish(figure)


def missing(scene: Scene) -> str:
    """Why it cannot be drawn."""
    if not scene.run.header.traces:
        return "no coordinate was traced; questions of frequencies have one traced"
    moving = any(time.size for _, time, _ in traced_motions(scene.run))
    return "" if moving else "no traced coordinate moved for long enough"


KIND = Kind("spectrum of a traced coordinate", ("trace", "across"), missing, draw)
