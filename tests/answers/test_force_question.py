"""Coulomb force on a named charge."""

from __future__ import annotations

import math

import numpy as np
import pytest
from recorded_by_hand import CHARGE, Recorded, asked, facts, near, one_cloud

COULOMB = 8.9875517862e9
"""N m^2/C^2, CODATA 2022: 1/(4 pi epsilon_0), epsilon_0 = 8.8541878188e-12 F/m."""


def force(recorded: Recorded, axis: str = "magnitude", charge: int = 0, of: str = "load") -> float:
    """The value asked for, N."""
    return asked("force", of=of, axis=axis, charge=charge).answer(recorded).value


def pair(distance: float, second: float = CHARGE, weight: float = 1.0) -> Recorded:
    """Charges e at the origin and `second` on the x axis."""
    first, other = facts(count=1), facts("b", 1, index=1, first_id=1, charge=second, weight=weight)
    rest = np.zeros((1, 3))
    return Recorded().at(
        1e-3,
        (first, np.arange(1), rest, rest),
        (other, np.arange(1), np.array([[distance, 0.0, 0.0]]), rest),
    )


def test_force_of_two_charges_is_coulombs_law() -> None:
    """F = e^2 / (4 pi epsilon_0 r^2), CODATA 2022; at 10 um this is 2.307e-18 N."""
    found = asked("force", charge=0).answer(pair(10e-6))
    assert near(COULOMB * CHARGE**2 / 1e-10, rel=1e-10) == found.value
    assert (found.unit, found.error) == ("N", 0.0)


def test_force_pushes_like_charges_apart_and_pulls_opposite_ones_together() -> None:
    assert force(pair(1e-6), "x") < 0.0
    assert force(pair(1e-6), "x", of="b") > 0.0
    assert force(pair(1e-6, -CHARGE), "x") > 0.0
    assert force(pair(1e-6, -CHARGE), "x", of="b") < 0.0


def test_force_is_equal_and_opposite_and_linear_in_the_charge() -> None:
    recorded = pair(3e-6, 7.0 * CHARGE)
    assert force(recorded, "x") == near(-force(recorded, "x", of="b"), rel=1e-14)
    assert force(recorded) == near(7.0 * force(pair(3e-6)), rel=1e-14)


def test_force_falls_with_the_square_of_the_distance() -> None:
    distance = np.geomspace(1e-6, 1e-3, 10)
    values = [force(pair(r)) for r in distance]
    exponent = np.polyfit(np.log(distance), np.log(values), 1)[0]
    assert pytest.approx(-2.0, abs=1e-10) == exponent


def test_force_of_three_charges_is_the_sum_by_hand() -> None:
    """At the right angle of a triangle of legs 3 and 4 um: k e^2 (-1/9, -1/16) / um^2."""
    corner = np.array([[0.0, 0.0, 0.0], [3e-6, 0.0, 0.0], [0.0, 4e-6, 0.0]])
    recorded = one_cloud(corner)
    unit = COULOMB * CHARGE**2 / 1e-12
    assert near(-unit / 9.0, rel=1e-10) == force(recorded, "x")
    assert near(-unit / 16.0, rel=1e-10) == force(recorded, "y")
    assert force(recorded, "z") == 0.0
    assert near(unit * math.hypot(1 / 9, 1 / 16), rel=1e-10) == force(recorded)
    # At the second: from the corner along x, and from the third along (3, -4)/5 at 5 um.
    assert near(unit * (1 / 9 + 0.6 / 25), rel=1e-10) == force(recorded, "x", 1)
    assert near(-unit * 0.8 / 25, rel=1e-10) == force(recorded, "y", 1)


def test_a_softened_force_is_weakened_by_the_softening_length() -> None:
    recorded = pair(3e-6)
    recorded.softening = 4e-6
    expected = COULOMB * CHARGE**2 * 3e-6 / (5e-6) ** 3
    assert expected == near(force(recorded), rel=1e-10)


def test_macro_particles_push_with_all_the_charges_they_stand_for() -> None:
    found = asked("force", charge=0).answer(pair(2e-6, weight=30.0))
    assert found.value == near(30.0 * force(pair(2e-6)), rel=1e-12)
    assert found.error is None
    assert "one real particle" in found.note
    # On one real particle of the macro-particle only the single charge acts.
    assert force(pair(2e-6, weight=30.0), of="b") == near(force(pair(2e-6)), rel=1e-12)


def test_charges_are_counted_within_their_cloud_even_after_losses() -> None:
    cloud = facts(count=4, first_id=100)
    place = np.array([[0.0, 0.0, 0.0], [1e-6, 0.0, 0.0]])
    recorded = Recorded().at(1e-3, (cloud, np.array([1, 3]), place, np.zeros((2, 3))))
    assert force(recorded, "x", 1) < 0.0 < force(recorded, "x", 3)
    with pytest.raises(Exception, match='charge 2 of "load" is not left'):
        force(recorded, charge=2)
    with pytest.raises(Exception, match="there is no charge 4"):
        force(recorded, charge=4)


def test_two_charges_in_one_place_have_no_force() -> None:
    with pytest.raises(Exception, match="at the same place"):
        force(pair(0.0))
