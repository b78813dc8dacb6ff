"""The paper of a picture: its size, its style, the title above, the key, and the line below.

Nothing a user wrote is read as mathematics or set in a font that lacks it, and no settings of the
machine's own change how a picture looks.
"""

from __future__ import annotations

import math
import textwrap
from collections.abc import Sequence
from contextlib import AbstractContextManager
from dataclasses import dataclass
from functools import lru_cache
from io import BytesIO
from typing import Any

import matplotlib.style
import numpy as np
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties, findfont, get_font
from matplotlib.layout_engine import ConstrainedLayoutEngine
from matplotlib.lines import Line2D

from driftwell.record.reader import Run
from driftwell.report.paper.palette import INK, PALE, Line
from driftwell.report.paper.ruler import in_words

FONT = "DejaVu Sans"
DOTS_PER_INCH = 110
TITLE_SIZE, TEXT_SIZE, SMALL_SIZE = 12.0, 9.0, 8.0
EDGE = 0.08
"""Free paper at the edges, inches."""
LINE_HEIGHT = 1.45 / 72.0
"""Height of a line of text, inches for each point of its size."""
LETTER_WIDTH = 0.6 / 72.0
"""Width of a letter, inches for each point of its size; few words are wider."""
HANDLE_WIDTH = 0.62
"""Width of what stands before an entry of the key and after it, inches."""
KEY_LONGEST, KEY_MOST = 90, 14
"""Characters of an entry of the key, and entries."""

_STYLE: dict[str, Any] = {
    "text.parse_math": False,
    "font.family": [FONT],
    "font.size": TEXT_SIZE,
    "axes.titlesize": TEXT_SIZE,
    "axes.titlelocation": "left",
    "axes.labelsize": TEXT_SIZE,
    "axes.edgecolor": PALE,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.8,
    "axes.formatter.useoffset": False,
    "axes.formatter.limits": (-6, 7),
    "axes.grid": True,
    "axes.axisbelow": True,
    "grid.color": "#e4e4e4",
    "grid.linewidth": 0.6,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.labelsize": SMALL_SIZE,
    "ytick.labelsize": SMALL_SIZE,
    "legend.fontsize": SMALL_SIZE,
    "lines.linewidth": 1.3,
    "path.simplify": True,
    "agg.path.chunksize": 20000,
}


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of the key: how a thing is drawn, and what it is."""

    label: str
    colour: str
    marker: str = ""
    line: Line = ""
    width: float = 1.3


def style() -> AbstractContextManager[None]:
    """While inside, figures are made and drawn in the one style of all pictures."""
    return matplotlib.style.context(["default", _STYLE])


def sheet(run: Run, width: float, height: float, key: Sequence[Entry] = ()) -> Figure:
    """An empty figure, `width` by `height` inches, with a run's title, key and provenance."""
    return page(run.header.title, _provenance(run), width, height, key)


def page(
    title: str, provenance: str, width: float, height: float, key: Sequence[Entry] = ()
) -> Figure:
    """An empty figure with a title and a key above it and a line of small print below."""
    figure = Figure(figsize=(width, height), dpi=DOTS_PER_INCH)
    top = EDGE + _title(figure, title)
    top += _key(figure, key, top)
    bottom = EDGE + LINE_HEIGHT * SMALL_SIZE
    figure.text(
        1.0 - EDGE / width,
        EDGE / height,
        provenance,
        ha="right",
        va="bottom",
        fontsize=SMALL_SIZE - 1.0,
        color=PALE,
    ).set_in_layout(False)
    figure.set_layout_engine(
        ConstrainedLayoutEngine(
            w_pad=EDGE,
            h_pad=EDGE,
            rect=(0.0, bottom / height, 1.0, 1.0 - (top + bottom) / height),
        )
    )
    return figure


