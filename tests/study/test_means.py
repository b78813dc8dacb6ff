"""Means over replicas: their error is the larger of what the runs say and how they scatter."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.study.means import mean
from tests.study.small_study import answer


def test_where_the_scatter_is_larger_it_is_the_error() -> None:
    found = mean([answer(1.0, 0.1), answer(2.0, 0.1), answer(6.0, 0.1)])
    assert 3.0 == found.value
    assert math.sqrt((4 + 1 + 9) / 2 / 3) == pytest.approx(found.error)
    assert 3 == found.replicas


def test_where_the_runs_own_errors_are_larger_they_are() -> None:
    found = mean([answer(1.0, 0.3), answer(1.1, 0.4)])
    assert 0.25 == pytest.approx(found.error)


def test_one_replica_keeps_its_own_error() -> None:
    found = mean([answer(2.0, 0.3)])
    assert (2.0, pytest.approx(0.3), 1) == (found.value, found.error, found.replicas)


def test_without_own_errors_only_the_scatter_tells() -> None:
    assert mean([answer(2.0, None)]).error is None
    assert 1.0 == pytest.approx(mean([answer(1.0, None), answer(3.0, 9.0)]).error)


def test_answers_that_are_no_number_are_left_out() -> None:
    found = mean([answer(math.nan, None), answer(2.0, 0.3)])
    assert (2.0, 1) == (found.value, found.replicas)
    none = mean([answer(math.nan, None)])
    assert math.isnan(none.value)
    assert (None, 0) == (none.error, none.replicas)
    assert 0 == mean([]).replicas


@pytest.mark.parametrize(("replicas", "larger"), [(2, 1.166), (3, 1.139), (10, 1.080)])
def test_with_true_errors_of_their_own_it_errs_on_the_safe_side(
    replicas: int, larger: float
) -> None:
    """How much, by a simulation of 400 000 normal draws; here 4000, so good to a percent."""
    draws = np.random.default_rng(1).normal(size=(4000, replicas))
    means = [mean([answer(float(x), 1.0) for x in row]) for row in draws]
    errors = np.array([each.error for each in means], dtype=np.float64)
    assert larger == pytest.approx(errors.mean() * math.sqrt(replicas), abs=0.02)
    inside = np.mean([abs(each.value) < (each.error or 0.0) for each in means])
    assert 0.683 < inside < 0.76
