"""The same bits wherever the compiled loop hands over in between."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.schedule import RECORD
from tests.moving import DIRECT, events
from tests.same_bits.busy_trap import busy_trap, load

NEVER = 1 << 40


def moved(budget: int, **stepping: Any) -> tuple[TimeLoop, int, dict[str, bytes]]:
    """Ions in rods, a pulse and a coil, some lost, with at most `budget` steps in one call.

    Returns the loop at its end, the number of calls, and the bytes of all that came of it.
    """
    moving = busy_trap(load(), coulomb=DIRECT, **stepping)
    calls = 0

    def keep_going() -> bool:
        nonlocal calls
        calls += 1
        moving._budget = budget
        return True

    flags = moving.schedule.flags
    for mark in (*np.flatnonzero(flags & RECORD), flags.size - 1):
        assert moving.to_mark(int(mark), keep_going)
        moving.remove_lost()
    found = {name: values.tobytes() for name, values in moving.state().items()}
    for name in ("position", "velocity", "id"):
        found[name] = getattr(moving.particles, name).tobytes()
    met = events(moving)
    for name in ("surface", "id", "time", "position", "velocity"):
        found[f"events {name}"] = getattr(met, name).tobytes()
    samples = moving.take_samples()
    for k, name in enumerate(("sample times", "sample values")):
        found[name] = np.concatenate([each[k] for each in samples]).tobytes()
    return moving, calls, found


@pytest.mark.parametrize(
    "scheme", ["kick-drift-kick", "composed-4", "composed-6", "midpoint-rotation"]
)
@pytest.mark.parametrize("coulomb_every", [1, 3])
def test_a_pause_after_every_step_changes_no_bit(scheme: str, coulomb_every: int) -> None:
    """Against no pause at all between marks, with losses, bounces, passages and a jump."""
    options = {"scheme": scheme, "coulomb_every": coulomb_every}
    moving, calls, often = moved(1, **options)
    _, fewest, never = moved(NEVER, **options)
    assert calls >= moving.steps_done // coulomb_every
    assert fewest < 10
    assert 5 < len(moving.particles) < 65
    for name, values in never.items():
        assert values == often[name], name
