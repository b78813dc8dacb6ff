"""How much images would matter: against exact images, and in words."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.images.importance import importance, remark
from driftwell.images.mirror_sum import plane_images
from tests.images.images_at import Floats, images_at

ION = 2.2e-25


def above(points: Floats) -> Floats:
    """Distance from the plane z = 0."""
    return points[:, 2]


def ball(n: int, radius: float, height: float) -> Floats:
    """Places (3, n) evenly in a ball, centred above the plane."""
    random = np.random.default_rng(4)
    away = random.normal(size=(3, n))
    away *= radius * random.uniform(size=n) ** (1 / 3) / np.linalg.norm(away, axis=0)
    away[2] += height
    return away


def test_before_a_plane_the_push_is_that_of_the_images() -> None:
    """Of the sum itself, along the normal; of 2000 charges, of which 300 are looked at."""
    place, q = ball(2000, 1e-3, 3e-3), np.full(2000, ELEMENTARY_CHARGE)
    exact = images_at(
        plane_images(np.zeros(3), np.array([0.0, 0.0, 1.0]), 0.0), place, q, 1, COULOMB_CONSTANT
    )
    found = importance("load", place, q, np.full(2000, ION), above, 1e-3)
    assert np.sqrt(np.mean(exact[2] ** 2)) == pytest.approx(found.image, rel=0.05)
    assert 3e-3 == pytest.approx(found.distance, rel=0.02)


def test_a_ball_s_own_push_is_that_at_its_surface() -> None:
    """K Q / R^2 (Gauss's law), to what 4000 random places say of its size."""
    place, q = ball(4000, 1e-3, 5e-3), np.full(4000, 50 * ELEMENTARY_CHARGE)
    found = importance("load", place, q, np.full(4000, 50 * ION), above, 1e-3)
    assert COULOMB_CONSTANT * q.sum() / 1e-6 == pytest.approx(found.own, rel=0.03)
    assert (1e-3 / 10e-3) ** 2 == pytest.approx(found.share, rel=0.15)
    shift = 0.5 * ELEMENTARY_CHARGE / ION * found.image * 1e-6
    assert shift == pytest.approx(found.shift, rel=1e-12)


@pytest.mark.parametrize(("height", "spoken"), [(3e-3, True), (50e-3, False)])
def test_images_left_out_are_spoken_of_where_they_matter(height: float, spoken: bool) -> None:
    """A ball of 1 mm: 3 % of its own push at 3 mm, 0.01 % at 50 mm."""
    place, q = ball(500, 1e-3, height), np.full(500, 100 * ELEMENTARY_CHARGE)
    found = importance("load", place, q, np.full(500, 100 * ION), above, 1e-3)
    said = remark([found], on=False)
    assert spoken == (said is not None)
    if said is not None:
        assert 'conductors 3 mm from "load"' in said
        assert "% of its own push" in said
        assert "See [images]" in said
    assert remark([found], on=False, share=1e-6) is not None
    assert remark([found], on=False, share=1.0) is None


@pytest.mark.parametrize(("height", "spoken"), [(3e-3, False), (50e-3, True)])
def test_images_that_do_next_to_nothing_are_spoken_of_too(height: float, spoken: bool) -> None:
    place, q = ball(500, 1e-3, height), np.full(500, 100 * ELEMENTARY_CHARGE)
    found = importance("load", place, q, np.full(500, 100 * ION), above, 1e-3)
    said = remark([found], on=True)
    assert spoken == (said is not None)
    if said is not None:
        assert "about 0.0001 of the charges' own push" in said


@pytest.mark.parametrize(("duration", "spoken"), [(1e-3, True), (1e-8, False)])
def test_a_charge_alone_is_spoken_of_where_images_move_it(duration: float, spoken: bool) -> None:
    """It has no push of its own to set them against; 10 um from a plane it moves 5 um in 0.1 us."""
    q, m = np.array([ELEMENTARY_CHARGE]), np.array([ION])
    found = importance("one", np.array([[0.0], [0.0], [1e-5]]), q, m, above, duration)
    assert COULOMB_CONSTANT * q[0] / (4e-10) == pytest.approx(found.image, rel=1e-12)
    assert 0.0 == found.own
    said = remark([found], on=False)
    assert spoken == (said is not None)
    if said is not None:
        assert "nothing else of its own" in said


def test_of_several_clouds_the_worst_is_named() -> None:
    near, far = (
        importance(
            name,
            ball(100, 1e-3, height),
            np.full(100, 1e4 * ELEMENTARY_CHARGE),
            np.full(100, 1e4 * ION),
            above,
            1e-3,
        )
        for name, height in (("near", 2e-3), ("far", 4e-3))
    )
    assert '"near"' in str(remark([far, near], on=False))
    assert remark([], on=False) is None
