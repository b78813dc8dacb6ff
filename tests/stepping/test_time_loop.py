"""The time loop from mark to mark: pauses, losses taken out, traced coordinates."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.particles.state import Particles
from driftwell.stepping.happenings import Events, Traced
from driftwell.stepping.loop import TimeLoop
from tests.cases import detector, field, wall
from tests.moving import DIRECT, OFF, always, events, ions, loop, to_end

DURATION = 2e-6
STEP = 1.7e-8

FIELDS = [
    field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "80 V", "frequency": "3 MHz"}),
    field(
        "uniform-magnetic",
        strength={"kind": "step", "before": "0 T", "after": "0.1 T", "at": "0.7 us"},
    ),
    field(
        "uniform-electric",
        strength={
            "kind": "pulses",
            "low": "0 V/m",
            "high": "3 kV/m",
            "start": "0.3 us",
            "width": "0.2 us",
            "period": "0.5 us",
        },
    ),
]
WALLS = [
    wall("cylinder", radius="0.8 mm", effect="reflect"),
    wall("plane", at=["0", "0", "0.9 mm"]),
]
DETECTORS = [detector("plane", at=["0", "0", "0.2 mm"])]


def crowd(n: int = 12) -> Particles:
    """Ions of several masses and weights, warm enough to reach the walls."""
    random = np.random.default_rng(6)
    return ions(
        random.uniform(-3e-4, 3e-4, (n, 3)),
        random.normal(0.0, 800.0, (n, 3)),
        mass=random.uniform(50.0, 200.0, n),
        weight=random.integers(1, 20, n),
        cloud=np.arange(n) % 2,
    )


TRACED = [Traced(0, None, 2), Traced(1, 5, 0), Traced(1, 7, 2)]


def crowded(**keys: Any) -> TimeLoop:
    """Everything at once: fields that jump, walls, a detector, traces, Coulomb's force."""
    options: dict[str, Any] = {
        "fields": FIELDS,
        "walls": WALLS,
        "detectors": DETECTORS,
        "coulomb": DIRECT,
        "records": np.linspace(0.0, DURATION, 5),
        "samples": np.linspace(0.0, DURATION, 41),
        "traced": TRACED,
        **keys,
    }
    return loop(crowd(), DURATION, STEP, **options)


def through(moving: TimeLoop, budget: int | None) -> dict[str, Any]:
    """Everything there is at the end, after calls of at most `budget` steps."""
    calls = 0
    for mark in range(1, len(moving.schedule.steps) + 1):
        if budget is None:
            assert moving.to_mark(mark, always)
            continue
        while moving.mark < mark:
            moving._budget = budget
            moving._burst(mark, budget)
            moving._collect()
            calls += 1
        moving._burst(mark, 0)
    assert budget is None or calls > 3
    happened = events(moving)
    samples = moving.take_samples()
    return {
        "position": moving.charges.position,
        "velocity": moving.charges.velocity,
        "alive": moving.charges.alive,
        "total": moving.work.total,
        "carry": moving.work.carry,
        "energy": moving.work.energy,
        **{name: getattr(happened, name) for name in Events.__slots__},
        "sample times": np.concatenate([times for times, _ in samples]),
        "samples": np.concatenate([values for _, values in samples]),
    }


@pytest.mark.parametrize(
    "keys",
    [
        {"scheme": "kick-drift-kick"},
        {"scheme": "composed-4", "coulomb_every": 3},
    ],
    ids=["plain", "multiple time steps"],
)
@pytest.mark.parametrize("budget", [1, 2, 7])
def test_pausing_anywhere_changes_no_bit(keys: dict[str, Any], budget: int) -> None:
    """State, accounts, events and samples are the same after calls of 1, 2 or 7 steps."""
    whole, pieces = through(crowded(**keys), None), through(crowded(**keys), budget)
    assert 0 < np.count_nonzero(whole["alive"] == 0) < 12
    assert 41 == len(whole["samples"])
    for name, expected in whole.items():
        assert np.array_equal(expected, pieces[name], equal_nan=True), name


def test_asking_again_at_a_mark_or_a_jump_changes_nothing() -> None:
    """Calls without a step leave the accounts of a jump as they are."""
    moving = crowded()
    for mark in range(1, len(moving.schedule.steps)):
        assert moving.to_mark(mark, always)
        moving._burst(mark + 1, 0)
        once = moving.work.total.copy(), moving.charges.velocity.copy()
        for _ in range(3):
            moving._burst(mark + 1, 0)
        assert np.array_equal(once[0], moving.work.total)
        assert np.array_equal(once[1], moving.charges.velocity)


