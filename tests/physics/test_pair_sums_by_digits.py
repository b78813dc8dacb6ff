"""Sums over few charges that are hard to sum, against Coulomb's law by mpmath with fifty digits.

J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), eq. 1.5. The sets are invented.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import mpmath
import numpy as np
import pytest

from tests.cases import PAIR_SUMS
from tests.pair_sums import Floats, PairSumCase

EVERY_SUM = pytest.mark.parametrize("pair_sum", PAIR_SUMS, ids=str)
DOUBLE_SUMS = [case for case in PAIR_SUMS if case.relative_error < 1e-12]
COUNT = 400
"""More than fit into one tile or one leaf."""
SEEN = 12
"""Charges whose sums are worked out by mpmath."""


@dataclass(frozen=True, slots=True)
class Expected:
    """Field (3, k) and potential (k,) at some charges; the sums of their terms' sizes (k,)."""

    field: Floats
    field_size: Floats
    potential: Floats
    potential_size: Floats


def by_digits(place: Floats, charge: Floats, seen: Floats) -> Expected:
    """The sums at the charges `seen`; worked out once for all that are held against them."""
    return _by_digits(place.tobytes(), charge.tobytes(), tuple(seen.tolist()))


@cache
def _by_digits(places: bytes, charges: bytes, seen: tuple[int, ...]) -> Expected:
    """Charges at one place push nowhere."""
    charge = np.frombuffer(charges)
    place = np.frombuffer(places).reshape(3, -1)
    with mpmath.workdps(50):
        exact = [[mpmath.mpf(value) for value in row.tolist()] for row in place]
        q = [mpmath.mpf(value) for value in charge.tolist()]
        rows = []
        for i in seen:
            sums = [mpmath.mpf(0)] * 6
            for j in range(charge.size):
                d = [row[i] - row[j] for row in exact]
                r2 = d[0] ** 2 + d[1] ** 2 + d[2] ** 2
                if r2 == 0:
                    continue
                level = q[j] / mpmath.sqrt(r2)
                terms = [*(level / r2 * along for along in d), abs(level) / mpmath.sqrt(r2)]
                sums = [a + b for a, b in zip(sums, [*terms, level, abs(level)], strict=True)]
            rows.append([float(value) for value in sums])
    found = np.array(rows).T
    return Expected(found[:3], found[3], found[4], found[5])


def agrees(pair_sum: PairSumCase, place: Floats, charge: Floats, seen: Floats) -> None:
    """Every charge looked at, against its own terms: the error promised, as rms and fivefold."""
    expected = by_digits(place, charge, seen)
    pushed = pair_sum.field(place, charge, 0.0, 1.0)[:, seen]
    wrong = np.linalg.norm((pushed - expected.field) / expected.field_size, axis=0)
    assert wrong.max() <= 5.0 * pair_sum.relative_error
    assert np.sqrt(np.mean(wrong**2)) <= pair_sum.relative_error
    if pair_sum.potential is not None:
        level = pair_sum.potential(place, charge, 0.0, 1.0)[seen]
        wrong = np.abs(level - expected.potential) / expected.potential_size
        assert wrong.max() <= pair_sum.relative_error


def cloud(seed: int, n: int = COUNT) -> tuple[Floats, Floats, Floats]:
    """Places in a box of side 1, charges of both signs, and which are looked at."""
    random = np.random.default_rng(seed)
    seen = random.choice(n, SEEN, replace=False)
    return random.uniform(-0.5, 0.5, (3, n)), random.uniform(-3.0, 5.0, n), seen


@EVERY_SUM
@pytest.mark.parametrize("apart", [1e-3, 1e-6, 1e-9])
def test_close_pairs(pair_sum: PairSumCase, apart: float) -> None:
    """Each charge has a twin so far away, in any direction, somewhere else in the list."""
    place, charge, seen = cloud(1)
    half = COUNT // 2
    towards = np.random.default_rng(2).normal(size=(3, half))
    place[:, half:] = place[:, :half] + apart * towards / np.linalg.norm(towards, axis=0)
    agrees(pair_sum, place, charge, seen)


@EVERY_SUM
def test_one_close_pair_spoils_nobody_else(pair_sum: PairSumCase) -> None:
    """The other charges' fields are 1e18 times smaller than the pair's and count by themselves."""
    place, charge, seen = cloud(3)
    place[:, 7] = place[:, 300] + np.array([3e-10, -8e-10, 5e-10])
    agrees(pair_sum, place, charge, seen[~np.isin(seen, (7, 300))])
    agrees(pair_sum, place, charge, np.array([7, 300]))


@EVERY_SUM
@pytest.mark.parametrize("offset", [1e3, 1e6, 1e9])
def test_a_cloud_far_from_the_origin(pair_sum: PairSumCase, offset: float) -> None:
    """Its places are what is left of them after rounding; their differences are exact."""
    place, charge, seen = cloud(4)
    agrees(pair_sum, place + np.array([[offset], [-0.7 * offset], [0.3 * offset]]), charge, seen)


