"""Coulomb's law between two charges, as a run feels it and as its answers say it.

The felt force is the proper velocity after one short step times mass over time: charges of 1 kg
do not move in 1 us, so it is the force at the given distance to 1e-15.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import NamedTuple

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb.direct import direct_field, workspace
from tests.running import Floats, answers, carried_out, points, species, track

ELECTRIC_CONSTANT = 8.8541878188e-12
"""F/m, CODATA 2022 (P. J. Mohr et al., arXiv:2409.03787), relative uncertainty 1.6e-10."""
CHARGE = 1.602176634e-19
"""C, exact since 2019."""
STEP = 1e-6  # s
LEAN = np.array([2.0, -1.0, 2.0]) / 3.0
"""A direction along no axis."""


class Pair(NamedTuple):
    """Force (3,) in N on the first and on the second charge, by the motion, and as answered."""

    felt: Floats
    answered: Floats


def pair(folder: Path, first: float, second: float, apart: float, weight: float = 1.0) -> Pair:
    """Two charges (in e) at -apart/2 and +apart/2 along :data:`LEAN`; `weight` of the second."""
    place = 0.5 * apart * LEAN
    found = carried_out(
        folder,
        STEP,
        species={"one": species(1.0, f"{first} e"), "two": species(1.0, f"{second} e")},
        cloud=[
            points("one", "one", -place),
            {**points("two", "two", place), "weight": weight},
        ],
        stepping={"step": f"{STEP} s"},
        question=[
            {"name": f"{cloud} {axis}", "ask": "force", "of": cloud, "charge": 0, "axis": axis}
            for cloud in ("one", "two")
            for axis in "xyz"
        ],
    )
    felt = track(found).velocity[-1] / STEP
    return Pair(felt, np.reshape(answers(found), (2, 3)))


def coulomb(first: float, second: float, apart: float) -> Floats:
    """F on the second charge, k q1 q2 / r^2 along the line from the first to it."""
    k = 1.0 / (4.0 * math.pi * ELECTRIC_CONSTANT)
    force: Floats = k * first * second * CHARGE**2 / apart**2 * LEAN
    return force


@pytest.mark.parametrize(
    ("first", "second"), [(1, 1), (3, 1), (1, 3), (4, 7), (-2, -5), (2, -3), (-0.5, 6)]
)
def test_the_force_is_coulombs_in_size_and_direction(
    tmp_path: Path, first: float, second: float
) -> None:
    """Linear in each charge; like signs push apart, opposite ones pull together; equal, opposite.

    J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), eq. 1.2, constant of CODATA 2022. The
    tolerance is rounding: the distance is a difference of rounded places.
    """
    apart = 3.7e-6
    expected = coulomb(first, second, apart)
    size = float(np.linalg.norm(expected))
    outward = float(expected @ LEAN)
    assert (first * second > 0) == (outward > 0)
    both = pair(tmp_path, first, second, apart)
    for found in both:
        assert list(expected) == pytest.approx(found[1], abs=1e-14 * size)
        assert list(-expected) == pytest.approx(found[0], abs=1e-14 * size)
    assert [0.0, 0.0, 0.0] == pytest.approx(both.felt.sum(axis=0), abs=1e-15 * size)


def test_two_elementary_charges_a_micrometre_apart_push_with_0_23_femtonewton(
    tmp_path: Path,
) -> None:
    """2.307077551e-16 N = k e^2 / (1 um)^2, by hand from CODATA 2022: 8.9875517862e9 N m^2/C^2."""
    for found in pair(tmp_path, 1, 1, 1e-6):
        assert 2.307077551e-16 == pytest.approx(float(np.linalg.norm(found[1])), rel=5e-10, abs=0.0)


def test_the_force_falls_with_the_square_of_the_distance(tmp_path: Path) -> None:
    """Fitted exponent -2 within 1e-10 over seven decades of distance.

    Inverse square law: C. A. Coulomb (1785); best test of it E. R. Williams, J. E. Faller,
    H. A. Hill, Phys. Rev. Lett. 26 (1971) 721 (from memory). Each of ten forces is right to about
    1e-15, and over 16 e-folds that moves the slope by some 1e-16.
    """
    distance = np.logspace(-8, -1, 10)
    forces = [pair(tmp_path, 1, 1, apart) for apart in distance]
    for found in (
        [float(np.linalg.norm(each.felt[1])) for each in forces],
        [float(np.linalg.norm(each.answered[1])) for each in forces],
    ):
        exponent, _ = np.polyfit(np.log(distance), np.log(found), 1)
        assert -2.0 == pytest.approx(exponent, abs=1e-10)


def test_a_charge_that_stands_for_many_pushes_like_many(tmp_path: Path) -> None:
    """The first is pushed by the charge of 50, the second's every real particle by one.

    Superposition, Jackson (1998) eq. 1.4; how macro-particles follow from it is common practice.
    """
    expected = coulomb(1, 1, 1e-6)
    size = float(np.linalg.norm(expected))
    for found in pair(tmp_path, 1, 1, 1e-6, weight=50.0):
        assert list(-50.0 * expected) == pytest.approx(found[0], abs=1e-13 * size)
        assert list(expected) == pytest.approx(found[1], abs=1e-14 * size)


@pytest.mark.parametrize("count", [2, 3, 63, 64, 65, 128, 200, 513])
@pytest.mark.parametrize("softening", [0.0, 0.05])
def test_the_field_of_many_charges_is_the_sum_over_pairs(count: int, softening: float) -> None:
    """Against the plain double sum of Jackson (1998) eq. 1.5, in extended precision.

    Softening by S. J. Aarseth, Mon. Not. R. Astron. Soc. 126 (1963) 223 (from memory). Rounding
    of a sum of n terms of both signs: 1e-14 of the sum of their sizes is generous.
    """
    random = np.random.default_rng(count)
    place = random.uniform(-1.0, 1.0, (3, count))
    charge = random.uniform(-1.0, 1.0, count)
    found = np.full((3, count), np.nan)
    direct_field(place, charge, softening**2, COULOMB_CONSTANT, workspace(count), found)
    apart = (place[:, :, None] - place[:, None, :]).astype(np.longdouble)
    square = (apart**2).sum(axis=0) + np.longdouble(softening) ** 2
    np.fill_diagonal(square, 1.0)
    terms = COULOMB_CONSTANT * charge * apart / square**1.5
    scale = float(np.abs(terms).sum(axis=(0, 2)).max())
    assert 0.0 == pytest.approx(np.abs(terms.sum(axis=2) - found).max() / scale, abs=1e-14)
    force = charge * found
    residual = np.linalg.norm(force.sum(axis=1)) / np.linalg.norm(force, axis=0).sum()
    assert residual <= 1e-13


@pytest.mark.parametrize("count", [50, 700])
def test_forces_of_charges_at_random_add_up_to_nothing_in_the_ledger(
    tmp_path: Path, count: int
) -> None:
    """Newton's third law: |sum F| / sum |F| at most 1e-13, and momentum kept to rounding."""
    found = carried_out(
        tmp_path,
        1e-6,
        species={"ion": species(2e-25), "heavy": species(4e-25, "3 e")},
        cloud=[
            {
                "name": kind,
                "species": kind,
                "count": count,
                "shape": {"kind": "ball", "radius": "1 mm"},
                "motion": {"temperature": "300 K"},
            }
            for kind in ("ion", "heavy")
        ],
        stepping={"step": "20 ns"},
    )
    assert found.ledger["third_law_residual"].max() <= 1e-13
    assert found.ledger["momentum_residual"].max() <= 1e-13
    assert found.ledger["angular_residual"].max() <= 1e-13
    assert found.ledger["third_law_residual"].max() > 0.0
