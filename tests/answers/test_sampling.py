"""Sampling errors of fractions, means and other values."""

from __future__ import annotations

import math

import numpy as np
import pytest
from recorded_by_hand import near

from driftwell.answers.sampling import (
    fraction_error,
    group_of,
    jackknife_error,
    mean_error,
    wilson_interval,
)

NORMAL_95 = 1.959963984540054


@pytest.mark.parametrize(
    ("hits", "trials", "low", "high"),
    [
        (81, 263, 0.2553, 0.3662),
        (15, 148, 0.0624, 0.1605),
        (0, 20, 0.0000, 0.1611),
        (1, 29, 0.0061, 0.1718),
    ],
)
def test_wilson_interval_is_the_published_one(
    hits: int, trials: int, low: float, high: float
) -> None:
    """R. G. Newcombe, Stat. Med. 17 (1998) 857, table I, method 3 at 95 % (from memory)."""
    found = wilson_interval(hits, trials, NORMAL_95)
    assert (low, high) == pytest.approx(found, abs=5e-5)


def test_fraction_error_of_none_and_all_is_not_zero_and_the_same() -> None:
    assert near(0.5 / 101.0, rel=1e-12) == fraction_error(0, 100)
    assert fraction_error(100, 100) == near(fraction_error(0, 100), rel=1e-12)


def test_fraction_error_of_many_trials_is_the_binomial_one() -> None:
    assert near(math.sqrt(0.3 * 0.7 / 1e6), rel=1e-5) == fraction_error(3e5, 1e6)


def test_jackknife_of_a_mean_one_by_one_is_its_standard_error() -> None:
    """Efron (1982), eq. 3.2 (from memory)."""
    values = np.random.default_rng(2).normal(size=40)
    found = jackknife_error(lambda keep: float(values[keep].mean()), values.size)
    assert near(mean_error(values), rel=1e-12) == found


def test_jackknife_of_a_linear_value_scales_with_it() -> None:
    values = np.random.default_rng(3).normal(size=1000)
    once = jackknife_error(lambda keep: float(values[keep].mean()), 1000)
    thrice = jackknife_error(lambda keep: 3.0 * float(values[keep].mean()), 1000)
    assert once is not None
    assert thrice == near(3.0 * once, rel=1e-12)


def test_groups_are_always_the_same_and_equally_large() -> None:
    group = group_of(1007)
    assert np.array_equal(group, group_of(1007))
    assert set(np.bincount(group)) == {20, 21}
    assert sorted(group_of(7)) == list(range(7))
    assert group_of(0).size == 0


@pytest.mark.parametrize("period", [2, 50, 100])
def test_groups_do_not_follow_an_order_the_charges_were_laid_out_in(period: int) -> None:
    values = (np.arange(5000) % period).astype(float)
    found = jackknife_error(lambda keep: float(values[keep].mean()), values.size)
    assert near(mean_error(values), rel=0.3) == found


def test_errors_of_too_few_charges_are_unknown() -> None:
    assert mean_error(np.array([1.0])) is None
    assert jackknife_error(lambda keep: 1.0, 2) is None
    assert jackknife_error(lambda keep: math.nan, 10) is None