def png(figure: Figure, title: str) -> bytes:
    """The figure as a PNG file, the same bytes each time."""
    image = BytesIO()
    figure.savefig(image, format="png", metadata={"Title": title})
    return image.getvalue()


def printable(text: str, longest: int = 0) -> str:
    """Text the font can show: what it lacks becomes a box, and what is too long is cut."""
    shown = "".join(
        letter if ord(letter) in _letters() else "" if not letter.isprintable() else "□"
        for letter in " ".join(text.split())
    )
    return shown if not longest or len(shown) <= longest else f"{shown[: longest - 1]}…"


@lru_cache(maxsize=1)
def _letters() -> frozenset[int]:
    """What the font can show, plain and bold."""
    fonts = (FontProperties(family=FONT, weight=weight) for weight in ("normal", "bold"))
    plain, bold = (frozenset(get_font(findfont(font)).get_charmap()) for font in fonts)
    return plain & bold


def _title(figure: Figure, title: str) -> float:
    """Put the title at the top, in two lines at most; returns their height, inches."""
    width, height = figure.get_size_inches()
    room = int((width - 2.0 * EDGE) * 72.0 / (0.6 * TITLE_SIZE))
    lines = textwrap.wrap(printable(title), room, max_lines=2, placeholder=" …") or [""]
    text = figure.text(
        EDGE / width,
        1.0 - EDGE / height,
        "\n".join(lines),
        ha="left",
        va="top",
        fontsize=TITLE_SIZE,
        fontweight="bold",
    )
    text.set_in_layout(False)
    widest = text.get_window_extent().width / figure.dpi
    if widest > width - 2.0 * EDGE:
        text.set_fontsize(TITLE_SIZE * (width - 2.0 * EDGE) / widest)
    return len(lines) * LINE_HEIGHT * TITLE_SIZE


def _key(figure: Figure, key: Sequence[Entry], top: float) -> float:
    """Put the key `top` inches below the upper edge; returns its height, inches."""
    if not key:
        return 0.0
    shown = list(key[:KEY_MOST])
    labels = [printable(entry.label, KEY_LONGEST) for entry in shown]
    handles = [
        Line2D(
            [],
            [],
            color=entry.colour,
            marker=entry.marker,
            linestyle=entry.line or "none",
            linewidth=entry.width,
        )
        for entry in shown
    ]
    if len(key) > KEY_MOST:
        labels.append(f"and {len(key) - KEY_MOST} more")
        handles.append(Line2D([], [], linestyle="none"))
    width, height = figure.get_size_inches()
    columns = _columns([len(label) for label in labels], width - 2.0 * EDGE)
    # A label beginning with "_" would be left out, so the texts are put in afterwards.
    legend = figure.legend(
        handles,
        ["-"] * len(labels),
        loc="upper left",
        bbox_to_anchor=(EDGE / width, 1.0 - top / height),
        ncols=columns,
        frameon=False,
        borderaxespad=0.0,
        borderpad=0.0,
        columnspacing=1.6,
        labelspacing=0.35,
    )
    legend.set_in_layout(False)
    for text, label in zip(legend.get_texts(), labels, strict=True):
        text.set_text(label)
    return math.ceil(len(labels) / columns) * LINE_HEIGHT * SMALL_SIZE + 0.3 * EDGE


def _columns(lengths: Sequence[int], room: float) -> int:
    """How many columns of entries with so many letters fit side by side into `room` inches."""
    for columns in range(len(lengths), 1, -1):
        widest = [max(part) for part in np.array_split(np.array(lengths), columns)]
        if sum(widest) * LETTER_WIDTH * SMALL_SIZE + columns * HANDLE_WIDTH <= room:
            return columns
    return 1


def _provenance(run: Run) -> str:
    """Where the picture comes from, in a line."""
    header = run.header
    return (
        f"driftwell {header.driftwell_version}, seed {header.seed}; {run.outcome.word} "
        f"at t = {in_words(run.end_time, 's', 4)}"
    )
