"""Kicks and drifts at any speed: exact flows, whatever the step."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from tests.cases import field
from tests.moving import ION_RATIO, ions, loop, to_end


@pytest.mark.parametrize("steps", [1, 3, 10])
@pytest.mark.parametrize("strength", [1e3, 1e12])
def test_a_steady_pull_changes_the_proper_velocity_steadily(strength: float, steps: int) -> None:
    """u = Q E t / m in whatever steps, to gamma = 3.3 and beyond.

    L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, sec. 20.
    """
    time = 1e-9
    moving = to_end(
        loop(
            ions([0, 0, 0], [1e6, 0, 0]),
            time,
            time / steps,
            fields=[field("uniform-electric", strength=f"{strength} V/m")],
        )
    )
    expected = [1e6, 0.0, ION_RATIO * strength * time]
    assert expected == pytest.approx(moving.charges.velocity[:, 0], rel=1e-14, abs=0.0)


@pytest.mark.parametrize("share", [0.0, 1e-6, 1e-3, 0.00999, 0.01001, 0.5, 10.0, 1e4])
def test_free_charges_move_with_their_velocity_on_both_sides_of_the_series(share: float) -> None:
    """v = u / sqrt(1 + u^2/c^2), by series below u = c/100 and by the root above, to rounding."""
    proper = share * SPEED_OF_LIGHT * np.array([2.0, -1.0, 2.0]) / 3.0
    moving = to_end(loop(ions([0, 0, 0], proper), 1e-6, 0.9e-6))
    expected = proper * 1e-6 / math.hypot(1.0, share)
    assert expected == pytest.approx(moving.charges.position[:, 0], rel=5e-16, abs=0.0)


@pytest.mark.parametrize("speed", [1e3, 1e8, 1e9])
@pytest.mark.parametrize("steps", [1, 2, 7])
def test_a_helix_is_followed_exactly_in_whatever_step(speed: float, steps: int) -> None:
    """About a tilted field, more than a turn in one step: radius m u / (Q B), gamma m in time.

    J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 12.2.
    """
    b = np.array([1.0, 2.0, -2.0]) / 3.0
    first = np.array([2.0, 1.0, 2.0]) / 3.0
    strength = 0.3
    proper = speed * (0.8 * first + 0.6 * b)
    gamma = math.hypot(1.0, speed / SPEED_OF_LIGHT)
    rate = ION_RATIO * strength / gamma
    time = 9.0 / rate
    moving = to_end(
        loop(
            ions([0, 0, 0], proper),
            time,
            time / steps,
            fields=[field("uniform-magnetic", strength=f"{strength} T", along=list(3.0 * b))],
            extent="1000 km",
        )
    )
    second = np.cross(first, b)  # u x b, the way a positive charge turns
    radius = 0.8 * speed / (ION_RATIO * strength)
    place = radius * (math.sin(9.0) * first + (1.0 - math.cos(9.0)) * second)
    place += 0.6 * speed / gamma * time * b
    along = 0.8 * speed * (math.cos(9.0) * first + math.sin(9.0) * second) + 0.6 * speed * b
    assert place == pytest.approx(moving.charges.position[:, 0], abs=1e-13 * 10.0 * radius)
    assert along == pytest.approx(moving.charges.velocity[:, 0], abs=1e-13 * speed)


def test_fields_of_several_magnets_add_up_to_one_turn() -> None:
    """Two uniform fields turn as their sum, not one after the other."""
    sum_of = [field("uniform-magnetic", strength="0.5 T", along=[3, 0, 4])]
    parts = [
        field("uniform-magnetic", name="a", strength="0.3 T", along=[1, 0, 0]),
        field("uniform-magnetic", name="b", strength="0.4 T", along=[0, 0, 1]),
    ]
    ends = [
        to_end(loop(ions([0, 0, 0], [1e3, 2e3, 3e3]), 1e-6, 1e-6, fields=fields)).charges
        for fields in (sum_of, parts)
    ]
    assert ends[0].position == pytest.approx(ends[1].position, rel=1e-13, abs=0.0)
    assert ends[0].velocity == pytest.approx(ends[1].velocity, rel=1e-13, abs=0.0)


def test_a_magnetic_field_that_varies_in_space_turns_without_work() -> None:
    """The speed is kept to rounding over many steps in a multipole, whatever their length."""
    magnet = field("magnetic-multipole", order=3, radius="2 mm", strength="0.5 T")
    random = np.random.default_rng(3)
    proper = random.normal(0.0, 3e7, (20, 3))
    moving = to_end(
        loop(ions(random.uniform(-2e-3, 2e-3, (20, 3)), proper), 1e-8, 1e-10, fields=[magnet])
    )
    expected = np.linalg.norm(proper, axis=1)
    assert expected == pytest.approx(
        np.linalg.norm(moving.charges.velocity, axis=0), rel=1e-13, abs=0.0
    )
    assert moving.charges.velocity.T != pytest.approx(proper, rel=1e-3, abs=0.0)
