"""Many charges are passed through in blocks: they move as few do, and the accounts close."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from driftwell.kernels.threads import on_threads
from driftwell.stepping.blocks import BLOCK, MANY, SUMS, blocks
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.motion import CURSOR_FRESH
from driftwell.stepping.schemes import MIDWAY
from tests.cases import detector, field, wall
from tests.moving import DIRECT, accounts, events, ions, loop, to_end

RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "60 V", "frequency": "1 MHz"})
COIL = field("uniform-magnetic", strength={"amplitude": "20 mT", "frequency": "300 kHz"})
PIECE = field("magnetic-multipole", order=2, radius="5 mm", strength="0.1 T")
PULSED = field(
    "uniform-electric",
    strength={
        "kind": "pulses",
        "low": "0 V/m",
        "high": "400 V/m",
        "start": "0.1 us",
        "width": "0.1 us",
    },
)
COUNT = MANY + 777


def cloud(
    threads: int = 1, count: int = COUNT, part: slice = slice(None), **options: Any
) -> TimeLoop:
    """Ions in rods and magnets, some lost, bounced or passing a detector, at the start.

    part : which of the `count` there are
    """
    random = np.random.default_rng(3)
    given = {
        "fields": [RODS, PULSED, COIL, PIECE],
        "walls": [
            wall("cylinder", radius="0.8 mm"),
            wall("plane", at=["0", "0", "-0.7 mm"], effect="reflect"),
        ],
        "detectors": [detector("plane", at=["0", "0", "0.4 mm"])],
        **options,
    }
    place = random.uniform(-0.5e-3, 0.5e-3, size=(count, 3))
    speed = random.normal(scale=900.0, size=(count, 3))
    return loop(
        ions(place[part], speed[part]),
        0.3e-6,
        10e-9,
        records=[0.1e-6, 0.2e-6],
        threads=threads,
        **given,
    )


def without_blocks(moving: TimeLoop) -> TimeLoop:
    """The same loop, which takes its charges in one stretch, as if they were few."""
    moving._passes = None
    moving.work = moving.work._replace(block_sums=np.zeros((0, SUMS)))
    moving.work.cursor[CURSOR_FRESH] = 0
    return moving


def test_blocks_cut_many_charges_and_only_them() -> None:
    assert [0, 0, MANY // BLOCK, MANY // BLOCK + 1] == [
        blocks(n) for n in (0, MANY - 1, MANY, MANY + 1)
    ]


@pytest.mark.parametrize("scheme", ["kick-drift-kick", "composed-4"])
def test_many_charges_move_as_few_do(scheme: str) -> None:
    """Places and velocities to rounding, the very same events; accounts to the order of sums."""
    found, expected = to_end(cloud(scheme=scheme)), to_end(without_blocks(cloud(scheme=scheme)))
    for name in ("position", "velocity"):
        left, right = getattr(expected.charges, name), getattr(found.charges, name)
        assert np.abs(left - right).max() <= 1e-13 * np.abs(left).max()
    assert np.array_equal(expected.charges.alive, found.charges.alive)
    left, right = events(expected), events(found)
    assert 500 < left.surface.size
    assert {0, 1, 2} >= set(left.surface) >= {0, 2}
    assert np.array_equal(left.surface, right.surface)
    assert np.array_equal(left.id, right.id)
    books = [each.work.total + each.work.carry for each in (expected, found)]
    assert books[0] == pytest.approx(books[1], rel=1e-9, abs=1e-12 * float(np.abs(books[0]).max()))


def test_many_charges_go_through_the_middle_as_few_do() -> None:
    """Against the same charges in two parts, both few; the accounts are those of both together."""
    found = to_end(cloud(scheme=MIDWAY))
    parts = [
        to_end(cloud(scheme=MIDWAY, part=part)) for part in (slice(0, 8001), slice(8001, None))
    ]
    for name in ("position", "velocity"):
        expected = np.concatenate([getattr(each.charges, name) for each in parts], axis=1)
        difference = np.abs(expected - getattr(found.charges, name)).max()
        assert difference <= 1e-13 * np.abs(expected).max()
    assert 500 < events(found).surface.size == sum(events(each).surface.size for each in parts)
    book = found.work.total + found.work.carry
    expected = np.sum([each.work.total + each.work.carry for each in parts], axis=0)
    assert expected == pytest.approx(book, rel=1e-9, abs=1e-12 * float(np.abs(book).max()))


@pytest.mark.parametrize(
    "options",
    [
        {},
        {"scheme": MIDWAY},
        {"walls": [], "detectors": [], "fields": [RODS]},
        {"fields": [], "coulomb": DIRECT, "step": 0.1e-6},
        {"coulomb": DIRECT, "coulomb_every": 3, "step": 0.1e-6},
    ],
    ids=[
        "all",
        "all, through the middle",
        "rods alone",
        "charges alone",
        "charges every third step",
    ],
)
def test_the_accounts_of_many_charges_close(options: dict[str, Any]) -> None:
    """Momentum and its moment, charge and count to rounding; energy to the step."""
    rest = {name: each for name, each in options.items() if name != "step"}
    for row in accounts(cloud(**rest)) if "step" not in options else accounts(few_steps(**rest)):
        assert abs(row.momentum_residual) < 1e-12
        assert abs(row.angular_residual) < 1e-12
        assert abs(row.charge_residual) < 1e-12
        assert abs(row.count_residual) < 1e-12
        assert abs(row.third_law_residual) < 1e-12
        assert abs(row.energy_residual) < 1e-2


def few_steps(**options: Any) -> TimeLoop:
    """The cloud for three steps only: the direct sum of so many takes its time."""
    random = np.random.default_rng(4)
    place = random.uniform(-0.5e-3, 0.5e-3, size=(MANY, 3))
    return loop(
        ions(place, random.normal(scale=900.0, size=(MANY, 3))),
        3e-9,
        1e-9,
        walls=[wall("cylinder", radius="0.7 mm")],
        threads=2,
        **options,
    )


@pytest.mark.parametrize("scheme", ["kick-drift-kick", MIDWAY])
def test_threads_change_no_bit_of_many_charges(scheme: str) -> None:
    """Charges, accounts, events and the energy in the fields."""
    found = []
    for threads in (1, 2):
        with on_threads(threads):
            moving = to_end(cloud(threads, scheme=scheme))
        met = events(moving)
        found.append(
            [
                *(moving.charges.position, moving.charges.velocity, moving.charges.alive),
                *(moving.work.total, moving.work.carry, moving.work.energy, moving.work.side),
                *(met.id, met.surface, met.time, met.position, met.velocity),
            ]
        )
    for one, two in zip(*found, strict=True):
        assert one.tobytes() == two.tobytes()
