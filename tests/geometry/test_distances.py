"""Distances to bodies against closed forms and all triangles, and what any distance obeys."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.geometry.body_table import body_table
from driftwell.geometry.distance import distances, plane_distances
from driftwell.geometry.outline import arc, arc_through, circle, line, outline, rectangle
from driftwell.geometry.solid import Extruded, Frame, Mesh, Revolved, Solid
from tests.geometry.solids import (
    FRAME,
    SOLIDS,
    ball,
    brick,
    mesh_brick,
    rounded,
    star_mesh,
)

ROUNDING = 2e-15
"""Of bodies and places of the order of 1 m."""


def places(n: int, seed: int, size: float = 1.5) -> np.ndarray:
    return np.random.default_rng(seed).uniform(-size, size, (n, 3))


def to_box(places: np.ndarray, half: tuple[float, ...]) -> np.ndarray:
    """Signed distance to a box of any number of axes about the origin; common knowledge."""
    over = np.abs(places) - np.array(half)
    outside = np.linalg.norm(np.maximum(over, 0.0), axis=1)
    return outside + np.minimum(over.max(axis=1), 0.0)


def found(solid: Solid, points: np.ndarray) -> np.ndarray:
    return distances(body_table([[solid]]), points)[0]


def test_a_ball_is_as_far_as_its_centre_less_its_radius() -> None:
    points = places(2000, 1)
    expected = np.linalg.norm(points - FRAME.origin, axis=1) - 0.7
    assert np.abs(expected - found(ball(0.7, FRAME), points)).max() < ROUNDING


def test_a_torus_is_as_far_as_its_circle_less_its_small_radius() -> None:
    points = places(2000, 2)
    own = FRAME.inward(points)
    ring = np.hypot(np.hypot(own[:, 0], own[:, 1]) - 0.8, own[:, 2] - 0.1)
    assert np.abs(ring - 0.25 - found(SOLIDS["torus"], points)).max() < ROUNDING


def test_a_tube_is_a_box_in_radius_and_length() -> None:
    points = places(2000, 3)
    flat = np.stack([np.hypot(points[:, 0], points[:, 1]) - 0.6, points[:, 2]], axis=1)
    assert np.abs(to_box(flat, (0.1, 0.6)) - found(SOLIDS["tube"], points)).max() < ROUNDING


@pytest.mark.parametrize("kind", ["extruded", "mesh"])
def test_a_box_is_exact_inside_and_outside(kind: str) -> None:
    half, points = (0.5, 0.3, 0.8), places(4000, 4)
    solid = brick(half, FRAME) if kind == "extruded" else mesh_brick(half, FRAME)
    expected = to_box(FRAME.inward(points), half)
    assert (expected < 0.0).any()
    assert np.abs(expected - found(solid, points)).max() < ROUNDING


def test_arcs_round_a_box_off_by_their_radius() -> None:
    points = places(4000, 5)
    expected = to_box(FRAME.inward(points)[:, :2], (0.4, 0.2)) - 0.1
    # inside the inner rectangle the nearest place is the same, so the closed form holds everywhere
    assert np.abs(expected - found(SOLIDS["rod"], points)).max() < ROUNDING


def test_a_hole_is_outside() -> None:
    points = places(2000, 6)
    r = np.hypot(points[:, 0] - 0.2, points[:, 1] - 0.1)
    plane = np.maximum(to_box(points[:, :2], (1.0, 1.0)), 0.4 - r)
    along = np.abs(points[:, 2]) - 0.05
    inside = (plane <= 0.0) & (along <= 0.0)
    expected = np.where(
        inside,
        np.maximum(plane, along),
        np.hypot(np.maximum(plane, 0.0), np.maximum(along, 0.0)),
    )
    # two surfaces bound the plate in its plane: outside both, the nearer one counts
    assert np.abs(expected - found(SOLIDS["plate with a hole"], points)).max() < ROUNDING


def test_thin_bodies_have_no_inside() -> None:
    points = places(2000, 7)
    own = FRAME.inward(points)
    beyond = np.maximum(np.hypot(own[:, 0], own[:, 1]) - 0.8, 0.0)
    assert np.abs(np.hypot(beyond, own[:, 2]) - found(SOLIDS["sheet"], points)).max() < ROUNDING
    dome = found(SOLIDS["thin dome"], points)
    above = points[:, 2] >= 0.0
    shell = np.abs(np.linalg.norm(points, axis=1) - 0.6)
    rim = np.hypot(np.hypot(points[:, 0], points[:, 1]) - 0.6, points[:, 2])
    assert np.abs(np.where(above, shell, rim) - dome).max() < ROUNDING


def nearest_of_all(mesh: Mesh, points: np.ndarray) -> np.ndarray:
    """Distance by all triangles: their planes where the foot lies within, else their edges."""
    best = np.full(len(points), np.inf)
    for a, b, c in mesh.vertices[mesh.triangles]:
        n = np.cross(b - a, c - a)
        n /= np.linalg.norm(n)
        height = (points - a) @ n
        foot = points - height[:, None] * n
        inner = np.ones(len(points), dtype=bool)
        for p, q in ((a, b), (b, c), (c, a)):
            inner &= np.cross(q - p, foot - p) @ n >= 0.0
            part = np.clip((points - p) @ (q - p) / ((q - p) @ (q - p)), 0.0, 1.0)
            best = np.minimum(best, np.linalg.norm(points - p - part[:, None] * (q - p), axis=1))
        best = np.where(inner, np.minimum(best, np.abs(height)), best)
    return best


def winding(mesh: Mesh, points: np.ndarray) -> np.ndarray:
    """How often the mesh winds about a point: 1 inside, 0 outside.

    Solid angles by A. van Oosterom and J. Strackee, IEEE Trans. Biomed. Eng. 30 (1983) 125 (from
    memory).
    """
    total = np.zeros(len(points))
    for triangle in mesh.vertices[mesh.triangles]:
        a, b, c = (corner - points for corner in triangle)
        la, lb, lc = (np.linalg.norm(each, axis=1) for each in (a, b, c))
        over = np.einsum("ij,ij->i", a, np.cross(b, c))
        under = la * lb * lc + lc * (a * b).sum(1) + la * (b * c).sum(1) + lb * (c * a).sum(1)
        total += 2.0 * np.arctan2(over, under)
    return total / (4.0 * math.pi)


def test_a_mesh_agrees_with_all_its_triangles_and_its_winding_number() -> None:
    mesh = star_mesh(np.random.default_rng(3), 7, 11)
    rng = np.random.default_rng(8)
    # near edges and corners the sign is hardest: half of the places lie about them
    near = mesh.vertices[rng.integers(0, len(mesh.vertices), 1500)]
    points = np.concatenate([places(1500, 9), near + rng.normal(0.0, 0.05, near.shape)])
    inside = np.round(winding(mesh, points)) == 1
    assert 200 < inside.sum() < 2500
    expected = np.where(inside, -1.0, 1.0) * nearest_of_all(mesh, points)
    assert np.abs(expected - found(mesh, points)).max() < 2e-15


@pytest.mark.parametrize("name", SOLIDS)
def test_a_distance_changes_by_no_more_than_the_way(name: str) -> None:
    table = body_table([[SOLIDS[name]]])
    rng = np.random.default_rng(10)
    first = places(3000, 11)
    second = first + rng.normal(size=first.shape) * rng.choice([1e-6, 1e-2, 1.0], (3000, 1))
    way = np.linalg.norm(first - second, axis=1)
    change = np.abs(distances(table, first)[0] - distances(table, second)[0])
    assert (change <= way + ROUNDING).all()
    assert change.max() > 0.5 * way[np.argmax(change)]


@pytest.mark.parametrize("name", SOLIDS)
def test_there_is_a_surface_at_the_distance(name: str) -> None:
    """Stepping down the slope of the distance ends on the surface, no farther away than told."""
    table = body_table([[SOLIDS[name]]])
    start = places(200, 12)
    told = distances(table, start)[0]
    points, h = start.copy(), 1e-6
    for _ in range(4):
        now = distances(table, points)[0]
        slope = np.stack(
            [
                (distances(table, points + d)[0] - distances(table, points - d)[0]) / (2.0 * h)
                for d in h * np.eye(3)
            ],
            axis=1,
        )
        points = points - now[:, None] * slope
    reached = np.abs(distances(table, points)[0]) < 1e-9
    assert reached.mean() > 0.9
    way = np.linalg.norm(points - start, axis=1)
    assert (np.abs(way - np.abs(told))[reached] < 1e-4).mean() > 0.9


def test_the_nearest_of_many_and_its_owner_are_told() -> None:
    centres = np.random.default_rng(13).uniform(-1.0, 1.0, (60, 3))
    table = body_table([[ball(0.02, Frame(c)), ball(0.03, Frame(c + 3.0))] for c in centres])
    points = places(3000, 14)
    each = np.minimum(
        np.linalg.norm(points[:, None] - centres, axis=2) - 0.02,
        np.linalg.norm(points[:, None] - centres - 3.0, axis=2) - 0.03,
    )
    distance, owner = distances(table, points)
    assert np.abs(each.min(axis=1) - distance).max() < ROUNDING
    assert (each.argmin(axis=1) == owner).all()


def test_without_bodies_everything_is_far() -> None:
    distance, owner = distances(body_table([]), places(3, 15))
    assert np.isinf(distance).all()
    assert (owner == -1).all()


def test_many_pieces_agree_with_the_circle_they_make() -> None:
    corners = [(math.cos(t), math.sin(t)) for t in np.linspace(0.0, 2.0 * math.pi, 1001)]
    corners[-1] = corners[0]
    middle = [(math.cos(t), math.sin(t)) for t in math.pi * (2 * np.arange(1000) + 1) / 1000]
    loop = [arc_through(a, m, b) for a, m, b in zip(corners, middle, corners[1:], strict=False)]
    solid = Extruded(outline([loop], solid=True), np.inf)
    points = places(3000, 16)
    expected = np.hypot(points[:, 0], points[:, 1]) - 1.0
    assert np.abs(expected - found(solid, points)).max() < 1e-10  # centres through three points


def test_rays_through_corners_count_once() -> None:
    diamond = outline(
        [
            [
                line((1.0, 0.0), (0.0, 1.0)),
                line((0.0, 1.0), (-1.0, 0.0)),
                arc((-1.0, 0.0), (0.0, -1.0), (0.0, 0.0), 0.5 * math.pi),
                line((0.0, -1.0), (1.0, 0.0)),
            ]
        ],
        solid=True,
    )
    table = body_table([[Extruded(diamond, np.inf)]])
    x = np.linspace(-2.0, 2.0, 41)
    x = x[np.abs(np.abs(x) - 1.0) > 1e-9]
    for height, inside in ((0.0, np.abs(x) < 1.0), (1.0, x > 9.0), (-1.0, x > 9.0)):
        points = np.stack([x, np.full_like(x, height)], axis=1)
        distance = plane_distances(table, points, axisymmetric=False)[0]
        off = distance != 0.0
        assert ((distance < 0.0) == inside)[off].all()


def test_a_drawing_is_asked_in_its_own_plane() -> None:
    drawn = rounded((0.4, 0.2), 0.1).shifted(1.0, 0.0)
    points = np.abs(places(500, 17))[:, :2]
    expected = to_box(points - [1.0, 0.0], (0.4, 0.2)) - 0.1
    for solid in (Revolved(drawn), Extruded(drawn, np.inf)):
        about = isinstance(solid, Revolved)
        distance, owner = plane_distances(body_table([[solid]]), points, axisymmetric=about)
        assert np.abs(expected - distance).max() < ROUNDING
        assert (owner == 0).all()


def test_a_mesh_without_area_is_refused() -> None:
    flat = Mesh(np.zeros((3, 3)), np.array([[0, 1, 2]]), closed=False)
    with pytest.raises(ValueError, match="no triangle has an area"):
        body_table([[flat]])


def test_corners_of_a_cut_arc_do_not_leak() -> None:
    table = body_table([[Extruded(circle((0.0, 0.0), 1.0), np.inf)]])
    heights = np.array([0.0, 1.0, -1.0, np.nextafter(1.0, 0.0)])
    points = np.stack([np.full(4, -3.0), heights], axis=1)
    assert (plane_distances(table, points, axisymmetric=False)[0] > 1.9).all()
    assert rectangle((0.0, 0.0), (1.0, 1.0)).solid


def test_the_axis_of_a_body_that_is_turned_about_it_is_no_surface() -> None:
    """A rod of 1 mm radius and 2 mm length, on its axis and beside it: the nearest end, inside."""
    table = body_table([[Revolved(rectangle((0.0, 0.0), (1e-3, 2e-3)))]])
    points = np.array([[0.0, 0.0, 1e-4], [0.0, 0.0, 1e-3], [1e-5, 0.0, 1e-3], [0.0, 0.0, -1e-4]])
    expected = [-1e-4, -1e-3, -9.9e-4, 1e-4]
    assert expected == pytest.approx(distances(table, points)[0].tolist(), rel=1e-12, abs=0.0)
