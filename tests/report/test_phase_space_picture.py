"""The picture of phase space, and its ellipses."""

from __future__ import annotations

import math

import numpy as np
import pytest
from pictured_run import Charges, charges, pictured_run

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.phase_space import flight_axis, phase_space_picture, rms_ellipse
from driftwell.report.pictures.scene import scene_of


def drawn(run):
    with style():
        return phase_space_picture(scene_of(run))


def area(line):
    """Area within a closed line, by the shoelace formula (common practice, no source)."""
    x, y = line
    return 0.5 * abs(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1]))


def test_a_cloud_at_rest_is_shown_with_velocities(run_of):
    figure = drawn(run_of("trap"))
    labels = [(axes.get_xlabel(), axes.get_ylabel()) for axes in figure.axes[:3]]
    assert [("x (µm)", "ux (m/s)"), ("y (µm)", "uy (m/s)"), ("z (mm)", "uz (m/s)")] == labels


def test_a_beam_is_shown_with_slopes_across_its_flight(run_of):
    figure = drawn(run_of("beam"))
    labels = [axes.get_ylabel() for axes in figure.axes[:3]]
    assert ["x′ (mrad)", "y′ (mrad)", "uz − 2 Mm/s (km/s)"] == labels
    key = [text.get_text() for text in figure.legends[0].get_texts()]
    assert ["rms ellipse", "x′: slope ux / uz", "u: proper velocity"] == key[2:]


def test_slopes_are_velocities_over_that_of_the_flight(tmp_path):
    flying = charges(40, speed=(2e3, 1e3, 300.0), drift=(0.0, 0.0, 2e6))
    run = pictured_run(tmp_path / "run", [(0.0, flying), (1e-9, flying)])
    shown = drawn(run).axes[0].lines[0].get_ydata()
    np.testing.assert_allclose(1e3 * flying.velocity[:, 0] / flying.velocity[:, 2], shown)


@pytest.mark.parametrize("axis", [0, 1, 2])
def test_the_axis_of_flight_is_found_in_either_direction(tmp_path, axis):
    for way in (1.0, -1.0):
        drift = way * 1e5 * np.eye(3)[axis]
        run = pictured_run(tmp_path / f"run{way}", [(0.0, charges(50, drift=drift))])
        assert axis == flight_axis(run.snapshot(0.0))


def test_clouds_that_fly_apart_have_no_axis_of_flight(tmp_path):
    one, other = charges(50, drift=(0.0, 0.0, 1e5)), charges(50, drift=(1e5, 0.0, 0.0))
    both = Charges(
        np.concatenate([one.position, other.position]),
        np.concatenate([one.velocity, other.velocity]),
        np.repeat([0, 1], 50),
    )
    run = pictured_run(tmp_path / "run", [(0.0, both)])
    assert flight_axis(run.snapshot(0.0)) is None


def test_the_ellipse_has_pi_times_the_emittance_as_its_area():
    draw = np.random.default_rng(5)
    x = draw.normal(size=4000) * 3.0
    y = 0.7 * x + draw.normal(size=4000) * 0.2 + 11.0
    line, product = rms_ellipse(x, y)
    emittance = math.sqrt(np.linalg.det(np.cov(x, y, bias=True)))
    assert emittance == pytest.approx(product, rel=1e-9, abs=0.0)
    # 180 chords of an ellipse leave out 2e-4 of its area
    assert math.pi * emittance == pytest.approx(area(line), rel=3e-4, abs=0.0)


def test_the_ellipse_reaches_as_far_as_one_standard_deviation():
    draw = np.random.default_rng(6)
    x, y = draw.normal(size=(2, 500))
    line, _ = rms_ellipse(x, y + 0.5 * x)
    assert x.std() == pytest.approx(line[0].max() - x.mean(), rel=1e-3, abs=0.0)
    assert (y + 0.5 * x).std() == pytest.approx(
        line[1].max() - (y + 0.5 * x).mean(), rel=1e-3, abs=0.0
    )


def test_charges_on_a_line_or_too_few_have_no_ellipse():
    assert rms_ellipse(np.zeros(20), np.arange(20.0)) is None
    assert rms_ellipse(np.arange(3.0), np.arange(3.0) ** 2) is None


def test_the_emittance_is_said(tmp_path):
    start = charges(500, (2e-3, 2e-3, 2e-3), (300.0, 300.0, 300.0))
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-12, start)])
    x, u = start.position[:, 0], start.velocity[:, 0]
    emittance = math.sqrt(np.linalg.det(np.cov(1e3 * x, u, bias=True))) / 1e3 / SPEED_OF_LIGHT
    title = drawn(run).axes[0].get_title(loc="left")
    assert f"norm. rms emittance {emittance * 1e9:.3g} nm rad" == title.split("\n")[1]


def test_what_is_at_rest_or_has_few_charges_shows_nothing(run_of, tmp_path):
    assert drawn(run_of("line")) is None
    few = charges(7)
    assert drawn(pictured_run(tmp_path / "run", [(0.0, few), (1e-6, few)])) is None
