"""Outlines and potentials in a plane, against places known beforehand."""

from __future__ import annotations

import math

import contourpy
import numpy as np
import pytest
from matplotlib.collections import LineCollection
from matplotlib.figure import Figure

from driftwell.report.figures.kinds.field import put_field_lines
from driftwell.report.paper.projection import frame
from driftwell.report.sections.outlines import outlines_of, wall_lines
from driftwell.report.sections.scenery import Scenery
from driftwell.report.sections.section import section
from driftwell.scenario.read import read_scenario

ZX, XY = (2, 0), (0, 1)
SIDE = (-10e-3, 10e-3)

COAXIAL = """
title    = "A wire in a cylinder, invented"
duration = "1 us"
[[cloud]]
name    = "any"
species = "proton"
shape   = { kind = "points", positions = [["1 mm", "0 mm", "0 mm"]] }
[[field]]
name            = "wire"
kind            = "wire-in-cylinder"
wire_radius     = "1 mm"
cylinder_radius = "10 mm"
voltage         = "100 V"
[[wall]]
name   = "tube"
kind   = "cylinder"
radius = "8 mm"
length = "10 mm"
[[wall]]
name = "plate"
kind = "plane"
at   = ["0 mm", "0 mm", "6 mm"]
hole = { radius = "3 mm" }
[[wall]]
name   = "bulb"
kind   = "sphere"
radius = "9 mm"
"""


@pytest.fixture(scope="module")
def coaxial(tmp_path_factory) -> Scenery:
    path = tmp_path_factory.mktemp("coaxial") / "wire.toml"
    path.write_text(COAXIAL)
    return Scenery(read_scenario(path).scenario, None)


def test_equipotentials_of_a_wire_in_a_cylinder_are_circles_at_their_radii(coaxial):
    cut = section(XY, 0.0, SIDE, SIDE)
    potential = coaxial.potential(cut, 0.0)
    lines = contourpy.contour_generator(cut.across, cut.up, potential)
    for volts in (20.0, 50.0, 80.0):
        # V ln(R/r) / ln(R/a): J. D. Jackson, section 2.11 (from memory)
        radius = 10e-3 / 10.0 ** (volts / 100.0)
        (line,) = (np.asarray(each) for each in lines.lines(volts))
        assert radius == pytest.approx(np.hypot(*line.T), rel=2e-3, abs=0.0)


def test_walls_are_cut_where_they_are_solid(coaxial):
    cut = section(ZX, 0.0, SIDE, SIDE)
    tube, plate, bulb = (wall_lines(wall, cut) for wall in coaxial.scenario.wall)
    assert 2 == len(tube)
    assert 8e-3 == pytest.approx(np.abs(np.concatenate(tube)[:, 1]), rel=1e-9, abs=0.0)
    assert 5e-3 == pytest.approx(np.abs(np.concatenate(tube)[:, 0]).max(), rel=1e-2, abs=0.0)
    assert 2 == len(plate)
    assert 6e-3 == pytest.approx(np.concatenate(plate)[:, 0], rel=1e-9, abs=0.0)
    assert 3e-3 == pytest.approx(np.abs(np.concatenate(plate)[:, 1]).min(), rel=2e-2, abs=0.0)
    assert 9e-3 == pytest.approx(np.hypot(*np.concatenate(bulb).T), rel=1e-3, abs=0.0)


def test_a_plane_beside_the_middle_cuts_a_sphere_in_a_smaller_circle(coaxial):
    line = np.concatenate(wall_lines(coaxial.scenario.wall[2], section(XY, 4e-3, SIDE, SIDE)))
    assert math.sqrt(81.0 - 16.0) * 1e-3 == pytest.approx(np.hypot(*line.T), rel=1e-3, abs=0.0)


def test_a_plane_that_misses_a_wall_shows_none_of_it(coaxial):
    assert [] == wall_lines(coaxial.scenario.wall[2], section(XY, 9.5e-3, SIDE, SIDE))


def test_bodies_have_their_outlines_and_one_that_is_not_in_the_plane_has_none():
    cut = section(XY, 0.0, SIDE, SIDE)
    x, y = np.meshgrid(cut.across, cut.up)
    left, right = (np.hypot(x - place, y) - 2e-3 for place in (-5e-3, 5e-3))
    owner = (right < left).astype(np.int64)
    found = outlines_of(cut.across, cut.up, np.minimum(left, right), owner, ["one", "two", "far"])
    assert ["one", "two"] == [each.name for each in found]
    for place, each in zip((-5e-3, 5e-3), found, strict=True):
        apart = each.outline - np.array([place, 0.0])
        assert 2e-3 == pytest.approx(np.hypot(*apart.T), rel=1e-3, abs=0.0)


def test_a_surface_that_meets_a_grid_point_is_not_taken_for_another_body():
    cut = section(XY, 0.0, SIDE, SIDE)
    x, y = np.meshgrid(cut.across, cut.up)
    distance = np.abs(x) + np.abs(y) - cut.across[-20]
    distance[180, -20] = 0.0
    owner = np.zeros(cut.shape, np.int64)
    found = outlines_of(cut.across, cut.up, distance, owner, ["one", "far"])
    assert {"one"} == {each.name for each in found if each.name}


def test_field_lines_of_a_quadrupole_keep_the_product_of_their_coordinates():
    cut = section(XY, 0.0, SIDE, SIDE)
    x, y = np.meshgrid(cut.across, cut.up)
    panel = Figure(figsize=(3.0, 3.0)).subplots()
    put_field_lines(panel, frame(SIDE, SIDE, 1.0), cut, 1e6 * (x**2 - y**2))
    (lines,) = (each for each in panel.collections if isinstance(each, LineCollection))
    # the field (-x, y) keeps x y along its lines
    ways = [way for way in lines.get_segments() if len(way) > 5]
    assert len(ways) > 20
    for way in ways:
        # lines are followed to 0.3 % of the panel of 20 mm, and x + y is 20 mm at the most
        assert np.ptp(way[:, 0] * way[:, 1]) < 0.003 * 20.0 * 20.0
    assert max(np.abs(way[:, 0] * way[:, 1]).max() for way in ways) > 20.0
    assert max(np.abs(np.diff(np.hypot(*way.T))).sum() for way in ways) > 5.0
