"""Images of many charges, by the tree and over a grid, against every image by itself."""

from __future__ import annotations

from dataclasses import replace

import numba
import numpy as np
import pytest

from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.tree import settings_for, tree_sum, tree_workspace
from driftwell.images import gap_sum, mirror_sum
from driftwell.images.gap_far import WIDEST
from driftwell.images.gap_sum import GapImages
from driftwell.images.image_sum import Fineness, Images
from driftwell.images.mirror_sum import plane_images
from tests.cases import wall
from tests.images.images_at import Floats, energy, images_at
from tests.moving import accounts, ions, loop

FOOT, NORMAL, GAP = np.array([0.1, 0.2, 0.3]), np.array([2.0, -1.0, 2.0]) / 3.0, 2.0
N = 1500
SOFT = 0.05


def fineness(accuracy: float) -> Fineness:
    """As of the pairs of a run that asks for so much."""
    it = settings_for(accuracy)
    return Fineness(it.order, it.leaf, it.tolerance, True)


def spread(n: int, width: float, seed: int = 1) -> tuple[Floats, Floats]:
    """Places (3, n) between the plates over so many gaps along them, and charges (n,)."""
    random = np.random.default_rng(seed)
    frame = np.linalg.qr(np.column_stack([NORMAL, [1, 0, 0], [0, 1, 0]]))[0][:, 1:]
    along = frame @ random.uniform(-0.5 * width, 0.5 * width, (2, n))
    up = NORMAL[:, None] * random.uniform(0.01, 0.99, n)
    return FOOT[:, None] + GAP * (up + along), random.uniform(0.5, 1.0, n)


@pytest.fixture
def by_tree(monkeypatch: pytest.MonkeyPatch) -> None:
    """Let the tree sum from 1000 charges on."""
    monkeypatch.setattr(gap_sum, "BY_TREE", 1000)
    monkeypatch.setattr(mirror_sum, "BY_TREE", 1000)


def gap(blur: float, fine: Fineness | None) -> GapImages:
    return GapImages(FOOT, NORMAL, GAP, blur, blur, fine)


def errors(images: Images, exact: Images, place: Floats, charge: Floats) -> tuple[float, float]:
    """Rms of the field's error over that of the field, and error of the energy over it."""
    expected, found = images_at(exact, place, charge), images_at(images, place, charge)
    field = np.sqrt(np.sum((found - expected)[:3] ** 2) / np.sum(expected[:3] ** 2))
    return float(field), float(np.sum(charge * found[3]) / np.sum(charge * expected[3]) - 1.0)


@pytest.mark.parametrize(("width", "least", "most"), [(2.0, 1e-8, 3e-6), (20.0, 1e-6, 1e-4)])
@pytest.mark.parametrize("blur", [0.0, SOFT])
def test_farther_images_over_a_grid_are_those_summed_pair_by_pair(
    blur: float, width: float, least: float, most: float
) -> None:
    """5e-7 of the field within 14 gaps of width, 1e-5 within 29; the energy far better."""
    place, charge = spread(N, width)
    field, energy_error = errors(gap(blur, fineness(1e-4)), gap(blur, None), place, charge)
    assert least < field < most
    assert abs(energy_error) < most


@pytest.mark.usefixtures("by_tree")
@pytest.mark.parametrize("blur", [0.0, SOFT])
@pytest.mark.parametrize("kind", ["plane", "gap"])
def test_the_tree_sums_images_to_the_accuracy_asked_for(kind: str, blur: float) -> None:
    """And better, the more is asked."""
    place, charge = spread(N, 2.0)
    found = []
    for accuracy in (1e-2, 1e-4):
        exact: Images = gap(blur, None)
        images: Images = gap(blur, fineness(accuracy))
        if kind == "plane":
            exact = plane_images(FOOT, NORMAL, blur)
            images = plane_images(FOOT, NORMAL, blur, blur, fineness(accuracy))
        field, energy_error = errors(images, exact, place, charge)
        assert 1e-3 * accuracy < field < accuracy
        assert abs(energy_error) < 0.1 * accuracy
        found.append(field)
    assert found[1] < 0.2 * found[0]


def test_the_field_of_many_is_minus_the_gradient_of_their_energy() -> None:
    """Of the sum over a grid itself, by differences; at a node of the grid and a plate too."""
    place, charge = spread(gap_sum.BY_GRID, 2.0)
    images = gap(SOFT, fineness(1e-4))
    place[:, 1] = FOOT + 0.3 * images.frame[8:11] * GAP + 1e-3 * NORMAL
    force = charge * images_at(images, place, charge)[:3]
    for i in (0, 1, 7):
        for axis in range(3):
            slopes = []
            for h in (2e-4, 1e-4):
                ends = []
                for sign in (1.0, -1.0):
                    moved = place.copy()
                    moved[axis, i] += sign * h
                    ends.append(energy(images, moved, charge))
                slopes.append((ends[0] - ends[1]) / (2.0 * h))
            slope = (4.0 * slopes[1] - slopes[0]) / 3.0
            assert -slope == pytest.approx(force[axis, i], abs=1e-8 * np.abs(force).max())


