"""The picture of sizes, temperatures and number of charges in time."""

from __future__ import annotations

import numpy as np
import pytest
from pictured_run import ALL_LOST, MASS, NONE, charges, pictured_run

from driftwell.constants import BOLTZMANN
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.scene import scene_of
from driftwell.report.pictures.sizes import sizes_picture


def drawn(run):
    with style():
        return sizes_picture(scene_of(run))


def test_one_cloud_shows_the_moments_recorded_of_it(run_of):
    run = run_of("trap")
    size, heat, left = drawn(run).axes
    moments = run.moments("load")
    assert ["rms size (µm)", "temperature (K)", "charges left"] == [
        axes.get_ylabel() for axes in (size, heat, left)
    ]
    for axis, line in enumerate(size.lines):
        time, shown = line.get_data()
        np.testing.assert_allclose(1e6 * moments.time, time)
        np.testing.assert_allclose(1e6 * np.sqrt(moments.covariance[:, axis, axis]), shown)
    np.testing.assert_array_equal(moments.count, left.lines[0].get_ydata())


def test_temperatures_are_those_of_the_velocities(run_of):
    run = run_of("trap")
    velocity = run.snapshot(0.0).velocity
    heat = drawn(run).axes[1]
    expected = MASS / BOLTZMANN * velocity.var(axis=0, ddof=1)
    assert expected == pytest.approx(
        [line.get_ydata()[0] for line in heat.lines], rel=1e-9, abs=0.0
    )


def test_several_clouds_have_a_panel_for_each_axis(run_of):
    labels = [axes.get_ylabel() for axes in drawn(run_of("beam")).axes]
    assert ["rms size x (mm)", "rms size y (mm)", "rms size z (mm)"] == labels[:3]
    assert ["temperature x (kK)", "temperature y (kK)", "temperature z (kK)"] == labels[3:6]
    assert ["charges left"] == labels[6:]


def test_a_size_that_grows_a_thousand_times_has_a_logarithmic_axis(run_of):
    assert "log" == drawn(run_of("exploding")).axes[0].get_yscale()
    assert "linear" == drawn(run_of("trap")).axes[0].get_yscale()


def test_the_axis_says_how_far_apart_records_are(run_of):
    assert "time (µs), a record every 5 µs" == drawn(run_of("trap")).axes[2].get_xlabel()


def test_single_charges_that_are_lost_show_only_their_number(tmp_path):
    one = charges(1)
    records = [(0.0, one), (1e-6, one), (2e-6, NONE)]
    axes = drawn(pictured_run(tmp_path / "run", records, outcome=ALL_LOST)).axes
    assert ["charges left"] == [each.get_ylabel() for each in axes]


def test_single_charges_that_stay_show_nothing(run_of):
    assert drawn(run_of("one")) is None


def test_one_record_alone_shows_nothing(tmp_path):
    assert drawn(pictured_run(tmp_path / "run", [(0.0, charges(9))])) is None
