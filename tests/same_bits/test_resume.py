"""A loop taken up from its state goes on as it would have gone on, to the last bit."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from driftwell.images.image_sum import Images
from driftwell.images.mirror_sum import plane_images
from driftwell.images.tube_sum import TubeImages
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.stepping.schedule import RECORD
from tests.moving import DIRECT, OFF, TREE
from tests.same_bits.busy_trap import busy_trap, load

TUBE = TubeImages(2, np.zeros(3), 0.9e-3, 0.9)
PLANE = plane_images(np.array([0.0, 0.0, -1e-3]), np.array([0.0, 0.0, 1.0]), 5e-6)


def moved(budget: int, every: int, **options: Any) -> tuple[int, dict[str, bytes]]:
    """The bytes of all that comes of the trap, with at most `budget` steps in one call.

    After `every` such calls the loop is thrown away, and another one made from its state. Returns
    how often that was.
    """
    moving = busy_trap(load(), **options)
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
            moving = busy_trap(particles_of(kept), state=kept, **options)
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
@pytest.mark.parametrize(
    "scheme", ["kick-drift-kick", "composed-4", "composed-6", "midpoint-rotation"]
)
@pytest.mark.parametrize("coulomb_every", [1, 3])
def test_a_loop_taken_up_between_any_two_calls_changes_no_bit(
    scheme: str, coulomb_every: int, coulomb: Any
) -> None:
    """With losses, bounces, passages, a jump, traces, within and at the ends of intervals."""
    same_bits({"scheme": scheme, "coulomb_every": coulomb_every, "coulomb": coulomb}, (2, 5))


@pytest.mark.parametrize(
    ("scheme", "every", "coulomb", "images"),
    [
        ("kick-drift-kick", 1, OFF, TUBE),
        ("composed-4", 3, DIRECT, TUBE),
        ("kick-drift-kick", 3, DIRECT, PLANE),
        ("midpoint-rotation", 1, DIRECT, TUBE),
    ],
    ids=["a tube alone", "a tube", "a plane", "a tube, in the middle"],
)
def test_a_loop_with_images_is_taken_up_as_it_was_left(
    scheme: str, every: int, coulomb: Any, images: Images
) -> None:
    """As without them, and in the cadence of the pairs."""
    options = {"scheme": scheme, "coulomb_every": every, "coulomb": coulomb, "images": images}
    same_bits(options, (5,))


def same_bits(options: dict[str, Any], breaks: tuple[int, ...]) -> None:
    """See that no bit changes where the loop is made anew after so many calls."""
    never, unbroken = moved(1 << 40, 1 << 40, **options)
    for every in breaks:
        often, found = moved(3, every, **options)
        assert never == 0
        assert often > 20
        for name, values in unbroken.items():
            assert values == found[name], name
