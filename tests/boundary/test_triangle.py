"""The evenly charged triangle, against adaptive quadrature of what its closed form stands for."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import dblquad, quad

from driftwell.boundary.triangle import (
    BARYCENTRIC7,
    FAR,
    FARTHER,
    WEIGHTS7,
    panel_field_sums,
    panel_rows,
    panel_sums,
)

CORNERS = np.array([[0.1, 0.2, 0.3], [1.1, 0.3, 0.2], [0.4, 0.9, 0.5]])
SLIVER = np.array([[0.0, 0.0, 0.0], [1.0, 0.0, 0.0], [0.3, 0.001, 0.0]])


def _potential(corners, points):
    out = np.empty((len(points), 1))
    panel_sums(panel_rows(corners[None]), np.ones((1, 1)), np.array(points, dtype=float), out)
    return out[:, 0]


def _field(corners, points):
    out = np.empty((len(points), 1, 3))
    panel_field_sums(panel_rows(corners[None]), np.ones((1, 1)), np.array(points, dtype=float), out)
    return out[:, 0]


def _by_angles(corners, point):
    """Integral over the angle about the point's foot; the one over the distance is elementary."""
    a, b, c = corners
    normal = np.cross(b - a, c - a)
    normal /= np.linalg.norm(normal)
    d = abs(np.dot(point - a, normal))
    foot = point - normal * np.dot(point - a, normal)
    total = 0.0
    for start, end in ((a, b), (b, c), (c, a)):
        twice = np.dot(np.cross(start - foot, end - foot), normal)
        if abs(twice) < 1e-14:
            continue
        nearest = np.dot(foot - start, end - start) / np.dot(end - start, end - start)

        def over_edge(s, start=start, end=end, twice=twice):
            rho2 = np.sum((start + s * (end - start) - foot) ** 2)
            return twice / rho2 * (np.sqrt(rho2 + d * d) - d)

        breaks = [nearest] if 0.0 < nearest < 1.0 else None
        total += quad(over_edge, 0.0, 1.0, points=breaks, epsabs=1e-13, epsrel=1e-12, limit=400)[0]
    return total


def _places(corners):
    a, b, c = corners
    middle, normal = corners.mean(axis=0), np.cross(b - a, c - a)
    return {
        "above": middle + 0.7 * normal,
        "close above": middle + 1e-3 * normal,
        "in it": 0.5 * a + 0.2 * b + 0.3 * c,
        "middle": middle,
        "on an edge": 0.3 * a + 0.7 * b,
        "corner": c,
        "on an edge's line": a + 1.7 * (b - a),
        "above an edge's line": a - 0.4 * (c - a) + 0.01 * normal,
        "in the plane": 2.0 * a - 0.3 * b - 0.7 * c,
        "beside": middle + np.array([1.0, 2.0, 3.0]),
    }


@pytest.mark.parametrize("corners", [CORNERS, SLIVER], ids=["wide", "sliver"])
@pytest.mark.parametrize("place", _places(CORNERS))
def test_the_potential_is_the_integral_everywhere(corners, place):
    """Above, on, beside and in the plane of a triangle the potential is the adaptive quadrature."""
    point = _places(corners)[place]
    assert _by_angles(corners, point) == pytest.approx(
        _potential(corners, [point])[0], rel=2e-9 if place == "beside" else 1e-10
    )


def test_the_potential_and_field_are_the_plain_double_integrals():
    """Without any reduction, scipy's double integral gives the same potential and field."""
    a, b, c = CORNERS
    point = np.array([0.5, 0.1, 0.9])
    jacobian = np.linalg.norm(np.cross(b - a, c - a))

    def integrand(t, s, axis):
        r = point - a - s * (b - a) - t * (c - a)
        length = np.linalg.norm(r)
        return jacobian * (1.0 / length if axis < 0 else r[axis] / length**3)

    wanted = [
        dblquad(integrand, 0.0, 1.0, 0.0, lambda s: 1.0 - s, args=(axis,), epsabs=1e-11)[0]
        for axis in (-1, 0, 1, 2)
    ]
    assert wanted[0] == pytest.approx(_potential(CORNERS, [point])[0], rel=1e-9)
    assert wanted[1:] == pytest.approx(list(_field(CORNERS, [point])[0]), rel=1e-9, abs=1e-11)


