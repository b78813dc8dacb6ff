"""The picture of a search for a limit: all answers over the key, the threshold and the interval.

Above, the whole range; below, the stretch around the interval, where most runs are. Points are
means over seeds with their errors. Where answers have errors the band is the function itself as the
search sees it, one standard deviation to either side.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator
from numpy.typing import NDArray

from driftwell._version import __version__
from driftwell.answers.answer_lines import PLAIN_UNITS
from driftwell.report.paper.gallery import FOLDER, hang
from driftwell.report.paper.palette import BLUE, GREEN, ORANGE, SKY
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import Ruler, interval, ruler
from driftwell.report.paper.sheet import Entry, page, png, printable, style
from driftwell.study.limit_asked import Asked
from driftwell.study.limit_run import Searched
from driftwell.study.limit_search import Search

Floats = NDArray[np.float64]

PICTURE = "limit.png"
_NAME_LONGEST = 40
_AROUND = 4.0
"""Half the width of the lower panel, in that of the interval."""
_LONG = 300.0


def draw_limit(folder: Path, found: Searched) -> list[Path]:
    """Draw the search into ``pictures/`` of its folder; returns the file, none without answers.

    Raises RecordError where the folder cannot be written.
    """
    if not found.search.readings:
        return []
    with style():
        image = png(limit_figure(found), found.study.title)
    old = [path.name for path in (folder / FOLDER).glob("*.png")]
    return hang(folder, {PICTURE: image}, old, "the tables are whole")


def limit_figure(found: Searched) -> Figure:
    """One panel of the whole range, and one of what is around the interval where there is one."""
    search = found.search
    held = _interval(found)
    entries = [
        Entry("answers, means over seeds", BLUE, "o"),
        Entry("threshold", ORANGE, "", "--"),
    ]
    if held is not None:
        entries.append(Entry("interval of the limit", GREEN, "s"))
    if search.crossing is not None:
        entries.append(Entry("the answer as the search sees it", SKY, "", "-", 4.0))
    note = f"driftwell {__version__}; {printable(found.study.path.name, 60)}, {search.runs} runs"
    near = None if held is None else _near(search, held)
    figure = page(found.study.title, note, 7.6, 4.6 if near is None else 7.4, entries)
    panels = [None] if near is None else [None, near]
    for number, limits in enumerate(panels, 1):
        _panel(figure.add_subplot(len(panels), 1, number), search, held, limits)
    return figure


def _interval(found: Searched) -> tuple[float, float] | None:
    if found.verdict is not None:
        return found.verdict.interval
    return found.search.intervals[-1][2:] if found.search.intervals else None


def _near(search: Search, held: tuple[float, float]) -> tuple[float, float] | None:
    """The stretch around the interval; None where that is most of the range."""
    asked = search.asked
    ends = sorted((asked.range.first, asked.range.last))
    width = max(held[1] - held[0], 1e-6 * (ends[1] - ends[0]))
    low, high = held[0] - _AROUND * width, held[1] + _AROUND * width
    low, high = max(low, ends[0]), min(high, ends[1])
    return (low, high) if high - low < 0.5 * (ends[1] - ends[0]) else None


def _panel(
    axes: Axes,
    search: Search,
    held: tuple[float, float] | None,
    limits: tuple[float, float] | None,
) -> None:
    asked = search.asked
    at, value, error = _points(search)
    values = np.array([search.places[share].value for share in at])
    within = np.ones(values.size, np.bool_)
    if limits is not None:
        within = (values >= limits[0]) & (values <= limits[1])
    across = _across(asked, limits)
    shown = [asked.threshold, *(value - error)[within], *(value + error)[within]]
    unit = "" if asked.answer_unit == "1" else asked.answer_unit
    up = ruler(interval(shown), unit, 1.0 if asked.answer_unit in PLAIN_UNITS else None)
    put_up(axes, up, printable(asked.form.answer, _NAME_LONGEST))
    name = printable(asked.form.setting, _NAME_LONGEST)
    if asked.log and limits is None and across.low > 0.0:
        axes.set_xscale("log")
        axes.set_xlim(*across.limits)
        places = (1.0, 2.0, 5.0) if across.high < _LONG * across.low else (1.0,)
        axes.xaxis.set_major_locator(LogLocator(subs=places))
        axes.xaxis.set_minor_locator(NullLocator())
        axes.xaxis.set_major_formatter(FuncFormatter(lambda number, _: f"{number:g}"))
        axes.set_xlabel(across.label(name))
    else:
        put_across(axes, across, name)
    if held is not None:
        axes.axvspan(*across.shown(held), color=GREEN, alpha=0.25, linewidth=0.0)
    if search.crossing is not None:
        _band(axes, search, across, up)
    axes.axhline(float(up.shown(asked.threshold)), color=ORANGE, linestyle="--")
    axes.errorbar(
        across.shown(values[within]),
        up.shown(value[within]),
        error[within] / up.size,
        color=BLUE,
        marker="o",
        linestyle="none",
        markersize=4.0,
        capsize=2.5,
    )


def _points(search: Search) -> tuple[Floats, Floats, Floats]:
    """Places, mean answers and their errors; zero where none is known."""
    at = np.array(sorted(search.readings))
    value = np.array([np.mean([each.value for each in search.readings[x]]) for x in at])
    known = None if search.pooled is None else search.pooled.known
    if known is None or known.at.size != at.size:
        return at, value, np.zeros(at.size)
    return at, value, known.error


def _across(asked: Asked, limits: tuple[float, float] | None) -> Ruler:
    unit = "" if asked.unit == "1" else asked.unit
    size = 1.0 if asked.unit in PLAIN_UNITS else None
    if limits is not None:
        return ruler(limits, unit, size)
    ends = sorted((asked.range.first, asked.range.last))
    if asked.log and ends[0] > 0.0:
        plain = ruler((ends[0] / 1.15, ends[1] * 1.15), unit, size)
        return Ruler(ends[0] / 1.15, ends[1] * 1.15, plain.size, plain.unit)
    return ruler(interval(ends), unit, size)


def _band(axes: Axes, search: Search, across: Ruler, up: Ruler) -> None:
    """The function as it is known, one standard deviation to either side."""
    found = search.crossing
    if found is None:
        return
    asked = search.asked
    at = across.shown(np.array([asked.value(float(share)) for share in found.at]))
    middle = found.middle + asked.threshold
    low, high = up.shown(middle - found.spread), up.shown(middle + found.spread)
    axes.fill_between(at, low, high, color=SKY, alpha=0.35, linewidth=0.0)
