"""A panel with densities of clouds: steps with error bars, in powers of ten of 1/m^d."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.report.figures.options import FigureError, FigureOptions
from driftwell.report.figures.print_style import LINE, blank, finish
from driftwell.report.figures.profile import DIMENSIONS, Profile
from driftwell.report.paper.palette import colour, line_style
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import Ruler, interval, ruler
from driftwell.report.paper.sheet import Entry
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

LEAST = 30
"""Fewer charges show no density."""
_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


def density_figure(
    scene: Scene,
    options: FigureOptions,
    snapshot: Snapshot,
    clouds: Sequence[CloudFacts],
    names: tuple[str, str],
    kind: str,
    profile: Callable[[Floats, Floats], Profile],
) -> Figure:
    """The profile of each cloud, from its positions (n, 3) and weights (n,).

    names : of both axes; kind : what is counted in, a word of profile.MEASURES
    """
    found = []
    for cloud in clouds:
        own = snapshot.cloud == cloud.index
        if np.count_nonzero(own) >= LEAST:
            found.append((cloud, profile(snapshot.position[own], snapshot.weight[own])))
    if not found:
        raise FigureError(
            f"{scene.run.folder}: no cloud holds {LEAST} charges at t = {snapshot.time:.6g} s, too "
            "few for a density. Take another time with --at."
        )
    looks = {cloud.index: (colour(k), line_style(7 * k)) for k, (cloud, _) in enumerate(found)}
    key = [Entry(c.name, looks[c.index][0], line=looks[c.index][1]) for c, _ in found]
    figure = blank(scene.run, options, key)
    panel = figure.subplots()
    along = ruler(interval(np.concatenate([each.edges for _, each in found]), margin=0.0), "m")
    tops = np.concatenate([each.density + each.error for _, each in found])
    up = power_ruler(interval(tops, zero=True), DIMENSIONS[kind])
    for cloud, each in found:
        look, line = looks[cloud.index]
        panel.stairs(
            up.shown(each.density),
            along.shown(each.edges),
            color=look,
            linestyle=line,
            linewidth=LINE,
            baseline=None,
        )
        panel.errorbar(
            along.shown(0.5 * (each.edges[:-1] + each.edges[1:])),
            up.shown(each.density),
            up.shown(each.error),
            fmt="none",
            ecolor=look,
            elinewidth=0.7,
            capsize=1.2,
            capthick=0.6,
        )
    put_across(panel, along, names[0], 6)
    put_up(panel, up, names[1])
    return finish(figure)


def power_ruler(limits: tuple[float, float], dimension: int) -> Ruler:
    """The axis of a density: a power of ten, by threes, of 1/m^dimension; of a number for 0."""
    largest = max(abs(limits[0]), abs(limits[1]))
    power = 3 * math.floor(math.log10(largest) / 3.0 + 1e-9) if largest > 0.0 else 0
    power = 0 if power == 3 and not dimension else power
    ten = "10" + str(power).translate(_SUPERSCRIPT) if power else ""
    metres = "m" + f"-{dimension}".translate(_SUPERSCRIPT) if dimension else ""
    return Ruler(*limits, 10.0**power, f"{ten} {metres}".strip())
