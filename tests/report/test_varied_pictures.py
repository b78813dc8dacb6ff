"""Pictures of a sweep: the answers stand where they belong, with their errors."""

from __future__ import annotations

import itertools
import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from matplotlib.figure import Figure

from driftwell.answers.answer import Answer
from driftwell.report.paper.sheet import style
from driftwell.report.study_pictures.varied import draw_sweep, sweep_figures
from driftwell.study.catalogue import Row
from driftwell.study.points import Axis, Case
from driftwell.study.read import Study
from driftwell.study.table import Asked, CaseRow, Table

COUNT = Axis("cloud.load.count", (400.0, 800.0, 4000.0), "1", False, 0, 0, True)
VOLTS = Axis("field.rods.voltage.amplitude", (0.1, 0.2), "V", False, 1, 1, False)
TIME = Axis("duration", (1e-6, 1e-5, 1e-4), "s", True, 0, 0, False)
METHOD = Axis("coulomb.method", ("direct", "tree"), "", False, 1, 1, True)


def table(*axes: Axis, replicas: int = 1, answer: Any = None, together: bool = False) -> Table:
    """A table of one question over a grid: size x, 1 um at the first point, 2 um at the next."""
    grid = (
        list(zip(*(a.values for a in axes), strict=True))
        if together
        else list(itertools.product(*(axis.values for axis in axes)))
    )
    cases, rows = [], []
    for k, values in enumerate(grid):
        for replica in range(1, replicas + 1):
            case = Case(len(cases) + 1, (), values, replica)
            cases.append(case)
            value = 1e-6 * (k + 1) if answer is None else answer(k, replica)
            found = Answer("size x / y", "rms-size", value, "m", 1e-7, "")
            run = Row(case.number, f"{case.number}", (), "finished", "", 1.0, 1, (found,))
            rows.append(CaseRow(case, run, (found,)))
    study = Study(
        "How many ions", "", Path("s.toml"), Path("a.toml"), "", (), replicas, axes, tuple(cases)
    )
    return Table(study, (Asked("size x / y", "rms-size", "m"),), tuple(rows))


def figure(made: Table) -> Figure:
    with style():
        found = sweep_figures(made)
        assert ["size-x-y"] == list(found)
        found["size-x-y"].draw_without_rendering()
    return found["size-x-y"]


def lines(found: Figure) -> list[tuple[list[float], list[float]]]:
    """The data of each line with error bars."""
    axes = found.axes[0]
    return [
        tuple(np.round(np.asarray(part, float), 9).tolist() for part in bars.lines[0].get_data())
        for bars in axes.containers
    ]


def test_one_key_is_a_line_with_error_bars() -> None:
    found = figure(table(COUNT))
    (axes,) = found.axes
    assert [([400.0, 800.0, 4000.0], [1.0, 2.0, 3.0])] == lines(found)
    assert ("cloud.load.count", "size x / y (µm)") == (axes.get_xlabel(), axes.get_ylabel())
    bars = axes.containers[0].lines[2][0].get_segments()
    assert [0.9, 1.1] == pytest.approx([bars[0][0][1], bars[0][1][1]])


def test_a_range_of_equal_ratios_has_a_logarithmic_axis_with_a_prefix() -> None:
    found = figure(table(TIME))
    (axes,) = found.axes
    assert ("log", "duration (µs)") == (axes.get_xscale(), axes.get_xlabel())
    assert {"1", "10", "100"} <= {text.get_text() for text in axes.get_xticklabels()}
    assert [([1.0, 10.0, 100.0], [1.0, 2.0, 3.0])] == lines(found)


def test_two_keys_are_a_line_for_each_value_of_the_one_with_fewer() -> None:
    found = figure(table(COUNT, VOLTS))
    assert [
        ([400.0, 800.0, 4000.0], [1.0, 3.0, 5.0]),
        ([400.0, 800.0, 4000.0], [2.0, 4.0, 6.0]),
    ] == lines(found)
    key = [text.get_text() for text in found.legends[0].get_texts()]
    assert [
        "field.rods.voltage.amplitude = 100 mV",
        "field.rods.voltage.amplitude = 200 mV",
    ] == key


def test_texts_stand_one_after_another() -> None:
    found = figure(table(METHOD))
    labels = [text.get_text() for text in found.axes[0].get_xticklabels()]
    assert ["direct", "tree"] == labels
    assert [([0.0, 1.0], [1.0, 2.0])] == lines(found)


def test_two_keys_of_many_values_are_a_map() -> None:
    long = Axis("duration", tuple(1e-6 * k for k in range(1, 9)), "s", False, 0, 0, False)
    many = Axis("cloud.load.count", tuple(map(float, range(10, 20))), "1", False, 1, 1, False)
    found = figure(table(long, many, answer=lambda k, _: math.nan if k == 13 else 1e-6 * k))
    mesh = found.axes[0].collections[0]
    grid = np.ma.filled(mesh.get_array().reshape(10, 8), math.nan)
    expected = np.arange(80.0).reshape(8, 10).T
    expected[3, 1] = math.nan
    np.testing.assert_allclose(grid, expected)
    assert "size x / y (µm)" == found.axes[1].get_ylabel()
    assert "duration (µs)" == found.axes[0].get_xlabel()


def test_keys_that_advance_together_have_a_panel_each() -> None:
    other = Axis("seed", (1.0, 2.0, 3.0), "1", False, 0, 1, True)
    found = figure(table(COUNT, other, together=True))
    assert ["cloud.load.count", "seed"] == [axes.get_xlabel() for axes in found.axes]
    assert [([400.0, 800.0, 4000.0], [1.0, 2.0, 3.0])] == lines(found)


def test_three_keys_have_a_panel_each() -> None:
    third = Axis("seed", (1.0, 2.0), "1", False, 2, 2, True)
    found = figure(table(COUNT, VOLTS, third))
    assert 3 == len(found.axes)
    assert 12 == len(lines(found)[0][0])


def test_replicas_are_shown_by_their_means() -> None:
    found = figure(table(COUNT, replicas=2, answer=lambda k, replica: 1e-6 * (k + replica)))
    assert [([400.0, 800.0, 4000.0], [1.5, 2.5, 3.5])] == lines(found)


def test_what_has_no_number_has_no_picture_and_replicas_alone_have_none() -> None:
    assert {} == sweep_figures(table(COUNT, answer=lambda *_: math.nan))
    assert {} == sweep_figures(table(replicas=3))


def test_pictures_are_written_and_those_of_before_are_taken_away(tmp_path: Path) -> None:
    (tmp_path / "pictures").mkdir()
    (tmp_path / "pictures" / "old.png").write_text("old")
    made = draw_sweep(tmp_path, table(COUNT, VOLTS))
    assert [tmp_path / "pictures" / "size-x-y.png"] == made
    assert ["size-x-y.png"] == [each.name for each in (tmp_path / "pictures").iterdir()]
    image = made[0].read_bytes()
    assert image.startswith(b"\x89PNG")
    draw_sweep(tmp_path, table(COUNT, VOLTS))
    assert image == made[0].read_bytes()
