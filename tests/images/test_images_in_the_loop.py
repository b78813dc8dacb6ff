"""Images within the time loop: kicks, accounts, losses, cadence, what the ledger keeps of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb.direct import direct_field, workspace
from driftwell.coulomb.form import Coulomb
from driftwell.images.gap_sum import GapImages
from driftwell.images.image_sum import Images
from driftwell.images.mirror_sum import plane_images, sphere_images
from driftwell.images.panel_sum import PanelImages
from driftwell.images.tube_sum import TubeImages
from driftwell.ledger.ledger import Ledger, LedgerRow
from driftwell.stepping.accounts import IMPULSE_IMAGES, TORQUE_IMAGES
from tests.cases import field, wall
from tests.images.images_at import box, images_at
from tests.moving import DIRECT, OFF, accounts, ions, loop, to_end

UP = np.array([0.0, 0.0, 1.0])
RADIUS, CLOSEST = 3e-4, 2e-5
COIL = field("uniform-magnetic", strength="1 T", along=[0, 1, 3])
SOFT = Coulomb(method="direct", softening="5 um")


@dataclass(frozen=True)
class Case:
    """Conductors at walls that absorb."""

    name: str
    images: Images
    wall: Any


CASES = [
    Case(
        "plane",
        plane_images(np.array([0.0, 0.0, -RADIUS]), UP, 2.0 * CLOSEST),
        wall("plane", at=["0 m", "0 m", "-0.3 mm"]),
    ),
    Case(
        "sphere", sphere_images(np.zeros(3), RADIUS, 2.0 * CLOSEST), wall("sphere", radius="0.3 mm")
    ),
    Case(
        "gap",
        GapImages(np.array([0.0, 0.0, -RADIUS]), UP, 2.0 * RADIUS, 2.0 * CLOSEST),
        wall("box", size=["3 mm", "3 mm", "0.6 mm"]),
    ),
    Case("tube", TubeImages(2, np.zeros(3), RADIUS, 0.9), wall("cylinder", radius="0.3 mm")),
    Case(
        "triangles",
        PanelImages(6e-4 * box(4)),
        wall("box", size=["0.59 mm", "0.59 mm", "0.59 mm"]),
    ),
]
each_case = pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)


def rows(
    case: Case, step: float = 1e-8, coulomb: Coulomb = SOFT, **options: Any
) -> list[LedgerRow]:
    """The ledger of 30 macro-charges that fly apart, or of other options."""
    random = np.random.default_rng(5)
    start = ions(
        random.uniform(-1e-4, 1e-4, (30, 3)),
        random.normal(0.0, 60.0, (30, 3)),
        weight=100.0,
        mass=random.uniform(80.0, 150.0, 30),
    )
    options = {"images": case.images, "walls": [case.wall], **options}
    records = np.linspace(0.0, 2e-6, 5)
    return accounts(loop(start, 2e-6, step, coulomb=coulomb, records=records, **options))


@pytest.mark.parametrize("coulomb", [SOFT, OFF], ids=["pairs", "images alone"])
@pytest.mark.parametrize("every", [1, 4])
@each_case
def test_every_account_closes_with_losses_and_magnets(
    case: Case, every: int, coulomb: Coulomb
) -> None:
    """Momentum and angular momentum to rounding, energy to the step, as without images."""
    found = rows(case, coulomb=coulomb, fields=[COIL], coulomb_every=every)
    for row in found:
        assert row.momentum_residual <= 2e-13
        assert row.angular_residual <= 2e-13
        assert row.third_law_residual <= 1e-13
        assert abs(row.energy_residual) <= (2e-3 if every == 1 else 2e-2)
    assert found[0].image < 0.0
    assert abs(found[1].image) > 1e-2 * found[1].kinetic
    moved = np.linalg.norm(found[-1].impulse_images)
    assert moved > 1e-3 * np.linalg.norm(found[-1].momentum_walls)
    if coulomb is SOFT:
        assert 0.0 < found[-1].count_lost


@each_case
def test_the_energy_closes_to_the_second_order_of_the_step(case: Case) -> None:
    """With half the step less than half the residual, though charges are lost on the way."""
    worst = [max(abs(row.energy_residual) for row in rows(case, step)) for step in (2e-8, 5e-9)]
    assert 1e-9 < worst[1] < 0.4 * worst[0]


def test_the_ledger_notices_a_conductor_that_is_not_where_it_was() -> None:
    """A plane that a run is not told of moving by a twentieth of its distance."""
    found = []
    for away in (0.0, 0.05):
        start = ions(np.random.default_rng(1).normal(0.0, 5e-5, (30, 3)), weight=100.0)
        moving = loop(start, 1e-6, 1e-8, coulomb=SOFT, records=[5e-7], images=CASES[0].images)
        ledger = Ledger()
        ledger.close(0.0, moving.plan, moving.charges, moving.work)
        assert moving.to_mark(1, lambda: True)
        moving.work.image_table[3] -= away * RADIUS
        to_end(moving)
        found.append(ledger.close(1e-6, moving.plan, moving.charges, moving.work))
        moving.work.image_table[3] += away * RADIUS
    assert abs(found[0].energy_residual) <= 1e-4
    assert abs(found[1].energy_residual) > 3e-3
    assert found[1].momentum_residual <= 1e-13


@pytest.mark.parametrize(
    ("account", "residual"),
    [(IMPULSE_IMAGES, "momentum_residual"), (TORQUE_IMAGES, "angular_residual")],
)
def test_what_images_gave_left_out_leaves_a_residual(account: int, residual: str) -> None:
    """Of its own kind, far above rounding."""
    start = ions(np.random.default_rng(1).normal(0.0, 5e-5, (30, 3)), weight=100.0)
    moving = loop(start, 5e-7, 1e-8, coulomb=SOFT, images=CASES[0].images)
    ledger = Ledger()
    ledger.close(0.0, moving.plan, moving.charges, moving.work)
    to_end(moving)
    right = ledger.close(5e-7, moving.plan, moving.charges, moving.work)
    moving.work.total[account : account + 3] = moving.work.carry[account : account + 3] = 0.0
    spoiled = ledger.close(5e-7, moving.plan, moving.charges, moving.work)
    assert getattr(right, residual) <= 1e-13
    assert getattr(spoiled, residual) > 1e-3
    assert right.energy_residual == spoiled.energy_residual


@pytest.mark.parametrize("n", [3, 70])
@pytest.mark.parametrize("every", [1, 5])
def test_charges_feel_pairs_and_images_in_one_kick(n: int, every: int) -> None:
    """Kick-drift-kick written out, with images as seldom as the pairs."""
    random = np.random.default_rng(8)
    place, speed = random.uniform(-1e-4, 1e-4, (n, 3)), random.normal(0.0, 30.0, (n, 3))
    images, h = CASES[1].images, 1e-8
    moving = loop(ions(place, speed), 10 * h, h, coulomb=DIRECT, coulomb_every=every, images=images)
    to_end(moving)
    other = ions(place, speed)
    x, u, work = other.position, other.velocity, workspace(n)

    def push(length: float) -> None:
        pairs = np.zeros((3, n))
        direct_field(x, other.charge, 0.0, COULOMB_CONSTANT, work, pairs)
        felt = images_at(images, x, other.charge, constant=COULOMB_CONSTANT)[:3]
        u[...] += length * other.charge / other.mass * (pairs + felt)

    for _ in range(10 // every):
        push(0.5 * every * h)
        x += every * h * u
        push(0.5 * every * h)
    assert x == pytest.approx(moving.charges.position, rel=1e-11, abs=1e-17)
    assert u == pytest.approx(moving.charges.velocity, rel=1e-9, abs=1e-9)


def test_a_run_without_images_has_none_in_its_accounts() -> None:
    moving = loop(ions(np.eye(3) * 1e-4), 1e-6, 1e-8, coulomb=DIRECT)
    for row in accounts(moving):
        assert 0.0 == row.image == np.abs(row.impulse_images).max()
    assert moving.work.pairs is moving.work.coulomb


def test_softening_of_the_pairs_does_not_change_images_that_were_made() -> None:
    """A charge alone falls the same; images are as blurred as they were asked to be."""
    found = []
    for coulomb in (OFF, DIRECT, Coulomb(method="direct", softening="0.1 mm")):
        start = ions([[0.0, 0.0, -2e-4]], weight=1000.0)
        moving = loop(start, 1e-6, 1e-8, coulomb=coulomb, images=CASES[0].images)
        found.append(to_end(moving).charges.velocity.tobytes())
    assert found[0] == found[1] == found[2]


def test_many_charges_in_blocks_close_their_accounts_too() -> None:
    """From 16384 on passes go block by block; a tube, whose cost grows with the number."""
    random = np.random.default_rng(1)
    n = 17_000
    start = ions(random.uniform(-5e-5, 5e-5, (n, 3)), random.normal(0.0, 50.0, (n, 3)), weight=10.0)
    tube = next(case.images for case in CASES if case.name == "tube")
    last = accounts(loop(start, 2e-8, 1e-8, images=tube))[-1]
    assert last.momentum_residual <= 1e-13
    assert last.angular_residual <= 1e-13
    assert 0.0 < np.linalg.norm(last.impulse_images)
    assert 0.0 != last.image
