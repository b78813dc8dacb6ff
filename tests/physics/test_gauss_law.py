"""The flux through a closed surface is 4 pi times the charge inside (C. F. Gauss 1813).

J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 1.3. The ball of charges of the test
is full, so the field is looked for among the charges, where no closed form for many of them helps.
"""

from __future__ import annotations

import numpy as np
import pytest

from tests.cases import PAIR_SUMS
from tests.pair_sums import Floats, PairSumCase

COUNT, SURFACE_POINTS = 3000, 1500


def even_directions(count: int) -> Floats:
    """(3, count) on the unit sphere, a Fibonacci spiral: each stands for an equal area.

    A. Gonzalez, Math. Geosci. 42 (2010) 49.
    """
    z = 1.0 - (2.0 * np.arange(count) + 1.0) / count
    turn = np.pi * (3.0 - np.sqrt(5.0)) * np.arange(count)
    rho = np.sqrt(1.0 - z**2)
    return np.array([rho * np.cos(turn), rho * np.sin(turn), z])


@pytest.mark.parametrize("pair_sum", PAIR_SUMS, ids=str)
@pytest.mark.parametrize("radius", [0.4, 0.8, 1.5])
def test_the_flux_through_a_sphere_counts_the_charge_inside(
    pair_sum: PairSumCase, radius: float
) -> None:
    """Inside a ball of charges of both signs, but more plus than minus, and around all of it.

    Charges nearer to the surface than twice the spacing of its points are moved away from it, in
    or out; then its points add up the flux to 1e-4 of the largest that could be.
    """
    random = np.random.default_rng(17)
    place = random.normal(size=(3, COUNT))
    distance = random.uniform(size=COUNT) ** (1.0 / 3.0)
    gap = 2.0 * radius * np.sqrt(4.0 * np.pi / SURFACE_POINTS)
    near = np.abs(distance - radius) < gap
    distance[near] = radius + gap * np.sign(distance[near] - radius)
    place *= distance / np.linalg.norm(place, axis=0)
    charge = random.uniform(-1.0, 2.0, COUNT)
    normal = even_directions(SURFACE_POINTS)
    whole = np.ascontiguousarray(np.hstack([place, radius * normal]))
    field = pair_sum.field(whole, np.append(charge, np.zeros(SURFACE_POINTS)), 0.0, 1.0)
    flux = 4.0 * np.pi * radius**2 * (field[:, COUNT:] * normal).sum(axis=0).mean()
    inside = charge[distance < radius].sum()
    assert inside > 0.0
    error = abs(flux - 4.0 * np.pi * inside) / (4.0 * np.pi * np.abs(charge).sum())
    assert error <= 2e-6 + pair_sum.relative_error
