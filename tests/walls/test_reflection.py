"""Reflecting walls: the angle, the energy, the way on, and the momentum they take."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from driftwell.constants import SPEED_OF_LIGHT
from tests.cases import field, wall
from tests.moving import (
    ION_RATIO,
    Floats,
    accounts,
    ions,
    loop,
    to_end,
)
from tests.running import vector

VECTORS = st.tuples(*[st.floats(-1.0, 1.0)] * 3)
FEW = settings(max_examples=30, deadline=None)


def speed_of(proper: Floats) -> Floats:
    """The velocity that goes with a proper one."""
    return proper / math.sqrt(1.0 + float(proper @ proper) / SPEED_OF_LIGHT**2)


@FEW
@given(VECTORS, VECTORS, VECTORS, st.floats(10.0, 1e9), st.floats(0.5, 40.0))
@example((-1.0, 1.0, 0.125), (-0.5, 0.796875, 0.25), (1.0, 0.78125, 0.0), 10.0, 30.0)
def test_a_plane_reflects_as_a_mirror(
    normal: Any, start: Any, along: Any, speed: float, steps: float
) -> None:
    """The charge ends where the mirror image of a free one is, with the velocity of the image.

    The example is one that meets the mirror at the very end of a step.
    """
    across, course = np.array(normal), np.array(along)
    assume(min(np.linalg.norm(across), np.linalg.norm(course)) > 0.2)
    across /= np.linalg.norm(across)
    place = np.array([1e-3, -2e-3, 0.5e-3])
    begin = place + 5e-3 * np.array(start)
    gap = float((begin - place) @ across)
    assume(abs(gap) > 1e-4)
    course *= -math.copysign(1.0, gap * float(course @ across))
    assume(abs(course @ across) > 0.1)
    proper = speed * course
    duration = 2.0 * abs(gap / float(speed_of(proper) @ across))
    mirror = wall("plane", at=vector(place, "m"), normal=list(map(float, normal)), effect="reflect")
    moving = to_end(loop(ions(begin, proper), duration, duration / steps, walls=[mirror]))

    def image(of: Floats) -> Floats:
        return of - 2.0 * (of @ across) * across

    expected = place + image(begin + duration * speed_of(proper) - place)
    assert expected == pytest.approx(moving.charges.position[:, 0], abs=1e-12)
    assert image(proper) == pytest.approx(
        moving.charges.velocity[:, 0], abs=1e-12 * float(np.linalg.norm(proper))
    )


@FEW
@given(VECTORS, VECTORS, st.floats(0.01, 4.0), st.integers(0, 2**31))
def test_a_ball_in_a_box_is_where_its_unfolded_path_is(
    start: Any, along: Any, steps_per_crossing: float, seed: int
) -> None:
    """Some 60 bounces: each coordinate is a triangle wave, its speed keeps its size to rounding.

    Steps of up to a few crossings of the box; 1e-12 of the way made is allowed.
    """
    course = np.array(along)
    course = np.copysign(0.05 + 0.95 * np.abs(course), course)  # it moves along every axis
    size = np.random.default_rng(seed).uniform(0.5e-3, 2e-3, 3)
    middle = np.array([1e-3, 2e-3, -3e-3])
    begin = 0.45 * size * np.array(start)
    proper = 1e4 * course
    box = wall("box", size=vector(size, "m"), centre=vector(middle, "m"), effect="reflect")
    duration = 20.0 * size.max() / 1e4
    step = size.min() / 1e4 / max(steps_per_crossing, 0.3)
    moving = to_end(loop(ions(middle + begin, proper), duration, step, walls=[box]))
    unfolded = begin + duration * speed_of(proper) + 0.5 * size
    phase = np.mod(unfolded, 2.0 * size)
    expected = np.where(phase < size, phase, 2.0 * size - phase) - 0.5 * size
    way = duration * 1e4
    assert middle + expected == pytest.approx(moving.charges.position[:, 0], abs=1e-11 * way)
    assert np.abs(proper) == pytest.approx(
        np.abs(moving.charges.velocity[:, 0]), rel=1e-12, abs=0.0
    )
    turned = np.where(phase < size, 1.0, -1.0)
    safe = np.minimum(phase % size, size - phase % size) > 1e-9
    assert (turned == np.sign(moving.charges.velocity[:, 0] * proper))[safe].all()


@pytest.mark.parametrize("kind", ["sphere", "cylinder"])
@pytest.mark.parametrize("step", [2e-9, 1.3e-8, 9e-8])
def test_a_ball_in_a_round_wall_keeps_its_angle_of_incidence(kind: str, step: float) -> None:
    """Angular momentum about the middle and the speed are kept; it never leaves.

    Some 60 chords; Landau & Lifshitz, Mechanics, sec. 9 (a force along the radius has no torque).
    """
    form = wall(kind, radius="2 mm", effect="reflect")
    start, proper = np.array([0.5e-3, -0.3e-3, 0.0]), np.array([3e3, 9e3, 0.0])
    moving = loop(ions(start, proper), 2e-5, step, walls=[form], records=np.linspace(0.0, 2e-5, 41))
    turn = np.cross(start, proper)[2]
    for mark in range(1, len(moving.schedule.steps) + 1):
        assert moving.to_mark(mark, lambda: True)
        x, u = moving.charges.position[:, 0], moving.charges.velocity[:, 0]
        assert np.linalg.norm(x) <= 2e-3 * (1.0 + 1e-13)
        assert np.linalg.norm(proper) == pytest.approx(np.linalg.norm(u), rel=1e-12, abs=0.0)
        assert turn == pytest.approx(np.cross(x, u)[2], rel=1e-11, abs=0.0)


@pytest.mark.parametrize("steps", [1, 3, 50])
def test_a_corner_sends_a_charge_straight_back(steps: int) -> None:
    """Three faces at right angles: the velocity turns round, wherever in the corner it goes in."""
    box = wall("box", size=["2 mm", "2 mm", "2 mm"], effect="reflect")
    for start in ([0.0, 0.0, 0.0], [0.1e-3, -0.05e-3, 0.02e-3], [0.5e-3, 0.5e-3, 0.5e-3]):
        proper = np.array([1e4, 1e4, 1e4])
        moving = to_end(loop(ions(start, proper), 2e-7, 2e-7 / steps, walls=[box]))
        assert -proper == pytest.approx(moving.charges.velocity[:, 0], rel=1e-13, abs=0.0)
        free = start + 2e-7 * speed_of(proper)
        assert 2e-3 - free == pytest.approx(moving.charges.position[:, 0], abs=1e-15)


@pytest.mark.parametrize("kind", ["sphere", "cylinder"])
def test_a_charge_that_grazes_a_round_wall_creeps_along_it(kind: str) -> None:
    """At 1 degree from the tangent it stays inside, with its speed, however often it bounces."""
    form = wall(kind, radius="2 mm", effect="reflect")
    angle = math.radians(1.0)
    proper = 1e4 * np.array([math.sin(angle), math.cos(angle), 0.0])
    moving = loop(
        ions([1.99e-3, 0.0, 0.0], proper),
        2e-6,
        2e-8,
        walls=[form],
        records=np.linspace(0, 2e-6, 11),
    )
    for mark in range(1, 11):
        assert moving.to_mark(mark, lambda: True)
        assert np.linalg.norm(moving.charges.position[:, 0]) <= 2e-3 * (1.0 + 1e-13)
        assert 1e4 == pytest.approx(
            np.linalg.norm(moving.charges.velocity[:, 0]), rel=1e-12, abs=0.0
        )
    # it went round: the way made is 20 mm in chords that are all but the arc
    turned = 2e-6 * 1e4 / 2e-3 % (2.0 * math.pi)
    x, y, _ = moving.charges.position[:, 0]
    assert turned == pytest.approx(math.atan2(y, x) % (2.0 * math.pi), abs=0.02)


def test_a_tube_reflects_from_outside_too() -> None:
    """Back along the line it came on when it is met head on."""
    tube = wall("cylinder", radius="2 mm", length="6 mm", effect="reflect")
    for steps in (3, 20):
        moving = to_end(
            loop(ions([-6e-3, 0.0, 1e-3], [1e4, 0.0, 1e3]), 8e-7, 8e-7 / steps, walls=[tube])
        )
        slow = 1e-11  # from proper velocities, gamma - 1 = 6e-10
        assert [-6e-3, 0.0, 1.8e-3] == pytest.approx(moving.charges.position[:, 0], abs=slow)
        assert [-1e4, 0.0, 1e3] == pytest.approx(moving.charges.velocity[:, 0], abs=1e-9)


def test_a_ball_dropped_on_a_floor_comes_back_to_its_height() -> None:
    """60 bounces in a steady pull: in time with sqrt(8 h / g), to the height it fell from.

    The cubic is the path itself and the mean acceleration the true one: nothing is lost.
    """
    pull = field("uniform-electric", strength="-1 kV/m")
    acceleration = ION_RATIO * 1e3
    height = 1e-3
    bounce = math.sqrt(8.0 * height / acceleration)
    floor = wall("plane", at=["0", "0", "0"], effect="reflect")
    for steps in (7.3, 40.0):
        moving = to_end(
            loop(
                ions([0.0, 0.0, height]),
                60.0 * bounce,
                bounce / steps,
                walls=[floor],
                fields=[pull],
            )
        )
        assert height == pytest.approx(moving.charges.position[2, 0], rel=1e-9, abs=0.0)
        top = math.sqrt(2.0 * acceleration * height)
        assert 0.0 == pytest.approx(moving.charges.velocity[2, 0], abs=1e-8 * top)


@pytest.mark.parametrize(
    ("magnet", "rounding"),
    [
        (field("uniform-magnetic", strength="0.2 T", along=[1, 2, 2]), 1e-11),
        (field("magnetic-multipole", order=2, radius="1 mm", strength="0.2 T"), 5e-6),
    ],
    ids=["uniform", "multipole"],
)
@pytest.mark.parametrize("kind", ["box", "sphere"])
def test_bounces_in_a_magnet_keep_the_energy(kind: str, magnet: Any, rounding: float) -> None:
    """A magnet does no work, before the wall and after: some 50 bounces of each.

    To rounding where the field is uniform; one that varies is taken as it is in the middle of the
    path and at the wall, which is right to the third order in the step: 1e-7 a bounce here.
    """
    keys: dict[str, Any] = (
        {"size": ["1 mm", "1.2 mm", "0.8 mm"]} if kind == "box" else {"radius": "0.6 mm"}
    )
    random = np.random.default_rng(7)
    proper = random.normal(0.0, 3e4, (4, 3))
    moving = loop(
        ions(random.uniform(-1e-4, 1e-4, (4, 3)), proper),
        1e-6,
        2e-9,
        walls=[wall(kind, effect="reflect", **keys)],
        fields=[magnet],
    )
    to_end(moving)
    before = np.linalg.norm(proper, axis=1)
    after = np.linalg.norm(moving.charges.velocity, axis=0)
    assert before == pytest.approx(after, rel=rounding, abs=0.0)


def test_a_skipping_orbit_in_a_magnet_runs_along_the_wall() -> None:
    """Half circles along a wall: every bounce is one diameter farther, at 2 r per half turn.

    A charge that leaves a wall at a right angle in a field along it comes back at a right angle.
    Five half turns of a helix that is exact; what is left is the velocity at the wall, right to the
    fourth order.
    """
    magnet = field("uniform-magnetic", strength="0.1 T", along=[0, 1, 0])
    proper = 2e3
    radius = proper / (ION_RATIO * 0.1)
    half_turn = math.pi * radius / proper
    floor = wall("plane", at=["0", "0", "0"], effect="reflect")
    errors = []
    for steps in (100.5, 200.5):
        moving = to_end(
            loop(
                ions([0.0, 0.0, 0.0], [0.0, 0.0, proper]),
                5.5 * half_turn,
                half_turn / steps,
                walls=[floor],
                fields=[magnet],
            )
        )
        x, _, z = moving.charges.position[:, 0]
        errors.append(math.hypot(abs(x) - 11.0 * radius, z - radius) / radius)
    assert errors[0] < 1e-7
    assert errors[1] < 0.1 * errors[0]


def test_walls_take_the_momentum_of_bounces() -> None:
    """All accounts close at every record: what the charges lost the walls have, to rounding."""
    random = np.random.default_rng(3)
    proper = random.normal(0.0, 1e4, (6, 3))
    moving = loop(
        ions(random.uniform(-4e-4, 4e-4, (6, 3)), proper, weight=[1, 2, 3, 1, 1, 9]),
        2e-6,
        1.1e-8,
        walls=[
            wall(
                "box", size=["1 mm", "1 mm", "1 mm"], centre=["0.1 mm", "0", "0"], effect="reflect"
            )
        ],
        records=np.linspace(0.0, 2e-6, 9),
    )
    rows = accounts(moving)
    for row in rows:
        assert abs(row.energy_residual) <= 1e-13
        assert row.momentum_residual <= 1e-13
        assert row.angular_residual <= 1e-13
        assert row.count_residual == 0.0
        assert row.charge_residual == 0.0
    # the walls took some: twice the momentum of a charge for each bounce
    assert np.linalg.norm(rows[-1].momentum_walls) > np.linalg.norm(rows[0].momentum)
    assert 0.0 == rows[-1].energy_walls
