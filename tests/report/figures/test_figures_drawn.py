"""Every kind of figure, drawn of small runs; their labels, numbers, files and refusals."""

from __future__ import annotations

import re
from io import BytesIO
from xml.etree import ElementTree

import numpy as np
import pytest
from pictured_run import charges, lost, passed, pictured_run
from PIL import Image

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.report.figures.drawing import figure, offers
from driftwell.report.figures.image_file import format_of, image, write_image
from driftwell.report.figures.kinds.arrivals import mean_and_rms
from driftwell.report.figures.kinds.losses import azimuth
from driftwell.report.figures.options import FigureError, FigureOptions, snapshot_time, stretch
from driftwell.report.figures.table import FIGURE_KINDS

REFUSED: dict[str, set[str]] = {
    "beam": set(),
    "line": {"phase-space"},
    "one": set(),
    "odd": set(),
    "all lost": set(),
    "traced": set(),
}
"""Runs, and what they are refused at the start though another time may have it."""


def drawn(run, what, **options):
    return figure(run, what, FigureOptions(**options))


@pytest.mark.parametrize("kind", REFUSED)
def test_what_a_run_offers_can_be_drawn_and_the_rest_says_why_not(run_of, kind):
    run, refused = run_of(kind), set[str]()
    for offer in offers(run):
        at = "start" if "at" in offer.takes else None
        if offer.missing:
            with pytest.raises(FigureError, match=re.escape(offer.missing)):
                drawn(run, offer.name, at=at)
            continue
        try:
            made = drawn(run, offer.name, at=at)
        except FigureError:
            refused.add(offer.name)
            continue
        assert image(made, "png", run, offer.name).startswith(b"\x89PNG")
    assert REFUSED[kind] == refused


def test_all_kinds_are_listed_and_a_beam_has_those_of_beams(run_of):
    assert list(FIGURE_KINDS) == [offer.name for offer in offers(run_of("trap"))]
    able = {offer.name for offer in offers(run_of("beam")) if not offer.missing}
    assert {"projections", "phase-space", "arrivals", "losses", "sizes", "conservation"} <= able


def test_a_figure_is_a_column_wide_unless_a_width_is_asked_for(run_of):
    run = run_of("trap")
    for width, inches in ((None, 85.0 / 25.4), ("page", 175.0 / 25.4), ("120 mm", 120.0 / 25.4)):
        made = drawn(run, "sizes", width=width)
        assert inches == pytest.approx(made.get_size_inches()[0], rel=1e-9, abs=0.0)
    assert 2.0 == pytest.approx(
        drawn(run, "sizes", height="50.8 mm").get_size_inches()[1], rel=1e-9, abs=0.0
    )


def test_axes_have_names_and_units_and_there_is_no_title_until_it_is_asked_for(run_of):
    run = run_of("trap")
    panel = drawn(run, "sizes").axes[0]
    assert ("time (µs)", "rms size (µm)") == (panel.get_xlabel(), panel.get_ylabel())
    assert ("", "") == (panel.get_title(), drawn(run, "sizes").get_suptitle())
    assert run.header.title == drawn(run, "sizes", title=True).get_suptitle()


def test_letters_are_legible_in_print(run_of):
    for text in drawn(run_of("beam"), "phase-space").findobj(
        lambda each: hasattr(each, "get_fontsize") and each.get_text()
    ):
        assert 6.0 <= text.get_fontsize()


def test_the_emittance_of_a_beam_is_that_of_its_slopes(tmp_path):
    start = charges(900, (2e-3, 1e-3, 5e-3), (2e3, 1e3, 300.0), drift=(0.0, 0.0, 2e6))
    run = pictured_run(tmp_path / "run", [(0.0, start), (1e-9, start)])
    made = drawn(run, "phase-space", axis="x", at="start")
    slope = start.velocity[:, 0] / start.velocity[:, 2]
    emittance = np.sqrt(np.linalg.det(np.cov(start.position[:, 0], slope, bias=True)))
    (text,) = made.axes[0].get_legend().get_texts()
    assert f"ε = {emittance * 1e6:.3g} µm rad" == text.get_text()


def test_svg_keeps_its_text_and_pdf_its_letters(run_of):
    run = run_of("trap")
    made = drawn(run, "sizes")
    root = ElementTree.fromstring(image(made, "svg", run, "sizes"))
    said = ["".join(each.itertext()).strip() for each in root.iter() if each.tag.endswith("}text")]
    assert {"time (µs)", "rms size (µm)"} <= set(said)
    assert b"/CIDFontType2" in image(made, "pdf", run, "sizes")


def test_many_dots_are_an_image_within_the_drawing(run_of):
    few, many = (
        image(drawn(run_of(kind), "projections", plane="zx"), "svg", run_of(kind), "projections")
        for kind in ("stopped", "many")
    )
    assert b"<image" not in few
    assert b"<image" in many
    assert len(many) < 400_000


@pytest.mark.parametrize("form", ["png", "svg", "pdf"])
def test_a_file_is_the_same_each_time_and_says_where_it_is_from(run_of, form):
    run = run_of("trap")
    one, other = (image(drawn(run, "sizes"), form, run, "sizes") for _ in range(2))
    assert one == other
    said = f"sizes of a run by driftwell {run.header.driftwell_version}; seed 7"
    if form == "png":
        assert said == Image.open(BytesIO(one)).info["Description"]
    else:
        assert said in one.decode("latin-1")


