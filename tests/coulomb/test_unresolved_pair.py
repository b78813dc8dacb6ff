"""Opposite charges that fall towards each other faster than a step can follow are found."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT, ELECTRON_MASS, ELEMENTARY_CHARGE, PROTON_MASS
from driftwell.coulomb.direct import unresolved_pair
from driftwell.kernels import kernel


@kernel
def _found(position, charge, mass, limit):
    return unresolved_pair(position, charge, mass, COULOMB_CONSTANT, limit)


def pair_rate(distance: float, weight: float = 1.0) -> float:
    """sqrt(k Q^2 / (mu r^3)) of an electron and a proton, rad/s, each standing for `weight`."""
    reduced = ELECTRON_MASS * PROTON_MASS / (ELECTRON_MASS + PROTON_MASS)
    charge = ELEMENTARY_CHARGE
    return float(np.sqrt(COULOMB_CONSTANT * weight * charge**2 / (reduced * distance**3)))


def found(distance: float, limit: float, signs: tuple[float, float], weight: float = 1.0) -> int:
    """Index told for an electron and a proton among far ones; `limit` in rad/s."""
    position = np.array([[0.0, 5.0, 0.0, -7.0], [0.0] * 4, [0.0, 0.0, distance, 0.0]])
    charge = np.array([signs[0], 1.0, signs[1], 1.0]) * weight * ELEMENTARY_CHARGE
    mass = np.array([ELECTRON_MASS, PROTON_MASS, PROTON_MASS, PROTON_MASS]) * weight
    return int(_found(position, charge, mass, limit**2))


@pytest.mark.parametrize("weight", [1.0, 50.0])
def test_the_limit_is_the_pairs_own_rate(weight: float) -> None:
    """Told just above the limit, not just below it; macro-charges fall by their own charge."""
    distance = 2e-9
    rate = pair_rate(distance, weight)
    assert found(distance, 0.999 * rate, (-1.0, 1.0), weight) == 2
    assert found(distance, 1.001 * rate, (-1.0, 1.0), weight) == -1


@pytest.mark.parametrize("signs", [(1.0, 1.0), (-1.0, -1.0), (0.0, 1.0), (-1.0, 0.0)])
def test_like_and_lost_charges_never_collapse(signs: tuple[float, float]) -> None:
    """However near they are."""
    assert -1 == found(1e-15, 100.0, signs)


def test_opposite_charges_at_one_place_are_told() -> None:
    """No rate is large enough for them."""
    assert 2 == found(0.0, 1e150, (-1.0, 1.0))
