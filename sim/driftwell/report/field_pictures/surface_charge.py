"""Pictures: the charge on the electrodes' surfaces, along outlines or in space."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.cm import ScalarMappable
from matplotlib.colors import Normalize
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, MaxNLocator
from numpy.typing import NDArray

from driftwell.report.paper.palette import PALE, colour, line_style
from driftwell.report.paper.panel import ROUND, put_across, put_up
from driftwell.report.paper.projection import common_size, frame, plane_limits, put_frame
from driftwell.report.paper.ruler import interval, ruler
from driftwell.report.paper.shades import shades
from driftwell.report.paper.sheet import Entry, page, printable

Floats = NDArray[np.float64]

AXES = "xyz"
PLANES = ((2, 0), (0, 1))
"""Axes across and up: z-x from the side, x-y along z."""
RATIOS = (1.6, 1.0)
WITHIN = 0.98
"""Part of the panels, or of the outlines' length, whose density is shown apart: at edges it grows
without end."""
MOST_DOTS = 40_000
NAME_LONGEST = 40


def charge_along_outlines(
    title: str, provenance: str, electrodes: Sequence[tuple[str, Floats, Floats]]
) -> Figure:
    """Density of charge along each electrode's outline; at edges it leaves the picture.

    electrodes : name; (n,) float64, m, length along the outline from its first point, rising; and
        (n,) float64, C/m^2
    """
    key = [
        Entry(printable(name, NAME_LONGEST), colour(k), line=line_style(k))
        for k, (name, _, _) in enumerate(electrodes)
    ]
    figure = page(title, provenance, 9.6, 4.2, key)
    panel = figure.subplots()
    lengths = np.concatenate([along for _, along, _ in electrodes])
    places = ruler(interval([0.0, *lengths], margin=0.0), "m")
    amounts = ruler(interval(_apart_from_edges(electrodes), zero=True), "C/m²")
    panel.axhline(float(amounts.shown(0.0)), color=PALE, linewidth=0.8)
    for k, (_, along, density) in enumerate(electrodes):
        panel.plot(
            places.shown(along),
            amounts.shown(density),
            line_style(k),
            color=colour(k),
            marker="." if along.size <= 60 else "",
            markersize=4.0,
        )
    put_across(panel, places, "length along the outline")
    put_up(panel, amounts, "charge density")
    return figure


def _apart_from_edges(electrodes: Sequence[tuple[str, Floats, Floats]]) -> Floats:
    """Least and largest density on all but the ends of the outlines' length."""
    density = np.concatenate([each for _, _, each in electrodes])
    share = np.concatenate(
        [np.gradient(along) if along.size > 1 else np.ones(1) for _, along, _ in electrodes]
    )
    order = np.argsort(density, kind="stable")
    below = np.cumsum(share[order]) / share.sum()
    beyond = 0.5 * (1.0 - WITHIN)
    first, last = np.searchsorted(below, [beyond, 1.0 - beyond])
    return density[order[[first, min(last, order.size - 1)]]]


def charge_in_space(title: str, provenance: str, position: Floats, density: Floats) -> Figure:
    """Density of charge at the middles of panels, seen from the side and along z.

    Panels in front hide those behind. The colours end where 98 % of the densities do.

    Parameters
    ----------
    position : (n, 3) float64, m
    density : (n,) float64, C/m^2
    """
    every = max(1, -(-len(density) // MOST_DOTS))
    position, density = position[::every], density[::every]
    figure = page(title, provenance, 9.6, 4.6)
    panels = figure.subplots(1, 2, gridspec_kw={"width_ratios": list(RATIOS)})
    reach = float(np.ptp(position, axis=0).max()) or 1e-3
    found = shades(density, WITHIN)
    amounts = ruler((found.low, found.high), "C/m²")
    size = min(max(260.0 / np.sqrt(len(density)), 1.5), 12.0)
    limits = [plane_limits(position[:, a], position[:, b], reach) for a, b in PLANES]
    unit = common_size([side for pair in limits for side in pair])
    low, high = amounts.limits
    for panel, ratio, (a, b), (wide, tall) in zip(panels, RATIOS, PLANES, limits, strict=True):
        shown = frame(wide, tall, ratio, unit)
        depth = ({0, 1, 2} - {a, b}).pop()
        order = np.argsort(position[:, depth] * (-1.0 if depth == 1 else 1.0), kind="stable")
        panel.scatter(
            shown.across.shown(position[order, a]),
            shown.up.shown(position[order, b]),
            c=amounts.shown(density[order]),
            cmap=found.colours,
            vmin=low,
            vmax=high,
            s=size**2,
            linewidths=0.3,
            edgecolors="#777777" if len(density) <= 3000 else "none",
            rasterized=True,
        )
        put_frame(panel, shown, (AXES[a], AXES[b]))
    panels[0].set_title("from the side")
    panels[1].set_title("along z")
    image = ScalarMappable(Normalize(low, high), found.colours)
    ends = {(True, True): "both", (True, False): "min", (False, True): "max"}
    beyond = (bool((density < found.low).any()), bool((density > found.high).any()))
    scale = figure.colorbar(image, ax=panels, pad=0.02, extend=ends.get(beyond, "neither"))
    scale.set_label(amounts.label("charge density"))
    scale.locator = MaxNLocator(7, steps=ROUND)
    scale.formatter = FuncFormatter(lambda value, _: f"{value:g}".replace("-", "−"))
    scale.update_ticks()
    return figure
