"""How clouds move at their start: thermal, directed, and both."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from scipy.stats import kstest

from driftwell.constants import ATOMIC_MASS, BOLTZMANN, ELECTRON_MASS, SPEED_OF_LIGHT
from driftwell.forms.faults import Fault
from driftwell.particles.motion import spread_energies
from driftwell.particles.proper_velocity import carried, gamma, kinetic_energy
from driftwell.particles.state import Particles

Load = Callable[..., Particles]
FaultsOf = Callable[..., list[Fault]]

EV = 1.602176634e-19
BALL = {"kind": "ball", "radius": "1 mm"}
MANY = 100_000
FIVE_ERRORS = 5.0 / math.sqrt(MANY)
"""Five standard errors of the mean of a quantity, in its standard deviations."""


def moving(load: Load, species: str = "ion", count: int = MANY, **motion: Any) -> Particles:
    return load(species=species, count=count, shape=BALL, motion=motion)


def test_a_thermal_cloud_has_the_published_mean_and_rms_speed(load: Load) -> None:
    """<v> = sqrt(8 k T / (pi m)) and sqrt(<v^2>) = sqrt(3 k T / m), 100 u at 500 K.

    Kinetic theory, e.g. L. D. Landau, E. M. Lifshitz, Statistical Physics (1980), sec. 29.
    """
    speed = np.linalg.norm(moving(load, temperature="500 K").velocity, axis=0)
    assert 325.36598758202814 == pytest.approx(speed.mean(), rel=0.005, abs=0.0)
    assert 353.152855207418 == pytest.approx(math.sqrt(np.mean(speed**2)), rel=0.005, abs=0.0)


def test_each_axis_of_a_thermal_cloud_is_normal_with_its_own_temperature(load: Load) -> None:
    velocity = moving(load, temperature=["100 K", "0 K", "900 K"]).velocity
    assert not velocity[1].any()
    for axis, kelvin in ((0, 100.0), (2, 900.0)):
        rms = math.sqrt(BOLTZMANN * kelvin / (100.0 * ATOMIC_MASS))
        assert kstest(velocity[axis] / rms, "norm").pvalue > 1e-3
    assert abs(np.corrcoef(velocity[0], velocity[2])[0, 1]) < FIVE_ERRORS


def test_a_cloud_without_motion_is_at_rest(load: Load) -> None:
    assert not load(shape=BALL).velocity.any()
    assert not moving(load).velocity.any()


def test_a_declared_velocity_is_stored_as_proper_velocity(load: Load) -> None:
    found = moving(load, count=3, velocity=["0 m/s", "1.8e8 m/s", "0 m/s"]).velocity
    expected = 1.8e8 / math.sqrt(1.0 - (1.8e8 / SPEED_OF_LIGHT) ** 2)
    assert [0.0, 0.0, 0.0] == found[0].tolist() == found[2].tolist()
    assert [expected] * 3 == pytest.approx(found[1].tolist(), rel=1e-14, abs=0.0)


def test_a_30_kev_electron_cloud_has_30_kev_and_the_momentum_of_its_energy(load: Load) -> None:
    """(p c)^2 = T^2 + 2 T m c^2."""
    velocity = moving(load, species="electron", kinetic_energy="30 keV", along=[0, 3, 4]).velocity
    energy = kinetic_energy(velocity, ELECTRON_MASS)
    assert 30e3 * EV == pytest.approx(energy.mean(), rel=1e-13, abs=0.0)
    rest = ELECTRON_MASS * SPEED_OF_LIGHT**2
    momentum = math.sqrt((30e3 * EV) ** 2 + 2.0 * 30e3 * EV * rest) / SPEED_OF_LIGHT
    found = ELECTRON_MASS * velocity[:, 0]
    assert [0.0, 0.6 * momentum, 0.8 * momentum] == pytest.approx(
        found.tolist(), rel=1e-12, abs=0.0
    )


def test_energy_spread_is_gaussian_about_the_mean_and_cut_at_five_rms(load: Load) -> None:
    velocity = moving(
        load, species="electron", kinetic_energy="30 keV", energy_spread="6 keV"
    ).velocity
    energy = kinetic_energy(velocity, ELECTRON_MASS) / EV
    assert kstest((energy - 30e3) / 6e3, "norm").pvalue > 1e-3
    assert 30e3 == pytest.approx(energy.mean(), abs=6e3 * FIVE_ERRORS)
    assert 6e3 == pytest.approx(energy.std(), rel=FIVE_ERRORS / math.sqrt(2.0), abs=0.0)
    assert 0.0 < energy.min() < energy.max() < 60e3


def test_no_energy_is_drawn_beyond_five_rms_from_the_mean() -> None:
    found = spread_energies(np.array([1e-15, 0.5, 1.0 - 1e-15]), 10.0, 2.0)
    assert [0.0, 10.0, 20.0] == pytest.approx(found.tolist(), abs=1e-6)


def test_divergence_is_the_rms_angle_in_both_planes_and_keeps_the_energy(load: Load) -> None:
    velocity = moving(
        load, species="electron", kinetic_energy="1 keV", along=[1, 0, 0], divergence="20 mrad"
    ).velocity
    for across in (velocity[1], velocity[2]):
        angle = np.arctan2(across, velocity[0])
        # tan of the angle in one plane differs from its share of the polar angle by angle^2
        assert 0.02 == pytest.approx(
            angle.std(), rel=FIVE_ERRORS / math.sqrt(2.0) + 0.02**2, abs=0.0
        )
        assert 0.0 == pytest.approx(angle.mean(), abs=0.02 * FIVE_ERRORS)
    energy = kinetic_energy(velocity, ELECTRON_MASS) / EV
    assert [1e3, 1e3] == pytest.approx([energy.min(), energy.max()], rel=1e-12, abs=0.0)


def test_divergence_and_spread_are_given_to_a_declared_velocity_as_well(load: Load) -> None:
    velocity = moving(
        load,
        velocity=["0 m/s", "0 m/s", "40 km/s"],
        divergence="0.1 rad",
        energy_spread="10 eV",
    ).velocity
    energy = kinetic_energy(velocity, 100.0 * ATOMIC_MASS)
    mean = 50.0 * ATOMIC_MASS * 40e3**2  # slow: m v^2 / 2
    assert mean == pytest.approx(energy.mean(), abs=10.0 * EV * FIVE_ERRORS)
    assert 10.0 * EV == pytest.approx(energy.std(), rel=FIVE_ERRORS / math.sqrt(2.0), abs=0.0)
    polar = np.arctan2(np.hypot(velocity[0], velocity[1]), velocity[2])
    assert math.sqrt(2.0) * 0.1 == pytest.approx(
        math.sqrt(np.mean(polar**2)), rel=FIVE_ERRORS / 2.0, abs=0.0
    )


def test_a_thermal_beam_is_thermal_when_seen_moving_along(load: Load) -> None:
    velocity = moving(
        load, species="electron", kinetic_energy="1 MeV", temperature="100 kK"
    ).velocity
    mean = moving(load, species="electron", count=1, kinetic_energy="1 MeV").velocity
    inner = carried(velocity, -np.repeat(mean, MANY, axis=1))
    rms = math.sqrt(BOLTZMANN * 1e5 / ELECTRON_MASS)
    for component in inner:
        assert kstest(component / rms, "norm").pvalue > 1e-3


def test_the_velocity_spread_of_a_fast_thermal_beam_shrinks_by_gamma_and_gamma_squared(
    load: Load,
) -> None:
    """Lorentz transform of small velocities: across by 1/gamma, along by 1/gamma^2."""
    proper = moving(load, species="electron", kinetic_energy="1 MeV", temperature="1000 K").velocity
    velocity = proper / gamma(proper)
    rms = math.sqrt(BOLTZMANN * 1e3 / ELECTRON_MASS)
    factor = 1.0 + 1e6 * EV / (ELECTRON_MASS * SPEED_OF_LIGHT**2)
    for axis, power in ((0, 1), (1, 1), (2, 2)):
        found = velocity[axis].std()
        # beside the sampling error: corrections of the order of the thermal speed over light's
        assert rms / factor**power == pytest.approx(found, rel=0.012, abs=0.0)


def test_a_slow_thermal_beam_has_the_sum_of_both_motions(load: Load) -> None:
    both = moving(load, velocity=["0 m/s", "0 m/s", "2 km/s"], temperature="300 K").velocity
    thermal = moving(load, temperature="300 K").velocity
    expected = thermal + np.array([[0.0], [0.0], [2000.0]])
    assert np.allclose(expected, both, rtol=0.0, atol=1e-6)


@pytest.mark.parametrize(
    ("motion", "path", "needed"),
    [
        (
            {"velocity": ["0 m/s", "0 m/s", "1 m/s"], "kinetic_energy": "1 eV"},
            ("motion",),
            "either `velocity` or `kinetic_energy`",
        ),
        ({"along": [0, 0, 1]}, ("motion",), "`along` needs a `kinetic_energy`"),
        ({"divergence": "1 mrad"}, ("motion",), "need a `kinetic_energy` or a `velocity`"),
        (
            {"temperature": "300 K", "energy_spread": "1 eV"},
            ("motion",),
            "need a `kinetic_energy` or a `velocity`",
        ),
        (
            {"velocity": ["0 m/s", "0 m/s", "0 m/s"], "divergence": "1 mrad"},
            ("motion",),
            "that is not zero",
        ),
        ({"velocity": ["0 m/s", "3e8 m/s", "0 m/s"]}, ("motion",), "slower than light"),
        ({"velocity": ["0 m/s", "3 m/s"]}, ("motion", "velocity"), "list of 3"),
        (
            {"kinetic_energy": "10 eV", "energy_spread": "2.1 eV"},
            ("motion",),
            "at most a fifth",
        ),
        (
            {"velocity": ["0 m/s", "0 m/s", "1 km/s"], "energy_spread": "1 eV"},
            ("motion", "energy_spread"),
            "at most a fifth of the kinetic energy, 103.6",
        ),
        (
            {"kinetic_energy": "10 eV", "along": [0, 0, 0]},
            ("motion", "along"),
            "other than 0",
        ),
        ({"kinetic_energy": "0 eV"}, ("motion", "kinetic_energy"), "greater than 0"),
        (
            {"kinetic_energy": "1 eV", "divergence": "91 deg"},
            ("motion", "divergence"),
            "at most 1.57",
        ),
        ({"temperature": "-1 K"}, ("motion", "temperature"), "at least 0"),
        ({"temperature": "0.3 eV"}, ("motion", "temperature"), "a temperature"),
        ({"temperature": ["1 K", "2 K"]}, ("motion", "temperature"), "list of 3"),
        ({"temperature": "2e12 K"}, ("motion", "temperature"), "at most 1.08"),
        ({"temprature": "300 K"}, ("motion", "temprature"), 'did you mean "temperature"'),
    ],
)
def test_motions_that_contradict_themselves_are_faults(
    faults_of: FaultsOf, motion: dict[str, Any], path: tuple[str, ...], needed: str
) -> None:
    faults = faults_of(shape=BALL, motion=motion)
    assert [path] == [fault.path for fault in faults]
    assert needed in faults[0].needed


@pytest.mark.parametrize(
    ("motion", "said"),
    [
        ({}, "at rest"),
        ({"temperature": "300 K"}, "at 300 K"),
        ({"temperature": ["1 K", "2 K", "3 mK"]}, "at 1 K / 2 K / 3 mK"),
        ({"velocity": ["0 m/s", "0 m/s", "-400 m/s"]}, "moving with (0, 0, -400) m/s"),
        (
            {
                "kinetic_energy": "30 keV",
                "along": [0, 0, -2],
                "divergence": "2 mrad",
                "energy_spread": "0.5 eV",
            },
            "30 keV along (0, 0, -1), divergence 2 mrad rms, energy spread 500 meV rms",
        ),
    ],
)
def test_a_motion_is_told_in_words(
    words_of: Callable[..., str], motion: dict[str, Any], said: str
) -> None:
    assert words_of(shape=BALL, motion=motion).endswith(said)


def test_a_turning_cloud_turns_about_z_through_its_mean_place(load: Load) -> None:
    """v = omega cross r, 2 pi 100 kHz, from x to y; nothing is turned about the origin."""
    shape = {**BALL, "centre": ["5 mm", "0 mm", "1 mm"]}
    found = load(count=1000, shape=shape, motion={"rotation": "100 kHz"})
    x, y, _ = found.position - found.position.mean(axis=1)[:, None]
    rate = 2e5 * math.pi
    assert (-rate * y).tolist() == pytest.approx(found.velocity[0].tolist(), rel=1e-9, abs=1e-9)
    assert (rate * x).tolist() == pytest.approx(found.velocity[1].tolist(), rel=1e-9, abs=1e-9)
    assert not found.velocity[2].any()


def test_rotation_is_added_to_heat(load: Load) -> None:
    """The same thermal velocities about the turning of the whole."""
    heat = {"temperature": "300 K"}
    still = moving(load, count=1000, **heat)
    turning = moving(load, count=1000, rotation="-30 kHz", **heat)
    alone = moving(load, count=1000, rotation="-30 kHz")
    added = still.velocity + alone.velocity
    assert added.ravel().tolist() == pytest.approx(turning.velocity.ravel().tolist(), rel=1e-7)
