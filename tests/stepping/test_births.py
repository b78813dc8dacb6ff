"""Charges born inside steps: where they fly, what the ledger says of them, when a run is over."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.coulomb.form import Coulomb
from driftwell.geometry.outline import rectangle
from driftwell.geometry.solid import Revolved
from driftwell.images.mirror_sum import plane_images
from driftwell.ledger.ledger import LedgerRow
from driftwell.particles.unborn import Unborn
from driftwell.stepping.loop import TimeLoop
from tests.cases import detector, field, wall
from tests.moving import ION_RATIO, OFF, accounts, events, ions, loop, to_end
from tests.streams import stream

WHOLE = 8e-6
NOBODY = ions(np.zeros((0, 3)))
STRENGTH = 400.0
UNIFORM = field("uniform-electric", strength="400 V/m")
TURNING = field("uniform-magnetic", strength="0.3 T")
RF = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "20 V", "frequency": "0.3 MHz"})
SWINGING = field("uniform-magnetic", strength={"amplitude": "0.3 T", "frequency": "30 kHz"})
SOFT = Coulomb(method="direct", softening="0.2 mm")
TREE = Coulomb(method="tree", softening="0.2 mm", accuracy=1e-4)
FAR_PLANE = plane_images(np.array([0.0, 0.0, -2e-2]), np.array([0.0, 0.0, 1.0]), 1e-6)


def moved(unborn: Unborn, step: float, **options: Any) -> tuple[TimeLoop, list[LedgerRow]]:
    """Nobody at the start, and then whoever is born; with the ledger in between."""
    options = {"coulomb": OFF, "fields": [UNIFORM]} | options
    records = np.linspace(0.0, WHOLE, 5)[1:-1]
    moving = loop(NOBODY, WHOLE, step, unborn=unborn, records=records, **options)
    return moving, accounts(moving)


@pytest.mark.parametrize("step", [100e-9, 100e-9 / 7])
def test_a_stream_in_a_uniform_field_is_where_it_must_be_whatever_the_step(step: float) -> None:
    """The second law (ordinary velocities; what gamma adds is below 1e-12)."""
    unborn = stream(300, 0.9 * WHOLE)
    moving, _ = moved(unborn, step)
    born = unborn.particles
    age = WHOLE - born.birth_time
    expected = born.position + born.velocity * age
    expected[2] += 0.5 * ION_RATIO * STRENGTH * age**2
    speed = born.velocity.copy()
    speed[2] += ION_RATIO * STRENGTH * age
    assert expected == pytest.approx(moving.particles.position, rel=0.0, abs=2e-12)
    assert speed == pytest.approx(moving.particles.velocity, rel=0.0, abs=1e-6)
    assert 300 == moving.born == moving.alive


@pytest.mark.parametrize("step", [100e-9, 100e-9 / 7])
def test_a_stream_in_a_magnetic_field_begins_on_its_helix(step: float) -> None:
    """About z with the angular frequency -Q B / m (Landau and Lifshitz, Fields, sec. 21)."""
    unborn = stream(50, 0.9 * WHOLE)
    moving, rows = moved(unborn, step, fields=[TURNING])
    born = unborn.particles
    age, rate = WHOLE - born.birth_time, -ION_RATIO * 0.3
    speed = born.velocity[0] + 1j * born.velocity[1]
    place = born.position[0] + 1j * born.position[1]
    place = place + speed * (np.exp(1j * rate * age) - 1.0) / (1j * rate)
    found = moving.particles.position
    assert place.real == pytest.approx(found[0], rel=0.0, abs=1e-13)
    assert place.imag == pytest.approx(found[1], rel=0.0, abs=1e-13)
    assert max(row.momentum_residual for row in rows) < 1e-14


@pytest.mark.parametrize(
    "options",
    [
        {"coulomb": SOFT},
        {"coulomb": SOFT, "coulomb_every": 3},
        {"coulomb": SOFT, "scheme": "composed-4"},
        {"coulomb": SOFT, "scheme": "midpoint-rotation", "images": FAR_PLANE},
        {"coulomb": SOFT, "images": FAR_PLANE},
        {"coulomb": SOFT, "images": FAR_PLANE, "coulomb_every": 3},
        {"coulomb": SOFT, "fields": [RF, SWINGING]},
        {"coulomb": TREE},
    ],
    ids=[
        "pairs",
        "every third",
        "composed",
        "midway",
        "images",
        "images every third",
        "drives",
        "tree",
    ],
)
def test_the_ledger_closes_over_births_in_energy_to_second_order_else_to_rounding(
    options: dict[str, Any],
) -> None:
    """Half the step, a quarter of the error; charges whose repulsion is a quarter of all energy."""
    unborn = stream(250, 0.9 * WHOLE, weight=3e4)
    energy = []
    for step in (50e-9, 25e-9):
        _, rows = moved(unborn, step, **options)
        energy.append(np.array([row.energy_residual for row in rows[1:4]]))
        tree = options["coulomb"] is TREE
        assert max(row.momentum_residual for row in rows) < 1e-13
        assert max(row.angular_residual for row in rows) < (1e-3 if tree else 1e-13)
        assert max(abs(row.charge_residual) for row in rows) < 1e-13
        assert max(row.count_residual for row in rows) < 1e-13
        assert max(row.third_law_residual for row in rows) < 1e-13
        assert 250 * unborn.particles.weight[0] == pytest.approx(
            rows[-1].count_born, rel=1e-13, abs=0.0
        )
    order = np.log2(np.abs(energy[0]).max() / np.abs(energy[1]).max())
    assert 2.0 == pytest.approx(order, rel=0.0, abs=0.25)
    assert np.abs(energy[0]).max() < 1e-2


def test_many_born_in_one_step_bring_by_the_tree_what_they_bring_one_by_one() -> None:
    """The energy that sources bring, to the accuracy of the tree; 1100 and 900 in a step."""
    brought = []
    for count in (1100, 900):
        unborn = stream(count, 20e-9, weight=1e4, seed=3)
        rows = []
        for coulomb in (SOFT, TREE):
            moving = loop(NOBODY, 60e-9, 20e-9, unborn=unborn, coulomb=coulomb, fields=[UNIFORM])
            rows.append(accounts(moving)[-1])
        brought.append([row.energy_sources for row in rows])
    for direct, tree in brought:
        assert direct == pytest.approx(tree, rel=2e-5, abs=0.0)


def test_a_run_is_over_only_when_no_birth_is_to_come() -> None:
    """Every charge is lost on the wall after 1.3 us, and there is a time with none between."""
    unborn = stream(4, 1.0, size=1e-6, speed=1.0)
    unborn.particles.birth_time[:] = [1e-6, 1.1e-6, 5e-6, 6.6e-6]
    unborn.particles.velocity[2] = 1.5e3
    moving = loop(
        NOBODY,
        WHOLE,
        50e-9,
        unborn=unborn,
        walls=[wall("plane", at=["0", "0", "2 mm"])],
        records=np.arange(1, 8) * 1e-6,
    )
    left, over = [], []
    for mark in range(1, len(moving.schedule.steps) + 1):
        assert moving.to_mark(mark, lambda: True)
        moving.remove_lost()
        left.append(moving.alive)
        over.append(moving.over)
    assert [0, 2, 0, 0, 0, 1, 0, 0] == left[:6] + [0] * 2
    assert [False] * 7 == over[:7]
    assert moving.over is True
    assert 4 == moving.born == len(events(moving).time)


def test_a_detector_sees_a_stream_at_the_times_it_was_born_plus_its_flight() -> None:
    """Even where several are born within a step of 100 ns."""
    unborn = stream(200, 4e-6, size=0.0, speed=0.0)
    unborn.particles.velocity[2] = 2e3
    moving = loop(
        NOBODY, WHOLE, 100e-9, unborn=unborn, detectors=[detector("plane", at=["0", "0", "2 mm"])]
    )
    to_end(moving)
    gamma = np.sqrt(1.0 + (2e3 / SPEED_OF_LIGHT) ** 2)
    expected = unborn.particles.birth_time + 2e-3 * gamma / 2e3
    assert expected == pytest.approx(events(moving).time, rel=1e-12, abs=0.0)


@pytest.mark.parametrize("kind", ["wall", "electrode"])
def test_who_is_beyond_a_surface_at_the_end_of_its_first_step_is_lost_then_and_there(
    kind: str,
) -> None:
    """Born 50 ns before the end of a step, 10 um before what stops it, at 1 km/s."""
    unborn = stream(1, 1.0, size=0.0, speed=0.0)
    unborn.particles.birth_time[:] = 150e-9
    unborn.particles.velocity[2] = 1e3
    at = "10 um" if kind == "wall" else "1 m"
    block = Revolved(rectangle((0.0, 10e-6), (1e-3, 2e-3)))
    moving = loop(
        NOBODY,
        1e-6,
        100e-9,
        unborn=unborn,
        walls=[wall("plane", at=["0", "0", at])],
        bodies=[[block]] if kind == "electrode" else [],
    )
    to_end(moving)
    met = events(moving)
    assert moving.over
    assert [200e-9] == pytest.approx(met.time, rel=1e-9, abs=0.0)
    assert [50e-6] == pytest.approx(met.position[:, 2], rel=1e-9, abs=0.0)


def test_a_charge_born_on_an_electrode_leaves_it_and_is_lost_where_it_comes_back() -> None:
    """Thrown down from a block at 1 km/s against 400 V/m: back after 2 v/a, at the same speed."""
    unborn = stream(1, 1.0, size=0.0, speed=0.0)
    unborn.particles.birth_time[:] = 150e-9
    unborn.particles.velocity[2] = -1e3
    unborn.particles.position[2] = -1e-12
    block = Revolved(rectangle((0.0, 0.0), (5e-3, 2e-3)))
    moving = loop(NOBODY, WHOLE, 100e-9, unborn=unborn, fields=[UNIFORM], bodies=[[block]])
    to_end(moving)
    met = events(moving)
    back = 150e-9 + 2e3 / (ION_RATIO * STRENGTH)
    assert [back] == pytest.approx(met.time, rel=5e-8, abs=0.0)
    assert [1e3] == pytest.approx(met.velocity[:, 2], rel=1e-8, abs=0.0)


def test_a_limited_surface_launches_what_gauss_law_allows() -> None:
    """The part eps0 E A / (I h) of what is due; all where that is more than one, none if pushed."""
    parts = []
    for share in (0.25, 4.0, -0.25):
        free = stream(4000, 0.9 * WHOLE, size=0.0, speed=0.0)
        normal = np.zeros((3, 4000))
        normal[2] = 1.0
        random = np.random.default_rng(5)
        demand = np.full(4000, abs(share) * 50e-9 / STRENGTH)
        limited = replace(
            free, normal=normal * np.sign(share), demand=demand, chance=random.random(4000)
        )
        moving, rows = moved(limited, 50e-9)
        parts.append(moving.born / 4000)
        assert moving.born == len(moving.present()) == rows[-1].count_born
        assert 0.0 == rows[-1].count_lost
    assert 0.25 == pytest.approx(parts[0], rel=0.0, abs=0.021)  # three standard deviations
    assert [1.0, 0.0] == parts[1:]
