"""Opposite charges that fall towards each other faster than a step can follow are found."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT, ELECTRON_MASS, ELEMENTARY_CHARGE, PROTON_MASS
from driftwell.coulomb.unresolved import PLAIN, all_pairs, search_room, unresolved_pair
from driftwell.kernels import kernel

EXTENT = 1000.0


@kernel
def _found(position, charge, mass, limit, work):
    return unresolved_pair(position, charge, mass, COULOMB_CONSTANT, limit, EXTENT, work)


@kernel
def _found_plainly(position, charge, mass, limit):
    return all_pairs(position, charge, mass, COULOMB_CONSTANT, limit)


def searched(position: np.ndarray, charge: np.ndarray, mass: np.ndarray, limit: float) -> int:
    """By the search, in room that was used before."""
    work = search_room(charge.size)
    work[:] = np.random.default_rng(0).integers(-9, 9, work.size)
    return int(_found(position, charge, mass, limit, work))


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
    return searched(position, charge, mass, limit**2)


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


KINDS = [
    "gas",
    "pairs",
    "one place",
    "a few places",
    "a grid",
    "no numbers",
    "far and near",
]


def drawn(kind: str, n: int, random: np.random.Generator) -> np.ndarray:
    """Places (3, n) of a kind, at a size drawn."""
    place = random.normal(size=(3, n))
    if kind == "pairs":  # each charge of the first half has a close neighbour in the second
        half = n // 2
        place[:, half : 2 * half] = place[:, :half] * (1.0 + 10.0 ** random.uniform(-9, -1))
    elif kind == "one place":
        place[:] = place[:, :1]
    elif kind == "a few places":
        place[:] = place[:, random.integers(0, 3, n)]
    elif kind == "a grid":
        place = np.round(2.0 * place)
    elif kind == "no numbers":
        place[1, ::7], place[2, ::11] = np.nan, np.inf
    elif kind == "far and near":
        place[0, ::3] *= 1e9
        place[2, ::5] *= 1e300
    return place * 10.0 ** random.uniform(-7, 2)


@pytest.mark.parametrize("kind", KINDS)
def test_the_search_tells_what_comparing_all_pairs_tells(kind: str) -> None:
    """The same index, for clouds of any size and limits from none too fast to all too fast."""
    random = np.random.default_rng(KINDS.index(kind))
    told = []
    for _ in range(60):
        n = int(random.integers(PLAIN + 1, 500))
        place = drawn(kind, n, random)
        charge = random.choice([-1.0, 1.0, 0.0, -3.0, 5.0], size=n) * ELEMENTARY_CHARGE
        mass = random.choice([ELECTRON_MASS, PROTON_MASS], size=n)
        size = float(np.nanmedian(np.abs(place)))
        limit = pair_rate(size * n ** (-1 / 3) * 10.0 ** random.uniform(-3.0, 0.3)) ** 2
        expected = int(_found_plainly(place, charge, mass, limit))
        assert expected == searched(place, charge, mass, limit)
        told.append(expected >= 0)
    assert any(told)
    assert kind in {"one place", "a few places", "a grid"} or not all(told)


@pytest.mark.parametrize("limit", [0.0, np.inf, 1e300, 1e-300, np.nan])
def test_limits_out_of_all_bounds_are_those_of_all_pairs(limit: float) -> None:
    random = np.random.default_rng(1)
    place = random.normal(size=(3, 200))
    place[:, 150] = place[:, 20]
    charge = random.choice([-1.0, 1.0], size=200) * ELEMENTARY_CHARGE
    charge[20], charge[150] = ELEMENTARY_CHARGE, -ELEMENTARY_CHARGE
    mass = np.full(200, PROTON_MASS)
    expected = int(_found_plainly(place, charge, mass, limit))
    assert expected == searched(place, charge, mass, limit)


def test_one_close_pair_is_found_among_a_hundred_thousand() -> None:
    """Wherever it is, and across the border of two cubes; far too many for all pairs."""
    random = np.random.default_rng(2)
    n = 100_000
    place = random.uniform(-1e-3, 1e-3, (3, n))
    charge = np.where(np.arange(n) < n // 2, 1.0, -1.0) * ELEMENTARY_CHARGE
    mass = np.full(n, PROTON_MASS)
    reduced = (2.0 * ELECTRON_MASS / PROTON_MASS) ** 0.5  # pair_rate's is an electron's
    limit = (pair_rate(2e-8) * reduced) ** 2
    assert -1 == searched(place, charge, mass, limit)
    for i, j in random.integers(0, n // 2, (40, 2)):
        kept = place[:, n // 2 + j].copy()
        place[:, n // 2 + j] = place[:, i] + 1.5e-8 * random.choice([-1.0, 1.0], 3) / 3**0.5
        assert n // 2 + j == searched(place, charge, mass, limit)
        place[:, n // 2 + j] = kept
