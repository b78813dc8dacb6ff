"""Potential and field of rings and lines against other ways to work them out."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.special import ellipe, ellipk, ellipkm1

from driftwell.boundary import ring_sources
from driftwell.kernels import kernel


@kernel
def far(r: float, z: float, b: float, c: float) -> float:
    return ring_sources.far_ring(r, z, b, c)


@kernel
def near(r: float, z: float, b: float, c: float) -> float:
    return ring_sources.near_ring(r, z, b, c)


@kernel
def push(r: float, z: float, b: float, c: float) -> tuple[float, float]:
    return ring_sources.ring_field(r, z, b, c)


def test_rings_have_the_potential_of_elliptic_integrals() -> None:
    """Against scipy: pi / (2 M) = K / l, from three to 1e-6 radii away."""
    for gap in (3.0, 2.0**-3, 2.0**-9, 2.0**-20):
        large2, small2 = (2.0 + gap) ** 2 + 4.0 * gap**2, gap**2 + 4.0 * gap**2
        expected = ellipkm1(small2 / large2) / math.sqrt(large2) / math.pi
        assert expected == pytest.approx(near(1.0 + gap, 2.0 * gap, 1.0, 0.0), rel=1e-14)
        if gap >= 1e-3:
            assert expected == pytest.approx(far(1.0 + gap, 2.0 * gap, 1.0, 0.0), rel=1e-14)


def test_rings_have_the_field_of_elliptic_integrals() -> None:
    """Against the usual form, L. D. Landau and E. M. Lifshitz (from memory), with scipy."""
    for r, z in ((0.5, 0.3), (1.5, 0.7), (0.99, 0.01), (3.0, -2.0), (0.01, 0.5)):
        large2, small2 = (r + 1.0) ** 2 + z**2, (r - 1.0) ** 2 + z**2
        m = 1.0 - small2 / large2
        scale = 1.0 / (math.pi * math.sqrt(large2))
        along = scale * z * ellipe(m) / small2
        outward = scale * (ellipk(m) - (1.0 - r**2 + z**2) / small2 * ellipe(m)) / (2.0 * r)
        found = push(r, z, 1.0, 0.0)
        assert outward == pytest.approx(found[0], rel=1e-12, abs=1e-14)
        assert along == pytest.approx(found[1], rel=1e-13)


def test_the_field_of_a_ring_is_continued_smoothly_to_the_axis() -> None:
    """Near the axis it grows like r, without loss of digits: -r/2 times dE_z/dz."""
    z, step = 0.5, 1e-4
    slope = (push(0.0, z + step, 1.0, 0.0)[1] - push(0.0, z - step, 1.0, 0.0)[1]) / (2.0 * step)
    assert 0.0 == push(0.0, z, 1.0, 0.0)[0]
    for r in (1e-3, 1e-6, 1e-9):
        assert -0.5 * slope == pytest.approx(push(r, z, 1.0, 0.0)[0] / r, rel=2e-6)


def test_near_and_far_agree_where_both_hold() -> None:
    random = np.random.default_rng(5)
    for r, z, b in random.uniform(0.1, 2.0, (50, 3)):
        assert near(r, z, b, 0.0) == pytest.approx(far(r, z, b, 0.0), rel=1e-13)
