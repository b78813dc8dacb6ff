"""A loop taken up from its state goes on as it would have gone on, to the last bit."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from driftwell.particles.state import Particles
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.stepping.loop import TimeLoop, Traced
from driftwell.stepping.schedule import RECORD
from tests.cases import detector, field, wall
from tests.moving import DIRECT, TREE, ions, loop

RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "60 V", "frequency": "1 MHz"})
PULSED = field(
    "uniform-electric",
    strength={
        "kind": "pulses",
        "low": "0 V/m",
        "high": "400 V/m",
        "start": "2.3 us",
        "width": "1 us",
    },
)
COIL = field("uniform-magnetic", strength={"amplitude": "20 mT", "frequency": "300 kHz"})


def trap(particles: Particles, state: Any = None, **options: Any) -> TimeLoop:
    """Ions in rods, a pulse and a coil, within walls that take and walls that turn back."""
    return loop(
        particles,
        8e-6,
        20e-9,
        fields=[RODS, PULSED, COIL],
        walls=[
            wall("cylinder", radius="0.9 mm"),
            wall("plane", at=["0", "0", "-1 mm"], effect="reflect"),
        ],
        detectors=[detector("plane", at=["0", "0", "0.4 mm"])],
        records=[2e-6, 4e-6, 6e-6],
        samples=np.arange(0.0, 8e-6, 0.1e-6),
        traced=[Traced(0, None, 0), Traced(0, 3, 2)],
        state=state,
        **options,
    )


def moved(budget: int, every: int, **options: Any) -> tuple[int, dict[str, bytes]]:
    """The bytes of all that comes of the trap, with at most `budget` steps in one call.

    After `every` such calls the loop is thrown away, and another one made from its state. Returns
    how often that was.
    """
    random = np.random.default_rng(2)
    start = ions(random.normal(scale=2e-4, size=(70, 3)), random.normal(scale=100.0, size=(70, 3)))
    moving = trap(start, **options)
    calls = taken_up = 0
    events, samples = [], []

    def keep_going() -> bool:
        nonlocal calls
        calls += 1
        moving._budget = budget
        return calls % every != 0

    flags = moving.schedule.flags
    for mark in (*np.flatnonzero(flags & RECORD), flags.size - 1):
        while not moving.to_mark(int(mark), keep_going):
            taken_up += 1
            events += moving.take_events()
            samples += moving.take_samples()
            kept = {**particles_state(moving.particles), **moving.state()}
            kept = {name: np.array(each) for name, each in kept.items()}
            moving = trap(particles_of(kept), kept, **options)
        events += moving.take_events()
        samples += moving.take_samples()
        moving.keep_accuracy()
        moving.remove_lost()
    found = {name: values.tobytes() for name, values in moving.state().items()}
    found |= {name: each.tobytes() for name, each in particles_state(moving.particles).items()}
    for name in ("surface", "id", "time", "position", "velocity"):
        found[f"events {name}"] = b"".join(getattr(each, name).tobytes() for each in events)
    for k, name in enumerate(("sample times", "sample values")):
        found[name] = b"".join(each[k].tobytes() for each in samples)
    assert 5 < len(moving.particles) < 65
    return taken_up, found


@pytest.mark.parametrize("coulomb", [DIRECT, TREE], ids=["direct", "tree"])
@pytest.mark.parametrize("scheme", ["kick-drift-kick", "composed-4", "composed-6"])
@pytest.mark.parametrize("coulomb_every", [1, 3])
def test_a_loop_taken_up_between_any_two_calls_changes_no_bit(
    scheme: str, coulomb_every: int, coulomb: Any
) -> None:
    """With losses, bounces, passages, a jump, traces, within and at the ends of intervals."""
    options = {"scheme": scheme, "coulomb_every": coulomb_every, "coulomb": coulomb}
    never, unbroken = moved(1 << 40, 1 << 40, **options)
    for every in (2, 5):
        often, found = moved(3, every, **options)
        assert never == 0
        assert often > 20
        for name, values in unbroken.items():
            assert values == found[name], name
