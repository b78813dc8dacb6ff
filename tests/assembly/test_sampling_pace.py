"""How finely motion is sampled where the scenario does not say it: the fastest motion decides."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.assembly import Assembly, assembled
from driftwell.constants import ATOMIC_MASS, ELECTRIC_CONSTANT, ELEMENTARY_CHARGE
from driftwell.scenario.read import read_scenario
from driftwell.stepping.schedule import TRACE
from tests.grid_files import nodes, write_csv
from tests.running import carried_out, points, quantity, species
from tests.scenario.good_scenarios import toml_file

MASS = 40.0 * ATOMIC_MASS
DEEP, NARROW = 1.0, 0.3
"""V and mm, of a well like a Gaussian in the middle of a map of 10 mm."""
FREQUENCY = math.sqrt(ELEMENTARY_CHARGE * DEEP / MASS) / (NARROW * 1e-3) / (2.0 * math.pi)
"""Hz, of an ion in the middle of it: the potential is curved by V/w^2 on all axes."""


def well(folder: Path) -> dict[str, Any]:
    """A field from a file, in which next to nothing of the map is well."""
    place = nodes(r=np.arange(0.0, 5.05, 0.1), z=np.arange(-5.0, 5.05, 0.1))
    square = place["r"] ** 2 + place["z"] ** 2
    write_csv(folder / "well.csv", {**place, "V": -DEEP * np.exp(-0.5 * square / NARROW**2)})
    return {"name": "well", "kind": "potential-map", "path": "well.csv"}


def one(at: float = 1e-6) -> dict[str, Any]:
    """An ion, so many m off the middle along x."""
    return points("load", "ion", [[at, 0.0, 0.0]])


def ask(kind: str, **keys: Any) -> dict[str, Any]:
    return {"name": "asked", "ask": kind, "of": "load", "axis": "x", **keys}


def parts(folder: Path, duration: float, **sections: Any) -> Assembly:
    path = folder / "sampled.toml"
    table = {"title": "a check", "duration": quantity(duration, "s"), "species": ION, **sections}
    path.write_text(toml_file(table))
    return assembled(read_scenario(path))


ION = {"ion": species(MASS)}


def between(found: Assembly) -> float:
    """s between samples."""
    schedule = found.schedule
    times = schedule.time[(schedule.flags & TRACE) != 0]
    return float(times[1] - times[0])


@pytest.mark.parametrize(
    "question",
    [
        ask("frequency"),
        ask("tune", period="1 us", charges=1),
        ask("tune-depression", without="1 MHz", charges=1),
        ask("frequency-shift", reference="1 MHz"),
        ask("spectrum-peak"),
    ],
    ids=lambda each: each["ask"],
)
def test_a_well_in_a_small_part_of_a_map_is_sampled_20_times_a_period(
    tmp_path: Path, question: dict[str, Any]
) -> None:
    """Nine tenths of the map are flat; what counts is where the charges are."""
    found = parts(tmp_path, 1e-4, cloud=[one()], field=[well(tmp_path)], question=[question])
    assert 0.05 / FREQUENCY == pytest.approx(between(found), rel=1e-3, abs=0.0)
    assert 2.0 * math.pi * FREQUENCY == pytest.approx(found.motion.rate, rel=1e-3, abs=0.0)
    assert 0.01 / FREQUENCY == pytest.approx(found.choice.step, rel=1e-3, abs=0.0)


def test_the_tune_in_such_a_well_is_found_without_a_word_on_sampling(tmp_path: Path) -> None:
    """A single ion swings as without others; the file's spline is right to 4e-4 of a curvature."""
    alone = ask("tune-depression", without=quantity(FREQUENCY, "Hz"), charges=1)
    run = carried_out(
        tmp_path, 5e-5, species=ION, cloud=[one()], field=[well(tmp_path)], question=[alone]
    )
    assert 1.0 == pytest.approx(run.answers[0].value, rel=1e-3, abs=0.0)


def test_charges_outside_a_map_or_none_at_all_leave_what_is_usual(tmp_path: Path) -> None:
    """A source bears charges later; nothing is known of where they will be."""
    source = {
        "name": "load",
        "species": "ion",
        "current": "1 nA",
        "weight": 10,
        "emitter": {"kind": "disc", "radius": "1 mm", "centre": ["0 m", "0 m", "-4 mm"]},
    }
    held = parts(tmp_path, 1e-5, cloud=[one()], field=[well(tmp_path)])
    born = parts(tmp_path, 1e-5, source=[source], field=[well(tmp_path)])
    assert 0.0 < born.motion.rate < 0.2 * held.motion.rate


def test_a_dense_cloud_in_a_weak_field_is_sampled_by_its_plasma_frequency(tmp_path: Path) -> None:
    """omega_p^2 = Q/(V eps0) q/m of the even ball of its charge and size; summed, or not."""
    weak = {
        "name": "weak",
        "kind": "static-quadrupole",
        "axial_frequency": {"species": "ion", "value": "1 kHz"},
    }
    ball = {
        "name": "load",
        "species": "ion",
        "count": 200,
        "weight": 1000,
        "shape": {"kind": "ball", "radius": "0.2 mm"},
    }
    given = {"cloud": [ball], "field": [weak], "question": [ask("frequency")]}
    sizes = (found := parts(tmp_path, 1e-3, **given)).particles.position.std(axis=1)
    density = 2e5 * ELEMENTARY_CHARGE / (4.0 / 3.0 * math.pi * math.prod(5.0**0.5 * sizes))
    rate = math.sqrt(density * ELEMENTARY_CHARGE / (MASS * ELECTRIC_CONSTANT))
    assert 2.0 * math.pi / rate / 20.0 == pytest.approx(between(found), rel=1e-3, abs=0.0)
    alone = parts(tmp_path, 1e-3, **given, coulomb={"method": "off"})
    assert 1e-5 == pytest.approx(between(alone), rel=1e-9, abs=0.0)  # a hundred in the run
