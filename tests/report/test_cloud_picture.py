"""The picture of the charges at start and end, and the names beside few of them."""

from __future__ import annotations

import numpy as np
import pytest
from pictured_run import ALL_LOST, NONE, STOPPED, Charges, charges, pictured_run

from driftwell.report.paper.names import put_names
from driftwell.report.paper.projection import MOST_DOTS, common_size, frame, plane_limits
from driftwell.report.paper.sheet import sheet, style
from driftwell.report.pictures.cloud import cloud_picture
from driftwell.report.pictures.scene import scene_of


def drawn(run):
    with style():
        return cloud_picture(scene_of(run))


def dots(axes):
    return np.concatenate([np.stack(line.get_data()) for line in axes.lines], axis=1)


def test_start_and_end_are_seen_from_the_side_and_along_z(run_of):
    run = run_of("trap")
    side, front = drawn(run).axes[2:]
    end = run.snapshot(run.end_time).position
    assert ["z (mm)", "x (mm)"] == [side.get_xlabel(), side.get_ylabel()]
    assert ["x (mm)", "y (mm)"] == [front.get_xlabel(), front.get_ylabel()]
    np.testing.assert_allclose(1e3 * end[:, [2, 0]].T, dots(side))
    np.testing.assert_allclose(1e3 * end[:, [0, 1]].T, dots(front))
    assert "end: t = 200 µs, 300 charges" == side.get_title(loc="left")


def test_a_cloud_that_stays_as_large_has_the_same_limits_at_start_and_end(run_of):
    axes = drawn(run_of("trap")).axes
    assert axes[0].get_xlim() == axes[2].get_xlim()
    assert axes[1].get_ylim() == axes[3].get_ylim()


def test_a_cloud_that_grows_much_has_its_own_limits(run_of):
    axes = drawn(run_of("exploding")).axes
    assert ["z (µm)", "z (mm)"] == [axes[0].get_xlabel(), axes[2].get_xlabel()]


def test_shapes_are_true_where_both_axes_are_to_one_scale(run_of):
    for axes, ratio in zip(drawn(run_of("trap")).axes, (2.0, 1.0, 2.0, 1.0), strict=True):
        assert ratio == pytest.approx(np.diff(axes.get_xlim()) / np.diff(axes.get_ylim()))
        assert 1.0 / ratio == axes.get_box_aspect()


def test_a_needle_is_not_to_scale_and_says_so(tmp_path):
    needle = charges(50, (1e-6, 1e-6, 1e-3))
    run = pictured_run(tmp_path / "run", [(0.0, needle), (1e-6, needle)])
    side, front, *_ = drawn(run).axes
    assert "z (mm), not to scale" == side.get_xlabel()
    assert "x (µm)" == front.get_xlabel()


def test_nothing_left_at_the_end_leaves_the_start_alone(tmp_path):
    records = [(0.0, charges(9)), (1e-6, NONE)]
    run = pictured_run(tmp_path / "run", records, outcome=ALL_LOST)
    titles = [axes.get_title(loc="left") for axes in drawn(run).axes]
    assert ["start: t = 0 s, 9 charges", ""] == titles


def test_a_stopped_run_shows_the_charges_it_was_sealed_with(run_of):
    run = run_of("stopped")
    scene = scene_of(run)
    assert [0.0] == run.snapshots
    assert 2e-6 == scene.end.time
    np.testing.assert_array_equal(2.0 * scene.start.position, scene.end.position)


def test_charges_whose_place_is_no_number_are_left_out(tmp_path):
    broken = charges(9)
    broken.position[3] = np.nan
    records = [(0.0, charges(9)), (1e-6, broken)]
    scene = scene_of(pictured_run(tmp_path / "run", records, outcome=STOPPED))
    assert [0, 1, 2, 4, 5, 6, 7, 8] == scene.end.id.tolist()


def test_many_charges_are_thinned_evenly_and_the_limits_hold_them_all(run_of):
    run = run_of("many")
    side = drawn(run).axes[0]
    assert MOST_DOTS == dots(side).shape[1]
    assert "100000 charges, thinned to one in 5" in side.get_title(loc="left")
    z = 1e3 * run.snapshot(0.0).position[:, 2]
    low, high = side.get_xlim()
    assert low <= z.min()
    assert high >= z.max()


def test_few_charges_have_names_and_more_than_fifty_have_none(tmp_path):
    for count, named in ((5, True), (50, True), (51, False)):
        start = charges(count, (1e-3, 1e-3, 1e-3))
        run = pictured_run(tmp_path / str(count), [(0.0, start), (1e-6, start)])
        assert named == any(axes.texts for axes in drawn(run).axes)


def test_charges_behind_one_another_share_a_name(run_of):
    side, front, *_ = drawn(run_of("line")).axes
    assert [str(k) for k in range(10)] == [text.get_text() for text in side.texts]
    assert ["0 … 9 (10)"] == [text.get_text() for text in front.texts]


def test_a_name_stays_inside_its_panel_and_is_left_out_where_there_is_no_room(run_of):
    corners = np.array([0.0, 1.0, 0.0, 1.0]), np.array([0.0, 0.0, 1.0, 1.0])
    crowd = np.full(30, 0.5) + 0.02 * np.arange(30), np.full(30, 0.5)
    with style():
        figure = sheet(run_of("one"), 5.0, 5.0)
        for places, most in ((corners, 4), (crowd, 29)):
            axes = figure.add_subplot()
            axes.set(xlim=(0.0, 1.1), ylim=(0.0, 1.1))
            put_names(axes, np.arange(len(places[0])), *places, 1.0)
            figure.draw_without_rendering()
            room = axes.get_window_extent()
            boxes = [text.get_window_extent() for text in axes.texts]
            assert 4 <= len(boxes) <= most
            assert all(room.x0 <= box.x0 and box.x1 <= room.x1 for box in boxes)
            axes.remove()


def test_names_in_a_crowd_are_not_on_each_other(tmp_path):
    crowd = charges(48, (1e-3, 1e-3, 1e-3), seed=3)
    figure = drawn(pictured_run(tmp_path / "run", [(0.0, crowd), (1e-6, crowd)]))
    with style():
        figure.draw_without_rendering()
    for axes in figure.axes:
        boxes = [text.get_window_extent() for text in axes.texts]
        assert 15 < len(boxes) < 48
        for k, box in enumerate(boxes):
            assert not any(box.overlaps(other) for other in boxes[k + 1 :])


def test_a_plane_without_width_takes_that_of_its_other_side():
    nothing, wide = np.zeros(3), np.array([-1.0, 0.0, 1.0])
    across, up = plane_limits(nothing, wide, 5.0)
    assert (-1.0, 1.0) == across
    assert (-2.5, 2.5) == plane_limits(nothing, nothing, 5.0)[0]
    assert frame(across, up, 1.0).true


def test_lengths_too_different_have_no_common_unit():
    assert 1e-3 == common_size([(-3e-3, 3e-3), (-4e-4, 4e-4)])
    assert common_size([(-3e-3, 3e-3), (-4e-6, 4e-6)]) is None


def test_colours_follow_the_clouds(tmp_path):
    start = Charges(charges(60).position, charges(60).velocity, np.arange(60) % 2)
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)])
    figure = drawn(run)
    assert 2 == len({line.get_color() for line in figure.axes[0].lines})
    labels = [text.get_text() for text in figure.legends[0].get_texts()]
    assert ["load: 30 calcium", "other: 30 calcium"] == labels
