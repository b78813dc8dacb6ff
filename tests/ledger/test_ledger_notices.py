"""The ledger's residuals can fail: every account left out and every wrong force shows."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE, SPEED_OF_LIGHT
from driftwell.ledger.ledger import Ledger, LedgerRow
from driftwell.stepping import accounts as account
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.motion import Work
from tests.cases import field, wall
from tests.moving import DIRECT, ION_MASS, always, ions, loop, to_end

DURATION = 2e-6


def everything() -> tuple[TimeLoop, Ledger]:
    """A motion in which every account has its part, at its end; the ledger opened at its start."""
    random = np.random.default_rng(11)
    start = ions(
        random.uniform(-1e-4, 1e-4, (20, 3)),
        random.normal(0.0, 60.0, (20, 3)),
        weight=random.integers(1, 9, 20),
    )
    moving = loop(
        start,
        DURATION,
        1e-8,
        coulomb=DIRECT,
        fields=[
            field(
                "rf-quadrupole", radius="2 mm", voltage={"amplitude": "20 V", "frequency": "2 MHz"}
            ),
            field("uniform-electric", strength="150 V/m", along=[1, 2, -2]),
            field(
                "uniform-magnetic",
                along=[1, 0, 2],
                strength={
                    "kind": "ramp",
                    "before": "0 T",
                    "after": "1.5 T",
                    "start": "0 s",
                    "end": "2 us",
                },
            ),
        ],
        walls=[wall("sphere", radius="0.25 mm")],
    )
    ledger = Ledger()
    ledger.close(0.0, moving.plan, moving.charges, moving.work)
    return to_end(moving), ledger


MOVED, LEDGER = everything()


def closed(work: Work) -> LedgerRow:
    """The last row with other work arrays."""
    return LEDGER.close(DURATION, MOVED.plan, MOVED.charges, work)


def test_with_all_accounts_it_closes() -> None:
    """The row the others are held against; some charges are lost, some are not."""
    row = closed(MOVED.work)
    assert 0 < row.count_lost
    assert 0 < row.count
    assert abs(row.energy_residual) <= 5e-3
    assert row.momentum_residual <= 1e-13
    assert row.angular_residual <= 1e-13
    assert abs(row.charge_residual) <= 1e-14
    assert abs(row.count_residual) <= 1e-14


@pytest.mark.parametrize(
    ("name", "residual"),
    [
        ("WORK_DRIVE", "energy_residual"),
        ("WORK_INDUCED", "energy_residual"),
        ("ENERGY_WALLS", "energy_residual"),
        ("IMPULSE_FIELDS", "momentum_residual"),
        ("IMPULSE_MAGNETS", "momentum_residual"),
        ("MOMENTUM_WALLS", "momentum_residual"),
        ("TORQUE_FIELDS", "angular_residual"),
        ("TORQUE_MAGNETS", "angular_residual"),
        ("ANGULAR_WALLS", "angular_residual"),
        ("CHARGE_WALLS", "charge_residual"),
        ("COUNT_WALLS", "count_residual"),
    ],
)
def test_an_account_left_out_leaves_a_residual(name: str, residual: str) -> None:
    """Of its own kind, far above that of the step; the others stay as they were."""
    k = getattr(account, name)
    width = 3 if residual in {"momentum_residual", "angular_residual"} else 1
    total, carry = MOVED.work.total.copy(), MOVED.work.carry.copy()
    total[k : k + width] = carry[k : k + width] = 0.0
    spoiled, right = closed(MOVED.work._replace(total=total, carry=carry)), closed(MOVED.work)
    assert abs(getattr(spoiled, residual)) > 1e-2
    for other in ("energy", "momentum", "angular", "charge", "count"):
        if f"{other}_residual" != residual:
            name_of = f"{other}_residual"
            assert getattr(right, name_of) == getattr(spoiled, name_of)


def test_every_account_is_one_of_these() -> None:
    """The numbers of the accounts fill their array without gap or overlap."""
    single = [
        "WORK_DRIVE",
        "WORK_INDUCED",
        "ENERGY_WALLS",
        "CHARGE_WALLS",
        "COUNT_WALLS",
        "ENERGY_SOURCES",
        "CHARGE_SOURCES",
        "COUNT_SOURCES",
        "ENERGY_PROCESSES",
        "WORK_FRAMES",
        "ENERGY_CELL",
    ]
    triple = [
        "IMPULSE_FIELDS",
        "TORQUE_FIELDS",
        "IMPULSE_MAGNETS",
        "TORQUE_MAGNETS",
        "MOMENTUM_WALLS",
        "ANGULAR_WALLS",
        "IMPULSE_IMAGES",
        "TORQUE_IMAGES",
        "MOMENTUM_SOURCES",
        "ANGULAR_SOURCES",
        "MOMENTUM_PROCESSES",
        "ANGULAR_PROCESSES",
        "IMPULSE_FRAMES",
        "TORQUE_FRAMES",
        "ANGULAR_CELL",
    ]
    taken = [getattr(account, name) for name in single]
    taken += [getattr(account, name) + k for name in triple for k in range(3)]
    assert list(range(account.ACCOUNTS)) == sorted(taken)
    rates = {
        account.WORK_DRIVE,
        *range(account.IMPULSE_FIELDS, account.IMPULSE_FIELDS + 3),
        *range(account.TORQUE_FIELDS, account.TORQUE_FIELDS + 3),
    }
    assert set(range(account.RATES)) == rates


def test_a_force_that_breaks_the_third_law_shows() -> None:
    """|sum F| / sum |F| of the forces at hand: one field changed by a percent is told."""
    assert closed(MOVED.work).third_law_residual <= 1e-14
    push = MOVED.work.pairs.copy()
    strongest = int(np.argmax(np.abs(MOVED.charges.charge * push[0])))
    push[0, strongest] *= 1.01
    assert closed(MOVED.work._replace(pairs=push)).third_law_residual > 1e-4


def test_forces_that_turn_the_cloud_show_and_make_the_allowance() -> None:
    """A field that circles about the axis turns all charges; its torque counts as long as it may
    have lasted."""
    row = closed(MOVED.work)
    assert row.torque_residual <= 1e-13
    x, y, z = MOVED.charges.position
    turning = MOVED.work.pairs.copy()
    turning[0] -= 1e3 * y
    turning[1] += 1e3 * x
    ledger = Ledger()
    ledger.close(0.0, MOVED.plan, MOVED.charges, MOVED.work)
    spoiled = ledger.close(DURATION, MOVED.plan, MOVED.charges, MOVED.work._replace(pairs=turning))
    assert spoiled.torque_residual > 1e-6
    turn = 1e3 * np.array([-z * x, -z * y, x**2 + y**2])
    torque = np.linalg.norm((MOVED.charges.charge * turn).sum(axis=1))
    place, velocity = MOVED.charges.position, MOVED.charges.velocity
    spins = np.sqrt((place**2).sum(axis=0) * (velocity**2).sum(axis=0)) * MOVED.charges.mass
    assert torque * DURATION / spins.sum() == pytest.approx(
        spoiled.angular_allowance, rel=1e-6, abs=0.0
    )


def test_a_push_nobody_accounted_for_shows() -> None:
    """A change of one velocity appears in energy, momentum and angular momentum."""
    charges = MOVED.charges
    before = charges.velocity[1, 3]
    charges.velocity[1, 3] += 500.0
    row = closed(MOVED.work)
    charges.velocity[1, 3] = before
    assert min(row.momentum_residual, row.angular_residual) > 1e-4
    assert abs(row.energy_residual - closed(MOVED.work).energy_residual) > 1e-4


def test_the_amounts_are_those_of_the_charges() -> None:
    """Two charges at relativistic speed: every amount by hand, weights counted."""
    place = np.array([[0.0, 0.0, 0.0], [3e-6, 0.0, 4e-6]])
    proper = np.array([[1e8, 0.0, 0.0], [0.0, 2e8, 0.0]])
    weight = np.array([2.0, 3.0])
    pull = field("uniform-electric", strength="1 kV/m")
    moving = loop(ions(place, proper, weight=weight), 1e-9, 1e-9, coulomb=DIRECT, fields=[pull])
    row = Ledger().close(0.0, moving.plan, moving.charges, moving.work)
    gamma = np.sqrt(1.0 + (proper**2).sum(axis=1) / SPEED_OF_LIGHT**2)
    kinetic = (weight * ION_MASS * (gamma - 1.0) * SPEED_OF_LIGHT**2).sum()
    assert kinetic == pytest.approx(row.kinetic, rel=1e-13, abs=0.0)
    pair = COULOMB_CONSTANT * 6.0 * ELEMENTARY_CHARGE**2 / 5e-6
    assert pair == pytest.approx(row.coulomb, rel=1e-14, abs=0.0)
    in_field = -1e3 * 4e-6 * 3.0 * ELEMENTARY_CHARGE
    assert in_field == pytest.approx(row.field, rel=1e-14, abs=0.0)
    momentum = (weight[:, None] * ION_MASS * proper).sum(axis=0)
    assert momentum == pytest.approx(row.momentum, rel=1e-14, abs=0.0)
    spin = 3.0 * ION_MASS * np.cross(place[1], proper[1])
    assert spin == pytest.approx(row.angular_momentum, rel=1e-14, abs=0.0)
    assert 5.0 * ELEMENTARY_CHARGE == pytest.approx(row.charge, rel=1e-15, abs=0.0)
    assert 5.0 == row.count
    assert 0.0 == row.count_lost == row.work_drive == row.energy_walls


def test_residuals_are_held_against_the_largest_amounts() -> None:
    """Not against sums that happen to be small: a cloud at rest as a whole has no momentum."""
    place = [[0.0, 0.0, 0.0], [1e-3, 0.0, 0.0]]
    moving = loop(ions(place, [[1e3, 0, 0], [-1e3, 0, 0]]), 1e-6, 1e-7)
    ledger = Ledger()
    ledger.close(0.0, moving.plan, moving.charges, moving.work)
    assert moving.to_mark(1, always)
    moving.charges.velocity[0, 0] *= 1.0 + 1e-3
    row = ledger.close(1e-6, moving.plan, moving.charges, moving.work)
    assert 0.5e-3 == pytest.approx(row.momentum_residual, rel=1e-2, abs=0.0)
    assert 1e-3 == pytest.approx(row.energy_residual, rel=1e-2, abs=0.0)


def test_the_state_holds_what_the_account_was_opened_with() -> None:
    """Energy, momentum, angular momentum, charge, count, and the scales: finite, all of them."""
    state = LEDGER.state()
    assert {"start", "scale", "torque"} == set(state)
    assert 9 == len(state["start"])
    assert all(np.isfinite(values).all() for values in state.values())
    assert (state["scale"] > 0.0).all()
