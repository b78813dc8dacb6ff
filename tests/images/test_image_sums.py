"""Sums over images: force from energy, symmetry, bits, and what stays bounded."""

from __future__ import annotations

from dataclasses import dataclass

import numba
import numpy as np
import pytest

from driftwell.errors import ScenarioError
from driftwell.geometry.outline import Outline, arc
from driftwell.geometry.solid import Extruded, Revolved
from driftwell.images.electrodes import electrode_images, triangles_of
from driftwell.images.gap_sum import GapImages
from driftwell.images.image_sum import Images
from driftwell.images.mirror_sum import plane_images, sphere_images
from driftwell.images.panel_matrix import influence
from driftwell.images.panel_sum import PanelImages
from driftwell.images.tube_sum import TubeImages
from tests.images.images_at import box, cloud, energy, images_at

SIZE = 0.35
"""Half side of the clouds; the conductors are about 1 away."""


@dataclass(frozen=True)
class Case:
    """Conductors about the clouds, and how well the field is their energy's gradient."""

    name: str
    images: Images


CASES = [
    Case("plane", plane_images(np.array([0.1, 0.0, -0.8]), np.array([0.0, 0.6, 0.8]), 0.0)),
    Case("plane, closest", plane_images(np.array([0, 0, -0.4]), np.array([0, 0, 1.0]), 0.2)),
    Case("sphere", sphere_images(np.array([0.1, 0.0, 0.0]), 1.0, 0.0)),
    Case("sphere, closest", sphere_images(np.zeros(3), 0.65, 0.1)),
    Case("gap", GapImages(np.array([0.1, 0.0, -0.55]), np.array([0.0, 0.6, 0.8]), 1.2, 0.0)),
    Case("gap, closest", GapImages(np.array([0.0, 0.0, -0.4]), np.array([0, 0, 1.0]), 0.8, 0.1)),
    Case("wide gap", GapImages(np.array([0.0, 0.0, -0.36]), np.array([0, 0, 1.0]), 0.72, 0.0)),
    Case("tube", TubeImages(1, np.array([0.1, 0.05, -0.2]), 1.0, 0.9)),
    Case("tube, beyond its reach", TubeImages(2, np.zeros(3), 0.45, 0.6)),
    Case("cube of triangles", PanelImages(box(4))),
]
each_case = pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)


@each_case
def test_the_field_is_minus_the_gradient_of_the_energy(case: Case) -> None:
    """By differences of the energy of all charges, extrapolated: 3e-9 of the largest force."""
    place, charge = cloud(12, SIZE)
    if "closest" in case.name:
        place[2, 0] = -0.41  # just beyond the plane, or near the sphere
    force = charge * images_at(case.images, place, charge)[:3]
    for i in (0, 5):
        for axis in range(3):
            slopes = []
            for h in (2e-4, 1e-4):
                ends = []
                for sign in (1.0, -1.0):
                    moved = place.copy()
                    moved[axis, i] += sign * h
                    ends.append(energy(case.images, moved, charge))
                slopes.append((ends[0] - ends[1]) / (2.0 * h))
            slope = (4.0 * slopes[1] - slopes[0]) / 3.0
            assert -slope == pytest.approx(force[axis, i], abs=3e-9 * np.abs(force).max())


@each_case
def test_what_one_charge_does_to_another_is_what_that_does_to_it(case: Case) -> None:
    """G(x, x') = G(x', x), from potentials of each alone at both places."""
    place, _ = cloud(2, SIZE, seed=9)
    first = images_at(case.images, place, [1.0, 0.0])[3, 1]
    second = images_at(case.images, place, [0.0, 1.0])[3, 0]
    tolerance = 1e-7 if case.name == "tube" else 1e-12
    if "tube" not in case.name:  # whose length of charges that are none is not looked at
        assert first == pytest.approx(second, rel=tolerance)
    assert first < 0.0
    together = images_at(case.images, place, [1.0, 1.0])[3]
    alone = [images_at(case.images, place[:, [k]], [1.0])[3, 0] for k in (0, 1)]
    assert together[0] - alone[0] == pytest.approx(together[1] - alone[1], rel=1e-6)


@pytest.mark.skipif(numba.config.NUMBA_NUM_THREADS < 2, reason="needs two threads")
@pytest.mark.parametrize("n", [1, 13, 600])
@each_case
def test_the_bits_do_not_depend_on_the_threads(case: Case, n: int) -> None:
    place, charge = cloud(n, SIZE)
    one = images_at(case.images, place, charge, threads=1)
    two = images_at(case.images, place, charge, threads=2)
    assert np.isfinite(one).all()
    assert one.tobytes() == two.tobytes()


@each_case
def test_a_charge_that_is_lost_is_felt_by_none_and_feels_numbers(case: Case) -> None:
    """Wherever it lies: on the surface, or far away, as its charge is zero."""
    place, charge = cloud(10, SIZE)
    expected = images_at(case.images, place[:, 1:], charge[1:])
    charge[0] = 0.0
    for spot in ((0.1, 0.0, -0.8), (0.0, 0.0, -0.4), (0.65, 0.0, 0.0), (1.1, 0.0, 0.0)):
        place[:, 0] = spot
        found = images_at(case.images, place, charge)
        assert np.isfinite(found).all()
        assert expected == pytest.approx(found[:, 1:], rel=1e-10, abs=1e-12)


