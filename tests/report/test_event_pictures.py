"""The pictures of losses and of passages through detectors."""

from __future__ import annotations

import numpy as np
import pytest
from pictured_run import charges, lost, passed, pictured_run

from driftwell.report.paper.sheet import style
from driftwell.report.pictures.arrivals import MOST_DETECTORS, across_axes, arrivals_picture
from driftwell.report.pictures.losses import losses_picture
from driftwell.report.pictures.scene import scene_of


def losses(run):
    with style():
        return losses_picture(scene_of(run))


def arrivals(run):
    with style():
        return arrivals_picture(scene_of(run))


def run_with(folder, end=1e-6, **keys):
    start = charges(100)
    return pictured_run(folder, [(0.0, start), (end, start)], **keys)


def counted(axes):
    """Events in a stacked histogram."""
    steps = [patch.get_data() for patch in axes.patches]
    return sum(float(np.sum(step.values - step.baseline)) for step in steps)


def test_losses_are_shown_beside_the_axis_and_along_it(run_of):
    run = run_of("beam")
    side, front = losses(run).axes[:2]
    assert ["z (mm), not to scale", "distance from z axis (mm)"] == [
        side.get_xlabel(),
        side.get_ylabel(),
    ]
    radii = np.concatenate([line.get_ydata() for line in side.lines])
    assert 5.0 == pytest.approx(radii.min())
    assert 5.0 == pytest.approx(radii.max())
    assert 0.0 == side.get_ylim()[0]
    assert ["x (mm)", "y (mm)"] == [front.get_xlabel(), front.get_ylabel()]


def test_every_loss_is_in_the_histogram_and_in_the_key(run_of):
    run = run_of("beam")
    figure = losses(run)
    assert len(run.losses()) == counted(figure.axes[2])
    key = [text.get_text() for text in figure.legends[0].get_texts()]
    assert ["bore: 150 lost", "plate: 150 lost"] == key


def test_losses_on_several_walls_stand_on_one_another(run_of):
    run = run_of("beam")
    lower, upper = (patch.get_data() for patch in losses(run).axes[2].patches)
    np.testing.assert_array_equal(lower.values, upper.baseline)
    assert not np.any(lower.baseline)
    expected, _ = np.histogram(1e9 * run.losses()["time"], upper.edges)
    np.testing.assert_array_equal(expected, upper.values)


def test_the_share_lost_ends_at_the_part_of_all_charges(run_of):
    share = losses(run_of("beam")).axes[3]
    assert [50.0 / 3, 50.0 / 3, 100.0 / 3] == pytest.approx(
        [line.get_ydata()[-1] for line in share.lines]
    )
    assert all(np.all(np.diff(line.get_ydata()) >= 0.0) for line in share.lines)


def test_weights_count_in_the_share(tmp_path):
    rows = lost(np.array([1e-7, 2e-7]), np.full((2, 3), 1e-3))
    rows["weight"] = 50.0
    share = losses(run_with(tmp_path / "run", losses=rows, weight=50.0)).axes[3]
    assert 2.0 == pytest.approx(share.lines[0].get_ydata()[-1])


def test_losses_within_a_moment_are_shown_without_the_rest_of_the_run(tmp_path):
    times = np.linspace(0.5e-6, 0.51e-6, 20)
    rows = lost(times, np.full((20, 3), 1e-3))
    rate = losses(run_with(tmp_path / "run", losses=rows)).axes[2]
    assert "time (ns)" == rate.get_xlabel()
    assert (499.5, 510.5) == pytest.approx(rate.get_xlim())


def test_a_run_without_losses_or_passages_shows_neither(run_of):
    assert losses(run_of("trap")) is None
    assert arrivals(run_of("trap")) is None


def test_every_passage_is_in_the_histogram_of_its_detector(run_of):
    spot, first, _, second = arrivals(run_of("beam")).axes
    assert ["exit", "450 passages, 150 of them against the normal"] == [
        spot.get_title(loc="left"),
        first.get_title(loc="left"),
    ]
    assert 450.0 == counted(first)
    assert 450.0 == counted(second)


def test_narrow_arrivals_are_shown_about_their_middle(run_of):
    assert "time − 450 ns (ns)" == arrivals(run_of("beam")).axes[1].get_xlabel()


@pytest.mark.parametrize("axis", [0, 1, 2])
def test_the_spot_is_seen_across_the_detector(axis):
    places = np.random.default_rng(1).normal(size=(40, 3))
    places[:, axis] = 0.7
    assert tuple(k for k in range(3) if k != axis) == across_axes(passed(np.ones(40), places))


@pytest.mark.parametrize("axis", [0, 1, 2])
def test_a_single_passage_is_seen_along_its_flight(axis):
    rows = passed(np.ones(1), np.ones((1, 3)), axis=axis)
    assert tuple(k for k in range(3) if k != axis) == across_axes(rows)


def test_no_more_detectors_than_fit_are_shown_and_the_busiest_are(tmp_path):
    detector = np.concatenate([np.full(k + 1, k) for k in range(8)])
    rows = passed(np.linspace(0.0, 1e-6, 36), np.random.default_rng(1).normal(size=(36, 3)))
    rows["detector"] = detector
    names = [f"plane {k}" for k in range(8)]
    axes = arrivals(run_with(tmp_path / "run", crossings=rows, detectors=names)).axes
    assert names[-MOST_DETECTORS:] == [each.get_title(loc="left") for each in axes[::2]]