def test_the_wish_to_stop_is_heard_between_calls() -> None:
    """What was reached by then is a whole number of steps, and can be gone on from."""
    moving = crowded()
    asked = 0

    def three_times() -> bool:
        nonlocal asked
        asked += 1
        return asked <= 3

    moving._budget = 1
    assert not moving.to_mark(len(moving.schedule.steps), three_times)
    assert 0 < moving.steps_done < moving.schedule.total_steps
    assert 0.0 < moving.time < DURATION
    to_end(moving)
    assert moving.schedule.total_steps == moving.steps_done
    assert DURATION == moving.time


def without_losses(remove: bool, which: Callable[[TimeLoop], np.ndarray]) -> np.ndarray:
    """State at the end of the charges alive, losses taken out at every record or never."""
    moving = crowded(scheme="composed-4")
    for mark in range(1, len(moving.schedule.steps) + 1):
        assert moving.to_mark(mark, always)
        if remove:
            moving.remove_lost()
    return which(moving)


def test_taking_lost_charges_out_leaves_the_motion_of_others() -> None:
    """A lost charge pushes nobody, in the arrays or out of them: to rounding of the sums."""

    def state(moving: TimeLoop) -> np.ndarray:
        alive = moving.charges.alive != 0
        assert 0 < alive.sum() < 12
        return np.concatenate([moving.charges.position, moving.charges.velocity])[:, alive]

    def names(moving: TimeLoop) -> np.ndarray:
        return moving.particles.id[moving.charges.alive != 0]

    kept, removed = without_losses(False, state), without_losses(True, state)
    assert np.array_equal(without_losses(False, names), without_losses(True, names))
    assert kept == pytest.approx(removed, rel=1e-9, abs=1e-15)
    assert 12 > without_losses(True, lambda moving: moving.charges.alive).size


def test_accounts_go_on_when_lost_charges_are_taken_out() -> None:
    """Taking out changes no account, no count and no time."""
    moving = crowded()
    for mark in range(1, len(moving.schedule.steps) + 1):
        assert moving.to_mark(mark, always)
        before = moving.work.total.copy(), moving.steps_done, moving.time, moving.mark
        moving.remove_lost()
        assert np.array_equal(before[0], moving.work.total)
        assert before[1:] == (moving.steps_done, moving.time, moving.mark)
        assert (moving.charges.alive == 1).all()
        assert moving.charges.position.shape == moving.particles.position.shape
    assert len(moving.particles) < 12


def test_when_all_are_lost_time_goes_on() -> None:
    """An empty loop reaches its end."""
    moving = loop(
        ions([[0, 0, 0], [0, 0, 1e-4]], [0, 0, 1e4]),
        1e-6,
        1e-8,
        coulomb=DIRECT,
        walls=[wall("plane", at=["0", "0", "1 mm"])],
        records=[0.5e-6],
    )
    assert moving.to_mark(1, always)
    moving.remove_lost()
    assert 0 == len(moving.particles)
    to_end(moving)
    assert 1e-6 == moving.time


def test_a_lost_charge_rests_where_it_was_lost() -> None:
    """On the wall, without charge, weight and velocity, whatever pushes there."""
    moving = loop(
        ions([[0, 0, 0], [1e-4, 0, 0]], [0, 0, 1e4]),
        1e-6,
        1.3e-7,
        coulomb=DIRECT,
        walls=[wall("plane", at=["0", "0", "1 mm"])],
        fields=[field("uniform-electric", strength="1 kV/m", along=[1, 0, 0])],
    )
    to_end(moving)
    happened = events(moving)
    assert np.array_equal(happened.position[0], moving.charges.position[:, happened.id[0]])
    assert [0.0, 0.0] == list(moving.charges.charge)
    assert [0.0, 0.0] == list(moving.charges.weight)
    assert (moving.charges.velocity == 0.0).all()
    assert (moving.work.side == -np.sign(1e-3 - moving.charges.position[2])).all()


