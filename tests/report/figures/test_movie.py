"""The movie: where charges are in each frame, what is drawn of them, and the file."""

from __future__ import annotations

import json
import shutil
import subprocess

import numpy as np
import pytest
from pictured_run import Charges, lost, pictured_run
from PIL import Image

from driftwell.report.figures.options import FigureError
from driftwell.report.movie import encoder
from driftwell.report.movie.course import courses_of
from driftwell.report.movie.encoder import form_of
from driftwell.report.movie.making import make_movie
from driftwell.report.movie.options import MovieOptions
from driftwell.report.pictures.scene import scene_of

SMALL = MovieOptions(seconds=0.4, rate=10.0, planes="zx", height=161)


def flying(folder, cell=("", 0.0)):
    """Two charges that fly along z at 1 km/s; the second is lost at 1.5 us."""
    records = []
    for k in range(4):
        place = np.array([[0.0, 0.0, 1e-3 * k], [1e-3, 0.0, 1e-3 * k]])
        alive = np.array([0, 1]) if k < 2 else np.array([0])
        speed = np.tile([0.0, 0.0, 1e3], (2, 1))
        records.append(
            (k * 1e-6, Charges(place[alive], speed[alive], np.zeros(alive.size, int), alive))
        )
    gone = lost(np.array([1.5e-6]), np.array([[1e-3, 0.0, 1.5e-3]]), charge=np.array([1]))
    return pictured_run(folder, records, losses=gone, cell=cell)


def test_a_charge_goes_straight_on_between_records_and_to_where_it_was_lost(tmp_path):
    courses = courses_of(scene_of(flying(tmp_path / "run")), 10)
    for time in (0.0, 0.25e-6, 1.4e-6, 2.9e-6, 3e-6):
        assert 1e3 * time == pytest.approx(courses.at(time)[0, 2], rel=1e-9, abs=1e-15)
    assert 1.4e-3 == pytest.approx(courses.at(1.4e-6)[1, 2], rel=1e-9, abs=0.0)
    assert np.isnan(courses.at(1.5e-6)[1]).all()
    assert np.isnan(courses.at(2.5e-6)[1]).all()


def test_a_charge_that_leaves_a_periodic_cell_does_not_cross_it_backwards(tmp_path):
    records = [
        (0.0, Charges(np.array([[0.0, 0.0, 0.9e-3]]), np.zeros((1, 3)))),
        (1e-6, Charges(np.array([[0.0, 0.0, -0.9e-3]]), np.zeros((1, 3)))),
    ]
    run = pictured_run(tmp_path / "run", records, cell=("z", 2e-3))
    assert 1e-3 == pytest.approx(courses_of(scene_of(run), 10).at(0.5e-6)[0, 2], rel=1e-9, abs=0.0)


def test_charges_are_thinned_to_so_many(run_of):
    assert courses_of(scene_of(run_of("trap")), 100).cloud.size <= 100


def test_a_gif_has_its_frames_and_its_time(tmp_path):
    told = []
    made = make_movie(
        flying(tmp_path / "run"), tmp_path / "a.gif", SMALL, lambda *each: told.append(each)
    )
    with Image.open(made) as movie:
        assert 4 == movie.n_frames
        assert 100 == movie.info["duration"]
        assert (0, 160) == (movie.size[0] % 2, movie.size[1])
        first = np.asarray(movie.convert("RGB")).copy()
        movie.seek(3)
        assert np.any(first != np.asarray(movie.convert("RGB")))
    assert [(1, 4), (2, 4), (3, 4), (4, 4)] == told


def test_the_same_movie_is_made_again(tmp_path):
    run = flying(tmp_path / "run")
    one, other = (make_movie(run, tmp_path / f"{k}.gif", SMALL).read_bytes() for k in range(2))
    assert one == other


@pytest.mark.skipif(shutil.which("ffprobe") is None, reason="needs ffmpeg")
def test_an_mp4_plays_everywhere(tmp_path):
    made = make_movie(flying(tmp_path / "run"), tmp_path / "a.mp4", SMALL)
    asked = ["ffprobe", "-v", "error", "-show_streams", "-of", "json", str(made)]
    (stream,) = json.loads(subprocess.run(asked, capture_output=True, check=True).stdout)["streams"]
    assert ("h264", "yuv420p", "4", 160) == (
        stream["codec_name"],
        stream["pix_fmt"],
        stream["nb_frames"],
        stream["height"],
    )


def test_one_that_is_interrupted_leaves_no_file(tmp_path):
    def stop(done, _):
        if done == 2:
            raise KeyboardInterrupt

    for name in ("a.gif", "a.mp4") if shutil.which("ffmpeg") else ("a.gif",):
        with pytest.raises(KeyboardInterrupt):
            make_movie(flying(tmp_path / f"run-{name}"), tmp_path / name, SMALL, stop)
        assert [] == list(tmp_path.glob("a.*"))


def test_without_the_encoder_it_is_said_what_to_install_or_to_write(tmp_path, monkeypatch):
    monkeypatch.setattr(encoder.shutil, "which", lambda _: None)
    with pytest.raises(FigureError, match=r"apt install ffmpeg.*or write a GIF: -o .*a\.gif"):
        form_of(tmp_path / "a.mp4")
    assert "gif" == form_of(tmp_path / "a.gif")


def test_an_ending_that_is_no_movie_and_choices_without_sense_are_refused(tmp_path):
    with pytest.raises(FigureError, match=r"\.mp4 or a \.gif"):
        form_of(tmp_path / "a.avi")
    for wrong in (MovieOptions(seconds=0.0), MovieOptions(rate=1e3), MovieOptions(height=3)):
        with pytest.raises(FigureError, match="needs"):
            wrong.check()


def test_a_run_without_ways_says_so(tmp_path):
    run = pictured_run(tmp_path / "run", [(0.0, Charges(np.zeros((1, 3)), np.zeros((1, 3))))])
    with pytest.raises(FigureError, match="recorded no ways"):
        courses_of(scene_of(run), 10)
