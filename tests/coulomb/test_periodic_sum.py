"""The sums over all periodic images: they agree with each other, and keep what every sum keeps."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.summation import Summation, manner_for
from driftwell.kernels.threads import on_threads
from tests.pair_sums import rms_error

Floats = NDArray[np.float64]
PERIOD = 2.0


@dataclass(frozen=True, slots=True)
class Found:
    """Field (3, n) and potential (n,), over 1/(4 pi eps0) and for charges in e."""

    field: Floats
    potential: Floats


def beam(n: int, axis: int = 2, width: float = 0.1, seed: int = 1) -> Floats:
    """Places (3, n) of a beam along an axis of a cell about the origin."""
    random = np.random.default_rng(seed)
    place = width * random.normal(size=(3, n))
    place[axis] = PERIOD * (random.random(n) - 0.5)
    return place


def summed(
    place: Floats,
    charge: Floats,
    method: str = "direct",
    *,
    axis: str = "z",
    softening: float = 0.0,
    threads: int = 1,
    accuracy: float = 1e-4,
) -> Found:
    """Both sums as a run has them; constants of nature are divided out."""
    form = Coulomb(method=method, accuracy=accuracy, softening=f"{softening!r} m")
    cell = Cell(axis=axis, length=f"{PERIOD!r} m")
    with on_threads(threads) as given:
        manner = manner_for(form, charge.size, given)
        summation = Summation(form, charge.size, given, manner=manner, cell=cell)
        out = np.full((4, charge.size), np.nan)
        summation.pair_sum(place, charge, softening**2, 1.0, summation.work, out)
    return Found(out[:3], out[3])


def image_by_image(place: Floats, charge: Floats, axis: int, softening: float) -> Found:
    """The same by adding up 2000 images on each side, and what is beyond to the second order."""
    most, d = 2000, place[:, :, None] - place[:, None, :]
    field, potential = np.zeros(d.shape), np.zeros(d.shape[1:])
    for k in range(-most, most + 1):
        moved = d.copy()
        moved[axis] -= k * PERIOD
        r = np.sqrt((moved**2).sum(axis=0) + softening**2)
        if k == 0:
            np.fill_diagonal(r, np.inf)
        field += moved / r**3
        potential += 1.0 / r - (1.0 / (abs(k) * PERIOD) if k else 0.0)
    beyond = 2.0 / PERIOD**3 * 0.5 / (most + 0.5) ** 2  # 2 zeta(3, most + 1) / L^3
    across2 = (d**2).sum(axis=0) - d[axis] ** 2
    potential += beyond * (d[axis] ** 2 - 0.5 * across2)
    slope = beyond * d
    slope[axis] *= -2.0
    np.fill_diagonal(potential, 0.0)
    return Found((field + slope) @ charge, potential @ charge)


@pytest.mark.parametrize(("axis", "width"), [("z", 0.05), ("x", 0.5), ("y", 2.0)])
def test_the_direct_sum_is_the_one_image_by_image(axis: str, width: float) -> None:
    """Along each axis, for narrow beams and for wide ones, charges of both signs."""
    number = "xyz".index(axis)
    place, charge = beam(35, number, width), np.random.default_rng(2).normal(size=35)
    expected = image_by_image(place, charge, number, 0.0)
    found = summed(place, charge, axis=axis)
    assert rms_error(expected.field, found.field) < 1e-9  # of the far images left out there
    assert (
        np.abs(expected.potential - found.potential).max()
        < 1e-10 * np.abs(expected.potential).max()
    )


def test_near_images_are_softened_as_the_charges_are() -> None:
    """To the square of the softening over that of two periods, by which far ones are not."""
    place, charge = beam(35), np.random.default_rng(2).normal(size=35)
    expected = image_by_image(place, charge, 2, 0.02)
    found = summed(place, charge, softening=0.02)
    assert rms_error(expected.field, found.field) < 2e-5
    assert rms_error(expected.field, summed(place, charge).field) > 1e-3


@pytest.mark.parametrize(
    ("axis", "width", "softening"), [("z", 0.03, 0.0), ("x", 0.3, 1e-3), ("y", 0.6, 0.0)]
)
def test_the_tree_errs_as_little_as_asked(axis: str, width: float, softening: float) -> None:
    """Against the direct sum, potentials too; charges of both signs."""
    n, number = 2500, "xyz".index(axis)
    place, charge = beam(n, number, width), np.random.default_rng(2).normal(size=n)
    true = summed(place, charge, axis=axis, softening=softening, threads=2)
    found = summed(place, charge, "tree", axis=axis, softening=softening, threads=2)
    assert 1e-6 < rms_error(true.field, found.field) < 1e-4
    assert rms_error(true.potential, found.potential) < 1e-4


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_the_forces_of_all_charges_cancel_to_rounding(method: str) -> None:
    """Across the ends of the cell as within it."""
    place, charge = beam(1000), np.random.default_rng(3).normal(size=1000)
    force = charge * summed(place, charge, method).field
    assert np.abs(force.sum(axis=1)).max() < 1e-13 * np.abs(force).sum()


def test_the_force_is_the_slope_of_the_energy() -> None:
    """Differences of the energy to the fourth order along each axis, for one charge moved."""
    place, charge = beam(12), np.random.default_rng(4).normal(size=12)
    force = charge * summed(place, charge).field
    step = 1e-3

    def energy(axis: int, by: float) -> float:
        moved = place.copy()
        moved[axis, 5] += by
        return 0.5 * float(charge @ summed(moved, charge).potential)

    for axis in range(3):
        slope = 8.0 * (energy(axis, step) - energy(axis, -step))
        slope -= energy(axis, 2 * step) - energy(axis, -2 * step)
        assert pytest.approx(-slope / (12.0 * step), rel=1e-6, abs=0.0) == force[axis, 5]


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_a_charge_moved_by_a_period_changes_nothing(method: str) -> None:
    """Neither the fields nor the potentials, but by what the sums err."""
    place, charge = beam(300), np.ones(300)
    before = summed(place, charge, method)
    place[2, 7] += PERIOD
    after = summed(place, charge, method)
    bound = 1e-9 if method == "direct" else 1e-4
    assert rms_error(before.field, after.field) < bound
    assert rms_error(before.potential, after.potential) < bound


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_the_bits_do_not_depend_on_the_threads(method: str) -> None:
    """With enough charges for threads to be used."""
    place, charge = beam(1100), np.random.default_rng(5).normal(size=1100)
    one, two = (summed(place, charge, method, threads=k) for k in (1, 2))
    assert one.field.tobytes() == two.field.tobytes()
    assert one.potential.tobytes() == two.potential.tobytes()


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_a_charge_that_is_nowhere_makes_all_fields_no_number(method: str) -> None:
    """None looks right where the sum is not."""
    place, charge = beam(130), np.ones(130)
    place[1, 3] = np.nan
    assert np.isnan(summed(place, charge, method).field).all()


@pytest.mark.parametrize("axis", ["x", "y", "z"])
def test_the_field_at_chosen_charges_is_that_of_the_direct_sum(axis: str) -> None:
    """Which the tree is judged by; some chosen twice, and not whole vectors of them."""
    place, charge = beam(90, "xyz".index(axis), 0.3), np.random.default_rng(6).normal(size=90)
    which = np.array([3, 3, 88, 0, 41, 7, 9, 12, 60, 61, 62], dtype=np.int64)
    cell = Cell(axis=axis, length=f"{PERIOD!r} m")
    summation = Summation(Coulomb(method="tree"), 90, 1, cell=cell)
    found = np.full((3, which.size), np.nan)
    summation.sampled_field(which, place, charge, 1e-4, 1.0, found)
    expected = summed(place, charge, axis=axis, softening=1e-2).field[:, which]
    assert rms_error(expected, found) < 1e-11
