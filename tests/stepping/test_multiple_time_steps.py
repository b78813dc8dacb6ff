"""The Coulomb kick taken every m-th step only, while the fields are followed with the short one."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb.direct import direct_field, workspace
from driftwell.coulomb.form import Coulomb
from tests.cases import field, wall
from tests.moving import DIRECT, Floats, accounts, ions, loop, to_end

RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "100 V", "frequency": "2 MHz"})
CAPS = field("static-quadrupole", axial_frequency={"species": "barium", "value": "100 kHz"})


def cluster(n: int) -> tuple[Floats, Floats]:
    """Places and speeds of ions near each other."""
    random = np.random.default_rng(8)
    return random.uniform(-4e-5, 4e-5, (n, 3)), random.normal(0.0, 30.0, (n, 3))


@pytest.mark.parametrize("n", [5, 70])
def test_free_ions_feel_two_half_kicks_about_the_drifts_between(n: int) -> None:
    """Without fields m steps are one kick-drift-kick of m h, whose sum is written out here."""
    place, speed = cluster(n)
    h, m, groups = 1e-8, 5, 3
    moving = to_end(loop(ions(place, speed), groups * m * h, h, coulomb=DIRECT, coulomb_every=m))
    other = ions(place, speed)
    x, u, work = other.position, other.velocity, workspace(n)
    push = np.zeros((3, n))
    for _ in range(groups):
        direct_field(x, other.charge, 0.0, COULOMB_CONSTANT, work, push)
        u += 0.5 * m * h * other.charge / other.mass * push
        x += m * h * u
        direct_field(x, other.charge, 0.0, COULOMB_CONSTANT, work, push)
        u += 0.5 * m * h * other.charge / other.mass * push
    assert x == pytest.approx(moving.charges.position, rel=1e-11, abs=1e-18)
    assert u == pytest.approx(moving.charges.velocity, rel=1e-9, abs=1e-9)
    assert not np.allclose(u, speed.T, rtol=1e-3)


@pytest.mark.parametrize("every", [1, 2, 4, 8])
@pytest.mark.parametrize("scheme", ["kick-drift-kick", "composed-4", "midpoint-rotation"])
def test_all_accounts_but_the_energy_close_to_rounding(every: int, scheme: str) -> None:
    """Whatever the number of steps between Coulomb kicks; energy to the second order of their time.

    Losses on the way are accounted in whatever step of a group they happen.
    """
    place, speed = cluster(20)
    rows = accounts(
        loop(
            ions(place, speed, mass=137.9),
            4e-6,
            1e-8,
            fields=[RODS, CAPS],
            walls=[wall("sphere", radius="50 um")],
            coulomb=DIRECT,
            coulomb_every=every,
            scheme=scheme,
            records=np.linspace(0.0, 4e-6, 6),
        )
    )
    assert 0 < rows[-1].count_lost < 20
    for row in rows:
        assert row.momentum_residual <= 1e-13
        assert row.angular_residual <= 1e-13
        assert row.third_law_residual <= 1e-13
        assert abs(row.count_residual) <= 1e-13
        assert abs(row.energy_residual) <= 5e-3


def test_the_energy_closes_to_the_second_order_of_the_coulomb_step() -> None:
    """Fourfold with twice the steps between kicks, while the fields' own step stays as it is.

    Softened, so that no pair of charges is sudden.
    """
    place, speed = cluster(20)

    def residual(every: int) -> float:
        rows = accounts(
            loop(
                ions(place, speed, mass=137.9),
                3.2e-6,
                2.5e-9,
                fields=[CAPS],
                coulomb=Coulomb(method="direct", softening="20 um"),
                coulomb_every=every,
                scheme="composed-4",
                records=np.linspace(0, 3.2e-6, 6),
            )
        )
        return max(abs(row.energy_residual) for row in rows)

    found = [residual(every) for every in (8, 16, 32)]
    assert 4.0 == pytest.approx(found[1] / found[0], rel=0.15, abs=0.0)
    assert 4.0 == pytest.approx(found[2] / found[1], rel=0.15, abs=0.0)
    assert 1e-8 < found[0] < 1e-3


def test_a_mark_ends_a_whole_number_of_groups() -> None:
    """Records between which few steps would do get a group of steps all the same."""
    moving = loop(
        ions(*cluster(3)), 1e-6, 1e-8, coulomb=DIRECT, coulomb_every=7, records=[1e-8, 0.5e-6]
    )
    assert (moving.schedule.steps % 7 == 0).all()
    assert 7 == moving.schedule.steps[0]
    for row in accounts(moving):
        assert row.momentum_residual <= 1e-13
