"""Detectors: what passes them, when, in which direction, and in which order."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from tests.cases import detector, field, wall
from tests.moving import ION_RATIO, events, ions, loop, to_end
from tests.running import quantity

SPEED = 1e4
"""Proper, m/s."""
GAMMA = math.hypot(1.0, SPEED / SPEED_OF_LIGHT)


def screens(*heights: float) -> list:
    """Plane detectors across z at some heights, m."""
    return [detector("plane", name=f"at {z}", at=["0", "0", quantity(z, "m")]) for z in heights]


@pytest.mark.parametrize("steps", [1, 2, 7, 100])
def test_passages_in_one_step_are_told_in_the_order_of_time(steps: int) -> None:
    """Several detectors and charges, whatever their order in the file, and the wall last."""
    starts = np.array([[0.0, 0.0, 0.0], [0.0, 0.0, 0.5e-3], [0.0, 0.0, 8e-3]])
    speeds = np.array([[0.0, 0.0, SPEED], [0.0, 0.0, SPEED], [0.0, 0.0, -SPEED]])
    end = wall("plane", name="end", at=["0", "0", "5.1 mm"])
    moving = loop(
        ions(starts, speeds, cloud=[0, 1, 1], weight=[3.0, 1.0, 1.0]),
        1e-6,
        1e-6 / steps,
        walls=[end],
        detectors=screens(3e-3, 6e-3, 1e-3),
    )
    found = events(to_end(moving))
    expected = [  # surface, id, direction, height
        (3, 1, 1, 1e-3),
        (3, 0, 1, 1e-3),
        (2, 2, -1, 6e-3),
        (1, 1, 1, 3e-3),
        (0, 2, 0, 5.1e-3),
        (1, 0, 1, 3e-3),
        (0, 1, 0, 5.1e-3),
        (0, 0, 0, 5.1e-3),
    ]
    slower = np.hypot(1.0, SPEED / SPEED_OF_LIGHT)  # gamma of a proper velocity
    times = [slower * abs(z - starts[i, 2]) / SPEED for _, i, _, z in expected]
    assert sorted(times) == times
    told = zip(found.surface, found.id, found.direction, strict=True)
    assert [each[:3] for each in expected] == list(told)
    assert times == pytest.approx(found.time, rel=1e-13, abs=0.0)
    assert [z for *_, z in expected] == pytest.approx(found.position[:, 2], rel=1e-13, abs=0.0)
    assert [1, 0, 1, 1, 1, 0, 1, 0] == list(found.cloud)
    assert [1, 3, 1, 1, 1, 3, 1, 3] == list(found.weight)


@pytest.mark.parametrize("steps", [1, 2, 7, 100])
def test_a_detector_behind_a_wall_is_not_reached(steps: int) -> None:
    """Nor one behind the charge; one behind an opening is."""
    starts = [[0.0, 0.0, 0.0], [0.0, 3e-3, 0.0]]
    with_hole = wall("plane", at=["0", "0", "2 mm"], hole={"radius": "1 mm"})
    moving = loop(
        ions(starts, [0.0, 0.0, SPEED]),
        1e-6,
        1e-6 / steps,
        walls=[with_hole],
        detectors=screens(4e-3, -1e-3),
    )
    found = events(to_end(moving))
    assert [(0, 1), (1, 0)] == sorted(zip(found.surface, found.id, strict=True))


@pytest.mark.parametrize("normal", [1.0, -1.0])
def test_directions_are_counted_along_the_normal(normal: float) -> None:
    """A charge thrown up against a steady pull passes twice, the other way on its way back."""
    pull = field("uniform-electric", strength="-1 kV/m")
    acceleration = ION_RATIO * 1e3
    up = acceleration * 1e-6  # turns after 1 us
    height = 0.5 * up * 1e-6
    screen = detector("plane", at=["0", "0", quantity(0.75 * height, "m")], normal=[0, 0, normal])
    moving = loop(
        ions([0.0, 0.0, 0.0], [0.0, 0.0, up]), 2e-6, 1.3e-8, fields=[pull], detectors=[screen]
    )
    found = events(to_end(moving))
    assert [normal, -normal] == list(found.direction)
    assert [0.5e-6, 1.5e-6] == pytest.approx(found.time, rel=1e-10, abs=0.0)
    assert [0.5 * up, -0.5 * up] == pytest.approx(found.velocity[:, 2], rel=1e-9, abs=0.0)
    assert 1 == moving.charges.alive[0]


@pytest.mark.parametrize("steps", [1, 9])
def test_a_disc_sees_only_what_hits_it(steps: int) -> None:
    """Two micrometres decide, in the plane of a tilted disc; what misses it flies on."""
    across = np.array([-2.0, 1.0, 2.0]) / 3.0
    in_plane = np.array([2.0, 2.0, 1.0]) / 3.0
    disc = detector("plane", at=["1 mm", "0", "2 mm"], normal=[-2, 1, 2], radius="2 mm")
    place = np.array([1e-3, 0.0, 2e-3])
    aims = np.array([place + r * in_plane for r in (-2.001e-3, -1.999e-3, 1.999e-3, 2.001e-3)])
    proper = SPEED * (across + 0.4 * in_plane)
    moving = loop(ions(aims - 3e-7 * proper, proper), 1e-6, 1e-6 / steps, detectors=[disc])
    found = events(to_end(moving))
    assert [1, 2] == sorted(found.id)
    assert aims[1:3] == pytest.approx(found.position[np.argsort(found.id)], abs=1e-15)
    assert 4 == moving.charges.alive.sum()


@pytest.mark.parametrize("outward", [1.0, -1.0])
def test_a_charge_that_begins_on_a_detector_has_not_passed_it(outward: float) -> None:
    """A source in the plane of a detector is not counted as it leaves, to neither side."""
    screen = screens(1e-3)
    moving = loop(ions([0.0, 0.0, 1e-3], [0.0, 0.0, outward * SPEED]), 1e-6, 1e-7, detectors=screen)
    to_end(moving)
    assert [] == moving.take_events()


def test_detectors_do_not_touch_what_passes() -> None:
    """With and without them all bits of the motion are the same."""
    pull = field(
        "rf-quadrupole", radius="3 mm", voltage={"amplitude": "50 V", "frequency": "1 MHz"}
    )
    random = np.random.default_rng(4)
    start, speed = random.normal(0.0, 3e-4, (5, 3)), random.normal(0.0, 1e3, (5, 3))

    def end(detectors: list) -> np.ndarray:
        moving = to_end(loop(ions(start, speed), 3e-6, 2e-8, fields=[pull], detectors=detectors))
        if detectors:
            assert len(events(moving).id) >= 4
        return np.concatenate([moving.charges.position, moving.charges.velocity])

    assert (end([]) == end(screens(0.0, 4e-4, -4e-4, 1e-3, -1e-3))).all()