@pytest.mark.parametrize("corners", [CORNERS, SLIVER], ids=["wide", "sliver"])
@pytest.mark.parametrize("distance", [0.05, 1.0, 4.0, 20.0, 100.0])
def test_the_field_is_the_gradient_of_the_potential(corners, distance):
    """Fields near and far are minus the slope of the potential, by differences of fourth order."""
    size = np.linalg.norm(corners[1] - corners[0])
    point = corners.mean(axis=0) + distance * size * np.array([0.36, 0.48, 0.8])
    step = 2e-3 * distance * size
    found = _field(corners, [point])[0]
    for axis in range(3):
        shift = np.zeros(3)
        shift[axis] = step
        p = _potential(corners, [point + k * shift for k in (1, -1, 2, -2)])
        slope = (8.0 * (p[0] - p[1]) - (p[2] - p[3])) / (12.0 * step)
        assert -slope == pytest.approx(found[axis], abs=3e-8 * np.linalg.norm(found))


def test_points_take_the_triangles_place_without_a_seam():
    """Where the closed form gives way to points, and these to fewer, nothing jumps beyond 2e-8."""
    cut = np.array(CORNERS)[None]
    for _ in range(3):
        a, b, c = cut[:, 0], cut[:, 1], cut[:, 2]
        ab, bc, ca = (a + b) / 2, (b + c) / 2, (c + a) / 2
        parts = ((a, ab, ca), (ab, b, bc), (ca, bc, c), (ab, bc, ca))
        cut = np.concatenate([np.stack(part, axis=1) for part in parts])
    points = np.einsum("pk,tkx->tpx", BARYCENTRIC7, cut).reshape(-1, 3)
    weights = np.tile(WEIGHTS7, len(cut)) * panel_rows(CORNERS[None])[0, 21] / len(cut)
    size = panel_rows(CORNERS[None])[0, 22]
    directions = np.random.default_rng(4).normal(size=(30, 3))
    directions /= np.linalg.norm(directions, axis=1)[:, None]
    for distance, most in ((FAR * 0.999, 1e-12), (FAR * 1.001, 1e-8), (FARTHER * 1.001, 2e-8)):
        places = CORNERS.mean(axis=0) + distance * size * directions
        apart = np.linalg.norm(points[None] - places[:, None], axis=2)
        wanted = np.sum(weights / apart, axis=1)
        assert np.max(np.abs(_potential(CORNERS, places) / wanted - 1.0)) < most


def test_the_field_on_the_triangle_is_the_mean_of_both_sides():
    """Just above and below the field jumps by 4 pi along the normal; between it is the mean."""
    middle, normal = (
        CORNERS.mean(axis=0),
        np.cross(CORNERS[1] - CORNERS[0], CORNERS[2] - CORNERS[0]),
    )
    normal /= np.linalg.norm(normal)
    above, on, below = _field(CORNERS, [middle + 1e-9 * normal, middle, middle - 1e-9 * normal])
    assert 4.0 * np.pi == pytest.approx(np.dot(above - below, normal), rel=1e-7)
    assert 0.5 * (above + below) == pytest.approx(on, abs=1e-6)


def test_nothing_is_infinite_on_edges_and_corners():
    """On an edge or a corner, where the field has no bound, all numbers stay finite."""
    places = [CORNERS[0], CORNERS[1], CORNERS[2], CORNERS[:2].mean(axis=0)]
    assert np.all(np.isfinite(_field(CORNERS, places)))
