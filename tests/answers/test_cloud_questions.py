"""Centre, size, temperature, energy and emittance of clouds whose values are known."""

from __future__ import annotations

import math

import numpy as np
import pytest
from recorded_by_hand import CHARGE, MASS, ONE_OF_EACH, asked, in_time, near, one_cloud

from driftwell.answers.answer_lines import common_lines
from driftwell.answers.moments import MomentsRow, moments_of
from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT
from driftwell.particles.proper_velocity import carried

SIGMA = np.array([60e-6, 90e-6, 250e-6])
CENTRE = np.array([1e-3, -2e-3, 4e-3])
DRIFT = np.array([-30.0, 50.0, 4000.0])
KELVIN = np.array([300.0, 600.0, 150.0])
SPREAD = np.sqrt(BOLTZMANN * KELVIN / MASS)

MOMENT_KINDS = [
    keys
    for keys in (*ONE_OF_EACH, {"ask": "temperature"}, {"ask": "emittance", "plane": "x"})
    if keys["ask"]
    in (
        "centre",
        "rms-size",
        "temperature",
        "kinetic-energy",
        "kinetic-energy-spread",
        "emittance",
        "envelope-tune",
        "rotation-frequency",
    )
]


def exact(count: int = 2000, seed: int = 1) -> tuple[np.ndarray, np.ndarray]:
    """Positions and velocities whose sample means and variances are exactly those above.

    The six coordinates are uncorrelated in the sample; variances are divided by the count.
    """
    draw = np.random.default_rng(seed).normal(size=(count, 6))
    draw -= draw.mean(axis=0)
    draw = draw @ np.linalg.inv(np.linalg.cholesky(draw.T @ draw / count)).T
    return CENTRE + SIGMA * draw[:, :3], DRIFT + SPREAD * draw[:, 3:]


@pytest.mark.parametrize("axis", [0, 1, 2])
def test_centre_and_size_are_the_clouds_own(axis: int) -> None:
    recorded = one_cloud(*exact())
    centre = asked("centre", axis="xyz"[axis]).answer(recorded)
    size = asked("rms-size", axis="xyz"[axis]).answer(recorded)
    assert CENTRE[axis] == near(centre.value, rel=1e-12)
    assert SIGMA[axis] / math.sqrt(2000) == near(centre.error, rel=1e-3)
    assert SIGMA[axis] == near(size.value, rel=1e-12)
    assert SIGMA[axis] / math.sqrt(4000) == near(size.error, rel=0.3)
    assert (centre.unit, size.unit) == ("m", "m")


@pytest.mark.parametrize("axis", [0, 1, 2])
def test_temperature_is_about_the_mean_velocity_with_one_degree_of_freedom_taken(axis: int) -> None:
    """m var(v) / k_B: equipartition, e.g. Reif, Fundamentals (1965), sec. 7.5 (from memory)."""
    found = asked("temperature", axis="xyz"[axis]).answer(one_cloud(*exact(100)))
    assert KELVIN[axis] * 100 / 99 == near(found.value, rel=1e-7)
    assert found.unit == "K"
    assert "4 km/s" in found.note


def test_mean_temperature_is_that_of_the_three_axes() -> None:
    found = asked("temperature").answer(one_cloud(*exact()))
    assert KELVIN.mean() * 2000 / 1999 == near(found.value, rel=1e-7)


@pytest.mark.parametrize("direction", [(0.0, 0.0, 1.0), (2.0, -1.0, 2.0)])
def test_temperature_of_a_fast_bunch_is_that_in_its_own_frame(
    direction: tuple[float, float, float],
) -> None:
    """A thermal cloud given gamma = 10 by adding velocities (Jackson sec. 11.4, from memory)."""
    along = np.array(direction) / np.linalg.norm(direction)
    _, velocity = exact()
    thermal = (velocity - DRIFT).T
    fast = SPEED_OF_LIGHT * math.sqrt(99.0) * along
    seen = carried(thermal, np.broadcast_to(fast[:, None], thermal.shape))
    for axis in range(3):
        found = asked("temperature", axis="xyz"[axis]).answer(one_cloud(exact()[0], seen.T))
        assert KELVIN[axis] == near(found.value, rel=2e-3)


def test_kinetic_energy_is_that_of_drift_and_heat_together() -> None:
    position, velocity = exact()
    found = asked("kinetic-energy").answer(one_cloud(position, velocity))
    expected = 0.5 * MASS * float(DRIFT @ DRIFT + SPREAD @ SPREAD)
    assert expected / CHARGE == near(found.value, rel=1e-7)
    assert found.unit == "eV"


def test_spread_of_kinetic_energy_of_a_beam_is_speed_times_momentum_spread() -> None:
    """dE = v dp, to first order in the spread over the speed, here 3 %."""
    velocity = DRIFT + SPREAD * np.array([0.0, 0.0, 1.0]) * exact()[1]
    velocity = np.stack([0 * velocity[:, 0], 0 * velocity[:, 0], exact()[1][:, 2]], axis=1)
    found = asked("kinetic-energy-spread").answer(one_cloud(exact()[0], velocity))
    assert MASS * DRIFT[2] * SPREAD[2] / CHARGE == near(found.value, rel=2e-3)


def test_normalised_emittance_of_uncorrelated_motion_is_size_times_spread_over_light() -> None:
    found = asked("emittance", plane="y", normalised=True).answer(one_cloud(*exact()))
    assert SIGMA[1] * SPREAD[1] / SPEED_OF_LIGHT == near(found.value, rel=1e-9)
    assert found.unit == "m rad"


