"""Plasma parameters, rotation, heating, mobility and lifetime of clouds that are known."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from recorded_by_hand import (
    BIRTH,
    LOSS,
    MASS,
    Recorded,
    asked,
    facts,
    in_time,
    near,
    one_cloud,
    table,
)
from scipy import constants

from driftwell.answers.moments import MomentsRow, moments_of
from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT
from driftwell.particles.proper_velocity import carried

ION = 6.6359e-26
DENSITY, KELVIN = 27108704711191.527, 8.091791850751408


def standard(count: int, seed: int = 1) -> np.ndarray:
    """Six uncorrelated coordinates (6, n) of mean 0 and, divided by the count, variance 1."""
    draw = np.random.default_rng(seed).normal(size=(count, 6))
    draw -= draw.mean(axis=0)
    return (draw @ np.linalg.inv(np.linalg.cholesky(draw.T @ draw / count)).T).T


def drop(
    count: int, density: float, kelvin: float, mass: float, **changes: Any
) -> tuple[np.ndarray, np.ndarray]:
    """Places and velocities (n, 3) whose rms sizes are those of a ball of this density.

    The temperature, one degree of freedom an axis taken out, is `kelvin`.
    """
    six = standard(count)
    radius = (3.0 * count * changes.get("weight", 1.0) / (4.0 * math.pi * density)) ** (1.0 / 3.0)
    spread = math.sqrt(BOLTZMANN * kelvin / mass * (count - 1) / count)
    return (radius / math.sqrt(5.0) * six[:3]).T, (spread * six[3:]).T


@pytest.mark.parametrize("weight", [1.0, 25.0])
def test_plasma_parameters_of_a_drop_at_gamma_one_tenth(weight: float) -> None:
    """omega_p 1088279.6/s, lambda_D 37.7028 um and Gamma 0.1 at 2.7109e13/m^3 and 8.0918 K.

    Formulas of the NRL Plasma Formulary and of Ichimaru (1982), computed with CODATA 2022.
    """
    recorded = one_cloud(*drop(1000, DENSITY, KELVIN, ION, weight=weight), mass=ION, weight=weight)
    rate, length, coupling = (
        asked(ask, density="uniform").answer(recorded)
        for ask in ("plasma-frequency", "debye-length", "coupling-parameter")
    )
    assert near(1088279.6185405306 / (2.0 * math.pi), rel=1e-8) == rate.value
    assert near(3.770279793926588e-05, rel=1e-8) == length.value
    assert near(0.1, rel=1e-8) == coupling.value
    assert ("Hz", "m", "1") == (rate.unit, length.unit, coupling.unit)


def test_electron_plasma_parameters_are_those_of_the_formulary() -> None:
    """f_pe = 8.98e3 sqrt(n) Hz and lambda_D = 743 sqrt(T/n) cm, n in cm^-3 and T in eV.

    NRL Plasma Formulary, fundamental plasma parameters (from memory); three digits there.
    """
    dense, electronvolt = 1e6, 2.0
    kelvin = electronvolt * constants.e / BOLTZMANN
    electron = {"mass": constants.m_e, "charge": -constants.e}
    recorded = one_cloud(*drop(1000, 1e6 * dense, kelvin, constants.m_e), **electron)
    rate = asked("plasma-frequency", density="uniform").answer(recorded)
    length = asked("debye-length", density="uniform").answer(recorded)
    assert near(8.98e3 * math.sqrt(dense), rel=1e-3) == rate.value
    assert near(7.43 * math.sqrt(electronvolt / dense), rel=1e-3) == length.value


def test_the_peak_of_a_gaussian_cloud_is_denser_than_its_uniform_ellipsoid() -> None:
    """N / ((2 pi)^(3/2) s^3) against N / (4 pi/3 (5^(1/2) s)^3): 2.97 times."""
    position = 1e-4 * np.random.default_rng(2).normal(size=(20_000, 3))
    velocity = np.random.default_rng(3).normal(size=(20_000, 3))
    recorded = one_cloud(position, velocity)
    peak, uniform = (
        asked("plasma-frequency", density=which).answer(recorded) for which in ("peak", "uniform")
    )
    ratio = math.sqrt(4.0 * math.pi / 3.0 * 5.0**1.5 / (2.0 * math.pi) ** 1.5)
    assert peak.error is not None
    assert peak.error < 0.04 * peak.value
    assert ratio == pytest.approx(peak.value / uniform.value, abs=3.0 * peak.error / uniform.value)


def test_a_fast_drop_has_the_plasma_parameters_of_its_own_frame() -> None:
    """Density falls by gamma from the laboratory to the drop: Jackson, sec. 11.10 (from memory)."""
    position, velocity = drop(1000, DENSITY, KELVIN, ION)
    fast = np.zeros((3, 1000))
    fast[2] = SPEED_OF_LIGHT * math.sqrt(99.0)
    squeezed = position * [1.0, 1.0, 0.1]
    recorded = one_cloud(squeezed, carried(velocity.T.copy(), fast).T, mass=ION)
    found = asked("coupling-parameter", density="uniform").answer(recorded)
    assert near(0.1, rel=2e-3) == found.value


def test_rotation_is_no_heat_where_its_axis_is_named() -> None:
    position, velocity = drop(1000, DENSITY, KELVIN, ION)
    rate = 2.0 * math.pi * 127314.07926109117
    turning = velocity + rate * np.stack([-position[:, 1], position[:, 0], np.zeros(1000)], axis=1)
    recorded = one_cloud(position, turning, mass=ION)
    hot = asked("coupling-parameter", density="uniform").answer(recorded)
    found = asked("coupling-parameter", density="uniform", rotation_axis="z").answer(recorded)
    assert hot.value < 0.05
    assert near(0.1 * (3 * 999 - 1) / (3 * 999), rel=1e-8) == found.value


@pytest.mark.parametrize("axis", ["x", "y", "z"])
def test_a_rigid_rotor_turns_at_its_frequency(axis: str) -> None:
    """127314 Hz, a drop of 1000 ions of aspect ratio 1 at 4.5 T: Bollinger et al. (1993).

    Its own thermal motion is uncorrelated with its places; the centre moves.
    """
    position, velocity = drop(1000, DENSITY, KELVIN, ION)
    turn = np.zeros(3)
    turn["xyz".index(axis)] = 2.0 * math.pi * 127314.07926109117
    turning = velocity + np.cross(turn, position) + [300.0, -200.0, 50.0]
    found = asked("rotation-frequency", axis=axis).answer(
        one_cloud(position + 1e-3, turning, mass=ION)
    )
    assert near(127314.07926109117, rel=1e-8) == found.value
    # The error of a slope: thermal spread over rms radius, over the root of the number.
    spread = math.sqrt(BOLTZMANN * KELVIN / ION) / (2.0 * math.pi)
    radius = float(position.std()) * math.sqrt(2.0)
    assert spread / radius / math.sqrt(1000) == near(found.error, rel=0.3)
    back = asked("rotation-frequency", axis=axis).answer(one_cloud(position, -turning, mass=ION))
    assert near(-127314.07926109117, rel=1e-8) == back.value


def test_a_vortex_that_is_no_rigid_rotor_is_told_so() -> None:
    """v ~ 1/r: inside it turns faster than the whole, outside slower."""
    position = standard(2000)[:3].T * 1e-3
    square = position[:, 0] ** 2 + position[:, 1] ** 2 + 1e-8
    velocity = np.zeros((2000, 3))
    velocity[:, 0], velocity[:, 1] = -position[:, 1] / square, position[:, 0] / square
    note = asked("rotation-frequency").answer(one_cloud(position, 1e-3 * velocity)).note
    apart, chance = (
        float(part.split()[0]) * {"kHz": 1e3, "Hz": 1.0, "mHz": 1e-3}[part.split()[1]]
        for part in note.split("differ from it by ")[1].replace(" rms,", ",").split(", ")
    )
    assert apart > 5.0 * chance > 0.0


def warming(count: int, noise: float, rate: float = 2.0e4) -> Recorded:
    """Records over 1 ms of a cloud at 300 K that warms along z; noise in parts of 300 K."""
    time = np.linspace(0.0, 1e-3, count)
    wander = noise * np.random.default_rng(4).normal(size=count)
    rows = []
    for kelvin in 300.0 * (1.0 + wander) + rate * time:
        covariance = np.zeros((6, 6))
        covariance[5, 5] = BOLTZMANN * kelvin / MASS * 99 / 100
        rows.append(MomentsRow(100, np.zeros(6), covariance, 0.0, 0.0))
    return in_time(time, rows)


def test_heating_rate_is_the_slope_of_the_temperature() -> None:
    found = asked("heating-rate", axis="z", over=["0 s", "1 ms"]).answer(warming(50, 0.0))
    assert near(2.0e4, rel=1e-9) == found.value
    assert "K/s" == found.unit
    mean = asked("heating-rate", over=["0.2 ms", "0.8 ms"]).answer(warming(50, 0.0))
    assert near(2.0e4 / 3.0, rel=1e-9) == mean.value


def test_error_of_a_heating_rate_is_that_of_a_fitted_slope() -> None:
    """s / sqrt(sum (t - mean)^2) = s sqrt(12/n) / T for n even times."""
    found = asked("heating-rate", axis="z", over=["0 s", "1 ms"]).answer(warming(600, 0.02))
    assert found.error is not None
    assert 6.0 * math.sqrt(12.0 / 600.0) / 1e-3 == near(found.error, rel=0.4)
    assert pytest.approx(2.0e4, abs=3.0 * found.error) == found.value
    assert "scatter about the line by 6" in found.note


def test_a_temperature_that_strays_as_slowly_as_the_window_is_long_has_no_error() -> None:
    recorded = warming(50, 0.0)
    recorded.series["load"].covariance[:, 5, 5] *= 1.0 + np.linspace(-1.0, 1.0, 50) ** 2
    found = asked("heating-rate", axis="z", over=["0 s", "1 ms"]).answer(recorded)
    assert found.error is None
    assert "too slowly against the window" in found.note


def drifting(kelvin: float = 0.0, count: int = 400) -> Recorded:
    """Ions of +e that drift along z by 25.42284 m/s for 2 ms and diffuse."""
    draw = np.random.default_rng(5)
    cloud = facts(count=count)
    start = 1e-3 * draw.normal(size=(count, 3))
    moved = np.zeros((count, 3))
    diffusion = 0.0065723134563477545 * kelvin / 300.0
    moved[:, 2] = 25.42284353489832 * 2e-3
    moved += math.sqrt(2.0 * diffusion * 2e-3) * draw.normal(size=(count, 3))
    recorded = Recorded(end_time=3e-3)
    ids = np.arange(count)
    recorded.at(1e-3, (cloud, ids, start, 0.0 * start))
    kept = ids[ids % 10 > 0]
    return recorded.at(3e-3, (cloud, kept, (start + moved)[kept], 0.0 * start[kept]))


MOBILE = {
    "field": "100 V/m",
    "over": ["1 ms", "3 ms"],
    "pressure": "100 Pa",
    "temperature": "300 K",
}


def test_mobility_is_drift_over_field_and_reduced_to_the_standard_density() -> None:
    """K 0.254228 m^2/(V s), K0 2.28448 cm^2/(V s), 4.14195 Td at 300 K and 100 Pa.

    Mason and McDaniel (1988), formulas of sec. 1.1 and 5.3 (from memory), computed.
    """
    plain = asked("mobility", **MOBILE).answer(drifting())
    assert near(0.2542284353489832, rel=1e-9) == plain.value
    reduced = asked("mobility", reduced=True, **MOBILE).answer(drifting())
    assert near(2.284480536740678e-4, rel=1e-8) == reduced.value
    assert "E/n 4.142 Td" in reduced.note
    assert "40 more were lost on the way" in plain.note
    against = asked("mobility", **(MOBILE | {"field": "-100 V/m"})).answer(drifting())
    assert near(-0.2542284353489832, rel=1e-9) == against.value


def test_error_of_a_mobility_is_that_of_diffusion() -> None:
    """sqrt(2 D t / n) / (t E)."""
    found = asked("mobility", **MOBILE).answer(drifting(300.0))
    diffusion = math.sqrt(2.0 * 0.0065723134563477545 * 2e-3 / 360) / 2e-3 / 100.0
    assert diffusion == near(found.error, rel=0.15)
    assert found.error is not None
    assert pytest.approx(0.2542284353489832, abs=3.0 * found.error) == found.value


def test_reduced_mobility_needs_to_know_the_gas() -> None:
    with pytest.raises(AssertionError, match="needs `pressure` and `temperature` of the gas"):
        asked("mobility", field="100 V/m", over=["1 ms", "3 ms"], reduced=True)


def decaying(tau: float, count: int = 2000, seed: int = 6) -> Recorded:
    """A cloud lost exponentially, of which a run of 1 ms sees the beginning."""
    time = np.random.default_rng(seed).exponential(tau, count)
    rows = [(t, i, 0) for i, t in enumerate(time) if t <= 1e-3]
    return Recorded({"load": facts(count=count)}, lost=table(LOSS, rows))


@pytest.mark.parametrize("tau", [0.2e-3, 3e-3])
@pytest.mark.parametrize("over", [None, ["0.1 ms", "0.7 ms"]])
def test_lifetime_counts_those_that_outlive_the_run(tau: float, over: list[str] | None) -> None:
    found = asked("lifetime", **({} if over is None else {"over": over})).answer(decaying(tau))
    assert found.error is not None
    assert pytest.approx(tau, abs=3.0 * found.error) == found.value
    assert found.error < 0.1 * found.value
    assert "not an exponential" not in found.note


def test_lifetime_is_time_watched_over_losses() -> None:
    """Two of ten are lost at 0.2 and 0.4 ms of 1 ms: (0.2 + 0.4 + 8 x 1) ms / 2."""
    rows = [(2e-4, 3, 0), (4e-4, 7, 0)]
    recorded = Recorded({"load": facts(count=10)}, lost=table(LOSS, rows))
    found = asked("lifetime").answer(recorded)
    assert near(4.3e-3) == found.value
    assert near(4.3e-3 / math.sqrt(2.0)) == found.error
    # From 0.3 ms on only one is lost, and one was gone before: (0.1 + 8 x 0.7) ms.
    late = asked("lifetime", over=["0.3 ms", "1 ms"]).answer(recorded)
    assert near(5.7e-3) == late.value
    assert "1 of 9 charges lost" in late.note


def test_charges_of_a_source_are_watched_from_their_birth() -> None:
    """Born at 0, 0.2, 0.4 and 0.6 ms, the second lost at 0.5 ms: (1 + 0.3 + 0.6 + 0.4) ms."""
    born = table(BIRTH, [(2e-4 * k, 10 + k, 0) for k in range(4)])
    source = facts(count=50, first_id=10, emitted=True)
    lost = table(LOSS, [(5e-4, 11, 0)])
    recorded = Recorded({"load": source}, borne=born, lost=lost)
    found = asked("lifetime").answer(recorded)
    assert near(2.3e-3) == found.value
    assert "1 of 4 charges lost" in found.note


def test_a_loss_that_comes_late_is_told_not_to_be_exponential() -> None:
    rows = [(8e-4 + 1e-6 * k, k, 0) for k in range(60)]
    recorded = Recorded({"load": facts(count=100)}, lost=table(LOSS, rows))
    found = asked("lifetime").answer(recorded)
    assert "0 of them in the first half of the time watched: not an exponential loss" in found.note


def test_a_cloud_that_lost_nothing_outlives_a_bound() -> None:
    recorded = Recorded({"load": facts(count=30)})
    with pytest.raises(Exception, match="longer than 10 ms with 95 % confidence"):
        asked("lifetime").answer(recorded)


def test_moments_and_charges_agree_on_the_turning_of_a_cloud() -> None:
    """Shear and rotation together: only the rotation counts."""
    position = standard(500)[:3] * [[1e-3], [2e-3], [1e-3]]
    velocity = np.stack([5.0 * position[1], 3e3 * position[0], 0.0 * position[2]])
    rows = [moments_of(position, velocity, MASS)] * 8
    once = asked("rotation-frequency").answer(one_cloud(position.T, velocity.T))
    found = asked("rotation-frequency", over=["0 s", "1 ms"]).answer(
        in_time(np.linspace(0.0, 1e-3, 8), rows)
    )
    assert near((3e3 * 1.0 - 5.0 * 4.0) / 5.0 / (2.0 * math.pi), rel=1e-9) == once.value
    assert once.value == near(found.value, rel=1e-9)