@EVERY_SUM
def test_two_clouds_far_from_each_other(pair_sum: PairSumCase) -> None:
    """Each is a millionth of the distance between them, and has its own field nevertheless."""
    place, charge, seen = cloud(5)
    place *= 1e-6
    place[2, ::2] += 1.0
    agrees(pair_sum, place, charge, seen)


@EVERY_SUM
def test_charges_of_all_sizes(pair_sum: PairSumCase) -> None:
    """From 1e-12 to 1e12 elementary charges, both signs."""
    place, charge, seen = cloud(6)
    charge = (
        1.602176634e-19
        * np.sign(charge)
        * 10.0 ** np.random.default_rng(6).uniform(-12.0, 12.0, COUNT)
    )
    agrees(pair_sum, place, charge, seen)


@EVERY_SUM
@pytest.mark.parametrize("unit", [1e-30, 1.602176634e-19, 1e6])
def test_charges_in_any_unit(pair_sum: PairSumCase, unit: float) -> None:
    """A field does not depend on the unit its charges are given in."""
    place, charge, seen = cloud(7)
    agrees(pair_sum, place, charge * unit, seen)


@EVERY_SUM
@pytest.mark.parametrize("size", [1e-15, 1e-6, 1e6, 1e15])
def test_clouds_of_any_size(pair_sum: PairSumCase, size: float) -> None:
    """From a nucleus to a light year."""
    place, charge, seen = cloud(8)
    agrees(pair_sum, place * size, charge, seen)


@pytest.mark.parametrize("pair_sum", DOUBLE_SUMS, ids=str)
@pytest.mark.parametrize("size", [1e-38, 1e100])
def test_clouds_far_smaller_and_larger_than_any_real_one(
    pair_sum: PairSumCase, size: float
) -> None:
    """The direct sum in double precision loses no digit, though r^3 is near the ends of range."""
    place, charge, seen = cloud(9)
    agrees(pair_sum, place * size, charge, seen)


@EVERY_SUM
def test_flat_and_straight_clouds(pair_sum: PairSumCase) -> None:
    """All in one plane, and all on one line: boxes without volume."""
    place, charge, seen = cloud(10)
    place[1] = 0.25
    agrees(pair_sum, place, charge, seen)
    place[0] = -3.0
    agrees(pair_sum, place, charge, seen)


@EVERY_SUM
def test_charges_at_one_place_push_each_other_nowhere(pair_sum: PairSumCase) -> None:
    """In threes, each three at one place: the others' push is left."""
    place, charge, seen = cloud(11, n=COUNT + 2)
    third = (COUNT + 2) // 3
    place[:, third : 2 * third] = place[:, 2 * third :] = place[:, :third]
    agrees(pair_sum, place, charge, seen)


@EVERY_SUM
@pytest.mark.parametrize("n", [2, 64, 1500])
def test_all_charges_at_one_place(pair_sum: PairSumCase, n: int) -> None:
    """Nothing is left to divide, and nobody is pushed."""
    place = np.tile(np.array([[0.3], [-1e-3], [7.0]]), n)
    charge = np.random.default_rng(12).uniform(0.5, 2.0, n)
    assert (pair_sum.field(place, charge, 0.0, 1.0) == 0.0).all()
    if pair_sum.potential is not None:
        assert (pair_sum.potential(place, charge, 0.0, 1.0) == 0.0).all()


@EVERY_SUM
@pytest.mark.parametrize("apart", [5e-324, 1e-310, 1e-200])
def test_distances_whose_square_is_nothing(pair_sum: PairSumCase, apart: float) -> None:
    """The push of such a pair is finite, that of a subnormal distance nothing; others' is exact."""
    place, charge, seen = cloud(13)
    place[:, :2] = np.array([[0.0, apart], [0.0, 0.0], [0.0, -apart]])
    together = place.copy()
    together[:, 1] = place[:, 0]
    found = pair_sum.field(place, charge, 0.0, 1.0)
    assert np.isfinite(found).all()
    seen = seen[seen > 1]
    if apart < 1e-300:
        seen = np.append(seen, [0, 1])
    expected = by_digits(together, charge, seen)
    wrong = np.linalg.norm(found[:, seen] - expected.field, axis=0)
    assert (wrong <= 5.0 * pair_sum.relative_error * expected.field_size).all()


@EVERY_SUM
def test_a_charge_at_a_very_large_distance(pair_sum: PairSumCase) -> None:
    """One a light year away moves the cloud's own fields in no digit."""
    place, charge, seen = cloud(14)
    place[:, 17] = np.array([1e16, -1e15, 0.0])
    agrees(pair_sum, place, charge, np.append(seen[seen != 17], 17))
