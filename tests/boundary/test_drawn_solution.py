"""Unit solutions of drawn electrodes: what holds for all of them."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest

from driftwell.boundary.drawn import DrawnSolution, solve_drawn
from driftwell.errors import DriftwellError
from driftwell.geometry.outline import circle, rectangle
from driftwell.kernels.threads import on_threads
from tests.boundary.drawn_figures import ball, disc, path, sheet

AXISYMMETRIC = [True, False]


@cache
def solution(axisymmetric: bool) -> DrawnSolution:
    """A block, a round body and a bent thin sheet."""
    outlines = [
        (rectangle((1.0, -0.5), (1.6, 0.1)),),
        (circle((1.3, 1.0), 0.35),),
        (path((0.3, -1.5), (1.2, -1.4), (1.5, -0.9), solid=False),),
    ]
    return solve_drawn(outlines, axisymmetric, 1e-7)


def places(count: int) -> np.ndarray:
    return np.random.default_rng(11).uniform((0.0, -2.0), (0.9, 2.0), (count, 2))


@pytest.mark.parametrize("axisymmetric", AXISYMMETRIC)
def test_the_field_is_minus_the_gradient(axisymmetric: bool) -> None:
    """By differences of fourth order, whose rounding is 1e-11."""
    found, points, step = solution(axisymmetric), places(40), 1e-3
    field = found.field(points)
    for axis in range(2):
        move = step * np.eye(2)[axis]
        values = [found.potential(points + k * move) for k in (-2, -1, 1, 2)]
        slope = (values[0] - 8.0 * values[1] + 8.0 * values[2] - values[3]) / (12.0 * step)
        assert field[:, :, axis] == pytest.approx(-slope, abs=1e-8)


@pytest.mark.parametrize("axisymmetric", AXISYMMETRIC)
def test_the_potential_is_the_voltage_up_to_the_surface_and_inside(axisymmetric: bool) -> None:
    """From 0.1 to 1e-9 of the size below the surface of the second and at its very surface."""
    found = solution(axisymmetric)
    angle = np.linspace(0.1, 6.0, 17)
    for depth in (0.1, 1e-3, 1e-6, 1e-9, 0.0):
        r = 0.35 - depth
        points = np.stack([1.3 + r * np.cos(angle), 1.0 + r * np.sin(angle)], axis=1)
        expected = np.repeat([[0.0], [1.0], [0.0]], len(points), axis=1)
        assert expected == pytest.approx(found.potential(points), abs=1e-7)


@pytest.mark.parametrize("axisymmetric", AXISYMMETRIC)
def test_just_outside_the_potential_rises_by_the_field(axisymmetric: bool) -> None:
    """1e-4 away from a block's side, far nearer than its elements are long."""
    found, gap = solution(axisymmetric), 1e-4
    point = np.array([[1.0 - gap, -0.2]])
    fall = found.field(point)[:, 0, 0]
    expected = np.array([1.0, 0.0, 0.0]) + fall * gap
    assert expected == pytest.approx(found.potential(point)[:, 0], abs=2e-7)


@pytest.mark.parametrize("axisymmetric", AXISYMMETRIC)
def test_capacitance_is_symmetric_and_its_rows_tell_the_charge_far_away(axisymmetric: bool) -> None:
    found = solution(axisymmetric)
    assert found.capacitance == pytest.approx(found.capacitance.T, rel=1e-6, abs=0.0)
    panels = found.panels
    charge = panels.density * panels.size
    rows = [charge[:, panels.electrode == k].sum(axis=1) for k in range(3)]
    assert found.capacitance == pytest.approx(np.array(rows), rel=1e-12, abs=0.0)
    far = found.capacitance.sum(axis=0)
    if axisymmetric:
        assert far.min() > 0.0
    else:
        assert far == pytest.approx(np.zeros(3), abs=1e-20)


def test_all_planar_electrodes_at_one_voltage_have_no_charge() -> None:
    """The potential is then the same everywhere."""
    found = solution(False)
    assert np.ones(40) == pytest.approx(found.potential(10.0 * places(40)).sum(axis=0))


def test_a_kept_solution_gives_the_same_bits() -> None:
    found = solution(True)
    again = DrawnSolution.from_arrays(found.arrays())
    assert (found.potential(places(9)) == again.potential(places(9))).all()
    assert (found.field(places(9)) == again.field(places(9))).all()
    assert (found.error, found.mirrors) == (again.error, again.mirrors)


@pytest.mark.parametrize("axisymmetric", AXISYMMETRIC)
def test_any_number_of_threads_gives_the_same_bits(axisymmetric: bool) -> None:
    found, points = solution(axisymmetric), places(301)
    values = []
    for count in (1, 2):
        with on_threads(count):
            values.append(
                np.concatenate([found.potential(points).ravel(), *found.field(points)], None)
            )
    assert (values[0] == values[1]).all()


def test_both_sides_of_the_axis_are_one() -> None:
    found, points = solution(True), places(20)
    across = points * (-1.0, 1.0)
    assert (found.potential(points) == found.potential(across)).all()
    assert (found.field(points) * (-1.0, 1.0) == found.field(across)).all()


def test_electrodes_in_a_can_do_not_feel_what_is_outside() -> None:
    """Of a can drawn thin, the charge of two electrodes in it is the same with a third outside."""
    can = path((0, -2), (2, -2), (2, 2), (0, 2), solid=False)
    inside = [(ball(-0.5, 0.4),), (disc(0.9, 1.0),), (can,)]
    alone = solve_drawn(inside, True, 1e-7)
    both = solve_drawn([*inside, (rectangle((3, -1), (4, 1)),)], True, 1e-7)
    assert alone.capacitance[:2] == pytest.approx(both.capacitance[:2, :3], rel=1e-6, abs=0.0)
    assert np.zeros(2) == pytest.approx(both.capacitance[:2, 3], abs=1e-7 * both.capacitance.max())


def test_a_planar_can_fixes_the_potential_inside() -> None:
    """Between two eccentric cylinders nothing floats; outside is the can's voltage."""
    found = solve_drawn([(circle((0.2, 0.0), 0.3),), (sheet(circle((0, 0), 1)),)], False, 1e-8)
    assert [[0.0], [1.0]] == pytest.approx(found.potential(np.array([[1.7, 0.3]])), abs=1e-8)


def test_an_accuracy_that_cannot_be_had_is_told_in_one_message() -> None:
    needle = path((0, 0), (0.02, 1), (0, 1))
    with pytest.raises(DriftwellError, match=r"known to .* of the voltage only, .* 1\.0e-09 was"):
        solve_drawn([(needle,)], True, 1e-9)
