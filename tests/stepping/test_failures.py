"""Motion that cannot be continued stops in words: who, where, when, and what to do."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS, ELECTRON_MASS, PROTON_MASS
from driftwell.coulomb.form import Coulomb
from driftwell.errors import StepError
from driftwell.run import run
from driftwell.scenario.read import read_scenario
from driftwell.stepping import burst
from driftwell.stepping.loop import TimeLoop
from tests.cases import detector, field, wall
from tests.moving import DIRECT, OFF, ions, loop, to_end
from tests.running import Unwatched
from tests.scenario.good_scenarios import toml_file


def told(moving: TimeLoop) -> str:
    """What the failing loop says."""
    with pytest.raises(StepError) as fault:
        to_end(moving)
    return str(fault.value)


def test_a_charge_that_has_run_away_is_named() -> None:
    """Beyond the extent, measured from the origin in every direction."""
    moving = loop(
        ions([[0, 0, 0], [0.5, 0, 0], [0, 0, 0]], [[0, 0, 0], [5e5, 0, 0], [0, 0, 0]]),
        2e-6,
        1e-9,
        extent="1 m",
    )
    moving.particles.id[:] = [4, 17, 23]
    text = told(moving)
    assert "charge 17 has run away, at (1.0" in text
    assert " m, 0 m, 0 m), beyond stepping.extent" in text
    assert "put a wall, or set a larger extent" in text
    assert 1e-6 == pytest.approx(moving.time, abs=burst.LOOK_EVERY * 1e-9)
    to_end(loop(ions([0.5, 0, 0], [-7e5, 0, 0]), 2e-6, 1e-9, extent="1 m"))


def test_a_run_away_is_seen_at_the_next_mark_at_the_latest() -> None:
    """However few steps there are."""
    moving = loop(ions([0, 0, 0], [0, 2e6, 0]), 1e-6, 1e-6, extent="1 m")
    assert "after 1 step, at t = 1 us: charge 0 has run away" in told(moving)


def test_a_charge_on_the_axis_of_a_wire_is_no_longer_a_number() -> None:
    """Where the field has no value."""
    wire = field("wire-in-cylinder", wire_radius="10 um", cylinder_radius="10 mm", voltage="100 V")
    moving = loop(ions([[1e-3, 0, 0], [0, 0, 0]]), 1e-6, 1e-8, fields=[wire])
    text = told(moving)
    assert "the position or velocity of charge 1 is no longer a number" in text
    assert "take a shorter step, or put a wall before that point" in text


@pytest.mark.parametrize("bad", [np.nan, np.inf])
@pytest.mark.parametrize("n", [2, 80])
def test_one_bad_number_stops_all(n: int, bad: float) -> None:
    """It would spread by Coulomb's force; it is found within LOOK_EVERY steps or at a mark."""
    start = np.random.default_rng(1).normal(size=(n, 3))
    moving = loop(ions(start), 1e-3, 1e-6, coulomb=DIRECT)
    moving.charges.velocity[1, 0] = bad
    assert "is no longer a number" in told(moving)
    assert moving.steps_done <= burst.LOOK_EVERY


def falling(distance: float, step: float, **keys: object) -> TimeLoop:
    """An electron and a proton at rest at a distance."""
    masses = [ELECTRON_MASS / ATOMIC_MASS, PROTON_MASS / ATOMIC_MASS]
    start = ions([[0, 0, 0], [0, 0, distance]], charge=[-1.0, 1.0], mass=masses)
    return loop(start, 2000 * step, step, coulomb=DIRECT, **keys)


