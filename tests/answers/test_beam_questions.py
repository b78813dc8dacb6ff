"""Current, perveance, brightness, spot, envelope and transmission of beams that are known."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from recorded_by_hand import CHARGE, MASS, Recorded, asked, facts, near, one_cloud, through
from scipy import constants

from driftwell.answers.peak_width import GAUSSIAN_WIDTH
from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT

WINDOW = ["1 us", "3 us"]
ELECTRON = {"mass": constants.m_e, "charge": -constants.e}


def steady(count: int = 3000, **changes: Any) -> Recorded:
    """Charges that pass "exit" evenly from 0 to 3 us, half a spacing from either end."""
    cloud = facts(count=count, **changes)
    time = (np.arange(count) + 0.5) / count * 3e-6
    return Recorded({"load": cloud}, ["exit"], end_time=3e-6, crossed=through(time, cloud))


def flying(recorded: Recorded, energy: float) -> Recorded:
    """The same, all along z with one kinetic energy, J."""
    mass = recorded.clouds["load"].mass
    excess = energy / (mass * SPEED_OF_LIGHT**2)
    recorded.crossed["velocity"][:, 2] = SPEED_OF_LIGHT * math.sqrt(excess * (2.0 + excess))
    return recorded


def test_current_is_the_charge_of_those_that_pass_within_the_window() -> None:
    found = asked("current", of="exit", over=WINDOW).answer(steady(weight=50.0))
    assert 2000 * 50 * CHARGE / 2e-6 == near(found.value)
    chance = math.sqrt(3000 * (2 / 3) * (1 / 3)) * 50 * CHARGE / 2e-6
    assert chance == near(found.error, rel=1e-3)
    assert found.unit == "A"
    assert "2000 charges from 1 us to 3 us, each standing for 50" in found.note


def test_current_of_what_comes_back_cancels_and_of_electrons_is_negative() -> None:
    recorded = steady(**ELECTRON)
    recorded.crossed["direction"][-500:] = -1
    found = asked("current", of="exit", over=WINDOW).answer(recorded)
    assert -constants.e * 1000 / 2e-6 == near(found.value)
    assert "500 of 2000 passages against the normal" in found.note


def test_a_charge_that_goes_round_counts_each_time_and_scatters_as_often() -> None:
    """Half of the charges pass four times: four times the scatter of one passage each."""
    cloud = facts(count=1000)
    time = np.tile((np.arange(500) + 0.5) * 2e-9, 4)
    crossed = through(time, cloud)
    crossed["id"] = np.tile(np.arange(500), 4)
    recorded = Recorded({"load": cloud}, ["exit"], end_time=1e-6, crossed=crossed)
    found = asked("current", of="exit", over=["0 s", "1 us"]).answer(recorded)
    assert 2000 * CHARGE / 1e-6 == near(found.value)
    assert 4 * math.sqrt(1000 * 0.25) * CHARGE / 1e-6 == near(found.error, rel=1e-12)


def test_generalised_perveance_of_ten_milliamperes_of_protons_at_30_kev() -> None:
    """K = q I / (2 pi eps0 m v^3) = 0.00124964 without gamma, which lowers it by 5e-5.

    Reiser (1994), sec. 4.2 (from memory).
    """
    proton = {"mass": constants.m_p, "charge": constants.e}
    weight = 0.01 * 3e-6 / (3000 * constants.e)
    recorded = flying(steady(weight=weight, **proton), 30e3 * constants.e)
    found = asked("generalised-perveance", of="exit", over=WINDOW).answer(recorded)
    assert near(0.0012496413, rel=1e-4) == found.value
    assert "10 mA at 30 keV" in found.note
    assert found.error == near(found.value / math.sqrt(3000 * 2.0), rel=2e-3)


def test_generalised_perveance_of_a_fast_beam_falls_with_the_cubes_of_beta_and_gamma() -> None:
    """2 I / (17.045 kA) / (beta gamma)^3 for electrons: Reiser (1994), eq. 4.17 (from memory)."""
    gamma = 3.0
    rest = constants.m_e * SPEED_OF_LIGHT**2
    recorded = flying(steady(weight=1e6, **ELECTRON), (gamma - 1.0) * rest)
    found = asked("generalised-perveance", of="exit", over=WINDOW).answer(recorded)
    current = 3000 * 1e6 * constants.e / 3e-6
    alfven = 1e7 * constants.m_e * SPEED_OF_LIGHT / constants.e
    assert near(17045.0, rel=1e-4) == alfven
    assert 2.0 * current / alfven / (gamma**2 - 1.0) ** 1.5 == near(found.value, rel=1e-9)


def test_perveance_of_a_planar_diode_is_that_of_child_and_langmuir() -> None:
    """J = 2.33395e-6 A V^-1.5 V^1.5 / d^2: Child (1911), Langmuir (1913); d = 5 mm, V = 1 kV."""
    area, density = 25e-6, 2952.2416299614306
    weight = density * area * 3e-6 / (3000 * constants.e)
    recorded = flying(steady(weight=weight, **ELECTRON), 1e3 * constants.e)
    found = asked("perveance", of="exit", over=WINDOW).answer(recorded)
    assert near(2.3339519384615287e-06, rel=1e-9) == found.value
    assert "A/V^1.5" == found.unit


def test_charges_of_different_kinds_have_no_common_perveance() -> None:
    recorded = flying(steady(), 1e3 * CHARGE)
    other = facts("other", count=10, index=1, first_id=3000, mass=2.0 * MASS)
    recorded.clouds["other"] = other
    more = through(np.full(10, 1.5e-6), other)
    recorded.crossed = np.concatenate([recorded.crossed, more])
    with pytest.raises(Exception, match="charges of different kinds passed; name one cloud"):
        asked("perveance", of="exit", over=WINDOW).answer(recorded)
    found = asked("perveance", of="exit", cloud="load", over=WINDOW).answer(recorded)
    assert found.value > 0.0


def thermal_disc(count: int, kelvin: float, radius: float) -> Recorded:
    """Electrons leaving a uniform disc evenly in time, with a thermal spread across."""
    draw = np.random.default_rng(1)
    recorded = flying(steady(count, weight=1e4, **ELECTRON), 1e3 * constants.e)
    angle, distance = draw.uniform(0.0, 2.0 * math.pi, count), np.sqrt(draw.uniform(size=count))
    place, velocity = recorded.crossed["position"], recorded.crossed["velocity"]
    place[:, 0] = radius * distance * np.cos(angle)
    place[:, 1] = radius * distance * np.sin(angle)
    spread = math.sqrt(BOLTZMANN * kelvin / constants.m_e)
    velocity[:, :2] = spread * draw.normal(size=(count, 2))
    return recorded


@pytest.mark.parametrize(
    ("convention", "times"),
    [("effective", 1.0), ("rms", 16.0), ("plain", 16.0 * math.pi**2)],
)
def test_brightness_of_a_thermal_cathode_is_its_thermal_limit(
    convention: str, times: float
) -> None:
    """B_n = J m c^2 / (2 pi kB T): Reiser (1994), sec. 3.1 and 5.4 (from memory)."""
    kelvin, radius, count = 1200.0, 1e-3, 30_000
    recorded = thermal_disc(count, kelvin, radius)
    found = asked("brightness", of="exit", over=["0 s", "3 us"], convention=convention).answer(
        recorded
    )
    density = count * 1e4 * constants.e / 3e-6 / (math.pi * radius**2)
    rest = constants.m_e * SPEED_OF_LIGHT**2
    limit = density * rest / (2.0 * math.pi * BOLTZMANN * kelvin)
    assert found.error is not None
    assert times * limit == pytest.approx(found.value, abs=3.0 * found.error)
    assert found.error < 0.02 * found.value


def test_spot_of_a_uniform_disc_is_half_its_radius_along_an_axis() -> None:
    """R/2 along an axis, R/sqrt(2) across, R sqrt(0.9) holds 90 %: elementary."""
    recorded = thermal_disc(100_000, 1200.0, 2e-3)
    for keys, expected in (
        ({"axis": "x"}, 1e-3),
        ({"axis": "radius"}, 2e-3 / math.sqrt(2.0)),
        ({"measure": "edge"}, 2e-3 * math.sqrt(0.9)),
    ):
        found = asked("spot-size", of="exit", **keys).answer(recorded)
        assert found.error is not None
        assert expected == pytest.approx(found.value, abs=4.0 * found.error)
        assert found.error < 0.005 * found.value


def test_arrival_energies_are_those_at_the_detector() -> None:
    draw = np.random.default_rng(2)
    recorded = steady(2000)
    energy = CHARGE * (5000.0 + 2.0 * draw.normal(size=2000))
    excess = energy / (MASS * SPEED_OF_LIGHT**2)
    recorded.crossed["velocity"][:, 0] = SPEED_OF_LIGHT * np.sqrt(excess * (2.0 + excess))
    mean, rms, width = (
        asked("arrival-energy", of="exit", statistic=which).answer(recorded)
        for which in ("mean", "rms", "fwhm")
    )
    assert near(float(energy.mean()) / CHARGE, rel=1e-9) == mean.value
    assert near(float(energy.std()) / CHARGE, rel=1e-6) == rms.value
    assert width.error is not None
    assert pytest.approx(2.0 * GAUSSIAN_WIDTH, abs=3.0 * width.error) == width.value
    assert mean.unit == rms.unit == width.unit == "eV"


def test_full_width_of_a_clouds_energies_is_that_of_their_peak() -> None:
    draw = np.random.default_rng(3)
    velocity = np.zeros((4000, 3))
    velocity[:, 2] = np.sqrt(2.0 * CHARGE * (100.0 + 0.5 * draw.normal(size=4000)) / MASS)
    recorded = one_cloud(np.zeros((4000, 3)), velocity)
    found = asked("kinetic-energy-spread", statistic="fwhm").answer(recorded)
    assert found.error is not None
    assert pytest.approx(0.5 * GAUSSIAN_WIDTH, abs=3.0 * found.error) == found.value


def test_transmission_counts_those_that_pass_the_second_after_the_first() -> None:
    """Ten enter; three come out later, one only before, and one without having entered."""
    cloud = facts(count=20)
    first = through(np.arange(1, 11) * 1e-7, cloud, 0)
    second = through(np.full(5, 5e-6), cloud, 1)
    second["id"] = [0, 1, 2, 3, 15]
    second["time"][3] = 1e-9
    recorded = Recorded(
        {"load": cloud}, ["slit", "exit"], end_time=1e-5, crossed=np.concatenate([first, second])
    )
    found = asked("transmission", of="exit", entrance="slit").answer(recorded)
    assert found.value == 0.3
    assert found.note == "3 of 10 charges"
    early = asked("transmission", of="exit", entrance="slit", over=["0 s", "0.25 us"])
    assert early.answer(recorded).value == 1.0


def test_mass_resolving_power_is_half_the_flight_over_the_width() -> None:
    """t / (2 dt): Wiley and McLaren (1955)."""
    time = 8e-6 + 2e-9 * np.random.default_rng(4).normal(size=5000)
    cloud = facts(count=5000)
    recorded = Recorded({"load": cloud}, ["exit"], crossed=through(time, cloud))
    found = asked("mass-resolving-power", of="exit", since="1 us").answer(recorded)
    assert found.error is not None
    assert pytest.approx(7e-6 / (2.0 * 2e-9 * GAUSSIAN_WIDTH), abs=3.0 * found.error) == found.value
    assert found.error < 0.05 * found.value


def waist(count: int = 40_000) -> tuple[np.ndarray, np.ndarray]:
    """A round uniform beam of 10 mm length along z, 1 mm in radius at z = 3 mm, wider off there."""
    draw = np.random.default_rng(5)
    z = draw.uniform(0.0, 10e-3, count)
    angle, distance = draw.uniform(0.0, 2.0 * math.pi, count), np.sqrt(draw.uniform(size=count))
    radius = 1e-3 * np.sqrt(1.0 + ((z - 3e-3) / 4e-3) ** 2)
    place = np.stack([radius * distance * np.cos(angle), radius * distance * np.sin(angle), z])
    velocity = np.broadcast_to([0.0, 0.0, 1e5], (count, 3))
    return place.T, velocity


def test_envelope_at_a_place_is_the_size_of_the_slice_there() -> None:
    recorded = one_cloud(*waist())
    for keys, expected in (
        ({}, 1e-3 / math.sqrt(2.0)),
        ({"axis": "y"}, 0.5e-3),
        ({"measure": "edge"}, 1e-3 * math.sqrt(0.9)),
    ):
        asks = asked("beam-envelope", where="3 mm", thickness="0.5 mm", **keys)
        found = asks.answer(recorded)
        assert found.error is not None
        assert pytest.approx(expected, abs=3.0 * found.error) == found.value
        assert found.error < 0.02 * found.value


def test_the_largest_envelope_is_found_at_the_end_of_a_spreading_beam() -> None:
    found = asked("beam-envelope", thickness="0.2 mm").answer(one_cloud(*waist()))
    expected = 1e-3 * math.sqrt((1.0 + (6.8 / 4.0) ** 2) / 2.0)
    assert found.error is not None
    assert pytest.approx(expected, rel=0.02, abs=3.0 * found.error) == found.value
    assert "largest at z = 9." in found.note


def test_a_slice_with_few_charges_is_refused() -> None:
    asks = asked("beam-envelope", where="50 mm", thickness="0.5 mm")
    with pytest.raises(Exception, match="0 charges lie in the slice; needs at least 40"):
        asks.answer(one_cloud(*waist()))
