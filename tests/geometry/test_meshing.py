"""Bodies as triangles: on their surfaces, as symmetric as they are, and sound where cut by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.spatial import KDTree

from driftwell.geometry.mesh_faults import mesh_faults
from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.outline import arc, circle, line, outline, rectangle
from driftwell.geometry.solid import Extruded, Mesh, Revolved
from driftwell.geometry.winding import winding

SPHERE = Revolved(outline([[arc((0, -1), (0, 1), (0, 0), math.pi)]], solid=True))
TORUS = Revolved(circle((2.0, 0.0), 0.5))
BOX = Extruded(rectangle((-1, -2), (1, 2)), 0.5)
DISC = Revolved(outline([[line((0, 0), (1, 0))]], solid=False))
APERTURE = Extruded(rectangle((-2, -2), (2, 2)).joined(circle((0.0, 0.0), 0.5)), 0.1)
ROUND = Extruded(circle((0.0, 0.0), 1.0), 0.5)
HOLED = Extruded(rectangle((-2, -2), (2, 2)).joined(circle((0.3, 0.2), 0.5)), 0.1)


def areas(mesh):
    corners = mesh.vertices[mesh.triangles]
    return 0.5 * np.linalg.norm(
        np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1
    )


@pytest.mark.parametrize(
    "solid", [SPHERE, TORUS, BOX, DISC], ids=["sphere", "torus", "box", "disc"]
)
@pytest.mark.parametrize("size", [0.4, 0.23])
def test_mirror_planes_survive(solid, size):
    """Every triangle of a body that its three planes mirror has its image among the triangles."""
    mesh = mesh_of(solid, size, math.pi / 10)
    middles = mesh.vertices[mesh.triangles].mean(axis=1)
    tree = KDTree(middles)
    for axis in range(3):
        apart, _ = tree.query(middles * np.where(np.arange(3) == axis, -1.0, 1.0))
        assert np.max(apart) < 1e-12


def test_vertices_lie_on_the_surface():
    """Not made fair, all corners lie on sphere and torus to rounding."""
    ball = mesh_of(SPHERE, 0.3).vertices
    assert np.linalg.norm(ball, axis=1) == pytest.approx(1.0, abs=1e-14)
    ring = mesh_of(TORUS, 0.3).vertices
    section = np.hypot(np.hypot(ring[:, 0], ring[:, 1]) - 2.0, ring[:, 2])
    assert section == pytest.approx(0.5, abs=1e-14)


@pytest.mark.parametrize(
    ("solid", "volume"), [(SPHERE, 4 / 3 * math.pi), (TORUS, math.pi**2)], ids=["sphere", "torus"]
)
def test_fair_facets_gain_an_order(solid, volume):
    """Fair facets miss the volume by a tenth of what facets with corners on the surface miss."""
    missed = []
    for fair in (False, True):
        corners = (mesh := mesh_of(solid, 0.2, math.pi / 20, fair=fair)).vertices[mesh.triangles]
        found = np.einsum("ij,ij->", corners[:, 0], np.cross(corners[:, 1], corners[:, 2])) / 6.0
        missed.append(abs(found / volume - 1.0))
    assert missed[1] < 0.1 * missed[0]
    assert missed[0] < 0.03


def test_stations_crowd_at_edges_by_the_power_asked_for():
    """The first edge of a box of n divisions is (2/n)^grade of half its length."""
    mesh = mesh_of(BOX, 0.25, grade=3.0)
    along = np.unique(np.round(mesh.vertices[:, 1], 12))
    assert 16 + 1 == len(along)
    assert 2.0 * (2.0 / 16.0) ** 3 == pytest.approx(along[1] - along[0], rel=1e-9)


@pytest.mark.parametrize("size", [0.2, 0.5])
def test_an_area_with_holes_is_filled(size):
    """Both caps of a holed plate have the area of the outline, and the mesh is sound."""
    mesh = mesh_of(HOLED, size, math.pi / 16)
    flat = np.all(np.abs(mesh.vertices[mesh.triangles][:, :, 2] - 0.1) < 1e-12, axis=1)
    polygon = 0.5 * 32 * math.sin(2.0 * math.pi / 32) * 0.25
    assert 16.0 - math.pi / 4.0 == pytest.approx(areas(mesh)[flat].sum(), rel=5e-3)
    assert 16.0 - polygon >= areas(mesh)[flat].sum() - 5e-3
    assert mesh_faults(mesh) == []


def test_holes_that_come_close_are_filled():
    """Where holes leave a narrow bridge, edges beside it are halved until it can be filled."""
    area = rectangle((-2, -2), (2, 2))
    for x, radius in ((0.0, 0.5), (1.02, 0.5), (-1.2, 0.66)):
        area = area.joined(circle((x, 0.0), radius))
    mesh = mesh_of(Extruded(area, 0.1), 0.4)
    assert mesh_faults(mesh) == []


def test_a_given_mesh_is_halved_to_size():
    """Long edges of a given mesh are halved until none is longer; it stays closed and the same."""
    coarse = mesh_of(BOX, 10.0)
    fine = mesh_of(coarse, 0.3)
    corners = fine.vertices[fine.triangles]
    assert np.max(np.linalg.norm(corners - np.roll(corners, 1, axis=1), axis=2)) <= 0.3
    assert areas(coarse).sum() == pytest.approx(areas(fine).sum(), rel=1e-12)
    assert mesh_faults(fine) == []


def test_a_body_without_end_has_no_mesh():
    """What is the same at every z cannot be cut into triangles."""
    with pytest.raises(ValueError, match="without end"):
        mesh_of(Extruded(circle((0, 0), 1.0), math.inf), 0.3)


def test_a_mesh_goes_round_what_is_inside():
    """The winding number is 1 inside, 0 outside."""
    mesh = mesh_of(TORUS, 0.3)
    points = np.array([[2.0, 0.0, 0.1], [0.0, 0.0, 0.0], [0.0, -2.2, 0.0], [3.0, 0.0, 0.0]])
    found = winding(mesh.vertices[mesh.triangles], points)
    assert np.array([1.0, 0.0, 1.0, 0.0]) == pytest.approx(found, abs=1e-12)


def test_faults_say_how_many_and_where():
    """A tetrahedron spoiled by hand: gaps, slivers, third triangles at an edge, no numbers."""
    vertices = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1.0]])
    triangles = np.array([[0, 2, 1], [0, 1, 3], [1, 2, 3], [2, 0, 3]])
    assert mesh_faults(Mesh(vertices, triangles, True)) == []
    apart = np.concatenate([vertices, [[0.0, 0.0, 1.0 + 1e-8]]])
    open_mesh = Mesh(apart, np.where(triangles == [[9], [9], [9], [3]], 4, triangles), True)
    assert [
        "4 open edges so that it bounds no volume; the first at (0, 0, 0.5) m",
        "1 corner next to another that should be the same; at (0, 0, 1) m",
    ] == mesh_faults(open_mesh)
    flat = np.concatenate([vertices, [[0.5, 0.5, 0.0]]])
    sliver = mesh_faults(Mesh(flat, np.concatenate([triangles, [[1, 2, 4]]]), True))
    assert "1 triangle of no area, or next to none; at (0.5, 0.5, 0) m" in sliver
    assert "1 edge where more than two triangles meet; at (0.5, 0.5, 0) m" in sliver
    nowhere = np.where(vertices == 1.0, np.nan, vertices)
    assert ["corner 2 is not at a finite place"] == mesh_faults(Mesh(nowhere, triangles, True))
    assert ["there are no triangles"] == mesh_faults(Mesh(vertices, triangles[:0], True))
