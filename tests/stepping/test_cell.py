"""In a cell what leaves at one end comes in at the other, and the ledger knows of it."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from driftwell.kernels.status import COLLAPSE
from driftwell.ledger.doubts import doubts
from driftwell.particles.state import Particles
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.stepping.loop import TimeLoop
from tests.cases import detector, field, wall
from tests.moving import OFF, accounts, always, events, ions, loop, to_end
from tests.running import carried_out, species, track

CELL = Cell(axis="z", length="8 mm", start="-3 mm")
SOFT = Coulomb(method="direct", softening="300 um")


def beam(n: int = 40, particles: Particles | None = None, **keys: Any) -> TimeLoop:
    """Macro-charges that go round the cell several times, in both directions, pushed by fields."""
    random = np.random.default_rng(1)
    place = np.array([1e-3, 1e-3, 8e-3]) * (random.random((n, 3)) - 0.5) + [0, 0, 1e-3]
    speed = np.array([0.0, 0.0, 3e4]) + 300.0 * random.normal(size=(n, 3))
    speed[::3, 2] *= -1.0
    options: dict[str, Any] = {
        "fields": [
            field("uniform-electric", strength="2 kV/m"),
            field(
                "electric-multipole", order=2, radius="4 mm", voltage="20 V", centre=["0 mm"] * 3
            ),
        ],
        "coulomb": SOFT,
        "records": 1e-7 * np.arange(1, 10),
        "cell": CELL,
    }
    began = ions(place, speed, weight=3e3) if particles is None else particles
    return loop(began, 1e-6, 2.5e-9, **{**options, **keys})


def test_a_charge_that_leaves_comes_in_at_the_other_end() -> None:
    """Forwards and backwards, by whole periods, at its own speed, and stays in the cell."""
    particles = ions([[0, 0, 1e-3], [1e-4, 0, 1e-3]], [[0, 0, 1e5], [0, 0, -2.5e5]])
    moving = to_end(loop(particles, 1e-7, 1e-9, cell=CELL))
    found = moving.particles.position[2]
    gamma = np.sqrt(1.0 + (np.array([1e5, 2.5e5]) / 299792458.0) ** 2)
    way = np.array([1e5, -2.5e5]) * 1e-7 / gamma + 1e-3
    expected = (way + 3e-3) % 8e-3 - 3e-3
    assert pytest.approx(expected, rel=0.0, abs=1e-15) == found


@pytest.mark.parametrize("scheme", ["kick-drift-kick", "midpoint-rotation"])
def test_the_ledger_closes_over_many_turns(scheme: str) -> None:
    """Energy in the fields that jumps, angular momentum that jumps, torques across the ends."""
    rows = accounts(beam(scheme=scheme))
    last = rows[-1]
    assert abs(last.energy_cell) > 1e-3 * last.kinetic
    assert np.abs(last.angular_cell[:2]).min() > 0.0
    for row in rows:
        assert abs(row.momentum_residual) < 1e-13
        assert abs(row.angular_residual) < 1e-13
        assert abs(row.third_law_residual) < 1e-13
        assert abs(row.energy_residual) < 1e-7
    assert not doubts(last)


@pytest.mark.parametrize("tree", [False, True])
def test_neither_threads_nor_pauses_nor_a_resume_change_a_bit(tree: bool) -> None:
    """Of a beam that goes round, summed by the tree or directly, detectors in its way."""
    coulomb = Coulomb(method="tree", accuracy=1e-3, softening="300 um") if tree else SOFT
    n, met = 600 if not tree else 100, detector("plane", at=["0 mm", "0 mm", "0 mm"])

    def made(threads: int, **keys: Any) -> TimeLoop:
        return beam(n, coulomb=coulomb, detectors=[met], threads=threads, **keys)

    whole = to_end(made(1))
    calls = 0

    def once() -> bool:
        nonlocal calls
        calls += 1
        return calls < 3

    part = made(2)
    part._budget = 7
    assert not part.to_mark(len(part.schedule.steps), once)
    part.take_events()
    state = {**particles_state(part.particles), **part.state()}
    state = {name: np.array(each) for name, each in state.items()}
    again = made(2, particles=particles_of(state), state=state)
    assert 0 < again.steps_done < whole.steps_done
    to_end(again)
    for name in ("position", "velocity"):
        left, right = getattr(whole.particles, name), getattr(again.particles, name)
        assert left.tobytes() == right.tobytes()
    assert whole.state()["accounts/total"].tobytes() == again.state()["accounts/total"].tobytes()


@pytest.mark.parametrize("at", ["-3 mm", "0.7 mm", "4.9999 mm", "5 mm"])
def test_a_detector_sees_each_turn_once_wherever_it_stands(at: str) -> None:
    """Inside the cell, a hair before its end, and at either end."""
    seen = detector("plane", at=["0 mm", "0 mm", at])
    particles = ions([[0, 0, 1e-3], [1e-4, 0, 1.1e-3]], [[0, 0, 1e5], [0, 0, -1e5]])
    moving = to_end(loop(particles, 4e-7, 1.3e-9, cell=CELL, detectors=[seen]))
    found = events(moving)
    assert 10 == len(found.time)  # 40 mm are five turns
    place = float(at.removesuffix(" mm")) * 1e-3
    assert pytest.approx(np.full(10, place), rel=0.0, abs=1e-12) == found.position[:, 2]
    for charge in (0, 1):
        turns = np.diff(found.time[found.id == charge])
        assert pytest.approx(np.full(4, 8e-8), rel=1e-6, abs=0.0) == turns


def test_charges_lost_on_the_way_round_take_their_energy_along() -> None:
    """One at a time and several in a step, against a tube; the ledger closes as tightly."""
    bore = wall("cylinder", radius="0.65 mm")
    moving = beam(60, walls=[bore])
    rows = accounts(moving)
    assert 5 < rows[-1].count_lost / 3e3 < 60
    assert abs(rows[-1].energy_residual) < 1e-6
    assert abs(rows[-1].angular_residual) < 1e-13
    assert abs(rows[-1].count_residual) < 1e-13


def test_opposite_charges_that_fall_together_across_the_ends_are_noticed() -> None:
    """As they are within the cell."""
    place = np.array([[0, 0, -3e-3 + 1e-7], [0, 0, 5e-3 - 1e-7]])
    particles = ions(place, charge=[1.0, -1.0])
    moving = loop(particles, 1e-6, 5e-9, coulomb=Coulomb(method="direct"), cell=CELL)
    assert COLLAPSE == moving._burst(1, 1)
    place[0, 2] += 1e-3
    apart = ions(place, charge=[1.0, -1.0])
    moving = loop(apart, 1e-6, 5e-9, coulomb=Coulomb(method="direct"), cell=CELL)
    assert COLLAPSE != moving._burst(1, 1)


def test_without_a_sum_over_the_pairs_charges_go_round_all_the_same() -> None:
    """And every step is made."""
    moving = beam(10, coulomb=OFF)
    assert moving.to_mark(len(moving.schedule.steps), always)
    z = moving.particles.position[2]
    assert ((z >= -3e-3) & (z < 5e-3)).all()


def test_a_whole_run_of_an_endless_beam_closes_its_books(tmp_path: Path) -> None:
    """As a scenario states it: recorded within the cell, and nobody is lost at its ends."""
    found = carried_out(
        tmp_path,
        2e-7,
        species={"ion": species(40.0 * ATOMIC_MASS)},
        cloud=[
            {
                "name": "beam",
                "species": "ion",
                "count": 120,
                "weight": 2000.0,
                "shape": {"kind": "box", "size": ["1 mm", "1 mm", "10 mm"]},
                "motion": {"temperature": "300 K", "velocity": ["0 m/s", "0 m/s", "2e5 m/s"]},
            }
        ],
        field=[{"name": "push", "kind": "uniform-electric", "strength": "100 V/m"}],
        cell={"length": "10 mm"},
        coulomb={"softening": "100 um"},
        stepping={"step": "1 ns"},
        record={"every": "20 ns"},
    )
    ledger = found.ledger
    for name in ("momentum", "angular", "charge", "count"):
        assert np.abs(ledger[f"{name}_residual"]).max() < 1e-13, name
    assert np.abs(ledger["energy_residual"]).max() < 1e-9
    assert ledger["energy_cell"][-1] > 0.0
    z = track(found).position[:, :, 2]
    assert (np.abs(z) <= 5e-3).all()
    assert 120 == found.ledger["count"][-1] / 2000.0
