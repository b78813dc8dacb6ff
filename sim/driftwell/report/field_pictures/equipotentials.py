"""Picture: lines of equal potential in a plane, and the electrodes they lie between."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.colors import Normalize
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke
from matplotlib.ticker import FuncFormatter, MaxNLocator
from numpy.typing import NDArray

from driftwell.report.paper.palette import INK
from driftwell.report.paper.panel import ROUND
from driftwell.report.paper.projection import Frame, frame, put_frame
from driftwell.report.paper.ruler import Ruler, interval, ruler
from driftwell.report.paper.shades import Shades, shades
from driftwell.report.paper.sheet import SMALL_SIZE, page, printable

Floats = NDArray[np.float64]

LINES = 14
"""Most lines of equal potential."""
METAL, METAL_EDGE = "#b5b5b5", "#4d4d4d"
NARROWEST, WIDEST = 0.5, 6.0
"""Width over height of the panel."""
NAME_LONGEST = 20


@dataclass(frozen=True, slots=True)
class Drawn:
    """An electrode's outline in the plane of the picture.

    name : shown beside it; empty for a part of one that is named already
    outline : (k, 2) float64, m; filled where its last point is its first, else a thin sheet
    """

    name: str
    outline: Floats

    @property
    def closed(self) -> bool:
        """Whether the outline goes round a body."""
        return len(self.outline) > 3 and bool(np.all(self.outline[0] == self.outline[-1]))


def equipotentials(
    title: str,
    provenance: str,
    x: Floats,
    y: Floats,
    potential: Floats,
    electrodes: Sequence[Drawn],
    axes: tuple[str, str] = ("z", "r"),
) -> Figure:
    """Lines of equal potential at round voltages, and electrodes as filled outlines.

    Parameters
    ----------
    x : (nx,) float64, m, rising, across
    y : (ny,) float64, m, rising, upwards
    potential : (ny, nx) float64, V; NaN where there is none
    axes : names of both axes
    """
    across, up = (float(x[0]), float(x[-1])), (float(y[0]), float(y[-1]))
    ratio = (across[1] - across[0]) / (up[1] - up[0])
    shown = frame(across, up, min(max(ratio, NARROWEST), WIDEST))
    width = 9.6 if shown.ratio > 1.0 else 7.2
    height = min(1.1 + (width - 2.2) / shown.ratio, 9.0)
    figure = page(title, provenance, width, height)
    panel = figure.subplots()
    panel.grid(visible=False)
    volts = ruler(interval(potential[np.isfinite(potential)], margin=0.0), "V")
    found = shades(potential)
    put_lines(panel, shown, (x, y, potential), found, volts)
    for electrode in electrodes:
        put_electrode(panel, shown, electrode)
    put_scale(figure, panel, found, volts)
    put_frame(panel, shown, axes)
    return figure


def put_lines(
    panel: Axes, shown: Frame, grid: tuple[Floats, Floats, Floats], found: Shades, volts: Ruler
) -> None:
    """Shade the plane by its potential, and draw and mark lines at round values of it."""
    x, y, potential = grid
    across, up = shown.across.shown(x), shown.up.shown(y)
    values = np.ma.masked_invalid((potential - volts.origin) / volts.size)
    low, high = volts.shown([found.low, found.high])
    panel.pcolormesh(
        across,
        up,
        values,
        cmap=found.paler,
        vmin=float(low),
        vmax=float(high),
        shading="gouraud" if not np.ma.is_masked(values) else "nearest",
        rasterized=True,
    )
    span = (float(values.min()), float(values.max())) if values.count() else (0.0, 0.0)
    if not span[0] < span[1]:
        return
    levels = MaxNLocator(LINES, steps=ROUND).tick_values(*span)
    inside = [level for level in levels if span[0] < level < span[1]]
    lines = panel.contour(
        across, up, values, levels=inside, colors=INK, linewidths=0.8, linestyles="solid"
    )
    panel.clabel(
        lines, fontsize=SMALL_SIZE - 1.0, fmt=lambda value: f"{value:.6g}".replace("-", "−")
    )


def put_electrode(panel: Axes, shown: Frame, electrode: Drawn, size: float = SMALL_SIZE) -> None:
    """Fill an electrode, or draw it as a line, with its name in its middle.

    size : of the name's letters, points
    """
    across = shown.across.shown(electrode.outline[:, 0])
    up = shown.up.shown(electrode.outline[:, 1])
    if electrode.closed:
        panel.fill(across, up, facecolor=METAL, edgecolor=METAL_EDGE, linewidth=1.0, zorder=5)
    else:
        panel.plot(across, up, color=METAL_EDGE, linewidth=2.2, zorder=5)
    if not electrode.name:
        return
    limits = (shown.across.limits, shown.up.limits)
    middle = [
        float(np.clip(0.5 * (side.min() + side.max()), low, high))
        for side, (low, high) in zip((across, up), limits, strict=True)
    ]
    panel.text(
        middle[0],
        middle[1],
        printable(electrode.name, NAME_LONGEST),
        ha="center",
        va="center",
        fontsize=size,
        color=INK,
        zorder=6,
        clip_on=True,
        path_effects=[withStroke(linewidth=2.0, foreground="white")],
    )


def put_scale(
    figure: Figure, panel: Axes, found: Shades, volts: Ruler, place: Axes | None = None
) -> None:
    """The scale of colours beside the panel, or in a `place` of its own."""
    low, high = volts.shown([found.low, found.high])
    image = ScalarMappable(Normalize(float(low), float(high)), found.paler)
    beside = {"ax": panel, "pad": 0.02} if place is None else {"cax": place}
    scale = figure.colorbar(image, **beside)
    scale.set_label(volts.label("potential"))
    scale.locator = MaxNLocator(7, steps=ROUND)
    scale.formatter = FuncFormatter(lambda value, _: f"{value:g}".replace("-", "−"))
    scale.update_ticks()
