"""The automatic step: the fastest motion decides, and is named."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.spatial import cKDTree

from driftwell.constants import (
    ATOMIC_MASS,
    COULOMB_CONSTANT,
    ELECTRIC_CONSTANT,
    ELECTRON_MASS,
    ELEMENTARY_CHARGE,
)
from driftwell.particles.state import Particles
from driftwell.run import run
from driftwell.scenario.read import read_scenario
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import (
    Rate,
    StepChoice,
    chosen_step,
    closest_pair_rates,
    plasma_rates,
)
from tests.moving import ION_MASS, ions
from tests.running import Unwatched, points, species
from tests.scenario.good_scenarios import toml_file

PERIOD = 2.0 * math.pi


def test_the_fastest_motion_decides_and_is_named() -> None:
    """A hundredth of its period; shares take part of the number of steps."""
    rates = [Rate("slow swing", 1e3), Rate("fast swing", 1e6), Rate("none", 0.0)]
    found = chosen_step(rates, 100.0, 1.0, 1.0)
    assert PERIOD / 1e6 / 100.0 == pytest.approx(found.step, rel=1e-15, abs=0.0)
    assert "the fast swing (6.28 us a period, 100 steps each)" == found.because
    hasty = [*rates, Rate("encounter", 4e6, 0.2)]
    assert "the fast swing" in chosen_step(hasty, 100.0, 1.0, 1.0).because
    hasty[-1] = Rate("encounter", 6e6, 0.2)
    found = chosen_step(hasty, 100.0, 1.0, 1.0)
    assert PERIOD / 6e6 / 20.0 == pytest.approx(found.step, rel=1e-15, abs=0.0)
    assert "encounter" in found.because


def test_a_period_is_never_left_without_a_step() -> None:
    """A share of few steps a period is one step at least."""
    found = chosen_step([Rate("encounter", 1e6, 0.2)], 2.0, 1.0, 1.0)
    assert PERIOD / 1e6 == pytest.approx(found.step, rel=1e-15, abs=0.0)


def test_where_nothing_moves_fast_records_decide() -> None:
    """A step for each record or sample, a hundred at least in all."""
    assert 1e-3 == chosen_step([], 100.0, 1.0, 1e-3).step
    assert 1e-2 == chosen_step([], 100.0, 1.0, 0.5).step
    assert (
        "the time between records: nothing moves faster"
        == chosen_step([Rate("swing", 1.0)], 100.0, 1.0, 1e-3).because
    )


def test_the_plasma_frequency_is_that_of_a_uniform_ball() -> None:
    """w^2 = n q^2 / (eps0 m), exact for a uniform ball; weights count in the density.

    F. F. Chen, Introduction to Plasma Physics, eq. 4-25 (from memory). 20 000 random places give
    the density to about 1 %.
    """
    random = np.random.default_rng(1)
    count, radius = 20_000, 1e-3
    place = random.normal(size=(count, 3))
    place *= (
        radius * random.random((count, 1)) ** (1 / 3) / np.linalg.norm(place, axis=1, keepdims=True)
    )
    [found] = plasma_rates(ions(place, weight=5.0))
    density = 5.0 * count / (4.0 / 3.0 * math.pi * radius**3)
    expected = math.sqrt(density * ELEMENTARY_CHARGE**2 / (ELECTRIC_CONSTANT * ION_MASS))
    assert expected == pytest.approx(found.rate, rel=0.01, abs=0.0)


def test_every_cloud_has_its_own_plasma_frequency() -> None:
    """Clouds of one charge, in a line or in a plane have none."""
    random = np.random.default_rng(2)
    ball = random.normal(0.0, 1e-3, (50, 3))
    flat = ball * [1.0, 1.0, 0.0]
    both = ions(
        np.concatenate([ball, 10.0 * ball, flat, flat[:1]]),
        cloud=np.repeat([0, 1, 2, 3], [50, 50, 50, 1]),
        mass=np.repeat([100.0, 1.0, 1.0, 1.0], [50, 50, 50, 1]),
    )
    large, small = plasma_rates(both)
    assert math.sqrt(10.0) == pytest.approx(large.rate / small.rate, rel=1e-12, abs=0.0)


def pair_rate(distance: float, mass: float = ION_MASS, charges: float = 1.0) -> float:
    """Rate of a pair of equal masses at a distance: sqrt(k q1 q2 / (mu r^3)), rad/s."""
    strength = COULOMB_CONSTANT * charges * ELEMENTARY_CHARGE**2 / (0.5 * mass)
    return math.sqrt(strength / distance**3)


def test_two_ions_at_rest_are_as_near_as_they_get() -> None:
    """Repelling each other from where they are."""
    [found] = closest_pair_rates(ions([[0, 0, 0], [0, 0, 1e-5]]), 0.0)
    assert pair_rate(1e-5) == pytest.approx(found.rate, rel=1e-12, abs=0.0)
    assert 0.2 == found.share


def test_two_ions_flying_at_each_other_turn_where_their_energy_says() -> None:
    """Head on: k q^2 / r = k q^2 / r0 + mu v^2 / 2."""
    apart, speed = 1e-3, 500.0
    moving = ions([[0, 0, 0], [0, 0, apart]], [[0, 0, speed], [0, 0, -speed]])
    unit = COULOMB_CONSTANT * ELEMENTARY_CHARGE**2
    nearest = unit / (unit / apart + 0.25 * ION_MASS * (2.0 * speed) ** 2)
    [found] = closest_pair_rates(moving, 0.0)
    assert pair_rate(nearest) == pytest.approx(found.rate, rel=1e-9, abs=0.0)
    [away] = closest_pair_rates(ions([[0, 0, 0], [0, 0, apart]], [[0, 0, -1], [0, 0, 1]]), 0.0)
    assert pair_rate(apart) == pytest.approx(away.rate, rel=1e-12, abs=0.0)


@pytest.mark.parametrize(("signs", "bend"), [((1.0, 1.0), 1.0), ((1.0, -1.0), -1.0)])
def test_a_passing_pair_is_nearest_where_rutherford_says(
    signs: tuple[float, float], bend: float
) -> None:
    """r_min = b90 + sqrt(b90^2 + b^2) for like charges, -b90 + ... for unlike ones.

    L. D. Landau, E. M. Lifshitz, Mechanics, sec. 15 and 19; from so far away that the start's own
    potential energy is 1e-5 of the kinetic one.
    """
    speed, impact, far = 300.0, 2e-8, 1e-3
    unit = COULOMB_CONSTANT * ELEMENTARY_CHARGE**2
    b90 = unit / (0.5 * ION_MASS * speed**2)
    moving = ions([[0, 0, 0], [impact, 0, far]], [[0, 0, 0], [0, 0, -speed]], charge=signs)
    nearest = bend * b90 + math.hypot(b90, impact)
    [found] = closest_pair_rates(moving, 0.0)
    assert pair_rate(nearest) == pytest.approx(found.rate, rel=1e-3, abs=0.0)
    assert pair_rate(impact) != pytest.approx(found.rate, rel=0.1, abs=0.0)


def test_softening_slows_the_closest_approach() -> None:
    """r^3 becomes (r^2 + e^2)^(3/2)."""
    [found] = closest_pair_rates(ions([[0, 0, 0], [0, 0, 3e-6]]), 4e-6)
    assert pair_rate(5e-6) == pytest.approx(found.rate, rel=1e-12, abs=0.0)


def test_many_charges_are_followed_by_their_nearest_neighbours() -> None:
    """Among 200 the nearest pair decides, heavy macro-charges by the charge that pushes."""
    random = np.random.default_rng(3)
    place = random.uniform(-1e-3, 1e-3, (200, 3))
    place[150] = place[20] + [0.0, 0.0, 1e-7]
    [found] = closest_pair_rates(ions(place, weight=4.0), 0.0)
    assert pair_rate(1e-7, charges=4.0) == pytest.approx(found.rate, rel=1e-12, abs=0.0)
    assert [] == closest_pair_rates(ions([0, 0, 0]), 0.0)


@pytest.mark.parametrize("kind", ["alike", "of two masses", "of two weights", "at few places"])
@pytest.mark.parametrize("softening", [0.0, 2e-6])
def test_the_fastest_of_very_many_is_that_of_their_nearest_neighbours(
    kind: str, softening: float
) -> None:
    """Few are asked for their neighbour first; the fastest pair is found all the same."""
    random = np.random.default_rng(5)
    n = 20_000
    place = random.normal(scale=1e-4, size=(n, 3))
    mass, weight = np.full(n, 100.0), np.ones(n)
    if kind == "of two masses":
        mass[::2] = 5e-4
    if kind == "of two weights":
        weight[::3] = 1000.0
    if kind == "at few places":
        place[: n // 2] = place[:50].repeat(n // 100, axis=0)
    many = ions(place, mass=mass, weight=weight)
    [found] = closest_pair_rates(many, softening)
    neighbour = cKDTree(place).query(place, k=2)[1]
    mate = np.where(neighbour[:, 0] == np.arange(n), neighbour[:, 1], neighbour[:, 0])
    away = np.sqrt(((place - place[mate]) ** 2).sum(axis=1))
    pushed = weight * ELEMENTARY_CHARGE
    strength = (
        COULOMB_CONSTANT
        * ELEMENTARY_CHARGE
        / ATOMIC_MASS
        * (pushed / mass[mate] + pushed[mate] / mass)
    )
    softened = (away**2 + softening**2) ** 1.5
    least = math.sqrt((strength[softened > 0.0] / softened[softened > 0.0]).max())
    assert found.rate >= least * (1.0 - 1e-12)
    if kind == "alike":
        assert least == pytest.approx(found.rate, rel=1e-12, abs=0.0)
    assert found.rate < 10.0 * least


class _Watching(Unwatched):
    """Keeps what the run says of its step, and stops at once."""

    choice: StepChoice

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        self.choice = choice
        self.longest = float((np.diff(plan.time) / plan.steps).max())

    def goes_on(self, progress: Any) -> bool:
        return False


ONE = [points("one", "ion", [0, 0, 0])]
MAGNET = {"name": "coil", "kind": "uniform-magnetic", "strength": "1 T"}
RODS = {
    "name": "rods",
    "kind": "rf-quadrupole",
    "radius": "3.5 mm",
    "voltage": {"amplitude": "1 V", "frequency": "1 MHz"},
}


@pytest.mark.parametrize(
    ("sections", "told", "period"),
    [
        ({"cloud": ONE, "field": [RODS]}, 'the drive of field "rods" on ion', 1e-6),
        (
            {"cloud": ONE, "field": [MAGNET]},
            'the cyclotron of field "coil" on ion',
            PERIOD * ION_MASS / ELEMENTARY_CHARGE,
        ),
        (
            {
                "cloud": [*ONE, points("two", "electron", [0, 0, 0.1])],
                "field": [MAGNET],
                "coulomb": {"method": "off"},
            },
            'the cyclotron of field "coil" on electron',
            PERIOD * ELECTRON_MASS / ELEMENTARY_CHARGE,
        ),
        (
            {
                "cloud": ONE,
                "field": [
                    {
                        "name": "caps",
                        "kind": "static-quadrupole",
                        "axial_frequency": {"species": "ion", "value": "50 kHz"},
                    }
                ],
            },
            'the axial of field "caps" on ion',
            2e-5,
        ),
        (
            {"cloud": [points("pair", "ion", [[0, 0, 0], [0, 0, 1e-6]])], "field": [RODS]},
            "the closest approach of two charges",
            5.0 * PERIOD / pair_rate(1e-6),
        ),
        ({"cloud": ONE}, "the time between records: nothing moves faster", None),
        (
            {"cloud": ONE, "field": [MAGNET], "stepping": {"step": "3 ns"}},
            "the scenario says so",
            3e-7,
        ),
    ],
)
def test_a_run_says_what_decided_its_step(
    tmp_path: Path, sections: dict[str, Any], told: str, period: float | None
) -> None:
    """For every kind of motion when it is the fastest, with the step that follows."""
    table = {
        "title": "a check",
        "duration": "1 ms",
        "species": {"ion": species(ION_MASS)},
        "record": {"every": "0.1 ms"},
        **sections,
    }
    path = tmp_path / "scenario.toml"
    path.write_text(toml_file(table))
    watching = _Watching()
    run(read_scenario(path), tmp_path / "run", watching)
    assert watching.choice.because.startswith(told)
    expected = 1e-5 if period is None else period / 100.0
    assert expected == pytest.approx(watching.choice.step, rel=1e-9, abs=0.0)
    assert watching.longest <= watching.choice.step * (1.0 + 1e-8)


def test_the_plasma_decides_where_it_is_fastest(tmp_path: Path) -> None:
    """A dense cloud of soft macro-charges, of which no pair is fast by itself."""
    ball = {
        "name": "ball",
        "species": "ion",
        "count": 300,
        "weight": 1000,
        "shape": {"kind": "ball", "radius": "1 mm"},
    }
    table = {
        "title": "a check",
        "duration": "1 ms",
        "species": {"ion": species(100.0 * ATOMIC_MASS)},
        "cloud": [ball],
        "coulomb": {"softening": "1 mm"},
    }
    path = tmp_path / "scenario.toml"
    path.write_text(toml_file(table))
    watching = _Watching()
    run(read_scenario(path), tmp_path / "run", watching)
    assert watching.choice.because.startswith("the plasma oscillation (")
