"""What every picture of every kind of run keeps, and how pictures get into a run's folder."""

from __future__ import annotations

import matplotlib
import numpy as np
import pytest
from matplotlib.text import Text
from pictured_run import NONE, charges, pictured_run

from driftwell.errors import RecordError
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.run_pictures import PICTURES, draw, figures

ALWAYS = {"cloud", "trajectories", "ledger"}
MADE = {
    "trap": ALWAYS | {"sizes", "phase-space"},
    "beam": ALWAYS | {"sizes", "phase-space", "envelope", "losses", "arrivals"},
    "two": ALWAYS,
    "line": ALWAYS | {"sizes"},
    "one": ALWAYS,
    "all lost": ALWAYS | {"sizes", "phase-space", "losses"},
    "stopped": ALWAYS | {"sizes", "phase-space"},
    "exploding": ALWAYS | {"sizes", "phase-space"},
    "odd": ALWAYS | {"sizes", "phase-space", "losses", "arrivals"},
    "many": ALWAYS | {"sizes", "phase-space"},
    "channel": ALWAYS | {"sizes", "phase-space", "envelope"},
    "traced": ALWAYS | {"sizes", "phase-space", "spectrum"},
}
WITHOUT_UNIT = ("charges left", "residual, relative", "part of all charges (%)")
EACH = [(kind, name) for kind, names in MADE.items() for name in sorted(names)]


@pytest.fixture(scope="module")
def drawn(run_of):
    """The figures of a kind of run, laid out as they are in the file."""
    made = {}

    def of(kind):
        if kind not in made:
            made[kind] = figures(run_of(kind))
            with style():
                for figure in made[kind].values():
                    figure.draw_without_rendering()
        return made[kind]

    return of


@pytest.mark.parametrize("kind", MADE)
def test_a_run_has_the_pictures_that_show_something(drawn, kind):
    assert MADE[kind] == set(drawn(kind))


@pytest.mark.parametrize(("kind", "name"), EACH)
def test_no_panel_is_empty(drawn, kind, name):
    for axes in drawn(kind)[name].axes:
        shown = [*axes.lines, *axes.patches, *axes.collections]
        assert any(_points(each).size for each in shown)


@pytest.mark.parametrize(("kind", "name"), EACH)
def test_all_that_is_drawn_lies_within_the_limits(drawn, kind, name):
    for axes in drawn(kind)[name].axes:
        (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
        assert left < right
        assert bottom < top
        for line in axes.lines:
            x, y = line.get_data()
            seen = np.isfinite(x) & np.isfinite(y)
            near = 1e-9 * (right - left), 1e-9 * (top - bottom)
            assert np.all((x[seen] >= left - near[0]) & (x[seen] <= right + near[0]))
            assert np.all((y[seen] >= bottom - near[1]) & (y[seen] <= top + near[1]))


@pytest.mark.parametrize(("kind", "name"), EACH)
def test_every_axis_is_labelled_with_its_unit(drawn, kind, name):
    for axes in drawn(kind)[name].axes:
        below = axes.get_xlabel()
        if axes.xaxis.get_tick_params()["labelbottom"]:
            assert "(" in below
            assert ")" in below
        beside = axes.get_ylabel()
        assert "(" in beside or " per " in beside or beside in WITHOUT_UNIT, beside


@pytest.mark.parametrize(("kind", "name"), EACH)
def test_no_text_is_read_as_mathematics(drawn, kind, name):
    for text in drawn(kind)[name].findobj(Text):
        assert not text.get_parse_math()
        assert not text.get_usetex()


@pytest.mark.parametrize(("kind", "name"), EACH)
def test_all_texts_are_on_the_paper(drawn, kind, name):
    figure = drawn(kind)[name]
    paper = figure.bbox
    for text in _texts(figure):
        box = text.get_window_extent()
        assert paper.x0 <= box.x0, text
        assert paper.x1 >= box.x1, text
        assert paper.y0 <= box.y0, text
        assert paper.y1 >= box.y1, text


@pytest.mark.parametrize(("kind", "name"), EACH)
def test_no_two_texts_lie_on_each_other(drawn, kind, name):
    figure = drawn(kind)[name]
    boxes = [(text, text.get_window_extent()) for text in _texts(figure)]
    for k, (text, box) in enumerate(boxes):
        for other, second in boxes[k + 1 :]:
            shared = min(box.x1, second.x1) - max(box.x0, second.x0)
            above = min(box.y1, second.y1) - max(box.y0, second.y0)
            assert min(shared, above) <= 1.0, (text, other)


@pytest.mark.parametrize("kind", MADE)
def test_the_title_of_the_run_stands_above_every_picture(drawn, run_of, kind):
    for figure in drawn(kind).values():
        title = " ".join(figure.texts[0].get_text().split("\n"))
        asked = run_of(kind).header.title
        shown = [letter if ord(letter) < 0x3000 else "□" for letter in asked]
        assert "".join(shown).startswith(title.removesuffix("…").strip())
        assert len(title) >= min(len(asked), 100)


def test_the_pictures_are_files_in_the_folder_of_the_run(tmp_path):
    start = charges(20)
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)])
    files = draw(run)
    assert [name for name in PICTURES if name in MADE["trap"]] == [each.stem for each in files]
    assert sorted(files) == sorted((tmp_path / "run" / "pictures").iterdir())
    for file in files:
        assert b"\x89PNG\r\n\x1a\n" == file.read_bytes()[:8]


