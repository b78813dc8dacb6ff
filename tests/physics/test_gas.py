"""Collisions with a gas against kinetic theory: rates, mobilities, energies, diffusion, exchang."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.stats import kstest

from driftwell.constants import ATOMIC_MASS, BOLTZMANN, ELEMENTARY_CHARGE
from driftwell.processes.form import ProcessForm
from tests.cases import field, process
from tests.moving import accounts, ions, loop, to_end

Floats = NDArray[np.float64]

SPHERES = {"kind": "hard-sphere", "cross_section": "1e-18 m^2"}
GAS_MASS, PRESSURE, KELVIN = 28.0134, 100.0, 300.0
DENSITY = PRESSURE / (BOLTZMANN * KELVIN)


def nitrogen(**keys: Any) -> ProcessForm:
    """The gas of case L2, N2-like hard spheres."""
    made = {
        "mass": f"{GAS_MASS} u",
        "pressure": f"{PRESSURE} Pa",
        "temperature": f"{KELVIN} K",
        "collision": SPHERES,
    }
    return process("gas-collisions", **made | keys)


def first_order_mobility(mass: float) -> float:
    """K of E. A. Mason and E. W. McDaniel, Transport Properties of Ions in Gases (1988), section 5
    (case L2, from memory), m^2/(V s); mass in u."""
    reduced = mass * GAS_MASS / (mass + GAS_MASS) * ATOMIC_MASS
    speed = math.sqrt(2.0 * math.pi / (reduced * BOLTZMANN * KELVIN))
    return 3.0 * ELEMENTARY_CHARGE / (16.0 * DENSITY) * speed / 1e-18


@pytest.mark.parametrize(
    ("ion", "atom", "volume", "expected"),
    [
        (28.0129, 4.0026, 0.205, 5.666219050201696e-16),
        (38.963, 28.0134, 1.74, 7.65266733519782e-16),
    ],
)
def test_the_capture_rate_is_langevins(
    ion: float, atom: float, volume: float, expected: float
) -> None:
    """Case L1: k_L, m^3/s, P. Langevin 1905; and so many events, of hot ions as of cold ones."""
    gas = process(
        "gas-collisions",
        mass=f"{atom} u",
        pressure=f"{1e20 * BOLTZMANN * KELVIN!r} Pa",
        temperature=f"{KELVIN} K",
        collision={"kind": "induced-dipole", "polarisability": f"{volume} angstrom^3"},
    )
    for speed in (0.0, 2e4):
        particles = ions(np.zeros((400, 3)), (0.0, 0.0, speed), mass=ion)
        moving = to_end(loop(particles, 1e-3, 1e-5, processes=[gas]))
        found = moving.exchanged[0, 7] / 400 / 1e-3
        noise = math.sqrt(expected * 1e20 / 400 / 1e-3)
        assert expected * 1e20 == pytest.approx(found, rel=0.0, abs=4.0 * noise)
        assert noise < 0.01 * found


@pytest.mark.parametrize(
    "step", [2e-8, 4e-7], ids=["steps below a collision", "steps of 5 collisions"]
)
@pytest.mark.parametrize(
    ("mass", "factor"), [(2.80134, 1.0958), (28.0134, 1.0195), (100.0, 0.9968)]
)
def test_ions_drift_with_the_mobility_of_hard_spheres(
    mass: float, factor: float, step: float
) -> None:
    """Case L2: first-order K with the factor for the ratio of masses, at steps short and long.

    The factors of a Monte Carlo of the same kernel (standard error 0.25 %); Chapman and Cowling
    have 1.019 for equal masses. 2 % allowed, or three standard errors; fields are weak: the ions
    are less than 2 % hotter than the gas.
    """
    field_strength, n = 200.0 if mass > 3.0 else 80.0, 3000
    drift = factor * first_order_mobility(mass) * field_strength
    thermal = math.sqrt(BOLTZMANN * KELVIN / (mass * ATOMIC_MASS))
    random = np.random.default_rng(1)
    start = random.normal(scale=thermal, size=(n, 3)) + np.array([0.0, 0.0, drift])
    particles = ions(np.zeros((n, 3)), start, mass=mass)
    moving = loop(
        particles,
        40e-6 if step > 1e-7 else 20e-6,
        step,
        fields=[field("uniform-electric", strength=f"{field_strength} V/m")],
        processes=[nitrogen()],
    )
    _, last = accounts(moving)
    found = moving.particles.position[2].mean() / last.time
    spread = moving.particles.position[2].std() / last.time / math.sqrt(n)
    assert drift == pytest.approx(found, rel=0.02, abs=3.0 * spread)
    assert last.energy_residual == pytest.approx(0.0, rel=0.0, abs=1e-11)


@pytest.mark.parametrize("step", [2e-8, 1e-6], ids=["short steps", "steps of 13 collisions"])
@pytest.mark.parametrize("mass", [4.0, 28.0134, 400.0])
@pytest.mark.parametrize(
    "collision", [SPHERES, {"kind": "induced-dipole", "polarisability": "1 angstrom^3"}]
)
def test_energies_come_to_boltzmanns_distribution(
    collision: dict[str, str], mass: float, step: float
) -> None:
    """Cold ions end with energies of density E^(1/2) exp(-E/kT), in a gas that flows.

    Kolmogorov and Smirnov's distance of 4000 ions, and the flow as mean velocity; a step of 13
    collisions gives the same as a short one.
    """
    n, flow = 4000, 300.0
    thermal = BOLTZMANN * KELVIN
    gas = nitrogen(collision=collision, flow=["0 m/s", "300 m/s", "0 m/s"])
    particles = ions(np.zeros((n, 3)), mass=mass)
    duration = (8e-6 if step < 1e-7 else 20e-6) * max(1.0, mass / 100.0)
    moving = to_end(loop(particles, duration, step, processes=[gas]))
    u = moving.particles.velocity - np.array([[0.0], [flow], [0.0]])
    energy = 0.5 * mass * ATOMIC_MASS * (u**2).sum(axis=0) / thermal
    assert kstest(energy, "gamma", args=(1.5,)).pvalue > 1e-3
    error = math.sqrt(thermal / (mass * ATOMIC_MASS) / n)
    assert u.mean(axis=1) == pytest.approx(np.zeros(3), rel=0.0, abs=4.0 * error)


@pytest.mark.parametrize("mass", [4.0, 100.0])
def test_thermal_ions_meet_spheres_at_the_mean_relative_speed(mass: float) -> None:
    """n sigma (8 k T / (pi mu))^(1/2); 13007326.6 1/s for 100 u (case L2)."""
    n, duration = 1000, 1e-5
    reduced = mass * GAS_MASS / (mass + GAS_MASS) * ATOMIC_MASS
    expected = DENSITY * 1e-18 * math.sqrt(8.0 * BOLTZMANN * KELVIN / (math.pi * reduced))
    if mass == 100.0:
        assert 13007326.579725625 == pytest.approx(expected, rel=1e-9, abs=0.0)
    thermal = math.sqrt(BOLTZMANN * KELVIN / (mass * ATOMIC_MASS))
    start = np.random.default_rng(3).normal(scale=thermal, size=(n, 3))
    moving = to_end(
        loop(ions(np.zeros((n, 3)), start, mass=mass), duration, 5e-7, processes=[nitrogen()])
    )
    assert expected == pytest.approx(moving.exchanged[0, 7] / n / duration, rel=0.015, abs=0.0)


def test_ions_diffuse_by_einsteins_relation() -> None:
    """D = K k T / q (A. Einstein 1905) with the mobility of hard spheres, of ions of mass 100 u."""
    n, duration = 3000, 40e-6
    random = np.random.default_rng(2)
    thermal = math.sqrt(BOLTZMANN * KELVIN / (100.0 * ATOMIC_MASS))
    particles = ions(np.zeros((n, 3)), random.normal(scale=thermal, size=(n, 3)))
    moving = loop(particles, duration, 5e-7, processes=[nitrogen()], records=[10e-6])
    accounts(moving)
    expected = 0.9968 * first_order_mobility(100.0) * BOLTZMANN * KELVIN / ELEMENTARY_CHARGE
    relaxation = expected / thermal**2
    found = (particles.position**2).mean() / (2.0 * (duration - relaxation))
    assert expected == pytest.approx(found, rel=4.0 * math.sqrt(2.0 / (3 * n)), abs=0.0)


def test_exchange_of_charge_leaves_ions_of_the_gas() -> None:
    """Resonant exchange alone: fast ions become thermal ones at the rate n sigma v.

    Ions of 1000 eV in a cold gas, of cross-section 1e-19 m^2: exp(-n sigma v t) go on, the rest
    have the gas's temperature.
    """
    n, duration = 16_000, 2e-6
    gas = nitrogen(
        collision={"kind": "hard-sphere", "cross_section": "1e-19 m^2"},
        exchange=1.0,
        pressure="0.25 Pa",
    )
    speed = math.sqrt(2.0 * 1000.0 * ELEMENTARY_CHARGE / (GAS_MASS * ATOMIC_MASS))
    particles = ions(np.zeros((n, 3)), (0.0, 0.0, speed), mass=GAS_MASS)
    moving = to_end(loop(particles, duration, 1e-6, processes=[gas]))
    fast = moving.particles.velocity[2] > 0.9 * speed
    expected = math.exp(-0.25 / (BOLTZMANN * KELVIN) * 1e-19 * speed * duration)
    assert expected == pytest.approx(fast.mean(), rel=0.0, abs=4.0 * math.sqrt(0.25 / n))
    thermal = math.sqrt(BOLTZMANN * KELVIN / (GAS_MASS * ATOMIC_MASS))
    for axis in range(3):
        slow = moving.particles.velocity[axis, ~fast] / thermal
        assert kstest(slow, "norm").pvalue > 1e-3


def test_neutralised_ions_are_lost_at_their_own_times() -> None:
    """A share of 1/4 of the collisions: exponential loss, at times that do not know the step."""
    n = 3000
    volume = {"kind": "induced-dipole", "polarisability": "1.74 angstrom^3"}
    gas = nitrogen(collision=volume, pressure="0.1 Pa", loss=0.25)
    particles = ions(np.zeros((n, 3)), (200.0, 0.0, 0.0), mass=38.963)
    moving = loop(particles, 4e-4, 5e-5, processes=[gas], records=[2e-4])
    rows = accounts(moving)
    rate = 0.25 * 0.1 / (BOLTZMANN * KELVIN) * 7.65266733519782e-16
    times = np.concatenate([each.time for each in moving.take_events()])
    assert kstest(times, lambda t: -np.expm1(-rate * t) / -np.expm1(-rate * 4e-4)).pvalue > 1e-3
    lost = -math.expm1(-rate * 4e-4)
    assert lost == pytest.approx(
        times.size / n, rel=0.0, abs=4.0 * math.sqrt(lost * (1.0 - lost) / n)
    )
    assert times.size == rows[-1].count_lost
    for name in ("energy", "momentum", "angular", "charge", "count"):
        assert getattr(rows[-1], f"{name}_residual") == pytest.approx(0.0, rel=0.0, abs=1e-12)
