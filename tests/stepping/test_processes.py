"""Processes in the time loop: events at their own time, accounts, times and places of acting."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from driftwell.errors import StepError
from driftwell.processes.form import Region
from tests.cases import field, process
from tests.moving import DIRECT, OFF, accounts, ions, loop, to_end

RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "60 V", "frequency": "1 MHz"})
CAPS = field("static-quadrupole", voltage="2 V", radius="5 mm", half_length="4 mm")
SOLENOID = field("uniform-magnetic", strength="0.3 T", along=[0.2, 0.1, 1.0])
PUSH = field("uniform-electric", strength="200 V/m", along=[1.0, 2.0, 0.5])
GAS = process(
    "gas-collisions",
    mass="28 u",
    pressure="2 Pa",
    collision={"kind": "hard-sphere", "cross_section": "1e-18 m^2"},
    flow=["0 m/s", "100 m/s", "0 m/s"],
)
HELIUM = process(
    "gas-collisions",
    name="helium",
    mass="4.0026 u",
    pressure="1 Pa",
    collision={"kind": "induced-dipole", "polarisability": "0.205 angstrom^3"},
)
DRAG = process("mobility-drag", mobility="0.2 m^2/(V s)", flow=["0 m/s", "0 m/s", "90 m/s"])
BATH = process("thermostat", temperature="300 K", relaxation_time="10 us")
LIGHT = process(
    "laser-cooling",
    wavelength="400 nm",
    linewidth="20 MHz",
    detuning="-10 MHz",
    saturation=0.5,
    direction=[1.0, 1.0, 1.0],
)
BRIGHT = LIGHT.model_copy(update={"linewidth": 1e9, "detuning": -5e8})
TIMES = np.linspace(0.0, 2e-5, 11)[1:]


def cloud(n: int = 40) -> Any:
    random = np.random.default_rng(5)
    return ions(random.normal(scale=2e-4, size=(n, 3)), random.normal(scale=200.0, size=(n, 3)))


SETTINGS = {
    "gas": [GAS],
    "two gases": [GAS, HELIUM],
    "drag": [DRAG],
    "bath": [BATH],
    "light": [BRIGHT],
    "gas and drag": [HELIUM, DRAG],
    "gas, bath and light": [GAS, BATH, BRIGHT],
}


@pytest.mark.parametrize("acting", SETTINGS.values(), ids=SETTINGS)
@pytest.mark.parametrize("fields", [[PUSH], [SOLENOID]], ids=["electric", "magnetic"])
def test_the_ledger_closes_to_rounding_in_constant_fields(acting: Any, fields: Any) -> None:
    """Energy, momentum and angular momentum; and without what processes gave, none of them."""
    moving = loop(cloud(), 2e-5, 3e-7, fields=fields, processes=acting, records=TIMES)
    rows = accounts(moving)
    last = rows[-1]
    for name in ("energy", "momentum", "angular"):
        worst = max(abs(getattr(row, f"{name}_residual")) for row in rows)
        assert worst == pytest.approx(0.0, rel=0.0, abs=1e-12)
    kinetic = max(row.kinetic for row in rows)
    assert abs(last.energy_processes) > 1e-4 * kinetic
    assert np.linalg.norm(last.momentum_processes) > 1e-3 * np.linalg.norm(last.momentum)
    assert np.linalg.norm(last.angular_processes) > 1e-3 * np.linalg.norm(last.angular_momentum)
    given = moving.exchanged.sum(axis=0)
    assert last.energy_processes == pytest.approx(given[0], rel=1e-9, abs=1e-12 * kinetic)
    assert last.momentum_processes == pytest.approx(given[1:4], rel=1e-9, abs=1e-30)
    assert last.angular_processes == pytest.approx(given[4:7], rel=1e-9, abs=1e-33)


@pytest.mark.parametrize("acting", [[GAS, BRIGHT], [DRAG]], ids=["events", "drag"])
def test_the_ledger_closes_in_a_trap_as_the_step_allows(acting: Any) -> None:
    """The residual of the energy shrinks as the square of the step; momentum closes to rounding."""
    residuals = []
    for step in (2e-8, 1e-8):
        moving = loop(
            cloud(),
            2e-5,
            step,
            fields=[RODS, CAPS],
            processes=acting,
            coulomb=DIRECT,
            records=TIMES,
        )
        rows = accounts(moving)
        residuals.append(max(abs(row.energy_residual) for row in rows))
        for name in ("momentum", "angular"):
            worst = max(abs(getattr(row, f"{name}_residual")) for row in rows)
            assert worst == pytest.approx(0.0, rel=0.0, abs=1e-10)
    assert 2.0 < residuals[0] / residuals[1] < 8.0
    assert residuals[0] < 2e-2


def test_an_event_in_a_step_is_as_if_the_step_had_been_cut_there() -> None:
    """Ions that are met now and then: the same paths with steps long and short.

    The clock counts from the start, so the collisions come at the same times.
    """
    found = []
    for step in (5e-8, 1.7e-6, 2e-5):
        particles = ions(np.zeros((20, 3)), (10.0, 0.0, 0.0))
        moving = loop(particles, 2e-5, step, fields=[PUSH], processes=[HELIUM])
        to_end(moving)
        assert moving.exchanged[0, 7] > 30
        found.append((moving.exchanged, particles.position.copy(), particles.velocity.copy()))
    for exchanged, position, velocity in found[1:]:
        alike = [0, 1, 2, 3, 7]  # how the torque is shared with the fields is the step's
        assert found[0][0][:, alike] == pytest.approx(exchanged[:, alike], rel=1e-9, abs=1e-40)
        assert found[0][1] == pytest.approx(position, rel=1e-9, abs=1e-15)
        assert found[0][2] == pytest.approx(velocity, rel=1e-9, abs=1e-12)


def test_processes_act_in_their_time_and_place_and_on_whom_they_name() -> None:
    """Drag from 5 to 9 us: exp(-G 4 us), on one of two clouds; the other goes on as it was."""
    drag = process(
        "thermostat",
        temperature="0 K",
        relaxation_time="10 us",
        start="5 us",
        end="9 us",
        of=["cloud 1"],
    )
    particles = ions(np.zeros((2, 3)), (0.0, 0.0, 100.0), cloud=[0, 1])
    to_end(loop(particles, 2e-5, 2e-6, processes=[drag]))
    assert particles.velocity[2].tolist() == pytest.approx(
        [100.0, 100.0 * math.exp(-0.4)], rel=1e-12, abs=0.0
    )
    ahead = GAS.model_copy(update={"region": Region(z=["1 mm", "2 mm"])})
    particles = ions(np.zeros((50, 3)), (0.0, 0.0, 1000.0))
    moving = loop(particles, 4e-6, 4e-7, processes=[ahead], records=[0.8e-6, 2e-6])
    given = [row.energy_processes for row in accounts(moving)]
    assert given[:2] == [0.0, 0.0]
    assert given[3] != 0.0


def test_clocks_follow_from_ids_and_not_from_who_else_is_there() -> None:
    """The first ten of forty ions meet the same gas as ten alone, without a Coulomb sum."""
    many, few = cloud(40), cloud(40).kept(np.arange(40) < 10)
    for particles in (many, few):
        to_end(loop(particles, 2e-5, 3e-7, fields=[PUSH], processes=[GAS]))
    assert many.position[:, :10].tobytes() == few.position.tobytes()


def test_a_step_with_countless_events_ends_in_words() -> None:
    dense = GAS.model_copy(update={"pressure": 1e9})
    with pytest.raises(StepError, match="would be met by a process more than 100000 times"):
        to_end(loop(cloud(), 1e-5, 1e-5, processes=[dense]))


@pytest.mark.parametrize("many", [False, True], ids=["few", "many"])
def test_ions_lost_to_gas_leave_the_sums_as_they_left_the_cloud(many: bool) -> None:
    """Charge, count, energy and momentum of those neutralised, with the energy of their pairs."""
    gas = HELIUM.model_copy(update={"loss": 0.5, "pressure": 4.0})
    particles = cloud(17000 if many else 40)
    moving = loop(
        particles,
        4e-6,
        5e-7 if many else 1e-8,
        fields=[PUSH],
        processes=[gas],
        coulomb=OFF if many else DIRECT,
        records=[1e-6, 2e-6, 3e-6],
    )
    rows = accounts(moving)
    assert 0 < rows[-1].count_lost < rows[0].count
    for name in ("momentum", "angular", "charge", "count"):
        worst = max(abs(getattr(row, f"{name}_residual")) for row in rows)
        assert worst == pytest.approx(0.0, rel=0.0, abs=1e-11)
    worst = max(abs(row.energy_residual) for row in rows)
    assert worst == pytest.approx(0.0, rel=0.0, abs=1e-12 if many else 1e-7)


def test_macro_charges_are_pushed_as_one_of_theirs_and_counted_as_all() -> None:
    """A charge of weight 50 moves as one of weight 1 does; what it is given is 50 times as much."""
    one, fifty = (
        ions(np.zeros((5, 3)), (500, 0, 0)),
        ions(np.zeros((5, 3)), (500, 0, 0), weight=50.0),
    )
    loops = [to_end(loop(each, 2e-5, 1e-6, processes=[GAS])) for each in (one, fifty)]
    assert one.velocity.tobytes() == fifty.velocity.tobytes()
    assert 50.0 * loops[0].exchanged == pytest.approx(loops[1].exchanged, rel=1e-12, abs=0.0)


def test_the_first_waiting_times_are_exponential_ones_of_the_rate() -> None:
    """2000 ions at rest and light: the part of them that has scattered by t is 1 - exp(-R t)."""
    light = LIGHT.model_copy(update={"saturation": 1e-4})
    particles = ions(np.zeros((2000, 3)), mass=1e6)
    moving = to_end(loop(particles, 5e-4, 5e-4, processes=[light]))
    rate = math.pi * 20e6 * 1e-4 / 2.0001
    expected = -math.expm1(-rate * 5e-4)
    found = (moving.particles.velocity != 0.0).any(axis=0).mean()
    noise = math.sqrt(expected * (1.0 - expected) / 2000)
    assert expected == pytest.approx(found, rel=0.0, abs=4.0 * noise)
    assert 0.5 < expected < 0.9999
