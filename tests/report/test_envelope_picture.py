"""The picture of a beam's envelope and charge per length."""

from __future__ import annotations

import math

import numpy as np
import pytest
from pictured_run import charges, pictured_run

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.envelope import envelope_picture, slice_edges, slice_sizes
from driftwell.report.pictures.scene import scene_of


def envelope(run):
    with style():
        return envelope_picture(scene_of(run))


def test_sizes_of_slices_are_those_of_the_charges_in_them():
    draw = np.random.default_rng(1)
    along = draw.uniform(0.0, 1.0, 40_000)
    places = (1.0 + along) * draw.normal(size=(2, 40_000))
    edges = slice_edges(along)
    middles = 0.5 * (edges[:-1] + edges[1:])
    one = slice_sizes(along, places[:1], edges, "rms")
    assert 1.0 + middles == pytest.approx(one, rel=0.15)
    held = slice_sizes(along, places, edges, "edge")
    # 90 % of a Gaussian in a plane lie within sqrt(2 ln 10) of its spread.
    assert (1.0 + middles) * math.sqrt(2.0 * math.log(10.0)) == pytest.approx(held, rel=0.15)
    assert 1.5 * math.sqrt(2.0 * math.log(10.0)) == pytest.approx(held.mean(), rel=0.01)


def test_a_slice_with_few_charges_shows_no_size():
    along = np.array([*np.linspace(0.0, 1.0, 100), 3.5])
    sizes = slice_sizes(along, along[None], np.arange(5.0), "rms")
    assert [False, True, True, True] == list(np.isnan(sizes))


def test_a_beam_of_one_cloud_shows_both_axes_and_the_edge(run_of):
    figure = envelope(run_of("channel"))
    start, end = figure.axes[:2]
    assert 3 == len(start.lines) == len(end.lines)
    key = [text.get_text() for text in figure.legends[0].get_texts()]
    assert ["rms size along x", "rms size along y", "radius that holds 90 %"] == key
    across, up, _ = (line.get_ydata() for line in end.lines)
    # x grows along the beam from 0.7 to 2.3 times the start, y the other way round.
    assert across[-1] / across[0] == pytest.approx(2.3 / 0.7, rel=0.2)
    assert up[0] / up[-1] == pytest.approx(2.3 / 0.7, rel=0.2)


def test_charge_per_length_is_that_of_the_real_particles(run_of):
    figure = envelope(run_of("channel"))
    below = figure.axes[2]
    stairs = below.patches[0].get_data()
    unit = {"fC/m)": 1e-15, "pC/m)": 1e-12}[below.get_ylabel().split("(")[1]]
    expected = 6000 * ELEMENTARY_CHARGE / 40e-3
    assert expected == pytest.approx(stairs.values.mean() * unit, rel=0.01)


def test_several_clouds_have_their_own_lines_and_colours(run_of):
    figure = envelope(run_of("beam"))
    assert 2 == len(figure.axes[0].lines)
    assert 2 == len({line.get_color() for line in figure.axes[0].lines})


def test_what_does_not_fly_or_is_few_has_no_envelope(run_of, tmp_path):
    assert envelope(run_of("trap")) is None
    few = charges(100, drift=(0.0, 0.0, 1e6))
    assert envelope(pictured_run(tmp_path / "run", [(0.0, few), (1e-6, few)])) is None
