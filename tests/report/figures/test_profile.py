"""Densities from counting, against the densities that charges were drawn from."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.stats import chi2, norm

from driftwell.report.figures.profile import (
    MEASURES,
    axial_profile,
    joined,
    radial_profile,
    radii,
)

COUNT, WEIGHT = 20_000, 50.0


def agreement(expected, profile) -> float:
    """Probability of a sum of squares as large, over bins with charges, if the errors are right."""
    shown = profile.error > 0.0
    square = float(np.sum(((profile.density - expected) / profile.error)[shown] ** 2))
    return float(chi2.sf(square, int(shown.sum())))


def ball(radius: float) -> np.ndarray:
    draw = np.random.default_rng(8)
    way = draw.normal(size=(COUNT, 3))
    way /= np.linalg.norm(way, axis=1)[:, None]
    return radius * way * draw.random(COUNT)[:, None] ** (1.0 / 3.0)


def gaussian(sigma) -> np.ndarray:
    return np.random.default_rng(9).normal(size=(COUNT, 3)) * np.array(sigma)


def test_the_density_of_a_uniform_ball_is_the_same_at_every_radius():
    position, weight = ball(1e-3), np.full(COUNT, WEIGHT)
    distance = np.sqrt(np.sum(position**2, axis=1))
    found = radial_profile(distance, weight, "shells", (0.0, 1e-3))
    expected = COUNT * WEIGHT / (4.0 * math.pi / 3.0 * 1e-9)
    assert 1e-4 < agreement(expected, found)
    # counted as one the 20000 charges tell 0.7 %; spread over 50 bins a change of 6 % is seen
    assert 1e-4 > agreement(1.06 * expected, found)


def test_the_radial_density_of_a_gaussian_cloud_is_its_formula():
    sigma = 2e-4
    found = radial_profile(
        radii(gaussian([sigma] * 3), np.full(COUNT, WEIGHT), None), np.full(COUNT, WEIGHT), "shells"
    )
    # the part of a Gaussian cloud within r: that of a chi square of 3 degrees (scipy)
    held = np.diff(chi2.cdf((found.edges / sigma) ** 2, 3))
    expected = COUNT * WEIGHT * held / np.diff(MEASURES["shells"](found.edges))
    often = held * COUNT > 5.0
    assert np.abs((found.density - expected)[often] / found.error[often]).max() < 4.5
    assert often.sum() > 20


def test_the_areal_density_about_an_axis_is_that_of_the_two_other_coordinates():
    sigma = 2e-4
    position, weight = gaussian([sigma, sigma, 5e-3]), np.full(COUNT, WEIGHT)
    found = radial_profile(radii(position, weight, 2), weight, "tubes")
    held = np.diff(chi2.cdf((found.edges / sigma) ** 2, 2))
    expected = COUNT * WEIGHT * held / np.diff(MEASURES["tubes"](found.edges))
    often = held * COUNT > 5.0
    assert np.abs((found.density - expected)[often] / found.error[often]).max() < 4.5


def test_the_number_per_length_of_a_gaussian_cloud_is_its_formula():
    sigma = 5e-3
    place = gaussian([1e-4, 1e-4, sigma])[:, 2]
    found = axial_profile(place, np.full(COUNT, WEIGHT))
    held = np.diff(norm.cdf(found.edges / sigma))
    expected = COUNT * WEIGHT * held / np.diff(found.edges)
    often = held * COUNT > 5.0
    assert np.abs((found.density - expected)[often] / found.error[often]).max() < 4.5


@pytest.mark.parametrize("kind", ["shells", "tubes"])
def test_the_integral_of_a_density_is_the_number_of_real_particles(kind):
    weight = np.where(np.arange(COUNT) % 2, 10.0, 90.0)
    found = radial_profile(radii(ball(1e-3), weight, None), weight, kind)
    assert weight.sum() == pytest.approx(
        float(found.density @ np.diff(MEASURES[kind](found.edges))), rel=1e-12, abs=0.0
    )


def test_the_error_is_the_root_of_the_count_times_the_weight():
    found = axial_profile(np.linspace(0.0, 1.0, 1000), np.full(1000, WEIGHT))
    counts = found.density * np.diff(found.edges) / WEIGHT
    assert np.sqrt(counts) * WEIGHT == pytest.approx(
        found.error * np.diff(found.edges), rel=1e-9, abs=0.0
    )


def test_inner_bins_are_joined_until_they_hold_enough_and_the_ends_stay():
    edges = joined(np.arange(6.0), np.array([1, 2, 15, 20, 3]))
    assert [0.0, 3.0, 4.0, 5.0] == edges.tolist()
