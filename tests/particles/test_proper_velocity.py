"""Proper velocities, kinetic energies, and the addition of velocities."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import e, h

from driftwell.constants import ELECTRON_MASS, SPEED_OF_LIGHT
from driftwell.particles.frame import frame
from driftwell.particles.proper_velocity import (
    carried,
    gamma,
    kinetic_energy,
    proper_speed,
    proper_velocity,
)

c = SPEED_OF_LIGHT

# Energy in keV, wavelength h/p in pm, mass over rest mass, speed over that of light: as tabled for
# electron microscopes, e.g. D. B. Williams, C. B. Carter, Transmission Electron Microscopy, 2nd ed.
# (2009), Table 1.2 (from memory; its speeds in m/s seem to be taken with c = 3e8 m/s).
ELECTRONS = [
    (100.0, 3.70, 1.196, 0.5482),
    (200.0, 2.51, 1.391, 0.6953),
    (300.0, 1.97, 1.587, 0.7765),
    (1000.0, 0.87, 2.957, 0.9411),
]


@pytest.mark.parametrize(("energy", "wavelength", "mass_ratio", "speed"), ELECTRONS)
def test_fast_electrons_have_the_published_wavelength_mass_and_speed(
    energy: float, wavelength: float, mass_ratio: float, speed: float
) -> None:
    u = proper_speed(np.array([energy * 1e3 * e]), ELECTRON_MASS)
    factor = gamma(np.array([u * 0.0, u * 0.0, u]))[0]
    assert wavelength == pytest.approx(h / (ELECTRON_MASS * u[0]) * 1e12, abs=0.006)
    assert mass_ratio == pytest.approx(factor, abs=0.0006)
    assert speed == pytest.approx(u[0] / factor / c, abs=0.0001)


@given(exponent=st.floats(-12.0, 6.0))
def test_a_kinetic_energy_survives_the_way_to_a_proper_speed_and_back(exponent: float) -> None:
    """From 1e-12 to 1e6 rest energies, without cancellation at the slow end."""
    energy = 10.0**exponent * ELECTRON_MASS * c**2
    u = proper_speed(np.array([energy]), ELECTRON_MASS)
    found = kinetic_energy(np.array([u * 0.6, u * 0.0, u * 0.8]), ELECTRON_MASS)[0]
    assert energy == pytest.approx(found, rel=1e-13, abs=0.0)


@given(beta=st.floats(-0.999, 0.999))
def test_proper_velocity_is_gamma_times_velocity(beta: float) -> None:
    found = proper_velocity(np.array([[0.0], [beta * c], [0.0]]))
    expected = beta * c / math.sqrt(1.0 - beta**2)
    assert expected == pytest.approx(found[1, 0], rel=1e-12, abs=0.0)


@given(first=st.floats(-0.99, 0.99), second=st.floats(-0.99, 0.99))
def test_parallel_velocities_add_as_einstein_says(first: float, second: float) -> None:
    """(v1 + v2) / (1 + v1 v2 / c^2): Jackson, 3rd ed. (1999), eq. 11.31 (from memory)."""
    total = carried(
        proper_velocity(np.array([[0.0], [0.0], [second * c]])),
        proper_velocity(np.array([[0.0], [0.0], [first * c]])),
    )
    expected = (first + second) / (1.0 + first * second)
    assert expected == pytest.approx((total / gamma(total))[2, 0] / c, abs=1e-12)


def test_a_velocity_across_the_motion_is_slowed_by_gamma() -> None:
    """v_across' / gamma in the laboratory: Jackson eq. 11.31 with v' along = 0 (from memory)."""
    across = carried(
        proper_velocity(np.array([[0.3 * c], [0.0], [0.0]])),
        proper_velocity(np.array([[0.0], [0.0], [0.8 * c]])),
    )
    velocity = (across / gamma(across))[:, 0] / c
    assert [0.3 * 0.6, 0.0, 0.8] == pytest.approx(velocity.tolist(), abs=1e-14)


@pytest.mark.parametrize(
    ("axis", "first", "second"),
    [
        ((0.0, 0.0, 1.0), [1.0, 0.0, 0.0], [0.0, 1.0, 0.0]),
        ((1.0, 0.0, 0.0), [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]),
        ((0.0, 1.0, 0.0), [0.0, 0.0, 1.0], [1.0, 0.0, 0.0]),
    ],
)
def test_the_frame_about_a_coordinate_axis_is_the_other_two_in_cyclic_order(
    axis: tuple[float, float, float], first: list[float], second: list[float]
) -> None:
    assert [first, second, list(axis)] == frame(axis).tolist()


@given(x=st.floats(-1.0, 1.0), y=st.floats(-1.0, 1.0), z=st.floats(0.01, 1.0))
def test_the_frame_about_any_direction_is_right_handed_and_orthonormal(
    x: float, y: float, z: float
) -> None:
    length = math.hypot(x, y, z)
    axes = frame((x / length, y / length, z / length))
    assert np.allclose(np.eye(3), axes @ axes.T, atol=1e-14)
    assert pytest.approx(1.0, abs=1e-13) == np.linalg.det(axes)
