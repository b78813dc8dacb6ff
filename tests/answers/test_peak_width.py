"""Full width at half maximum from values alone."""

from __future__ import annotations

import numpy as np
import pytest
from recorded_by_hand import near
from scipy.special import ndtri

from driftwell.answers.peak_width import full_width

GAUSSIAN = 2.354820045
"""2 sqrt(2 ln 2)."""


def test_width_of_a_gaussian_is_2_3548_sigma() -> None:
    """Common practice, no source: exp(-x^2/2) = 1/2 at x = sqrt(2 ln 2)."""
    even = ndtri((np.arange(20_000) + 0.5) / 20_000)
    width, error = full_width(1e-3 + 2e-9 * even)
    assert near(2e-9 * GAUSSIAN, rel=0.002) == width
    assert error is not None


def test_width_scales_with_the_values_and_ignores_their_origin() -> None:
    values = np.random.default_rng(4).normal(size=500)
    width, error = full_width(values)
    scaled, scaled_error = full_width(7.0 + 3.0 * values)
    assert scaled == near(3.0 * width, rel=1e-9)
    assert scaled_error == near(3.0 * error, rel=1e-9)


def test_width_of_a_flat_top_is_its_length() -> None:
    width, _ = full_width(np.random.default_rng(5).uniform(0.0, 1.0, 5000))
    assert pytest.approx(1.0, abs=0.04) == width


def test_width_of_a_lopsided_peak_is_between_its_half_heights() -> None:
    """x exp(-x) falls to half its top at 0.231961 and 2.678347: the Lambert function, -1/(2e)."""
    values = np.random.default_rng(6).gamma(2.0, 1.0, 20_000)
    width, error = full_width(values)
    assert error is not None
    assert pytest.approx(2.446386, abs=3.0 * error) == width
    assert error < 0.1


def test_a_far_stray_value_does_not_change_the_width() -> None:
    values = np.random.default_rng(7).normal(size=2000)
    width, _ = full_width(values)
    with_stray, _ = full_width(np.append(values, 1e6))
    assert width == near(with_stray, rel=5e-3)


def test_values_without_spread_have_no_width_and_no_error() -> None:
    assert full_width(np.full(30, 2.0)) == (0.0, None)
