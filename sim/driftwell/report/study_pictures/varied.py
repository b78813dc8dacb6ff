"""Pictures of a sweep, one for each question: its answer over what was varied, with errors.

One key that varies gives a line with error bars; two give a line for each value of the one that has
few, or a map where both have many. More keys, and those that advance together or are sampled, each
have a panel of their own with all points in it.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from matplotlib.axes import Axes
from matplotlib.axis import Axis as AnyAxis
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator
from numpy.typing import NDArray

from driftwell._version import __version__
from driftwell.answers.answer_lines import PLAIN_UNITS
from driftwell.report.paper.gallery import FOLDER, hang
from driftwell.report.paper.palette import colour, line_style, marker
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.ruler import Ruler, in_words, interval, ruler
from driftwell.report.paper.sheet import Entry, page, png, printable, style
from driftwell.study.points import Axis
from driftwell.study.table import Asked, Table

Floats = NDArray[np.float64]

MOST_LINES = 7
"""Lines in one panel; more values of the second key are a map."""
MOST_PANELS = 6
_MOST_TEXTS = 12
"""Texts along an axis; of more, only some are written."""
_NAME_LONGEST = 40
_LOG_MARGIN = 1.15
_LONG = 300.0
"""Ratio of the ends of a logarithmic axis from which on only powers of ten are written."""


@dataclass(frozen=True, slots=True)
class Points:
    """The answers to one question at all points that have a number: values (n,), errors (n,).

    at : for each axis of the study the values there, numbers or texts
    """

    asked: Asked
    at: tuple[tuple[float | str, ...], ...]
    value: Floats
    error: Floats


@dataclass(frozen=True, slots=True)
class Scale:
    """How the values of a key stand along an axis: numbers by a ruler, texts one after another."""

    axis: Axis
    shown: Ruler | None

    def places(self, values: Sequence[float | str]) -> Floats:
        """Where the values stand."""
        if self.shown is None:
            return np.array([self.axis.values.index(value) for value in values], np.float64)
        return self.shown.shown(np.array(values, np.float64))

    def put_across(self, axes: Axes) -> None:
        """Give a panel this axis from left to right."""
        name = printable(self.axis.name, _NAME_LONGEST)
        if self.shown is None:
            ticks = self._ticks()
            axes.set_xticks(ticks, [printable(str(self.axis.values[k]), 12) for k in ticks])
            axes.set_xlabel(name)
        elif self._log:
            axes.set_xscale("log")
            axes.set_xlim(*self.shown.limits)
            _put_decades(axes.xaxis, self.shown)
            axes.set_xlabel(self.shown.label(name))
        else:
            put_across(axes, self.shown, name)

    def put_up(self, axes: Axes) -> None:
        """Give a panel this axis upwards."""
        name = printable(self.axis.name, _NAME_LONGEST)
        if self.shown is None:
            ticks = self._ticks()
            axes.set_yticks(ticks, [printable(str(self.axis.values[k]), 12) for k in ticks])
            axes.set_ylabel(name)
        elif self._log:
            axes.set_yscale("log")
            axes.set_ylim(*self.shown.limits)
            _put_decades(axes.yaxis, self.shown)
            axes.set_ylabel(self.shown.label(name))
        else:
            put_up(axes, self.shown, name)

    @property
    def _log(self) -> bool:
        """Equal ratios of numbers below zero have no logarithm."""
        return self.axis.log and self.shown is not None and self.shown.low > 0.0

    def _ticks(self) -> list[int]:
        count = len(self.axis.values)
        return list(range(0, count, -(-count // _MOST_TEXTS)))


def draw_sweep(folder: Path, table: Table) -> list[Path]:
    """Draw all questions into ``pictures/`` of a sweep's folder; returns the files.

    Pictures of an earlier drawing that are not made again are taken away.

    Raises RecordError where the folder cannot be written.
    """
    with style():
        images = {
            f"{name}.png": png(figure, table.study.title)
            for name, figure in sweep_figures(table).items()
        }
    old = [path.name for path in (folder / FOLDER).glob("*.png")]
    return hang(folder, images, old, "the tables are whole")


def sweep_figures(table: Table) -> dict[str, Figure]:
    """A figure for each question that has a number somewhere, by the name of its file."""
    found: dict[str, Figure] = {}
    varied = [k for k, axis in enumerate(table.study.axes) if len(axis.values) > 1]
    if not varied:
        return found
    for k, asked in enumerate(table.questions):
        points = _points(table, k, asked)
        if not points.value.size:
            continue
        name = re.sub(r"\W+", "-", asked.name).strip("-").lower()[:60] or "question"
        while name in found:
            name += "-2"
        found[name] = _figure(table, points, varied)
    return found


def _points(table: Table, k: int, asked: Asked) -> Points:
    rows = [row for row in table.means() if np.isfinite(row.means[k].value)]
    errors = (row.means[k].error for row in rows)
    return Points(
        asked,
        tuple(tuple(row.first.values[j] for row in rows) for j in range(len(table.study.axes))),
        np.array([row.means[k].value for row in rows]),
        np.array([np.nan if error is None else error for error in errors]),
    )


def _figure(table: Table, points: Points, varied: Sequence[int]) -> Figure:
    """The picture of one question."""
    axes_of = table.study.axes
    free = len({axes_of[k].group for k in varied}) == len(varied)
    if free and len(varied) == 1:
        return _lines(table, points, varied[0], None)
    if free and len(varied) == 2:
        across, other = sorted(varied, key=lambda k: len(axes_of[k].values), reverse=True)
        if len(axes_of[other].values) <= MOST_LINES:
            return _lines(table, points, across, other)
        return _map(table, points, *varied)
    return _panels(table, points, varied[:MOST_PANELS])


def _lines(table: Table, points: Points, across: int, other: int | None) -> Figure:
    """One line with error bars, or one for each value of another key."""
    scale = _scale(table.study.axes[across], points.at[across])
    members: list[tuple[str, NDArray[np.bool_]]] = [("", np.ones(points.value.size, np.bool_))]
    if other is not None:
        key = table.study.axes[other]
        members = [
            (_told(key, value), np.array([each == value for each in points.at[other]]))
            for value in key.values
        ]
    entries = [
        Entry(label, colour(k), marker(k), line_style(k))
        for k, (label, _) in enumerate(members)
        if label
    ]
    figure = page(table.study.title, _provenance(table), 7.6, 4.8, entries)
    axes = figure.add_subplot()
    up = _put_answers(axes, points)
    places = scale.places(points.at[across])
    for k, (_, member) in enumerate(members):
        order = np.flatnonzero(member)[np.argsort(places[member], kind="stable")]
        axes.errorbar(
            places[order],
            up.shown(points.value[order]),
            points.error[order] / up.size,
            color=colour(k),
            marker=marker(k),
            linestyle=line_style(k),
            markersize=4.0,
            capsize=2.5,
        )
    scale.put_across(axes)
    return figure


def _map(table: Table, points: Points, across: int, upward: int) -> Figure:
    """Colours over two keys; white where there is no number."""
    scales = [_scale(table.study.axes[k], points.at[k]) for k in (across, upward)]
    places = [scale.places(points.at[k]) for scale, k in zip(scales, (across, upward), strict=True)]
    (columns, column), (rows, row) = (np.unique(each, return_inverse=True) for each in places)
    shown = _answer_ruler(points)
    grid = np.full((rows.size, columns.size), np.nan)
    grid[row, column] = shown.shown(points.value)
    figure = page(table.study.title, _provenance(table), 7.6, 5.2)
    axes = figure.add_subplot()
    axes.grid(False)
    scales[0].put_across(axes)
    scales[1].put_up(axes)
    mesh = axes.pcolormesh(columns, rows, grid, shading="nearest", cmap="viridis")
    figure.colorbar(mesh, ax=axes, label=shown.label(printable(points.asked.name, _NAME_LONGEST)))
    axes.autoscale()
    return figure


def _panels(table: Table, points: Points, varied: Sequence[int]) -> Figure:
    """All points over each key in a panel of its own."""
    columns = min(3, len(varied))
    rows = -(-len(varied) // columns)
    figure = page(table.study.title, _provenance(table), 3.3 * columns + 0.8, 3.1 * rows + 0.7)
    for place, k in enumerate(varied, 1):
        axes = figure.add_subplot(rows, columns, place)
        scale = _scale(table.study.axes[k], points.at[k])
        up = _put_answers(axes, points)
        axes.errorbar(
            scale.places(points.at[k]),
            up.shown(points.value),
            points.error / up.size,
            color=colour(0),
            marker=marker(0),
            linestyle="none",
            markersize=3.0,
            elinewidth=0.8,
        )
        scale.put_across(axes)
    return figure


def _scale(axis: Axis, values: Sequence[float | str]) -> Scale:
    numbers = [value for value in values if isinstance(value, float)]
    if not axis.unit or len(numbers) < len(values):
        return Scale(axis, None)
    unit = "" if axis.unit in {"", "1"} else axis.unit
    if axis.log and min(numbers) > 0.0:
        low, high = min(numbers) / _LOG_MARGIN, max(numbers) * _LOG_MARGIN
        plain = ruler((low, high), unit, _size(axis.unit))
        return Scale(axis, Ruler(low, high, plain.size, plain.unit))
    return Scale(axis, ruler(interval(numbers), unit, _size(axis.unit)))


def _put_decades(axis: AnyAxis, shown: Ruler) -> None:
    """Plain numbers along a logarithmic axis, fewer of them where it is long."""
    places = (1.0, 2.0, 5.0) if shown.high < _LONG * shown.low else (1.0,)
    axis.set_major_locator(LogLocator(subs=places))
    axis.set_minor_locator(NullLocator())
    axis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))


def _size(unit: str) -> float | None:
    """The size to show values in: without a prefix where the unit takes none."""
    return 1.0 if unit in PLAIN_UNITS else None


def _answer_ruler(points: Points) -> Ruler:
    errors = np.nan_to_num(points.error)
    limits = interval([points.value - errors, points.value + errors])
    unit = "" if points.asked.unit == "1" else points.asked.unit
    return ruler(limits, unit, _size(points.asked.unit))


def _put_answers(axes: Axes, points: Points) -> Ruler:
    shown = _answer_ruler(points)
    put_up(axes, shown, printable(points.asked.name, _NAME_LONGEST))
    return shown


def _told(axis: Axis, value: float | str) -> str:
    """One value of a key, for the key of the picture."""
    if isinstance(value, str):
        return f"{axis.name} = {value}"
    plain = axis.unit in PLAIN_UNITS
    return f"{axis.name} = {f'{value:g}' if plain else in_words(value, axis.unit)}"


def _provenance(table: Table) -> str:
    """Where the picture comes from, in a line."""
    study = table.study
    replicas = f", means of {study.replicas}" if study.replicas > 1 else ""
    return f"driftwell {__version__}; {printable(study.path.name, 60)}{replicas}"
