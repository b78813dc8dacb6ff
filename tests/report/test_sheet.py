"""The paper: title, key, letters, and the colours."""

from __future__ import annotations

import pytest
from matplotlib.colors import to_rgb
from pictured_run import charges, pictured_run

from driftwell.report.paper.palette import COLOURS, LINES, MARKERS, colour, line_style, marker
from driftwell.report.paper.sheet import Entry, printable, sheet, style


@pytest.fixture
def run(tmp_path):
    start = charges(5)
    return pictured_run(tmp_path / "run", [(0.0, start), (1e-6, start)], title="W" * 200)


def test_letters_no_font_has_become_boxes_and_others_stay():
    assert "□□ µm, Größe ±1 □" == printable("一万 µm, Größe ±1 🚀")


def test_text_is_one_line_and_cut_where_it_is_too_long():
    assert "a b c" == printable("a\tb\n c\x07")
    assert "abc…" == printable("abcdefgh", 4)


def test_a_title_without_spaces_is_made_to_fit(run):
    with style():
        figure = sheet(run, 6.0, 4.0)
        assert figure.texts[0].get_window_extent().width <= figure.bbox.width


def test_the_key_shows_every_label_as_it_is(run):
    labels = ["_first", "$x^2$", r"\alpha"]
    with style():
        figure = sheet(run, 6.0, 4.0, [Entry(label, "black", "o") for label in labels])
    assert labels == [text.get_text() for text in figure.legends[0].get_texts()]


def test_a_long_key_says_how_many_are_left_out(run):
    with style():
        figure = sheet(run, 6.0, 4.0, [Entry(f"cloud {k}", colour(k), "o") for k in range(30)])
    texts = [text.get_text() for text in figure.legends[0].get_texts()]
    assert "cloud 13" == texts[13]
    assert ["and 16 more"] == texts[14:]


def test_the_line_below_says_where_the_picture_comes_from(run):
    with style():
        texts = [text.get_text() for text in sheet(run, 6.0, 4.0).texts]
    assert f"driftwell {run.header.driftwell_version}, seed 7; finished at t = 1 µs" == texts[1]


def test_no_two_of_many_things_look_the_same():
    count = len(COLOURS) * min(len(MARKERS), len(LINES))
    assert count == len({(colour(k), marker(k)) for k in range(count)})
    assert count == len({(colour(k), line_style(k)) for k in range(count)})


def test_every_colour_stands_out_from_white_paper():
    # contrast ratio of the Web Content Accessibility Guidelines 2.1, W3C (2018), relative luminance
    def linear(part):
        return part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4

    for each in COLOURS:
        red, green, blue = map(linear, to_rgb(each))
        luminance = 0.2126 * red + 0.7152 * green + 0.0722 * blue
        assert 1.05 / (luminance + 0.05) > 2.0