def traced() -> tuple[np.ndarray, np.ndarray, Events]:
    """Sampled times and values of a centre, a charge, and one that is lost; and the loss."""
    starts = [[0, 0, 0], [0, 0, 2e-4], [0, 0, 5e-4]]
    speeds = [[0, 0, 100.0], [0, 0, 200.0], [0, 0, 1000.0]]
    moving = loop(
        ions(starts, speeds, cloud=[0, 0, 1]),
        1e-6,
        3e-8,
        walls=[wall("plane", at=["0", "0", "1 mm"])],
        samples=np.linspace(0.0, 1e-6, 11),
        records=[0.65e-6],
        traced=[
            Traced(0, None, 2),
            Traced(0, 1, 2),
            Traced(1, 2, 2),
            Traced(1, None, 2),
            Traced(0, None, 0),
        ],
    )
    assert moving.to_mark(int(np.flatnonzero(moving.schedule.time == 0.65e-6)[0]), always)
    moving.remove_lost()
    to_end(moving)
    samples = moving.take_samples()
    assert [] == moving.take_samples()
    return (
        np.concatenate([times for times, _ in samples]),
        np.concatenate([values for _, values in samples]),
        events(moving),
    )


def test_traces_follow_a_centre_a_charge_and_none_once_it_is_lost() -> None:
    """Samples at every asked time from the start on; not a number from the loss on."""
    times, values, loss = traced()
    assert np.linspace(0.0, 1e-6, 11) == pytest.approx(times, abs=1e-20)
    assert 1e-4 + 150.0 * times == pytest.approx(values[:, 0], abs=1e-15)
    assert 2e-4 + 200.0 * times == pytest.approx(values[:, 1], abs=1e-15)
    slower = np.hypot(1.0, 1000.0 / SPEED_OF_LIGHT)  # gamma of a proper velocity
    assert 0.5e-6 * slower == pytest.approx(loss.time[0], rel=1e-13, abs=0.0)
    before = times < loss.time[0] - 1e-9
    after = times > loss.time[0] + 1e-9
    for lone in (2, 3):
        assert 5e-4 + 1000.0 * times[before] == pytest.approx(values[before, lone], abs=1e-14)
        assert np.isnan(values[after, lone]).all()
    assert (values[:, 4] == 0.0).all()


def test_more_samples_than_the_buffer_holds_are_all_kept() -> None:
    """Ten thousand of them, in one go."""
    count = 10_000
    moving = loop(
        ions([0, 0, 0], [0, 0, 1.0]),
        1e-3,
        1e-6,
        samples=np.linspace(0.0, 1e-3, count + 1),
        traced=[Traced(0, 0, 2)],
    )
    to_end(moving)
    samples = moving.take_samples()
    times = np.concatenate([times for times, _ in samples])
    assert len(samples) > 2
    assert count + 1 == len(times)
    assert 1e-3 * np.arange(count + 1) / count == pytest.approx(times, abs=1e-18)
    assert times == pytest.approx(np.concatenate([v for _, v in samples])[:, 0], abs=1e-15)


def test_more_events_than_the_buffer_holds_are_all_kept() -> None:
    """The loop empties the buffer on the way: 40 charges through 40 detectors, to and fro."""
    screens = [detector("plane", name=f"{k}", at=["0", "0", f"{k} um"]) for k in range(40)]
    ends = [
        wall("plane", name=f"{z}", at=["0", "0", f"{z} um"], effect="reflect") for z in (-1, 41)
    ]
    random = np.random.default_rng(1)
    n, passes = 2000, 4
    place = np.zeros((n, 3))
    place[:, 2] = random.uniform(0.1e-6, 0.9e-6, n)
    duration = passes * 42e-6 / 100.0
    moving = to_end(
        loop(ions(place, [0, 0, 100.0]), duration, duration / 500, walls=ends, detectors=screens)
    )
    assert len(moving.work.events) < n * 39 * passes
    happened = events(moving)
    assert n * 40 * passes == pytest.approx(len(happened.id), abs=2 * n)
    assert (np.diff(happened.time) >= 0.0).all()
    for i in (0, 999):
        ups = happened.direction[happened.id == i]
        assert abs(ups.sum()) <= 40
        assert set(ups) == {1, -1}


@pytest.mark.parametrize("n", [3, 100, 600])
def test_threads_change_no_bit_of_the_motion(n: int) -> None:
    """Few charges, many in tiles, and enough for threads."""
    random = np.random.default_rng(2)
    start = random.normal(0.0, 1e-4, (n, 3))
    ends = []
    for threads in (1, 2):
        moving = to_end(loop(ions(start), 2e-7, 2e-8, coulomb=DIRECT, threads=threads))
        ends.append(np.concatenate([moving.charges.position, moving.charges.velocity]))
    assert np.array_equal(*ends)
    still = to_end(loop(ions(start), 2e-7, 2e-8, coulomb=OFF)).charges.position
    assert not np.array_equal(still, ends[0][:3])
