"""The same bits with an inexact sum that is measured and mended on the way."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.coulomb.form import Coulomb
from driftwell.particles.state import Particles
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.schedule import RECORD
from tests.cases import wall
from tests.inexact import Inexact, inexact  # noqa: F401
from tests.moving import ions, loop

NEVER = 1 << 40
SPAN, STEPS, RECORDS = 20e-6, 1000, 10


def swelling(particles: Particles | None = None, **changes: object) -> TimeLoop:
    """130 macro-charges that blow each other up, within a wall far away."""
    random = np.random.default_rng(2)
    start = ions(random.normal(scale=1e-4, size=(130, 3)), weight=5.0)
    return loop(
        start if particles is None else particles,
        SPAN,
        SPAN / STEPS,
        walls=[wall("sphere", radius="1 mm")],
        coulomb=Coulomb(method="tree", accuracy=1e-4, softening="5 um"),
        records=np.linspace(0.0, SPAN, RECORDS + 1),
        **changes,  # type: ignore[arg-type]
    )


def moved(budget: int, threads: int = 1) -> tuple[TimeLoop, dict[str, bytes], list[str]]:
    """The loop at its end with at most `budget` steps in a call, its bytes, and what was told."""
    moving = swelling(threads=threads)
    said: list[str] = []

    def keep_going() -> bool:
        moving._budget = budget
        return True

    for mark in np.flatnonzero(moving.schedule.flags & RECORD):
        assert moving.to_mark(int(mark), keep_going)
        said += moving.keep_accuracy()[1]
        moving.remove_lost()
    found = {name: values.tobytes() for name, values in moving.state().items()}
    for name in ("position", "velocity", "id"):
        found[name] = getattr(moving.particles, name).tobytes()
    return moving, found, said


@pytest.mark.parametrize(("budget", "threads"), [(1, 1), (7, 2), (NEVER, 2)])
def test_pauses_and_threads_change_no_bit_of_a_run_that_is_mended(
    budget: int,
    threads: int,
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance = 1e-3
    _, expected, said = moved(NEVER)
    _, found, again = moved(budget, threads)
    assert any("tightened from here on" in sentence for sentence in said)
    assert said == again
    for name, values in expected.items():
        assert values == found[name], name


def test_a_run_taken_up_again_sums_as_it_did(inexact: Inexact) -> None:  # noqa: F811
    """From the state alone: the mended sum, its field to the last bit, and the watch."""
    inexact.tolerance = 1e-3
    moving, _, _ = moved(NEVER)
    inexact.tolerance = 7e-3  # what a new run would begin with is of no account
    again = swelling(moving.particles, threads=2, state=moving.state())
    assert moving.summation.manner == again.summation.manner
    assert moving.promise.state().keys() == again.promise.state().keys()
    for name, values in moving.promise.state().items():
        assert values.tobytes() == again.promise.state()[name].tobytes()
    summed = again.summation.laid_out(len(moving.particles))
    field = np.empty_like(moving.work.coulomb)
    summed.field(moving.charges.position, moving.charges.charge, field)
    moving.summation.field(moving.charges.position, moving.charges.charge, moving.work.coulomb)
    assert moving.work.coulomb.tobytes() == field.tobytes()
