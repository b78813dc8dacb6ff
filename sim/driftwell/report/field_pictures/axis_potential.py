"""Picture: the potential along an axis, of each electrode at 1 V and of all at a time."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.paper.palette import BLACK, colour, line_style
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import in_words, interval, ruler
from driftwell.report.paper.sheet import KEY_MOST, Entry, page, printable

Floats = NDArray[np.float64]

NAME_LONGEST = 40


def axis_potential(
    title: str,
    provenance: str,
    along: Floats,
    units: Sequence[tuple[str, Floats]],
    total: Floats,
    time: float,
    axis: str = "z",
) -> Figure:
    """Each electrode's share in the potential along an axis, and below it the sum at a time.

    Parameters
    ----------
    along : (n,) float64, m, rising
    units : name of each electrode, and the potential with 1 V on it and 0 on all others, (n,)
    total : (n,) float64, V, of all electrodes at `time`, s
    axis : its name
    """
    key = [
        Entry(printable(name, NAME_LONGEST), colour(k), line=line_style(k))
        for k, (name, _) in enumerate(units[: KEY_MOST - 1])
    ]
    if len(units) > len(key):
        key.append(Entry(f"and {len(units) - len(key)} more", colour(len(key)), line="-"))
    figure = page(title, provenance, 9.6, 5.6, key)
    above, below = figure.subplots(2, 1, sharex=True, gridspec_kw={"height_ratios": [1.2, 1.0]})
    places = ruler((float(along[0]), float(along[-1])), "m")
    across = places.shown(along)
    shares = ruler(interval([0.0, *(v for _, values in units for v in values)], zero=True), "")
    for k, (_, values) in enumerate(units):
        above.plot(across, shares.shown(values), line_style(k), color=colour(k))
    put_across(above, places, axis)
    above.set_xlabel("")
    put_up(above, shares, "potential for 1 V (V)")
    above.set_title("each electrode alone at 1 V, the others at 0 V")
    volts = ruler(interval(total), "V")
    below.plot(across, volts.shown(total), "-", color=BLACK)
    put_across(below, places, axis)
    put_up(below, volts, "potential")
    below.set_title(f"all electrodes at t = {in_words(time, 's', 4)}")
    return figure
