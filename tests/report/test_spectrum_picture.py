"""The picture of the spectra of traced motions."""

from __future__ import annotations

import numpy as np
import pytest
from pictured_run import charges, pictured_run

from driftwell.report.paper.sheet import style
from driftwell.report.pictures.scene import scene_of
from driftwell.report.pictures.spectrum import MOST_TRACES, PADDED, spectrum, spectrum_picture


def spectra(run):
    with style():
        return spectrum_picture(scene_of(run))


def test_a_sine_stands_as_high_as_its_amplitude():
    time = np.arange(4000) * 1e-7
    frequency, amplitude = spectrum(time, 5.0 + 3e-6 * np.cos(2.0 * np.pi * 250e3 * time))
    assert 3e-6 == pytest.approx(amplitude.max(), rel=1e-6)
    assert 250e3 == pytest.approx(frequency[amplitude.argmax()], rel=1e-9)
    assert 2.5e3 == pytest.approx(PADDED * frequency[0])


def test_only_what_moves_has_a_panel_with_its_lines_marked(run_of):
    figure = spectra(run_of("traced"))
    first, second = figure.axes
    assert "load centre x: 4096 samples, one every 10 ns" == first.get_title(loc="left")
    assert "load charge 0 y: 2000 samples, one every 10 ns" == second.get_title(loc="left")
    marks = sorted(line.get_xdata()[0] for line in first.lines[1:])
    assert [1.0, 48.0] == pytest.approx(marks, rel=1e-5)
    assert {"1 MHz", "48 MHz"} == {text.get_text() for text in first.texts}


def test_of_lines_too_close_to_name_both_the_stronger_is_named(run_of):
    second = spectra(run_of("traced")).axes[1]
    assert [1.0, 1.06] == pytest.approx(
        sorted(line.get_xdata()[0] for line in second.lines[1:]), rel=1e-5
    )
    assert ["1 MHz"] == [text.get_text() for text in second.texts]


def test_traces_that_find_no_room_are_counted(tmp_path):
    start = charges(20)
    time = np.arange(200) * 1e-8
    names = [f"load charge {k} x" for k in range(MOST_TRACES + 2)]
    run = pictured_run(
        tmp_path / "run",
        [(0.0, start), (2e-6, start)],
        traces={name: np.cos(2e7 * time) for name in names},
        sampled=time,
    )
    figure = spectra(run)
    assert MOST_TRACES == len(figure.axes)
    assert "2 more traces not shown" in [t.get_text() for t in figure.legends[0].get_texts()]


def test_a_run_without_traces_has_no_spectrum(run_of):
    assert spectra(run_of("trap")) is None
