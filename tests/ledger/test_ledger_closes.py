"""The ledger closes: to rounding where the steps are exact, to their order where they are not."""

from __future__ import annotations

from dataclasses import dataclass, replace
from dataclasses import field as default
from typing import Any

import numpy as np
import pytest

from driftwell.coulomb.form import Coulomb
from driftwell.ledger.ledger import Ledger, LedgerRow
from tests.cases import field, wall
from tests.moving import DIRECT, OFF, accounts, ions, loop

CAPS = field("static-quadrupole", axial_frequency={"species": "barium", "value": "100 kHz"})
RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "100 V", "frequency": "2 MHz"})
COIL = field("uniform-magnetic", strength="1 T", along=[0, 1, 3])
RISING = field(
    "uniform-magnetic",
    strength={"kind": "ramp", "before": "0 T", "after": "1 T", "start": "0.3 us", "end": "2 us"},
)
JUMPING = field(
    "uniform-electric",
    along=[2, -1, 2],
    strength={
        "kind": "pulses",
        "low": "0 V/m",
        "high": "150 V/m",
        "start": "0.4 us",
        "width": "0.5 us",
        "period": "1 us",
    },
)
REFLECTED = 20.0
"""Times its bound, where the mirror's residual may lie in midpoint-rotation; twice for the rest."""
SOFT = Coulomb(method="direct", softening="5 um")
BORE = wall("sphere", radius="0.3 mm")
MIRROR = wall("box", name="mirror", size=["0.5 mm", "0.5 mm", "0.5 mm"], effect="reflect")
END = wall("plane", name="end", at=["0", "0", "0.15 mm"])


@dataclass(frozen=True)
class Case:
    """A motion of 3 us, and the largest energy residual it may leave at steps of 10 ns.

    The bound is about twice what was seen; half the step leaves about a quarter.
    """

    name: str
    energy: float
    fields: list[Any] = default(default_factory=list)
    walls: list[Any] = default(default_factory=list)
    coulomb: Coulomb = DIRECT
    charge: Any = 1.0
    weight: Any = 1.0
    speed: float = 60.0
    n: int = 30


CASES = [
    Case("ions at rest in a static trap", 5e-6, [CAPS], speed=0.0),
    Case("a static trap with a magnet", 3e-6, [CAPS, COIL]),
    Case("a radio-frequency trap", 0.003, [RODS, CAPS]),
    Case("a changing magnet", 5e-6, [CAPS, RISING]),
    Case("jumping fields", 4e-7, [JUMPING]),
    Case("losses on a wall", 0.005, [JUMPING, RODS], [BORE], speed=30.0),
    Case("a mirror", 1.2e-5, [JUMPING, COIL], [MIRROR], speed=600.0),
    Case("a mirror that is open on one side", 0.012, [JUMPING, RODS], [MIRROR, END], speed=600.0),
    Case("macro-charges", 0.0001, [CAPS], [BORE], SOFT, weight=200.0),
    Case(
        "charges of both signs",
        1.5e-5,
        [COIL],
        [BORE],
        SOFT,
        charge=np.tile([1.0, -1.0], 15),
        weight=np.tile([30.0, 30.0, 5.0], 10),
    ),
    Case("no charge feels another", 1e-5, [CAPS, JUMPING], [BORE], OFF),
    Case("many charges in tiles", 2e-5, [CAPS, JUMPING], [BORE], n=150),
]


def rows(case: Case, step: float = 1e-8, **stepping: Any) -> list[LedgerRow]:
    """The ledger of a case, closed seven times."""
    random = np.random.default_rng(5)
    start = ions(
        random.uniform(-1e-4, 1e-4, (case.n, 3)),
        random.normal(0.0, 1.0, (case.n, 3)) * case.speed,
        charge=case.charge,
        weight=case.weight,
        mass=random.uniform(80.0, 150.0, case.n),
    )
    return accounts(
        loop(
            start,
            3e-6,
            step,
            fields=case.fields,
            walls=case.walls,
            coulomb=case.coulomb,
            records=np.linspace(0.0, 3e-6, 7),
            **stepping,
        )
    )


def worst(found: list[LedgerRow]) -> float:
    """Largest energy residual."""
    return max(abs(row.energy_residual) for row in found)