def test_drawing_again_gives_the_same_files_and_takes_away_what_shows_nothing_now(tmp_path):
    start = charges(20)
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)])
    first = {file.name: file.read_bytes() for file in draw(run)}
    folder = tmp_path / "run" / "pictures"
    (folder / "losses.png").write_bytes(b"old")
    (folder / "cloud.png").write_bytes(b"old")
    (folder / "mine.png").write_bytes(b"mine")
    draw(run)
    assert first | {"mine.png": b"mine"} == {f.name: f.read_bytes() for f in folder.iterdir()}


def test_a_run_without_charges_or_records_has_no_pictures(tmp_path):
    run = pictured_run(tmp_path / "run", [(0.0, NONE)])
    assert [] == draw(run)


def test_a_run_that_goes_on_is_drawn_as_far_as_it_got(tmp_path):
    start = charges(20)
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)], outcome=None)
    assert MADE["trap"] == {file.stem for file in draw(run)}


def test_a_folder_that_cannot_be_made_is_said_in_words(tmp_path):
    start = charges(20)
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)])
    (tmp_path / "run" / "pictures").write_text("in the way")
    with pytest.raises(RecordError, match=r"pictures: the pictures cannot be written \(.*record"):
        draw(run)


def test_settings_of_the_machine_change_nothing_and_are_left_as_they_were(tmp_path):
    start = charges(20)
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)])
    usual = [file.read_bytes() for file in draw(run)]
    with matplotlib.rc_context({"text.usetex": True, "axes.facecolor": "red", "font.size": 30}):
        before = dict(matplotlib.rcParams)
        assert usual == [file.read_bytes() for file in draw(run)]
        assert before == dict(matplotlib.rcParams)


def _points(artist):
    if hasattr(artist, "get_data"):
        data = artist.get_data()
        values = np.asarray(data[0] if isinstance(data, tuple) else data.values, dtype=float)
        return values[np.isfinite(values)]
    return np.asarray(artist.get_path().vertices)


def _texts(figure):
    """Every text that is drawn: none of those that stand outside a panel's axis."""
    found = [*figure.texts]
    for legend in figure.legends:
        found += legend.get_texts()
    for axes in figure.axes:
        found += [axes.xaxis.label, axes.yaxis.label, axes.title, axes._left_title]
        found += axes.texts
        if axes.get_legend():
            found += axes.get_legend().get_texts()
        for axis, limits in ((axes.xaxis, axes.get_xlim()), (axes.yaxis, axes.get_ylim())):
            for tick in axis.get_major_ticks():
                if limits[0] <= tick.get_loc() <= limits[1]:
                    found.append(tick.label1)
    return [text for text in found if text.get_visible() and text.get_text().strip()]
