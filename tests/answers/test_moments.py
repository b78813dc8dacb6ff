"""The moments a run notes of every cloud at every record."""

from __future__ import annotations

import math

import numpy as np
from recorded_by_hand import near

from driftwell.answers.moments import kinetic_energies, moments_of
from driftwell.constants import SPEED_OF_LIGHT

MASS = 2.0e-25


def test_moments_are_mean_and_covariance_divided_by_the_count() -> None:
    random = np.random.default_rng(1)
    position = random.normal(3e-3, 1e-3, (3, 500))
    velocity = random.normal(500.0, 90.0, (3, 500)) + 1e5 * position
    row = moments_of(position, velocity, MASS)
    both = np.concatenate([position, velocity])
    assert row.count == 500
    assert near(both.mean(axis=1), rel=1e-14) == row.centre
    assert near(np.cov(both, bias=True), rel=1e-12) == row.covariance
    assert np.array_equal(row.covariance, row.covariance.T)


def test_moments_leave_positions_and_velocities_as_they_were() -> None:
    position, velocity = np.ones((3, 4)), np.full((3, 4), 2.0)
    moments_of(position, velocity, MASS)
    assert np.array_equal(np.ones((3, 4)), position)
    assert np.array_equal(np.full((3, 4), 2.0), velocity)


def test_kinetic_moments_are_mean_and_variance_of_one_particle() -> None:
    velocity = np.array([[0.0, 100.0, 200.0], [0.0, 0.0, 0.0], [0.0, 0.0, 0.0]])
    row = moments_of(np.zeros((3, 3)), velocity, MASS)
    energies = 0.5 * MASS * np.array([0.0, 1e4, 4e4])
    assert near(energies.mean(), rel=1e-12) == row.kinetic_energy
    assert near(energies.var(), rel=1e-12) == row.kinetic_variance


def test_moments_of_no_charge_are_not_numbers() -> None:
    row = moments_of(np.empty((3, 0)), np.empty((3, 0)), MASS)
    assert row.count == 0
    assert np.isnan(row.centre).all()
    assert np.isnan(row.covariance).all()
    assert math.isnan(row.kinetic_energy)
    assert math.isnan(row.kinetic_variance)


def test_kinetic_energy_is_that_of_special_relativity_at_any_speed() -> None:
    """(gamma - 1) m c^2: Jackson, Classical Electrodynamics, 3rd ed., sec. 11.5 (from memory)."""
    gamma = 10.0
    fast = SPEED_OF_LIGHT * math.sqrt(gamma**2 - 1.0)
    slow = 1e-3
    velocity = np.array([[fast, 0.0], [0.0, slow], [0.0, 0.0]])
    energy = kinetic_energies(velocity, MASS)
    assert near(9.0 * MASS * SPEED_OF_LIGHT**2, rel=1e-14) == energy[0]
    assert near(0.5 * MASS * slow**2, rel=1e-14) == energy[1]