def test_the_force_stops_growing_within_the_closest_distance() -> None:
    """K q / (4 d^2) d^3 / (d^2 + c^2)^(3/2), whose largest is at c / 2^(1/2); beyond the plane it
    turns round."""
    c = 0.02
    images = plane_images(np.zeros(3), np.array([0.0, 0.0, 1.0]), 2.0 * c)
    for d in (-0.5 * c, 0.1 * c, c, 10.0 * c):
        found = images_at(images, np.array([[0.0], [0.0], [d]]), 1.0)[:, 0]
        assert -d / (4.0 * (d * d + c * c) ** 1.5) == pytest.approx(found[2], rel=1e-12)
        assert -1.0 / (2.0 * np.hypot(d, c)) == pytest.approx(found[3], rel=1e-12)


def test_a_tube_s_force_stays_bounded_up_to_the_wall_and_beyond() -> None:
    images = TubeImages(2, np.zeros(3), 1.0, 0.8)
    r = np.array([0.5, 0.75, 0.95, 1.0, 1.2, 30.0])
    found = np.array([images_at(images, np.array([[x], [0.0], [0.0]]), 1.0)[:, 0] for x in r])
    assert (np.diff(found[:, 3]) < 0.0).all()
    assert (found[:, 0] >= 0.0).all()
    assert found[:, 0].max() < 8.0
    assert found[4, 0] < 0.1 * found[2, 0]


def test_a_tube_says_where_charges_are_spread_beyond_its_sum() -> None:
    images = TubeImages(2, np.zeros(3), 1e-3, 0.9)
    place = np.zeros((3, 2))
    place[2, 1] = 60e-3
    assert images.doubt(place, np.ones(2)) is None
    place[2, 1] = 70e-3
    assert "spread over 70 radii" in str(images.doubt(place, np.ones(2)))
    assert images.doubt(place, np.array([1.0, 0.0])) is None


def test_a_plane_says_where_its_force_is_weakened() -> None:
    images = plane_images(np.zeros(3), np.array([0.0, 0.0, 1.0]), 2e-6)
    place = np.zeros((3, 10))
    place[2] = 1e-3
    assert images.doubt(place, np.ones(10)) is None
    place[2, :3] = 2e-6
    assert "30 % of the charges are so near the conductor" in str(images.doubt(place, np.ones(10)))


def test_a_sphere_says_so_of_charges_in_its_middle_too() -> None:
    """There the force goes with (a^2 + s^2)^(-3/2), and loses 2.3 % with s = a/8."""
    place, one = np.zeros((3, 1)), np.ones(1)
    assert sphere_images(np.zeros(3), 1e-3, 0.12e-3).doubt(place, one) is None
    told = str(sphere_images(np.zeros(3), 1e-3, 0.13e-3).doubt(place, one))
    assert "100 % of the charges" in told
    assert "within 65 um of it" in told


def test_triangles_say_where_charges_are_too_near() -> None:
    images = PanelImages(box(4))
    assert images.doubt(np.zeros((3, 1)), np.ones(1)) is not None  # 0.5 away, sides of 0.35
    assert PanelImages(box(9)).doubt(np.zeros((3, 1)), np.ones(1)) is None
    assert images.doubt(np.zeros((3, 1)), np.zeros(1)) is None


def test_the_influence_of_triangles_is_symmetric_and_positive() -> None:
    matrix = influence(box(3))
    assert (matrix == matrix.T).all()
    assert np.linalg.eigvalsh(matrix).min() > 0.0
    total = 1.0 / np.linalg.inv(matrix).sum()
    assert 1.0 / 0.6607 == pytest.approx(total, rel=0.02)  # the cube's capacity (reference case I5)


def test_triangles_upon_each_other_are_refused_in_words() -> None:
    twice = np.concatenate([box(2), box(2)])
    with pytest.raises(ScenarioError, match="lie on each other"):
        PanelImages(twice)


def circle(radius: float) -> Outline:
    return Outline(
        np.array(
            [
                arc((radius, 0.0), (-radius, 0.0), (0.0, 0.0), np.pi),
                arc((-radius, 0.0), (radius, 0.0), (0.0, 0.0), np.pi),
            ]
        ),
        np.array([0, 2]),
        True,
    )


def test_endless_electrodes_need_a_length() -> None:
    with pytest.raises(ScenarioError, match="needs a `length`"):
        electrode_images([Extruded(circle(1e-3), np.inf)])


@pytest.mark.parametrize("panels", [200, 2000])
def test_bodies_are_cut_into_about_as_many_triangles_as_asked(panels: int) -> None:
    half = np.array([arc((0.0, -1e-3), (0.0, 1e-3), (0.0, 0.0), np.pi)])
    ball = Revolved(Outline(half, np.array([0, 1]), True))
    rod = Extruded(circle(0.5e-3), np.inf)
    found = triangles_of([ball, rod], panels, 4e-3)
    assert 0.6 * panels < len(found) < 1.4 * panels


def test_electrodes_of_too_many_parts_for_so_few_triangles_are_refused() -> None:
    rods = [Extruded(circle(0.5e-3), np.inf)] * 40
    with pytest.raises(ScenarioError, match="cannot be cut into about 50 triangles"):
        triangles_of(rods, 50, 4e-3)
