"""From values of refined runs to an order, an error, or a bound."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.study.convergence.differences import (
    AxisError,
    error_of_chance,
    error_of_one,
    error_of_step,
    error_of_weight,
    observed_order,
)

HALVES = (1.0, 0.5, 0.25)


def along(order: float, size: float, lengths: tuple[float, ...] = HALVES) -> list[float]:
    """Values about 1 whose error is of one order in the step."""
    return [1.0 + size * length**order for length in lengths]


def step(values: list[float], chance: float = 0.0, scheme: float = 2.0) -> AxisError:
    return error_of_step(values, HALVES, scheme, chance, values[:1])


@pytest.mark.parametrize("order", [1.0, 2.0, 4.0])
def test_one_order_in_the_step_is_observed_and_carried_on_to_its_limit(order: float) -> None:
    found = step(along(order, 0.3), scheme=order)
    assert ("richardson", True) == (found.kind, found.asymptotic)
    assert order == pytest.approx(found.order, rel=1e-6, abs=0.0)
    assert 0.3 == pytest.approx(found.error, rel=1e-6, abs=0.0)
    assert 1.0 == pytest.approx(found.limit, rel=1e-6, abs=0.0)


def test_steps_that_are_no_halves_of_each_other_give_the_same_order() -> None:
    lengths = (1.0, 0.6, 0.21)
    values = along(2.0, 0.1, lengths)
    differences = [values[1] - values[0], values[2] - values[1]]
    assert 2.0 == pytest.approx(observed_order(differences, lengths), rel=1e-8, abs=0.0)
    found = error_of_step(values, lengths, 2.0, 0.0, values[:1])
    assert 0.1 == pytest.approx(found.error, rel=1e-6, abs=0.0)


@pytest.mark.parametrize(
    ("values", "asymptotic"),
    [
        ([1.0, 1.1, 1.3], False),  # grows
        ([1.0, 1.1, 1.0], False),  # swings
        ([1.0, 1.1, 1.09], True),  # swings, and shrinks
        ([1.0, 1.1, 1.1001], True),  # falls faster than the scheme can
    ],
)
def test_without_a_clean_order_the_largest_difference_stands(
    values: list[float], asymptotic: bool
) -> None:
    found = step(values)
    assert ("difference", None) == (found.kind, found.order)
    assert asymptotic == found.asymptotic
    largest = max(abs(a - b) for a in values for b in values)
    assert largest == pytest.approx(found.error, rel=1e-12, abs=0.0)


def test_values_that_differ_by_rounding_are_unchanged() -> None:
    assert "unchanged" == step([1.0, 1.0, 1.0]).kind
    rounded = step([1.0, 1.0 + 2e-16, 1.0 - 2e-16])
    assert ("unchanged", 0.0) == (rounded.kind, rounded.error)
    once = error_of_one(1.0, 1.0 + 2e-16, 1.0, [1.0], "difference")
    assert ("unchanged", 0.0) == (once.kind, once.error)
    assert "richardson" == step([1.0 + 1.6e-9, 1.0 + 4e-10, 1.0 + 1e-10]).kind


def test_a_clean_order_counts_far_below_the_noise_and_above_it() -> None:
    assert "richardson" == step(along(2.0, 1e-3), chance=1.0).kind
    assert "richardson" == step(along(1.5, 1.0), chance=0.01).kind


def test_amidst_the_noise_only_the_order_of_the_scheme_is_believed() -> None:
    assert "richardson" == step(along(2.0, 1.0), chance=0.6).kind
    found = step(along(1.0, 1.0), chance=0.6)
    assert ("bound", None) == (found.kind, found.order)


def test_a_bound_comes_from_all_runs_that_scatter_alike() -> None:
    values, replicas = [1.0, 1.9, 0.8], [1.0, 1.2, 0.6, 1.2]
    found = error_of_step(values, HALVES, 2.0, 1.0, replicas)
    assert "bound" == found.kind
    assert math.sqrt(1 / 2 + 1 / 4) == pytest.approx(found.error, rel=1e-12, abs=0.0)
    assert "below the noise: < 0.87" == found.how
    found = error_of_step(values, HALVES, 2.0, 1.0, replicas, [0.9, 1.1])
    assert math.sqrt(1 / 4 + 1 / 4) == pytest.approx(found.error, rel=1e-12, abs=0.0)
    assert math.sqrt(2.0) == pytest.approx(found.noise, rel=1e-12, abs=0.0)


def test_motions_that_part_seldom_feign_an_order_and_the_bound_is_honest() -> None:
    draws = np.random.default_rng(5).normal(size=(4000, 6))
    found = [error_of_step(row[:3], HALVES, 2.0, 1.0, [row[0], *row[3:]]) for row in draws]
    kinds = [each.kind for each in found]
    assert 0.003 < kinds.count("richardson") / len(kinds) < 0.02
    assert 0.8 < kinds.count("bound") / len(kinds) < 0.9
    bounds = [each.error for each in found if each.kind == "bound"]
    assert 0.85 < float(np.mean(bounds)) < 1.1


def test_one_refined_run_gives_its_difference_or_a_bound() -> None:
    assert 0.25 == error_of_one(1.0, 1.25, 0.0, [1.0], "difference to the direct sum").error
    assert "difference" == error_of_one(1.0, 1.01, 1.0, [1.0], "difference").kind
    assert "difference" == error_of_one(1.0, 5.0, 1.0, [1.0], "difference").kind
    found = error_of_one(1.0, 1.5, 1.0, [1.0, 1.0, 1.0, 1.0], "difference")
    assert "bound" == found.kind
    assert math.sqrt(1.25) == pytest.approx(found.error, rel=1e-12, abs=0.0)
    assert "unchanged" == error_of_one(1.0, 1.0, 1.0, [1.0], "difference").kind


def test_half_the_weight_leaves_half_the_error_and_real_charges_leave_none() -> None:
    noise = (0.01, 0.01)
    assert 0.4 == pytest.approx(
        error_of_weight([1.0, 1.0], [1.2, 1.2], noise, 0.5).error, rel=1e-9, abs=0.0
    )
    assert 0.2 == pytest.approx(
        error_of_weight([1.0, 1.0], [1.2, 1.2], noise, 0.0).error, rel=1e-9, abs=0.0
    )
    found = error_of_weight([1.0], [1.1, 1.1], (0.3, 0.2), 0.5)
    assert "bound" == found.kind
    assert math.hypot(0.3, 0.2 / math.sqrt(2.0)) == pytest.approx(found.error, rel=1e-9, abs=0.0)


def test_the_scatter_of_few_seeds_is_widened_so_that_it_covers_as_often_as_said() -> None:
    draws = np.random.default_rng(6).normal(size=(4000, 4))
    found = [error_of_chance(row) for row in draws]
    covered = np.mean([abs(row[0]) <= each.error for row, each in zip(draws, found, strict=True)])
    assert 0.60 < float(covered) < 0.76
    assert "scatter of 4 seeds" == found[0].how
    assert "unchanged" == error_of_chance([1.0, 1.0]).kind
