"""Steps of midpoint-rotation taken several at once: no bit differs from those taken one by one."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from driftwell.fields.form import FieldForm
from driftwell.stepping.accounts import IMPULSE_FIELDS, RATES
from driftwell.stepping.blocks import LEAP, MANY
from driftwell.stepping.happenings import Traced
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.schemes import MIDWAY
from tests.cases import field
from tests.moving import ions, loop, to_end

PUSH = field("uniform-electric", strength="40 kV/m", along=[1, 2, 0])
CAPS = field("static-quadrupole", voltage="200 V", radius="3 mm", half_length="2 mm")
RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "60 V", "frequency": "1 MHz"})
NO_RODS = field("rf-quadrupole", radius="2 mm", voltage="0 V")
COIL = field("uniform-magnetic", strength="0.2 T", along=[0, 1, 3])
PIECE = field("magnetic-multipole", order=2, radius="5 mm", strength="0.1 T")
RAMPED = field(
    "uniform-magnetic",
    strength={"kind": "ramp", "start": "0 s", "end": "1 us", "before": "0 T", "after": "1 T"},
)
NEVER = 10**9


def moved(most: int, count: int = 700, threads: int = 1, **options: Any) -> TimeLoop:
    """Fast ions after 150 steps; `most` of them in a call."""
    random = np.random.default_rng(5)
    given: dict[str, Any] = {"fields": [PUSH, CAPS, COIL], **options}
    moving = loop(
        ions(
            random.uniform(-0.5e-3, 0.5e-3, size=(count, 3)),
            random.normal(scale=1e8, size=(count, 3)),
        ),
        0.15e-9,
        1e-12,
        records=[0.07e-9],
        threads=threads,
        scheme=MIDWAY,
        **given,
    )

    def keep_going() -> bool:
        moving._budget = most
        return True

    return to_end(moving, keep_going)


def state(moving: TimeLoop) -> dict[str, bytes]:
    found = {name: values.tobytes() for name, values in moving.state().items()}
    found["position"] = moving.particles.position.tobytes()
    found["velocity"] = moving.particles.velocity.tobytes()
    return found


@pytest.mark.parametrize(
    "fields",
    [[PUSH, CAPS, COIL], [COIL], [CAPS, RODS, COIL], [PUSH, COIL, PIECE]],
    ids=["plain", "magnet", "driven", "shaped magnet"],
)
def test_steps_taken_at_once_change_no_bit(fields: list[FieldForm]) -> None:
    """Against single steps, of charges in two stretches, the second with a remainder of 4."""
    single, leapt = moved(1, fields=fields), moved(NEVER, fields=fields)
    assert not single.work.leap_sums[1:].any()
    assert leapt.work.leap_sums[LEAP - 1].any()
    assert state(single) == state(leapt)


def test_no_thread_changes_a_bit_of_a_leap() -> None:
    one, two = moved(NEVER, MANY + 777), moved(37, MANY + 777, threads=2)
    assert one.work.leap_sums[LEAP - 1].any()
    assert state(one) == state(two)


def test_samples_on_the_way_are_those_of_single_steps() -> None:
    options: dict[str, Any] = {
        "traced": [Traced(0, 3, 1), Traced(0, None, 2)],
        "samples": np.arange(1, 15) * 1e-11,
    }
    single, leapt = (moved(most, **options).take_samples() for most in (1, NEVER))
    for k in (0, 1):
        expected = np.concatenate([each[k] for each in single])
        assert expected.shape[0] == 14
        assert expected.tobytes() == np.concatenate([each[k] for each in leapt]).tobytes()


def test_magnets_that_change_are_followed_step_by_step() -> None:
    """Their induced fields do work, which stands in an account of its own."""
    assert not moved(NEVER, fields=[PUSH, RAMPED]).work.leap_sums[1:].any()


def test_plain_fields_push_as_their_own_kernels_do() -> None:
    """To the last bit: rods without a voltage keep the fields from being taken as plain."""
    plain = moved(NEVER, fields=[CAPS, PUSH, COIL])
    each = moved(NEVER, fields=[CAPS, PUSH, NO_RODS, COIL])
    assert each.particles.position.tobytes() == plain.particles.position.tobytes()
    assert each.particles.velocity.tobytes() == plain.particles.velocity.tobytes()
    expected, found = (moving.work.total + moving.work.carry for moving in (each, plain))
    given = slice(IMPULSE_FIELDS, RATES)
    assert expected[given] == pytest.approx(found[given], rel=1e-11, abs=0.0)
