"""A rotating drive is at rest for what turns with it."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from driftwell.fields.evaluation import evaluate
from driftwell.fields.form import FieldForm
from driftwell.stepping.accounts import TORQUE_FIELDS, WORK_DRIVE
from tests.cases import BODIES, field
from tests.moving import ION_MASS, ION_RATIO, always, ions, loop

FREQUENCY = 60e3
COIL = field("uniform-magnetic", strength="2 T")
CAPS = field("static-quadrupole", voltage="4 V", radius="5 mm", half_length="5 mm")


def drive(order: int, sense: str = "counterclockwise", **keys: Any) -> FieldForm:
    return field(
        "rotating-drive",
        order=order,
        radius="4 mm",
        voltage="3 V",
        frequency="60 kHz",
        sense=sense,
        **keys,
    )


@pytest.mark.parametrize("order", [1, 2, 5])
@pytest.mark.parametrize("sense", ["counterclockwise", "clockwise"])
def test_the_pattern_is_the_one_at_time_zero_turned(order: int, sense: str) -> None:
    """V (r/R)^m cos(m (angle - alpha -+ omega t)): J. D. Jackson (1998), sec. 2.11, from memory."""
    form = drive(order, sense, angle="25 deg")
    random = np.random.default_rng(1)
    place = random.uniform(-3e-3, 3e-3, (20, 3))
    time = 3.7e-6
    sign = 1.0 if sense == "counterclockwise" else -1.0
    turned = sign * 2.0 * math.pi * FREQUENCY * time
    radius, angle = np.hypot(place[:, 0], place[:, 1]), np.arctan2(place[:, 1], place[:, 0])
    expected = 3.0 * (radius / 4e-3) ** order
    expected *= np.cos(order * (angle - math.radians(25.0) - turned))
    found = evaluate([form], BODIES, place, time)
    assert expected == pytest.approx(found.potential, abs=1e-13 * np.abs(expected).max())


@pytest.mark.parametrize("order", [1, 2])
@pytest.mark.parametrize("sense", ["counterclockwise", "clockwise"])
@pytest.mark.parametrize("scheme", ["composed-6", "midpoint-rotation"])
def test_an_ion_keeps_its_energy_in_the_frame_that_turns(
    order: int, sense: str, scheme: str
) -> None:
    """H - omega L, with the canonical L, in a magnet and a trap that are round about z.

    L. D. Landau, E. M. Lifshitz, Mechanics, sec. 39; the other sense does not keep it.
    """
    fields = [COIL, CAPS, drive(order, sense)]
    sign = 1.0 if sense == "counterclockwise" else -1.0
    omega = sign * 2.0 * math.pi * FREQUENCY
    records = np.linspace(0.0, 20e-6, 21)
    moving = loop(
        ions([1e-3, 0.5e-3, 0.8e-3], [300.0, -200.0, 100.0]),
        20e-6,
        2e-9,
        fields=fields,
        records=records,
        scheme=scheme,
    )
    energies, angular = [], []
    for mark in range(len(records)):
        assert moving.to_mark(mark, always) or mark == 0
        place, speed = moving.charges.position[:, 0], moving.charges.velocity[:, 0]
        time = float(records[mark])
        volts = evaluate(fields, BODIES, place, time).potential[0]
        energies.append(0.5 * float(speed @ speed) + ION_RATIO * float(volts))
        spin = place[0] * speed[1] - place[1] * speed[0]
        angular.append(spin + 0.5 * ION_RATIO * 2.0 * (place[0] ** 2 + place[1] ** 2))
    kept = np.array(energies) - omega * np.array(angular)
    other = np.array(energies) + omega * np.array(angular)
    size = np.ptp(energies)
    assert np.ptp(kept) < (1e-7 if scheme == "composed-6" else 1e-3) * size
    assert np.ptp(other) > 0.1 * size


def test_the_drives_work_is_its_torque_times_the_angular_frequency() -> None:
    """On a cloud, of any shape: to rounding, as every force evaluation has both."""
    random = np.random.default_rng(4)
    place = random.normal(0.0, 1.0, (50, 3)) * [1e-3, 0.7e-3, 0.5e-3]
    moving = loop(
        ions(place, random.normal(0.0, 200.0, (50, 3))), 4e-6, 1e-8, fields=[COIL, drive(2)]
    )
    assert moving.to_mark(len(moving.schedule.steps), always)
    book = moving.work.total + moving.work.carry
    torque, done = float(book[TORQUE_FIELDS + 2]), float(book[WORK_DRIVE])
    assert abs(done) > 1e-3 * ION_MASS * 200.0**2
    assert 2.0 * math.pi * FREQUENCY * torque == pytest.approx(done, rel=1e-10, abs=0.0)


def test_it_says_what_it_does() -> None:
    assert (
        "electric quadrupole that turns clockwise about z with 60 kHz, 3 V at 4 mm"
        == drive(2, "clockwise").words()
    )
