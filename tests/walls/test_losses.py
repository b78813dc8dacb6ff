"""What a run keeps of lost charges, and charges that begin where they cannot be."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE, SPEED_OF_LIGHT
from driftwell.errors import ScenarioError
from driftwell.record.reader import Run
from driftwell.stepping.losses import MANY_LOST
from tests.running import carried_out, points, species, vector

MASS = 100.0 * ATOMIC_MASS


def flight(folder: Path, extent: str = "1 km", **sections: Any) -> Run:
    """A run of free charges for 1 us in steps of 13 ns."""
    return carried_out(
        folder,
        1e-6,
        species={"ion": species(MASS)},
        coulomb={"method": "off"},
        stepping={"step": "13 ns", "extent": extent},
        **sections,
    )


def test_every_loss_is_kept_with_place_time_wall_and_energy(tmp_path: Path) -> None:
    """Where, when, on what, with what energy; in order of time, weights and ids beside."""
    found = flight(
        tmp_path,
        cloud=[
            {**points("slow", "ion", [[0, 0, 0], [0, 0, 1e-3]], [[0, 0, 4e3]] * 2), "weight": 7.0},
            points("fast", "ion", [[0, 0, 0], [0, 0, 0]], [[5e6, 0, 0], [0, 0, 1.0]]),
        ],
        wall=[
            {"name": "bore", "kind": "cylinder", "radius": "2 mm"},
            {"name": "end", "kind": "plane", "at": ["0 mm", "0 mm", "3 mm"]},
        ],
    )
    losses = found.losses()
    assert [2, 1, 0] == list(losses["id"])
    assert [1, 0, 0] == list(losses["cloud"])
    assert ["bore", "end", "end"] == [found.header.walls[k] for k in losses["wall"]]
    assert [1.0, 7.0, 7.0] == list(losses["weight"])
    speeds = np.array([5e6, 4e3, 4e3])
    gamma = 1.0 / np.sqrt(1.0 - (speeds / SPEED_OF_LIGHT) ** 2)
    expected = np.array([2e-3, 2e-3, 3e-3]) / speeds
    assert expected == pytest.approx(losses["time"], rel=1e-12, abs=0.0)
    places = [[2e-3, 0, 0], [0, 0, 3e-3], [0, 0, 3e-3]]
    assert np.array(places) == pytest.approx(losses["position"], abs=1e-15)
    proper = [[gamma[0] * 5e6, 0, 0], [0, 0, gamma[1] * 4e3], [0, 0, gamma[2] * 4e3]]
    assert np.array(proper) == pytest.approx(losses["velocity"], rel=1e-12, abs=1e-9)
    energy = MASS * (gamma * speeds) ** 2 / (1.0 + gamma)
    assert energy == pytest.approx(losses["kinetic_energy"], rel=1e-12, abs=0.0)
    assert 1 == len(found.snapshot(found.header.duration).id)
    ledger = found.ledger[-1]
    assert 15.0 == pytest.approx(ledger["count_lost"])
    assert 15.0 * ELEMENTARY_CHARGE == pytest.approx(ledger["charge_walls"])
    assert abs(ledger["energy_residual"]) <= 1e-13


@pytest.mark.parametrize("count", [MANY_LOST - 50, 2 * MANY_LOST])
def test_many_charges_lost_in_one_step_leave_with_the_energy_they_have(
    tmp_path: Path, count: int
) -> None:
    """So many that the tree finds their potentials at once, and fewer: as the direct sum has it.

    Half of them hit a plane within one step, with more energy in their repulsion than in their
    motion.
    """
    random = np.random.default_rng(1)
    places = random.normal(0.0, 5e-4, (2 * count, 3))
    places[::2, 2] = -random.uniform(0.0, 5e-6, count)
    places[1::2, 2] -= 5e-3
    speeds = np.tile([0.0, 0.0, 1e3], (2 * count, 1))
    walls, residual = {}, {}
    for method in ("direct", "tree"):
        found = carried_out(
            tmp_path,
            2e-8,
            species={"ion": species(MASS)},
            coulomb={"method": method, "accuracy": 1e-6, "softening": "50 um"},
            stepping={"step": "10 ns"},
            cloud=[{**points("sheet", "ion", places, speeds), "weight": 3e6 / count}],
            wall=[{"name": "plate", "kind": "plane", "at": ["0 mm", "0 mm", "0 mm"]}],
        )
        lost = found.losses()["time"]
        assert lost.size > 0.98 * count
        assert (lost < 1e-8).sum() > 0.98 * lost.size
        ledger = found.ledger[-1]
        walls[method] = ledger["energy_walls"]
        residual[method] = ledger["energy_residual"]
    moving = 0.5 * MASS * 1e6 * 3e6
    assert walls["direct"] > 5.0 * moving
    assert walls["direct"] == pytest.approx(walls["tree"], rel=1e-6, abs=0.0)
    assert abs(residual["direct"]) <= 1e-4
    assert residual["direct"] == pytest.approx(residual["tree"], abs=1e-6)


def test_the_last_charge_lost_ends_the_run(tmp_path: Path) -> None:
    """As all lost, at the next record, which says so."""
    with pytest.raises(AssertionError, match="Every charge was lost by t = 500 ns"):
        flight(
            tmp_path,
            cloud=[points("one", "ion", [0, 0, 0], [0, 0, 1e4])],
            wall=[{"name": "end", "kind": "plane", "at": ["0 mm", "0 mm", "3 mm"]}],
            record={"every": "0.5 us"},
        )


@pytest.mark.parametrize(
    "shape",
    [
        {"kind": "sphere", "radius": "2 mm"},
        {"kind": "cylinder", "radius": "2 mm"},
        {"kind": "box", "size": ["4 mm", "4 mm", "4 mm"]},
    ],
    ids=lambda shape: shape["kind"],
)
@pytest.mark.parametrize("place", [2e-3, 2.1e-3])
def test_charges_that_begin_outside_a_closed_wall_are_refused(
    tmp_path: Path, shape: dict[str, Any], place: float
) -> None:
    """Or upon it: with how many of them, where the first is, and what to do."""
    with pytest.raises(ScenarioError) as told:
        flight(
            tmp_path,
            cloud=[points("load", "ion", [[0, 0, 0], [place, 0, 0], [0, -place, 0]])],
            wall=[{"name": "chamber", "centre": vector([0, 0, 0], "m"), **shape}],
        )
    text = str(told.value)
    assert text.startswith(
        '[[cloud]] "load": 2 of 3 charges do not begin inside the wall "chamber"'
    )
    assert f"the first is at ({place:.6g}, 0, 0) m." in text
    assert "Make the cloud smaller, move it, or enlarge the wall." in text
    assert not list(tmp_path.glob("run*"))


def test_an_open_wall_may_be_begun_on_either_side(tmp_path: Path) -> None:
    """A plane and a tube of a length enclose nothing."""
    found = flight(
        tmp_path,
        cloud=[points("load", "ion", [[0, 0, 0], [3e-3, 0, 0], [0, 0, 9e-3]])],
        wall=[
            {"name": "tube", "kind": "cylinder", "radius": "2 mm", "length": "5 mm"},
            {"name": "screen", "kind": "plane", "at": ["0 mm", "0 mm", "4 mm"]},
        ],
    )
    assert 0 == len(found.losses())
    assert 3 == len(found.snapshot(1e-6).id)


def test_a_charge_lost_far_out_does_not_count_as_run_away(tmp_path: Path) -> None:
    """Its step would have ended beyond the extent: it ends on the wall instead."""
    found = flight(
        tmp_path,
        extent="0.1 m",
        cloud=[points("two", "ion", [[0, 0, 0], [0, 0, 0]], [[0, 0, 1e7], [0, 0, 1.0]])],
        wall=[{"name": "end", "kind": "plane", "at": ["0 mm", "0 mm", "95 mm"]}],
        record={"every": "0.1 us"},
    )
    assert [0] == list(found.losses()["id"])
    assert math.isfinite(found.ledger["energy_residual"][-1])
