"""The field at chosen charges is that of the whole sum."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb.sampled import sampled_field
from tests.coulomb.test_direct_sum import ROUNDING, cloud, written_out

Floats = NDArray[np.float64]


def sampled(which: list[int], place: Floats, charge: Floats, softening: float = 0.0) -> Floats:
    """The field (3, m) at the chosen charges."""
    chosen = np.array(which, dtype=np.int64)
    out = np.full((3, chosen.size), np.nan)
    sampled_field(chosen, place, charge, softening**2, COULOMB_CONSTANT, out)
    return out


@pytest.mark.parametrize("softening", [0.0, 0.1])
@pytest.mark.parametrize("n", [1, 2, 9, 100, 511, 513, 1100])
def test_each_chosen_charge_feels_all_others(n: int, softening: float) -> None:
    """In any order, some of them twice, as many as fill no vector."""
    place, charge = cloud(n)
    which = np.random.default_rng(n).integers(0, n, 13)
    expected = written_out(place, charge, softening)
    for m in (0, 1, 7, 8, 9, 13):
        chosen = which[:m].tolist()
        found = sampled(chosen, place, charge, softening)
        wrong = np.abs(expected.field[:, chosen] - found)
        assert (wrong <= ROUNDING * expected.field_size[chosen]).all()


def test_the_field_at_a_charge_does_not_depend_on_what_else_is_chosen() -> None:
    """To the last bit."""
    place, charge = cloud(700)
    every = sampled(list(range(700)), place, charge)
    for i in (0, 13, 699):
        assert (every[:, [i]] == sampled([i], place, charge)).all()


def test_a_long_sum_rounds_little() -> None:
    """20 000 like charges: 1e-15 of the sum of sizes, where one run of terms would lose more."""
    place, charge = cloud(20_000)
    charge = np.abs(charge)
    which = [0, 77, 19_999]
    exact, extended = place.astype(np.longdouble), charge.astype(np.longdouble)
    for i, found in zip(which, sampled(which, place, charge).T, strict=True):
        apart = exact[:, [i]] - exact
        square = (apart**2).sum(axis=0)
        square[i] = 1.0
        push = np.longdouble(COULOMB_CONSTANT) * extended / (square * np.sqrt(square)) * apart
        size = float(np.abs(push).sum())
        assert np.abs(push.sum(axis=1).astype(np.float64) - found).max() <= 1e-15 * size


def test_charges_at_one_place_push_nowhere_and_numbers_that_are_none_are_not_hidden() -> None:
    place, charge = cloud(20)
    place[:, 3] = place[:, 5]
    expected = written_out(place, np.where(np.arange(20) == 3, 0.0, charge), 1e-30)
    wrong = np.abs(expected.field[:, 5] - sampled([5], place, charge)[:, 0])
    assert (wrong <= ROUNDING * expected.field_size[5]).all()
    place[2, 11] = np.nan
    assert np.isnan(sampled([0, 11, 19], place, charge)).all()