@pytest.mark.usefixtures("by_tree")
@pytest.mark.skipif(numba.config.NUMBA_NUM_THREADS < 2, reason="needs two threads")
@pytest.mark.parametrize("n", [gap_sum.BY_GRID + 1, N])
def test_the_bits_of_many_do_not_depend_on_the_threads(n: int) -> None:
    place, charge = spread(n, 3.0)
    plane = plane_images(FOOT, NORMAL, 0.0, 0.0, fineness(1e-3))
    for images in (plane, gap(0.0, fineness(1e-3))):
        one = images_at(images, place, charge, threads=1)
        two = images_at(images, place, charge, threads=2)
        assert np.isfinite(one).all()
        assert one.tobytes() == two.tobytes()


@pytest.mark.usefixtures("by_tree")
def test_charges_that_are_none_feel_the_others_and_are_felt_by_none() -> None:
    """Unborn ones where the field is asked for, and lost ones far away."""
    place, charge = spread(N, 2.0)
    place[:, 0] = FOOT
    place[:, 1] = FOOT - 50.0 * GAP * NORMAL
    place[:, 2] = FOOT + 1e3 * GAP * np.array([1.0, 2.0, 0.0])
    charge[:3] = 0.0
    for blur in (0.0, SOFT):
        expected = images_at(gap(blur, None), place, charge)
        found = images_at(gap(blur, fineness(1e-4)), place, charge)
        assert np.isfinite(found).all()
        scale = np.sqrt(np.mean(expected[:3] ** 2))
        assert expected[:3, 0] == pytest.approx(found[:3, 0], abs=1e-3 * scale)
        assert expected[:, 3:] == pytest.approx(found[:, 3:], abs=2e-2 * scale)


@pytest.mark.usefixtures("by_tree")
def test_a_charge_that_is_nowhere_is_not_hidden() -> None:
    place, charge = spread(N, 2.0)
    place[1, 5] = np.nan
    for images in (gap(0.0, fineness(1e-3)), plane_images(FOOT, NORMAL, 0.0, 0.0, fineness(1e-3))):
        assert np.isnan(images_at(images, place, charge)).all()


def test_many_charges_too_wide_for_the_grid_are_spoken_of() -> None:
    images = gap(0.0, fineness(1e-3))
    for width, said in ((0.7 * WIDEST[1], False), (1.2 * WIDEST[1], True)):
        place, charge = spread(N, width)
        assert said == ("gaps along the plates" in str(images.doubt(place, charge)))
        assert images.doubt(place[:, :100], charge[:100]) is None
        assert replace(images, fineness=None).doubt(place, charge) is None


def test_the_tree_gives_the_same_field_at_the_first_so_many_charges_alone() -> None:
    """Bit for bit what it gives at all; the others push and feel nothing."""
    place, charge = spread(N, 2.0)
    settings, softening2, m = settings_for(1e-3), 0.0, 400
    whole, some = np.empty((4, N)), np.empty((4, m))
    for out in (whole, some):
        work = tree_workspace(N, 1, settings, False, True)
        tree_sum()(place, charge, softening2, 1.0, work, out)
    assert whole[:, :m].tobytes() == some.tobytes()


@pytest.mark.parametrize("kind", ["plane", "gap"])
def test_accounts_close_as_well_where_the_tree_sums_the_images(
    kind: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Momentum to rounding, energy as with each image by itself to a tenth of the accuracy; with
    charges lost on the conductors."""
    side, blur = 3e-4, 4e-6
    foot, up = np.array([0.0, 0.0, -side]), np.array([0.0, 0.0, 1.0])
    left = []
    for border in (10 * N, N // 2):
        monkeypatch.setattr(gap_sum, "BY_TREE", border)
        monkeypatch.setattr(mirror_sum, "BY_TREE", border)
        random = np.random.default_rng(3)
        start = ions(
            random.uniform(-side, side, (N, 3)), random.normal(0.0, 150.0, (N, 3)), weight=300.0
        )
        images: Images = GapImages(foot, up, 2.0 * side, blur, blur, fineness(1e-3))
        if kind == "plane":
            images = plane_images(foot, up, blur, blur, fineness(1e-3))
        moving = loop(
            start,
            2e-7,
            1e-8,
            coulomb=Coulomb(method="direct", softening=f"{blur} m"),
            images=images,
            walls=[wall("box", size=["3 mm", "3 mm", "0.6 mm"])],
        )
        row = accounts(moving)[-1]
        assert row.momentum_residual <= 2e-13
        assert row.angular_residual <= 2e-13
        assert abs(row.energy_residual) <= 2e-3
        assert 0.0 < row.count_lost
        assert abs(row.image) > row.kinetic
        left.append(row.energy_residual)
    assert left[0] == pytest.approx(left[1], abs=1e-4)
    assert left[0] != left[1]
