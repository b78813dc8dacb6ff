"""Multipole content of potentials that are known."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.boundary.multipoles import (
    planar_content,
    round_content,
    solid_harmonics,
    spatial_content,
)

Floats = np.ndarray


def test_planar_terms_are_found_about_any_axis() -> None:
    """phi = 3 + x + (x^2 - y^2)/2 - 4 xy + Re (x + iy)^12 about (0.3, -0.2), in units of 0.5."""

    def potential(points: Floats) -> Floats:
        w = ((points[:, 0] - 0.3) + 1j * (points[:, 1] + 0.2)) / 0.5
        return np.array([3.0 + w.real + 0.5 * (w**2).real - 2.0 * (w**2).imag + (w**12).real])

    found = planar_content(potential, 0.5, (0.3, -0.2))
    cosine, sine = np.zeros(13), np.zeros(13)
    cosine[[0, 1, 2, 12]], sine[2] = (3.0, 1.0, 0.5, 1.0), -2.0
    assert cosine == pytest.approx(found.cosine[0], abs=1e-13)
    assert sine == pytest.approx(found.sine[0], abs=1e-13)
    assert found.error.max() < 1e-12


def test_round_terms_are_those_of_a_ring_charge() -> None:
    """A unit ring of radius 1 at z = 0: A_n = P_n(0), Jackson eq. 3.38 on the axis, radius 0.5."""

    def potential(points: Floats) -> Floats:
        turn = (np.arange(400) + 0.5) * (2.0 * np.pi / 400)
        x = points[:, :1] - np.cos(turn)
        return np.array(
            [(1.0 / np.sqrt(x**2 + np.sin(turn) ** 2 + points[:, 1:] ** 2)).mean(axis=1)]
        )

    found = round_content(potential, 0.5)
    expected = [np.polynomial.legendre.Legendre.basis(n)(0.0) * 0.5**n for n in range(13)]
    assert expected == pytest.approx(found.zonal[0], abs=1e-12)


def test_solid_harmonics_obey_laplace_and_are_found_again() -> None:
    """Each by itself, about a centre; a second difference of all is zero to its own error."""
    centre = np.array([0.1, -0.2, 0.3])

    def potential(points: Floats) -> Floats:
        return solid_harmonics((points - centre) / 0.7, 6)[1]

    found = spatial_content(potential, 0.7, (0.1, -0.2, 0.3))
    assert np.eye(49) == pytest.approx(found.harmonic, abs=1e-13)
    assert found.error.max() < 1e-12
    point, step = np.array([[0.3, 0.1, 0.6]]), 1e-2
    moved = [
        potential(point + sign * step * np.eye(3)[axis]) for axis in range(3) for sign in (-1, 1)
    ]
    laplacian = (sum(moved) - 6.0 * potential(point)) / step**2
    assert np.zeros((49, 1)) == pytest.approx(laplacian, abs=0.02)


def test_the_harmonic_2_0_is_that_of_a_trap() -> None:
    terms, values = solid_harmonics(np.array([[0.3, -0.4, 0.5]]), 2)
    assert (2 * 0.5**2 - 0.3**2 - 0.4**2) / 2 == pytest.approx(values[terms.index((2, 0)), 0])
    assert np.sqrt(3.0) / 2 * (0.3**2 - 0.4**2) == pytest.approx(values[terms.index((2, 2)), 0])
    assert np.sqrt(3.0) * 0.3 * -0.4 == pytest.approx(values[terms.index((2, -2)), 0])


def test_a_charge_within_the_circle_shows_in_the_error() -> None:
    """The potential is no sum of such terms there: both circles disagree."""

    def potential(points: Floats) -> Floats:
        return np.array([-np.log(np.hypot(points[:, 0] - 0.9, points[:, 1]))])

    assert planar_content(potential, 1.0).error.max() > 0.1
    assert planar_content(potential, 0.45).error.max() < 1e-12
