"""Which axes a scenario has, and what is set along them."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from driftwell.scenario.read import read_scenario
from driftwell.study.convergence.axes import AXES, Axis, Judged, axes_of
from driftwell.study.points import replica_seeds
from tests.scenario.good_scenarios import toml_file

QUESTION = {"name": "size", "ask": "rms-size", "of": "load", "axis": "x"}
BALL = {"kind": "ball", "radius": "1 mm"}
POINTS = {"kind": "points", "positions": [["0 m", "0 m", "0 m"], ["1 mm", "0 m", "0 m"]]}
RING = {
    "name": "ring",
    "voltage": "1 V",
    "shape": [{"kind": "sphere", "radius": "3 mm", "centre": ["0 m", "0 m", "0 m"]}],
}


def cloud(shape: dict[str, Any] = BALL, **keys: Any) -> dict[str, Any]:
    return {"name": "load", "species": "proton", "shape": shape, **keys}


def found(
    folder: Path,
    load: dict[str, Any],
    method: str = "direct",
    charges: int = 100,
    replicas: int = 3,
    **sections: Any,
) -> tuple[dict[str, Axis], dict[str, str]]:
    """The axes of a scenario with this cloud, by name, and why there are no others."""
    table = {"title": "t", "duration": "1 us", "seed": 5, "question": [QUESTION], "cloud": [load]}
    path = folder / "scenario.toml"
    path.write_text(toml_file({**table, **sections}))
    loaded = read_scenario(path)
    judged = Judged(loaded, 1e-8, 0.9e-8, method, charges)
    axes, without = axes_of(judged, AXES, replicas)
    for axis in axes:
        for level in axis.levels:
            read_scenario(path, level.settings)
    return {axis.name: axis for axis in axes}, without


def settings(axis: Axis) -> list[tuple[str, ...]]:
    return [level.settings for level in axis.levels]


def test_a_step_chosen_by_itself_is_fixed_and_divided(tmp_path: Path) -> None:
    axes, without = found(tmp_path, cloud(count=100))
    assert [("stepping.step=4.5e-09 s",), ("stepping.step=2.25e-09 s",)] == settings(axes["step"])
    assert [2.0, 4.0] == [level.cost for level in axes["step"].levels]
    fixed, seeds = "stepping.step=1e-08 s", replica_seeds(5, 3)
    assert [(fixed, f"seed={seeds[1]}"), (fixed, f"seed={seeds[2]}")] == settings(axes["seeds"])
    assert {"coulomb", "field_map", "weight"} == without.keys()


def test_listed_charges_have_no_seeds_and_real_ones_no_weight(tmp_path: Path) -> None:
    axes, without = found(tmp_path, cloud(POINTS), stepping={"step": "10 ns"})
    assert ["step"] == list(axes)
    assert "nothing is drawn at random" == without["seeds"]
    assert "every charge is a real one" == without["weight"]
    axes, _ = found(tmp_path, cloud(POINTS, motion={"temperature": "10 K"}))
    assert "seeds" in axes


def test_a_process_or_noise_makes_chance_though_charges_are_listed(tmp_path: Path) -> None:
    noise = {"kind": "noise", "density": "1e-9 V^2/m^2/Hz", "lowest": "1 MHz", "highest": "9 MHz"}
    field = {"name": "stray", "kind": "uniform-electric", "strength": noise}
    axes, _ = found(tmp_path, cloud(POINTS), field=[field | {"along": [1.0, 0.0, 0.0]}])
    assert "seeds" in axes


@pytest.mark.parametrize(
    ("charges", "line", "words"),
    [
        (3000, ("coulomb.method=direct",), "all pairs summed directly"),
        (
            10**6,
            ("coulomb.accuracy=1e-05", "coulomb.method=tree"),
            "the tree to 1e-05 of the force",
        ),
    ],
)
def test_the_tree_is_judged_by_the_direct_sum_where_that_is_affordable(
    tmp_path: Path, charges: int, line: tuple[str, ...], words: str
) -> None:
    step = {"step": "10 ns"}
    axes, _ = found(
        tmp_path, cloud(count=100), "tree", charges, coulomb={"method": "tree"}, stepping=step
    )
    assert [line] == settings(axes["coulomb"])
    assert words == axes["coulomb"].words
    assert 1.0 < axes["coulomb"].levels[0].cost < 9.0


def test_pairs_in_mixed_precision_are_judged_by_double(tmp_path: Path) -> None:
    coulomb = {"method": "tree", "precision": "mixed", "accuracy": 1e-6}
    step = {"step": "10 ns"}
    axes, _ = found(tmp_path, cloud(count=9), "tree", 10**6, coulomb=coulomb, stepping=step)
    line = ("coulomb.accuracy=1e-07", "coulomb.method=tree", "coulomb.precision=double")
    assert [line] == settings(axes["coulomb"])
    coulomb = {"method": "direct", "precision": "mixed"}
    axes, _ = found(tmp_path, cloud(count=9), "direct", coulomb=coulomb, stepping=step)
    assert [("coulomb.precision=double",)] == settings(axes["coulomb"])


def test_a_sum_that_the_run_chose_by_itself_is_kept_along_other_axes(tmp_path: Path) -> None:
    axes, _ = found(tmp_path, cloud(count=100), "tree", 5000, stepping={"step": "10 ns"})
    assert ("stepping.step=4.5e-09 s", "coulomb.method=tree") == settings(axes["step"])[0]
    assert ("coulomb.method=tree", "coulomb.method=direct") == settings(axes["coulomb"])[0]


def test_solved_fields_and_images_on_triangles_are_refined_together(tmp_path: Path) -> None:
    away = {"kind": "ball", "radius": "1 mm", "centre": ["0 m", "0 m", "10 mm"]}
    axes, _ = found(
        tmp_path,
        cloud(away, count=9),
        electrode=[RING],
        electrodes={"geometry": "spatial", "field_accuracy": 1e-3},
        images={"kind": "electrodes", "panels": 300},
        stepping={"step": "10 ns"},
    )
    assert [("electrodes.field_accuracy=0.00025", "images.panels=600")] == settings(
        axes["field_map"]
    )


@pytest.mark.parametrize(
    ("keys", "changed", "left"),
    [
        ({"count": 100, "weight": 50.0}, ("count=200", "weight=25.0"), 0.5),
        ({"count": 100, "total_charge": "1 pC"}, ("count=200",), 0.5),
        ({"weight": 1e5, "total_charge": "1 pC"}, ("weight=50000.0",), 0.5),
        ({"count": 100, "weight": 1.5}, ("count=150", "weight=1.0"), 0.0),
    ],
)
def test_macro_charges_become_more_of_less_weight_at_the_same_charge(
    tmp_path: Path, keys: dict[str, Any], changed: tuple[str, ...], left: float
) -> None:
    axes, _ = found(tmp_path, cloud(**keys), stepping={"step": "10 ns"})
    lines = tuple(f"cloud.load.{each}" for each in changed)
    own, other = settings(axes["weight"])
    assert lines == own
    assert (*lines, f"seed={replica_seeds(5, 2)[1]}") == other
    assert left == axes["weight"].left


def test_a_source_of_macro_charges_is_refined_as_well(tmp_path: Path) -> None:
    source = {
        "name": "gun tip",
        "species": "electron",
        "emitter": {"kind": "disc", "radius": "1 mm"},
        "current": "1 uA",
        "weight": 400.0,
        "emission_temperature": "1300 K",
    }
    axes, _ = found(tmp_path, cloud(POINTS), source=[source], stepping={"step": "10 ns"})
    assert ('source."gun tip".weight=200.0',) == settings(axes["weight"])[0]


def test_macro_charges_that_are_listed_cannot_be_made_lighter(tmp_path: Path) -> None:
    _, without = found(tmp_path, cloud(POINTS, weight=10.0), stepping={"step": "10 ns"})
    assert '"load": the number of macro-charges is fixed, or cannot be raised' == without["weight"]


def test_with_many_seeds_the_first_finer_runs_are_repeated_too(tmp_path: Path) -> None:
    seeds = replica_seeds(5, 8)
    axes, _ = found(tmp_path, cloud(count=100, weight=9.0), replicas=8)
    half = axes["step"].levels[0].settings
    more = [(*half, f"seed={seeds[1]}"), (*half, f"seed={seeds[2]}")]
    assert more == settings(axes["step"])[2:]
    assert [1, 1, 2, 3] == [level.replica for level in axes["step"].levels]
    assert [1, 2, 3, 4] == [level.replica for level in axes["weight"].levels]
    assert 7 == len(axes["seeds"].levels)
