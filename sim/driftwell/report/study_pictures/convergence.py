"""The picture of a convergence study: for each answer, the errors of all axes on one scale."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path

from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator

from driftwell._version import __version__
from driftwell.report.paper.gallery import FOLDER, hang
from driftwell.report.paper.palette import BLACK, COLOURS, INK, MARKERS, PALE
from driftwell.report.paper.sheet import Entry, page, png, printable, style
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.chance import OF_THE_WHOLE
from driftwell.study.convergence.table import Report
from driftwell.study.convergence.verdict import CHANCE, CONVERGED, Convergence, in_words

PICTURE = "convergence.png"
MOST_ROWS = 40
_ROW = 0.34
"""Height of a row, inches."""
_NAME_LONGEST = 34
_SMALLEST = 1e-16
_WIDEST = 1e8
"""Largest error shown over the smallest: what matters would lie on one spot else."""
_MOST_NUMBERS = 9


def draw_convergence(folder: Path, report: Report) -> list[Path]:
    """Draw into ``pictures/`` of the folder; returns the file, none where there is no number.

    Raises RecordError where the folder cannot be written.
    """
    with style():
        figure = convergence_figure(report)
        images = {} if figure is None else {PICTURE: png(figure, report.plan.study.title)}
    old = [path.name for path in (folder / FOLDER).glob("*.png")]
    return hang(folder, images, old, "the tables are whole")


def convergence_figure(report: Report) -> Figure | None:
    """One row for each answer; errors as part of its value, bounds as open marks."""
    rows = [row for row in report.rows if _scale(row) > 0.0][:MOST_ROWS]
    sizes = [size for row in rows for size in _sizes(row).values()]
    if not sizes:
        return None
    parts = [CHANCE, *(axis for axis in AXES if axis != "seeds")]
    shown = [part for part in parts if any(part in _sizes(row) for row in rows)]
    key = [
        Entry(in_words(part), COLOURS[parts.index(part)], MARKERS[parts.index(part)])
        for part in shown
    ]
    key += [Entry("combined", BLACK, "|", "", 2.0)]
    if report.tolerance is not None:
        key.append(Entry(f"asked: {100.0 * report.tolerance:g} %", PALE, "", "--"))
    name = printable(report.plan.study.path.name, 60)
    figure = page(
        report.plan.study.title,
        f"driftwell {__version__}; {name}; open marks: bounds, below the noise{_left_out(sizes)}",
        7.6,
        1.5 + _ROW * len(rows),
        key,
    )
    axes = figure.add_subplot()
    axes.set_xscale("log")
    high = max([*sizes, *(_combined(row) for row in rows)])
    low = max(min(sizes), high / _WIDEST)
    if report.tolerance is not None:
        low, high = min(low, report.tolerance), max(high, report.tolerance)
        axes.axvline(report.tolerance, color=PALE, linestyle="--", linewidth=1.0)
    axes.set_xlim(0.5 * max(low, _SMALLEST), 2.0 * high)
    for place, row in enumerate(rows):
        for part, size in _sizes(row).items():
            number = parts.index(part)
            axis = row.axes.get(part)
            is_bound = axis is not None and axis.kind == "bound"
            axes.plot(
                [size],
                [place],
                color=COLOURS[number],
                marker=MARKERS[number],
                markerfacecolor="white" if is_bound else COLOURS[number],
                linestyle="none",
                markersize=5.0,
            )
        axes.plot([_combined(row)], [place], color=BLACK, marker="|", markersize=13.0)
    axes.set_yticks(range(len(rows)), [printable(row.answer.name, _NAME_LONGEST) for row in rows])
    if report.tolerance is not None:
        for label, row in zip(axes.get_yticklabels(), rows, strict=True):
            kept = row.verdict(report.tolerance) == CONVERGED
            label.set_color(INK)
            label.set_fontweight("normal" if kept else "bold")
    axes.set_ylim(len(rows) - 0.5, -0.5)
    axes.xaxis.set_major_locator(LogLocator(subs=(1.0,), numticks=_MOST_NUMBERS))
    axes.xaxis.set_minor_locator(NullLocator())
    axes.xaxis.set_major_formatter(FuncFormatter(lambda size, _: f"{100.0 * size:g}"))
    axes.set_xlabel("error, % of the value (of the whole, for fractions)")
    return figure


def _left_out(sizes: Sequence[float]) -> str:
    """That some errors are off the scale, where they are."""
    small = max(sizes) > _WIDEST * min(sizes)
    return f"; below {1.0 / _WIDEST:g} of the largest: not shown" if small else ""


def _scale(row: Convergence) -> float:
    """What errors are parts of; 0 where there is nothing to compare them with."""
    value = 1.0 if row.answer.ask in OF_THE_WHOLE else abs(row.answer.value)
    return value if math.isfinite(value) and math.isfinite(row.combined) else 0.0


def _sizes(row: Convergence) -> dict[str, float]:
    """The parts of the error that can stand on a logarithmic scale."""
    scale = _scale(row)
    if scale == 0.0:
        return {}
    parts = {part: error / scale for part, error in row.parts().items()}
    return {part: size for part, size in parts.items() if size > _SMALLEST}


def _combined(row: Convergence) -> float:
    return max(row.combined / _scale(row), _SMALLEST)
