"""The paper of a figure in print: a column or a page wide, letters and lines as journals want them.

Nothing of the machine's own settings changes how a figure looks, and nothing a user wrote is read
as mathematics. Text stays text in SVG and PDF; where dots are many they become one image.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import Any

import matplotlib.style
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.layout_engine import ConstrainedLayoutEngine
from matplotlib.lines import Line2D

from driftwell.record.reader import Run
from driftwell.report.figures.options import COLUMN, PAGE, FigureOptions, height_of, width_of
from driftwell.report.paper.palette import INK
from driftwell.report.paper.sheet import Entry, printable, style

INCH = 0.0254
TEXT, SMALL = 8.0, 7.0
"""Sizes of letters, points."""
LINE = 1.1
DOTS_PER_INCH = 300
MANY = 400
"""Dots of a line from which on they are drawn as an image."""
PAD = 0.03
"""Free paper at the edges, inches."""
MOST_ENTRIES = 8
LONGEST = 40
LETTER, HANDLE = 0.57 * SMALL / 72.0, 0.48
"""Width of a letter of the key, and of what stands beside it, inches."""

_STYLE: dict[str, Any] = {
    "font.size": TEXT,
    "axes.titlesize": TEXT,
    "axes.labelsize": TEXT,
    "axes.edgecolor": INK,
    "axes.linewidth": 0.6,
    "axes.grid": False,
    "axes.labelpad": 2.0,
    "xtick.labelsize": SMALL,
    "ytick.labelsize": SMALL,
    "xtick.direction": "in",
    "ytick.direction": "in",
    "xtick.top": True,
    "ytick.right": True,
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "xtick.major.size": 3.0,
    "ytick.major.size": 3.0,
    "legend.fontsize": SMALL,
    "legend.frameon": False,
    "lines.linewidth": LINE,
    "figure.dpi": DOTS_PER_INCH,
    "savefig.dpi": DOTS_PER_INCH,
    "svg.fonttype": "none",
    "svg.hashsalt": "driftwell",
    "pdf.fonttype": 42,
}


@contextmanager
def print_style() -> Iterator[None]:
    """While inside, figures are made and drawn as for print."""
    with style(), matplotlib.style.context(_STYLE):
        yield


def blank(
    run: Run,
    options: FigureOptions,
    key: Sequence[Entry] = (),
    ratio: float = 1.4,
    panels: int = 1,
) -> Figure:
    """An empty figure with its key above.

    ratio : width over height of the figure, where no height was asked for
    panels : side by side: several are a page wide, unless a width was asked for
    """
    wide = width_of(options, COLUMN if panels == 1 else PAGE) / INCH
    room = key_height(key, wide)
    high = height_of(options, (wide / ratio + room) * INCH) / INCH
    figure = Figure(figsize=(wide, high))
    figure.set_layout_engine(ConstrainedLayoutEngine(w_pad=PAD, h_pad=PAD))
    if options.title:
        figure.suptitle(printable(run.header.title, int(wide / LETTER)), fontsize=TEXT)
    put_key(figure, key)
    return figure


def put_key(figure: Figure, key: Sequence[Entry]) -> None:
    """Put a key above all panels; one entry alone says nothing and is left out."""
    if len(key) < 2:
        return
    shown = [*key[:MOST_ENTRIES]]
    labels = [printable(entry.label, LONGEST) for entry in shown]
    if len(key) > len(shown):
        shown.append(Entry("", INK))
        labels.append(f"and {len(key) - MOST_ENTRIES} more")
    handles = [
        Line2D(
            [],
            [],
            color=entry.colour,
            marker=entry.marker,
            markersize=3.5,
            linestyle=entry.line or "none",
            linewidth=entry.width,
        )
        for entry in shown
    ]
    # A label beginning with "_" would be left out, so the texts are put in afterwards.
    legend = figure.legend(
        handles,
        ["-"] * len(labels),
        loc="outside upper center",
        ncols=_columns(labels, figure.get_size_inches()[0]),
        columnspacing=1.2,
        handlelength=2.2,
        handletextpad=0.5,
        labelspacing=0.25,
        borderpad=0.1,
        borderaxespad=0.1,
    )
    for text, label in zip(legend.get_texts(), labels, strict=True):
        text.set_text(label)


def key_height(key: Sequence[Entry], width: float) -> float:
    """Room that a key takes above the panels, inches."""
    if len(key) < 2:
        return 0.0
    labels = [printable(entry.label, LONGEST) for entry in key[: MOST_ENTRIES + 1]]
    return -(-len(labels) // _columns(labels, width)) * 1.3 * SMALL / 72.0 + 0.04


def put_letters(panels: Sequence[Axes]) -> None:
    """(a), (b), ... in the corners of several panels, for the caption to name."""
    if len(panels) < 2:
        return
    for number, panel in enumerate(panels):
        panel.annotate(
            f"({'abcdefgh'[number]})",
            (0.0, 1.0),
            xytext=(3.0, -3.0),
            xycoords="axes fraction",
            textcoords="offset points",
            ha="left",
            va="top",
            fontsize=TEXT,
            fontweight="bold",
            bbox={"facecolor": "white", "edgecolor": "none", "alpha": 0.75, "pad": 0.8},
            zorder=20,
        )


def finish(figure: Figure) -> Figure:
    """Without titles of panels, and with many dots as an image within a figure of lines."""
    for axes in figure.axes:
        axes.set_title("")
        for place in ("left", "right"):
            axes.set_title("", loc=place)
        for line in axes.lines:
            drawn = line.get_marker() not in ("", "None", None)
            if drawn and np.size(line.get_xdata()) >= MANY:
                line.set_rasterized(True)
    return figure


def _columns(labels: Sequence[str], width: float) -> int:
    """How many columns of a key fit side by side into `width` inches."""
    for columns in range(len(labels), 1, -1):
        parts = np.array_split(np.array([len(label) for label in labels]), columns)
        if sum(int(part.max()) * LETTER + HANDLE for part in parts) <= width:
            return columns
    return 1
