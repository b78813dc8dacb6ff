"""The mean of a series in time and its error."""

from __future__ import annotations

import numpy as np
import pytest
from recorded_by_hand import near
from scipy.signal import lfilter

from driftwell.answers.series import correlation_time, series_mean


def fading(memory: float, count: int, seed: int) -> np.ndarray:
    """A series whose correlation falls by `memory` from value to value; mean 0, variance not 1."""
    noise = np.random.default_rng(seed).normal(size=count)
    noise[0] /= np.sqrt(1.0 - memory**2)
    return np.asarray(lfilter([1.0], [1.0, -memory], noise))


@pytest.mark.parametrize(
    ("memory", "count"), [(0.0, 100), (0.5, 200), (0.9, 500), (0.95, 1000), (-0.5, 200)]
)
def test_error_of_a_series_with_memory_is_the_scatter_of_its_mean(
    memory: float, count: int
) -> None:
    means = [series_mean(fading(memory, count, 1000 + seed)) for seed in range(200)]
    scores = [found.mean / found.error for found in means if found.error is not None]
    assert len(scores) > 195
    assert 0.8 < np.std(scores) < 1.25
    assert abs(np.mean(scores)) < 0.3


def test_correlation_time_of_a_fading_memory_is_the_closed_form() -> None:
    """(1 + r)/(1 - r)/2 for correlation r^k: Sokal (1997), sec. 3 (from memory)."""
    assert near(9.5, rel=0.1) == correlation_time(fading(0.9, 100_000, 5))
    assert near(0.5, rel=0.05) == correlation_time(fading(0.0, 100_000, 5))


def test_a_series_that_does_not_change_is_certain() -> None:
    found = series_mean(np.full(20, 3.5))
    assert (found.mean, found.error) == (3.5, 0.0)


def test_a_series_that_drifts_has_no_error() -> None:
    assert series_mean(np.linspace(0.0, 1.0, 200)).error is None


def test_a_single_value_has_no_error() -> None:
    assert series_mean(np.array([2.0])).error is None


def test_an_oscillation_over_many_periods_is_better_known_than_independent_values_were() -> None:
    time = np.arange(400)
    values = 5.0 + np.sin(2.0 * np.pi * time / 8.3)
    found = series_mean(values)
    assert found.error is not None
    assert found.error < values.std() / np.sqrt(400)
    assert abs(found.mean - 5.0) < 3.0 * found.error
