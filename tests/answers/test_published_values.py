"""Answers against published values, each with its source."""

from __future__ import annotations

import math

import numpy as np
import pytest
from recorded_by_hand import Recorded, asked, facts, near, one_cloud
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from driftwell.answers.evidence import TraceRequest
from driftwell.constants import ATOMIC_MASS, BOLTZMANN, SPEED_OF_LIGHT

ION = 100.0 * ATOMIC_MASS
KELVIN = 500.0
THERMAL = math.sqrt(BOLTZMANN * KELVIN / ION)


def test_emittance_of_a_thermal_source_is_its_size_times_the_thermal_speed_over_light() -> None:
    """eps_n = r_rms sqrt(kT / m c^2), 203.8929 m/s / c for 100 u at 500 K.

    Reiser (1994), sec. 5.3 (from memory); the speed computed from CODATA 2022.
    """
    random = np.random.default_rng(1)
    place, velocity = random.normal(size=(2, 100_000, 3))
    recorded = one_cloud(1e-3 * place, THERMAL * velocity, mass=ION)
    found = asked("emittance", plane="x", normalised=True).answer(recorded)
    assert near(203.8928960190877e-3 / SPEED_OF_LIGHT, rel=0.01) == found.value
    kelvin = asked("temperature").answer(recorded)
    assert kelvin.error is not None
    assert pytest.approx(KELVIN, abs=3.0 * kelvin.error) == kelvin.value
    assert kelvin.error < 0.005 * KELVIN


def test_ions_through_a_hole_carry_two_kt_each() -> None:
    """<E> = 2 kT = 0.0861733 eV at 500 K for a Maxwellian weighted with its flux.

    Kinetic theory, e.g. Reif, Fundamentals (1965), sec. 7.12 (from memory).
    """
    random = np.random.default_rng(2)
    velocity = THERMAL * random.normal(size=(100_000, 3))
    velocity[:, 2] = THERMAL * np.sqrt(-2.0 * np.log(random.uniform(size=100_000)))
    recorded = one_cloud(np.zeros((100_000, 3)), velocity, mass=ION)
    found = asked("kinetic-energy").answer(recorded)
    assert near(0.08617333262145178, rel=0.005) == found.value
    assert found.error is not None
    assert found.error < 0.005 * found.value


@pytest.mark.parametrize(
    ("name", "ratio"), [("Kapchinskij-Vladimirskij", 4.0), ("waterbag", 6.0), ("parabolic", 8.0)]
)
def test_edge_over_rms_emittance_of_beam_distributions(name: str, ratio: float) -> None:
    """4, 6 and 8: Reiser (1994), sec. 5.3.4, table of distributions (from memory).

    In four dimensions the first fills the surface of an ellipsoid, the second its volume and the
    third its volume with a density falling as 1 - r^2.
    """
    count = 100_000
    random = np.random.default_rng(3)
    point = random.normal(size=(count, 4))
    square = {
        "Kapchinskij-Vladimirskij": np.ones(count),
        "waterbag": random.beta(2.0, 1.0, count),
        "parabolic": random.beta(2.0, 2.0, count),
    }[name]
    point *= (np.sqrt(square) / np.linalg.norm(point, axis=1))[:, None]
    edge_size, edge_slope, speed = 5e-3, 4e-3, 2e6
    place = np.zeros((count, 3))
    velocity = np.full((count, 3), speed)
    place[:, :2] = edge_size * point[:, :2]
    velocity[:, :2] = speed * (edge_slope * point[:, 2:] + 1.7 * place[:, :2])
    found = asked("emittance", plane="x").answer(one_cloud(place, velocity, mass=ION))
    assert ratio == near(edge_size * edge_slope / found.value, rel=0.01)


def test_nearest_neighbours_in_a_random_gas() -> None:
    """0.55396 n^(-1/3): Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, eq. 676.

    Distances of the charges in the middle of a cube, so that all their neighbours are there.
    """
    count = 100_000
    place = np.random.default_rng(4).uniform(-0.5, 0.5, (count, 3))
    place = place[np.argsort(np.abs(place).max(axis=1), kind="stable")]
    middle = int(np.sum(np.abs(place).max(axis=1) < 0.4))
    inner, outer = facts(count=middle), facts("rest", count - middle, index=1, first_id=middle)
    rest = np.zeros((count, 3))
    recorded = Recorded().at(
        1e-3,
        (inner, np.arange(middle), place[:middle], rest[:middle]),
        (outer, np.arange(count - middle), place[middle:], rest[middle:]),
    )
    found = asked("nearest-neighbour").answer(recorded)
    expected = 0.5539602783650904 * count ** (-1.0 / 3.0)
    assert expected == near(found.value, rel=0.005)
    assert found.error is not None
    assert expected == pytest.approx(found.value, abs=3.0 * found.error)


