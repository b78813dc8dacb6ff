"""The picture of the ways of tracked charges."""

from __future__ import annotations

import numpy as np
import pytest
from pictured_run import NONE, Charges, charges, pictured_run

from driftwell.report.paper.sheet import style
from driftwell.report.pictures.scene import scene_of
from driftwell.report.pictures.trajectories import FLICKER, TURN, jagged, trajectories_picture


def drawn(run):
    with style():
        return trajectories_picture(scene_of(run))


def key(figure):
    return [text.get_text() for text in figure.legends[0].get_texts()]


def test_a_few_charges_are_chosen_evenly_among_the_tracked(run_of):
    assert [f"charge {k}" for k in (0, 60, 120, 179, 239, 299)] == key(drawn(run_of("trap")))
    assert ["charge 0", "charge 50000", "charge 99999"] == key(drawn(run_of("many")))


def test_each_coordinate_is_shown_in_time(run_of):
    run = run_of("two")
    figure = drawn(run)
    time, state = run.track(1)
    for axis, scale, axes in zip(range(3), (1e3, 1e6, 1e3), figure.axes[:3], strict=True):
        shown = axes.lines[1].get_data()
        np.testing.assert_allclose(1e9 * time, shown[0])
        np.testing.assert_allclose(scale * state[:, axis], shown[1])
    assert ["x (mm)", "y (µm)", "z (mm)"] == [axes.get_ylabel() for axes in figure.axes[:3]]


def test_a_lost_charge_ends_with_a_cross_where_it_was_lost(run_of):
    run = run_of("all lost")
    figure = drawn(run)
    assert all(label.endswith(", lost at ×") for label in key(figure))
    crosses = [line for line in figure.axes[2].lines if line.get_marker() == "x"]
    assert [[0.9]] * 6 == [pytest.approx(line.get_xdata()) for line in crosses]
    assert [[10.0]] * 6 == [pytest.approx(line.get_ydata()) for line in crosses]


def test_ways_in_space_are_dots_where_records_are_far_apart(tmp_path):
    for step, joined in ((0.2, True), (2.0, False)):
        records = []
        for k in range(60):
            place = [1e-3 * np.cos(step * k), 1e-3 * np.sin(step * k), 0.0]
            records.append((1e-6 * k, Charges(np.array([place]), np.ones((1, 3)))))
        front = drawn(pictured_run(tmp_path / f"run{step}", records)).axes[4]
        assert ("-" if joined else "None") == front.lines[0].get_linestyle()


def test_a_way_out_of_a_cell_and_in_again_is_not_joined(tmp_path):
    """3 um forward each time, from -5 um on in 10 um: out after records 3 and 6, counted from 0."""
    records = []
    for k in range(8):
        along = (3e-6 * k) % 10e-6 - 5e-6
        records.append((1e-6 * k, Charges(np.array([[0.0, 0.0, along]]), np.ones((1, 3)))))
    figure = drawn(pictured_run(tmp_path / "run", records, cell=("z", 10e-6)))
    expected = [-5.0, -2.0, 1.0, 4.0, np.nan, -3.0, 0.0, 3.0, np.nan, -4.0]
    np.testing.assert_allclose(figure.axes[2].lines[0].get_ydata(), expected, atol=1e-9)
    np.testing.assert_allclose(figure.axes[3].lines[0].get_xdata(), expected, atol=1e-9)
    assert [0.0] * 8 == figure.axes[0].lines[0].get_ydata().tolist()


def test_jagged_is_what_turns_much_from_point_to_point():
    def circle(points):
        angle = 2.0 * np.pi * np.arange(100) / points
        return np.cos(angle), np.sin(angle)

    # |change of step| / |step| on a circle is 2 sin(pi / points to a turn), own derivation
    assert not jagged(*circle(9.5), TURN)
    assert jagged(*circle(8.5), TURN)
    assert not jagged(np.zeros(100), circle(6.0)[1], FLICKER)
    assert not jagged(*circle(3.0), TURN, seen=4.0)
    assert not jagged(np.zeros(1), np.zeros(1), TURN)


def test_few_records_are_joined_however_they_lie():
    assert not jagged(np.zeros(10), np.arange(10) % 2.0, TURN)


def test_each_of_few_records_is_marked(run_of):
    for axes in drawn(run_of("stopped")).axes:
        assert {"."} == {line.get_marker() for line in axes.lines} - {"o"}


def test_charges_tracked_for_less_than_two_records_show_nothing(tmp_path):
    records = [(0.0, charges(5)), (1e-6, NONE)]
    assert drawn(pictured_run(tmp_path / "lost", records)) is None
    records = [(0.0, charges(5)), (1e-6, charges(5))]
    assert drawn(pictured_run(tmp_path / "none", records, tracks=0)) is None
