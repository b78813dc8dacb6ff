"""The region that electrodes enclose, by rays, against what is seen at a glance."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.solved.region import Box, enclosed

Floats = NDArray[np.float64]


def spheres(*balls: tuple[tuple[float, ...], float]) -> object:
    def distance(points: Floats) -> Floats:
        each = [np.linalg.norm(points - np.array(c), axis=1) - a for c, a in balls]
        return np.min(each, axis=0)

    return distance


def tube(points: Floats) -> Floats:
    """Wall of a tube, r from 5 to 6 mm, z from -20 to 20 mm, in mm."""
    dr = np.abs(points[:, 0] - 5.5) - 0.5
    dz = np.abs(points[:, 1]) - 20.0
    outside = np.hypot(np.maximum(dr, 0.0), np.maximum(dz, 0.0))
    return np.asarray(outside + np.minimum(np.maximum(dr, dz), 0.0))


def test_a_tube_encloses_its_bore_and_a_radius_beyond_its_ends() -> None:
    found = enclosed(tube, Box(np.array([5.0, -20.0]), np.array([6.0, 20.0])), axisymmetric=True)
    np.testing.assert_allclose(found.low, [0.0, -25.0], atol=1e-3)
    np.testing.assert_allclose(found.high, [5.0, 25.0], atol=1e-3)


def test_a_shell_closed_at_both_ends_ends_the_region_at_its_inner_face() -> None:
    def shell(points: Floats) -> Floats:
        return np.asarray(1.0 - np.abs(np.linalg.norm(points, axis=1) - 10.0)) * -1.0

    box = Box(np.array([0.0, -11.0]), np.array([11.0, 11.0]))
    found = enclosed(shell, box, axisymmetric=True)
    np.testing.assert_allclose(found.high, [9.0, 9.0], atol=1e-3)
    np.testing.assert_allclose(found.low, [0.0, -9.0], atol=1e-3)


def test_four_rods_enclose_the_square_between_them() -> None:
    rods = spheres(((2, 0), 1.0), ((-2, 0), 1.0), ((0, 2), 1.0), ((0, -2), 1.0))
    found = enclosed(rods, Box(np.array([-3.0, -3.0]), np.array([3.0, 3.0])), False)  # type: ignore[arg-type]
    assert (found.high >= 1.0).all()
    assert (found.high < 2.0).all()
    np.testing.assert_allclose(found.low, -found.high, atol=0.05)


def test_around_a_lone_sphere_the_region_reaches_beyond_it() -> None:
    ball = spheres(((0, 0, 0), 1.0))
    found = enclosed(ball, Box(-np.ones(3), np.ones(3)), axisymmetric=False)  # type: ignore[arg-type]
    np.testing.assert_allclose(found.low, -2.0)
    np.testing.assert_allclose(found.high, 2.0)


def test_a_centre_within_an_electrode_looks_out_beyond_it() -> None:
    def between(points: Floats) -> Floats:
        r = np.linalg.norm(points, axis=1)
        return np.minimum(r - 1.0, 5.0 - r)

    found = enclosed(between, Box(-np.full(3, 6.0), np.full(3, 6.0)), axisymmetric=False)
    np.testing.assert_allclose(found.high, 5.0, rtol=0.01)
