"""The error of a pair sum as measured at a sample of the charges."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.coulomb.sampled_error import (
    LEAST_FIELD,
    SAMPLE,
    SampledError,
    sample_of,
    sampled_error,
)


def gas(count: int) -> tuple[np.ndarray, np.ndarray]:
    """Places (3, n) and charges (n,) of both signs."""
    random = np.random.default_rng(count)
    return random.normal(size=(3, count)), random.uniform(0.5, 1.0, count) * (-1) ** np.arange(
        count
    )


def written_out(position: np.ndarray, charge: np.ndarray, softening2: float) -> np.ndarray:
    """Coulomb's law (3, n) with every pair in one array."""
    apart = position[:, :, None] - position[:, None, :]
    square = (apart**2).sum(axis=0) + softening2
    np.fill_diagonal(square, 1.0)
    strength = charge / square**1.5
    np.fill_diagonal(strength, 0.0)
    return (apart * strength).sum(axis=2)


def test_an_exact_field_has_no_error_and_a_scaled_one_that_of_its_scale() -> None:
    position, charge = gas(400)
    exact = written_out(position, charge, 0.0)
    which = np.arange(0, 400, 3)

    def measured(field: np.ndarray) -> SampledError:
        return sampled_error(position, charge, 0.0, 1.0, field, which)

    assert measured(exact).rms <= 1e-13
    scaled = measured(exact * (1.0 + 1e-3))
    # where the field is below the floor its error counts less: some charges, not many
    assert 0.9e-3 < scaled.rms <= 1e-3 * (1.0 + 1e-9)
    assert 1e-3 == pytest.approx(scaled.largest, rel=1e-9, abs=0.0)
    assert scaled.largest >= scaled.percentile99 >= scaled.rms
    assert which.size == scaled.sample


def test_a_charge_where_the_fields_cancel_is_held_against_the_usual_field() -> None:
    """Midway between two equal charges there is no field: any error there is a part of nothing."""
    position = np.array([[-1.0, 0.0, 1.0], [0.0, 0.0, 0.0], [0.0, 0.0, 0.0]])
    charge = np.ones(3)
    field = written_out(position, charge, 0.0)
    usual = math.sqrt((field**2).sum() / 3)
    field[0, 1] += 1e-5 * usual
    found = sampled_error(position, charge, 0.0, 1.0, field, np.arange(3))
    assert 1e-5 / LEAST_FIELD / math.sqrt(3) == pytest.approx(found.rms, rel=1e-3, abs=0.0)


def test_a_field_that_is_no_number_is_no_good_field() -> None:
    position, charge = gas(50)
    field = written_out(position, charge, 0.0)
    field[1, 7] = np.nan
    assert math.isnan(sampled_error(position, charge, 0.0, 1.0, field, np.arange(5)).rms)


def test_lost_charges_are_neither_drawn_nor_felt() -> None:
    position, charge = gas(900)
    charge[::2] = 0.0
    which = sample_of(np.arange(900), charge, 5)
    assert 450 == which.size
    assert (charge[which] != 0.0).all()
    left = sample_of(np.arange(900), np.zeros(900), 5)
    assert 0 == left.size
    assert SampledError(0.0, 0.0, 0.0, 0) == sampled_error(
        position, np.zeros(900), 0.0, 1.0, position, left
    )


def test_a_sample_follows_from_ids_and_step_and_favours_nobody() -> None:
    """The same ids whatever else is there in between; others at another step; all equally often."""
    count = 4000
    ids, charge = np.arange(count), np.ones(count)
    first = sample_of(ids, charge, 1000)
    assert SAMPLE == first.size == np.unique(first).size
    assert (np.diff(first) > 0).all()
    assert (first == sample_of(ids.copy(), charge, 1000)).all()
    shared = np.intersect1d(first, sample_of(ids, charge, 1001)).size
    assert shared == pytest.approx(SAMPLE**2 / count, abs=4.0 * math.sqrt(SAMPLE**2 / count))
    # without the charges that were not drawn the same ones are drawn
    some = np.union1d(first, np.arange(0, count, 2))
    assert (first == some[sample_of(ids[some], charge[some], 1000)]).all()
    hits = np.zeros(count)
    looks = 400
    for step in range(looks):
        hits[sample_of(ids, charge, step)] += 1
    mean = looks * SAMPLE / count
    spread = math.sqrt(looks * (SAMPLE / count) * (1.0 - SAMPLE / count))
    assert mean == pytest.approx(hits.mean(), rel=1e-12, abs=0.0)
    assert spread == pytest.approx(hits.std(), rel=0.05, abs=0.0)
    assert abs(hits - mean).max() < 5.0 * spread
