"""Capacitances of drawn electrodes against closed forms, to the accuracy asked for and better.

By the maximum principle the potential's error is seen on the surface; that of a capacitance, an
integral over the charge, is far smaller.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from mpmath import legenp, legenq
from scipy.special import ellipk

from driftwell.boundary.drawn import solve_drawn
from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.geometry.outline import circle, rectangle
from tests.boundary.drawn_figures import ball, disc, path, sheet

ACCURACY = 1e-8
CLOSE = 1e-8
"""Relative; what is asked of the potential."""
R = 0.01  # m


def test_a_ball_has_the_capacitance_of_a_ball() -> None:
    """4 pi eps0 R; J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 1.11."""
    found = solve_drawn([(ball(0.02, R),)], True, ACCURACY)
    assert 4.0 * math.pi * ELECTRIC_CONSTANT * R == pytest.approx(
        found.capacitance[0, 0], rel=CLOSE, abs=0.0
    )


def test_concentric_balls_are_a_condenser() -> None:
    """4 pi eps0 / (1/R1 - 1/R2), and the outer one has its outside besides; Jackson problem 1.6."""
    found = solve_drawn([(ball(0.0, R),), (sheet(ball(0.0, 2.0 * R)),)], True, ACCURACY)
    inner = 4.0 * math.pi * ELECTRIC_CONSTANT * 2.0 * R
    expected = np.array([[inner, -inner], [-inner, 2.0 * inner]])
    assert expected == pytest.approx(found.capacitance, rel=CLOSE, abs=0.0)


TWO_BALLS = {
    2.2: (1.4313082772564008, -0.7237778397568374),
    3.0: (1.1462874419411302, -0.38908306689512284),
    4.0: (1.0718214519409726, -0.2692383611374577),
}
"""C11 and C12 over 4 pi eps0 R, by distance of the centres over R: the series of sinh u / sinh n u,
W. R. Smythe, Static and Dynamic Electricity, sec. 5.082, added up in 20 digits."""


@pytest.mark.parametrize("distance", TWO_BALLS)
def test_two_balls_share_their_charge_as_by_images(distance: float) -> None:
    half = 0.5 * distance * R
    found = solve_drawn([(ball(-half, R),), (ball(half, R),)], True, ACCURACY).capacitance
    own, mutual = (c * 4.0 * math.pi * ELECTRIC_CONSTANT * R for c in TWO_BALLS[distance])
    assert np.array([[own, mutual], [mutual, own]]) == pytest.approx(found, rel=CLOSE, abs=0.0)


def test_touching_balls_of_one_electrode_have_a_capacitance_of_two_ln_2() -> None:
    """8 pi eps0 R ln 2; Smythe sec. 5.082 with equal spheres in contact."""
    found = solve_drawn([(ball(-R, R), ball(R, R))], True, ACCURACY)
    expected = 8.0 * math.pi * ELECTRIC_CONSTANT * R * math.log(2.0)
    assert expected == pytest.approx(found.capacitance[0, 0], rel=CLOSE, abs=0.0)


def test_a_thin_disc_has_its_capacitance_and_density() -> None:
    """8 eps0 R, and 4 eps0 / (pi sqrt(R^2 - r^2)) on both sides together; Jackson problem 3.3."""
    found = solve_drawn([(disc(0.0, R),)], True, ACCURACY)
    assert 8.0 * ELECTRIC_CONSTANT * R == pytest.approx(found.capacitance[0, 0], rel=CLOSE, abs=0.0)
    r = found.panels.position[:, 0]
    density = 4.0 * ELECTRIC_CONSTANT / (math.pi * np.sqrt((R - r) * (R + r)))
    assert density == pytest.approx(found.panels.density[0], rel=1e-6, abs=0.0)


def torus_capacitance(large: float, small: float) -> float:
    """8 eps0 c sum' Q_(n-1/2)(x) / P_(n-1/2)(x), c^2 = large^2 - small^2, x = large/small, first
    term halved twice: C. Snow, NBS Circular 544 (1954); P. M. Morse and H. Feshbach, Methods of
    Theoretical Physics (1953), sec. 10.3 (both from memory)."""
    x = large / small
    ratio = [
        float((legenq(n - 0.5, 0, x, type=3) / legenp(n - 0.5, 0, x, type=3)).real)
        for n in range(14)
    ]
    return 8.0 * ELECTRIC_CONSTANT * math.sqrt(large**2 - small**2) * (2.0 * sum(ratio) - ratio[0])


@pytest.mark.parametrize("ratio", [2.0, 10.0, 1000.0])
def test_a_torus_has_the_capacitance_of_toroidal_functions(ratio: float) -> None:
    found = solve_drawn([(circle((R, 0.0), R / ratio),)], True, ACCURACY)
    assert torus_capacitance(R, R / ratio) == pytest.approx(
        found.capacitance[0, 0], rel=CLOSE, abs=0.0
    )


def test_a_thin_ring_tends_to_its_logarithm() -> None:
    """4 pi^2 eps0 R / ln(8 R/a) up to (a/R)^2; L. D. Landau and E. M. Lifshitz, Electrodynamics of
    Continuous Media, sec. 2, problem 4 (from memory)."""
    found = solve_drawn([(circle((R, 0.0), 1e-4 * R),)], True, ACCURACY)
    expected = 4.0 * math.pi**2 * ELECTRIC_CONSTANT * R / math.log(8e4)
    assert expected == pytest.approx(found.capacitance[0, 0], rel=1e-7, abs=0.0)


@pytest.mark.parametrize("aside", [0.0, 0.3, 0.45])
def test_cylinders_inside_one_another_are_a_condenser(aside: float) -> None:
    """2 pi eps0 / arcosh((a^2 + b^2 - d^2)/(2 a b)) per length; Smythe sec. 4.13."""
    a, b, d = 0.5, 1.0, aside
    found = solve_drawn([(circle((d, 0.0), a),), (sheet(circle((0, 0), b)),)], False, ACCURACY)
    each = 2.0 * math.pi * ELECTRIC_CONSTANT / math.acosh((a**2 + b**2 - d**2) / (2.0 * a * b))
    assert each * np.array([[1, -1], [-1, 1]]) == pytest.approx(
        found.capacitance, rel=CLOSE, abs=0.0
    )


@pytest.mark.parametrize("distance", [2.02, 3.0, 20.0])
def test_two_rods_are_a_line_condenser(distance: float) -> None:
    """pi eps0 / arcosh(d / 2 a) per length; Jackson problem 1.7 with equal radii."""
    at = 0.5 * distance
    found = solve_drawn([(circle((at, 0.0), 1.0),), (circle((-at, 0.0), 1.0),)], False, ACCURACY)
    expected = math.pi * ELECTRIC_CONSTANT / math.acosh(at)
    assert expected == pytest.approx(found.capacitance[0, 0], rel=CLOSE, abs=0.0)


def test_two_strips_side_by_side_are_an_elliptic_condenser() -> None:
    """eps0 K(k') / K(k) per length, thin strips from a to b on both sides, k = a/b, k'^2 = 1 - k^2:
    the map of the half plane on a rectangle, H. Kober, Dictionary of Conformal Representations
    (1957; from memory)."""
    a, b = 0.3, 1.0
    strips = [(path((a, 0.0), (b, 0.0), solid=False),), (path((-b, 0.0), (-a, 0.0), solid=False),)]
    found = solve_drawn(strips, False, ACCURACY)
    k = a / b
    expected = ELECTRIC_CONSTANT * ellipk(1.0 - k**2) / ellipk(k**2)
    assert expected == pytest.approx(found.capacitance[0, 0], rel=CLOSE, abs=0.0)


def flux(
    found: object, number: int, low: tuple[float, float], high: tuple[float, float]
) -> np.ndarray:
    """Of eps0 E through a rectangle around an electrode, in C per V, for each unit solution."""
    t, w = np.polynomial.legendre.leggauss(60)
    (r0, z0), (r1, z1) = low, high
    r, z = 0.5 * (r0 + r1) + 0.5 * (r1 - r0) * t, 0.5 * (z0 + z1) + 0.5 * (z1 - z0) * t
    total = np.zeros(3)
    for x, sign in ((r0, -1.0), (r1, 1.0)):
        field = found.field(np.stack([np.full(60, x), z], axis=1))[:, :, 0]
        around = 2.0 * math.pi * x if found.axisymmetric else 1.0
        total += sign * field @ w * around * 0.5 * (z1 - z0)
    for y, sign in ((z0, -1.0), (z1, 1.0)):
        field = found.field(np.stack([r, np.full(60, y)], axis=1))[:, :, 1]
        around = 2.0 * math.pi * r if found.axisymmetric else 1.0
        total += sign * field @ (w * around) * 0.5 * (r1 - r0)
    return total * ELECTRIC_CONSTANT


@pytest.mark.parametrize("axisymmetric", [True, False])
def test_the_flux_around_an_electrode_is_its_charge(axisymmetric: bool) -> None:
    """Gauss's law, Jackson sec. 1.3, by a rule of 60 points on each side of a rectangle."""
    electrodes = [
        (rectangle((1.0, -0.3), (1.4, 0.3)),),
        (circle((1.2, 1.2), 0.3),),
        (rectangle((1.0, -2.0), (1.5, -1.0)),),
    ]
    found = solve_drawn(electrodes, axisymmetric, 1e-8)
    for number, (low, high) in enumerate(
        [((0.7, -0.6), (1.8, 0.6)), ((0.6, 0.6), (1.8, 1.9)), ((0.6, -2.5), (2.0, -0.6))]
    ):
        expected = found.capacitance[number]
        around = flux(found, number, low, high)
        assert expected == pytest.approx(around, abs=1e-6 * np.abs(found.capacitance).max())