def test_emittance_does_not_change_in_a_drift_of_any_length() -> None:
    """x -> x + L x' leaves the rms emittance: Reiser (1994), sec. 3.2 (from memory)."""
    position, velocity = exact()
    slope = velocity / velocity[:, 2:]
    start = asked("emittance", plane="x").answer(one_cloud(position, velocity))
    for length in (0.1, 1e4):
        there = position + length * slope
        found = asked("emittance", plane="x").answer(one_cloud(there, velocity))
        assert start.value == near(found.value, rel=1e-8)


def test_geometric_emittance_takes_slopes_against_the_beam_axis() -> None:
    position, velocity = exact()
    expected = asked("emittance", plane="y").answer(one_cloud(position, velocity))
    turned = [2, 0, 1]  # what ran along z runs along x
    found = asked("emittance", plane="z", beam_axis="x").answer(
        one_cloud(position[:, turned], velocity[:, turned])
    )
    assert expected.value == near(found.value, rel=1e-12)
    assert SIGMA[1] * SPREAD[1] / DRIFT[2] == near(expected.value, rel=0.01)


def test_slopes_of_charges_moving_both_ways_are_refused() -> None:
    position, velocity = exact()
    question = asked("emittance", plane="x")
    with pytest.raises(Exception, match="normalised = true"):
        question.answer(one_cloud(position, velocity - DRIFT))


@pytest.mark.parametrize("keys", MOMENT_KINDS, ids=lambda keys: str(list(keys.values())))
def test_a_window_of_like_records_gives_the_value_of_one_time(keys: dict[str, object]) -> None:
    position, velocity = exact(300)
    velocity[:, :2] += 2e6 * (position - CENTRE)[:, :2]  # places and velocities go together
    velocity[:, 1] += 1e6 * (position - CENTRE)[:, 0]  # and turn about z
    if keys["ask"] == "emittance" and "normalised" not in keys:
        velocity[:, 2] = DRIFT[2]  # moments know the cloud's mean slope only
    once = asked(**keys).answer(one_cloud(position, velocity))
    rows = [moments_of(position.T, velocity.T, MASS)] * 20
    recorded = in_time(np.linspace(0.0, 1e-3, 20), rows)
    found = asked(**keys, over=["0.2 ms", "0.8 ms"]).answer(recorded)
    assert once.value == near(found.value, rel=1e-8)
    assert found.error == pytest.approx(0.0, abs=1e-12 * abs(found.value))
    assert "mean of 12 records" in found.note
    assert once.unit == found.unit


def test_temperature_of_a_fast_bunch_is_the_same_from_moments() -> None:
    _, velocity = exact()
    fast = np.broadcast_to(np.array([[4e8], [-2e8], [9e8]]), (3, 2000))
    seen = carried((velocity - DRIFT).T, fast)
    rows = [moments_of(exact()[0].T, seen, MASS)] * 8
    for axis in "xyz":
        once = asked("temperature", axis=axis).answer(one_cloud(exact()[0], seen.T))
        found = asked("temperature", axis=axis, over=["0 s", "1 ms"]).answer(
            in_time(np.linspace(0.0, 1e-3, 8), rows)
        )
        assert once.value == near(found.value, rel=1e-6)


def test_a_window_averages_only_the_records_within_it() -> None:
    rows = [at_x(float(k)) for k in range(11)]
    recorded = in_time(np.arange(11) * 1e-4, rows)
    found = asked("centre", axis="x", over=["0.3 ms", "0.6 ms"]).answer(recorded)
    assert near(4.5, rel=1e-12) == found.value


def at_x(centre: float, count: int = 5) -> MomentsRow:
    """A record of charges at one x."""
    position = np.zeros((3, count))
    position[0] = centre
    return moments_of(position, np.zeros((3, count)), MASS)


def test_records_after_the_last_charge_was_lost_are_left_out_and_told() -> None:
    rows = [at_x(2.0), at_x(2.0), at_x(0.0, count=0), at_x(0.0, count=0)]
    recorded = in_time(np.arange(4) * 1e-4, rows)
    found = asked("centre", axis="x", over=["0 s", "0.3 ms"]).answer(recorded)
    assert found.value == 2.0
    assert "until too few charges were left at 100 us" in found.note


def test_a_window_that_holds_no_record_says_so() -> None:
    recorded = in_time(np.array([0.0, 1e-3]), [at_x(1.0), at_x(1.0)])
    with pytest.raises(Exception, match="no record lies in the window"):
        asked("centre", axis="x", over=["0.3 ms", "0.6 ms"]).answer(recorded)


def test_too_few_charges_give_a_value_without_error_or_a_reason() -> None:
    pair = one_cloud(np.array([[0.0, 0.0, -3e-6], [0.0, 0.0, 3e-6]]))
    size = asked("rms-size", axis="z").answer(pair)
    assert (size.value, size.error) == (near(3e-6), None)
    assert "too few charges" in size.note
    single = one_cloud(np.zeros((1, 3)))
    with pytest.raises(Exception, match="needs at least 2 charges, there are 1"):
        asked("rms-size", axis="z").answer(single)
    assert asked("centre", axis="z").answer(single).error is None


def test_a_cloud_of_macro_particles_says_whose_error_it_is() -> None:
    found = asked("centre", axis="x").answer(one_cloud(*exact(), weight=50.0))
    assert "2000 charges, each standing for 50" in found.note
    (line,) = common_lines([found, found], 200)
    assert "the error is that of the simulated number" in line
    assert [] == common_lines([asked("centre", axis="x").answer(one_cloud(*exact()))], 200)
