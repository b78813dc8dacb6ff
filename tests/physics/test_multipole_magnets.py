"""Multipoles of finite length: how well they obey Maxwell's equations, and their limits."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.fields.evaluation import evaluate
from tests.cases import BODIES, field

OFFSETS = np.array([-4, -3, -2, -1, 1, 2, 3, 4], dtype=float)
WEIGHTS = np.array([1 / 280, -4 / 105, 1 / 5, -4 / 5, 4 / 5, -1 / 5, 4 / 105, -1 / 280])


def magnet(order: int, length: str = "60 mm", edge: str = "20 mm", **keys: object):
    return field(
        "multipole-magnet",
        order=order,
        radius="20 mm",
        strength="0.3 T",
        length=length,
        edge=edge,
        **keys,
    )


def magnetic(form, position: object) -> np.ndarray:
    return evaluate([form], BODIES, position, 0.0).magnetic


def curl_and_divergence(form, radius: float) -> tuple[float, float]:
    """Largest |curl B| and |div B|, T/m, on a circle 31 mm from the middle; differences of order
    8."""
    angle = np.linspace(0.0, 2.0 * np.pi, 24, endpoint=False)
    circle = np.stack([radius * np.cos(angle), radius * np.sin(angle), 0 * angle + 0.031], axis=1)
    step = 0.5e-3
    slopes = np.zeros((24, 3, 3))
    for axis in range(3):
        move = step * np.eye(3)[axis]
        ends = [magnetic(form, circle + k * move) for k in OFFSETS]
        slopes[:, :, axis] = sum(w * b for w, b in zip(WEIGHTS, ends, strict=True)) / step
    turned = slopes - slopes.transpose(0, 2, 1)
    curl = np.stack([turned[:, 2, 1], turned[:, 0, 2], turned[:, 1, 0]], axis=1)
    return float(np.abs(curl).max()), float(np.abs(np.trace(slopes, axis1=1, axis2=2)).max())


@pytest.mark.parametrize("order", [1, 2, 3])
def test_currents_of_the_series_grow_with_the_stated_power_of_the_radius(order: int) -> None:
    """curl B is of the order n + 6 in r, and div B vanishes: K. L. Brown, R. V. Servranckx,
    SLAC-PUB-3381 (1984) (from memory), for the series that ends at its fourth term."""
    form = magnet(order)
    near, sources = curl_and_divergence(form, 2.5e-3)
    far, more = curl_and_divergence(form, 3.5e-3)
    power = np.log(far / near) / np.log(1.4)
    assert order + 6 == pytest.approx(power, abs=0.1)
    assert max(sources, more) < 2e-3 * near


def test_integral_along_z_is_that_of_a_magnet_without_fringes() -> None:
    """The effective length; the fringes' terms integrate to nothing."""
    z = np.linspace(-0.4, 0.4, 801)
    places = np.stack([0 * z + 0.01, 0 * z, z], axis=1)
    total = magnetic(magnet(2), places).sum(axis=0) * 1e-3
    assert [0.0, 0.3 * 0.5 * 0.06, 0.0] == pytest.approx(total, abs=1e-12)


def test_middle_of_a_long_magnet_is_the_endless_multipole() -> None:
    keys = {"order": 3, "radius": "20 mm", "strength": "0.3 T", "angle": "11 deg"}
    endless = field("magnetic-multipole", **keys)
    long = field("multipole-magnet", length="2 m", edge="20 mm", **keys)
    places = np.random.default_rng(2).uniform(-0.02, 0.02, (20, 3))
    assert magnetic(endless, places) == pytest.approx(magnetic(long, places), abs=1e-14)


def test_fringe_of_a_quadrupole_has_its_leading_terms() -> None:
    """B_z = x y g'(z) and B_y = x (g - (x^2 + 3 y^2) g''/12), g in T/m: from Laplace's equation
    (common practice, no source). The next terms are (r/edge)^2 smaller."""
    form = magnet(2)
    x, y, z = 0.4e-3, 0.3e-3, 0.027
    low, high = np.tanh((z + 0.03) / 0.02), np.tanh((z - 0.03) / 0.02)
    g = 0.5 * 15.0 * (low - high)
    slope = 0.5 * 15.0 / 0.02 * ((1 - low**2) - (1 - high**2))
    bend = 0.5 * 15.0 / 0.02**2 * (-2 * low * (1 - low**2) + 2 * high * (1 - high**2))
    found = magnetic(form, [[x, y, z]])[0]
    assert x * y * slope == pytest.approx(found[2], rel=1e-3, abs=0.0)
    correction = -x * (x * x + 3.0 * y * y) * bend / 12.0
    assert correction == pytest.approx(found[1] - x * g, rel=1e-2, abs=0.0)