@pytest.mark.parametrize("scheme", ["kick-drift-kick", "midpoint-rotation"])
@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_every_account_closes_at_every_record(case: Case, scheme: str) -> None:
    """Momentum, angular momentum, charge, count and the third law to rounding, energy to the step.

    No energy residual of steps of finite length is zero, so one that were would not be a check.
    """
    found = rows(case, scheme=scheme)
    largest = case.energy
    if scheme == "midpoint-rotation":
        largest *= REFLECTED if case.name == "a mirror" else 2.0
    assert 7 == len(found)
    for row in found:
        assert row.momentum_residual <= 1e-13
        assert row.angular_residual <= 1e-13
        assert abs(row.charge_residual) <= 1e-14
        assert abs(row.count_residual) <= 1e-14
        assert row.third_law_residual <= 1e-13
        assert abs(row.energy_residual) <= largest
    assert worst(found) >= 1e-9
    assert worst(rows(case, 5e-9, scheme=scheme)) <= 0.5 * worst(found)
    assert 0.0 == found[0].energy_residual == found[0].momentum_residual
    moved = np.linalg.norm(found[-1].momentum - found[0].momentum)
    assert moved > 1e-3 * np.linalg.norm(found[-1].momentum)
    if BORE in case.walls or END in case.walls:
        assert 0.0 < found[-1].count_lost < found[0].count
        assert found[-1].energy_walls != 0.0


@pytest.mark.parametrize(
    ("scheme", "order"),
    [("kick-drift-kick", 2), ("composed-4", 4), ("midpoint-rotation", 2)],
)
def test_the_energy_of_a_static_trap_closes_to_the_order_of_the_scheme(
    scheme: str, order: int
) -> None:
    """2^order with half the step, within a tenth of the order; no pair of charges is sudden."""
    steps = np.array([5e-8, 2.5e-8, 1.25e-8])
    smooth = replace(CASES[1], coulomb=Coulomb(method="direct", softening="30 um"))
    residual = [worst(rows(smooth, step, scheme=scheme)) for step in steps]
    fitted = np.polyfit(np.log(steps), np.log(residual), 1)[0]
    assert order == pytest.approx(fitted, abs=0.15)
    assert 1e-12 < residual[-1]


def test_charges_lost_while_others_bounce_leave_the_energy_closed() -> None:
    """In one step a mirror turns some and a wall takes others, in a strong static field.

    What the reflected ones gain in the field on their last way is theirs, not the wall's: the
    residual is that of the bounces alone.
    """
    field_between = field("uniform-electric", strength="200 kV/m", along=[0, 0, 1])
    random = np.random.default_rng(2)
    n = 40
    place = np.zeros((n, 3))
    place[:, :2] = random.uniform(-1e-4, 1e-4, (n, 2))
    place[: n // 2, 2] = 0.85e-4  # these reach the end at 0.15 mm
    place[n // 2 :, 2] = -2.4e-4  # these fly down to the mirror's floor at -0.25 mm
    speed = np.zeros((n, 3))
    speed[: n // 2, 2] = 6.5e3
    speed[n // 2 :, 2] = -5e3
    for coulomb in (OFF, DIRECT):
        moving = loop(
            ions(place, speed),
            1.2e-8,
            1.2e-8,
            fields=[field_between],
            walls=[MIRROR, END],
            coulomb=coulomb,
        )
        last = accounts(moving)[-1]
        assert n / 2 == last.count_lost
        assert (last.momentum > 0.0)[2]
        assert abs(last.energy_residual) <= 1e-7
        assert abs(last.field) > 1e-2 * last.kinetic
        assert last.momentum_residual <= 1e-13


def test_a_neutral_cloud_has_a_relative_charge_residual() -> None:
    """The charges of one sign are the scale, where all together are none."""
    moving = loop(ions([[0, 0, 0], [0, 0, 1e-3]], charge=[1.0, -1.0]), 1e-6, 1e-7)
    ledger = Ledger()
    first = ledger.close(0.0, moving.plan, moving.charges, moving.work)
    assert 0.0 == first.charge == first.charge_residual
    moving.charges.charge[0] *= 1.0 + 1e-3
    spoiled = ledger.close(1e-6, moving.plan, moving.charges, moving.work)
    assert 0.5e-3 == pytest.approx(spoiled.charge_residual, rel=2e-3, abs=0.0)