def test_opposite_charges_that_fall_together_are_told() -> None:
    """Before the step is too long for them: their distance is then still followed."""
    moving = falling(1e-6, 1e-12)
    text = told(moving)
    assert "charge 1 falls towards an opposite charge faster than the step can follow" in text
    assert "Take a shorter step, or give coulomb.softening a length" in text
    apart = np.linalg.norm(moving.charges.position[:, 1] - moving.charges.position[:, 0])
    assert 1e-8 < apart < 2e-7
    energy = moving.charges.mass * (moving.charges.velocity**2).sum(axis=0)
    momenta = moving.charges.mass * moving.charges.velocity
    assert np.abs(momenta.sum()) <= 1e-12 * np.abs(momenta).max()
    assert energy[0] > 100.0 * energy[1]


def test_a_longer_coulomb_step_tells_sooner() -> None:
    """The rate is held against the time between Coulomb kicks, not against the step.

    The rate goes with r^(-3/2), so that a step eight times as long reaches it at four times the
    distance; they are seen up to a step later, when they have fallen by up to 0.4 of it.
    """

    def apart(moving: TimeLoop) -> float:
        told(moving)
        x = moving.charges.position
        return float(np.linalg.norm(x[:, 1] - x[:, 0]))

    often, seldom = apart(falling(1e-6, 1e-13)), apart(falling(1e-6, 1e-13, coulomb_every=8))
    assert 4.0 * 0.6 < seldom / often < 4.0 / 0.6


def test_like_charges_never_collapse() -> None:
    """Nor opposite ones with softening, or without Coulomb's force."""
    pair = [[0, 0, 0], [0, 0, 1e-9]]
    to_end(loop(ions(pair), 1e-9, 1e-10, coulomb=DIRECT))
    for coulomb in (Coulomb(method="direct", softening="1 um"), OFF):
        to_end(loop(ions(pair, charge=[1.0, -1.0]), 1e-9, 1e-10, coulomb=coulomb))


def test_a_pair_too_close_for_the_first_step_is_told_before_it() -> None:
    """The step would throw them apart, and nobody would know why."""
    pair = ions([[0, 0, 0], [0, 0, 1e-9]], charge=[1.0, -1.0])
    moving = loop(pair, 1e-9, 1e-10, coulomb=DIRECT)
    text = told(moving)
    assert "after 0 steps, at t = 0 s: charge 1 falls towards an opposite charge" in text
    assert 1e-9 == moving.charges.position[2, 1]


def test_a_step_that_meets_too_many_surfaces_is_told() -> None:
    """A thousand bounces in one step fill the buffer with passages: the step is far too long."""
    mirrors = [
        wall("plane", name=f"{z}", at=["0", "0", f"{z} um"], effect="reflect") for z in (-1, 1)
    ]
    screens = [detector("plane", name=f"{k}", at=["0", "0", f"{k / 50} um"]) for k in range(40)]
    n = 2000
    moving = loop(ions(np.zeros((n, 3)), [0, 0, 1e3]), 1e-6, 1e-6, walls=mirrors, detectors=screens)
    text = told(moving)
    assert "a single step met too many surfaces; take a shorter step" in text


def test_a_failed_run_keeps_what_was_recorded_and_says_why(tmp_path: Path) -> None:
    """Outcome failed, exit code 5, the records up to then."""
    table = {
        "title": "a check",
        "duration": "1 us",
        "cloud": [
            {
                "name": "one",
                "species": "electron",
                "shape": {
                    "kind": "points",
                    "positions": [["0 m", "0 m", "0 m"]],
                    "velocities": [["1e6 m/s", "0 m/s", "0 m/s"]],
                },
            }
        ],
        "stepping": {"step": "1 ns", "extent": "0.5 m"},
        "record": {"every": "0.1 us"},
    }
    path = tmp_path / "scenario.toml"
    path.write_text(toml_file(table))
    result = run(read_scenario(path), tmp_path / "run", Unwatched())
    assert ("failed", 5) == (result.outcome.word, result.outcome.exit_code)
    assert result.outcome.sentence.startswith("The motion could not be continued after 5")
    assert "charge 0 has run away, at (500 mm, 0 m, 0 m)" in result.outcome.sentence
    assert 4e-7 == pytest.approx(result.ledger.time, rel=1e-9, abs=0.0)
