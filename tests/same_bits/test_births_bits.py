"""Charges born on the way: the same bits after pauses, on any threads, and after a resume."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from driftwell.coulomb.form import Coulomb
from driftwell.kernels.threads import on_threads
from driftwell.particles.unborn import Unborn
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.stepping.schedule import RECORD
from tests.moving import DIRECT, TREE
from tests.same_bits.busy_trap import busy_trap, load
from tests.streams import stream

NEVER = 1 << 40


def births() -> Unborn:
    """350 ions born in the trap, in several pools, half of them as the field allows."""
    made = stream(350, 7.5e-6, first_id=70, size=2e-4, cloud=1)
    random = np.random.default_rng(3)
    normal = np.zeros((3, 350))
    normal[0] = 1.0
    demand = np.where(np.arange(350) % 2 == 0, 1e-12, 0.0)
    return replace(made, normal=normal, demand=demand, chance=random.random(350))


def moved(budget: int, every: int, threads: int = 1, **options: Any) -> dict[str, bytes]:
    """The bytes of all that comes of the trap, with at most `budget` steps in one call.

    After `every` such calls the loop is thrown away, and another one made from its state.
    """
    options = {"threads": threads, "unborn": births()} | options
    moving = busy_trap(load(), **options)
    calls = 0
    events, samples, born = [], [], []

    def keep_going() -> bool:
        nonlocal calls
        calls += 1
        moving._budget = budget
        return calls % every != 0

    flags = moving.schedule.flags
    for mark in (*np.flatnonzero(flags & RECORD), flags.size - 1):
        while not moving.to_mark(int(mark), keep_going):
            events += moving.take_events()
            samples += moving.take_samples()
            born += moving.take_births()
            kept = {**particles_state(moving.particles), **moving.state()}
            kept = {name: np.array(each) for name, each in kept.items()}
            moving = busy_trap(particles_of(kept), state=kept, **options)
        events += moving.take_events()
        samples += moving.take_samples()
        born += moving.take_births()
        moving.keep_accuracy()
        moving.remove_lost()
    found = {name: values.tobytes() for name, values in moving.state().items()}
    found |= {name: each.tobytes() for name, each in particles_state(moving.particles).items()}
    for name in ("surface", "id", "time", "position", "velocity"):
        found[f"events {name}"] = b"".join(getattr(each, name).tobytes() for each in events)
    for name in ("id", "time", "position", "velocity", "weight"):
        found[f"births {name}"] = b"".join(getattr(each, name).tobytes() for each in born)
    for k, name in enumerate(("sample times", "sample values")):
        found[name] = b"".join(each[k].tobytes() for each in samples)
    assert 175 < moving.born < 350
    assert moving.born == sum(len(each.id) for each in born)
    assert 30 < moving.alive < 250
    return found


@pytest.mark.parametrize(
    ("scheme", "every", "coulomb"),
    [
        ("kick-drift-kick", 1, DIRECT),
        ("kick-drift-kick", 3, DIRECT),
        ("composed-4", 1, TREE),
        ("midpoint-rotation", 1, DIRECT),
    ],
    ids=["each step", "every third", "composed, tree", "midway"],
)
def test_births_are_the_same_after_pauses_and_after_resumes(
    scheme: str, every: int, coulomb: Coulomb
) -> None:
    """With losses, bounces, passages, a jump and traces; after each step, and a new loop often."""
    options = {"scheme": scheme, "coulomb_every": every, "coulomb": coulomb}
    unbroken = moved(NEVER, NEVER, **options)
    for budget, anew in ((1, NEVER), (3, 2), (3, 5)):
        found = moved(budget, anew, **options)
        for name, values in unbroken.items():
            assert values == found[name], name


def test_births_are_the_same_on_two_threads() -> None:
    """With the tree, whose sums all threads share."""
    with on_threads(1):
        one = moved(NEVER, NEVER, coulomb=TREE)
    with on_threads(2):
        two = moved(NEVER, NEVER, threads=2, coulomb=TREE)
    for name, values in one.items():
        assert values == two[name], name
