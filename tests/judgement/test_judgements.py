"""Each judgement speaks of a run that has its fault, with figure and limit, and of no other."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

from driftwell.constants import ATOMIC_MASS
from driftwell.judgement import Finding, judged
from tests.running import carried_out, points, species

ION = {"ion": species(40.0 * ATOMIC_MASS)}
WELL = {
    "name": "well",
    "kind": "static-quadrupole",
    "axial_frequency": {"species": "ion", "value": "100 kHz"},
}
OFF = {"method": "off"}
REMEDIES = (
    " = ",
    "stepping.step",
    "seeds",
    "longer",
    "Make",
    "Give",
    "Look",
    "Be sure",
    "Move",
    "`",
)
"""One of these is in every remedy: a key, or what else to do."""


def ball(count: int, radius: str = "0.1 mm", **keys: Any) -> dict[str, Any]:
    """A cloud of ions in a ball."""
    return {
        "name": "load",
        "species": "ion",
        "count": count,
        "shape": {"kind": "ball", "radius": radius},
        **keys,
    }


def ask(kind: str, **keys: Any) -> dict[str, Any]:
    """A question of the cloud."""
    return {"name": "asked", "ask": kind, "of": "load", **keys}


def findings(folder: Path, duration: float, **sections: Any) -> dict[str, Finding]:
    """What is said of a run of ions, by name."""
    found = judged(carried_out(folder, duration, **{"species": ION, **sections}))
    for each in found:
        assert each.words in each.sentence
        assert each.sentence.endswith((".", ")."))
        assert any(word in each.remedy for word in REMEDIES), each.remedy
    return {each.name: each for each in found}


def along(step: str) -> dict[str, Any]:
    """One ion that swings along z, followed with a step."""
    return {
        "cloud": [points("load", "ion", [[0.0, 0.0, 1e-4]])],
        "field": [WELL],
        "coulomb": OFF,
        "stepping": {"step": step},
    }


def test_a_good_run_is_silent(tmp_path: Path) -> None:
    loaded = ball(50, motion={"temperature": "300 K"})
    asked = [ask("rms-size", axis="x"), ask("temperature") | {"name": "heat"}]
    assert {} == findings(tmp_path, 1e-6, cloud=[loaded], question=asked)


def test_a_step_is_held_against_the_fields_fastest_motion(tmp_path: Path) -> None:
    found = findings(tmp_path, 1e-4, **along("1 us"))["step against the fastest motion"]
    assert 10.0 == pytest.approx(found.figure, rel=1e-9, abs=0.0)
    assert 20.0 == found.limit
    assert "axial" in found.words
    assert 'stepping.step = "500 ns"' in found.remedy
    assert {} == findings(tmp_path, 1e-4, **along("200 ns"))


def test_a_dense_cloud_with_a_long_step_is_told_by_its_pairs_and_its_account(
    tmp_path: Path,
) -> None:
    magnet = {"name": "magnet", "kind": "uniform-magnetic", "strength": "2 T"}
    packed = {"cloud": [ball(40, "20 um")], "field": [WELL, magnet]}
    found = findings(tmp_path, 20e-6, **packed, stepping={"step": "100 ns"})
    assert found["account of energy"].grave
    assert found["step against close pairs"].figure > 0.1
    assert {} == findings(tmp_path, 2e-6, **packed, stepping={"step": "1 ns"})


def test_charges_that_stand_for_many_heat_each_other(tmp_path: Path) -> None:
    """Few heavy charges let go at rest: what heat they have is that of their graininess."""
    asked = [ask("temperature")]
    heavy = ball(60, weight=1e5)
    found = findings(tmp_path, 1e-6, cloud=[heavy], question=asked)
    told = found["charges that stand for many"]
    assert told.figure > told.limit
    assert "cloud.load.count = " in told.remedy
    light = ball(60, motion={"temperature": "300 K"})
    assert {} == findings(tmp_path, 1e-6, cloud=[light], question=asked)


def test_a_cloud_thinner_than_its_charges_are_apart_is_told(tmp_path: Path) -> None:
    thin = {"kind": "gaussian", "sigma": ["0.1 mm", "0.1 mm", "1 um"]}
    loaded = ball(100, weight=1e4, shape=thin)
    told = findings(tmp_path, 1e-6, cloud=[loaded])["fineness of the charges' own field"]
    assert 1.0 == told.limit
    assert "cloud.load.count" in told.remedy or "coulomb.softening" in told.remedy
    blunt = findings(tmp_path, 1e-5, cloud=[ball(100)], coulomb={"softening": "0.1 mm"})
    apart = 0.1e-3 / 100.0 ** (1.0 / 3.0)
    told = blunt["softening of single charges"]
    assert 1e-4 / apart == pytest.approx(told.figure, rel=0.15, abs=0.0)  # a draw of 100


def test_charges_that_touch_a_wall_at_once_are_told(tmp_path: Path) -> None:
    bore = {"name": "bore", "kind": "cylinder", "radius": "0.1001 mm"}
    hot = ball(100, motion={"temperature": "1e4 K"})
    lost = {"coulomb": OFF, "stepping": {"step": "1 ns"}, "ending": "all lost"}
    found = findings(tmp_path, 1e-6, cloud=[hot], wall=[bore], **lost)
    told = found["charges lost at once"]
    assert '"bore"' in told.remedy
    assert told.figure > 0.02


FLIGHT = {
    "detector": [{"name": "screen", "kind": "plane", "at": ["0 mm", "0 mm", "2 mm"]}],
    "coulomb": OFF,
}


def test_a_detector_few_charges_reach_is_told_with_the_reason(tmp_path: Path) -> None:
    """In 1 us ions of 1 km/s do not get there; in 4 us all do, and 12 are too few for a width."""
    cloud = ball(12, motion={"velocity": ["0 m/s", "0 m/s", "1 km/s"]})
    late = {"name": "spread", "ask": "arrival-time", "of": "screen", "statistic": "rms"}
    early = findings(tmp_path, 1e-6, cloud=[cloud], question=[late], **FLIGHT)["starved detector"]
    assert (0.0, 30.0) == (early.figure, early.limit)
    assert 'set duration = "2 us"' in early.remedy
    found = findings(tmp_path, 4e-6, cloud=[cloud], question=[late], **FLIGHT)["starved detector"]
    assert 12.0 == found.figure
    assert "seeds" in found.remedy
    mean = {"name": "mean", "ask": "arrival-time", "of": "screen"}
    assert {} == findings(tmp_path, 4e-6, cloud=[cloud], question=[mean], **FLIGHT)


def test_a_part_that_few_charges_decide_is_told(tmp_path: Path) -> None:
    rows = [[0.0, 0.0, 0.0]] * 50
    speeds = [[0.0, 0.0, 1e3 if k else -1e3] for k in range(50)]
    places = [[1e-5 * k, 0.0, 0.0] for k, _ in enumerate(rows)]
    cloud = points("load", "ion", places, speeds)
    part = {"name": "part", "ask": "fraction-through", "of": "screen", "cloud": "load"}
    found = findings(tmp_path, 4e-6, cloud=[cloud], question=[part], **FLIGHT)["rare outcome"]
    assert (1.0, 10.0) == (found.figure, found.limit)
    assert "that did not" in found.words


def test_a_window_in_which_the_value_changes_is_told(tmp_path: Path) -> None:
    """Of ions set free together the fast ones come first, those of one speed in any order."""
    asked = {"name": "energy", "ask": "arrival-energy", "of": "screen", "over": ["1 us", "4 us"]}
    hot = ball(
        100,
        motion={"temperature": ["0 K", "0 K", "5000 K"], "velocity": ["0 m/s", "0 m/s", "1 km/s"]},
    )
    told = findings(tmp_path, 4e-6, cloud=[hot], question=[asked], **FLIGHT)["window not settled"]
    assert told.figure > told.limit == 4.0
    assert 'from "4 us" to "7 us"' in told.remedy
    even = ball(100, motion={"velocity": ["0 m/s", "0 m/s", "1 km/s"]})
    asked["over"] = ["1.9 us", "2.1 us"]
    assert {} == findings(tmp_path, 4e-6, cloud=[even], question=[asked], **FLIGHT)


def test_a_swing_of_all_does_not_hide_that_the_charges_own_energy_has_drifted(
    tmp_path: Path,
) -> None:
    """A packed ball swings 5 mm to and fro: against that motion its open account looks small."""
    magnet = {"name": "magnet", "kind": "uniform-magnetic", "strength": "2 T"}
    shape = {"kind": "ball", "radius": "20 um", "centre": ["0 mm", "0 mm", "5 mm"]}
    swinging = {
        "cloud": [ball(40, shape=shape)],
        "field": [WELL, magnet],
        "record": {"every": "1 us"},
    }
    found = findings(tmp_path, 20e-6, **swinging, stepping={"step": "100 ns"})
    assert "account of energy" not in found
    assert found["drift of the energy"].figure > 0.05
    assert "stepping.step" in found["drift of the energy"].remedy
    assert "drift of the energy" not in findings(
        tmp_path, 5e-6, **swinging, stepping={"step": "2 ns"}
    )


def test_a_line_that_coarse_samples_fold_down_is_told(tmp_path: Path) -> None:
    """100 kHz sampled every 9 us is seen at 11.1 kHz."""
    line = ask("frequency", axis="z", every="9 us")
    found = findings(tmp_path, 2e-3, **along("0.1 us"), question=[line])["trace too coarse"]
    assert 0.9 == pytest.approx(found.figure, rel=1e-9, abs=0.0)
    assert "samples every 9 us" in found.words
    line["every"] = "1 us"
    assert {} == findings(tmp_path, 2e-3, **along("0.1 us"), question=[line])


def test_a_process_that_meets_nobody_is_told(tmp_path: Path) -> None:
    gas = {
        "name": "gas",
        "kind": "gas-collisions",
        "mass": "4 u",
        "pressure": "1e-9 Pa",
        "collision": {"kind": "hard-sphere", "cross_section": "1e-18 m^2"},
    }
    found = findings(tmp_path, 1e-6, cloud=[ball(10)], process=[gas], coulomb=OFF)
    assert "process.gas" in found["process that did nothing"].remedy


def test_images_in_a_tube_of_metal_are_told(tmp_path: Path) -> None:
    bore = {"name": "bore", "kind": "cylinder", "radius": "0.15 mm"}
    heavy = ball(200, weight=100)
    found = findings(tmp_path, 1e-7, cloud=[heavy], wall=[bore])
    assert {"images left out"} == set(found)
    assert '"bore", if it is of metal' in found["images left out"].words
    bore["radius"] = "5 mm"
    assert {} == findings(tmp_path, 1e-7, cloud=[heavy], wall=[bore])


def test_fast_charges_are_told_with_the_key_that_mends_it(tmp_path: Path) -> None:
    """30 keV electrons: beta^2 = 1 - 1/(1 + 30/511)^2."""
    pulse = ball(20, motion={"kinetic_energy": "30 keV"}) | {"species": "electron"}
    plain = {"frame": "laboratory"}
    told = findings(tmp_path, 1e-11, cloud=[pulse], coulomb=plain)["fast charges summed as at rest"]
    gamma = 1.0 + 30.0 / 510.99895
    assert 1.0 - gamma**-2 == pytest.approx(told.figure, rel=1e-3, abs=0.0)
    assert told.told
    assert 'coulomb.frame = "bunch"' in told.remedy
    assert {} == findings(tmp_path, 1e-11, cloud=[pulse])


def test_gas_is_told_of_where_ions_fly_for_seconds(tmp_path: Path) -> None:
    """Capture by nitrogen, k_L = 2 pi e (K alpha/mu)^(1/2), at 1e-6 Pa for 10 s."""
    lone = {"cloud": [points("load", "ion", [[0.0, 0.0, 0.0]])], "coulomb": OFF}
    told = findings(tmp_path, 10.0, **lone)["gas left out"]
    reduced = 40.0 * 28.0 / 68.0 * ATOMIC_MASS
    capture = 2.0 * math.pi * 1.602176634e-19 * math.sqrt(8.9875517862e9 * 1.74e-30 / reduced)
    density = 1e-6 / (1.380649e-23 * 300.0)
    assert 10.0 * density * capture * 56.0 / 68.0 == pytest.approx(told.figure, rel=1e-6, abs=0.0)
    assert {} == findings(tmp_path, 0.1, **lone)
