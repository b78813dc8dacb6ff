"""Picture: how well the account closes, and the energies in it, in time."""

from __future__ import annotations

import math

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.ticker import FixedLocator, FuncFormatter, NullLocator
from numpy.typing import NDArray

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.report.paper.palette import (
    BLACK,
    BLUE,
    GREEN,
    INK,
    ORANGE,
    PALE,
    PURPLE,
    SKY,
    VERMILLION,
)
from driftwell.report.paper.panel import put_up
from driftwell.report.paper.ruler import Ruler, interval, ruler
from driftwell.report.paper.sheet import sheet
from driftwell.report.paper.time_axis import BROAD, MIDDLE, NARROW, put_line, put_time, time_ruler
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

RESIDUALS = (
    ("energy", "energy_residual", VERMILLION, MIDDLE),
    ("momentum", "momentum_residual", BLUE, BROAD),
    ("angular momentum", "angular_residual", GREEN, MIDDLE),
    ("third law", "third_law_residual", PURPLE, NARROW),
)
BOOKED = (("charge", "charge_residual"), ("count", "count_residual"))
"""Sums of a few numbers: closed to rounding or plainly wrong, so said in words only."""
ENERGIES = (
    ("kinetic", "kinetic", VERMILLION, BROAD),
    ("in fields", "field", BLUE, MIDDLE),
    ("of all pairs", "coulomb", GREEN, MIDDLE),
    ("of images", "image", SKY, NARROW),
    ("work of drives", "work_drive", PURPLE, NARROW),
    ("work of induction", "work_induced", ORANGE, NARROW),
    ("taken by walls", "energy_walls", BLACK, NARROW),
    ("given by processes", "energy_processes", PALE, NARROW),
)
ROUNDING = 1e-16
"""Where the axis of residuals begins if all of them are zero."""
NOTHING = 1e-30
"""Residuals below this are shown as zero."""
MOST_ELECTRONVOLTS = 1e12
"""Energies up to this are shown in electronvolts, beyond it in joules."""
MOST_TICKS = 9


def ledger_picture(scene: Scene) -> Figure | None:
    """Residuals above, energies below if there are any; None where there are no two rows."""
    ledger = scene.run.ledger
    if len(ledger) < 2:
        return None
    parts = [put_residuals]
    if any(np.any(ledger[column] != 0.0) for _, column, *_ in ENERGIES):
        parts.append(put_energies)
    figure = sheet(scene.run, 9.6, 0.8 + 3.1 * len(parts))
    times = time_ruler(ledger["time"])
    for row, put in enumerate(parts):
        panel = figure.add_subplot(len(parts), 1, row + 1)
        put(panel, ledger, times)
        put_time(panel, times, ledger["time"], labelled=row == len(parts) - 1)
    return figure


def put_residuals(axes: Axes, ledger: NDArray[np.void], times: Ruler) -> None:
    """Magnitudes on a logarithmic axis, on whose lowest tick stands what is exactly zero."""
    magnitudes = {name: _magnitude(ledger[column]) for name, column, *_ in RESIDUALS}
    every = np.concatenate(list(magnitudes.values()))
    every = every[(every > 0.0) & np.isfinite(every)]
    lowest = math.floor(math.log10(every.min())) if every.size else round(math.log10(ROUNDING))
    highest = max(math.ceil(math.log10(every.max())) if every.size else lowest, lowest + 1)
    floor = lowest - 1
    axes.set_yscale("log")
    axes.set_ylim(10.0 ** (floor - 0.3), 10.0 ** (highest + 0.2))
    step = -(-(highest - lowest) // (MOST_TICKS - 1))
    axes.yaxis.set_major_locator(
        FixedLocator([10.0**floor, *(10.0**k for k in range(lowest, highest + 1, step))])
    )
    axes.yaxis.set_minor_locator(NullLocator())
    axes.yaxis.set_major_formatter(
        FuncFormatter(
            lambda value, _: (
                "0"
                if value < 10.0 ** (floor + 0.5)
                else f"1e{round(math.log10(value))}".replace("-", "−")
            )
        )
    )
    axes.set_ylabel("residual, relative")
    axes.set_title("what does not close in the ledger")
    across = times.shown(ledger["time"])
    entries = []
    for name, _, colour, width in RESIDUALS:
        values = magnitudes[name]
        zero = values == 0.0
        if zero.all():
            put_line(axes, across, np.full(len(zero), 10.0**floor), colour, width=width)
        else:
            put_line(axes, across, np.where(zero, np.nan, values), colour, width=width)
            axes.plot(
                across[zero], np.full(zero.sum(), 10.0**floor), ".", color=colour, markersize=3.0
            )
        entries.append((_at_most(name, values), colour, width))
    entries += [(_at_most(name, _magnitude(ledger[column])), INK, 0.0) for name, column in BOOKED]
    _beside(axes, entries)


def put_energies(axes: Axes, ledger: NDArray[np.void], times: Ruler) -> None:
    """The energies that are not zero throughout."""
    found = [
        (name, ledger[column], colour, width)
        for name, column, colour, width in ENERGIES
        if np.any(ledger[column] != 0.0)
    ]
    limits = interval([values for _, values, *_ in found], zero=True)
    electronvolts = max(map(abs, limits)) < MOST_ELECTRONVOLTS * ELEMENTARY_CHARGE
    scale, unit = (ELEMENTARY_CHARGE, "eV") if electronvolts else (1.0, "J")
    shown = ruler((limits[0] / scale, limits[1] / scale), unit)
    for _, values, colour, width in found:
        put_line(
            axes, times.shown(ledger["time"]), shown.shown(values / scale), colour, width=width
        )
    put_up(axes, shown, "energy")
    axes.set_title("energies of all charges")
    _beside(axes, [(name, colour, width) for name, _, colour, width in found])


def _beside(axes: Axes, entries: list[tuple[str, str, float]]) -> None:
    """A key to the right of a panel."""
    if entries:
        axes.legend(
            [Line2D([], [], color=colour, linewidth=width) for _, colour, width in entries],
            [name for name, *_ in entries],
            loc="upper left",
            bbox_to_anchor=(1.01, 1.0),
            frameon=False,
            borderaxespad=0.0,
            handlelength=2.6,
        )


def _magnitude(residual: Floats) -> Floats:
    """Magnitudes; what is too small for the axis is zero."""
    values = np.abs(residual)
    return np.where(values < NOTHING, 0.0, values)


def _at_most(name: str, values: Floats) -> str:
    """The largest residual, in words."""
    finite = values[np.isfinite(values)]
    if finite.size < values.size:
        return f"{name}: not a number"
    return f"{name}: {finite.max():.1e} at most" if finite.any() else f"{name}: 0"
