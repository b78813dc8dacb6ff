"""What the pairs do to each other balances: forces cancel, energies of both kinds agree.

Newton's third law for the sum of all forces; the energy is half the sum of charge times potential
(J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), eq. 1.51) and the virial of the forces,
sum x F (R. Clausius 1870; from memory), 1/r being homogeneous of degree -1.
"""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest

from tests.cases import PAIR_SUMS
from tests.pair_sums import Floats, PairSumCase
from tests.physics.clouds import CLOUDS, two_signs

EVERY_SUM = pytest.mark.parametrize("pair_sum", PAIR_SUMS, ids=str)
LOW_ORDERS = [case for case in PAIR_SUMS if not 1e-12 < case.relative_error < 1e-5]
"""One more sum of a high order takes a minute to compile."""
EVERY_CLOUD = pytest.mark.parametrize("shape", CLOUDS)


@cache
def energy_of(shape: str) -> tuple[float, float]:
    """Of 2000 charges: worked out once for all sums."""
    return energy_written_out(*CLOUDS[shape](2000))


def energy_written_out(place: Floats, charge: Floats) -> tuple[float, float]:
    """Energy of all pairs in extended precision, and the sum of the terms' sizes."""
    exact, q = place.astype(np.longdouble), charge.astype(np.longdouble)
    total = size = np.longdouble(0.0)
    for i in range(1, charge.size):
        apart = exact[:, :i] - exact[:, i : i + 1]
        term = q[i] * q[:i] / np.sqrt((apart**2).sum(axis=0))
        total += term.sum()
        size += np.abs(term).sum()
    return float(total), float(size)


def left_of_the_sum(pair_sum: PairSumCase, shape: str, n: int, softening: float) -> float:
    """|sum F| / sum |F|."""
    place, charge = CLOUDS[shape](n)
    force = charge * pair_sum.field(place, charge, softening, 1.0)
    return float(np.linalg.norm(force.sum(axis=1)) / np.linalg.norm(force, axis=0).sum())


@EVERY_SUM
@EVERY_CLOUD
@pytest.mark.parametrize("n", [40, 700, 6000])
def test_all_forces_cancel(pair_sum: PairSumCase, shape: str, n: int) -> None:
    """To rounding, however exact the forces are themselves."""
    assert left_of_the_sum(pair_sum, shape, n, softening=0.0) <= 1e-13


@pytest.mark.parametrize("pair_sum", LOW_ORDERS, ids=str)
@EVERY_CLOUD
def test_all_softened_forces_cancel(pair_sum: PairSumCase, shape: str) -> None:
    """To rounding, likewise."""
    assert left_of_the_sum(pair_sum, shape, 6000, softening=0.03) <= 1e-13


@EVERY_SUM
@EVERY_CLOUD
def test_half_the_sum_of_charge_times_potential_is_the_energy(
    pair_sum: PairSumCase, shape: str
) -> None:
    """Against every pair's term in extended precision."""
    if pair_sum.potential is None:
        pytest.skip("offers no potential")
    place, charge = CLOUDS[shape](2000)
    expected, size = energy_of(shape)
    found = 0.5 * float(charge @ pair_sum.potential(place, charge, 0.0, 1.0))
    assert expected == pytest.approx(found, abs=pair_sum.relative_error * size)


@EVERY_SUM
@EVERY_CLOUD
def test_the_virial_of_the_forces_is_the_energy(pair_sum: PairSumCase, shape: str) -> None:
    """Against every pair's term in extended precision, about the middle of the cloud."""
    place, charge = CLOUDS[shape](2000)
    place -= place.mean(axis=1, keepdims=True)
    expected, size = energy_of(shape)
    found = float((charge * place * pair_sum.field(place, charge, 0.0, 1.0)).sum())
    assert expected == pytest.approx(found, abs=pair_sum.relative_error * size)


def test_the_energy_written_out_is_right() -> None:
    """A square of side 1 with alternating charges: 4 sides attract, 2 diagonals repel."""
    place = np.array([[0.0, 1.0, 1.0, 0.0], [0.0, 0.0, 1.0, 1.0], [2.0] * 4])
    energy, size = energy_written_out(place, np.array([1.0, -1.0, 1.0, -1.0]))
    assert -4.0 + np.sqrt(2.0) == pytest.approx(energy, rel=1e-15, abs=0.0)
    assert 4.0 + np.sqrt(2.0) == pytest.approx(size, rel=1e-15, abs=0.0)


@EVERY_SUM
def test_probes_without_charge_push_nobody(pair_sum: PairSumCase) -> None:
    """Added between the charges they leave every field as it is, within the error promised."""
    place, charge = two_signs(1500)
    probes = np.random.default_rng(4).normal(size=(3, 700))
    alone = pair_sum.field(place, charge, 0.0, 1.0)
    together = pair_sum.field(
        np.ascontiguousarray(np.hstack([place, probes])),
        np.append(charge, np.zeros(700)),
        0.0,
        1.0,
    )[:, :1500]
    size = np.sqrt(np.mean((alone**2).sum(axis=0)))
    wrong = np.linalg.norm(together - alone, axis=0)
    least = np.maximum(np.linalg.norm(alone, axis=0), 0.01 * size)
    assert np.sqrt(np.mean((wrong / least) ** 2)) <= 2.0 * pair_sum.relative_error