def test_the_command_in_a_file_has_no_folders_in_it(run_of):
    from driftwell.report.figures.image_file import _command

    assert "driftwell run trap.toml --set a=1" == _command(
        "driftwell run /home/someone/trap.toml --set a=1"
    )


def test_the_format_follows_the_ending_or_the_wish(tmp_path):
    assert "svg" == format_of(tmp_path / "a.SVG")
    assert "png" == format_of(tmp_path / "a.svg", "png")
    with pytest.raises(FigureError, match='"png", "svg", "pdf"'):
        format_of(tmp_path / "a.jpg")


def test_a_file_is_whole_or_not_there(tmp_path):
    write_image(tmp_path / "new" / "a.png", b"whole")
    assert ["a.png"] == [each.name for each in (tmp_path / "new").iterdir()]


def test_mean_and_rms_of_arrivals_count_weights():
    times, weight = np.array([1.0, 2.0, 4.0]), np.array([1.0, 1.0, 2.0])
    assert (2.75, pytest.approx(np.std([1.0, 2.0, 4.0, 4.0]), rel=1e-12, abs=0.0)) == (
        mean_and_rms(times, weight)
    )


def test_arrivals_say_mean_and_rms_and_count_all_passages(tmp_path):
    start = charges(40)
    times = 1e-6 + 1e-8 * np.random.default_rng(4).normal(size=500)
    seen = passed(times, np.zeros((500, 3)))
    seen["weight"] = 4.0
    run = pictured_run(tmp_path / "run", [(0.0, start), (2e-6, start)], crossings=seen)
    panel = drawn(run, "arrivals", detector="exit").axes[0]
    (note,) = [text.get_text() for text in panel.texts]
    assert f"rms {times.std() * 1e9:.3g} ns" == note.split("\n")[1]
    power = 1e3 if "10³" in panel.get_ylabel() else 1.0
    heights = panel.patches[0].get_data().values * power
    assert 2000.0 == pytest.approx(heights.sum(), rel=1e-9, abs=0.0)


def test_azimuth_turns_from_x_to_y_about_z_and_cyclically_about_the_others():
    places = np.array([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]])
    assert [0.0, 90.0] == azimuth(places, 2)[:2].tolist()
    assert [0.0, 90.0] == azimuth(places, 0)[1:].tolist()
    assert [90.0, 0.0] == azimuth(places, 1)[[0, 2]].tolist()


def test_the_loss_map_shows_places_angles_and_energies(tmp_path):
    start = charges(40)
    angle = np.linspace(-3.0, 3.0, 30)
    places = np.stack([np.cos(angle), np.sin(angle), 10.0 * angle], axis=1) * 1e-3
    gone = lost(np.full(30, 1e-6), places)
    gone["kinetic_energy"] = 5.0 * ELEMENTARY_CHARGE
    run = pictured_run(tmp_path / "run", [(0.0, start), (2e-6, start)], losses=gone)
    made = drawn(run, "losses")
    across, up = made.axes[0].lines[0].get_data()
    assert 10.0 * angle == pytest.approx(across, rel=1e-9, abs=0.0)
    assert np.degrees(angle) == pytest.approx(up, rel=1e-9, abs=0.0)
    assert "kinetic energy (eV)" == made.axes[1].get_xlabel()


def test_losses_in_a_plane_across_the_axis_are_shown_in_that_plane(run_of):
    panel = drawn(run_of("all lost"), "losses").axes[0]
    assert ("x", "y") == (panel.get_xlabel()[0], panel.get_ylabel()[0])


def test_names_of_clouds_are_written_as_they_are(run_of):
    (legend,) = drawn(run_of("odd"), "projections", at="start").legends
    labels = [text.get_text() for text in legend.get_texts()]
    assert r"$\alpha$" in labels[0]
    assert labels[1].startswith("_under_{score}")


@pytest.mark.parametrize(
    ("what", "options", "said"),
    [
        ("size", {}, 'did you mean "sizes"'),
        ("projections", {"of": ("laod",)}, 'did you mean "load"'),
        ("projections", {"at": "31 us"}, r"the nearest is at 0 s, and there are 2"),
        ("projections", {"at": "31"}, "needs a time such as"),
        ("projections", {"plane": "zz"}, '"zx", "zy", "xy"'),
        ("projections", {"plane": "zx", "across": "2 mm..1 mm"}, "the lower value first"),
        ("projections", {"plane": "zx", "up": "2 mm"}, "needs two values"),
        ("sizes", {"axis": "q"}, '"x", "y", "z"'),
        ("sizes", {"at": "end"}, "means nothing to the figure"),
        ("sizes", {"width": "2 m"}, "no size for a figure"),
        ("arrivals", {}, "no charge passed a detector"),
        ("field", {}, "has faults to find in the scenario"),
    ],
)
def test_what_is_not_there_is_refused_with_what_there_is(run_of, what, options, said):
    with pytest.raises(FigureError, match=re.escape(said) if "\\" not in said else said):
        drawn(run_of("trap"), what, **options)


def test_a_stretch_takes_units_and_numbers():
    assert (-2e-3, pytest.approx(1e-3, rel=1e-12, abs=0.0)) == stretch("-2 mm..1 mm", "m", "up")
    assert (1.0, 2.0) == stretch((1.0, 2.0), "m", "up")
    assert stretch(None, "m", "up") is None


def test_snapshots_are_found_by_word_text_and_number(run_of):
    run = run_of("trap")
    assert [0.0, 200e-6, 200e-6, 200e-6] == pytest.approx(
        [snapshot_time(run, at) for at in ("start", "end", "200 us", None)], rel=1e-9, abs=1e-15
    )