def test_forces_in_an_ion_string_are_those_of_its_trap() -> None:
    """Equilibrium positions of four ions, 0.45438 and 1.43680 l with l^3 = k e^2 / (m w^2).

    D. F. V. James, Appl. Phys. B 66 (1998) 181, table 1 (from memory); 500 kHz, 6.6359e-26 kg.
    """
    mass, rate, length = 6.6359e-26, 2.0 * math.pi * 500e3, 7.062430792576768e-06
    place = np.zeros((4, 3))
    place[:, 2] = length * np.array([-1.4368019919, -0.4543792807, 0.4543792807, 1.4368019919])
    recorded = one_cloud(place, mass=mass)
    for ion in range(4):
        found = asked("force", charge=ion, axis="z").answer(recorded)
        assert mass * rate**2 * place[ion, 2] == near(found.value, rel=1e-8)


def traced(time: np.ndarray, **coordinates: np.ndarray) -> Recorded:
    """A record of one charge whose coordinates were traced."""
    recorded = Recorded({"load": facts(count=1)}, end_time=float(time[-1]))
    for axis, value in coordinates.items():
        recorded.traced[TraceRequest("load", 0, "xyz".index(axis), None)] = (time, value)
    return recorded


def test_three_frequencies_of_a_penning_trap_obey_the_invariance_theorem() -> None:
    """f+ 554331.964467, f- 22065.353924, fz 156406.719725 Hz; f+^2 + f-^2 + fz^2 = fc^2.

    L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233, closed forms (from memory). 1.5 T,
    V0/d^2 = 4e5 V/m^2, 6.6359e-26 kg; 1 ms holds 22 magnetron periods. The motion is the matrix
    exponential of the equations of motion.
    """
    mass, charge, field, well = 6.6359e-26, 1.602176634e-19, 1.5, 4.0e5
    cyclotron, axial = charge * field / mass, math.sqrt(charge * well / mass)
    motion = np.zeros((6, 6))
    motion[:3, 3:] = np.eye(3)
    motion[3, 0] = motion[4, 1] = axial**2 / 2.0
    motion[5, 2] = -(axial**2)
    motion[3, 4], motion[4, 3] = cyclotron, -cyclotron
    time = np.arange(16_000) * (1e-3 / 16_000)
    advance = expm(motion * time[1])
    state = np.empty((time.size, 6))
    state[0] = [1e-4, 0.0, 2e-4, 0.0, 40.0, 0.0]
    for k in range(1, time.size):
        state[k] = advance @ state[k - 1]
    recorded = traced(time, x=state[:, 0], z=state[:, 2])
    slow = asked("frequency", charge=0, axis="x").answer(recorded)
    fast = asked("frequency", charge=0, axis="x", near="550 kHz").answer(recorded)
    along = asked("frequency", charge=0, axis="z").answer(recorded)
    assert near(22065.3539244286, rel=1e-9) == slow.value
    assert near(554331.9644666738, rel=1e-10) == fast.value
    assert near(156406.71972508682, rel=1e-10) == along.value
    together = math.sqrt(slow.value**2 + fast.value**2 + along.value**2)
    assert near(576397.3183911024, rel=1e-10) == together


@pytest.mark.parametrize(("q", "beta"), [(0.3, 0.21605913494087922)])
def test_secular_frequency_of_a_driven_ion_is_the_mathieu_exponent(q: float, beta: float) -> None:
    """beta(a = 0, q = 0.3) = 0.216059, 1.9 % above the pseudopotential's 0.212132.

    McLachlan, Theory and Application of Mathieu Functions (1947); value computed by Floquet's
    theorem and Hill's determinant. The motion is scipy's, one drive period carried on by its
    own matrix.
    """
    drive, samples, periods = 1.0e6, 24, 300

    def equation(tau: float, y: np.ndarray) -> list[float]:
        return [y[1], 2.0 * q * math.cos(2.0 * tau) * y[0]]

    within = np.arange(samples + 1) * (math.pi / samples)
    basis = np.array(
        [
            solve_ivp(equation, (0.0, math.pi), start, "DOP853", within, rtol=1e-12, atol=1e-14).y
            for start in ([1.0, 0.0], [0.0, 1.0])
        ]
    )  # (which, x or x', time)
    values = []
    state = np.array([1.0, 0.3])
    for _ in range(periods):
        values.append(state @ basis[:, 0, :samples])
        state = basis[:, :, samples].T @ state
    place = 1e-5 * np.concatenate(values)
    time = np.arange(place.size) / (samples * drive)
    found = asked("frequency", charge=0, axis="x").answer(traced(time, x=place))
    assert beta * drive / 2.0 == near(found.value, rel=1e-8)
    sideband = asked("frequency", charge=0, axis="x", near="0.9 MHz").answer(traced(time, x=place))
    assert drive * (1.0 - beta / 2.0) == near(sideband.value, rel=1e-8)
